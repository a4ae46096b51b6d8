//! The running watch: clock, terminal, encoder, worker and event loop.

pub mod clock;
