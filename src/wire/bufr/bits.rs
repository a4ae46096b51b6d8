//! A bit stream read from its most significant bit.

/// A place in a bit stream. Reading past the end gives `None` and moves nothing.
#[derive(Debug, Clone, Copy)]
pub(super) struct Bits<'a> {
    bytes: &'a [u8],
    at: usize,
    end: usize,
}

impl<'a> Bits<'a> {
    pub(super) fn new(bytes: &'a [u8]) -> Self {
        Self { bytes, at: 0, end: bytes.len().saturating_mul(8) }
    }

    /// The same stream, standing at bit `at`.
    pub(super) fn restart(mut self, at: usize) -> Self {
        self.at = at.min(self.end);
        self
    }

    /// Bits read so far.
    pub(super) const fn position(&self) -> usize {
        self.at
    }

    /// Bits left.
    pub(super) const fn left(&self) -> usize {
        self.end - self.at
    }

    /// Passes over `count` bits.
    pub(super) fn skip(&mut self, count: usize) -> Option<()> {
        if count > self.left() {
            return None;
        }
        self.at += count;
        Some(())
    }

    /// The next `width` bits, at most 57, as a number.
    #[inline]
    pub(super) fn take(&mut self, width: u32) -> Option<u64> {
        let value = self.peek_at(self.at, width)?;
        self.at += width as usize;
        Some(value)
    }

    /// `width` bits, at most 57, from an absolute place.
    #[inline]
    pub(super) fn peek_at(&self, at: usize, width: u32) -> Option<u64> {
        if width == 0 {
            return Some(0);
        }
        if width > 57 || at.checked_add(width as usize)? > self.end {
            return None;
        }
        let first = at / 8;
        let word = if let Some(window) = self.bytes.get(first..first + 8) {
            u64::from_be_bytes(window.try_into().ok()?)
        } else {
            let mut padded = [0_u8; 8];
            let rest = self.bytes.get(first..)?;
            for (to, from) in padded.iter_mut().zip(rest) {
                *to = *from;
            }
            u64::from_be_bytes(padded)
        };
        let shift = u32::try_from(at % 8).ok()?;
        Some((word << shift) >> (64 - width))
    }

    /// The next `octets` octets as text.
    pub(super) fn text(&mut self, octets: usize) -> Option<Vec<u8>> {
        if octets.checked_mul(8)? > self.left() {
            return None;
        }
        (0..octets).map(|_| self.take(8).and_then(|octet| u8::try_from(octet).ok())).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::Bits;

    #[test]
    fn bits_come_from_the_most_significant_end() {
        let mut bits = Bits::new(&[0b1010_0101, 0xff, 0x01]);
        assert_eq!(bits.take(1), Some(1));
        assert_eq!(bits.take(3), Some(0b010));
        assert_eq!(bits.take(12), Some(0x5ff));
        assert_eq!(bits.take(9), None);
        assert_eq!(bits.take(8), Some(1));
        assert_eq!(bits.take(1), None);
        assert_eq!(bits.take(0), Some(0));
    }

    #[test]
    fn the_widest_read_is_right_at_every_shift() {
        let bytes: Vec<u8> = (0..16_u8).map(|k| k.wrapping_mul(37).wrapping_add(11)).collect();
        for at in 0..64 {
            let bits = Bits::new(&bytes);
            let mut expected = 0_u64;
            for k in at..at + 57 {
                expected = (expected << 1) | u64::from((bytes[k / 8] >> (7 - k % 8)) & 1);
            }
            assert_eq!(bits.peek_at(at, 57), Some(expected));
        }
    }
}
