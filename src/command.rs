//! The commands, one file each.

pub mod decode;
pub mod rehearse;
