//! What came in and what became of it.

use std::collections::{BTreeMap, BTreeSet};
use std::sync::Arc;

use super::{ArrivalLine, Arrivals, ReportCounts};
use crate::analysis::HourAnalysis;
use crate::instant::{HOUR_S, Instant};
use crate::obs::held::FileRecord;
use crate::obs::{Element, Finding, Held, Observation, Observed, Verdict, decision_key};
use crate::report::{Form, Identifier, Platform};

/// Most lines kept for the pane.
const LINES_MAX: usize = 2000;
/// Most files kept for the pane.
const FILES_MAX: usize = 500;
/// Hours of receipts counted.
const RECEIVED_H: usize = 24;

/// What the neighbour checks found, by hour, kind and station.
type Neighbours<'a> = BTreeMap<(i64, Platform, Identifier), &'a Finding>;

/// What the neighbour check of each hour's analysis found against that hour's own reports.
fn neighbour_findings(hours: &[Arc<HourAnalysis>]) -> Neighbours<'_> {
    let mut found = BTreeMap::new();
    for analysis in hours {
        for innovation in &analysis.innovations {
            if let Some(finding) = &innovation.finding {
                let hour = analysis.hour.unix_h();
                found.insert((hour, innovation.platform, innovation.station), finding);
            }
        }
    }
    found
}

/// The worst verdict on a report and the words of what was found, its own checks first.
fn judged(observation: &Observation, neighbours: &Neighbours<'_>) -> (Verdict, String) {
    let report = &observation.report;
    let key = (observation.hour.unix_h(), report.platform, report.station);
    let found: Vec<&Finding> =
        observation.findings.iter().chain(neighbours.get(&key).copied()).collect();
    let worst = found.iter().map(|finding| finding.verdict).max().unwrap_or(Verdict::Sound);
    let words: Vec<String> = found
        .iter()
        .map(|finding| format!("{}: {}", element_word(finding.element), finding.reason))
        .collect();
    (worst, words.join("; "))
}

const fn element_word(element: Element) -> &'static str {
    match element {
        Element::Pressure => "pressure",
        Element::Wind => "wind",
        Element::Tendency => "tendency",
        Element::Position => "position",
        Element::Time => "time",
        Element::Temperature => "temperature",
    }
}

const fn form_word(form: Form) -> &'static str {
    match form {
        Form::Synop => "synop",
        Form::Ship => "ship",
        Form::Mobile => "mobile",
        Form::Metar => "metar",
        Form::Speci => "speci",
        Form::Buoy => "buoy",
        Form::Bufr => "bufr",
        Form::Csv => "csv",
        Form::Json => "json",
    }
}

/// The counts; `doubted` and `refused` are of the window's observations.
pub(super) fn counts(
    held: &Held,
    observed: &Observed,
    observations: &[Arc<Observation>],
    hours: &[Arc<HourAnalysis>],
    newest: Option<Instant>,
) -> ReportCounts {
    let counts = held.counts();
    let neighbours = neighbour_findings(hours);
    let verdicts: Vec<Verdict> =
        observations.iter().map(|observation| judged(observation, &neighbours).0).collect();
    let count = |wanted: Verdict| verdicts.iter().filter(|verdict| **verdict == wanted).count();
    ReportCounts {
        held: counts.held,
        repeats: counts.repeats + counts.outranked,
        corrections: counts.corrections,
        doubted: count(Verdict::Doubtful),
        refused: count(Verdict::Refused),
        complaints: held.files().map(|file| file.complaints_total).sum(),
        waiting_for_station: observed.waiting.iter().map(|(_, count)| count).sum(),
        newest,
    }
}

/// The record of the feed.
pub(super) fn arrivals(
    held: &Held,
    observed: &Observed,
    hours: &[Arc<HourAnalysis>],
    now: Instant,
) -> Arrivals {
    let mut files: Vec<FileRecord> = held.files().cloned().collect();
    files.sort_by(|one, other| {
        (other.received, &one.file, &one.content).cmp(&(one.received, &other.file, &other.content))
    });
    let newest_file = files.first().map(|file| file.received);
    let mut received_per_hour = vec![0_usize; RECEIVED_H];
    for file in &files {
        let age_h = now.seconds_since(file.received).div_euclid(HOUR_S);
        let slot = usize::try_from(age_h).ok().and_then(|age| RECEIVED_H.checked_sub(age + 1));
        if let Some(count) = slot.and_then(|slot| received_per_hour.get_mut(slot)) {
            *count += file.reports;
        }
    }
    let mut lines = report_lines(observed, hours);
    lines.extend(conflict_lines(observed, now));
    lines.extend(files.iter().flat_map(file_lines));
    lines.sort_by(|one, other| {
        (other.received, other.verdict, &one.who, one.time, &one.text).cmp(&(
            one.received,
            one.verdict,
            &other.who,
            other.time,
            &other.text,
        ))
    });
    lines.truncate(LINES_MAX);
    files.truncate(FILES_MAX);
    let unknown_stations = observed
        .waiting
        .iter()
        .map(|((platform, station), count)| (format!("{} {station}", platform.word()), *count))
        .collect();
    Arrivals { files, lines, unknown_stations, newest_file, received_per_hour }
}

fn report_lines(observed: &Observed, hours: &[Arc<HourAnalysis>]) -> Vec<ArrivalLine> {
    let neighbours = neighbour_findings(hours);
    let mut seen: BTreeSet<(Platform, Identifier, Instant)> = BTreeSet::new();
    let mut lines = Vec::new();
    for observation in observed.observations().filter(|one| seen.insert(one.key())) {
        let (verdict, text) = judged(observation, &neighbours);
        let report = &observation.report;
        let received = observation.provenance.received;
        lines.push(ArrivalLine {
            received,
            who: report.station.to_string(),
            form: form_word(report.form).to_owned(),
            time: Some(report.time),
            late_minutes: Some(received.seconds_since(report.time) / 60),
            verdict,
            text,
            file: observation.provenance.file.clone(),
            decision: Some(decision_key(report)),
        });
    }
    lines
}

fn plain_line(received: Instant, who: String, form: &str) -> ArrivalLine {
    ArrivalLine {
        received,
        who,
        form: form.to_owned(),
        time: None,
        late_minutes: None,
        verdict: Verdict::Doubtful,
        text: String::new(),
        file: String::new(),
        decision: None,
    }
}

fn conflict_lines(observed: &Observed, now: Instant) -> Vec<ArrivalLine> {
    let lines = observed.conflicts.iter().map(|conflict| {
        let who = conflict.station.to_string();
        ArrivalLine { text: conflict.text.clone(), ..plain_line(now, who, "catalogue") }
    });
    lines.collect()
}

fn file_lines(file: &FileRecord) -> Vec<ArrivalLine> {
    let line = |who: &str, verdict, text: String| ArrivalLine {
        verdict,
        text,
        file: file.file.clone(),
        ..plain_line(file.received, who.to_owned(), "file")
    };
    let refusal = file
        .refused
        .as_ref()
        .map(|reason| line(&file.file, Verdict::Refused, format!("file refused: {reason}")));
    let complaints = file.complaints.iter().map(|complaint| {
        let who = if complaint.station.is_empty() { &file.file } else { &complaint.station };
        let verdict = if complaint.report_lost { Verdict::Refused } else { Verdict::Doubtful };
        let text = format!(
            "{} [{}] at byte {}: {}",
            complaint.rule, complaint.group, complaint.start, complaint.message
        );
        line(who, verdict, text)
    });
    refusal.into_iter().chain(complaints).collect()
}
