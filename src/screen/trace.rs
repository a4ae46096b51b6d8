//! A barograph trace: pressures of equal spacing in time, oldest left, as dots or in ASCII.

use super::Glyphs;

/// Smallest range of a trace, hPa, so that noise does not look like weather.
const RANGE_MIN_HPA: f64 = 4.0;

/// Bits of a braille pattern by column and row of the dot (Unicode standard, chapter 21.1).
pub(super) const BRAILLE_BITS: [[u8; 4]; 2] = [[0x01, 0x02, 0x04, 0x40], [0x08, 0x10, 0x20, 0x80]];

/// The braille pattern of some bits.
pub(super) fn braille(bits: u8) -> char {
    char::from_u32(0x2800 + u32::from(bits)).unwrap_or(' ')
}

/// The lines of a trace, upper first: `width` x `height` cells; the newest values, at the right.
/// A value that is missing leaves a gap.
pub(super) fn lines(
    values_hpa: &[Option<f64>],
    width: usize,
    height: usize,
    glyphs: Glyphs,
) -> Vec<String> {
    let a_cell = if glyphs == Glyphs::Braille { 2 } else { 1 };
    let kept = values_hpa.len().min(width * a_cell);
    let shown: Vec<Option<f64>> = values_hpa
        .iter()
        .skip(values_hpa.len() - kept)
        .map(|value| value.filter(|value| value.is_finite()))
        .collect();
    let known = || shown.iter().flatten().copied();
    let low = known().fold(f64::INFINITY, f64::min);
    let high = known().fold(f64::NEG_INFINITY, f64::max);
    let range = (high - low).max(RANGE_MIN_HPA);
    let base = f64::midpoint(low, high) - range / 2.0;
    let levels = 4 * height.max(1);
    let level = |value: f64| {
        let share = ((value - base) / range).clamp(0.0, 1.0);
        crate::quantity::index_nearest(share * (levels - 1) as f64).min(levels - 1)
    };
    if glyphs == Glyphs::Ascii {
        return ascii(&shown, width, height, level);
    }
    let mut bits = vec![vec![0_u8; width]; height];
    let first = width * 2 - kept;
    let mut before: Option<usize> = None;
    for (k, value) in shown.iter().enumerate() {
        let now = value.map(level);
        if let Some(now) = now {
            // Join with the one before, so that a step is seen as one.
            let (from, to) = before.map_or((now, now), |before| match now.cmp(&before) {
                std::cmp::Ordering::Greater => ((before + 1).min(now), now),
                _ => (now, before.saturating_sub(1).max(now)),
            });
            for level in from..=to {
                let down = levels - 1 - level;
                let place = first + k;
                if let Some(cell) = bits.get_mut(down / 4).and_then(|row| row.get_mut(place / 2)) {
                    *cell |= BRAILLE_BITS[place % 2][down % 4];
                }
            }
        }
        before = now;
    }
    let glyph = |bits: u8| if bits == 0 { ' ' } else { braille(bits) };
    bits.iter().map(|row| row.iter().map(|bits| glyph(*bits)).collect()).collect()
}

/// Four heights within a line of ASCII.
const HEIGHTS: [char; 4] = ['_', '.', '-', '\''];

fn ascii(
    shown: &[Option<f64>],
    width: usize,
    height: usize,
    level: impl Fn(f64) -> usize,
) -> Vec<String> {
    let mut cells = vec![vec![' '; width]; height];
    for (k, value) in shown.iter().enumerate() {
        let Some(level) = value.map(&level) else { continue };
        let row = height.saturating_sub(1 + level / 4);
        let column = width - shown.len() + k;
        if let Some(cell) = cells.get_mut(row).and_then(|row| row.get_mut(column)) {
            *cell = HEIGHTS[level % 4];
        }
    }
    cells.iter().map(|row| row.iter().collect()).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    const FALLING: [Option<f64>; 6] =
        [Some(1012.0), Some(1011.0), None, Some(1004.0), Some(1001.0), Some(998.0)];

    #[test]
    fn falls_to_the_right_with_a_gap_at_the_missing_hour() {
        assert_eq!(lines(&FALLING, 8, 1, Glyphs::Ascii), ["  '' .._"]);
    }

    #[test]
    fn keeps_the_newest_values_and_stays_inside() {
        for (width, height) in (0..6).flat_map(|w| (0..4).map(move |h| (w, h))) {
            for glyphs in [Glyphs::Braille, Glyphs::Ascii] {
                let found = lines(&FALLING, width, height, glyphs);
                assert_eq!(found.len(), height);
                assert!(found.iter().all(|line| line.chars().count() == width));
            }
        }
    }

    #[test]
    fn nothing_known_is_nothing_drawn() {
        assert_eq!(lines(&[None, Some(f64::NAN)], 2, 1, Glyphs::Braille), ["  "]);
    }
}
