//! The one reader of the clock, and a clock for rehearsals that runs faster.

use std::time::{Duration, SystemTime, UNIX_EPOCH};

use crate::instant::Instant;

/// The present, by the system's clock.
pub fn now() -> Instant {
    #[expect(clippy::disallowed_methods, reason = "this is the one reader of the clock")]
    let since = SystemTime::now().duration_since(UNIX_EPOCH).unwrap_or_default();
    Instant::from_unix_s(i64::try_from(since.as_secs()).unwrap_or(0))
}

/// A moment of the steady clock, for measuring how long something took.
pub fn steady() -> std::time::Instant {
    #[expect(clippy::disallowed_methods, reason = "this is the one reader of the clock")]
    let now = std::time::Instant::now();
    now
}

/// Waits; always goes on.
pub fn pause(how_long: Duration) -> bool {
    #[expect(clippy::disallowed_methods, reason = "a rehearsal in real time waits between files")]
    std::thread::sleep(how_long);
    true
}

/// The watch's clock: the system's, or a rehearsal's that began at some moment and runs faster.
#[derive(Clone, Copy, Debug)]
pub struct Clock {
    rehearsed: Option<Rehearsed>,
}

#[derive(Clone, Copy, Debug)]
struct Rehearsed {
    begun: std::time::Instant,
    start: Instant,
    speed: f64,
}

impl Clock {
    /// The system's clock.
    pub const fn system() -> Self {
        Self { rehearsed: None }
    }

    /// A clock that shows `start` now and runs `speed` times as fast.
    pub fn rehearsed(start: Instant, speed: f64) -> Self {
        Self { rehearsed: Some(Rehearsed { begun: steady(), start, speed }) }
    }

    /// What it shows.
    pub fn now(&self) -> Instant {
        self.rehearsed.map_or_else(now, |clock| {
            let elapsed_s = clock.begun.elapsed().as_secs_f64() * clock.speed;
            clock.start.plus_s(crate::quantity::whole_below(elapsed_s))
        })
    }
}
