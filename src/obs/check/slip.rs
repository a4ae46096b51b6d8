//! Slips of digit and sign (METHODS QC-3): proposed in words, never put right in silence.

use std::fmt;

/// A value is worth a proposal where it misses by more standard deviations than this.
const RAW_SIGMAS: f64 = 6.0;
/// A corrected value must miss by fewer than this.
const FIT_SIGMAS: f64 = 2.0;

/// A single correction that would make a pressure fit.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Slip {
    /// What kind of slip.
    pub kind: SlipKind,
    /// The value it would be, hPa.
    pub proposed_hpa: f64,
}

/// The slips that are tried.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub enum SlipKind {
    /// The tens digit is one off.
    Tens,
    /// The hundreds digit is one off.
    Hundreds,
    /// The units digit is five off.
    Five,
    /// Two neighbouring digits were exchanged.
    Exchanged,
}

impl fmt::Display for Slip {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let slip = match self.kind {
            SlipKind::Tens => "with another tens digit",
            SlipKind::Hundreds => "with another hundreds digit",
            SlipKind::Five => "with five more or less",
            SlipKind::Exchanged => "with two digits exchanged",
        };
        write!(f, "{:.1} hPa {slip} would fit", self.proposed_hpa)
    }
}

/// The slip that makes a pressure fit what is expected, if there is exactly one.
///
/// `expected_sigma_hpa` is the standard deviation of the difference that is expected of a sound
/// value. A slip is proposed only where the raw value misses by more than 6 of them and the
/// corrected one by less than 2 (METHODS QC-3, own figures).
pub fn propose(found_hpa: f64, expected_hpa: f64, expected_sigma_hpa: f64) -> Option<Slip> {
    let fits = |value: f64| (value - expected_hpa).abs() < FIT_SIGMAS * expected_sigma_hpa;
    if (found_hpa - expected_hpa).abs() <= RAW_SIGMAS * expected_sigma_hpa {
        return None;
    }
    let mut candidates: Vec<Slip> = Vec::new();
    let mut offer = |kind: SlipKind, value: f64| {
        if fits(value) && !candidates.iter().any(|held| (held.proposed_hpa - value).abs() < 0.05) {
            candidates.push(Slip { kind, proposed_hpa: value });
        }
    };
    for step in [10.0, -10.0] {
        offer(SlipKind::Tens, found_hpa + step);
    }
    for step in [100.0, -100.0] {
        offer(SlipKind::Hundreds, found_hpa + step);
    }
    for step in [5.0, -5.0] {
        offer(SlipKind::Five, found_hpa + step);
    }
    for value in exchanged(found_hpa) {
        offer(SlipKind::Exchanged, value);
    }
    match candidates.as_slice() {
        [only] => Some(*only),
        _ => None,
    }
}

/// The pressure with each two neighbouring digits of its four coded ones (tens of hPa to tenths,
/// thousands left out) exchanged.
fn exchanged(pressure_hpa: f64) -> impl Iterator<Item = f64> {
    let tenths = crate::quantity::whole_nearest(pressure_hpa * 10.0);
    let thousands = tenths.div_euclid(10_000) * 10_000;
    let coded = tenths.rem_euclid(10_000);
    [1_i64, 10, 100].into_iter().filter_map(move |unit| {
        let (low, high) = (coded / unit % 10, coded / (unit * 10) % 10);
        let swapped = coded + (low - high) * unit * 10 + (high - low) * unit;
        // Exchanging across the thousand turns 9998 into the 1000s and back.
        (low != high).then_some((thousands + swapped) as f64 / 10.0)
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(found: f64, expected: f64, wanted: Option<(SlipKind, f64)>) {
        let slip = propose(found, expected, 1.0);
        match (slip, wanted) {
            (None, None) => {}
            (Some(slip), Some((kind, value))) => {
                assert_eq!(slip.kind, kind);
                assert!((slip.proposed_hpa - value).abs() < 1e-9, "{slip}");
            }
            other => panic!("{other:?}"),
        }
    }

    #[test]
    fn proposes_the_one_slip_that_fits() {
        check(1022.4, 1012.6, Some((SlipKind::Tens, 1012.4)));
        check(912.4, 1012.6, Some((SlipKind::Hundreds, 1012.4)));
        check(1031.2, 1013.0, Some((SlipKind::Exchanged, 1013.2)));
        check(1012.4, 1012.6, None);
        check(1040.0, 1012.6, None);
    }
}
