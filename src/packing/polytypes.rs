//! All distinct close-packed stackings of a number of layers.
//!
//! Two stackings are one polytype when rotation of the period, reversal of the order or relabelling of A, B, C turns one
//! into the other. A stacking is a word of steps, +1 (A→B→C→A) or −1: relabelling turns every sign or none, reversal
//! turns the word round (and every sign, which relabelling undoes). The least word of each class is listed.
//!
//! T. J. McLarnan, Z. Kristallogr. 155, 269 (1981), derives the numbers by Pólya counting (not seen; the numbers are
//! recalled and brute force confirms them in the tests).

use super::stacking::{Stacking, StackingError};

/// Most layers whose stackings are listed: all 2ⁿ words are gone through.
pub const MAX_LISTED: usize = 24;

/// Every distinct stacking that repeats after exactly `n` layers and no fewer, found one by one; none for `n` below 2.
///
/// # Errors
/// [`StackingError::List`] for more than [`MAX_LISTED`] layers.
pub fn polytypes(n: usize) -> Result<impl Iterator<Item = Stacking>, StackingError> {
    if n > MAX_LISTED {
        return Err(StackingError::List { layers: n, limit: MAX_LISTED });
    }
    Ok((0..1_u32 << n).filter(move |word| n > 1 && closes(*word, n) && !repeats(*word, n) && least(*word, n)).map(
        move |word| {
            let mut place = 0;
            let layer = |i: usize| {
                let here = place;
                place = (place + if word >> (n - 1 - i) & 1 == 0 { 1 } else { 2 }) % 3;
                here
            };
            Stacking::new((0..n).map(layer).collect())
        },
    ))
}

/// Whether the steps lead back to the first place.
fn closes(word: u32, n: usize) -> bool {
    (n + word.count_ones() as usize).is_multiple_of(3)
}

/// Whether the letters repeat after a proper part of the period.
fn repeats(word: u32, n: usize) -> bool {
    (1..n).any(|d| n.is_multiple_of(d) && rotated(word, n, d) == word && closes(word & ((1 << d) - 1), d))
}

fn rotated(word: u32, n: usize, by: usize) -> u32 {
    (word >> by | word << (n - by)) & ((1 << n) - 1)
}

/// Whether no rotation, reversal or change of all signs gives a smaller word.
fn least(word: u32, n: usize) -> bool {
    let all = (1_u32 << n) - 1;
    let reversed = word.reverse_bits() >> (32 - n);
    [word, word ^ all, reversed, reversed ^ all].iter().all(|w| (0..n).all(|by| rotated(*w, n, by) >= word))
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::collections::BTreeSet;

    /// The classical counts of polytypes by number of layers; recalled from McLarnan (1981) and from the On-Line
    /// Encyclopedia of Integer Sequences, A011768 (Barlow packings that repeat after exactly n layers).
    #[test]
    fn numbers_are_the_published_ones() {
        let published = [0, 1, 1, 1, 1, 2, 3, 6, 7, 16, 21, 43, 63, 129, 203, 404];
        for (n, count) in (1..).zip(published) {
            assert_eq!(polytypes(n).unwrap().count(), count, "{n} layers");
        }
        assert!(matches!(polytypes(MAX_LISTED + 1), Err(StackingError::List { .. })));
    }

    /// Every string of letters, its class gathered by applying each operation to the letters themselves.
    #[test]
    fn brute_force_over_letters_finds_the_same() {
        for n in 2..=9_usize {
            let mut seen: BTreeSet<Vec<u8>> = BTreeSet::new();
            let mut classes = 0;
            for code in 0..3_usize.pow(n as u32) {
                let word: Vec<u8> = (0..n).map(|i| (code / 3_usize.pow(i as u32) % 3) as u8).collect();
                let neighbours = (0..n).all(|i| word[i] != word[(i + 1) % n]);
                let shorter = (1..n).any(|d| n.is_multiple_of(d) && (d..n).all(|i| word[i] == word[i - d]));
                if !neighbours || shorter || seen.contains(&word) {
                    continue;
                }
                classes += 1;
                for labels in [[0, 1, 2], [0, 2, 1], [1, 0, 2], [1, 2, 0], [2, 0, 1], [2, 1, 0]] {
                    for by in 0..n {
                        let image: Vec<u8> = (0..n).map(|i| labels[usize::from(word[(i + by) % n])]).collect();
                        seen.insert(image.iter().rev().copied().collect());
                        seen.insert(image);
                    }
                }
            }
            let listed: Vec<Stacking> = polytypes(n).unwrap().collect();
            assert_eq!(listed.len(), classes, "{n} layers");
            assert!(listed.iter().all(|s| Stacking::parse(&s.to_string()).as_ref() == Ok(s) && s.layers().len() == n));
        }
    }
}
