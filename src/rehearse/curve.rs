//! Smooth curves through key points: piecewise cubic Hermite polynomials.

/// A curve with a value for every hour; constant before its first and after its last point.
#[derive(Clone, PartialEq, Debug)]
pub(crate) struct Curve {
    /// Hour, value, slope per hour; hours strictly ascending.
    points: Vec<(f64, f64, f64)>,
}

impl Curve {
    /// Through the points with the slopes of the neighbouring chords: for places.
    pub(crate) fn smooth(points: &[(f64, f64)]) -> Self {
        Self::with_slopes(points, |before, after| match (before, after) {
            (Some((h0, d0)), Some((h1, d1))) => (d0 * h1 + d1 * h0) / (h0 + h1),
            (Some((_, d)), None) | (None, Some((_, d))) => d,
            (None, None) => 0.0,
        })
    }

    /// Through the points without overshooting any of them (Fritsch and Butland 1984, SIAM J. Sci.
    /// Stat. Comput. 5, 300, harmonic-mean slopes): for depths and sizes.
    pub(crate) fn monotone(points: &[(f64, f64)]) -> Self {
        Self::with_slopes(points, |before, after| match (before, after) {
            (Some((h0, d0)), Some((h1, d1))) if d0 * d1 > 0.0 => {
                let (w0, w1) = (2.0 * h1 + h0, h1 + 2.0 * h0);
                (w0 + w1) / (w0 / d0 + w1 / d1)
            }
            _ => 0.0,
        })
    }

    /// The slope at each point is asked from width and slope of the chord before and after it.
    fn with_slopes(
        points: &[(f64, f64)],
        slope: impl Fn(Option<(f64, f64)>, Option<(f64, f64)>) -> f64,
    ) -> Self {
        let chords: Vec<(f64, f64)> = points
            .iter()
            .zip(points.iter().skip(1))
            .map(|(a, b)| (b.0 - a.0, (b.1 - a.1) / (b.0 - a.0)))
            .collect();
        let points = points
            .iter()
            .enumerate()
            .map(|(i, &(hour, value))| {
                let before = i.checked_sub(1).and_then(|i| chords.get(i)).copied();
                (hour, value, slope(before, chords.get(i).copied()))
            })
            .collect();
        Self { points }
    }

    /// The value at an hour; 0 where the curve has no points.
    pub(crate) fn at(&self, hour: f64) -> f64 {
        let after = self.points.partition_point(|point| point.0 <= hour);
        let before = after.checked_sub(1).and_then(|i| self.points.get(i));
        match (before, self.points.get(after)) {
            (Some(&(x0, y0, m0)), Some(&(x1, y1, m1))) => {
                let width = x1 - x0;
                let t = (hour - x0) / width;
                let (t2, t3) = (t * t, t * t * t);
                (2.0 * t3 - 3.0 * t2 + 1.0) * y0
                    + (t3 - 2.0 * t2 + t) * width * m0
                    + (3.0 * t2 - 2.0 * t3) * y1
                    + (t3 - t2) * width * m1
            }
            (Some(&(_, value, _)), None) | (None, Some(&(_, value, _))) => value,
            (None, None) => 0.0,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn curves_meet_their_points_and_monotone_ones_stay_between_them() {
        let points = [(-6.0, -4.0), (0.0, -6.0), (12.0, -30.0), (30.0, -31.0), (48.0, -10.0)];
        for curve in [Curve::smooth(&points), Curve::monotone(&points)] {
            for (hour, value) in points {
                assert!((curve.at(hour) - value).abs() < 1e-12);
            }
            assert!((curve.at(-100.0) + 4.0).abs() < 1e-12);
            assert!((curve.at(100.0) + 10.0).abs() < 1e-12);
        }
        let curve = Curve::monotone(&points);
        for step in 0..540 {
            let hour = -6.0 + f64::from(step) * 0.1;
            let value = curve.at(hour);
            let after = points.iter().position(|p| p.0 > hour).expect("an hour in range");
            let (a, b) = (points[after - 1].1, points[after].1);
            assert!(value <= a.max(b) + 1e-12 && value >= a.min(b) - 1e-12, "{hour} {value}");
        }
    }
}
