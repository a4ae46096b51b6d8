//! Picture to text: brief, JSON, CSV. Reads the Picture, computes nothing.
