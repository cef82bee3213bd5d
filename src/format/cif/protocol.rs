//! What the content of a text field stands for: line folding and text prefixes.
//!
//! Line folding: common semantic features of CIF 1.1, paragraph 26 (International Tables G, 2006, section 2.2.7.4.11);
//! CIF 2.0 keeps it and adds the prefix (Bernstein et al., J. Appl. Cryst. 49, 277 (2016), doi:10.1107/S1600576715021871;
//! that a prefix holds no backslash is from memory).
//!
//! The last line end belongs to the field in the grammar of 1.1 (table 2.2.7.1 (e)), where it is dropped after unfolding,
//! and to the closing delimiter in that of 2.0 (`text-delim`). So a backslash at the very end is folded away in 1.1 and
//! stays in 2.0.

use super::source::Version;
use std::borrow::Cow;

/// The value of a text field with this content, its line ends as LF.
pub(super) fn decoded(content: &str, version: Version) -> Cow<'_, str> {
    let text = line_ends_as_lf(content);
    let first = text.split('\n').next().unwrap_or_default();
    if fold_mark(first).is_none() {
        return text;
    }
    let unprefixed = if version == Version::Cif20 { without_prefix(&text, first) } else { None };
    let text = unprefixed.map_or(text, Cow::Owned);
    match text.split_once('\n').unwrap_or((&text, "")) {
        (first, rest) if fold_mark(first) == Some("") => Cow::Owned(unfolded(rest, version)),
        _ => text,
    }
}

/// CR and CRLF as LF.
pub(super) fn line_ends_as_lf(text: &str) -> Cow<'_, str> {
    if text.contains('\r') { Cow::Owned(text.replace("\r\n", "\n").replace('\r', "\n")) } else { Cow::Borrowed(text) }
}

/// What stands before a backslash that only blanks follow.
pub(super) fn fold_mark(line: &str) -> Option<&str> {
    line.trim_end_matches([' ', '\t']).strip_suffix('\\')
}

/// The text with the prefix taken from each line; `None` when the first line names none or a line lacks it. With two
/// backslashes the text is folded as well: a first line of one backslash remains.
fn without_prefix(text: &str, first: &str) -> Option<String> {
    let marked = fold_mark(first)?;
    let (prefix, is_folded) = match marked.strip_suffix('\\') {
        Some(prefix) => (prefix, true),
        None => (marked, false),
    };
    if prefix.is_empty() || prefix.starts_with(';') || prefix.contains('\\') {
        return None;
    }
    let lines = text.split('\n').skip(1).map(|line| line.strip_prefix(prefix));
    let mut kept: Vec<&str> = lines.collect::<Option<_>>()?;
    if is_folded {
        kept.insert(0, "\\");
    }
    Some(kept.join("\n"))
}

/// Lines joined where they end with a fold mark.
fn unfolded(text: &str, version: Version) -> String {
    let mut out = String::with_capacity(text.len());
    let mut lines = text.split('\n').peekable();
    while let Some(line) = lines.next() {
        let is_last = lines.peek().is_none();
        match fold_mark(line) {
            Some(kept) if !is_last || version == Version::Cif11 => out.push_str(kept),
            _ => {
                out.push_str(line);
                if !is_last {
                    out.push('\n');
                }
            }
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn folds_and_prefixes() {
        use Version::{Cif11, Cif20};
        for (content, in_11, in_20) in [
            ("plain\r\ntext\r", "plain\ntext\n", "plain\ntext\n"),
            ("\\\nab\\\ncd", "abcd", "abcd"),
            ("\\  \nab\\ \t\ncd\n", "abcd\n", "abcd\n"),
            ("\\\nab\\", "ab", "ab\\"),
            ("\\", "", ""),
            ("ab\\\ncd", "ab\\\ncd", "ab\\\ncd"),
            ("> \\\n> ;\n> b", "> \\\n> ;\n> b", ";\nb"),
            ("> \\\n>b", "> \\\n>b", "> \\\n>b"),
            ("> \\\\\n> a\\\n> b", "> \\\\\n> a\\\n> b", "ab"),
            (";\\\n;a", ";\\\n;a", ";\\\n;a"),
            ("\\\\\na", "\\\\\na", "\\\\\na"),
        ] {
            assert_eq!(decoded(content, Cif11), in_11, "{content:?} in 1.1");
            assert_eq!(decoded(content, Cif20), in_20, "{content:?} in 2.0");
        }
    }
}
