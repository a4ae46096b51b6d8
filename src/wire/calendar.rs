//! Day-of-month times resolved against the receipt, the last answer remembered.

use crate::instant::Instant;

/// Resolves day, hour and minute; most reports of a file share one time.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Calendar {
    received: Instant,
    last: Option<((u32, u32, u32), Option<Instant>)>,
}

impl Calendar {
    /// A calendar for a file received at a moment.
    pub(crate) const fn new(received: Instant) -> Self {
        Self { received, last: None }
    }

    /// When the file was received.
    pub(crate) const fn received(&self) -> Instant {
        self.received
    }

    /// METHODS COD-2, by [`Instant::from_day_of_month`].
    pub(crate) fn resolve(&mut self, day: u32, hour: u32, minute: u32) -> Option<Instant> {
        let key = (day, hour, minute);
        if let Some((last, time)) = self.last
            && last == key
        {
            return time;
        }
        let time = Instant::from_day_of_month(day, hour, minute, self.received);
        self.last = Some((key, time));
        time
    }
}
