//! The watched folder: which files are complete, and reading them.
