//! Remarks that concern pressure: `SLPppp`, `5appp`, `PRESRR`, `PRESFR`, and temperatures in tenths.

use crate::report::Report;
use crate::wire::group::{Figures, Group, Groups, tenths};
use crate::wire::listener::Listener;
use crate::wire::synop::element;

/// Reads the groups after RMK.
pub(super) fn read<L: Listener>(groups: &mut Groups<'_>, report: &mut Report, listener: &mut L) {
    for group in groups {
        match group.text {
            b"SLPNO" => listener.part(group, || "sea-level pressure not available".to_owned()),
            [b'S', b'L', b'P', _, ..] => sea_level(group, report, listener),
            b"PRESRR" => listener.part(group, || "pressure rising rapidly".to_owned()),
            b"PRESFR" => listener.part(group, || "pressure falling rapidly".to_owned()),
            [b'5', ..] if group.is_coded(5) => {
                if let Some(tendency) = element::tendency(group, "remark 5appp", listener) {
                    report.characteristic = tendency.characteristic;
                    report.pressure_change_3h_hpa = tendency.change_hpa;
                }
            }
            [b'T', ..] if group.text.len() == 9 => tenths_of_a_degree(group, report, listener),
            _ => listener.part(group, || "remark: not read".to_owned()),
        }
    }
}

/// `SLPppp`: tens, units and tenths (METHODS CHK-022). A value near 500 may mean either hundred:
/// the one nearer to the altimeter setting is taken.
pub(super) fn sea_level<L: Listener>(group: Group<'_>, report: &mut Report, listener: &mut L) {
    let value = match (group.text.len(), group.figures(3, 6)) {
        (6, Figures::Value(coded)) => i32::try_from(coded).unwrap_or(0),
        (6, Figures::Missing) => {
            listener.part(group, || "sea-level pressure not reported".to_owned());
            return;
        }
        _ => {
            listener.complain(group, "remark SLPppp: three figures", || {
                "no sea-level pressure can be read".to_owned()
            });
            return;
        }
    };
    let (low, high) = (tenths(9000 + value), tenths(10_000 + value));
    let pressure_hpa = match report.altimeter_hpa {
        // Between 400 and 600 the setting decides.
        Some(setting_hpa) if (400..600).contains(&value) => {
            if (setting_hpa - low).abs() < (setting_hpa - high).abs() { low } else { high }
        }
        _ if value < 500 => high,
        _ => low,
    };
    report.pressure_msl_hpa = Some(pressure_hpa);
    listener.part(group, || format!("sea-level pressure {pressure_hpa:.1} hPa"));
}

/// `TsnT'T'T'snT'dT'dT'd`: temperature and dew point to the tenth.
fn tenths_of_a_degree<L: Listener>(group: Group<'_>, report: &mut Report, listener: &mut L) {
    let value = |from: usize| match (group.figure(from), group.figures(from + 1, from + 4)) {
        (Some(0), Figures::Value(value)) => Some(tenths(i32::try_from(value).ok()?)),
        (Some(1), Figures::Value(value)) => Some(tenths(-i32::try_from(value).ok()?)),
        _ => None,
    };
    let (air, dew) = (value(1), value(5));
    let Some(air_c) = air else {
        listener.complain(group, "remark TsnTTTsnTTT", || "no temperatures can be read".to_owned());
        return;
    };
    report.air_temperature_c = Some(air_c);
    if dew.is_some() {
        report.dew_point_c = dew;
    }
    listener.part(group, || {
        dew.map_or_else(
            || format!("air temperature {air_c:.1} C"),
            |dew_c| format!("air temperature {air_c:.1} C, dew point {dew_c:.1} C"),
        )
    });
}
