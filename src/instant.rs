//! Time as the watch counts it: UTC, to the second, and the hours that analyses are made for.
//!
//! Nothing here reads a clock: the present moment is always an argument.

use std::fmt;

use chrono::{DateTime, Datelike, NaiveDate, TimeZone, Timelike, Utc};
use serde::{Deserialize, Deserializer, Serialize, Serializer};

/// Seconds in an hour.
pub const HOUR_S: i64 = 3600;

/// A moment in UTC, to the second.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Default)]
pub struct Instant(i64);

/// A whole hour in UTC: the time an analysis is valid for.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Default)]
pub struct Hour(i64);

impl Instant {
    /// From seconds since 1970-01-01 00:00 UTC.
    pub const fn from_unix_s(seconds: i64) -> Self {
        Self(seconds)
    }

    /// Seconds since 1970-01-01 00:00 UTC.
    pub const fn unix_s(self) -> i64 {
        self.0
    }

    /// From a calendar date and time of day; `None` where no such date or time exists.
    pub fn from_calendar(year: i32, month: u32, day: u32, hour: u32, minute: u32) -> Option<Self> {
        let date = NaiveDate::from_ymd_opt(year, month, day)?;
        Some(Self(date.and_hms_opt(hour, minute, 0)?.and_utc().timestamp()))
    }

    /// From RFC 3339 text such as `2026-01-15T12:00:00Z`; seconds may be left out.
    pub fn parse(text: &str) -> Option<Self> {
        let text = text.trim();
        if let Ok(time) = DateTime::parse_from_rfc3339(text) {
            return Some(Self(time.timestamp()));
        }
        let bare = text.strip_suffix(['Z', 'z'])?;
        for form in ["%Y-%m-%dT%H:%M", "%Y-%m-%d %H:%M", "%Y-%m-%dT%H"] {
            // chrono wants minutes, so a bare hour is given them.
            let (bare, form) = if form.ends_with("%H") {
                (format!("{bare}:00"), "%Y-%m-%dT%H:%M")
            } else {
                (bare.to_owned(), form)
            };
            if let Ok(time) = chrono::NaiveDateTime::parse_from_str(&bare, form) {
                return Some(Self(time.and_utc().timestamp()));
            }
        }
        None
    }

    /// Resolves a day of the month, hour and minute against a time of receipt.
    ///
    /// Of the dates in the month before, of and after the receipt the latest that is not later
    /// than six hours after the receipt is taken; `None` where none exists.
    /// METHODS COD-2 (own rule).
    pub fn from_day_of_month(day: u32, hour: u32, minute: u32, received: Self) -> Option<Self> {
        // 24 hours is written for midnight by some; it is the next day's 00.
        let (hour, extra_s) = if hour == 24 && minute == 0 { (0, 86_400) } else { (hour, 0) };
        let limit_s = received.0.saturating_add(6 * HOUR_S);
        let base = received.calendar()?;
        (-1..=1)
            .filter_map(|step| {
                let month0 = i64::from(base.year()) * 12 + i64::from(base.month0()) + step;
                let year = i32::try_from(month0.div_euclid(12)).ok()?;
                let month = u32::try_from(month0.rem_euclid(12)).ok()? + 1;
                let time = Self::from_calendar(year, month, day, hour, minute)?;
                Some(Self(time.0 + extra_s))
            })
            .filter(|time| time.0 <= limit_s)
            .max()
    }

    /// This moment `seconds` later.
    #[must_use]
    pub const fn plus_s(self, seconds: i64) -> Self {
        Self(self.0.saturating_add(seconds))
    }

    /// Hours from `earlier` to this moment; negative where `earlier` is later.
    pub fn hours_since(self, earlier: Self) -> f64 {
        self.0.saturating_sub(earlier.0) as f64 / HOUR_S as f64
    }

    /// Seconds from `earlier` to this moment.
    pub const fn seconds_since(self, earlier: Self) -> i64 {
        self.0.saturating_sub(earlier.0)
    }

    /// The last whole hour not later than this moment.
    pub const fn hour_floor(self) -> Hour {
        Hour(self.0.div_euclid(HOUR_S))
    }

    /// The nearest whole hour; the half hour belongs to the hour that follows.
    pub const fn hour_nearest(self) -> Hour {
        Hour((self.0 + HOUR_S / 2).div_euclid(HOUR_S))
    }

    /// The calendar form, for output.
    pub fn calendar(self) -> Option<DateTime<Utc>> {
        Utc.timestamp_opt(self.0, 0).single()
    }

    /// Hour of the day, 0 to 23, UTC, with the fraction of the hour.
    pub fn hour_of_day(self) -> f64 {
        self.0.rem_euclid(86_400) as f64 / HOUR_S as f64
    }

    /// `2026-01-15T12:00Z`, with seconds only where they are not zero.
    pub fn rfc3339(self) -> String {
        self.calendar().map_or_else(
            || format!("unix {}", self.0),
            |time| {
                let form =
                    if time.second() == 0 { "%Y-%m-%dT%H:%M:00Z" } else { "%Y-%m-%dT%H:%M:%SZ" };
                time.format(form).to_string()
            },
        )
    }

    /// `15 12:00Z`: day of the month and time, as a watch writes it.
    pub fn day_time(self) -> String {
        self.calendar().map_or_else(
            || "-".to_owned(),
            |time| format!("{:02} {:02}:{:02}Z", time.day(), time.hour(), time.minute()),
        )
    }

    /// `12:00Z`.
    pub fn time_of_day(self) -> String {
        self.calendar().map_or_else(
            || "-".to_owned(),
            |time| format!("{:02}:{:02}Z", time.hour(), time.minute()),
        )
    }
}

impl Hour {
    /// From hours since 1970-01-01 00:00 UTC.
    pub const fn from_unix_h(hours: i64) -> Self {
        Self(hours)
    }

    /// Hours since 1970-01-01 00:00 UTC.
    pub const fn unix_h(self) -> i64 {
        self.0
    }

    /// The moment the hour names.
    pub const fn instant(self) -> Instant {
        Instant(self.0 * HOUR_S)
    }

    /// This hour `hours` later.
    #[must_use]
    pub const fn plus(self, hours: i64) -> Self {
        Self(self.0 + hours)
    }
}

impl fmt::Display for Instant {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.rfc3339())
    }
}

impl fmt::Display for Hour {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.instant().rfc3339())
    }
}

impl Serialize for Instant {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.serialize_str(&self.rfc3339())
    }
}

impl<'de> Deserialize<'de> for Instant {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        let text = String::deserialize(deserializer)?;
        Self::parse(&text).ok_or_else(|| {
            serde::de::Error::custom(format!("expected an RFC 3339 time in UTC, found {text:?}"))
        })
    }
}

impl Serialize for Hour {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        self.instant().serialize(serializer)
    }
}

impl<'de> Deserialize<'de> for Hour {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        Ok(Instant::deserialize(deserializer)?.hour_floor())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// METHODS CHK-018, computed there with the standard library of another language.
    #[test]
    fn resolves_the_day_of_the_month_against_the_receipt() {
        let check = |day, hour, received: &str, expected: Option<&str>| {
            let received = Instant::parse(received).expect("a time");
            let found = Instant::from_day_of_month(day, hour, 0, received);
            assert_eq!(found, expected.map(|text| Instant::parse(text).expect("a time")));
        };
        check(28, 23, "2026-03-01T00:20Z", Some("2026-02-28T23:00Z"));
        check(31, 23, "2026-02-01T00:10Z", Some("2026-01-31T23:00Z"));
        check(1, 0, "2026-01-31T23:50Z", Some("2026-02-01T00:00Z"));
        check(31, 18, "2027-01-01T01:00Z", Some("2026-12-31T18:00Z"));
        check(29, 12, "2026-03-02T06:00Z", None);
    }

    #[test]
    fn a_time_survives_its_own_text() {
        let time = Instant::parse("2026-01-15T12:34:56Z").expect("a time");
        assert_eq!(Instant::parse(&time.rfc3339()), Some(time));
        assert_eq!(time.hour_floor().to_string(), "2026-01-15T12:00:00Z");
        assert_eq!(time.hour_nearest().to_string(), "2026-01-15T13:00:00Z");
        assert_eq!(Instant::parse("2026-01-15T12Z"), Instant::from_calendar(2026, 1, 15, 12, 0));
    }
}
