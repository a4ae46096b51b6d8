//! The wind indicator iw (code table 1855).

use crate::quantity::{kt_from_m_s, m_s_from_kt};
use crate::report::WindSource;

/// In what unit winds are coded and how they are come by.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) struct WindUnit {
    knots: bool,
    /// Measured or estimated.
    pub source: WindSource,
}

impl WindUnit {
    /// Code table 1855; every other figure is invalid and makes the winds unusable.
    pub(crate) const fn from_indicator(iw: Option<u8>) -> Option<Self> {
        match iw {
            Some(0) => Some(Self { knots: false, source: WindSource::Estimated }),
            Some(1) => Some(Self { knots: false, source: WindSource::Measured }),
            Some(3) => Some(Self { knots: true, source: WindSource::Estimated }),
            Some(4) => Some(Self { knots: true, source: WindSource::Measured }),
            _ => None,
        }
    }

    /// A coded speed, m/s.
    pub(crate) fn speed_m_s(self, coded: u32) -> f64 {
        if self.knots { m_s_from_kt(f64::from(coded)) } else { f64::from(coded) }
    }

    /// A coded speed in words.
    pub(crate) fn words(self, coded: u32) -> String {
        if self.knots {
            format!("{coded} kt ({:.1} m/s)", m_s_from_kt(f64::from(coded)))
        } else {
            format!("{coded} m/s ({:.0} kt)", kt_from_m_s(f64::from(coded)))
        }
    }

    /// Unit and manner in words.
    pub(crate) const fn description(self) -> &'static str {
        match (self.knots, self.source) {
            (true, WindSource::Measured) => "wind in knots, measured",
            (true, _) => "wind in knots, estimated",
            (false, WindSource::Measured) => "wind in m/s, measured",
            (false, _) => "wind in m/s, estimated",
        }
    }
}
