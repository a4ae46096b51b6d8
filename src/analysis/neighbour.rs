//! The neighbour check: is a report wrong, or is it the one that knows?
//!
//! Each pressure is held against an analysis made without it. The probability of a gross error
//! follows from Bayes' rule (METHODS ANA-7: Lorenc and Hammon 1988; Ingleby and Lorenc 1993).
//! Suspects are then judged again against sound neighbours only, so that a wrong one does not
//! condemn the right ones around it; two suspects of different stations that support each other are
//! both kept; and a low report with falling pressure is never refused alone.

use super::covariance::{Covariance, dot};
use super::patch::LeftOut;
use super::site::{Departure, Site, Used};
use super::solve::{self, Factor};
use crate::obs::{Element, Finding, Observation, Verdict};
use crate::report::Platform;

/// A gross error is anywhere within so many hPa.
const GROSS_RANGE_HPA: f64 = 60.0;
/// Probability of a gross error from which a pressure is refused.
const REFUSED: f64 = 0.5;
/// Standard deviations (wary ones) from which a used pressure is doubtful.
const DOUBTFUL: f64 = 3.0;
/// Error of a doubtful pressure is multiplied by this.
const DOUBTFUL_ERROR_FACTOR: f64 = 2.0;
/// Factors on the variances, of what is expected and of the report's error, in a judgement (own
/// numbers: with 1 the centre of a real storm is refused, January 1996).
const WARY: [f64; 2] = [5.0, 2.25];
/// Neighbours in a judgement.
const NEIGHBOURS: usize = 24;
/// A low report with a fall of at least this over 3 h, hPa, is not refused alone below
/// [`EXPLODING_HPA`].
const SUPPORTING_FALL_HPA: f64 = 3.0;
const EXPLODING_HPA: f64 = 15.0;
/// Two reports within this distance (age counted in) support each other up to so many hPa.
const SUPPORT_KM: f64 = 400.0;
const SUPPORTED_HPA: f64 = 25.0;
/// Wind: expected standard deviations from which it is not used for the pressure.
const WIND_REFUSED: f64 = 4.5;

/// Probability of a gross error of a pressure that differs by `difference_hpa` from what is expected
/// with `variance_hpa2`, from `prior`.
pub(super) fn gross_probability(difference_hpa: f64, variance_hpa2: f64, prior: f64) -> f64 {
    let gross = prior / GROSS_RANGE_HPA;
    let sound = (1.0 - prior) * normal(difference_hpa, variance_hpa2);
    gross / (gross + sound)
}

/// The same of the first of two reports, whose background errors are correlated: four hypotheses.
/// Each report is (difference, background variance, observation variance, prior).
pub(super) fn pair_probability(
    one: (f64, f64, f64, f64),
    other: (f64, f64, f64, f64),
    correlation: f64,
) -> f64 {
    let alone =
        |(d, b, o, p): (f64, f64, f64, f64)| (p / GROSS_RANGE_HPA, (1.0 - p) * normal(d, b + o));
    let ((gross_one, sound_one), (gross_other, sound_other)) = (alone(one), alone(other));
    let (v1, v2) = (one.1 + one.2, other.1 + other.2);
    let shared = correlation * (one.1 * other.1).sqrt();
    let determinant = (v1 * v2 - shared * shared).max(1e-12);
    let quadratic = (v2 * one.0 * one.0 - 2.0 * shared * one.0 * other.0 + v1 * other.0 * other.0)
        / determinant;
    let both = (1.0 - one.3) * (1.0 - other.3) * (-0.5 * quadratic).exp()
        / (std::f64::consts::TAU * determinant.sqrt());
    let joint = both + gross_one * (gross_other + sound_other) + sound_one * gross_other;
    (gross_one * (gross_other + sound_other) / joint).clamp(0.0, 1.0)
}

fn normal(difference: f64, variance: f64) -> f64 {
    (-0.5 * difference * difference / variance).exp() / (std::f64::consts::TAU * variance).sqrt()
}

/// The variance with which a pressure is judged: the weather's extremes are larger than the covariance
/// of ordinary days expects, and a storm must not be refused for being one.
fn wary(background: f64, error_square: f64) -> f64 {
    WARY[0] * background.max(0.0) + WARY[1] * error_square
}

/// Probability of a gross error before anything is known (ANA-7), raised where an earlier check
/// doubted the report.
fn prior(observation: &Observation) -> f64 {
    let usual = match observation.report.platform {
        Platform::Land | Platform::Aerodrome => 0.015,
        Platform::Ship => 0.04,
        Platform::Buoy => 0.02,
    };
    if observation.verdict(Element::Pressure) == Verdict::Doubtful { 3.0 * usual } else { usual }
}

/// What is made of one report.
#[derive(Clone, PartialEq, Debug, Default)]
pub(super) struct Judgement {
    /// Pressure minus what is expected without it, hPa, and the variance of that difference.
    pub(super) pressure: Option<(f64, f64)>,
    /// Finding against the pressure.
    pub(super) pressure_finding: Option<Finding>,
    /// Finding against the wind.
    pub(super) wind_finding: Option<Finding>,
}

impl Judgement {
    pub(super) fn refuses_pressure(&self) -> bool {
        self.pressure_finding.as_ref().is_some_and(|finding| finding.verdict == Verdict::Refused)
    }

    /// Factor on the error of the pressure.
    pub(super) fn error_factor(&self) -> f64 {
        let doubtful =
            self.pressure_finding.as_ref().is_some_and(|f| f.verdict == Verdict::Doubtful);
        if doubtful { DOUBTFUL_ERROR_FACTOR } else { 1.0 }
    }
}

/// A report's own departure and what the rest says of it.
#[derive(Clone, Copy, Debug)]
struct Suspect {
    /// Index of the report.
    report: usize,
    /// Difference, and variance of the expected value alone.
    difference: f64,
    background: f64,
    probability: f64,
}

/// What the check is made with.
pub(super) struct Check<'a> {
    pub(super) used: &'a [Used],
    /// One site for each report with something to use, not joined.
    pub(super) single: &'a [Site],
    /// The joined sites and their left-out differences.
    pub(super) sites: &'a [Site],
    pub(super) left_out: &'a [Option<LeftOut>],
    pub(super) covariance: &'a Covariance,
    pub(super) km_per_h: f64,
    /// Reports that the watchkeeper has ruled sound.
    pub(super) kept: &'a [bool],
}

impl Check<'_> {
    /// One judgement for each report.
    pub(super) fn judge(&self) -> Vec<Judgement> {
        let mut out = vec![Judgement::default(); self.used.len()];
        let own: Vec<Option<&Site>> = {
            let mut own = vec![None; self.used.len()];
            for site in self.single {
                for &member in &site.members {
                    own[member] = Some(site);
                }
            }
            own
        };
        let mut suspects = Vec::new();
        for (site, left_out) in self.sites.iter().zip(self.left_out) {
            let Some(left_out) = left_out else { continue };
            judge_wind(site, left_out, &mut out);
            let (Some(joined), Some(([difference, _], variance))) = (site.scalar, left_out.scalar)
            else {
                continue;
            };
            let expected = joined.values[0] - difference;
            let background = (variance - joined.error * joined.error).max(0.0);
            for &report in &site.members {
                let Some(departure) = own[report].and_then(|site| site.scalar) else { continue };
                let difference = departure.values[0] - expected;
                let variance = background + departure.error * departure.error;
                out[report].pressure = Some((difference, variance));
                let probability = gross_probability(
                    difference,
                    wary(background, departure.error * departure.error),
                    prior(&self.used[report].observation),
                );
                if probability > REFUSED && !self.kept[report] {
                    suspects.push(Suspect { report, difference, background, probability });
                }
            }
        }
        self.judge_suspects(suspects, &own, &mut out);
        for (report, judgement) in out.iter_mut().enumerate() {
            let Some((difference, variance)) = judgement.pressure else { continue };
            let error = error(&own, report).powi(2);
            let doubtful = difference.abs() > DOUBTFUL * wary(variance - error, error).sqrt();
            if judgement.pressure_finding.is_none() && doubtful && !self.kept[report] {
                let reason = format!(
                    "{difference:+.1} hPa from what the neighbours say, expected within {:.1}",
                    variance.sqrt()
                );
                judgement.pressure_finding =
                    Some(finding(Element::Pressure, Verdict::Doubtful, reason));
            }
        }
        out
    }

    fn judge_suspects(
        &self,
        mut suspects: Vec<Suspect>,
        own: &[Option<&Site>],
        out: &mut [Judgement],
    ) {
        // The least suspected first, so that those that a worse one had drawn in are free to
        // speak for others. Twice: the second round hears those that the first has freed.
        suspects
            .sort_by(|a, b| a.probability.total_cmp(&b.probability).then(a.report.cmp(&b.report)));
        for _ in 0..2 {
            let mut at = 0;
            while at < suspects.len() {
                let accused: Vec<usize> = suspects.iter().map(|s| s.report).collect();
                let again = self.again(suspects[at].report, own, &accused);
                if let Some(again) = again {
                    suspects[at] = again;
                    let variance = again.background + error(own, again.report).powi(2);
                    out[again.report].pressure = Some((again.difference, variance));
                }
                if suspects[at].probability > REFUSED {
                    at += 1;
                } else {
                    suspects.remove(at);
                }
            }
        }
        let accused: Vec<usize> = suspects.iter().map(|s| s.report).collect();
        let rescued: Vec<Option<usize>> = suspects
            .iter()
            .map(|one| suspects.iter().position(|other| self.supports(one, other, own, &accused)))
            .collect();
        for (suspect, buddy) in suspects.iter().zip(&rescued) {
            let observation = &self.used[suspect.report].observation;
            let variance = suspect.background + error(own, suspect.report).powi(2);
            let numbers = format!(
                "{:+.1} hPa from what the neighbours say, expected within {:.1}; probability of a \
                 gross error {:.2}",
                suspect.difference,
                variance.sqrt(),
                suspect.probability
            );
            let fall = observation.report.pressure_change_3h_hpa.unwrap_or(0.0);
            let exploding = suspect.difference < 0.0
                && suspect.difference > -EXPLODING_HPA
                && fall <= -SUPPORTING_FALL_HPA;
            let found = if let Some(buddy) = buddy {
                let other = &self.used[suspects[*buddy].report].observation;
                let reason = format!("{numbers}; kept: {} supports it", other.report.station);
                finding(Element::Pressure, Verdict::Doubtful, reason)
            } else if exploding {
                let reason = format!("{numbers}; kept: its pressure fell {:.1} hPa in 3 h", -fall);
                finding(Element::Pressure, Verdict::Doubtful, reason)
            } else {
                finding(Element::Pressure, Verdict::Refused, numbers)
            };
            out[suspect.report].pressure_finding = Some(found);
        }
    }

    /// The nearest neighbours of a report that are not accused and not of its station.
    fn neighbours(
        &self,
        report: usize,
        own: &[Option<&Site>],
        accused: &[usize],
    ) -> Option<Vec<(&Site, Departure)>> {
        let site = own[report]?;
        let station = self.used[report].observation.report.station;
        let mut near: Vec<(f64, usize)> = self
            .single
            .iter()
            .enumerate()
            .filter(|(_, other)| {
                other.scalar.is_some()
                    && other.members.iter().all(|member| {
                        !accused.contains(member)
                            && self.used[*member].observation.report.station != station
                    })
            })
            .map(|(index, other)| (self.gap(site, other), index))
            .collect();
        let order = |a: &(f64, usize), b: &(f64, usize)| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1));
        if near.len() > NEIGHBOURS {
            near.select_nth_unstable_by(NEIGHBOURS - 1, order);
            near.truncate(NEIGHBOURS);
        }
        near.sort_unstable_by(order);
        Some(
            near.iter()
                .filter_map(|&(_, index)| Some((&self.single[index], self.single[index].scalar?)))
                .collect(),
        )
    }

    /// A report held against its sound neighbours.
    fn again(&self, report: usize, own: &[Option<&Site>], accused: &[usize]) -> Option<Suspect> {
        let site = own[report]?;
        let departure = site.scalar?;
        let neighbours = self.neighbours(report, own, accused)?;
        let ([expected, _], [background, ..]) = expected(self.covariance, [site; 2], &neighbours);
        let difference = departure.values[0] - expected;
        let variance = wary(background, departure.error * departure.error);
        let prior = prior(&self.used[report].observation);
        let probability = gross_probability(difference, variance, prior);
        Some(Suspect { report, difference, background, probability })
    }

    fn gap(&self, one: &Site, other: &Site) -> f64 {
        let km = crate::sphere::EARTH_RADIUS_KM;
        let chord = 2.0 * (1.0 - dot(&one.up, &other.up)).max(0.0);
        chord * km * km + (self.km_per_h * (one.age_h - other.age_h)).powi(2)
    }

    /// Whether two suspects of different stations make each other likely to be right, given what
    /// the sound neighbours say of both together.
    fn supports(
        &self,
        one: &Suspect,
        other: &Suspect,
        own: &[Option<&Site>],
        accused: &[usize],
    ) -> bool {
        let (Some(a), Some(b)) = (own[one.report], own[other.report]) else { return false };
        let (Some(y_a), Some(y_b)) = (a.scalar, b.scalar) else { return false };
        let (first, second) =
            (&self.used[one.report].observation, &self.used[other.report].observation);
        if first.report.station == second.report.station {
            return false;
        }
        let Some(neighbours) = self.neighbours(one.report, own, accused) else { return false };
        let (means, [v_a, v_b, shared]) = expected(self.covariance, [a, b], &neighbours);
        let differences = [y_a.values[0] - means[0], y_b.values[0] - means[1]];
        if agree(differences, self.gap(a, b).sqrt()) {
            return true;
        }
        let correlation = shared / (v_a * v_b).sqrt().max(1e-9);
        if correlation < 0.3 {
            return false;
        }
        let part = |difference: f64, background: f64, error: f64, prior: f64| {
            let error = WARY[1] * error * error;
            (difference, WARY[0] * background, error, prior)
        };
        let one = part(differences[0], v_a, y_a.error, prior(first));
        let other = part(differences[1], v_b, y_b.error, prior(second));
        pair_probability(one, other, correlation) < REFUSED
            && pair_probability(other, one, correlation) < REFUSED
    }
}

fn judge_wind(site: &Site, left_out: &LeftOut, out: &mut [Judgement]) {
    let Some((difference, variance)) = left_out.wind else { return };
    let worst =
        (0..2).map(|k| difference[k].abs() / variance[k].max(1e-12).sqrt()).fold(0.0, f64::max);
    if worst > WIND_REFUSED {
        for &report in &site.members {
            let reason = format!(
                "geostrophic equivalent {:+.0}, {:+.0} m/s (east, north) from what the pressures \
                 say, {worst:.1} times what is expected; not used for the pressure",
                difference[0], difference[1]
            );
            out[report].wind_finding = Some(finding(Element::Wind, Verdict::Doubtful, reason));
        }
    }
}

/// Whether two differences, hPa, so many km apart, tell of the same thing. The weather has more
/// extremes than a normal distribution, two independent errors seldom agree (own rule).
fn agree([one, other]: [f64; 2], apart_km: f64) -> bool {
    let larger = one.abs().max(other.abs());
    one * other > 0.0
        && apart_km < SUPPORT_KM
        && (one - other).abs() < (0.35 * larger).max(3.0)
        && larger < SUPPORTED_HPA
}

fn error(own: &[Option<&Site>], report: usize) -> f64 {
    own[report].and_then(|site| site.scalar).map_or(1.0, |departure| departure.error)
}

fn finding(element: Element, verdict: Verdict, reason: String) -> Finding {
    Finding { element, verdict, check: "QC-6 neighbours".to_owned(), reason }
}

/// What the neighbours expect at two sites, the variances of that, and the covariance of the two.
fn expected(
    covariance: &Covariance,
    sites: [&Site; 2],
    neighbours: &[(&Site, Departure)],
) -> ([f64; 2], [f64; 3]) {
    let count = neighbours.len();
    let between =
        |a: &Site, b: &Site| covariance.between(1.0 - dot(&a.up, &b.up), a.age_h - b.age_h).value;
    let mut factor = Factor::default();
    factor.reset(count, 3);
    for (i, (a, departure)) in neighbours.iter().enumerate() {
        for (j, (b, _)) in neighbours[..=i].iter().enumerate() {
            factor.row_mut(i)[j] = between(a, b);
        }
        factor.row_mut(i)[i] += departure.error * departure.error;
        factor.row_mut(count)[i] = between(sites[0], a);
        factor.row_mut(count + 1)[i] = between(sites[1], a);
        factor.row_mut(count + 2)[i] = departure.values[0];
    }
    factor.factor(1e-6 * covariance.variance());
    let (one, two, y) = (factor.row(count), factor.row(count + 1), factor.row(count + 2));
    let left = |a: &[f64]| (covariance.variance() - solve::dot(a, a)).max(0.0);
    let shared = between(sites[0], sites[1]) - solve::dot(one, two);
    ([solve::dot(one, y), solve::dot(two, y)], [left(one), left(two), shared])
}

#[cfg(test)]
mod tests {
    use super::*;

    /// METHODS CHK-156 to CHK-158 (closed form; root; enumeration of the four hypotheses).
    #[test]
    fn the_probability_of_a_gross_error_is_as_published() {
        let single = |d: f64| gross_probability(d, 5.0, 0.015);
        for (d, expected) in [
            (2.0, 0.002_118),
            (5.0, 0.017_035),
            (7.0, 0.160_397),
            (8.0, 0.461_258),
            (10.0, 0.969_073),
        ] {
            assert!((single(d) - expected).abs() < 1e-6, "{d}: {}", single(d));
        }
        assert!((single(8.096_467) - 0.5).abs() < 1e-5);
        let pair = |a: f64, b: f64, correlation: f64| {
            pair_probability((a, 4.0, 1.0, 0.015), (b, 4.0, 1.0, 0.015), correlation)
        };
        for (a, b, correlation, expected) in [
            (7.0, 6.5, 0.9, 0.003_296_1),
            (7.0, 0.5, 0.9, 0.897_228_1),
            (7.0, 6.5, 0.0, 0.160_396_8),
        ] {
            let found = pair(a, b, correlation);
            assert!((found - expected).abs() < 1e-6, "{a} {b} {correlation}: {found}");
        }
    }
}
