//! Digits that the code leaves out, put back (METHODS COD-7).

use crate::report::{Platform, StandardSurface};

/// Pressure in tenths of a hectopascal with the thousands left out: 0124 is 1012.4 hPa.
pub(crate) fn unwrap_pressure_hpa(coded: u32) -> Option<f64> {
    let coded = i32::try_from(coded).ok().filter(|coded| *coded <= 9999)?;
    let tenths = if coded < 5000 { coded + 10_000 } else { coded };
    Some(crate::wire::group::tenths(tenths))
}

/// The height of a standard surface from a3 (code table 0264) and hhh; `None` where a3 is none.
pub(crate) fn standard_surface(a3: u8, coded: u32) -> Option<StandardSurface> {
    let h = f64::from(coded);
    let (pressure_hpa, height_gpm) = match a3 {
        // Heights below sea level are coded as 500 and the figure.
        1 => (1000.0, if coded < 500 { h } else { 500.0 - h }),
        2 => (925.0, if coded >= 100 { h } else { 1000.0 + h }),
        5 => (500.0, if coded < 900 { 5000.0 + h } else { 4000.0 + h }),
        7 => (700.0, if coded >= 500 { 2000.0 + h } else { 3000.0 + h }),
        8 => (850.0, 1000.0 + h),
        _ => return None,
    };
    Some(StandardSurface { pressure_hpa, height_gpm })
}

/// What a group 4 carries.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(crate) enum GroupFour {
    /// Sea-level pressure, hPa.
    SeaLevel(f64),
    /// The height of a standard surface.
    Height(StandardSurface),
}

/// Tells 4PPPP from 4a3hhh by the second figure and, where it is an 8, by the platform and the
/// station pressure (METHODS COD-7).
///
/// `coded` are the four figures after the 4. Where no station pressure was sent, a land station
/// with an 8 means the 850 hPa surface unless the sea-level pressure would be 870 hPa or more:
/// none so low was ever measured.
pub(crate) fn group_four(
    coded: u32,
    platform: Platform,
    station_pressure_hpa: Option<f64>,
) -> Option<GroupFour> {
    let a3 = u8::try_from(coded / 1000).ok()?;
    let hhh = coded % 1000;
    match a3 {
        0 | 9 => unwrap_pressure_hpa(coded).map(GroupFour::SeaLevel),
        8 => {
            let high = match (platform, station_pressure_hpa) {
                (Platform::Ship | Platform::Buoy, _) => false,
                (_, Some(pressure_hpa)) => pressure_hpa < 940.0,
                (_, None) => hhh < 700,
            };
            if high {
                standard_surface(8, hhh).map(GroupFour::Height)
            } else {
                unwrap_pressure_hpa(coded).map(GroupFour::SeaLevel)
            }
        }
        _ if matches!(platform, Platform::Ship | Platform::Buoy) => None,
        _ => standard_surface(a3, hhh).map(GroupFour::Height),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// METHODS CHK-007 to CHK-011 (rule of a national code book).
    #[test]
    fn thousands_are_put_back() {
        for (coded, expected) in
            [(9908, 990.8), (124, 1012.4), (0, 1000.0), (7523, 752.3), (498, 1049.8), (9999, 999.9)]
        {
            assert_eq!(unwrap_pressure_hpa(coded), Some(expected), "{coded}");
        }
        assert_eq!(unwrap_pressure_hpa(10_000), None);
    }

    /// METHODS CHK-012 (47007 also by pymetdecoder 0.2.2).
    #[test]
    fn heights_of_standard_surfaces() {
        let height = |coded: u32| match group_four(coded, Platform::Land, Some(752.0)) {
            Some(GroupFour::Height(surface)) => (surface.pressure_hpa, surface.height_gpm),
            other => panic!("{coded}: {other:?}"),
        };
        assert_eq!(height(8493), (850.0, 1493.0));
        assert_eq!(height(7007), (700.0, 3007.0));
        assert_eq!(height(7890), (700.0, 2890.0));
        assert_eq!(height(2762), (925.0, 762.0));
        assert_eq!(height(5520), (500.0, 5520.0));
        assert_eq!(height(1520), (1000.0, -20.0));
    }

    #[test]
    fn an_eight_is_a_height_on_high_land_only() {
        let sea_level = |platform, station| {
            group_four(8934, platform, station) == Some(GroupFour::SeaLevel(893.4))
        };
        assert!(sea_level(Platform::Ship, None));
        assert!(sea_level(Platform::Land, Some(960.0)));
        assert!(sea_level(Platform::Land, None));
        assert!(!sea_level(Platform::Land, Some(880.0)));
        assert!(matches!(group_four(8493, Platform::Land, None), Some(GroupFour::Height(_))));
        assert_eq!(group_four(3500, Platform::Land, None), None);
        assert_eq!(group_four(1500, Platform::Ship, None), None);
    }
}
