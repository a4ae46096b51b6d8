//! Compressed files (RFC 1952), expanded within a bound.

use std::borrow::Cow;
use std::io::Read;

use flate2::read::MultiGzDecoder;

use crate::limits::EXPANDED_BYTES_MAX;

/// A file as it is read: expanded where it was compressed.
#[derive(Debug)]
pub(crate) struct Expanded<'a> {
    /// The bytes.
    pub bytes: Cow<'a, [u8]>,
    /// What went wrong; the bytes before it are good.
    pub fault: Option<Fault>,
}

/// Why an expansion ended early.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) enum Fault {
    /// The bound was reached.
    TooLong,
    /// The compressed data are cut or damaged: the reason given by the decoder.
    Damaged(String),
}

/// Whether bytes begin as a compressed file does (RFC 1952, section 2.3.1).
fn is_compressed(bytes: &[u8]) -> bool {
    bytes.starts_with(&[0x1f, 0x8b, 8])
}

/// Expands a compressed file of one or more members; anything else is handed back as it is.
pub(crate) fn expand(bytes: &[u8]) -> Expanded<'_> {
    expand_within(bytes, EXPANDED_BYTES_MAX)
}

fn expand_within(bytes: &[u8], bytes_max: u64) -> Expanded<'_> {
    if !is_compressed(bytes) {
        return Expanded { bytes: Cow::Borrowed(bytes), fault: None };
    }
    let mut expanded = Vec::new();
    // One byte beyond the bound shows that there was more. A failed read keeps what came before.
    let outcome =
        MultiGzDecoder::new(bytes).take(bytes_max.saturating_add(1)).read_to_end(&mut expanded);
    let length_max = usize::try_from(bytes_max).unwrap_or(usize::MAX);
    let fault = if expanded.len() > length_max {
        expanded.truncate(length_max);
        Some(Fault::TooLong)
    } else {
        outcome.err().map(|error| Fault::Damaged(error.to_string()))
    };
    Expanded { bytes: Cow::Owned(expanded), fault }
}

#[cfg(test)]
mod tests {
    use std::io::Write;

    use flate2::Compression;
    use flate2::write::GzEncoder;

    use super::*;

    fn compressed(text: &[u8]) -> Vec<u8> {
        let mut encoder = GzEncoder::new(Vec::new(), Compression::default());
        encoder.write_all(text).expect("writing to memory");
        encoder.finish().expect("writing to memory")
    }

    #[test]
    fn members_follow_one_another() {
        let file = [compressed(b"one "), compressed(b"two")].concat();
        let expanded = expand(&file);
        assert_eq!((&*expanded.bytes, expanded.fault), (&b"one two"[..], None));
    }

    #[test]
    fn a_cut_tail_keeps_what_came_before() {
        let text: Vec<u8> = (0..20_000_u32).flat_map(|n| n.to_string().into_bytes()).collect();
        let file = compressed(&text);
        let expanded = expand(&file[..file.len() / 2]);
        assert!(matches!(expanded.fault, Some(Fault::Damaged(_))));
        assert!(expanded.bytes.len() > 10_000 && text.starts_with(&expanded.bytes));
        // Rubbish after the last member is a fault too, or is left alone; the text survives.
        let trailed = [compressed(b"text"), b"rubbish".to_vec()].concat();
        assert_eq!(&*expand(&trailed).bytes, b"text");
    }

    #[test]
    fn expansion_is_bounded() {
        let file = compressed(&vec![b'='; 1_000_000]);
        assert!(file.len() < 2000);
        let expanded = expand_within(&file, 5000);
        assert_eq!((expanded.bytes.len(), expanded.fault), (5000, Some(Fault::TooLong)));
        let exact = expand_within(&file, 1_000_000);
        assert_eq!((exact.bytes.len(), exact.fault), (1_000_000, None));
    }
}
