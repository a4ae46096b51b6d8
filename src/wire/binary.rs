//! Binary messages: FM 94 BUFR, and GRIB, which is passed over.

use crate::wire::calendar::Calendar;
use crate::wire::listener::{Listener, Outcome};
use crate::wire::walk::stretch;

/// Reads the binary message whose magic stands at `start` and tells it to the listener.
///
/// Returns the number of bytes it took, at least the four of the magic.
pub(crate) fn read_message<L: Listener>(
    bytes: &[u8],
    start: usize,
    calendar: &Calendar,
    listener: &mut L,
) -> usize {
    let rest = bytes.get(start..).unwrap_or_default();
    // ---------------------------------------------------------------------------------------
    // CALL SITE of the BUFR decoder: `bufr::read_message(bytes, start, context, listener)` goes
    // here, for `rest.starts_with(b"BUFR")`. It must tell the listener every byte of what it
    // takes (`begin`, `element`, `complain`, `end`) and return how many bytes that is.
    // ---------------------------------------------------------------------------------------
    let _ = calendar.received();
    let length = message_length(rest);
    let (rule, name) = if rest.starts_with(b"BUFR") {
        ("FM 94", "a BUFR message of")
    } else {
        ("forms that are read", "a GRIB message of")
    };
    let range = start..start + length;
    listener.begin(None);
    listener.complain(stretch(bytes, range.clone()), rule, || {
        format!("{name} {length} bytes: not read")
    });
    listener.end(range, &Outcome::Lost);
    length
}

/// The length that a message states, if its end mark stands there; else the length of the magic.
fn message_length(rest: &[u8]) -> usize {
    let number = |octets: &[u8]| {
        octets.iter().fold(0_u64, |sum, &octet| sum.saturating_mul(256) + u64::from(octet))
    };
    let octets = if rest.starts_with(b"GRIB") && rest.get(7) == Some(&2) { 8..16 } else { 4..7 };
    let stated = usize::try_from(number(rest.get(octets).unwrap_or_default())).unwrap_or(0);
    let ends = stated >= 8 && rest.get(stated - 4..stated) == Some(b"7777");
    if ends { stated } else { 4 }
}
