//! The watched folder: which files are complete, reading them, and taking them in.
//!
//! [`completeness`] is the pure rule; [`folder`] looks and reads; [`intake`] is the one way from a
//! file to held reports, for the live watch and for the commands that look once.

pub mod batch;
pub mod completeness;
pub mod content;
pub mod folder;
pub mod intake;
pub mod received;
