use super::*;

#[track_caller]
fn near(found: f64, expected: f64, tolerance: f64) {
    assert!((found - expected).abs() <= tolerance, "{found} is not {expected} +- {tolerance}");
}

/// METHODS CHK-036 to CHK-040: WMO-No. 8, Part I, chapter 3, computed by the formula and by a
/// numerical integral of the hydrostatic equation.
#[test]
fn reduces_as_the_handbook_does() {
    for (pressure, height, temperature, vapour, expected) in [
        (950.0, 500.0, 15.0, 12.0, 1007.3908),
        (1010.0, 30.0, 10.0, 9.0, 1013.6473),
        (940.0, 600.0, -20.0, 1.0, 1018.6112),
        (850.0, 1500.0, 25.0, 15.0, 1005.6107),
        (1001.3, 102.0, -5.5, 3.2, 1014.3865),
    ] {
        let reduced = to_sea_level_hpa(pressure, height, temperature, vapour);
        near(reduced, expected, 0.0005);
        near(to_station_hpa(reduced, height, temperature, vapour), pressure, 1e-9);
    }
}

/// METHODS CHK-041 to CHK-043: the exact lapse integral and the logarithmic form differ by known
/// amounts; the exponential form must stay between its own tolerance of the one and off the other.
#[test]
fn agrees_with_the_hydrostatic_integral_and_not_with_the_logarithmic_form() {
    let (pressure, height, temperature, vapour) = (950.0, 500.0, 15.0, 12.0);
    // Integral of dz/(T0 + L (H - z)) from the sea to the barometer, T0 at the barometer.
    let top_k: f64 = 273.15 + temperature + 0.12 * vapour;
    let integral = ((top_k + LAPSE_K_M * height) / top_k).ln() / LAPSE_K_M;
    let exact = pressure * (G_OVER_R_K_M * integral).exp();
    near(exact, 1007.3914, 0.0005);
    near(to_sea_level_hpa(pressure, height, temperature, vapour), exact, 0.015);
    let kp = 9.8 / (287.04 * std::f64::consts::LN_10);
    near(kp, 0.014_827_501, 1e-9);
    let column = 273.15 + temperature + LAPSE_K_M * height / 2.0 + 0.12 * vapour;
    near(pressure * 10f64.powf(0.014_827_5 * height / column), 1007.3528, 0.0005);
}

/// METHODS CHK-044 to CHK-047 (WMO-No. 8 Annex 4.B; MetPy 1.7.1 within 0.1 per cent).
#[test]
fn vapour_dew_point_and_virtual_temperature() {
    near(saturation_over_water_hpa(10.0), 12.2603, 0.0005);
    near(saturation_over_water_hpa(20.0), 23.3260, 0.0005);
    near(saturation_over_water_hpa(-10.0), 2.8703, 0.0005);
    near(saturation_over_ice_hpa(-10.0), 2.5987, 0.0005);
    near(saturation_over_ice_hpa(-20.0), 1.0326, 0.0005);
    near(dew_point_c(12.0).expect("positive"), 9.6794, 0.001);
    assert_eq!(dew_point_c(0.0), None);
    let vapour = vapour_from_wet_bulb_hpa(12.0, 9.5, 1005.0);
    near(vapour, 10.2010, 0.002);
    near(dew_point_c(vapour).expect("positive"), 7.2794, 0.002);
    near(virtual_temperature_k(288.15, 12.0, 950.0), 289.5324, 0.001);
}

/// METHODS CHK-048 to CHK-050.
#[test]
fn low_stations_and_ships() {
    near(low_station_correction_hpa(1010.0, 30.0, 284.23), 3.6421, 0.0005);
    near(low_station_correction_hpa(1010.0, 10.0, 288.15), 1.1975, 0.0005);
    near(low_station_correction_hpa(1013.25, 1.0, 288.15), 0.120_13, 1e-5);
}

/// METHODS CHK-051, CHK-052.
#[test]
fn the_temperature_of_the_reduction_and_what_a_kelvin_is_worth() {
    near(
        to_sea_level_hpa(950.0, 500.0, reduction_temperature_c(25.0, None), 12.0),
        1005.4310,
        5e-4,
    );
    let mean = reduction_temperature_c(25.0, Some(11.0));
    near(to_sea_level_hpa(950.0, 500.0, mean, 12.0), 1006.7885, 5e-4);
    for (pressure, height, expected) in [(955.0, 500.0, -0.212_12), (900.0, 1000.0, -0.419_36)] {
        let reduced = to_sea_level_hpa(pressure, height, 10.0, 8.0);
        near(sensitivity_hpa_k(reduced, height, 10.0, 8.0), expected, 2e-4);
    }
}

/// METHODS CHK-023, CHK-024, CHK-053 to CHK-058 (ISO 2533; ICAO Doc 7488).
#[test]
fn the_standard_atmosphere_and_the_altimeter_setting() {
    for (height, expected) in
        [(500.0, 954.6084), (1000.0, 898.7456), (3000.0, 701.0853), (5000.0, 540.1989)]
    {
        near(standard_pressure_hpa(height), expected, 0.001);
    }
    near(altimeter_from_station_hpa(950.0, 500.0), 1008.4136, 0.001);
    near(station_from_altimeter_hpa(1013.0, 1000.0), 898.5188, 0.001);
    near(station_from_altimeter_hpa(995.0, 120.0), 980.8767, 0.001);
    let station = station_from_altimeter_hpa(1013.0, 300.0);
    near(station, 977.4829, 0.001);
    for (temperature, expected) in [(-10.0, 1016.123), (25.0, 1011.250)] {
        let vapour = vapour_hpa(temperature, None, Some(70.0));
        near(to_sea_level_hpa(station, 300.0, temperature, vapour), expected, 0.003);
    }
    near(station_from_altimeter_hpa(1013.0, 1e6), 0.0, 0.0);
}

/// METHODS CHK-059, CHK-060, and the way back from the surface to the sea.
#[test]
fn heights_of_standard_surfaces() {
    near(surface_height_gpm(850.0, 880.0, 1200.0, 8.0, 7.5), 1485.417, 0.05);
    let height = surface_height_gpm(700.0, 752.0, 2450.0, -6.0, 2.5);
    near(height, 3007.154, 0.05);
    let back = sea_level_from_surface_hpa(700.0, height, 2450.0, -6.0, 2.5);
    near(back, to_sea_level_hpa(752.0, 2450.0, -6.0, 2.5), 0.2);
}

/// METHODS CHK-061, CHK-062 (WMO-No. 8; WGS84).
#[test]
fn gravity_and_geopotential() {
    for (latitude, expected) in
        [(0.0, 9.780_33), (45.0, 9.806_20), (60.0, 9.819_18), (90.0, 9.832_19)]
    {
        near(normal_gravity_m_s2(latitude), expected, 1e-5);
    }
    near(geopotential_gpm(2000.0, 60.0), 2001.926, 0.01);
    near(geopotential_gpm(2000.0, 20.0), 1995.234, 0.01);
}
