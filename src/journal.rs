//! The journal: SQLite in the state directory.
