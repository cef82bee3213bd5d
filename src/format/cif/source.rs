//! The text of a file: whether it is a text at all, its encoding, and the version of CIF that it claims.

use super::diagnostic::{Diagnostic, Faults, Recovery, Severity};
use super::lexer::magic_code;
use std::borrow::Cow;

/// Largest file read, bytes: values are kept as 29-bit positions.
pub const MAX_BYTES: usize = (1 << 29) - 1;

/// The byte order mark of UTF-8.
const BYTE_ORDER_MARK: &[u8] = b"\xEF\xBB\xBF";

/// Version of the standard that a file is held against.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Version {
    /// CIF 1.1, International Tables for Crystallography G (2006), section 2.2.7: any file without the code of 2.0.
    Cif11,
    /// CIF 2.0, Bernstein et al., J. Appl. Cryst. 49, 277 (2016), doi:10.1107/S1600576715021871.
    Cif20,
}

/// How the bytes of a file became text.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Encoding {
    /// UTF-8, of which ASCII is a part.
    Utf8,
    /// Not UTF-8 and therefore read as ISO 8859-1; where the first byte that is no UTF-8 stands in the text, and which.
    Latin1 { offset: usize, byte: u8 },
}

/// A file as text. Offsets everywhere count bytes of this text.
#[derive(Clone, Debug)]
pub struct Source<'b> {
    name: String,
    text: Cow<'b, str>,
    version: Version,
    encoding: Encoding,
    has_byte_order_mark: bool,
}

impl<'b> Source<'b> {
    /// Decodes the bytes of the file `name`; its stem becomes the code of a block that has none.
    ///
    /// # Errors
    /// [`Diagnostic`] for what is no text CIF (a web page, a compressed file, UTF-16, NUL bytes), with what it looks
    /// like, and for a file over [`MAX_BYTES`].
    pub fn decode(name: &str, bytes: &'b [u8]) -> Result<Self, Diagnostic> {
        if bytes.len() > MAX_BYTES {
            let message = format!("the file has {} bytes; at most {MAX_BYTES} are read", bytes.len());
            return Err(refusal("cif::size", bytes, 0, message));
        }
        if let Some(kind) = foreign(bytes) {
            return Err(refusal("cif::not-cif", bytes, 0, format!("this is no text CIF: it looks like {kind}")));
        }
        // The search for one byte is the fast one.
        if bytes.contains(&0) {
            let at = bytes.iter().position(|b| *b == 0).unwrap_or(0);
            let message = "a NUL byte: this is no text CIF, or a damaged one".to_owned();
            return Err(refusal("cif::not-cif", bytes, at, message));
        }
        let stripped = bytes.strip_prefix(BYTE_ORDER_MARK);
        let body = stripped.unwrap_or(bytes);
        let (text, encoding) = match std::str::from_utf8(body) {
            Ok(text) => (Cow::Borrowed(text), Encoding::Utf8),
            Err(error) => {
                let (head, tail) = body.split_at(error.valid_up_to());
                let offset = latin1(head).len();
                (Cow::Owned(latin1(body)), Encoding::Latin1 { offset, byte: tail.first().copied().unwrap_or(0) })
            }
        };
        let version = if magic_code(&text).is_ok() { Version::Cif20 } else { Version::Cif11 };
        Ok(Self { name: name.to_owned(), text, version, encoding, has_byte_order_mark: stripped.is_some() })
    }

    /// The whole text.
    pub fn text(&self) -> &str {
        &self.text
    }

    /// Version that the file claims.
    pub fn version(&self) -> Version {
        self.version
    }

    /// The name of the file without folders and ending, as far as a block code can hold it.
    pub(super) fn stem(&self) -> String {
        let file = self.name.rsplit(['/', '\\']).next().unwrap_or_default();
        let stem = file.split_once('.').map_or(file, |(stem, _)| stem);
        stem.chars().filter(char::is_ascii_graphic).take(super::grammar::MAX_CODE).collect()
    }

    /// The text to be parsed: without the end-of-file mark of DOS.
    pub(super) fn body(&self) -> &str {
        let end = self.text.trim_end_matches(['\u{1A}', ' ', '\t', '\r', '\n']);
        match self.text[end.len()..].find('\u{1A}') {
            Some(at) => &self.text[..end.len() + at],
            None => &self.text,
        }
    }

    /// What is wrong with the bytes as such.
    pub(super) fn check(&self, faults: &mut Faults) {
        if self.has_byte_order_mark && self.version == Version::Cif11 {
            faults.push("cif::byte-order-mark", 0..0, Recovery::Assumed, || {
                "the file begins with a byte order mark, which CIF 1.1 does not know; it is passed over".to_owned()
            });
        }
        if let Encoding::Latin1 { offset, byte } = self.encoding {
            let (recovery, remedy) = match self.version {
                Version::Cif11 => (Recovery::Assumed, "the file is read as Latin-1 (ISO 8859-1)"),
                Version::Cif20 => (Recovery::Impossible, "CIF 2.0 is UTF-8 alone; convert the file"),
            };
            faults.push("cif::encoding", offset..offset + 1, recovery, || {
                format!("byte 0x{byte:02X} is neither ASCII nor UTF-8; {remedy}")
            });
        }
        let end = self.body().len();
        if end < self.text.len() {
            faults.push("cif::end-mark", end..end + 1, Recovery::Assumed, || {
                "the file ends with Ctrl-Z, the end-of-file mark of DOS; it is passed over".to_owned()
            });
        }
    }

    /// Whether characters beyond ASCII were already reported as bytes.
    pub(super) fn is_latin1(&self) -> bool {
        self.encoding != Encoding::Utf8
    }
}

fn latin1(bytes: &[u8]) -> String {
    bytes.iter().map(|b| char::from(*b)).collect()
}

/// What the first bytes say the file is, if it is no text CIF.
fn foreign(bytes: &[u8]) -> Option<&'static str> {
    const SIGNATURES: [(&[u8], &str); 10] = [
        (b"\x1F\x8B", "a gzip archive; unpack it"),
        (b"PK\x03\x04", "a zip archive; unpack it"),
        (b"BZh", "a bzip2 archive; unpack it"),
        (b"\xFD7zXZ", "an xz archive; unpack it"),
        (b"%PDF", "a PDF"),
        (b"\x00\x05\x16\x07", "a macOS resource fork; the CIF itself is the file without `._` in its name"),
        (b"\x00\x05\x16\x00", "a macOS resource fork; the CIF itself is the file without `._` in its name"),
        (b"{\\rtf", "a rich-text document; save it as plain text"),
        (b"\xFF\xFE", "UTF-16; save it as ASCII or UTF-8"),
        (b"\xFE\xFF", "UTF-16; save it as ASCII or UTF-8"),
    ];
    if let Some((_, kind)) = SIGNATURES.iter().find(|(signature, _)| bytes.starts_with(signature)) {
        return Some(kind);
    }
    if let [first, second, ..] = bytes
        && (*first == 0) != (*second == 0)
    {
        return Some("UTF-16; save it as ASCII or UTF-8");
    }
    let text = bytes.strip_prefix(BYTE_ORDER_MARK).unwrap_or(bytes).trim_ascii_start();
    let begins = |word: &str| text.get(..word.len()).is_some_and(|head| head.eq_ignore_ascii_case(word.as_bytes()));
    if begins("<!doctype html") || begins("<html") {
        return Some("a web page; the download went wrong");
    }
    begins("<?xml").then_some("XML")
}

/// A diagnostic before there is a text; `offset` counts bytes of the file.
fn refusal(code: &'static str, bytes: &[u8], offset: usize, message: String) -> Diagnostic {
    let head = &bytes[..offset.min(bytes.len())];
    let line_start = head.iter().rposition(|b| *b == b'\n').map_or(0, |at| at + 1);
    let line = head.iter().filter(|b| **b == b'\n').count() + 1;
    let column = head.len() - line_start + 1;
    Diagnostic { severity: Severity::Error, code, offset, len: 1, line, column, message }
}
