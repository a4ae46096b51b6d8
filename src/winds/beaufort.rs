//! The Beaufort scale and the warning classes of the trade.

/// Lower bounds of forces 1 to 12, kt (WMO-No. 306, code table 1100).
const LOWER_KT: [f64; 12] = [1.0, 4.0, 7.0, 11.0, 17.0, 22.0, 28.0, 34.0, 41.0, 48.0, 56.0, 64.0];
/// The same, m/s.
const LOWER_M_S: [f64; 12] = [0.3, 1.6, 3.4, 5.5, 8.0, 10.8, 13.9, 17.2, 20.8, 24.5, 28.5, 32.7];

/// 34 kt carried to metres a second and back is a hair less than 34 kt, and still a gale.
const ROUNDING: f64 = 1e-6;

/// Force of a speed in knots, 0 to 12.
pub fn force_of_kt(speed_kt: f64) -> usize {
    LOWER_KT.iter().filter(|lower| speed_kt + ROUNDING >= **lower).count()
}

/// Force of a speed in metres a second, 0 to 12.
pub fn force_of_m_s(speed_m_s: f64) -> usize {
    LOWER_M_S.iter().filter(|lower| speed_m_s + ROUNDING >= **lower).count()
}

/// The warning class of a mean wind in knots, from 34 kt: `gale`, `storm`, `hurricane force`
/// (common marine practice; WMO-No. 558).
pub fn warning_class(speed_kt: f64) -> Option<&'static str> {
    match force_of_kt(speed_kt) {
        8 | 9 => Some("gale"),
        10 | 11 => Some("storm"),
        12 => Some("hurricane force"),
        _ => None,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::{kt_from_m_s, m_s_from_kt};

    /// METHODS CHK-122 and CHK-123 (WMO-No. 306, code table 1100); 34 kt is a gale: common
    /// practice, no source.
    #[test]
    fn forces_at_their_bounds() {
        let forces = [33.0, 34.0, 47.0, 48.0, 63.0, 64.0].map(force_of_kt);
        assert_eq!(forces, [7, 8, 9, 10, 11, 12]);
        let forces = [17.1, 17.2, 32.6, 32.7].map(force_of_m_s);
        assert_eq!(forces, [7, 8, 11, 12]);
        assert_eq!(warning_class(33.9), None);
        assert_eq!(warning_class(34.0), Some("gale"));
        assert_eq!(warning_class(63.9), Some("storm"));
        assert_eq!(warning_class(64.0), Some("hurricane force"));
        for speed_kt in [34.0, 48.0, 64.0] {
            let there_and_back = kt_from_m_s(m_s_from_kt(speed_kt));
            assert_eq!(warning_class(there_and_back), warning_class(speed_kt));
        }
    }
}
