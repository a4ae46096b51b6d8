//! What makes two reports the same report, and which of several copies stands (METHODS QC-7).
//!
//! Precedence, highest first: the later correction; a copy whose values pass the gross limits and
//! that says anything of use; the form (BUFR before the character forms: the same tenths, a full
//! position, heights); the more complete; and last a fixed order of the content. Never the time or
//! order of arrival. Copies are never averaged.

use std::cmp::Ordering;
use std::sync::Arc;

use super::copy::mix;
use super::{Copy, HeldCounts, Joined, Slot};
use crate::instant::Instant;
use crate::obs::check::gross;
use crate::quantity::whole_nearest;
use crate::report::{Form, Identifier, Platform, Report, Revision};

/// What names a report: platform, station, minute of observation, and for call signs that several
/// ships share the place to a tenth of a degree.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub struct Key {
    /// What kind of place.
    pub platform: Platform,
    /// Who.
    pub station: Identifier,
    /// When, to the minute.
    pub time: Instant,
    /// Tenths of a degree of latitude and longitude, for generic call signs only.
    cell: Option<(i16, i16)>,
}

impl Key {
    /// The key of a report.
    pub fn of(report: &Report) -> Self {
        let tenths = |deg: f64| i16::try_from(whole_nearest(deg * 10.0)).unwrap_or(i16::MAX);
        let seconds = report.time.unix_s();
        Self {
            platform: report.platform,
            station: plain_index(report.station),
            time: Instant::from_unix_s(seconds - seconds.rem_euclid(60)),
            cell: report.position.filter(|_| report.station.is_generic()).map(|position| {
                (tenths(position.latitude_deg()), tenths(position.longitude_deg()))
            }),
        }
    }

    /// Before every key of a station.
    pub(super) const fn first(platform: Platform, station: Identifier) -> Self {
        Self { platform, station, time: Instant::from_unix_s(i64::MIN), cell: None }
    }

    /// After every key of a station.
    pub(super) const fn last(platform: Platform, station: Identifier) -> Self {
        let cell = Some((i16::MAX, i16::MAX));
        Self { platform, station, time: Instant::from_unix_s(i64::MAX), cell }
    }

    /// Who made it, as far as reports can be strung together: platform, station and, for generic
    /// call signs, the place.
    pub const fn who(&self) -> (Platform, Identifier, Option<(i16, i16)>) {
        (self.platform, self.station, self.cell)
    }

    fn fingerprint(&self) -> u64 {
        let mut mixed =
            mix(u64::from(self.platform as u8) ^ mix(self.time.unix_s().cast_unsigned()));
        for byte in self.station.as_str().bytes() {
            mixed = mix(mixed ^ u64::from(byte));
        }
        let (row, column) = self.cell.unwrap_or_default();
        mix(mixed ^ u64::from(row.cast_unsigned()) << 16 ^ u64::from(column.cast_unsigned()))
    }
}

/// The plain index number of a WIGOS identifier of the form 0-20000-0-NNNNN, so that a station is
/// one station in every form (WMO-No. 1160, attachment 2.1: issuer 20000 is a World Weather Watch
/// station number). Other identifiers stay as they are.
pub fn plain_index(station: Identifier) -> Identifier {
    let index = station
        .as_str()
        .strip_prefix("0-20000-0-")
        .filter(|number| number.len() == 5 && number.bytes().all(|byte| byte.is_ascii_digit()));
    index.and_then(Identifier::new).unwrap_or(station)
}

/// All distinct copies of one report.
#[derive(Clone, Debug)]
pub struct Entry {
    /// The highest copy by precedence.
    highest: Arc<Copy>,
    /// The others, from high to low.
    others: Vec<Arc<Copy>>,
    /// The highest with what a partial correction left out, where that differs.
    completed: Option<Arc<Copy>>,
}

impl Entry {
    pub(super) fn new(copy: Copy) -> Self {
        Self { highest: Arc::new(copy), others: Vec::new(), completed: None }
    }

    /// The copy that stands.
    pub fn standing(&self) -> &Copy {
        self.completed.as_ref().unwrap_or(&self.highest)
    }

    /// Whether the standing copy is the very same object as another entry's: nothing has changed.
    pub fn is_same(&self, other: &Self) -> bool {
        let standing =
            |entry: &Self| Arc::as_ptr(entry.completed.as_ref().unwrap_or(&entry.highest));
        std::ptr::eq(standing(self), standing(other))
    }

    /// The report that stands.
    pub fn report(&self, key: &Key) -> Report {
        self.standing().unpack(key)
    }

    /// All distinct copies, the highest first.
    pub fn copies(&self) -> impl Iterator<Item = &Copy> {
        std::iter::once(&self.highest).chain(&self.others).map(AsRef::as_ref)
    }

    /// Takes in a copy.
    pub(super) fn join(&mut self, copy: Copy) -> Joined {
        let same = |held: &Arc<Copy>| held.content_order(&copy).is_eq();
        if let Some(held) =
            std::iter::once(&mut self.highest).chain(&mut self.others).find(|held| same(held))
        {
            Arc::make_mut(held).repeat(copy.into_arrival());
            self.complete();
            return Joined::Repeat;
        }
        let copy = Arc::new(copy);
        let joined = if precedence(&copy, &self.highest).is_gt() {
            let lower = std::mem::replace(&mut self.highest, copy);
            self.others.insert(0, lower);
            Joined::Corrected
        } else {
            let at = self.others.partition_point(|held| precedence(held, &copy).is_gt());
            self.others.insert(at, copy);
            Joined::Outranked
        };
        self.complete();
        joined
    }

    /// Fills what a partial correction left out from the next copy of a lower revision.
    fn complete(&mut self) {
        self.completed = None;
        if self.highest.revision() == Revision::Original {
            return;
        }
        let older = self.others.iter().find(|held| held.revision() < self.highest.revision());
        self.completed = older.and_then(|older| self.highest.completed_by(older)).map(Arc::new);
    }

    pub(super) fn counts(&self) -> HeldCounts {
        let corrected =
            self.others.iter().filter(|held| held.revision() < self.highest.revision()).count();
        HeldCounts {
            held: 1,
            repeats: self.copies().map(Copy::repeats).sum(),
            corrections: corrected,
            outranked: self.others.len() - corrected,
        }
    }

    pub(super) fn same_reports(&self, other: &Self) -> bool {
        self.others.len() == other.others.len()
            && self.copies().zip(other.copies()).all(|(a, b)| a.content_order(b).is_eq())
    }

    pub(super) fn fingerprint(&self, key: &Key) -> u64 {
        mix(key.fingerprint() ^ self.standing().fingerprint())
    }
}

/// Which of two copies of a report stands: the greater.
fn precedence(a: &Copy, b: &Copy) -> Ordering {
    a.revision()
        .cmp(&b.revision())
        .then_with(|| is_sound(a).cmp(&is_sound(b)))
        .then_with(|| form_rank(a.form()).cmp(&form_rank(b.form())))
        .then_with(|| a.completeness().cmp(&b.completeness()))
        .then_with(|| a.content_order(b))
}

/// Whether a copy says anything of use and nothing impossible.
fn is_sound(copy: &Copy) -> bool {
    let within = |slot: Slot, limits: std::ops::RangeInclusive<f64>| {
        copy.value(slot).is_none_or(|value| limits.contains(&value))
    };
    let useful = copy.has_pressure()
        || copy.value(Slot::WindSpeed).is_some()
        || copy.value(Slot::PressureChange3h).is_some();
    useful
        && within(Slot::PressureMsl, gross::PRESSURE_MSL_HPA)
        && within(Slot::PressureStation, gross::PRESSURE_STATION_HPA)
        && within(Slot::WindSpeed, gross::WIND_M_S)
}

const fn form_rank(form: Form) -> u8 {
    match form {
        Form::Bufr => 4,
        Form::Synop | Form::Ship | Form::Mobile | Form::Buoy | Form::Metar => 3,
        Form::Speci => 2,
        Form::Json => 1,
        Form::Csv => 0,
    }
}
