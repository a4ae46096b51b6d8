//! Picture to text: the brief, JSON, CSV. Reads the Picture, computes nothing.

pub mod brief;
pub mod json;
pub mod points;
pub mod words;
