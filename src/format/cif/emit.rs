//! Writes documents of any content, so that a reader gets the same document back.
//!
//! How a value is delimited: bare where that is safe, else between quotes that it does not hold, else as a text field;
//! long lines are folded (CIF 1.1 common semantic features, paragraph 26), and in 2.0 lines that begin with `;` are
//! prefixed. No string holds its own delimiter, so that what is written as 1.1 reads alike as 2.0.

use super::characters::{MAX_LINE, is_allowed};
use super::document::{Block, Document, Loop};
use super::grammar::{MAX_CODE, MAX_NAME};
use super::lexer::is_blank;
use super::nested::MAX_NESTING;
use super::number::Number;
use super::protocol::fold_mark;
use super::source::Version;
use super::value::Datum;

/// Characters of a line after which the next value goes on a new one.
const LINE: usize = 80;

/// Characters of a physical line of a folded field.
const FOLD: usize = 76;

/// What each line of a prefixed field begins with.
const PREFIX: &str = "> ";

/// Why a document cannot be written.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum EmitError {
    /// A name or code that is none.
    #[error("`{text}` is no {what}: {reason}")]
    Name {
        /// `data name` or `code of a block`.
        what: &'static str,
        /// As given.
        text: String,
        /// What is wrong with it.
        reason: &'static str,
    },
    /// A character outside the set of the version.
    #[error("character U+{code:04X} cannot stand in {version}")]
    Character {
        /// Its code.
        code: u32,
        /// `CIF 1.1` or `CIF 2.0`.
        version: &'static str,
    },
    /// A value that the version has no way to write.
    #[error("{version} has no way to write {what}")]
    Value {
        /// What it is.
        what: &'static str,
        /// `CIF 1.1` or `CIF 2.0`.
        version: &'static str,
    },
    /// A row that is too short or too long, or a loop without rows.
    #[error("a loop of {names} names has {values} values; it needs a whole number of rows, and at least one")]
    Loop {
        /// Names.
        names: usize,
        /// Values.
        values: usize,
    },
}

/// Builds the text of a file, part by part. That names and codes differ from each other is the caller's to see to.
#[derive(Debug)]
pub struct Emitter {
    out: String,
    version: Version,
    /// Characters on the line that is being written.
    column: usize,
}

impl Emitter {
    /// A file that begins with the code of its version.
    pub fn new(version: Version) -> Self {
        let mut emitter = Self { out: String::new(), version, column: 0 };
        emitter.push(if version == Version::Cif20 { "#\\#CIF_2.0" } else { "#\\#CIF_1.1" });
        emitter
    }

    /// Begins a data block.
    ///
    /// # Errors
    /// [`EmitError::Name`], [`EmitError::Character`].
    pub fn block(&mut self, code: &str) -> Result<(), EmitError> {
        self.heading("data_", code)
    }

    /// Begins a save frame in the block.
    ///
    /// # Errors
    /// [`EmitError::Name`], [`EmitError::Character`].
    pub fn frame(&mut self, code: &str) -> Result<(), EmitError> {
        self.heading("save_", code)
    }

    /// Ends the save frame.
    pub fn end_frame(&mut self) {
        self.new_line();
        self.push("save_");
    }

    /// An item outside loops.
    ///
    /// # Errors
    /// [`EmitError`] but [`EmitError::Loop`].
    pub fn pair(&mut self, name: &str, value: &Datum) -> Result<(), EmitError> {
        self.new_line();
        self.name(name)?;
        self.value(value)
    }

    /// A loop with its values, row by row.
    ///
    /// # Errors
    /// [`EmitError`].
    pub fn table(&mut self, names: &[&str], values: &[Datum]) -> Result<(), EmitError> {
        if names.is_empty() || values.is_empty() || !values.len().is_multiple_of(names.len()) {
            return Err(EmitError::Loop { names: names.len(), values: values.len() });
        }
        self.new_line();
        self.push("loop_");
        for name in names {
            self.new_line();
            self.name(name)?;
        }
        for row in values.chunks(names.len()) {
            self.new_line();
            row.iter().try_for_each(|value| self.value(value))?;
        }
        Ok(())
    }

    /// The file.
    pub fn finish(mut self) -> String {
        self.new_line();
        self.out
    }

    /// A document that was read, written anew: comments and blanks are not kept, values are.
    ///
    /// # Errors
    /// [`EmitError`]: what a lenient reader let pass may have no legal form.
    pub fn rewrite(document: &Document<'_>) -> Result<String, EmitError> {
        let mut emitter = Self::new(document.version);
        for block in &document.blocks {
            emitter.block(block.code())?;
            emitter.content(block)?;
            for frame in &block.frames {
                emitter.frame(frame.code())?;
                emitter.content(frame)?;
                emitter.end_frame();
            }
        }
        Ok(emitter.finish())
    }

    fn content(&mut self, block: &Block<'_>) -> Result<(), EmitError> {
        let data = |table: &Loop<'_>| -> Vec<Datum> {
            (0..table.n_rows()).flat_map(|row| table.row(row).map(|value| value.datum())).collect()
        };
        for (name, value) in block.pairs.names.iter().zip(data(&block.pairs)) {
            self.pair(name.text, &value)?;
        }
        for table in &block.loops {
            let names: Vec<&str> = table.names.iter().map(|name| name.text).collect();
            self.table(&names, &data(table))?;
        }
        Ok(())
    }

    fn version(&self) -> &'static str {
        if self.version == Version::Cif20 { "CIF 2.0" } else { "CIF 1.1" }
    }

    fn push(&mut self, text: &str) {
        self.out.push_str(text);
        self.column += text.chars().count();
    }

    fn new_line(&mut self) {
        if self.column > 0 {
            self.out.push('\n');
            self.column = 0;
        }
    }

    /// Text without line ends, after a blank or on a new line.
    fn word(&mut self, text: &str) {
        if self.column + 1 + text.chars().count() > LINE {
            self.new_line();
        }
        if self.column > 0 {
            self.push(" ");
        }
        self.push(text);
    }

    fn heading(&mut self, token: &str, code: &str) -> Result<(), EmitError> {
        self.check_name("code of a block or frame", code, code, MAX_CODE)?;
        self.new_line();
        self.push(token);
        self.push(code);
        Ok(())
    }

    fn name(&mut self, name: &str) -> Result<(), EmitError> {
        let rest = name.strip_prefix('_').unwrap_or_default();
        self.check_name("data name", name, rest, MAX_NAME)?;
        self.push(name);
        Ok(())
    }

    /// `rest` is what must not be empty.
    fn check_name(&self, what: &'static str, text: &str, rest: &str, limit: usize) -> Result<(), EmitError> {
        let limit = if self.version == Version::Cif20 { MAX_LINE - "data_".len() } else { limit };
        let reason = match () {
            () if rest.is_empty() && what == "data name" => "it must be an underscore and at least one character",
            () if rest.is_empty() => "it must have at least one character",
            () if text.bytes().any(is_blank) => "it must hold no blank",
            () if text.chars().count() > limit => "it is too long",
            () => return self.check_characters(text),
        };
        Err(EmitError::Name { what, text: text.to_owned(), reason })
    }

    fn check_characters(&self, text: &str) -> Result<(), EmitError> {
        // Line ends are LF: a CR that is content would be read as one.
        match text.chars().find(|c| *c == '\r' || !is_allowed(*c, self.version)) {
            Some(c) => Err(EmitError::Character { code: c.into(), version: self.version() }),
            None => Ok(()),
        }
    }

    fn value(&mut self, value: &Datum) -> Result<(), EmitError> {
        self.value_within(value, MAX_NESTING)
    }

    /// Deep lists are refused before they could exhaust the stack.
    fn value_within(&mut self, value: &Datum, depth: usize) -> Result<(), EmitError> {
        let nested = matches!(value, Datum::List(_) | Datum::Table(_));
        let what = match value {
            Datum::Number(text) if Number::parse(text).is_none() || text.len() > MAX_LINE => "a number that is none",
            _ if nested && self.version == Version::Cif11 => "lists and tables",
            _ if nested && depth == 0 => "lists nested so deeply",
            _ => "",
        };
        if !what.is_empty() {
            return Err(EmitError::Value { what, version: self.version() });
        }
        match value {
            Datum::Unknown => self.word("?"),
            Datum::Inapplicable => self.word("."),
            Datum::Number(text) => self.word(text),
            Datum::Text(text) => self.text(text)?,
            Datum::List(members) => {
                self.word("[");
                members.iter().try_for_each(|member| self.value_within(member, depth - 1))?;
                self.word("]");
            }
            Datum::Table(entries) => {
                self.word("{");
                for (key, member) in entries {
                    self.key(key)?;
                    self.value_within(member, depth - 1)?;
                }
                self.word("}");
            }
        }
        Ok(())
    }

    /// The key of a table, between quotes in any case.
    fn key(&mut self, key: &str) -> Result<(), EmitError> {
        self.check_characters(key)?;
        let is_line = !key.contains('\n');
        let fits = |quote: &&str| match quote.len() {
            1 => is_line && !key.contains(*quote),
            _ => !key.contains(*quote) && !key.ends_with(&quote[..1]),
        };
        let quote = ["'", "\"", "'''", "\"\"\""].into_iter().find(fits);
        let is_short = key.split('\n').all(|line| line.chars().count() <= MAX_LINE - 8);
        let Some(quote) = quote.filter(|_| is_short) else {
            return Err(EmitError::Value { what: "such a key of a table", version: self.version() });
        };
        // A bare `:` after the closing quote; the value may follow on the same line or the next.
        self.word(quote);
        self.push(key);
        self.push(quote);
        self.push(":");
        self.column = self.out.rsplit('\n').next().map_or(0, |line| line.chars().count());
        Ok(())
    }

    fn text(&mut self, text: &str) -> Result<(), EmitError> {
        self.check_characters(text)?;
        let quoted = if text.contains('\n') { None } else { quoted(text) };
        match quoted.filter(|quoted| quoted.chars().count() <= MAX_LINE) {
            // Bare, it would be a number.
            Some(bare) if Number::parse(&bare).is_some() => self.word(&format!("'{bare}'")),
            Some(quoted) => self.word(&quoted),
            None => self.field(text)?,
        }
        Ok(())
    }

    /// A text field, folded and prefixed where it must be.
    fn field(&mut self, text: &str) -> Result<(), EmitError> {
        let fits = |line: &str| line.chars().count() < MAX_LINE;
        // A line that begins with `;`, or can be cut before one only, would end the field.
        let is_cut_off = text.starts_with(';') || text.contains("\n;") || text.contains(&";".repeat(FOLD));
        let first = text.split('\n').next().unwrap_or_default();
        let plain = fold_mark(first).is_none() && text.split('\n').all(fits) && !text.contains("\n;");
        let prefix = if is_cut_off { PREFIX } else { "" };
        self.new_line();
        if plain {
            self.out.push_str(&format!(";{text}\n;"));
        } else if self.version == Version::Cif11 && !prefix.is_empty() {
            let what = "a text of several or long lines where one begins with `;`";
            return Err(EmitError::Value { what, version: self.version() });
        } else {
            // A prefix, a backslash, and another that tells of folding.
            self.out.push_str(if prefix.is_empty() { ";\\" } else { ";> \\\\" });
            text.split('\n').for_each(|line| push_folded(&mut self.out, prefix, line));
            self.out.push_str("\n;");
        }
        self.column = 1;
        Ok(())
    }
}

/// One line of a text as lines that a reader joins again; each begins with a line end and the prefix.
fn push_folded(out: &mut String, prefix: &str, line: &str) {
    let mut rest = line;
    while rest.chars().count() > FOLD {
        // Not before a `;`, which would end the field.
        let ends = rest.char_indices().skip(1).take(FOLD);
        let Some((cut, _)) = ends.filter(|(_, c)| !prefix.is_empty() || *c != ';').last() else { break };
        out.push_str(&format!("\n{prefix}{}\\", &rest[..cut]));
        rest = &rest[cut..];
    }
    out.push_str(&format!("\n{prefix}{rest}"));
    // A line of the text that ends like a fold is followed by an empty one, folded onto it.
    if fold_mark(rest).is_some() {
        out.push_str(&format!("\\\n{prefix}"));
    }
}

/// Text of one line as a value: bare where it is safe, else between quotes that it does not hold; `None` when it needs
/// a text field. What a quote encloses is legal in CIF 2.0 as well.
pub(super) fn quoted(text: &str) -> Option<String> {
    let reserved = |word: &str| {
        let lower = word.to_ascii_lowercase();
        matches!(lower.as_str(), "loop_" | "stop_" | "global_" | "?" | ".")
            || lower.starts_with("data_")
            || lower.starts_with("save_")
    };
    let first_is_safe = text.starts_with(|c: char| c.is_ascii_alphanumeric());
    let is_safe = |c: char| c.is_ascii_graphic() && !"[]{}\"'#$,;\\".contains(c);
    if first_is_safe && text.chars().all(is_safe) && !reserved(text) {
        Some(text.to_owned())
    } else if !text.contains('\'') {
        Some(format!("'{text}'"))
    } else if !text.contains('"') {
        Some(format!("\"{text}\""))
    } else {
        None
    }
}
