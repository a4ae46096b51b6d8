//! Small dense symmetric systems: M = L L^T, rows appended to it, and what follows.
//!
//! Row-major, left-looking, four rows at a time, each in four running sums: the order of every sum
//! is fixed, and the compiler can keep it in vectors. Rows of right-hand sides are appended below
//! the matrix and come out as L^-1 b. Source: Golub and Van Loan, Matrix Computations, 4.2.

/// A factored matrix with rows appended.
#[derive(Clone, Debug, Default)]
pub(super) struct Factor {
    /// Order of the matrix.
    pub(super) order: usize,
    /// Distance between rows, a multiple of four.
    stride: usize,
    /// Rows, zero above the diagonal.
    rows: Vec<f64>,
    /// One over the diagonal of L.
    inverse_diagonal: Vec<f64>,
}

const LANES: usize = 4;

impl Factor {
    /// Makes room for a matrix of `order` with `appended` rows below, all zero.
    pub(super) fn reset(&mut self, order: usize, appended: usize) {
        self.order = order;
        self.stride = order.next_multiple_of(LANES).max(LANES);
        let count = (order + appended).next_multiple_of(LANES);
        self.rows.clear();
        self.rows.resize(count * self.stride, 0.0);
        self.inverse_diagonal.clear();
        self.inverse_diagonal.resize(order, 0.0);
    }

    /// A row, to be filled up to the diagonal (or, below the matrix, over the whole order).
    pub(super) fn row_mut(&mut self, row: usize) -> &mut [f64] {
        &mut self.rows[row * self.stride..(row + 1) * self.stride]
    }

    /// A row as it stands.
    pub(super) fn row(&self, row: usize) -> &[f64] {
        &self.rows[row * self.stride..row * self.stride + self.order]
    }

    /// Factors the matrix and reduces the appended rows to L^-1 b. `jitter` is added to a pivot
    /// that falls below it (METHODS ANA-9), so that the factor always exists.
    pub(super) fn factor(&mut self, jitter: f64) {
        let (order, stride) = (self.order, self.stride);
        let total = self.rows.len() / stride;
        for start in (0..total).step_by(LANES) {
            let (done, rest) = self.rows.split_at_mut(start * stride);
            let block = &mut rest[..LANES * stride];
            let (a, others) = block.split_at_mut(stride);
            let (b, others) = others.split_at_mut(stride);
            let (c, d) = others.split_at_mut(stride);
            for column in 0..start.min(order) {
                let pivot = &done[column * stride..column * stride + column];
                let sums = dots(pivot, [&a[..column], &b[..column], &c[..column], &d[..column]]);
                let inverse = self.inverse_diagonal[column];
                a[column] = (a[column] - sums[0]) * inverse;
                b[column] = (b[column] - sums[1]) * inverse;
                c[column] = (c[column] - sums[2]) * inverse;
                d[column] = (d[column] - sums[3]) * inverse;
            }
            // The corner on the diagonal, row by row.
            for row in 0..LANES {
                for column in start..order.min(start + row + 1) {
                    let of = |k: usize| &block[k * stride..k * stride + column];
                    let sum: f64 = dot(of(row), of(column - start));
                    let value = block[row * stride + column] - sum;
                    if column == start + row {
                        let value = if value < jitter { value.max(0.0) + jitter } else { value };
                        let root = value.sqrt();
                        block[row * stride + column] = root;
                        self.inverse_diagonal[column] = 1.0 / root;
                    } else {
                        block[row * stride + column] = value * self.inverse_diagonal[column];
                    }
                }
            }
        }
    }

    /// L^-T y: the solution of the whole system from a reduced right-hand side.
    pub(super) fn back(&self, reduced: &[f64]) -> Vec<f64> {
        let mut out = reduced[..self.order].to_vec();
        for row in (0..self.order).rev() {
            out[row] *= self.inverse_diagonal[row];
            let value = out[row];
            let line = &self.rows[row * self.stride..row * self.stride + row];
            for (to, from) in out[..row].iter_mut().zip(line) {
                *to -= value * from;
            }
        }
        out
    }

    /// ln of the determinant of the matrix.
    pub(super) fn log_determinant(&self) -> f64 {
        -2.0 * self.inverse_diagonal.iter().map(|inverse| inverse.ln()).sum::<f64>()
    }
}

/// Dot products of one row with four others of the same length.
fn dots(pivot: &[f64], rows: [&[f64]; 4]) -> [f64; 4] {
    let mut sums = [[0.0; LANES]; 4];
    let length = pivot.len();
    let [a, b, c, d] = rows.map(|row| &row[..length]);
    let (p4, p_rest) = pivot.as_chunks::<LANES>();
    let (a4, a_rest) = a.as_chunks::<LANES>();
    let (b4, b_rest) = b.as_chunks::<LANES>();
    let (c4, c_rest) = c.as_chunks::<LANES>();
    let (d4, d_rest) = d.as_chunks::<LANES>();
    for ((((p, a), b), c), d) in p4.iter().zip(a4).zip(b4).zip(c4).zip(d4) {
        for k in 0..LANES {
            sums[0][k] += p[k] * a[k];
            sums[1][k] += p[k] * b[k];
            sums[2][k] += p[k] * c[k];
            sums[3][k] += p[k] * d[k];
        }
    }
    let tails = [a_rest, b_rest, c_rest, d_rest];
    let mut out = sums.map(|sum| (sum[0] + sum[1]) + (sum[2] + sum[3]));
    for (sum, tail) in out.iter_mut().zip(tails) {
        for (p, x) in p_rest.iter().zip(tail) {
            *sum += p * x;
        }
    }
    out
}

/// Dot product in four running sums.
pub(super) fn dot(a: &[f64], b: &[f64]) -> f64 {
    let mut sums = [0.0; LANES];
    let (a4, a_rest) = a.as_chunks::<LANES>();
    let (b4, b_rest) = b.as_chunks::<LANES>();
    for (a, b) in a4.iter().zip(b4) {
        for k in 0..LANES {
            sums[k] += a[k] * b[k];
        }
    }
    let mut sum = (sums[0] + sums[1]) + (sums[2] + sums[3]);
    for (a, b) in a_rest.iter().zip(b_rest) {
        sum += a * b;
    }
    sum
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn near(found: f64, expected: f64, tolerance: f64) {
        assert!((found - expected).abs() <= tolerance, "{found} is not {expected}");
    }

    fn factored(matrix: &[Vec<f64>], appended: &[Vec<f64>]) -> Factor {
        let mut factor = Factor::default();
        factor.reset(matrix.len(), appended.len());
        for (row, values) in matrix.iter().chain(appended).enumerate() {
            let length = if row < matrix.len() { row + 1 } else { matrix.len() };
            factor.row_mut(row)[..length].copy_from_slice(&values[..length]);
        }
        factor.factor(1e-12);
        factor
    }

    /// The example of METHODS ANA-2: three observations on a line, Gaussian L = 500 km.
    fn example() -> (Vec<Vec<f64>>, Vec<f64>, Vec<f64>) {
        let places: [f64; 3] = [-150.0, 100.0, 400.0];
        let errors: [f64; 3] = [1.0, 0.7, 1.5];
        let covariance = |r: f64| 4.0 * (-r * r / (2.0 * 500.0 * 500.0)).exp();
        let matrix = (0..3)
            .map(|i| {
                (0..3)
                    .map(|j| {
                        let own = if i == j { errors[i].powi(2) } else { 0.0 };
                        covariance(places[i] - places[j]) + own
                    })
                    .collect()
            })
            .collect();
        (matrix, places.map(covariance).to_vec(), vec![1.2, -0.4, 2.0])
    }

    /// METHODS CHK-140, 141, 153, 154, 155 (direct solve, information form, brute force).
    #[test]
    fn the_worked_example_comes_out() {
        let (matrix, target, departures) = example();
        let unit = |k: usize| (0..3).map(|i| f64::from(u8::from(i == k))).collect::<Vec<f64>>();
        let rows = vec![target.clone(), departures.clone(), unit(0), unit(1), unit(2)];
        let factor = factored(&matrix, &rows);
        let weights = factor.back(factor.row(3));
        for (found, expected) in weights.iter().zip([0.340_574, 0.578_240, 0.036_598]) {
            near(*found, expected, 1e-6);
        }
        near(dot(factor.row(3), factor.row(4)), 0.250_588, 1e-6);
        near((4.0 - dot(factor.row(3), factor.row(3))).sqrt(), 0.569_374, 1e-6);
        near(dot(factor.row(4), factor.row(4)), 2.903_944, 1e-5);
        let solved = factor.back(factor.row(4));
        let expected = [(1.784_553, 2.172_759), (-1.748_515, 1.386_727), (2.598_819, 3.675_867)];
        for (k, (residual, variance)) in expected.into_iter().enumerate() {
            let own = dot(factor.row(5 + k), factor.row(5 + k));
            near(solved[k] / own, residual, 1e-6);
            near(1.0 / own, variance, 1e-6);
        }
    }

    /// METHODS CHK-142.
    #[test]
    fn one_observation_at_the_target() {
        let factor = factored(&[vec![5.0]], &[vec![4.0], vec![3.0]]);
        near(dot(factor.row(1), factor.row(2)), 2.4, 1e-12);
        near((4.0 - dot(factor.row(1), factor.row(1))).sqrt(), 0.8944, 1e-4);
    }

    #[test]
    fn systems_of_every_size_are_solved() {
        for order in 1..40_usize {
            let entry = |i: usize, j: usize| {
                let gap = i.abs_diff(j) as f64;
                (-gap / 7.0).exp() + if i == j { 0.3 } else { 0.0 }
            };
            let matrix: Vec<Vec<f64>> =
                (0..order).map(|i| (0..order).map(|j| entry(i, j)).collect()).collect();
            let truth: Vec<f64> = (0..order).map(|k| (k as f64 * 1.3).sin()).collect();
            let right: Vec<f64> =
                matrix.iter().map(|row| row.iter().zip(&truth).map(|(a, b)| a * b).sum()).collect();
            let factor = factored(&matrix, &[right.clone(), right]);
            for appended in 0..2 {
                let solved = factor.back(factor.row(order + appended));
                for (found, expected) in solved.iter().zip(&truth) {
                    near(*found, *expected, 1e-11);
                }
            }
            let full = nalgebra::DMatrix::from_fn(order, order, entry);
            near(factor.log_determinant(), full.determinant().ln(), 1e-9);
        }
    }

    #[test]
    fn a_singular_matrix_gets_a_factor_all_the_same() {
        let factor = factored(&[vec![1.0, 1.0], vec![1.0, 1.0]], &[vec![1.0, 1.0]]);
        assert!(factor.back(factor.row(2)).iter().all(|value| value.is_finite()));
    }
}
