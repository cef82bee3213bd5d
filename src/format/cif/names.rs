//! When two names are the same.
//!
//! Data names, block and frame codes compare without case (CIF 1.1 file syntax, paragraphs 2.4 and 60); in CIF 2.0 after
//! Unicode normalisation and case folding, canonical caseless matching (The Unicode Standard, section 3.13, D145).

use std::borrow::Cow;
use unicode_normalization::UnicodeNormalization;

/// The key under which names that count as the same are equal.
pub(super) fn folded(name: &str) -> Cow<'_, str> {
    if !name.is_ascii() {
        return Cow::Owned(name.nfd().flat_map(case_folded).nfd().collect());
    }
    if name.bytes().any(|b| b.is_ascii_uppercase()) {
        Cow::Owned(name.to_ascii_lowercase())
    } else {
        Cow::Borrowed(name)
    }
}

/// A representative of the full case folding of a character, the same for all characters that fold alike: its lower
/// case's upper case in lower case. The dotless i alone would fall in with i.
fn case_folded(c: char) -> impl Iterator<Item = char> {
    let upper = c.to_lowercase().flat_map(char::to_uppercase);
    let folded = upper.flat_map(char::to_lowercase);
    let is_dotless_i = c == 'ı';
    std::iter::once(c).filter(move |_| is_dotless_i).chain(folded.filter(move |_| !is_dotless_i))
}

/// Whether two names mean the same item, however they are spelt: without case, and with the dot of newer dictionaries
/// for the underscore of older ones.
pub(super) fn is_same_item(a: &str, b: &str) -> bool {
    let plain = |c: u8| if c == b'.' { b'_' } else { c.to_ascii_lowercase() };
    a.len() == b.len() && a.bytes().zip(b.bytes()).all(|(p, q)| plain(p) == plain(q))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_fold_as_unicode_says() {
        for (a, b) in [
            ("_Cell_A", "_cell_a"),
            ("_STRASSE", "_straße"),
            ("_ẞ", "_ss"),
            ("_É", "_e\u{301}"),
            ("_Σ", "_ς"),
            ("_\u{212B}", "_å"),
            ("_ﬁ", "_FI"),
            ("_İ", "_i\u{307}"),
            ("_\u{1E9B}\u{323}", "_\u{1E69}"),
        ] {
            assert_eq!(folded(a), folded(b), "{a} {b}");
        }
        for (a, b) in [("_ı", "_i"), ("_o", "_ø"), ("_a_b", "_a.b"), ("_²", "_2")] {
            assert_ne!(folded(a), folded(b), "{a} {b}");
        }
    }
}
