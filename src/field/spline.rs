//! A quintic spline through a field on a regular grid: four times continuously differentiable, so
//! that gradients, curvatures and centres taken from it are smooth.
//!
//! Tensor product of quintic B-splines on the grid points, interpolating every value. End
//! conditions: the fifth derivative is continuous at the two knots next to each end
//! ("not-a-knot"), which reproduces polynomials of degree five exactly; a direction with fewer
//! than six points gets vanishing second and fourth derivatives at its ends instead.
//! Source: de Boor (1978), A Practical Guide to Splines, chapters IX and XIII.

/// Value and derivatives of a spline at a fractional grid place, per grid step.
#[derive(Clone, Copy, PartialEq, Debug, Default)]
pub struct Jet {
    /// The value.
    pub value: f64,
    /// First derivatives along column and row.
    pub gradient: [f64; 2],
    /// Second derivatives: column-column, column-row, row-row.
    pub hessian: [f64; 3],
}

/// The coefficients of the spline.
#[derive(Clone, PartialEq, Debug)]
pub struct Spline {
    columns: usize,
    rows: usize,
    /// Row-major, (columns + 4) by (rows + 4).
    coefficients: Vec<f64>,
}

/// Coefficients beyond the points, at both ends together.
const EXTRA: usize = 4;
/// Half-width of the band of the interpolation equations.
const BAND: usize = 6;

impl Spline {
    /// The spline through row-major values, at least two in each direction. A value that is not
    /// finite is replaced by its nearest finite neighbour in its row, then in its column; the
    /// caller must not ask there. Cost: about 200 operations a point.
    pub fn through(values: &[f64], columns: usize, rows: usize) -> Self {
        let filled = filled(values, columns, rows);
        let (wide, high) = (columns + EXTRA, rows + EXTRA);
        // Along the columns of the grid first: each row of the field is one right-hand side. The
        // solver works on many right-hand sides that lie side by side, so the field is turned.
        let across = Band::new(columns);
        let mut turned = vec![0.0; wide * rows];
        for row in 0..rows {
            for column in 0..columns {
                turned[(column + 2) * rows + row] = filled[row * columns + column];
            }
        }
        across.solve(&mut turned, rows);
        let along = Band::new(rows);
        let mut coefficients = vec![0.0; wide * high];
        for row in 0..rows {
            for column in 0..wide {
                coefficients[(row + 2) * wide + column] = turned[column * rows + row];
            }
        }
        along.solve(&mut coefficients, wide);
        Self { columns, rows, coefficients }
    }

    /// Value and derivatives at a fractional column and row, which are held within the grid.
    pub fn at(&self, column: f64, row: f64) -> Jet {
        let (i, s) = split(column, self.columns);
        let (j, t) = split(row, self.rows);
        let (bx, by) = (basis(s), basis(t));
        let wide = self.columns + EXTRA;
        let mut sums = [[0.0; 3]; 3];
        for (k, weights) in (0..6).map(|k| (k, by.map(|order| order[k]))) {
            let start = (j + k) * wide + i;
            let line = self.coefficients.get(start..start + 6).unwrap_or_default();
            let mut across = [0.0; 3];
            for (l, coefficient) in line.iter().enumerate() {
                for order in 0..3 {
                    across[order] += bx[order][l] * coefficient;
                }
            }
            for (order, sum) in sums.iter_mut().enumerate() {
                for (other, term) in across.iter().enumerate() {
                    sum[other] += weights[order] * term;
                }
            }
        }
        Jet {
            value: sums[0][0],
            gradient: [sums[0][1], sums[1][0]],
            hessian: [sums[0][2], sums[1][1], sums[2][0]],
        }
    }
}

/// The interval a fractional place lies in, and how far along it.
fn split(place: f64, count: usize) -> (usize, f64) {
    let place = place.clamp(0.0, (count - 1) as f64);
    let interval = crate::quantity::index_nearest(place.floor()).min(count - 2);
    (interval, place - interval as f64)
}

/// The six quintic B-splines that live on an interval, at `t` of it, with their first and second
/// derivatives.
fn basis(t: f64) -> [[f64; 6]; 3] {
    let fifth = |x: f64| x * x * x * x * x / 120.0;
    let fourth = |x: f64| x * x * x * x / 24.0;
    let third = |x: f64| x * x * x / 6.0;
    // B(x) = sum over k of (-1)^k C(6, k) (x - k)_+^5 / 120, seen from its six intervals.
    let powers = |power: &dyn Fn(f64) -> f64| {
        let p: [f64; 6] = std::array::from_fn(|k| power(t + k as f64));
        let tail = |m: usize| {
            const SIGNED: [f64; 6] = [1.0, -6.0, 15.0, -20.0, 15.0, -6.0];
            (0..=m).map(|k| SIGNED[k] * p[m - k]).sum::<f64>()
        };
        [tail(5), tail(4), tail(3), tail(2), tail(1), tail(0)]
    };
    [powers(&fifth), powers(&fourth), powers(&third)]
}

/// The quintic B-spline at its knots.
const VALUE: [f64; 5] = [1.0 / 120.0, 26.0 / 120.0, 66.0 / 120.0, 26.0 / 120.0, 1.0 / 120.0];

/// Sixth differences of the coefficients: jumps of the fifth derivative.
const SIXTH: [f64; 7] = [1.0, -6.0, 15.0, -20.0, 15.0, -6.0, 1.0];

/// The fourth derivative at a knot.
const FOURTH: [f64; 5] = [1.0, -4.0, 6.0, -4.0, 1.0];

/// Six times the second derivative at a knot.
const SECOND: [f64; 5] = [1.0, 2.0, -6.0, 2.0, 1.0];

/// The factored interpolation equations of one direction.
struct Band {
    size: usize,
    /// Row-major, `2 * BAND + 1` wide, the diagonal in the middle.
    rows: Vec<[f64; 2 * BAND + 1]>,
}

impl Band {
    fn new(points: usize) -> Self {
        let size = points + EXTRA;
        let mut rows = vec![[0.0; 2 * BAND + 1]; size];
        let mut put = |row: usize, first: usize, values: &[f64]| {
            for (k, value) in values.iter().enumerate() {
                rows[row][first + k + BAND - row] = *value;
            }
        };
        for point in 0..points {
            put(point + 2, point, &VALUE);
        }
        if points >= 6 {
            put(0, 0, &SIXTH);
            put(1, 1, &SIXTH);
            put(size - 2, size - 8, &SIXTH);
            put(size - 1, size - 7, &SIXTH);
        } else {
            put(0, 0, &FOURTH);
            put(1, 0, &SECOND);
            put(size - 2, size - 5, &SECOND);
            put(size - 1, size - 5, &FOURTH);
        }
        // Elimination without exchanges; the multipliers are kept below the diagonal.
        for pivot in 0..size {
            for below in pivot + 1..(pivot + BAND + 1).min(size) {
                let factor = rows[below][pivot + BAND - below] / rows[pivot][BAND];
                rows[below][pivot + BAND - below] = factor;
                if factor != 0.0 {
                    for column in pivot + 1..(pivot + BAND + 1).min(size) {
                        rows[below][column + BAND - below] -=
                            factor * rows[pivot][column + BAND - pivot];
                    }
                }
            }
        }
        Self { size, rows }
    }

    /// Solves for `count` right-hand sides that lie side by side in each row.
    fn solve(&self, right: &mut [f64], count: usize) {
        for row in 0..self.size {
            for above in row.saturating_sub(BAND)..row {
                self.subtract(right, count, row, above);
            }
        }
        for row in (0..self.size).rev() {
            for below in row + 1..(row + BAND + 1).min(self.size) {
                self.subtract(right, count, row, below);
            }
            let inverse = 1.0 / self.rows[row][BAND];
            for value in &mut right[row * count..(row + 1) * count] {
                *value *= inverse;
            }
        }
    }

    /// Takes the band's multiple of row `other` from row `row`.
    fn subtract(&self, right: &mut [f64], count: usize, row: usize, other: usize) {
        let factor = self.rows[row][other + BAND - row];
        if factor == 0.0 {
            return;
        }
        let (first, second) = right.split_at_mut(row.max(other) * count);
        let (low, high) = (&mut first[row.min(other) * count..], &mut second[..count]);
        let (to, from) = if row < other { (low, high) } else { (high, low) };
        for (to, from) in to.iter_mut().zip(from.iter()) {
            *to -= factor * *from;
        }
    }
}

/// The field with its gaps filled by the nearest finite value in the row, then in the column; all
/// zeros where there is none.
fn filled(values: &[f64], columns: usize, rows: usize) -> Vec<f64> {
    let mut out: Vec<f64> =
        (0..columns * rows).map(|k| values.get(k).copied().unwrap_or(f64::NAN)).collect();
    if out.iter().all(|value| value.is_finite()) {
        return out;
    }
    let fill = |out: &mut Vec<f64>, start: usize, step: usize, count: usize| {
        let line: Vec<f64> = (0..count).map(|k| out[start + k * step]).collect();
        for k in 0..count {
            let near = (0..count)
                .filter(|&other| line[other].is_finite())
                .min_by_key(|&other| (other.abs_diff(k), other));
            if let Some(near) = near {
                out[start + k * step] = line[near];
            }
        }
    };
    for row in 0..rows {
        fill(&mut out, row * columns, 1, columns);
    }
    for column in 0..columns {
        fill(&mut out, column, columns, rows);
    }
    for value in &mut out {
        if !value.is_finite() {
            *value = 0.0;
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    fn field(columns: usize, rows: usize, f: impl Fn(f64, f64) -> f64) -> Spline {
        let values: Vec<f64> =
            (0..columns * rows).map(|k| f((k % columns) as f64, (k / columns) as f64)).collect();
        Spline::through(&values, columns, rows)
    }

    #[track_caller]
    fn near(found: f64, expected: f64, tolerance: f64) {
        assert!((found - expected).abs() <= tolerance, "{found} is not {expected}");
    }

    #[test]
    fn a_polynomial_of_degree_five_is_reproduced_with_its_derivatives() {
        let f = |x: f64, y: f64| {
            let (x, y) = (x / 10.0 - 0.6, y / 9.0 - 0.5);
            1.0 + x.powi(5) * y.powi(4) - 2.0 * x * y + y.powi(5)
        };
        let spline = field(13, 11, f);
        for (x, y) in [(0.0, 0.0), (0.3, 9.9), (11.7, 0.2), (5.5, 5.25), (12.0, 10.0)] {
            let jet = spline.at(x, y);
            near(jet.value, f(x, y), 1e-9);
            let h = 1e-3;
            near(jet.gradient[0], (f(x + h, y) - f(x - h, y)) / (2.0 * h), 1e-7);
            near(jet.gradient[1], (f(x, y + h) - f(x, y - h)) / (2.0 * h), 1e-7);
            near(jet.hessian[0], (f(x + h, y) + f(x - h, y) - 2.0 * f(x, y)) / (h * h), 1e-6);
            near(jet.hessian[2], (f(x, y + h) + f(x, y - h) - 2.0 * f(x, y)) / (h * h), 1e-6);
            let cross = f(x + h, y + h) - f(x + h, y - h) - f(x - h, y + h) + f(x - h, y - h);
            near(jet.hessian[1], cross / (4.0 * h * h), 1e-6);
        }
    }

    #[test]
    fn it_goes_through_every_value_of_a_rough_and_large_field() {
        let f = |x: f64, y: f64| (x * 12.9898 + y * 78.233).sin() * 43.0 % 1.0 * 20.0 + 1000.0;
        let spline = field(241, 131, f);
        for (x, y) in [(0.0, 0.0), (1.0, 1.0), (2.0, 130.0), (240.0, 64.0), (120.0, 65.0)] {
            near(spline.at(x, y).value, f(x, y), 1e-8);
        }
    }

    #[test]
    fn small_grids_and_gaps_are_borne() {
        let spline = field(2, 3, |x, y| 3.0 + 2.0 * x - y);
        near(spline.at(0.5, 1.5).value, 2.5, 1e-12);
        near(spline.at(0.5, 1.5).gradient[0], 2.0, 1e-12);
        let mut values = vec![5.0; 64];
        values[9] = f64::NAN;
        near(Spline::through(&values, 8, 8).at(1.0, 1.0).value, 5.0, 1e-9);
        near(Spline::through(&[f64::NAN; 64], 8, 8).at(1.0, 1.0).value, 0.0, 0.0);
    }
}
