//! The characteristic of a 3-hour trace, as an observer reads it off the barograph.

/// Code table 0200 (WMO-No. 306) for pressures 3, 2, 1 and 0 hours ago in tenths of a hectopascal.
/// The rule is METHODS TEN-1; it never contradicts the signs of the table.
pub(super) fn characteristic(trace: [i64; 4]) -> u8 {
    /// Smallest change of a half that counts, half-tenths.
    const LEAST: i64 = 3;
    let [p3, p2, p1, p0] = trace;
    let (first, second) = (p2 + p1 - 2 * p3, 2 * p0 - p2 - p1);
    let change = p0 - p3;
    let sign = |half: i64| if half.abs() > LEAST { half.signum() } else { 0 };
    match (sign(first), sign(second)) {
        (1, -1) => {
            if change >= 0 {
                0
            } else {
                8
            }
        }
        (-1, 1) => {
            if change > 0 {
                3
            } else {
                5
            }
        }
        (1, 0) => 1,
        (-1, 0) => 6,
        (0, 1) => 3,
        (0, -1) => 8,
        (0, _) => match change.signum() {
            0 => 4,
            1 => 2,
            _ => 7,
        },
        (rising, _) => {
            let more = second.abs() - first.abs();
            let (slower, faster, even) = if rising > 0 { (1, 3, 2) } else { (6, 8, 7) };
            if more < -LEAST {
                slower
            } else if more > LEAST {
                faster
            } else {
                even
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// METHODS CHK-063 to CHK-077.
    #[test]
    fn traces_get_their_figure() {
        for (trace, expected) in [
            ([10100, 10110, 10112, 10104], 0),
            ([10100, 10110, 10116, 10117], 1),
            ([10100, 10105, 10110, 10115], 2),
            ([10100, 10098, 10103, 10114], 3),
            ([10100, 10102, 10107, 10116], 3),
            ([10100, 10100, 10100, 10100], 4),
            ([10100, 10090, 10088, 10096], 5),
            ([10100, 10090, 10084, 10083], 6),
            ([10100, 10095, 10090, 10085], 7),
            ([10100, 10102, 10097, 10086], 8),
            ([10100, 10098, 10093, 10084], 8),
            ([10100, 10106, 10106, 10100], 0),
            ([10100, 10094, 10094, 10100], 5),
            ([10100, 10101, 10100, 10101], 2),
            ([10100, 10099, 10099, 10099], 7),
        ] {
            assert_eq!(characteristic(trace), expected, "{trace:?}");
        }
    }

    /// The signs of code table 0200 (WMO-No. 306), over every trace of steps up to 1.2 hPa.
    #[test]
    fn figures_never_contradict_the_sign_of_the_change() {
        for n in 0..15_625_i64 {
            let step = |k: i64| n / k % 25 - 12;
            let p2 = 10_000 + step(1);
            let p1 = p2 + step(25);
            let p0 = p1 + step(625);
            let change = p0 - 10_000;
            let holds = match characteristic([10_000, p2, p1, p0]) {
                0 => change >= 0,
                1..=3 => change > 0,
                4 => change == 0,
                5 => change <= 0,
                _ => change < 0,
            };
            assert!(holds, "{p2} {p1} {p0}");
        }
    }
}
