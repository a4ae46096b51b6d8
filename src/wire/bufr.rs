//! FM 94 BUFR, editions 2 to 4: surface reports walked by element, never by position.
//!
//! WMO-No. 306 Vol. I.2, Part B (FM 94) and Part C (tables B, C, D); METHODS COD-11. A message's
//! descriptors are compiled once into a [`template::Template`]; the data section is then walked
//! with it, and [`collect::Collector`] keeps the elements that a surface watch needs.
//!
//! Memory: a message costs at most [`MEMORY_PER_BYTE`] bytes for each of its own bytes, whatever
//! its counts claim: subsets are refused beyond one for each octet of the data section.

mod bits;
mod collect;
mod message;
mod table;
mod template;
mod walk;

use super::Context;
use super::complaint::{Complaint, printable};
use crate::report::Report;

pub use message::{Header, Section};
pub use table::{Edition, Element, Kind, element, element_in};
pub use template::Template;
pub use walk::{Stop, Value};

/// Most bytes of memory that a message can cost for each of its own bytes: one report (and its
/// collector) for each octet of the data section.
pub const MEMORY_PER_BYTE: usize = 1536;

/// Keeps compiled templates from message to message.
#[derive(Debug, Default)]
pub struct Decoder {
    templates: message::Templates,
}

/// What became of the bytes at a `BUFR` magic.
#[derive(Debug, Clone, PartialEq)]
pub struct MessageReading {
    /// Bytes spent, at least 4; the next message is looked for after them.
    pub length: usize,
    /// The reports, in subset order.
    pub reports: Vec<Report>,
    /// What was not understood; offsets are from the first byte of the file.
    pub complaints: Vec<Complaint>,
    /// Whether the message was understood at all.
    pub understood: bool,
}

impl Decoder {
    /// A decoder that has compiled nothing yet.
    pub fn new() -> Self {
        Self::default()
    }

    /// Reads the message that begins at `bytes[0]` with `BUFR`; `offset` is its place in the file.
    ///
    /// A message whose total length or end marker is wrong is read as far as its sections hold;
    /// then only its magic is spent if nothing could be read, so that reading resynchronises at
    /// the next one.
    pub fn read_message(
        &mut self,
        bytes: &[u8],
        offset: usize,
        context: &Context,
    ) -> MessageReading {
        match message::read(&mut self.templates, bytes, offset, *context) {
            Ok(reading) => reading,
            Err(fault) => {
                let length = fault.spent.clamp(4, bytes.len().max(4));
                let piece = bytes.get(..length.min(bytes.len())).unwrap_or_default();
                MessageReading {
                    length,
                    reports: Vec::new(),
                    complaints: vec![Complaint {
                        start: offset,
                        end: offset + length,
                        station: String::new(),
                        group: printable(piece.get(..8).unwrap_or(piece), 40),
                        rule: fault.rule.to_owned(),
                        message: fault.message,
                        report_lost: true,
                    }],
                    understood: false,
                }
            }
        }
    }

    /// Every element of the message at `bytes[0]`, subset by subset, for explaining it.
    ///
    /// # Errors
    ///
    /// The reason, in words, where the message cannot be walked at all.
    pub fn list(&mut self, bytes: &[u8]) -> Result<Listing, String> {
        message::list(&mut self.templates, bytes).map_err(|fault| fault.message)
    }
}

/// A message taken apart.
#[derive(Debug, Clone, PartialEq)]
pub struct Listing {
    /// Its header.
    pub header: Header,
    /// Its descriptors as written.
    pub descriptors: Vec<u32>,
    /// The elements of each subset in order.
    pub subsets: Vec<Vec<Value>>,
    /// Why walking ended before the end of the data, where it did.
    pub stop: Option<Stop>,
}

#[cfg(test)]
mod tests;
