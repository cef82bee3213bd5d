//! Stackings of close-packed layers, written as layer letters (`ABAC`) or h/c symbols (`hc`).
//!
//! Letters name the three places A, B, C that a layer can take over a close-packed layer; neighbouring layers, the last
//! and the first included, take different places. `h` and `c` say of each layer whether its neighbours are alike (as in
//! hcp) or not (as in ccp): A. R. Verma & P. Krishna, Polymorphism and Polytypism in Crystals (Wiley, 1966).
//! A stacking is held in its shortest period: `ABCABC` is `ABC`.

use std::fmt;

/// Most layers accepted in one period.
pub const MAX_LAYERS: usize = 256;

/// A period of close-packed layers.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Stacking {
    /// 0, 1, 2 for A, B, C.
    layers: Vec<u8>,
}

/// Why a stacking is refused.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum StackingError {
    /// A letter that names no layer.
    #[error("stacking `{text}`, character {column}: `{found}` is no layer; write A, B and C, or h and c alone")]
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
        "stacking `{text}`: layer {layer} ({letter}) lies on one of the same letter (the last layer is followed by the first); neighbours must differ, or write `layers:{text}` for layers straight above each other"
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
    /// A list of more layers than can be gone through.
    #[error("stackings of {layers} layers are too many to list; at most {limit} layers are listed")]
    List {
        /// How many layers.
        layers: usize,
        /// [`super::polytypes::MAX_LISTED`].
        limit: usize,
    },
}

impl Stacking {
    /// Reads layer letters, `ABAC`, or h/c symbols, `hc`; case does not matter. Symbols are repeated until the letters
    /// close: `c` is ABC, `hc` is ABCB.
    ///
    /// # Errors
    /// [`StackingError`] for another letter, equal neighbours, or a period of fewer than 2 or more than [`MAX_LAYERS`].
    pub fn parse(text: &str) -> Result<Self, StackingError> {
        if !text.is_empty() && text.chars().all(|c| matches!(c, 'h' | 'c' | 'H' | 'C')) {
            return Self::from_symbols(text);
        }
        let layers = letters(text)?;
        let count = layers.len();
        for at in 0..count {
            if layers[at] == layers[(at + 1) % count] {
                let layer = (at + 1) % count + 1;
                return Err(StackingError::Neighbours { text: shown(text), layer, letter: letter(layers[at]) });
            }
        }
        Ok(Self::new(layers))
    }

    /// Reads layer letters of which equal ones may follow each other, `AABB`: such layers lie straight above each other.
    ///
    /// # Errors
    /// [`StackingError`] for another letter or a bad length.
    pub fn parse_layers(text: &str) -> Result<Self, StackingError> {
        letters(text).map(Self::new)
    }

    /// From places 0, 1, 2 in a period, cut to the shortest one.
    pub(super) fn new(mut layers: Vec<u8>) -> Self {
        let n = layers.len();
        let repeats = |p: usize| n.is_multiple_of(p) && (p..n).all(|i| layers[i] == layers[i - p]);
        let period = (1..n).find(|p| repeats(*p)).unwrap_or(n);
        layers.truncate(period);
        Self { layers }
    }

    /// Each symbol says whether the step between layers turns round (`h`) or goes on (`c`). Six repeats close any word:
    /// two bring the direction back, three the place.
    fn from_symbols(text: &str) -> Result<Self, StackingError> {
        let turns: Vec<bool> = text.chars().map(|c| c.eq_ignore_ascii_case(&'h')).collect();
        let mut layers = Vec::new();
        // So that the second layer is B.
        let first = if turns[0] { 2 } else { 1 };
        let (mut place, mut step) = (0, first);
        loop {
            for turn in &turns {
                layers.push(place);
                step = if *turn { 3 - step } else { step };
                place = (place + step) % 3;
                if layers.len() > MAX_LAYERS {
                    return Err(StackingError::Length { text: shown(text), layers: 6 * turns.len() });
                }
            }
            if place == 0 && step == first {
                return Ok(Self::new(layers));
            }
        }
    }

    /// Place of each layer: 0, 1, 2 for A, B, C.
    pub fn layers(&self) -> &[u8] {
        &self.layers
    }

    /// `h` for a layer whose two neighbours are alike, `c` otherwise, `-` for one that lies straight above or below a
    /// neighbour.
    pub fn symbols(&self) -> String {
        let n = self.layers.len();
        (0..n)
            .map(|i| match (self.layers[(i + n - 1) % n], self.layers[i], self.layers[(i + 1) % n]) {
                (below, here, above) if below == here || here == above => '-',
                (below, _, above) if below == above => 'h',
                _ => 'c',
            })
            .collect()
    }
}

fn letters(text: &str) -> Result<Vec<u8>, StackingError> {
    let count = text.chars().count();
    if !(2..=MAX_LAYERS).contains(&count) {
        return Err(StackingError::Length { text: shown(text), layers: count });
    }
    // A letter of neither notation is told before one of the other.
    let stranger = |c: char| !"ABCH".contains(c.to_ascii_uppercase());
    if let Some((at, found)) = text.chars().enumerate().find(|(_, c)| stranger(*c)) {
        return Err(StackingError::Letter { text: shown(text), column: at + 1, found });
    }
    text.chars()
        .enumerate()
        .map(|(at, c)| match c.to_ascii_uppercase() {
            letter @ 'A'..='C' => Ok(letter as u8 - b'A'),
            _ => Err(StackingError::Letter { text: shown(text), column: at + 1, found: c }),
        })
        .collect()
}

fn shown(text: &str) -> String {
    text.chars().take(40).collect()
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

    fn rotations(text: &str) -> impl Iterator<Item = String> {
        (0..text.len()).map(move |k| format!("{}{}", &text[k..], &text[..k]))
    }

    /// Verma & Krishna (1966): 2H is h, 3C c, 4H hc, 6H hcc, 9R hhc.
    #[test]
    fn symbols_of_the_common_polytypes() {
        for (letters, word) in [("AB", "h"), ("ABC", "c"), ("ABAC", "hc"), ("ABCACB", "hcc"), ("ABABCBCAC", "hhc")] {
            let stacking = Stacking::parse(letters).unwrap();
            let symbols = word.repeat(letters.len() / word.len());
            assert!(rotations(&symbols).any(|r| r == stacking.symbols()), "{letters}: {}", stacking.symbols());
            assert_eq!(stacking.to_string(), letters);
            let read = Stacking::parse(word).unwrap();
            assert_eq!(read.layers().len(), letters.len(), "{word}: {read}");
        }
    }

    /// Every word is consistent once repeated: the letters it leads to have the word as their symbols.
    #[test]
    fn letters_of_a_word_have_that_word() {
        for n in 1..=9 {
            for bits in 0..1_u32 << n {
                let word: String = (0..n).map(|i| if bits >> i & 1 == 1 { 'h' } else { 'c' }).collect();
                let symbols = Stacking::parse(&word).unwrap().symbols();
                let period = symbols.len();
                // A word may be a power of a shorter one: compare over a common multiple.
                let (long, read) = (word.repeat(period), symbols.repeat(n));
                assert!(rotations(&long).take(n).any(|r| r == read), "{word}: {symbols}");
            }
        }
    }

    #[test]
    fn periods_are_the_shortest() {
        assert_eq!(Stacking::parse("ABCABC").unwrap().to_string(), "ABC");
        assert_eq!(Stacking::parse("hhhh").unwrap().to_string(), "AB");
        let over = Stacking::parse_layers("AABB").unwrap();
        assert_eq!((over.to_string(), over.symbols()), ("AABB".into(), "----".into()));
    }

    #[test]
    fn impossible_stackings_are_refused() {
        assert!(matches!(Stacking::parse("ABB"), Err(StackingError::Neighbours { layer: 3, letter: 'B', .. })));
        assert!(matches!(Stacking::parse("ABA"), Err(StackingError::Neighbours { layer: 1, letter: 'A', .. })));
        assert!(matches!(Stacking::parse("ABD"), Err(StackingError::Letter { column: 3, found: 'D', .. })));
        assert!(matches!(Stacking::parse("hA"), Err(StackingError::Letter { column: 1, found: 'h', .. })));
        assert!(matches!(Stacking::parse("A"), Err(StackingError::Length { layers: 1, .. })));
        assert!(matches!(Stacking::parse(""), Err(StackingError::Length { layers: 0, .. })));
        assert!(matches!(Stacking::parse(&"hcc".repeat(99)), Err(StackingError::Length { .. })));
    }
}
