//! Land or sea: which roughness lies under a wind. Half-degree cells of Natural Earth outlines.

use std::io::Read;
use std::sync::OnceLock;

use crate::quantity::{index_nearest, wrap_180_deg};
use crate::sphere::Position;

const COLUMNS: usize = 720;
const ROWS: usize = 360;

/// Whether the half-degree cell of a place is land. Small islands and narrow straits are lost.
pub fn is_land(place: Position) -> bool {
    // The outline of the southern continent ends here; all that lies beyond is land.
    if place.latitude_deg() < -84.5 {
        return true;
    }
    let row = index_nearest(((place.latitude_deg() + 90.0) * 2.0).floor()).min(ROWS - 1);
    let east_deg = wrap_180_deg(place.longitude_deg()) + 180.0;
    let column = index_nearest((east_deg * 2.0).floor()) % COLUMNS;
    let at = row * COLUMNS + column;
    mask().get(at / 8).is_some_and(|byte| byte & (0x80 >> (at % 8)) != 0)
}

fn mask() -> &'static [u8] {
    // A constant of the program, unpacked at its first use; nothing outside can change it.
    static MASK: OnceLock<Vec<u8>> = OnceLock::new();
    MASK.get_or_init(|| {
        let mut bytes = Vec::new();
        let packed: &[u8] = include_bytes!("data/land_half_degree.gz");
        // `the_mask_is_whole` proves that it unpacks.
        let _ = flate2::read::GzDecoder::new(packed).read_to_end(&mut bytes);
        bytes
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Common knowledge of the map, no source.
    #[test]
    fn the_mask_is_whole_and_knows_the_continents() {
        assert_eq!(mask().len(), COLUMNS * ROWS / 8);
        for (latitude_deg, longitude_deg, land) in [
            (52.0, 0.0, true),
            (50.0, -30.0, false),
            (-25.0, 135.0, true),
            (-45.0, 170.0, true),
            (-45.0, -170.0, false),
            (75.0, -40.0, true),
            (-90.0, 0.0, true),
            (90.0, 0.0, false),
            (0.0, 180.0, false),
        ] {
            assert_eq!(is_land(Position::clamped(latitude_deg, longitude_deg)), land);
        }
    }
}
