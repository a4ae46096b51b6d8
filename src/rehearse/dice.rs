//! Dice that fall the same way every time: a draw is a pure function of the seed and of what it is
//! drawn for, so that adding one station changes no other station's luck.

/// A source of draws; every word and number added to it makes an independent one.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Dice(u64);

/// The finaliser of SplitMix64 (Steele, Lea and Flood 2014, OOPSLA, figure 17; constants from
/// memory).
const fn mix(word: u64) -> u64 {
    let word = (word ^ (word >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
    let word = (word ^ (word >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
    word ^ (word >> 31)
}

impl Dice {
    /// Dice of a seed.
    pub(crate) const fn new(seed: u64) -> Self {
        Self(mix(seed.wrapping_add(0x9E37_79B9_7F4A_7C15)))
    }

    /// Dice for a named purpose.
    pub(crate) fn word(self, text: &str) -> Self {
        Self(text.bytes().fold(self.0, |state, byte| {
            mix(state.wrapping_add(u64::from(byte)).wrapping_mul(0x0000_0100_0000_01B3))
        }))
    }

    /// Dice for a numbered purpose.
    pub(crate) const fn number(self, number: i64) -> Self {
        Self(mix(self.0 ^ mix(number.cast_unsigned().wrapping_add(0x9E37_79B9_7F4A_7C15))))
    }

    /// Uniform in [0, 1).
    pub(crate) fn unit(self) -> f64 {
        (mix(self.0) >> 11) as f64 / (1_u64 << 53) as f64
    }

    /// Uniform between two values.
    pub(crate) fn between(self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.unit()
    }

    /// Whether something happens that happens in `percent` of the cases.
    pub(crate) fn happens(self, percent: f64) -> bool {
        self.unit() * 100.0 < percent
    }

    /// A whole number below `count`; 0 where `count` is 0.
    pub(crate) fn below(self, count: usize) -> usize {
        let count = u64::try_from(count.max(1)).unwrap_or(1);
        usize::try_from(mix(self.0) % count).unwrap_or(0)
    }

    /// Standard normal deviate (Box and Muller 1958).
    pub(crate) fn normal(self) -> f64 {
        let radius = (-2.0 * (1.0 - self.number(1).unit()).ln()).sqrt();
        radius * (std::f64::consts::TAU * self.number(2).unit()).cos()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn draws_have_the_moments_they_should() {
        let dice = Dice::new(7).word("moments");
        let draws: Vec<f64> = (0..20_000).map(|n| dice.number(n).normal()).collect();
        let mean = draws.iter().sum::<f64>() / 20_000.0;
        let variance = draws.iter().map(|x| (x - mean).powi(2)).sum::<f64>() / 20_000.0;
        // Five standard errors: 5/sqrt(20000) and 5 sqrt(2/20000).
        assert!(mean.abs() < 0.036 && (variance - 1.0).abs() < 0.05, "{mean} {variance}");
        let sum: f64 = (0..20_000).map(|n| dice.word("u").number(n).unit()).sum();
        assert!((sum / 20_000.0 - 0.5).abs() < 5.0 * 0.2887 / 141.4, "{sum}");
    }

    #[test]
    fn a_draw_depends_on_all_of_its_name() {
        let dice = Dice::new(1);
        let draws = [
            dice.word("a").number(1).unit(),
            dice.word("a").number(2).unit(),
            dice.word("b").number(1).unit(),
            Dice::new(2).word("a").number(1).unit(),
        ];
        for (i, a) in draws.iter().enumerate() {
            assert!(draws.iter().skip(i + 1).all(|b| a.to_bits() != b.to_bits()));
        }
    }
}
