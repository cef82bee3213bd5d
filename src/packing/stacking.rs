//! Close-packed stackings, written as layer letters (`ABAC`).
//!
//! Letters name the three places A, B, C that a layer can take over a close-packed layer; neighbouring layers, the last
//! and the first included, take different places. `h` and `c` say of each layer whether its neighbours are alike (as in
//! hcp) or not (as in ccp): A. R. Verma & P. Krishna, Polymorphism and Polytypism in Crystals (Wiley, 1966).

use std::fmt;

/// Most layers accepted in one period.
pub const MAX_LAYERS: usize = 256;

/// A period of close-packed layers.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Stacking {
    /// 0, 1, 2 for A, B, C; neighbours differ, cyclically.
    layers: Vec<u8>,
}

/// Why a stacking is refused.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum StackingError {
    /// A letter that names no layer.
    #[error("stacking `{text}`, character {column}: `{found}` is no layer; write A, B and C")]
    Letter {
        /// As given.
        text: String,
        /// From 1.
        column: usize,
        /// The stranger.
        found: char,
    },
    /// Two equal neighbours.
    #[error(
        "stacking `{text}`: layer {layer} ({letter}) lies on one of the same letter (the last layer is followed by the first); neighbours must differ"
    )]
    Neighbours {
        /// As given.
        text: String,
        /// From 1, the upper of the two.
        layer: usize,
        /// Its letter.
        letter: char,
    },
    /// Too few or too many.
    #[error("stacking `{text}` has {layers} layers; a period has 2 to {MAX_LAYERS}")]
    Length {
        /// As given, cut.
        text: String,
        /// How many.
        layers: usize,
    },
}

impl Stacking {
    /// Reads `ABAC`; case does not matter.
    ///
    /// # Errors
    /// [`StackingError`] for another letter, equal neighbours, or a period of fewer than 2 or more than [`MAX_LAYERS`].
    pub fn parse(text: &str) -> Result<Self, StackingError> {
        let shown: String = text.chars().take(40).collect();
        let count = text.chars().count();
        if !(2..=MAX_LAYERS).contains(&count) {
            return Err(StackingError::Length { text: shown, layers: count });
        }
        let mut layers = Vec::with_capacity(count);
        for (at, c) in text.chars().enumerate() {
            match c.to_ascii_uppercase() {
                letter @ 'A'..='C' => layers.push(letter as u8 - b'A'),
                _ => return Err(StackingError::Letter { text: shown, column: at + 1, found: c }),
            }
        }
        for at in 0..count {
            if layers[at] == layers[(at + 1) % count] {
                let layer = (at + 1) % count + 1;
                return Err(StackingError::Neighbours { text: shown, layer, letter: letter(layers[at]) });
            }
        }
        Ok(Self { layers })
    }

    /// Place of each layer: 0, 1, 2 for A, B, C.
    pub fn layers(&self) -> &[u8] {
        &self.layers
    }

    /// `h` for a layer whose two neighbours are alike, `c` otherwise.
    pub fn symbols(&self) -> String {
        let n = self.layers.len();
        (0..n).map(|i| if self.layers[(i + n - 1) % n] == self.layers[(i + 1) % n] { 'h' } else { 'c' }).collect()
    }
}

fn letter(place: u8) -> char {
    char::from(b'A' + place)
}

impl fmt::Display for Stacking {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        self.layers.iter().try_for_each(|place| write!(f, "{}", letter(*place)))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Verma & Krishna (1966): 2H is h, 3C c, 4H hc, 6H hcc.
    #[test]
    fn symbols_of_the_common_polytypes() {
        for (letters, symbols) in [("AB", "hh"), ("ABC", "ccc"), ("ABAC", "chch"), ("ABCACB", "hcchcc")] {
            let stacking = Stacking::parse(letters).unwrap();
            let mut rotations = (0..symbols.len()).map(|k| format!("{}{}", &symbols[k..], &symbols[..k]));
            assert!(rotations.any(|r| r == stacking.symbols()), "{letters}: {}", stacking.symbols());
            assert_eq!(stacking.to_string(), letters);
        }
    }

    #[test]
    fn impossible_stackings_are_refused() {
        assert!(matches!(Stacking::parse("ABB"), Err(StackingError::Neighbours { layer: 3, letter: 'B', .. })));
        assert!(matches!(Stacking::parse("ABA"), Err(StackingError::Neighbours { layer: 1, letter: 'A', .. })));
        assert!(matches!(Stacking::parse("ABD"), Err(StackingError::Letter { column: 3, found: 'D', .. })));
        assert!(matches!(Stacking::parse("A"), Err(StackingError::Length { layers: 1, .. })));
    }
}
