//! Binary messages: FM 94 BUFR, and GRIB, which is passed over.

use crate::wire::Context;
use crate::wire::bufr::Decoder;
use crate::wire::group::Group;
use crate::wire::listener::{Listener, Outcome};

/// Reads the binary message whose magic stands at `start` and tells it to the listener.
///
/// Returns the number of bytes it took, at least one.
pub(crate) fn read_message<L: Listener>(
    decoder: &mut Decoder,
    bytes: &[u8],
    start: usize,
    context: Context,
    listener: &mut L,
) -> usize {
    let rest = bytes.get(start..).unwrap_or_default();
    if rest.starts_with(b"BUFR") {
        let reading = decoder.read_message(rest, start, &context);
        let length = reading.length.clamp(1, rest.len().max(1));
        listener.message(rest.get(..length).unwrap_or(rest), start, reading);
        return length;
    }
    let length = grib_length(rest);
    let text = rest.get(..length).unwrap_or(rest);
    listener.begin(None);
    listener.complain(Group { text, start }, "forms that are read", || {
        format!("a GRIB message of {length} bytes: not read")
    });
    listener.end(start..start + text.len(), &Outcome::Lost);
    text.len().max(1)
}

/// The length that a GRIB message states, if its end mark stands there; else that of the magic.
fn grib_length(rest: &[u8]) -> usize {
    let octets = if rest.get(7) == Some(&2) { 8..16 } else { 4..7 };
    let number = rest
        .get(octets)
        .unwrap_or_default()
        .iter()
        .fold(0_u64, |sum, &octet| sum.saturating_mul(256).saturating_add(u64::from(octet)));
    let stated = usize::try_from(number).unwrap_or(0);
    let ends = stated >= 8 && rest.get(stated - 4..stated) == Some(b"7777");
    if ends { stated } else { rest.len().min(4) }
}
