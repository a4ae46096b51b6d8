//! The running watch: event loop, terminal, worker, clock.
