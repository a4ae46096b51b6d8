//! FM 94 messages element by element.

use super::{Explained, ExplainedKind, Part};
use crate::report::{Form, Report};
use crate::wire::bufr::{Decoder, Element, Header, Kind, MessageReading, Stop, Value, element_in};
use crate::wire::complaint::{Complaint, printable};

/// Hands on the head of a message and then each of its subsets.
pub(super) fn explain(
    decoder: &mut Decoder,
    bytes: &[u8],
    start: usize,
    reading: MessageReading,
    each: &mut dyn FnMut(Explained),
) {
    let range = start..start + bytes.len();
    let listing = decoder.list(bytes);
    let mut head: Vec<Part> = Vec::new();
    let mut tables = None;
    match &listing {
        Ok(listing) => {
            head.push(told("BUFR", head_words(&listing.header)));
            let descriptors: Vec<String> =
                listing.descriptors.iter().map(|&number| descriptor(number)).collect();
            head.push(told("template", descriptors.join(", ")));
            if let Some(stop) = listing.stop {
                head.push(told("end", stop_words(stop)));
            }
            tables = Some(listing.header.tables);
        }
        Err(reason) => head.push(told("BUFR", reason.clone())),
    }
    head.extend(reading.complaints.into_iter().map(doubted));
    let kind = if reading.understood { ExplainedKind::Envelope } else { ExplainedKind::Lost };
    each(Explained {
        bytes: range.clone(),
        kind,
        form: Some(Form::Bufr),
        station: None,
        parts: head,
    });
    let subsets = listing.map(|listing| listing.subsets).unwrap_or_default();
    // The reports leave out subsets without station or time, so that only equal counts can be
    // laid side by side.
    let paired = subsets.len() == reading.reports.len();
    let subset = |report: Option<&Report>, values: &[Value]| Explained {
        bytes: range.clone(),
        kind: report
            .map_or(ExplainedKind::Envelope, |report| ExplainedKind::Report(Box::new(*report))),
        form: Some(Form::Bufr),
        station: report.map(|report| report.station),
        parts: values.iter().map(|value| told_value(value, tables)).collect(),
    };
    if paired {
        for (report, values) in reading.reports.iter().zip(&subsets) {
            each(subset(Some(report), values));
        }
    } else {
        for values in &subsets {
            each(subset(None, values));
        }
        for report in &reading.reports {
            each(subset(Some(report), &[]));
        }
    }
}

fn told(text: &str, meaning: String) -> Part {
    Part { bytes: 0..0, text: text.to_owned(), meaning, complaint: None }
}

fn doubted(complaint: Complaint) -> Part {
    Part {
        bytes: complaint.bytes(),
        text: complaint.group.clone(),
        meaning: String::new(),
        complaint: Some(complaint),
    }
}

fn head_words(header: &Header) -> String {
    let time = header.time.map_or_else(String::new, |time| format!(", {}", time.rfc3339()));
    let packing = if header.compressed { "compressed" } else { "not compressed" };
    format!(
        "edition {}, category {}, {} subsets, {packing}, update {}{time}",
        header.edition, header.category, header.subsets, header.update_number
    )
}

fn stop_words(stop: Stop) -> String {
    match stop {
        Stop::AboutData => "quality data follow: not read".to_owned(),
        Stop::Unknown(number) => {
            format!("{} has no known width: what follows is not read", descriptor(number))
        }
        Stop::Short => "the data end early".to_owned(),
    }
}

/// `F XX YYY`.
fn descriptor(number: u32) -> String {
    format!("{} {:02} {:03}", number / 100_000, number / 1000 % 100, number % 1000)
}

fn told_value(value: &Value, tables: Option<crate::wire::bufr::Edition>) -> Part {
    let number = match value {
        Value::Number(number, _) | Value::Text(number, _) => *number,
    };
    let element: Option<&Element> = tables.and_then(|tables| element_in(number, tables));
    let name = element.map_or("not in the tables", |element| element.name.as_str());
    let meaning = match value {
        Value::Number(_, None) | Value::Text(_, None) => format!("{name}: missing"),
        Value::Number(_, Some(value)) => match element {
            Some(element) => {
                let decimals = usize::try_from(element.scale.clamp(0, 9)).unwrap_or(0);
                let unit = match element.kind {
                    Kind::Number => element.unit.as_str(),
                    _ => "(code)",
                };
                format!("{name}: {value:.decimals$} {unit}")
            }
            None => format!("{name}: {value}"),
        },
        Value::Text(_, Some(text)) => format!("{name}: {}", printable(text.as_bytes(), 64)),
    };
    told(&descriptor(number), meaning)
}
