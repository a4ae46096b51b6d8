use super::*;

#[track_caller]
fn near(found: f64, expected: f64, tolerance: f64) {
    assert!((found - expected).abs() <= tolerance, "{found} is not {expected}");
}

/// The radial functions of the published values, in the form used here: the correlation and its
/// derivatives by C, with `ratio` = a / L. Gaussian: exp(-(1 - C) ratio^2). SOAR: (1 + x) e^-x.
fn gauss(versine: f64, ratio: f64) -> Radial {
    let value = (-versine * ratio * ratio).exp();
    Radial { value, first: ratio.powi(2) * value, second: ratio.powi(4) * value }
}

fn soar(versine: f64, ratio: f64) -> Radial {
    let x = ratio * (2.0 * versine).sqrt();
    let e = (-x).exp();
    Radial { value: (1.0 + x) * e, first: ratio.powi(2) * e, second: ratio.powi(4) * e / x }
}

/// METHODS CHK-145 and CHK-148 (nested finite differences): the same operators and the same
/// composition as the analysis uses, with the two functions of the published values.
#[test]
fn pressure_and_wind_covary_on_the_sphere_as_finite_differences_say() {
    let (i, j) = (Position::clamped(50.0, 0.0), Position::clamped(52.0, 5.0));
    let ratio = EARTH_RADIUS_M / 500e3;
    let (up_i, up_j) = (directions(i)[0], directions(j)[0]);
    // The published values are without the low-latitude taper.
    let free = |place: Position| {
        let g = coupling(place.latitude_deg());
        wind_operators(place, 1.225).map(|w| w.map(|part| part / g))
    };
    let (w_i, w_j) = (free(i), free(j));
    let gap: Vector = std::array::from_fn(|k| up_i[k] - up_j[k]);
    let versine = dot(&gap, &gap) / 2.0;
    // pp in Pa^2, pressure and wind in Pa m/s, wind in (m/s)^2; sigma 2 hPa.
    for (radial, expected) in [
        (
            gauss(versine, ratio),
            [
                28374.10, 169.3496, -287.7412, -193.8714, 283.5011, 4.716_331, 1.572_762,
                2.096_626, 2.993_169,
            ],
        ),
        (
            soar(versine, ratio),
            [
                31937.09, 104.2332, -177.1022, -119.3262, 174.4925, 2.755_682, 1.218_092,
                1.505_676, 1.476_588,
            ],
        ),
    ] {
        let variance = 4.0;
        let pw = |k: usize| variance * radial.first * dot(&up_i, &w_j[k]) * 100.0;
        let wp = |k: usize| variance * radial.first * dot(&up_j, &w_i[k]) * 100.0;
        let ww = |k: usize, l: usize| {
            variance
                * (radial.first * dot(&w_i[k], &w_j[l])
                    + radial.second * dot(&w_i[k], &up_j) * dot(&up_i, &w_j[l]))
        };
        let found = [
            variance * radial.value * 1e4,
            pw(0),
            pw(1),
            wp(0),
            wp(1),
            ww(0, 0),
            ww(0, 1),
            ww(1, 0),
            ww(1, 1),
        ];
        for (found, expected) in found.iter().zip(expected) {
            near(*found, expected, 1e-4 * expected.abs().max(1.0));
        }
    }
}

/// METHODS CHK-143, 144, 146, 147 and 149 (sympy): the plane is a very large sphere.
#[test]
fn the_plane_is_the_limit_of_a_large_sphere() {
    let radius_m = 1e9;
    let (dx, dy, length_m) = (300e3, -200e3, 500e3);
    // Both places near the point where up is x, east y and north z; sigma 2 hPa; latitude 50.
    let place = |east_m: f64, north_m: f64| {
        let (a, b) = (east_m / radius_m, north_m / radius_m);
        let up = [(1.0 - a * a - b * b).sqrt(), a, b];
        let factor = 1.0 / (1.225 * coriolis_per_s(50.0) * radius_m);
        // Tangents there, to first order, with the geostrophic factor for pressure in Pa.
        ([up[0], up[1], up[2]], [[factor * b, 0.0, -factor], [-factor * a, factor, 0.0]])
    };
    let ((up_i, w_i), (up_j, w_j)) = (place(0.0, 0.0), place(dx, dy));
    let gap: Vector = std::array::from_fn(|k| up_i[k] - up_j[k]);
    let versine = dot(&gap, &gap) / 2.0;
    let ratio = radius_m / length_m;
    for (radial, expected) in [
        (
            gauss(versine, ratio),
            [30842.063, -180.285_11, -270.427_66, 5.532_680, 4.215_376, -1.580_766],
        ),
        (
            soar(versine, ratio),
            [33472.988, -113.684_75, -170.527_13, 3.231_805, 2.079_873, -1.382_319],
        ),
    ] {
        let variance = 4e4;
        let ww = |k: usize, l: usize| {
            variance
                * (radial.first * dot(&w_i[k], &w_j[l])
                    + radial.second * dot(&w_i[k], &up_j) * dot(&up_i, &w_j[l]))
        };
        let found = [
            variance * radial.value,
            variance * radial.first * dot(&up_i, &w_j[0]),
            variance * radial.first * dot(&up_i, &w_j[1]),
            ww(0, 0),
            ww(1, 1),
            ww(0, 1),
        ];
        for (found, expected) in found.iter().zip(expected) {
            near(*found, expected, 1e-5 * expected.abs().max(1.0));
        }
        // Same place: the wind's standard deviation, 2.92271 m/s.
        let own = variance * ratio * ratio * dot(&w_i[0], &w_i[0]);
        near(own.sqrt(), 2.922_71, 1e-4);
    }
}

/// METHODS CHK-150.
#[test]
fn the_coupling_fades_towards_the_equator() {
    for (latitude_deg, expected) in
        [(5.0, 0.105_16), (10.0, 0.358_82), (20.0, 0.830_99), (-30.0, 0.981_68)]
    {
        near(coupling(latitude_deg), expected, 1e-5);
    }
    let equator = wind_operators(Position::clamped(0.0, 30.0), 1.2);
    assert!(equator.iter().flatten().all(|part| *part == 0.0));
}

#[test]
fn the_decay_is_the_exponential() {
    for k in 0..=2999 {
        let x = f64::from(k) * 0.1;
        near(decay(x) / (-x).exp(), 1.0, 1e-11);
    }
    assert!(decay(f64::INFINITY) < 1e-100);
    near(decay(0.0), 1.0, 0.0);
}

/// The derivatives by C agree with differences of the value.
#[test]
fn the_matern_term_is_its_own_derivative() {
    let covariance = Covariance::new([11.0, 2.0], 1100.0, 12.0);
    near(covariance.between(0.0, 0.0).value, 125.0, 1e-12);
    for versine in [1e-4, 1e-3, 1e-2, 0.1, 0.7] {
        let h = versine * 1e-4;
        let at = |step: f64| covariance.between(versine + step, 2.0);
        let (low, high, mid) = (at(-h), at(h), at(0.0));
        near(-(high.value - low.value) / (2.0 * h), mid.first, 1e-5 * mid.first);
        near(-(high.first - low.first) / (2.0 * h), mid.second, 1e-5 * mid.second);
    }
}

/// A positive pressure departure has lower pressure, hence a northerly wind, to its east and a
/// westerly to its north, in the northern hemisphere; the opposite in the southern (ANA-3, signs).
#[test]
fn winds_blow_round_a_departure_the_right_way_in_both_hemispheres() {
    let covariance = Covariance::new([10.0, 1.0], 1000.0, 12.0);
    for (latitude_deg, sign) in [(50.0, 1.0), (-50.0, -1.0)] {
        let centre = Position::clamped(latitude_deg, 10.0);
        let wind = |place: Position| {
            let (up, w) = (directions(centre)[0], wind_operators(place, 1.22));
            let first = covariance.between(1.0 - dot(&up, &directions(place)[0]), 0.0).first;
            w.map(|w| first * dot(&up, &w))
        };
        let east = wind(centre.offset(400.0, 0.0));
        let north = wind(centre.offset(0.0, 400.0));
        assert!(east[1] * sign < -1.0, "{east:?}");
        assert!(north[0] * sign > 1.0, "{north:?}");
    }
}
