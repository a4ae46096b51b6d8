//! The commands, one file each, and their arguments.

pub mod arguments;
pub mod decode;
pub mod rehearse;
pub mod run;
pub mod situation;
pub mod watch;
