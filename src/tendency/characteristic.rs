//! The characteristic of a barograph's trace (code table 0200; METHODS TEN-1).

use crate::quantity::whole_nearest;

/// Curvature below which a half of the trace counts as straight, half-tenths of a hPa.
const STRAIGHT: i32 = 3;

/// Tenths of a hPa, as the code counts them.
pub fn tenths(pressure_hpa: f64) -> i32 {
    i32::try_from(whole_nearest(pressure_hpa * 10.0)).unwrap_or(0)
}

/// The characteristic of the trace at 3, 2, 1 and 0 hours before the observation, in tenths of a
/// hPa, and the change over the three hours, in tenths.
///
/// The trace is read as two halves of an hour and a half each. The code never contradicts the sign
/// rules of table 0200: 0 goes with a change of nothing or more, 1 to 3 with a rise, 4 with none, 5
/// with nothing or less, 6 to 8 with a fall (tested for 15,625 traces). Own algorithm.
pub fn of_trace(trace_tenths: [i32; 4]) -> (u8, i32) {
    let [p3, p2, p1, p0] = trace_tenths;
    let (first, second) = (p2 + p1 - 2 * p3, 2 * p0 - p2 - p1);
    let change = p0 - p3;
    let sign = |half: i32| if half.abs() > STRAIGHT { half.signum() } else { 0 };
    let code = match (sign(first), sign(second)) {
        (1, -1) if change >= 0 => 0,
        (1, -1) => 8,
        (-1, 1) if change > 0 => 3,
        (-1, 1) => 5,
        (1, 0) => 1,
        (-1, 0) => 6,
        (0, 1) => 3,
        (0, -1) => 8,
        (1, 1) => match second.abs() - first.abs() {
            excess if excess < -STRAIGHT => 1,
            excess if excess > STRAIGHT => 3,
            _ => 2,
        },
        (-1, -1) => match second.abs() - first.abs() {
            excess if excess < -STRAIGHT => 6,
            excess if excess > STRAIGHT => 8,
            _ => 7,
        },
        _ => of_change(change),
    };
    (code, change)
}

/// The characteristic where only the two ends are known: 2, 4 or 7.
pub const fn of_change(change_tenths: i32) -> u8 {
    match change_tenths.signum() {
        1 => 2,
        -1 => 7,
        _ => 4,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// METHODS CHK-063 to CHK-077.
    #[test]
    fn codes_the_traces_of_the_book() {
        for (trace, code, change) in [
            ([10100, 10110, 10112, 10104], 0, 4),
            ([10100, 10110, 10116, 10117], 1, 17),
            ([10100, 10105, 10110, 10115], 2, 15),
            ([10100, 10098, 10103, 10114], 3, 14),
            ([10100, 10102, 10107, 10116], 3, 16),
            ([10100, 10100, 10100, 10100], 4, 0),
            ([10100, 10090, 10088, 10096], 5, -4),
            ([10100, 10090, 10084, 10083], 6, -17),
            ([10100, 10095, 10090, 10085], 7, -15),
            ([10100, 10102, 10097, 10086], 8, -14),
            ([10100, 10098, 10093, 10084], 8, -16),
            ([10100, 10106, 10106, 10100], 0, 0),
            ([10100, 10094, 10094, 10100], 5, 0),
            ([10100, 10101, 10100, 10101], 2, 1),
            ([10100, 10099, 10099, 10099], 7, -1),
        ] {
            assert_eq!(of_trace(trace), (code, change), "{trace:?}");
        }
    }

    /// METHODS CHK-078: the sign rules of code table 0200 over every trace whose values lie within
    /// 1.2 hPa of the oldest, and how often each code comes; and over every trace of steps up to that.
    #[test]
    fn never_contradicts_the_sign_rules() {
        let tenths = || -12..=12_i32;
        let all = || {
            tenths().flat_map(move |a| tenths().flat_map(move |b| tenths().map(move |c| [a, b, c])))
        };
        let check = |offsets: [i32; 3]| {
            let trace = [10_100, 10_100 + offsets[0], 10_100 + offsets[1], 10_100 + offsets[2]];
            let (code, change) = of_trace(trace);
            let allowed = match code {
                0 => change >= 0,
                1..=3 => change > 0,
                4 => change == 0,
                5 => change <= 0,
                6..=8 => change < 0,
                _ => false,
            };
            assert!(allowed, "{trace:?} gives {code} with {change}");
            usize::from(code)
        };
        let mut counts = [0_u32; 9];
        for offsets in all() {
            counts[check(offsets)] += 1;
        }
        assert_eq!(counts, [946, 1108, 626, 5051, 163, 946, 1108, 626, 5051]);
        for [a, b, c] in all() {
            check([a, a + b, a + b + c]);
        }
    }
}
