//! What begins at a place in a file, told by its first characters.

use crate::report::Form;
use crate::wire::group::{Groups, is_blank};
use crate::wire::heading::{self, Heading};
use crate::wire::table;

/// What begins here.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) enum Mark {
    /// An FM 94 message.
    Bufr,
    /// A GRIB message.
    Grib,
    /// A file frame of this length.
    Frame(usize),
    /// An abbreviated heading.
    Heading(Heading),
    /// `ZCZC`.
    BulletinStart,
    /// `NNNN`.
    BulletinEnd,
    /// `AAXX`.
    Land,
    /// `BBXX`.
    Ship,
    /// `OOXX`.
    Mobile,
    /// `ZZYY`.
    Buoy,
    /// `METAR` or `SPECI`.
    Aerodrome(Form),
    /// A location indicator and a time, as the reports of a collective begin.
    AerodromeBare,
    /// The mark of a form that is not read here, its name, and its length.
    NotRead(&'static str, usize),
    /// An object of JSON lines.
    JsonLine,
    /// The header line of a table.
    Header,
    /// Nothing that is a mark.
    Text,
}

impl Mark {
    /// Whether rows of a table cannot go on past it.
    pub(super) const fn ends_table(self) -> bool {
        !matches!(self, Self::Text | Self::Frame(_) | Self::AerodromeBare)
    }
}

/// The mark at the start of `text`.
pub(super) fn at(text: &[u8]) -> Mark {
    match text.first() {
        Some(b'0'..=b'9') => {
            // No name of a column begins with a figure.
            heading::frame(text).map_or(Mark::Text, Mark::Frame)
        }
        Some(b'{') => Mark::JsonLine,
        Some(b'A'..=b'Z') => letters(text),
        Some(b'a'..=b'z' | b'"') => comma(text),
        _ => Mark::Text,
    }
}

fn comma(text: &[u8]) -> Mark {
    if table::is_header(text) { Mark::Header } else { Mark::Text }
}

fn letters(text: &[u8]) -> Mark {
    if is_bufr(text) {
        return Mark::Bufr;
    }
    if is_grib(text) {
        return Mark::Grib;
    }
    let word = word(text);
    match word {
        b"AAXX" => Mark::Land,
        b"BBXX" => Mark::Ship,
        b"OOXX" => Mark::Mobile,
        b"ZZYY" => Mark::Buoy,
        b"METAR" => Mark::Aerodrome(Form::Metar),
        b"SPECI" => Mark::Aerodrome(Form::Speci),
        b"ZCZC" => Mark::BulletinStart,
        b"NNNN" => Mark::BulletinEnd,
        b"TAF" => Mark::NotRead("TAF, an aerodrome forecast", 3),
        b"TTAA" | b"TTBB" | b"TTCC" | b"TTDD" | b"PPAA" | b"PPBB" | b"PPCC" | b"PPDD" => {
            Mark::NotRead("an upper-air report", 4)
        }
        b"JJVV" | b"KKYY" | b"NNXX" => Mark::NotRead("an ocean sounding", 4),
        b"CLIMAT" => Mark::NotRead("CLIMAT, monthly means", 6),
        _ if word.len() == 4 && is_aerodrome_start(text) => Mark::AerodromeBare,
        _ => heading::heading(text).map_or_else(|| comma(text), Mark::Heading),
    }
}

fn word(text: &[u8]) -> &[u8] {
    let longest = text.get(..7).unwrap_or(text);
    let length =
        longest.iter().position(|&byte| is_blank(byte) || byte == b'=').unwrap_or(longest.len());
    longest.get(..length).unwrap_or_default()
}

/// `CCCC YYGGggZ`, with an optional COR between them.
fn is_aerodrome_start(text: &[u8]) -> bool {
    let mut groups = Groups::new(text, 0, 20);
    let station = groups.next().is_some_and(|group| {
        group.text.iter().all(|byte| byte.is_ascii_uppercase() || byte.is_ascii_digit())
    });
    let mut time = groups.next();
    if time.is_some_and(|group| group.text == b"COR") {
        time = groups.next();
    }
    station
        && time.is_some_and(|group| {
            matches!(group.text, [figures @ .., b'Z']
                if figures.len() == 6 && figures.iter().all(u8::is_ascii_digit))
        })
}

/// Whether an FM 94 message begins here: the letters and a known edition number.
pub(super) fn is_bufr(text: &[u8]) -> bool {
    text.starts_with(b"BUFR") && matches!(text.get(7), Some(0..=5))
}

/// Whether a GRIB message begins here.
pub(super) fn is_grib(text: &[u8]) -> bool {
    text.starts_with(b"GRIB") && matches!(text.get(7), Some(0..=2))
}
