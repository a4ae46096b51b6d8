//! The running watch: clock, terminal, encoder, worker and event loop.
//!
//! Threads: the interface, which alone has the terminal; the terminal's input; the signals; the
//! feeder, which looks into the folder; the worker, which alone changes what is held and makes
//! Pictures. They talk by messages, and only the interface draws.

pub mod clock;
pub mod encoder;
pub mod event_loop;
pub mod feeder;
pub mod input;
pub mod terminal;
pub mod worker;

use crate::picture::Picture;
use input::Told;

/// What can happen to the interface; nothing else can.
#[derive(Debug)]
pub enum Message {
    /// The terminal told something.
    Told(Told),
    /// A Picture was made.
    Picture(Box<Picture>),
    /// Something went wrong that the watchkeeper should know.
    Trouble(String),
    /// The system sent a signal of this number.
    Signal(i32),
    /// The terminal is gone.
    Gone,
}
