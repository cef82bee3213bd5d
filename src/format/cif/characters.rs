//! Which characters a file may hold, and how long its lines may be.

use super::diagnostic::{Faults, Recovery};
use super::source::{Source, Version};

/// Longest line, characters without the line end: CIF 1.1 file syntax, paragraph 28; CIF 2.0, production `CIF2-file`.
pub const MAX_LINE: usize = 2048;

/// Bytes that are looked through at a time for anything beside printable ASCII.
const CHUNK: usize = 1 << 12;

/// Characters of one kind: where the first stands, which it is, and how many there are.
#[derive(Default)]
struct Aliens {
    first: Option<(usize, char)>,
    count: usize,
}

impl Aliens {
    fn add(&mut self, offset: usize, c: char) {
        self.first.get_or_insert((offset, c));
        self.count += 1;
    }

    fn report(&self, faults: &mut Faults, meaning: &str) {
        let Some((offset, c)) = self.first else { return };
        faults.push("cif::character", offset..offset + c.len_utf8(), Recovery::Assumed, || {
            let shown = if c.is_control() { String::new() } else { format!(" `{c}`") };
            let more = if self.count > 1 { format!(" ({} such characters in all)", self.count) } else { String::new() };
            format!("character U+{:04X}{shown} {meaning}{more}", u32::from(c))
        });
    }
}

/// Reports characters outside the set of the version, each kind once with its count.
///
/// CIF 1.1: HT, LF, CR and 32 to 126 (file syntax, paragraph 22). CIF 2.0: production `allchars`.
pub(super) fn check_characters(source: &Source<'_>, faults: &mut Faults) {
    let (text, version) = (source.body(), source.version());
    let (mut blanks, mut others, mut beyond) = (Aliens::default(), Aliens::default(), Aliens::default());
    let mut from = 0;
    while from < text.len() {
        let mut to = (from + CHUNK).min(text.len());
        while !text.is_char_boundary(to) {
            to += 1;
        }
        let plain = |b: u8| (b' '..=b'~').contains(&b) | (b == b'\t') | (b == b'\n') | (b == b'\r');
        // Without a branch, so that it is done many bytes at a time.
        if !text.as_bytes()[from..to].iter().fold(true, |all, b| all & plain(*b)) {
            for (at, c) in text[from..to].char_indices() {
                match c {
                    ' '..='~' | '\t' | '\n' | '\r' => {}
                    '\u{B}' | '\u{C}' => blanks.add(from + at, c),
                    _ if version == Version::Cif20 && is_allowed_in_cif_2(c) => {}
                    c if c.is_control() || version == Version::Cif20 => others.add(from + at, c),
                    _ => beyond.add(from + at, c),
                }
            }
        }
        from = to;
    }
    blanks.report(faults, "is no character of CIF; it is taken as a blank");
    others.report(faults, "is no character of CIF; it is kept as text");
    if !source.is_latin1() {
        beyond.report(faults, "is not ASCII, which CIF 1.1 asks for; it is kept as text");
    }
}

/// Whether a character may stand in a file of the version, outside comments and in them.
pub(super) fn is_allowed(c: char, version: Version) -> bool {
    match version {
        Version::Cif11 => matches!(c, '\t' | '\n' | '\r' | ' '..='~'),
        Version::Cif20 => is_allowed_in_cif_2(c),
    }
}

/// Production `allchars` of CIF 2.0.
fn is_allowed_in_cif_2(c: char) -> bool {
    let code = u32::from(c);
    match c {
        '\t' | '\n' | '\r' | ' '..='~' => true,
        '\u{A0}'..='\u{D7FF}' | '\u{E000}'..='\u{FDCF}' | '\u{FDF0}'..='\u{FFFD}' => true,
        _ => code >= 0x1_0000 && code & 0xFFFF < 0xFFFE,
    }
}

/// Reports lines longer than [`MAX_LINE`], once with their count.
pub(super) fn check_lines(text: &str, faults: &mut Faults) {
    let bytes = text.as_bytes();
    let is_end = |b: &u8| matches!(b, b'\n' | b'\r');
    let (mut first, mut count) = (None, 0);
    let mut start = 0;
    // A line that ends within the window is short enough; the last end in the window starts the next one.
    while bytes.len() - start > MAX_LINE {
        if let Some(last) = bytes[start..=start + MAX_LINE].iter().rposition(is_end) {
            start += last + 1;
            continue;
        }
        let end = bytes[start..].iter().position(is_end).map_or(bytes.len(), |at| start + at);
        let length = text[start..end].chars().count();
        if length > MAX_LINE {
            first.get_or_insert((start, end, length));
            count += 1;
        }
        start = (end + 1).min(bytes.len());
    }
    if let Some((start, end, length)) = first {
        let past = text[start..end].char_indices().nth(MAX_LINE).map_or(end, |(at, _)| start + at);
        faults.push("cif::line-length", past..past + 1, Recovery::Assumed, || {
            let more = if count > 1 { format!(" ({count} such lines in all)") } else { String::new() };
            format!("the line has {length} characters; the standard allows {MAX_LINE}{more}")
        });
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::format::cif::diagnostic::Mode;

    fn faults_of_lines(text: &str) -> Vec<String> {
        let mut faults = Faults::default();
        check_lines(text, &mut faults);
        let found = faults.finish(text, Mode::Strict).err().unwrap_or_default();
        found.iter().map(ToString::to_string).collect()
    }

    #[test]
    fn a_line_may_have_2048_characters() {
        let line = |n| "x".repeat(n);
        assert!(faults_of_lines(&line(2048)).is_empty());
        assert!(faults_of_lines(&format!("{}\n{}\r{}", line(2048), line(2048), line(2048))).is_empty());
        assert!(faults_of_lines(&"é".repeat(2048)).is_empty());
        let text = format!("a\r\n{}\n\n{}\nb", line(2049), line(9999));
        let found = faults_of_lines(&text);
        assert_eq!(
            found,
            ["line 2, column 2049: the line has 2049 characters; the standard allows 2048 (2 such lines in all)"]
        );
    }

    /// Production `allchars` of the CIF 2.0 grammar, its bounds.
    #[test]
    fn characters_of_cif_2() {
        for c in ['\t', ' ', '~', '\u{A0}', '\u{D7FF}', '\u{E000}', '\u{FDCF}', '\u{FDF0}', '\u{FFFD}', '\u{10FFFD}'] {
            assert!(is_allowed_in_cif_2(c), "{c:?}");
        }
        for c in ['\0', '\u{B}', '\u{7F}', '\u{9F}', '\u{FDD0}', '\u{FDEF}', '\u{FFFE}', '\u{1FFFF}', '\u{10FFFE}'] {
            assert!(!is_allowed_in_cif_2(c), "{c:?}");
        }
    }
}
