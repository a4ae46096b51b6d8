//! `decode`: each report group by group, what it means and what is wrong with it.

use std::io::{self, Write};

use serde_json::{Map, Number, Value};

use crate::report::{Form, Report};
use crate::wire::complaint::Complaint;
use crate::wire::{Column, Context, Explained, ExplainedKind, Part, explain};

/// Widest line, characters.
const WIDTH: usize = 80;
/// Where meanings begin, characters from the left; longer groups push theirs to the next line.
const MEANING_AT: usize = 16;

/// Writes a file taken apart: as text of at most 80 columns of ASCII, or as one JSON object a
/// report with the columns of a table as keys and `complaints` beside them.
///
/// Returns whether nothing in the file was complained about.
///
/// # Errors
///
/// Whatever the writer says.
pub fn run(bytes: &[u8], context: &Context, json: bool, out: &mut dyn Write) -> io::Result<bool> {
    let mut sums = Sums::default();
    let mut outcome = Ok(());
    explain(bytes, context, &mut |explained| {
        sums.count(&explained);
        if outcome.is_ok() {
            outcome = if json { write_json(&explained, out) } else { write_text(&explained, out) };
        }
    });
    outcome?;
    if !json {
        writeln!(
            out,
            "{} reports, {} without a report (NIL), {} lost, {} complaints.",
            sums.reports, sums.nil, sums.lost, sums.complaints
        )?;
    }
    Ok(sums.complaints == 0)
}

#[derive(Default)]
struct Sums {
    reports: usize,
    nil: usize,
    lost: usize,
    complaints: usize,
}

impl Sums {
    fn count(&mut self, explained: &Explained) {
        match explained.kind {
            ExplainedKind::Report(_) => self.reports += 1,
            ExplainedKind::Nil => self.nil += 1,
            ExplainedKind::Lost => self.lost += 1,
            ExplainedKind::Envelope => {}
        }
        self.complaints += explained.complaints().count();
    }
}

/// The form in words.
const fn form_name(form: Form) -> &'static str {
    match form {
        Form::Synop => "SYNOP (FM 12)",
        Form::Ship => "SHIP (FM 13)",
        Form::Mobile => "SYNOP MOBIL (FM 14)",
        Form::Metar => "METAR (FM 15)",
        Form::Speci => "SPECI (FM 16)",
        Form::Buoy => "BUOY (FM 18)",
        Form::Bufr => "BUFR (FM 94)",
        Form::Csv => "table row",
        Form::Json => "JSON line",
    }
}

fn title(explained: &Explained) -> String {
    let form = explained.form.map_or("text", form_name);
    let who = explained.station.map_or_else(String::new, |station| format!(" {station}"));
    match &explained.kind {
        ExplainedKind::Report(report) => format!("{form}{who}, {}", report.time.rfc3339()),
        ExplainedKind::Nil => format!("{form}{who}: nothing to report"),
        ExplainedKind::Lost => format!("{form}{who}: LOST"),
        ExplainedKind::Envelope => explained.form.map_or_else(
            || "bulletin or table".to_owned(),
            |form| format!("{}, message", form_name(form)),
        ),
    }
}

fn write_text(explained: &Explained, out: &mut dyn Write) -> io::Result<()> {
    let title = title(explained);
    let place = format!("bytes {} to {}", explained.bytes.start, explained.bytes.end);
    let gap = WIDTH.saturating_sub(title.len() + place.len()).max(1);
    if title.len() + place.len() < WIDTH {
        writeln!(out, "{title}{:gap$}{place}", "")?;
    } else {
        writeln!(out, "{title}")?;
    }
    for part in &explained.parts {
        write_part(part, out)?;
    }
    writeln!(out)
}

fn write_part(part: &Part, out: &mut dyn Write) -> io::Result<()> {
    // The mark stands where the eye runs down; nothing depends on colour.
    let mark = if part.complaint.is_some() { '!' } else { ' ' };
    let mut lines = Vec::new();
    if !part.meaning.is_empty() {
        lines.extend(wrapped(&part.meaning, WIDTH - MEANING_AT));
    }
    if let Some(complaint) = &part.complaint {
        lines.extend(wrapped(&complaint.message, WIDTH - MEANING_AT));
        lines.extend(wrapped(&format!("rule: {}", complaint.rule), WIDTH - MEANING_AT));
    }
    let mut lines = lines.into_iter();
    let head = format!("{mark} {}", part.text);
    if head.len() < MEANING_AT {
        writeln!(
            out,
            "{}",
            format!("{head:MEANING_AT$}{}", lines.next().unwrap_or_default()).trim_end()
        )?;
    } else {
        writeln!(out, "{head}")?;
    }
    for line in lines {
        writeln!(out, "{:MEANING_AT$}{line}", "")?;
    }
    Ok(())
}

/// Words in lines of at most `width` characters; a longer word is cut.
fn wrapped(text: &str, width: usize) -> Vec<String> {
    let mut lines = Vec::new();
    let mut line = String::new();
    for word in text.split_whitespace() {
        let mut word: String =
            word.chars().map(|c| if c.is_ascii_graphic() { c } else { '?' }).collect();
        if !line.is_empty() && line.len() + 1 + word.len() > width {
            lines.push(std::mem::take(&mut line));
        }
        while word.len() > width {
            let rest = word.split_off(width);
            lines.push(std::mem::replace(&mut word, rest));
        }
        if !line.is_empty() {
            line.push(' ');
        }
        line.push_str(&word);
    }
    if !line.is_empty() {
        lines.push(line);
    }
    lines
}

fn write_json(explained: &Explained, out: &mut dyn Write) -> io::Result<()> {
    let complaints: Vec<Value> = explained.complaints().map(complaint_object).collect();
    let mut object = Map::new();
    match &explained.kind {
        ExplainedKind::Report(report) => {
            for column in Column::ALL {
                object.insert(column.name().to_owned(), cell(report, column));
            }
        }
        // What was lost is a line too, so that its complaints are seen.
        ExplainedKind::Lost => {
            for column in Column::ALL {
                object.insert(column.name().to_owned(), Value::Null);
            }
            if let Some(station) = explained.station {
                object.insert(Column::Station.name().to_owned(), station.as_str().into());
            }
        }
        ExplainedKind::Nil | ExplainedKind::Envelope if complaints.is_empty() => return Ok(()),
        ExplainedKind::Nil | ExplainedKind::Envelope => {}
    }
    object.insert("complaints".to_owned(), Value::Array(complaints));
    writeln!(out, "{}", Value::Object(object))
}

fn complaint_object(complaint: &Complaint) -> Value {
    serde_json::json!({
        "start": complaint.start,
        "end": complaint.end,
        "group": complaint.group,
        "rule": complaint.rule,
        "message": complaint.message,
        "report_lost": complaint.report_lost,
    })
}

/// The value of a report in a column of a table; null where it has none.
fn cell(report: &Report, column: Column) -> Value {
    let number =
        |value: Option<f64>| value.and_then(Number::from_f64).map_or(Value::Null, Value::Number);
    match column {
        Column::Station => report.station.as_str().into(),
        Column::Kind => report.platform.word().into(),
        Column::Time => report.time.rfc3339().into(),
        Column::Latitude => number(report.position.map(crate::sphere::Position::latitude_deg)),
        Column::Longitude => number(report.position.map(crate::sphere::Position::longitude_deg)),
        Column::StationHeight => number(report.station_height_m),
        Column::BarometerHeight => number(report.barometer_height_m),
        Column::PressureStation => number(report.pressure_station_hpa),
        Column::PressureMsl => number(report.pressure_msl_hpa),
        Column::Characteristic => report.characteristic.map_or(Value::Null, Value::from),
        Column::PressureChange => number(report.pressure_change_3h_hpa),
        Column::WindFrom => number(report.wind_from_deg),
        Column::WindSpeed => number(report.wind_speed_m_s),
        Column::WindGust => number(report.wind_gust_m_s),
        Column::AirTemperature => number(report.air_temperature_c),
        Column::DewPoint => number(report.dew_point_c),
        Column::SeaTemperature => number(report.sea_temperature_c),
        Column::Course => number(report.course_deg),
        Column::Speed => number(report.speed_m_s),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::instant::Instant;
    use crate::wire::read;

    const FILE: &str = "SMUK01 EGRR 151200 CCA\n\
        AAXX 15124\n03772 41480 82324 1O082 20059 39876 49908 57034 333 59128 91038=\n\
        03776 NIL=\n\
        BBXX TESTSHP 15124 99483 70156 41498 82134 10111 49958 58027 22214 00122=\n\
        TAF EGLL 151100Z 1512/1618 24012KT 9999 SCT020=\n\
        METAR EGLL 151220Z 24012G25KT 9999 SCT020 08/M01 Q0990 NOSIG=\n\
        station,time,latitude_deg,longitude_deg,pressure_msl_hpa\n\
        \"a very long name of 32 characters\",2026-01-15T12:00:00Z,48.25,-12.5,990.8\n\
        Alpha,2026-01-15T12:00:00Z,48.25,-12.5,990.8\n";

    fn context() -> Context {
        Context { received: Instant::parse("2026-01-15T12:20:00Z").expect("a time") }
    }

    fn decoded(json: bool) -> (String, bool) {
        let mut out = Vec::new();
        let fine = run(FILE.as_bytes(), &context(), json, &mut out).expect("memory");
        (String::from_utf8(out).expect("ASCII"), fine)
    }

    #[test]
    fn the_text_is_ascii_within_80_columns_and_marks_the_place() {
        let (text, fine) = decoded(false);
        assert!(!fine);
        assert!(text.is_ascii());
        for line in text.lines() {
            assert!(line.len() <= 80, "{line}");
        }
        assert!(text.contains("! 1O082"), "{text}");
        assert!(text.contains("  49908         sea-level pressure 990.8 hPa"), "{text}");
        assert!(text.contains("a forecast") || text.contains("TAF"), "{text}");
        assert!(
            text.contains("4 reports, 1 without a report (NIL), 2 lost, 4 complaints."),
            "{text}"
        );
    }

    #[test]
    fn the_json_reads_back_as_the_same_reports() {
        let (text, _) = decoded(true);
        let first: Value =
            serde_json::from_str(text.lines().next().expect("a line")).expect("JSON");
        assert_eq!(first["station"], "03772");
        assert_eq!(first["pressure_msl_hpa"], 990.8);
        assert_eq!(first["air_temperature_c"], Value::Null);
        assert_eq!(first["complaints"][0]["group"], "1O082");
        let again = read(text.as_bytes(), &context());
        let before = read(FILE.as_bytes(), &context());
        assert_eq!(again.reports.len(), before.reports.len());
        for (again, before) in again.reports.iter().zip(&before.reports) {
            assert_eq!(again.report.station, before.report.station);
            assert_eq!(again.report.time, before.report.time);
            assert_eq!(again.report.pressure_msl_hpa, before.report.pressure_msl_hpa);
            assert_eq!(again.report.wind_speed_m_s, before.report.wind_speed_m_s);
            assert_eq!(again.report.position, before.report.position);
        }
    }
}
