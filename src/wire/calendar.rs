//! Day-of-month times resolved against the receipt, the candidates of each day worked out once.

use chrono::Datelike;

use crate::instant::{HOUR_S, Instant};

/// Resolves day, hour and minute as [`Instant::from_day_of_month`] does.
#[derive(Clone, Debug)]
pub(crate) struct Calendar {
    received: Instant,
    /// For each day of the month asked for: its midnights in the month before, of and after the
    /// receipt, where such a day exists.
    midnights: [Option<[Option<Instant>; 3]>; 32],
}

impl Calendar {
    /// A calendar for a file received at a moment.
    pub(crate) const fn new(received: Instant) -> Self {
        Self { received, midnights: [None; 32] }
    }

    /// When the file was received.
    pub(crate) const fn received(&self) -> Instant {
        self.received
    }

    /// The latest such moment that is not later than six hours after the receipt (METHODS COD-2).
    pub(crate) fn resolve(&mut self, day: u32, hour: u32, minute: u32) -> Option<Instant> {
        // 24 hours is written for midnight by some.
        let exists = (hour < 24 && minute < 60) || (hour == 24 && minute == 0);
        let slot = self.midnights.get_mut(usize::try_from(day).ok()?).filter(|_| exists)?;
        let received = self.received;
        let midnights = slot.get_or_insert_with(|| candidates(day, received));
        let limit = received.plus_s(6 * HOUR_S);
        let past_midnight_s = i64::from(hour) * HOUR_S + i64::from(minute) * 60;
        midnights
            .iter()
            .flatten()
            .map(|midnight| midnight.plus_s(past_midnight_s))
            .filter(|moment| *moment <= limit)
            .max()
    }
}

fn candidates(day: u32, received: Instant) -> [Option<Instant>; 3] {
    let Some(base) = received.calendar() else { return [None; 3] };
    [-1, 0, 1].map(|step| {
        let month0 = i64::from(base.year()) * 12 + i64::from(base.month0()) + step;
        let year = i32::try_from(month0.div_euclid(12)).ok()?;
        let month = u32::try_from(month0.rem_euclid(12)).ok()? + 1;
        Instant::from_calendar(year, month, day, 0, 0)
    })
}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;

    proptest! {
        #[test]
        fn it_says_what_the_rule_says(
            received_s in 0_i64..4_000_000_000,
            day in 0_u32..40,
            hour in 0_u32..26,
            minute in 0_u32..62,
        ) {
            let received = Instant::from_unix_s(received_s);
            let mut calendar = Calendar::new(received);
            let expected = Instant::from_day_of_month(day, hour, minute, received);
            prop_assert_eq!(calendar.resolve(day, hour, minute), expected);
            prop_assert_eq!(calendar.resolve(day, hour, minute), expected);
        }
    }
}
