//! Walking a data section with a template, uncompressed and compressed.

use super::bits::Bits;
use super::table::Kind;
use super::template::{Count, Field, Operation, Template};

/// Most columns of a compressed message that are kept for its subsets; the largest surface
/// template has about 600 elements.
const COLUMNS_MAX: usize = 1024;

/// An element with its value, as listed for explaining.
#[derive(Debug, Clone, PartialEq)]
pub enum Value {
    /// A number; `None` is missing.
    Number(u32, Option<f64>),
    /// Characters with the padding taken off; `None` is missing.
    Text(u32, Option<String>),
}

/// Why walking ended before the end of the template.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Stop {
    /// What follows tells about the data (operators 222 to 243): nothing is lost.
    AboutData,
    /// A descriptor whose width is not known: what follows is lost.
    Unknown(u32),
    /// The data ended early.
    Short,
}

/// Takes elements in order.
pub(super) trait Sink {
    /// Whether the element is of any use; the others are passed over.
    fn wants(&self, descriptor: u32) -> bool;
    /// A number, code or flags; `None` is missing.
    fn number(&mut self, descriptor: u32, value: Option<f64>);
    /// Characters, octet by octet, not trimmed; `None` is missing.
    fn text(&mut self, descriptor: u32, text: Option<&[u8]>);
}

/// New reference values in force (203YYY).
type References = Vec<(u32, i64)>;

/// The value of a raw number: `(raw + reference) / 10^scale`.
fn value_of(field: &Field, references: &References, raw: u64) -> f64 {
    let mut reference = field.reference;
    if field.new_reference
        && let Some(&(_, new)) = references.iter().rev().find(|row| row.0 == field.descriptor)
    {
        reference = new;
    }
    // Widths end at 57 bits, so the sum is exact in 64; the quotient is rounded once.
    let sum = i64::try_from(raw).unwrap_or(i64::MAX).saturating_add(reference) as f64;
    if field.scale >= 0 { sum / 10_f64.powi(field.scale) } else { sum * 10_f64.powi(-field.scale) }
}

/// All ones: missing; but not for one-bit elements and class 31.
fn is_missing(field: &Field, raw: u64) -> bool {
    field.width > 1 && field.descriptor / 1000 != 31 && raw == (1_u64 << field.width) - 1
}

/// Walks one subset of an uncompressed data section.
pub(super) fn plain(
    template: &Template,
    bits: &mut Bits<'_>,
    sink: &mut impl Sink,
) -> Option<Stop> {
    let mut references = References::new();
    run(&template.operations, bits, &mut references, sink).err()
}

fn run(
    operations: &[Operation],
    bits: &mut Bits<'_>,
    references: &mut References,
    sink: &mut impl Sink,
) -> Result<(), Stop> {
    let mut at = 0;
    while let Some(operation) = operations.get(at) {
        at += 1;
        match operation {
            Operation::Element(field) => read_plain(field, bits, references, sink)?,
            Operation::Loop { count, body } => {
                let inside = operations.get(at..at + body).unwrap_or_default();
                at += body;
                let times = times_plain(*count, bits)?;
                for _ in 0..times {
                    let before = bits.position();
                    run(inside, bits, references, sink)?;
                    // A body without data would run its lying count for nothing.
                    if bits.position() == before {
                        break;
                    }
                }
            }
            Operation::NewReference { descriptor, width } => {
                let raw = bits.take(*width).ok_or(Stop::Short)?;
                references.push((*descriptor, signed(raw, *width)));
            }
            Operation::Skip { width } => bits.skip(*width as usize).ok_or(Stop::Short)?,
            Operation::AboutData => return Err(Stop::AboutData),
            Operation::Unknown { descriptor } => return Err(Stop::Unknown(*descriptor)),
        }
    }
    Ok(())
}

fn times_plain(count: Count, bits: &mut Bits<'_>) -> Result<u64, Stop> {
    match count {
        Count::Fixed(times) => Ok(u64::from(times)),
        Count::Delayed { width, .. } => bits.take(width).ok_or(Stop::Short),
        Count::Once { width, .. } => Ok(bits.take(width).ok_or(Stop::Short)?.min(1)),
    }
}

fn read_plain(
    field: &Field,
    bits: &mut Bits<'_>,
    references: &References,
    sink: &mut impl Sink,
) -> Result<(), Stop> {
    if field.associated > 0 {
        bits.skip(field.associated as usize).ok_or(Stop::Short)?;
    }
    if !sink.wants(field.descriptor) {
        return bits.skip(field.width as usize).ok_or(Stop::Short);
    }
    if field.kind == Kind::Text {
        let text = bits.text(field.width as usize / 8).ok_or(Stop::Short)?;
        let missing = text.iter().all(|&octet| octet == 0xff);
        sink.text(field.descriptor, if missing { None } else { Some(&text) });
        return Ok(());
    }
    if field.width > 57 {
        return bits.skip(field.width as usize).ok_or(Stop::Short);
    }
    let raw = bits.take(field.width).ok_or(Stop::Short)?;
    let value = (!is_missing(field, raw)).then(|| value_of(field, references, raw));
    sink.number(field.descriptor, value);
    Ok(())
}

/// Sign and magnitude, the sign in the leftmost bit (table C, 2 03).
fn signed(raw: u64, width: u32) -> i64 {
    let sign = 1_u64 << width.saturating_sub(1).min(62);
    let magnitude = i64::try_from(raw & (sign - 1)).unwrap_or(0);
    if raw & sign == 0 { magnitude } else { -magnitude }
}

/// One element of all subsets of a compressed data section.
#[derive(Debug, Clone, Copy)]
struct Column {
    field: Field,
    reference_at: usize,
    base: u64,
    increment_width: u32,
    increments_at: usize,
}

/// A compressed data section, read as columns.
#[derive(Debug)]
pub(super) struct Columns<'a> {
    bits: Bits<'a>,
    kept: Vec<Column>,
    references: Vec<References>,
    /// Why reading ended early.
    pub(super) stop: Option<Stop>,
}

impl<'a> Columns<'a> {
    /// Reads the columns that `wants` asks for.
    pub(super) fn read(
        template: &Template,
        bits: Bits<'a>,
        subsets: usize,
        wants: &dyn Fn(u32) -> bool,
    ) -> Self {
        let mut reading =
            Self { bits, kept: Vec::new(), references: vec![References::new()], stop: None };
        reading.stop = reading.run(&template.operations, subsets, wants).err();
        reading
    }

    /// Hands one subset's values to a sink.
    pub(super) fn subset(&self, number: usize, sink: &mut impl Sink) {
        for column in &self.kept {
            let width = column.increment_width as usize;
            let place = column.increments_at + number * width * unit_of(column);
            if column.field.kind == Kind::Text {
                let octets = if width == 0 { column.field.width as usize / 8 } else { width };
                let mut bits = self.bits;
                bits = Bits::restart(bits, if width == 0 { column.reference_at } else { place });
                let text = bits.text(octets).unwrap_or_default();
                let missing = text.is_empty() || text.iter().all(|&octet| octet == 0xff);
                sink.text(column.field.descriptor, if missing { None } else { Some(&text) });
                continue;
            }
            let value = self.number(column, place);
            sink.number(column.field.descriptor, value);
        }
    }

    fn number(&self, column: &Column, place: usize) -> Option<f64> {
        let references = self.references.last()?;
        if column.increment_width == 0 {
            let missing = is_missing(&column.field, column.base);
            return (!missing).then(|| value_of(&column.field, references, column.base));
        }
        let increment = self.bits.peek_at(place, column.increment_width)?;
        if increment == (1_u64 << column.increment_width) - 1 {
            return None;
        }
        Some(value_of(&column.field, references, column.base.checked_add(increment)?))
    }

    fn run(
        &mut self,
        operations: &[Operation],
        subsets: usize,
        wants: &dyn Fn(u32) -> bool,
    ) -> Result<(), Stop> {
        let mut at = 0;
        while let Some(operation) = operations.get(at) {
            at += 1;
            match operation {
                Operation::Element(field) => {
                    if field.associated > 0 {
                        self.pass(field.associated, subsets, 1)?;
                    }
                    self.column(field, subsets, wants)?;
                }
                Operation::Loop { count, body } => {
                    let inside = operations.get(at..at + body).unwrap_or_default();
                    at += body;
                    let times = match count {
                        Count::Fixed(times) => u64::from(*times),
                        Count::Delayed { width, .. } => self.factor(*width, subsets)?,
                        Count::Once { width, .. } => self.factor(*width, subsets)?.min(1),
                    };
                    for _ in 0..times {
                        let before = self.bits.position();
                        self.run(inside, subsets, wants)?;
                        if self.bits.position() == before {
                            break;
                        }
                    }
                }
                Operation::NewReference { descriptor, width } => {
                    let raw = self.bits.take(*width).ok_or(Stop::Short)?;
                    // The same for all subsets: no increments differ.
                    let increment = self.bits.take(6).ok_or(Stop::Short)?;
                    let step = usize::try_from(increment).unwrap_or(usize::MAX);
                    self.bits.skip(step.saturating_mul(subsets)).ok_or(Stop::Short)?;
                    if let Some(references) = self.references.last_mut() {
                        references.push((*descriptor, signed(raw, *width)));
                    }
                }
                Operation::Skip { width } => self.pass(*width, subsets, 1)?,
                Operation::AboutData => return Err(Stop::AboutData),
                Operation::Unknown { descriptor } => return Err(Stop::Unknown(*descriptor)),
            }
        }
        Ok(())
    }

    /// Passes over an element: its base, the width of its increments, the increments.
    fn pass(&mut self, width: u32, subsets: usize, unit: usize) -> Result<(), Stop> {
        self.bits.skip(width as usize).ok_or(Stop::Short)?;
        let increment = self.bits.take(6).ok_or(Stop::Short)?;
        let step = usize::try_from(increment).unwrap_or(usize::MAX).saturating_mul(unit);
        self.bits.skip(step.saturating_mul(subsets)).ok_or(Stop::Short)
    }

    /// A delayed replication factor: it must be the same in all subsets.
    fn factor(&mut self, width: u32, subsets: usize) -> Result<u64, Stop> {
        let base = self.bits.take(width).ok_or(Stop::Short)?;
        let increment = u32::try_from(self.bits.take(6).ok_or(Stop::Short)?).unwrap_or(0);
        let first = self.bits.peek_at(self.bits.position(), increment.min(57)).unwrap_or(0);
        self.bits.skip((increment as usize).saturating_mul(subsets)).ok_or(Stop::Short)?;
        Ok(base.saturating_add(first))
    }

    fn column(
        &mut self,
        field: &Field,
        subsets: usize,
        wants: &dyn Fn(u32) -> bool,
    ) -> Result<(), Stop> {
        let text = field.kind == Kind::Text;
        let keep =
            wants(field.descriptor) && (text || field.width <= 57) && self.kept.len() < COLUMNS_MAX;
        if !keep {
            return self.pass(field.width, subsets, if text { 8 } else { 1 });
        }
        let reference_at = self.bits.position();
        let base = if text {
            self.bits.skip(field.width as usize).ok_or(Stop::Short)?;
            0
        } else {
            self.bits.take(field.width).ok_or(Stop::Short)?
        };
        let increment_width = u32::try_from(self.bits.take(6).ok_or(Stop::Short)?).unwrap_or(0);
        let increments_at = self.bits.position();
        let unit = if text { 8 } else { 1 };
        let length = (increment_width as usize).saturating_mul(unit).saturating_mul(subsets);
        self.bits.skip(length).ok_or(Stop::Short)?;
        if !text && increment_width > 57 {
            return Ok(());
        }
        let field = *field;
        self.kept.push(Column { field, reference_at, base, increment_width, increments_at });
        Ok(())
    }
}

/// Bits in a step of the increments: text counts them in octets.
fn unit_of(column: &Column) -> usize {
    if column.field.kind == Kind::Text { 8 } else { 1 }
}

/// Lists every element, for explaining a message.
#[derive(Debug, Default)]
pub(super) struct Lister {
    pub(super) values: Vec<Value>,
}

impl Sink for Lister {
    fn wants(&self, _: u32) -> bool {
        true
    }

    fn number(&mut self, descriptor: u32, value: Option<f64>) {
        self.values.push(Value::Number(descriptor, value));
    }

    fn text(&mut self, descriptor: u32, text: Option<&[u8]>) {
        self.values.push(Value::Text(descriptor, text.map(trimmed)));
    }
}

/// Characters with NULs and spaces taken off the end, unprintable ones shown as `?`.
pub(super) fn trimmed(text: &[u8]) -> String {
    let end = text.iter().rposition(|&octet| octet != 0 && octet != b' ').map_or(0, |at| at + 1);
    let start = text.iter().position(|&octet| octet != b' ').unwrap_or(0).min(end);
    text.get(start..end)
        .unwrap_or_default()
        .iter()
        .map(|&octet| if (b' '..=b'~').contains(&octet) { char::from(octet) } else { '?' })
        .collect()
}
