//! A CIF as data blocks of names and values; knows nothing of atoms.

use super::lexer::{Token, token};
use crate::ion::Amount;
use std::borrow::Cow;

/// Largest file read, bytes.
pub const MAX_BYTES: usize = 1 << 30;

/// A value and where it stands.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Value<'s> {
    text: &'s str,
    /// Whether it was quoted or a text field: then `?` and `.` are ordinary characters.
    quoted: bool,
    offset: usize,
}

/// How grave a diagnostic is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Severity {
    /// The file or block cannot be used.
    Error,
    /// Something was taken otherwise than written.
    Warning,
}

/// A fault or an assumption, with its place.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("line {line}, column {column}: {message}")]
pub struct Diagnostic {
    /// How grave.
    pub severity: Severity,
    /// Name of the kind of fault.
    pub code: &'static str,
    /// Byte offset in the source.
    pub offset: usize,
    /// Bytes concerned.
    pub len: usize,
    /// From 1.
    pub line: usize,
    /// In characters, from 1.
    pub column: usize,
    /// What was found and what would be right, or what was assumed.
    pub message: String,
}

impl Diagnostic {
    /// A fault of syntax at a byte offset of a source.
    fn at(source: &str, offset: usize, message: impl Into<String>) -> Self {
        let (line, column) = place(source, offset);
        Self { severity: Severity::Error, code: "cif::syntax", offset, len: 1, line, column, message: message.into() }
    }
}

/// Line and column (in characters) of a byte offset, both from 1.
fn place(source: &str, offset: usize) -> (usize, usize) {
    let head = source.get(..offset.min(source.len())).unwrap_or_default();
    let line_start = head.rfind('\n').map_or(0, |i| i + 1);
    (head.bytes().filter(|b| *b == b'\n').count() + 1, head[line_start..].chars().count() + 1)
}

/// A number with its standard uncertainty.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Number<'s> {
    /// The value.
    pub value: f64,
    /// Standard uncertainty in the unit of the value, if written.
    pub su: Option<f64>,
    digits: &'s str,
}

impl Number<'_> {
    /// The exact decimal that a number without exponent writes, its uncertainty left out.
    pub fn exact(&self) -> Option<Amount> {
        let (negative, digits) = match self.digits.strip_prefix('-') {
            Some(rest) => (true, rest),
            None => (false, self.digits.strip_prefix('+').unwrap_or(self.digits)),
        };
        let amount = crate::ion::amount::parse(digits)?;
        Some(if negative { -amount } else { amount })
    }
}

impl<'s> Value<'s> {
    /// Text without delimiters.
    pub fn text(&self) -> Cow<'s, str> {
        Cow::Borrowed(self.text)
    }

    /// Byte offset in the source.
    pub fn place(&self) -> usize {
        self.offset
    }

    /// A bare `?`: not known.
    pub fn is_unknown(&self) -> bool {
        !self.quoted && self.text == "?"
    }

    /// A bare `.`: does not apply.
    pub fn is_inapplicable(&self) -> bool {
        !self.quoted && self.text == "."
    }

    /// The number that the value writes, `34.5(12)` or `-1.2E3`; International Tables G, 2.2.7.4.7.1 (paragraph 19).
    pub fn number(&self) -> Option<Number<'s>> {
        let (digits, su) = match self.text.split_once('(') {
            Some((digits, rest)) => (digits, Some(rest.strip_suffix(')')?)),
            None => (self.text, None),
        };
        if !digits.bytes().all(|b| b.is_ascii_digit() || b"+-.eE".contains(&b)) {
            return None;
        }
        let value: f64 = digits.parse().ok()?;
        let su = match su {
            Some(su) if !su.is_empty() && su.bytes().all(|b| b.is_ascii_digit()) => {
                let (mantissa, exponent) = digits.split_once(['e', 'E']).unwrap_or((digits, "0"));
                let places = mantissa.split_once('.').map_or(0, |(_, fraction)| fraction.len() as i32);
                Some(su.parse::<f64>().ok()? * 10.0_f64.powi(exponent.parse::<i32>().ok()?.saturating_sub(places)))
            }
            Some(_) => return None,
            None => None,
        };
        value.is_finite().then_some(Number { value, su, digits })
    }
}

/// A loop: names and rows of values.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Loop<'s> {
    /// Names, as written.
    pub names: Vec<&'s str>,
    /// Values row by row; a multiple of the names in number.
    pub values: Vec<Value<'s>>,
}

impl<'s> Loop<'s> {
    /// The column of the first of these names that the loop has.
    pub fn column(&self, names: &[&str]) -> Option<usize> {
        names.iter().find_map(|name| self.names.iter().position(|n| same_name(n, name)))
    }

    /// Number of rows.
    pub fn n_rows(&self) -> usize {
        self.values.len() / self.names.len().max(1)
    }

    /// The value in a row and column, both from 0 and in range.
    pub fn value(&self, row: usize, column: usize) -> &Value<'s> {
        &self.values[row * self.names.len() + column]
    }

    /// Rows in order.
    pub fn rows(&self) -> impl ExactSizeIterator<Item = &[Value<'s>]> {
        self.values.chunks_exact(self.names.len().max(1))
    }
}

/// A data block. A name with a single value is a loop of one column and one row.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Block<'s> {
    code: &'s str,
    offset: usize,
    /// Loops and single items in order.
    pub loops: Vec<Loop<'s>>,
}

impl<'s> Block<'s> {
    /// Its code.
    pub fn code(&self) -> &'s str {
        self.code
    }

    /// Offset of its heading.
    pub fn place(&self) -> usize {
        self.offset
    }

    /// The value of the first of these names that the block has, alone or in a loop of one row.
    pub fn value(&self, names: &[&str]) -> Option<&Value<'s>> {
        let of_one = |name: &str| {
            let found = self.loops.iter().filter(|l| l.n_rows() == 1).find_map(|l| l.column(&[name]).map(|c| (l, c)));
            found.map(|(l, column)| l.value(0, column))
        };
        names.iter().find_map(|name| of_one(name))
    }

    /// The loop that has the first of these names that the block has.
    pub fn table(&self, names: &[&str]) -> Option<&Loop<'s>> {
        names.iter().find_map(|name| self.loops.iter().find(|l| l.column(&[name]).is_some()))
    }
}

/// A whole file.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Document<'s> {
    /// The text that all values refer to.
    pub source: &'s str,
    /// Data blocks in order.
    pub blocks: Vec<Block<'s>>,
}

/// Names compare without case; the dotted spelling of newer dictionaries is the same name.
fn same_name(a: &str, b: &str) -> bool {
    a.len() == b.len()
        && a.bytes().zip(b.bytes()).all(|(p, q)| {
            let plain = |c: u8| if c == b'.' { b'_' } else { c.to_ascii_lowercase() };
            plain(p) == plain(q)
        })
}

/// The text of a file: UTF-8 (or Latin-1 where it is none), with line ends turned into LF and a byte order mark dropped.
///
/// # Errors
/// [`Diagnostic`] for what is no text: NUL bytes, UTF-16, a file over [`MAX_BYTES`].
pub fn decode(bytes: &[u8]) -> Result<String, Diagnostic> {
    let fail = |offset, message: &str| Diagnostic { offset, ..Diagnostic::at("", 0, message) };
    if bytes.len() > MAX_BYTES {
        return Err(fail(0, "the file is larger than 1 GiB"));
    }
    if bytes.starts_with(&[0xFF, 0xFE]) || bytes.starts_with(&[0xFE, 0xFF]) || bytes.contains(&0) {
        return Err(fail(0, "this is no text CIF: it holds NUL bytes or is written in UTF-16"));
    }
    if bytes.starts_with(&[0x1F, 0x8B]) || bytes.starts_with(b"%PDF") || bytes.starts_with(b"PK\x03\x04") {
        return Err(fail(0, "this is no text CIF: it is a compressed file or a PDF"));
    }
    let text = match std::str::from_utf8(bytes) {
        Ok(text) => Cow::Borrowed(text),
        Err(_) => Cow::Owned(bytes.iter().map(|b| char::from(*b)).collect()),
    };
    let text = text.strip_prefix('\u{FEFF}').unwrap_or(&text);
    Ok(if text.contains('\r') { text.replace("\r\n", "\n").replace('\r', "\n") } else { text.to_string() })
}

impl<'s> Document<'s> {
    /// Reads a decoded text. Linear in its length.
    ///
    /// # Errors
    /// [`Diagnostic`] with the place of the first fault.
    pub fn parse(source: &'s str) -> Result<Self, Diagnostic> {
        let mut reader = Reader { source, rest: source, line_start: true, ahead: None };
        let mut blocks: Vec<Block<'s>> = Vec::new();
        let lowercase = source.trim_start().get(..5).unwrap_or_default().to_ascii_lowercase();
        if lowercase.starts_with("<!") || lowercase.starts_with("<html") {
            return Err(Diagnostic::at(source, 0, "this is no CIF: it looks like a web page"));
        }
        while let Some((token, offset)) = reader.next()? {
            match token {
                Token::DataHeading(code) => {
                    if blocks.iter().any(|b| b.code.eq_ignore_ascii_case(code)) {
                        return Err(reader.fault(offset, format!("a block `{code}` occurs before; codes must differ")));
                    }
                    blocks.push(Block { code, offset, loops: Vec::new() });
                }
                Token::Reserved(word) => {
                    return Err(reader.fault(offset, format!("`{word}` is STAR, not CIF")));
                }
                Token::SaveHeading(_) => {
                    return Err(reader.fault(offset, "save frames belong to dictionaries, not to structures"));
                }
                other => {
                    let Some(block) = blocks.last_mut() else {
                        return Err(reader.fault(offset, "expected `data_` and a block code before the first item"));
                    };
                    reader.item(block, other, offset)?;
                }
            }
        }
        Ok(Self { source, blocks })
    }

    /// A fault of the whole at an offset.
    pub fn fault(&self, offset: usize, message: impl Into<String>) -> Diagnostic {
        Diagnostic::at(self.source, offset, message)
    }

    /// Line and column (in characters) of a byte offset, both from 1.
    pub fn place(&self, offset: usize) -> (usize, usize) {
        place(self.source, offset)
    }
}

struct Reader<'s> {
    source: &'s str,
    rest: &'s str,
    line_start: bool,
    ahead: Option<(Token<'s>, usize)>,
}

impl<'s> Reader<'s> {
    fn fault(&self, offset: usize, message: impl Into<String>) -> Diagnostic {
        Diagnostic::at(self.source, offset, message)
    }

    fn next(&mut self) -> Result<Option<(Token<'s>, usize)>, Diagnostic> {
        if let Some(found) = self.ahead.take() {
            return Ok(Some(found));
        }
        match token(self.rest, self.line_start) {
            Ok(None) => Ok(None),
            Ok(Some((rest, token, start))) => {
                self.line_start = false;
                let glued = rest.chars().next().is_some_and(|c| !matches!(c, ' ' | '\t' | '\n'));
                if glued {
                    let offset = self.source.len() - rest.len();
                    return Err(self.fault(offset, "a blank must follow the closing `;` of a text field"));
                }
                self.rest = rest;
                Ok(Some((token, self.source.len() - start.len())))
            }
            Err(fault) => Err(self.fault(self.source.len() - fault.at.len(), fault.message)),
        }
    }

    fn peek(&mut self) -> Result<Option<Token<'s>>, Diagnostic> {
        if self.ahead.is_none() {
            self.ahead = self.next()?;
        }
        Ok(self.ahead.map(|(token, _)| token))
    }

    fn item(&mut self, block: &mut Block<'s>, token: Token<'s>, offset: usize) -> Result<(), Diagnostic> {
        match token {
            Token::Name(name) => {
                self.unused(block, name, offset)?;
                match self.peek()? {
                    Some(next) if value(next, 0).is_some() => {
                        if let Some((next, at)) = self.next()? {
                            let values = value(next, at).into_iter().collect();
                            block.loops.push(Loop { names: vec![name], values });
                        }
                        Ok(())
                    }
                    _ => Err(self.fault(offset, format!("`{name}` has no value; write `?` if it is not known"))),
                }
            }
            Token::Loop => self.loop_(block, offset),
            _ => Err(self.fault(offset, "a value without a name; a text with blanks must be quoted")),
        }
    }

    fn loop_(&mut self, block: &mut Block<'s>, offset: usize) -> Result<(), Diagnostic> {
        let mut found = Loop { names: Vec::new(), values: Vec::new() };
        while let Some(Token::Name(name)) = self.peek()? {
            let at = self.next()?.map_or(offset, |(_, at)| at);
            self.unused(block, name, at)?;
            if found.column(&[name]).is_some() {
                return Err(self.fault(at, format!("`{name}` occurs twice in this loop")));
            }
            found.names.push(name);
        }
        if found.names.is_empty() {
            return Err(self.fault(offset, "the loop has no names"));
        }
        while let Some(next) = self.peek()? {
            if value(next, 0).is_none() {
                break;
            }
            if let Some((next, at)) = self.next()? {
                found.values.extend(value(next, at));
            }
        }
        let (names, values) = (found.names.len(), found.values.len());
        if values == 0 || values % names != 0 {
            let end = if self.peek()?.is_none() { "; the file ends inside the loop" } else { "" };
            return Err(self.fault(
                offset,
                format!("this loop has {names} names and {values} values, no whole number of rows{end}"),
            ));
        }
        block.loops.push(found);
        Ok(())
    }

    fn unused(&self, block: &Block<'s>, name: &str, offset: usize) -> Result<(), Diagnostic> {
        let used = block.loops.iter().any(|l| l.column(&[name]).is_some());
        if used { Err(self.fault(offset, format!("`{name}` occurs before in this block"))) } else { Ok(()) }
    }
}

fn value<'s>(token: Token<'s>, offset: usize) -> Option<Value<'s>> {
    match token {
        Token::Bare(text) => Some(Value { text, quoted: false, offset }),
        Token::Quoted(text) | Token::Text(text) => Some(Value { text, quoted: true, offset }),
        _ => None,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    const SAMPLE: &str =
        "#\\#CIF_1.1\ndata_a\n_x.Y 1.5(3) # c\n_t\n;one\ntwo\n;\nloop_ _p _q 'a b' ? \"c'd\" .\n_n 'O'neil'\n";

    #[test]
    fn values_keep_their_quotes_and_numbers_their_uncertainty() {
        let document = Document::parse(SAMPLE).unwrap();
        let block = &document.blocks[0];
        let n = block.value(&["_x_y"]).unwrap().number().unwrap();
        assert!(n.value == 1.5 && (n.su.unwrap() - 0.3).abs() < 1e-12);
        assert_eq!(block.value(&["_T"]).unwrap().text(), "one\ntwo");
        let table = block.table(&["_p"]).unwrap();
        let rows: Vec<_> = table.rows().collect();
        assert_eq!((rows[0][0].text, rows[1][0].text), ("a b", "c'd"));
        assert!(rows[0][1].is_unknown() && rows[1][1].is_inapplicable());
        assert_eq!(block.value(&["_n"]).unwrap().text(), "O'neil");
    }

    /// International Tables G, 2.2.7.4.7.1: 34.5(12) = 34.5 ± 1.2 = 3.45E1(12).
    #[test]
    fn numbers_are_read_as_the_standard_says() {
        let number = |text| Value { text, quoted: false, offset: 0 }.number();
        for text in ["34.5(12)", "3.45E1(12)"] {
            let n = number(text).unwrap();
            assert!((n.value - 34.5).abs() < 1e-12 && (n.su.unwrap() - 1.2).abs() < 1e-12, "{text}");
        }
        for bad in ["1/3", "0,5", "8.08A", "1.D0", "12.3(", "12.3()", "nan", "inf", "1e999", "0x10"] {
            assert_eq!(number(bad), None, "{bad}");
        }
    }

    #[test]
    fn faults_have_their_place() {
        for (text, line, column, part) in [
            ("_a 1", 1, 1, "data_"),
            ("data_a\n_a", 2, 1, "no value"),
            ("data_a\n_a 'x", 2, 4, "not closed"),
            ("data_a\n_a\n;x\ny", 3, 1, "text field"),
            ("data_a\n_a\n;x\n;y", 4, 2, "blank"),
            ("data_a\nloop_\n_a _b\n1 2 3", 2, 1, "2 names and 3 values"),
            ("data_a\nloop_\n1", 2, 1, "no names"),
            ("data_a\n_a 1 2", 2, 6, "without a name"),
            ("data_a\n_a 1\n_A 2", 3, 1, "occurs before"),
            ("data_a\ndata_A", 2, 1, "codes must differ"),
            ("data_a _b [1", 1, 11, "begins no value"),
            ("data_a global_", 1, 8, "STAR"),
            ("<html>", 1, 1, "web page"),
        ] {
            let error = Document::parse(text).unwrap_err();
            assert_eq!((error.line, error.column), (line, column), "{text}: {error}");
            assert!(error.message.contains(part), "{text}: {error}");
        }
        assert!(Document::parse("").unwrap().blocks.is_empty());
        assert!(decode(&[0xFF, 0xFE, 0]).is_err());
    }

    proptest! {
        #[test]
        fn never_panics(bytes in proptest::collection::vec(any::<u8>(), 0..200)) {
            if let Ok(text) = decode(&bytes) {
                let _ = Document::parse(&text);
            }
        }

        #[test]
        fn near_files_never_panic(words in proptest::collection::vec("data_a|loop_|_[a-c]|'|;|\n|\n;|#|x|1.2\\(3\\)|\\?|\\.|\\[| ", 0..40)) {
            let _ = Document::parse(&words.concat());
        }
    }
}
