//! Sections of a message: identification, descriptors, data.

use std::collections::BTreeMap;
use std::ops::Range;

use super::bits::Bits;
use super::collect::{Collector, wanted};
use super::table::Edition;
use super::template::Template;
use super::walk::{Columns, Lister, Stop, plain};
use super::{Listing, MessageReading};
use crate::instant::Instant;
use crate::limits::COMPLAINTS_PER_FILE_MAX;
use crate::wire::Context;
use crate::wire::complaint::{Complaint, printable};

/// Compiled templates kept from message to message; a feed uses a few dozen.
const TEMPLATES_MAX: usize = 512;
/// Compiled templates by the tables and the descriptors they were made from.
pub(super) type Templates = BTreeMap<(Edition, Vec<u8>), Template>;
/// Most subsets taken apart for explaining; a surface bulletin holds a few hundred.
const LISTED_MAX: usize = 2000;
/// Hours that a report may lie after the receipt of its file.
const FUTURE_HOURS_MAX: f64 = 24.0;

/// What the sections before the data say.
#[derive(Debug, Clone, PartialEq)]
pub struct Header {
    /// Edition, 2 to 4.
    pub edition: u8,
    /// Which tables it was written with.
    pub tables: Edition,
    /// Update sequence number: 0 for an original.
    pub update_number: u8,
    /// Data category (table A): 0 land surface, 1 sea surface.
    pub category: u8,
    /// Time of the message.
    pub time: Option<Instant>,
    /// Number of subsets claimed.
    pub subsets: usize,
    /// Whether the data are compressed.
    pub compressed: bool,
}

/// Where a section lies in the message.
pub type Section = Range<usize>;

/// Why a message cannot be read at all.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Fault {
    pub(super) rule: &'static str,
    pub(super) message: String,
    /// Bytes that are surely part of it.
    pub(super) spent: usize,
}

fn fault(rule: &'static str, message: impl Into<String>) -> Fault {
    Fault { rule, message: message.into(), spent: 4 }
}

/// A message with its sections found.
struct Framed<'a> {
    header: Header,
    descriptors: Vec<u32>,
    /// The descriptors' octets: the key that compiled templates are kept under.
    key: &'a [u8],
    data: &'a [u8],
    /// Length of the message.
    length: usize,
    /// Whether `7777` stands where the length says.
    closed: bool,
}

fn number(bytes: &[u8], at: usize, octets: usize) -> Option<usize> {
    let field = bytes.get(at..at.checked_add(octets)?)?;
    Some(field.iter().fold(0, |sum, &octet| (sum << 8) | usize::from(octet)))
}

/// A section's bytes from its three-octet length.
fn section(bytes: &[u8], at: usize, least: usize, rule: &'static str) -> Result<Section, Fault> {
    let length = number(bytes, at, 3)
        .ok_or_else(|| fault(rule, format!("the message ends at octet {} of it", bytes.len())))?;
    let end = at.saturating_add(length);
    if length < least || end > bytes.len() {
        return Err(fault(
            rule,
            format!("length {length}: at least {least} expected and {} left", bytes.len() - at),
        ));
    }
    Ok(at..end)
}

fn frame(bytes: &[u8]) -> Result<Framed<'_>, Fault> {
    const RULE_0: &str = "FM 94 section 0";
    const RULE_1: &str = "FM 94 section 1";
    if bytes.get(..4) != Some(b"BUFR".as_slice()) {
        return Err(fault(RULE_0, "the message does not begin with BUFR"));
    }
    let total = number(bytes, 4, 3).ok_or_else(|| fault(RULE_0, "cut in section 0"))?;
    let edition = bytes.get(7).copied().ok_or_else(|| fault(RULE_0, "cut in section 0"))?;
    if !(2..=4).contains(&edition) {
        return Err(fault(RULE_0, format!("edition 2, 3 or 4 expected, found {edition}")));
    }
    if total > bytes.len() {
        let left = bytes.len();
        return Err(fault(RULE_0, format!("length {total} claimed, {left} octets are left")));
    }
    let bytes = bytes.get(..total).unwrap_or_default();
    let first = section(bytes, 8, 17, RULE_1)?;
    let one = bytes.get(first.clone()).unwrap_or_default();
    let mut header = header(one, edition).ok_or_else(|| fault(RULE_1, "section 1 is too short"))?;
    if one.get(3).is_some_and(|&table| table != 0) {
        return Err(fault(RULE_1, "master table 0 (meteorology) expected"));
    }
    let flags = one.get(if edition == 4 { 9 } else { 7 }).copied().unwrap_or(0);
    let mut at = first.end;
    if flags & 0x80 != 0 {
        at = section(bytes, at, 4, "FM 94 section 2")?.end;
    }
    let third = section(bytes, at, 7, "FM 94 section 3")?;
    let three = bytes.get(third.clone()).unwrap_or_default();
    header.subsets = number(three, 4, 2).unwrap_or(0);
    header.compressed = three.get(6).is_some_and(|flags| flags & 0x40 != 0);
    let key = three.get(7..).unwrap_or_default();
    let descriptors = key
        .chunks_exact(2)
        .map(|pair| {
            let word = pair.iter().fold(0_u32, |sum, &octet| (sum << 8) | u32::from(octet));
            (word >> 14) * 100_000 + ((word >> 8) & 0x3f) * 1000 + (word & 0xff)
        })
        .collect();
    let fourth = section(bytes, third.end, 4, "FM 94 section 4")?;
    let data = bytes.get(fourth.start + 4..fourth.end).unwrap_or_default();
    let closed = bytes.get(total.saturating_sub(4)..) == Some(b"7777".as_slice());
    Ok(Framed { header, descriptors, key, data, length: total, closed })
}

/// Section 1 of editions 2, 3 and 4.
fn header(one: &[u8], edition: u8) -> Option<Header> {
    let octet = |at: usize| one.get(at).copied().map(usize::from);
    let (centre, update, category, master, local, year, month) = if edition == 4 {
        let year = number(one, 15, 2)?;
        (number(one, 4, 2)?, octet(8)?, octet(10)?, octet(13)?, octet(14)?, year, 17)
    } else {
        // Octet 13 is the year of the century; 100 is written for its last year by some.
        let year = octet(12)? % 100;
        let year = if year >= 70 { 1900 + year } else { 2000 + year };
        (octet(5)?, octet(6)?, octet(8)?, octet(10)?, octet(11)?, year, 13)
    };
    let part = |at: usize| octet(at).and_then(|value| u32::try_from(value).ok());
    let time = Instant::from_calendar(
        i32::try_from(year).ok()?,
        part(month)?,
        part(month + 1)?,
        part(month + 2)?,
        part(month + 3)?,
    );
    Some(Header {
        edition,
        tables: Edition {
            master: u8::try_from(master).ok()?,
            centre: u16::try_from(centre).ok()?,
            local: u8::try_from(local).ok()?,
        },
        update_number: u8::try_from(update).ok()?,
        category: u8::try_from(category).ok()?,
        time,
        subsets: 0,
        compressed: false,
    })
}

fn template<'t>(templates: &'t mut Templates, framed: &Framed<'_>) -> Result<&'t Template, Fault> {
    let key = (framed.header.tables, framed.key.to_vec());
    if !templates.contains_key(&key) {
        let compiled =
            Template::compile(&framed.descriptors, framed.header.tables).map_err(|message| {
                Fault { spent: framed.length, ..fault("FM 94 section 3", message) }
            })?;
        if templates.len() >= TEMPLATES_MAX {
            templates.clear();
        }
        templates.insert(key.clone(), compiled);
    }
    templates.get(&key).ok_or_else(|| fault("FM 94 section 3", "no template"))
}

/// Refuses a count of subsets that the data could not hold, before anything is made for them.
fn bounded_subsets(framed: &Framed<'_>) -> Result<usize, Fault> {
    let (claimed, octets) = (framed.header.subsets, framed.data.len());
    if claimed > octets.max(1) {
        return Err(Fault {
            spent: framed.length,
            ..fault(
                "FM 94 section 3",
                format!("{claimed} subsets claimed in {octets} octets of data"),
            )
        });
    }
    Ok(claimed)
}

/// Reads one message into reports.
pub(super) fn read(
    templates: &mut Templates,
    bytes: &[u8],
    offset: usize,
    context: Context,
) -> Result<MessageReading, Fault> {
    let framed = frame(bytes)?;
    let header = &framed.header;
    if !matches!(header.category, 0 | 1 | 31) {
        return Err(Fault {
            spent: framed.length,
            ..fault(
                "FM 94 table A",
                format!("data category {}: not surface data, passed over", header.category),
            )
        });
    }
    let subsets = bounded_subsets(&framed)?;
    let template = template(templates, &framed)?;
    let mut reading = MessageReading {
        length: framed.length,
        reports: Vec::with_capacity(subsets),
        complaints: Vec::new(),
        understood: true,
    };
    let mut complaints = Complaints { reading: &mut reading, offset, framed: &framed };
    let mut stop = None;
    if header.compressed {
        let columns = Columns::read(template, Bits::new(framed.data), subsets, &wanted);
        stop = columns.stop;
        for number in 0..subsets {
            let mut collector = Collector::default();
            columns.subset(number, &mut collector);
            complaints.take(&collector, number, context);
        }
    } else {
        let mut bits = Bits::new(framed.data);
        for number in 0..subsets {
            let mut collector = Collector::default();
            stop = plain(template, &mut bits, &mut collector);
            complaints.take(&collector, number, context);
            if stop.is_some() {
                let lost = subsets - number - 1;
                if lost > 0 {
                    complaints.add(
                        "FM 94 section 4",
                        format!("{lost} more subsets are lost"),
                        true,
                    );
                }
                break;
            }
        }
    }
    match stop {
        Some(Stop::Unknown(descriptor)) => complaints.add(
            "FM 94 section 3",
            format!("descriptor {descriptor:06} is in no table: what follows it is passed over"),
            false,
        ),
        Some(Stop::Short) => {
            complaints.add("FM 94 section 4", "the data end before the template".to_owned(), false);
        }
        Some(Stop::AboutData) | None => {}
    }
    if !framed.closed {
        complaints.add("FM 94 section 5", "7777 expected at the end".to_owned(), false);
    }
    Ok(reading)
}

/// Gathers a message's reports and complaints.
struct Complaints<'r, 'm> {
    reading: &'r mut MessageReading,
    offset: usize,
    framed: &'r Framed<'m>,
}

impl Complaints<'_, '_> {
    fn add(&mut self, rule: &str, message: String, report_lost: bool) {
        if self.reading.complaints.len() >= COMPLAINTS_PER_FILE_MAX {
            return;
        }
        let station =
            self.reading.reports.last().map_or_else(String::new, |r| r.station.to_string());
        let list: Vec<String> =
            self.framed.descriptors.iter().take(6).map(|d| format!("{d:06}")).collect();
        self.reading.complaints.push(Complaint {
            start: self.offset,
            end: self.offset + self.framed.length,
            station,
            group: printable(list.join(" ").as_bytes(), 40),
            rule: rule.to_owned(),
            message,
            report_lost,
        });
    }

    fn take(&mut self, collector: &Collector, number: usize, context: Context) {
        match collector.finish(&self.framed.header) {
            Ok(report) if report.time.hours_since(context.received) > FUTURE_HOURS_MAX => self.add(
                "FM 94 class 04",
                format!("subset {}: {} lies after its receipt", number + 1, report.time),
                true,
            ),
            Ok(report) => self.reading.reports.push(report),
            Err(lack) => {
                self.add("FM 94 section 4", format!("subset {}: {lack}", number + 1), true);
            }
        }
    }
}

/// Takes one message apart, element by element.
pub(super) fn list(templates: &mut Templates, bytes: &[u8]) -> Result<Listing, Fault> {
    let framed = frame(bytes)?;
    let subsets = bounded_subsets(&framed)?;
    let template = template(templates, &framed)?;
    let mut listing = Listing {
        header: framed.header.clone(),
        descriptors: framed.descriptors.clone(),
        subsets: Vec::new(),
        stop: None,
    };
    if framed.header.compressed {
        let columns = Columns::read(template, Bits::new(framed.data), subsets, &|_| true);
        listing.stop = columns.stop;
        for number in 0..subsets.min(LISTED_MAX) {
            let mut lister = Lister::default();
            columns.subset(number, &mut lister);
            listing.subsets.push(lister.values);
        }
    } else {
        let mut bits = Bits::new(framed.data);
        for _ in 0..subsets.min(LISTED_MAX) {
            let mut lister = Lister::default();
            listing.stop = plain(template, &mut bits, &mut lister);
            listing.subsets.push(lister.values);
            if listing.stop.is_some() {
                break;
            }
        }
    }
    Ok(listing)
}
