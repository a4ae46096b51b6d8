//! A name for a file's content: two files of one content are one file.

/// FNV-1a over 128 bits, 32 hexadecimal figures (Fowler, Noll and Vo; the published offset basis
/// and prime). It guards against reading a file twice, not against malice.
pub fn content_name(bytes: &[u8]) -> String {
    const BASIS: u128 = 0x6c62_272e_07bb_0142_62b8_2175_6295_c58d;
    const PRIME: u128 = 0x0000_0000_0100_0000_0000_0000_0000_013b;
    let hash =
        bytes.iter().fold(BASIS, |hash, byte| (hash ^ u128::from(*byte)).wrapping_mul(PRIME));
    format!("{hash:032x}")
}

#[cfg(test)]
mod tests {
    use super::content_name;

    /// Test values of the draft-eastlake-fnv series, from memory: the empty string is the basis.
    #[test]
    fn the_hash_has_its_published_basis_and_tells_contents_apart() {
        assert_eq!(content_name(b""), "6c62272e07bb014262b821756295c58d");
        assert_eq!(content_name(b"a"), "d228cb696f1a8caf78912b704e4a8964");
        assert_ne!(content_name(b"ab"), content_name(b"ba"));
    }
}
