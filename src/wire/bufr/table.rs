//! Tables B and D, embedded, with what older versions and two centres' local tables had otherwise.

use std::io::Read;
use std::sync::OnceLock;

/// What sort of value an element has.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Kind {
    /// A number in a unit.
    Number,
    /// An entry of a code table.
    Code,
    /// Bits of a flag table.
    Flag,
    /// Characters.
    Text,
}

/// A row of table B.
#[derive(Debug, Clone, PartialEq)]
pub struct Element {
    /// Its descriptor as six decimal digits, FXXYYY with F = 0.
    pub descriptor: u32,
    /// Short name.
    pub abbreviation: String,
    /// Name.
    pub name: String,
    /// Unit.
    pub unit: String,
    /// What sort of value.
    pub kind: Kind,
    /// Decimal scale.
    pub scale: i32,
    /// Reference value.
    pub reference: i64,
    /// Width, bits.
    pub width: u32,
}

/// Which tables a message was written with (section 1).
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub struct Edition {
    /// Version of the master table.
    pub master: u8,
    /// Originating centre.
    pub centre: u16,
    /// Version of that centre's local table.
    pub local: u8,
}

impl Edition {
    /// The newest master table and no local one.
    pub const NEWEST: Self = Self { master: u8::MAX, centre: 0, local: 0 };
}

/// Rows of one descriptor, valid to a version; sorted by key.
type Rows<K, T> = Vec<(K, T)>;

struct Tables {
    elements: Rows<(u32, u8), Element>,
    sequences: Rows<(u32, u8), Vec<u32>>,
    local_elements: Rows<(u16, u32, u8), Element>,
    local_sequences: Rows<(u16, u32, u8), Vec<u32>>,
}

/// The newest row of table B for a descriptor of six decimal digits.
pub fn element(descriptor: u32) -> Option<&'static Element> {
    element_in(descriptor, Edition::NEWEST)
}

/// The row of table B that a message of this edition means.
///
/// Local descriptors (class 48 and above, or entry 192 and above) are those of the centre.
pub fn element_in(descriptor: u32, edition: Edition) -> Option<&'static Element> {
    let tables = tables();
    if is_local(descriptor) {
        return local(&tables.local_elements, descriptor, edition);
    }
    master(&tables.elements, descriptor, edition.master)
}

/// The members of a sequence of table D.
pub(super) fn sequence(descriptor: u32, edition: Edition) -> Option<&'static [u32]> {
    let tables = tables();
    if is_local(descriptor) {
        return local(&tables.local_sequences, descriptor, edition).map(Vec::as_slice);
    }
    master(&tables.sequences, descriptor, edition.master).map(Vec::as_slice)
}

fn is_local(descriptor: u32) -> bool {
    descriptor / 1000 % 100 >= 48 || descriptor % 1000 >= 192
}

/// The first row of the descriptor that was still valid in `version`, else its newest.
fn master<T>(rows: &Rows<(u32, u8), T>, descriptor: u32, version: u8) -> Option<&T> {
    let at = rows.partition_point(|(key, _)| *key < (descriptor, version));
    let row = rows.get(at).filter(|(key, _)| key.0 == descriptor);
    row.map(|(_, row)| row)
}

fn local<T>(rows: &Rows<(u16, u32, u8), T>, descriptor: u32, edition: Edition) -> Option<&T> {
    let wanted = (edition.centre, descriptor, edition.local);
    let at = rows.partition_point(|(key, _)| *key < wanted);
    let row = rows.get(at).filter(|(key, _)| (key.0, key.1) == (edition.centre, descriptor));
    row.map(|(_, row)| row)
}

fn tables() -> &'static Tables {
    // A constant of the program, unpacked at its first use; nothing outside can change it.
    static TABLES: OnceLock<Tables> = OnceLock::new();
    TABLES.get_or_init(|| {
        let mut elements = Vec::new();
        for line in unpack(include_bytes!("data/table_b.txt.gz")).lines() {
            elements.extend(element_row(line).map(|row| ((row.descriptor, u8::MAX), row)));
        }
        for line in unpack(include_bytes!("data/table_b_older.txt.gz")).lines() {
            elements.extend(line.split_once('|').and_then(|(last, line)| {
                let row = element_row(line)?;
                Some(((row.descriptor, last.parse().ok()?), row))
            }));
        }
        let mut sequences = Vec::new();
        for line in unpack(include_bytes!("data/table_d.txt.gz")).lines() {
            sequences.extend(sequence_row(line).map(|(code, row)| ((code, u8::MAX), row)));
        }
        for line in unpack(include_bytes!("data/table_d_older.txt.gz")).lines() {
            sequences.extend(line.split_once(' ').and_then(|(last, line)| {
                let (code, row) = sequence_row(line)?;
                Some(((code, last.parse().ok()?), row))
            }));
        }
        let mut local_elements = Vec::new();
        for line in unpack(include_bytes!("data/local_b.txt.gz")).lines() {
            local_elements.extend(line.split_once('|').and_then(|(centre, line)| {
                let (last, line) = line.split_once('|')?;
                let row = element_row(line)?;
                Some(((centre.parse().ok()?, row.descriptor, last.parse().ok()?), row))
            }));
        }
        let mut local_sequences = Vec::new();
        for line in unpack(include_bytes!("data/local_d.txt.gz")).lines() {
            local_sequences.extend(line.split_once(' ').and_then(|(centre, line)| {
                let (last, line) = line.split_once(' ')?;
                let (code, row) = sequence_row(line)?;
                Some(((centre.parse().ok()?, code, last.parse().ok()?), row))
            }));
        }
        elements.sort_by_key(|row| row.0);
        sequences.sort_by_key(|row| row.0);
        local_elements.sort_by_key(|row| row.0);
        local_sequences.sort_by_key(|row| row.0);
        Tables { elements, sequences, local_elements, local_sequences }
    })
}

fn unpack(packed: &[u8]) -> String {
    let mut text = String::new();
    // The tables are part of the program: `the_tables_are_whole` proves that they unpack.
    let _ = flate2::read::GzDecoder::new(packed).read_to_string(&mut text);
    text
}

fn element_row(line: &str) -> Option<Element> {
    let mut columns = line.split('|');
    let descriptor = columns.next()?.parse().ok()?;
    let abbreviation = columns.next()?.to_owned();
    let sort = columns.next()?;
    let name = columns.next()?.to_owned();
    let unit = columns.next()?.to_owned();
    let kind = match sort {
        "string" => Kind::Text,
        "table" => Kind::Code,
        "flag" => Kind::Flag,
        _ => Kind::Number,
    };
    let scale = columns.next()?.parse().ok()?;
    let reference = columns.next()?.parse().ok()?;
    let width = columns.next()?.parse().ok()?;
    Some(Element { descriptor, abbreviation, name, unit, kind, scale, reference, width })
}

fn sequence_row(line: &str) -> Option<(u32, Vec<u32>)> {
    let mut words = line.split_ascii_whitespace().map(str::parse::<u32>);
    let descriptor = words.next()?.ok()?;
    Some((descriptor, words.collect::<Result<_, _>>().ok()?))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_tables_are_whole() {
        let tables = tables();
        assert!(tables.elements.len() > 1800, "{}", tables.elements.len());
        assert!(tables.sequences.len() > 650, "{}", tables.sequences.len());
        assert!(tables.local_elements.len() > 600, "{}", tables.local_elements.len());
    }

    /// WMO-No. 306 Vol. I.2 table B (METHODS COD-11, rows read in the published table).
    #[test]
    fn rows_are_as_the_manual_has_them() {
        for (descriptor, scale, reference, width) in [
            (10_051, -1, 0, 14),
            (10_004, -1, 0, 14),
            (10_061, -1, -500, 10),
            (10_062, -1, -1000, 11),
            (10_063, 0, 0, 4),
            (5_001, 5, -9_000_000, 25),
            (6_002, 2, -18_000, 16),
            (7_031, 1, -4000, 17),
            (11_002, 1, 0, 12),
            (12_101, 2, 0, 16),
            (22_043, 2, 0, 15),
            (1_087, 0, 0, 23),
        ] {
            let row = element(descriptor).expect("a row");
            assert_eq!((row.scale, row.reference, row.width), (scale, reference, width), "{row:?}");
        }
        assert_eq!(element(1_011).map(|row| (row.kind, row.width)), Some((Kind::Text, 72)));
        assert_eq!(
            sequence(301_090, Edition::NEWEST),
            Some([301_004, 301_011, 301_012, 301_021, 7_030, 7_031].as_slice())
        );
    }

    /// Version 14 widened the radiation elements, version 26 or so gave ships another template.
    #[test]
    fn an_older_message_means_the_older_row() {
        let version = |master| Edition { master, centre: 0, local: 0 };
        let width = |master| element_in(14_002, version(master)).map(|row| row.width);
        assert_eq!((width(13), width(14), width(36)), (Some(12), Some(17), Some(17)));
        assert_ne!(sequence(308_014, version(17)), sequence(308_014, version(30)));
        let local = Edition { master: 13, centre: 98, local: 1 };
        assert_eq!(element_in(10_197, local).map(|row| row.width), Some(9));
        assert_eq!(element_in(10_197, Edition { centre: 7, ..local }), None);
    }
}
