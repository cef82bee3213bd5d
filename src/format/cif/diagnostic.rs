//! Faults of a file with their places: collected while parsing, shown with the line and a caret.

use annotate_snippets::{AnnotationKind, Level, Renderer, Snippet};
use serde::Serialize;
use std::ops::Range;

/// Faults of one kind that are kept; the rest is counted.
const MAX_ALIKE: usize = 100;

/// Longest excerpt of a line that is shown, characters.
const EXCERPT: usize = 120;

/// How strictly a file is read.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Mode {
    /// Whatever the standard does not allow is an error.
    Strict,
    /// What can be understood in one way only is a warning that says what was assumed.
    Lenient,
}

/// How grave a diagnostic is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum Severity {
    /// The file or block cannot be used.
    Error,
    /// Something was taken otherwise than written.
    Warning,
}

/// A fault or an assumption, with its place.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, thiserror::Error)]
#[error("line {line}, column {column}: {message}")]
pub struct Diagnostic {
    /// How grave.
    pub severity: Severity,
    /// Name of the kind of fault.
    pub code: &'static str,
    /// Byte offset in the text of the source.
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
    /// One line: `path:line:column: text`.
    pub fn one_line(&self, path: &str) -> String {
        format!("{path}:{}:{}: {}", self.line, self.column, self.message)
    }

    /// Several lines: the message, the place, and the line of the text with a caret.
    pub fn render(&self, path: &str, text: &str) -> String {
        let at = floor(text, self.offset);
        let line_start = text[..at].rfind(['\n', '\r']).map_or(0, |i| i + 1);
        let line_end = text[at..].find(['\n', '\r']).map_or(text.len(), |i| at + i);
        // A window of the line around the place.
        let from = floor(text, at.saturating_sub(EXCERPT / 2)).max(line_start);
        let to = floor(text, from + EXCERPT).clamp(at, line_end);
        let excerpt = text[from..to].replace('\t', " ").replace(char::is_control, "\u{FFFD}");
        let start: usize = text[from..at].chars().count();
        let len = text[at..floor(text, at + self.len).clamp(at, to)].chars().count().max(1);
        let byte = |n: usize| excerpt.char_indices().nth(n).map_or(excerpt.len(), |(i, _)| i);
        let (level, name) = match self.severity {
            Severity::Error => (Level::ERROR, ""),
            Severity::Warning => (Level::WARNING, "warning: "),
        };
        let snippet = Snippet::source(excerpt.as_str())
            .line_start(self.line)
            .annotation(AnnotationKind::Primary.span(byte(start)..byte(start + len)));
        let title = format!("{path}:{}:{}: {name}{}", self.line, self.column, self.message);
        Renderer::plain().render(&[level.no_name().primary_title(title).element(snippet)])
    }
}

/// The last character boundary at or before an offset.
fn floor(text: &str, offset: usize) -> usize {
    (0..=offset.min(text.len())).rev().find(|i| text.is_char_boundary(*i)).unwrap_or(0)
}

/// Line and column (in characters) of a byte offset, both from 1; CR, LF and CRLF end lines.
pub(super) fn place(text: &str, offset: usize) -> (usize, usize) {
    let mut lines = Lines { text, line: 1, line_start: 0, at: 0 };
    lines.place(offset)
}

/// Walks a text once and tells the line and column of offsets that ascend.
struct Lines<'s> {
    text: &'s str,
    line: usize,
    line_start: usize,
    at: usize,
}

impl Lines<'_> {
    fn place(&mut self, offset: usize) -> (usize, usize) {
        let offset = floor(self.text, offset);
        let bytes = self.text.as_bytes();
        for i in self.at..offset {
            // CRLF counts at its LF.
            if bytes[i] == b'\n' || (bytes[i] == b'\r' && bytes.get(i + 1) != Some(&b'\n')) {
                self.line += 1;
                self.line_start = i + 1;
            }
        }
        self.at = self.at.max(offset);
        let start = self.line_start.min(offset);
        (self.line, self.text[start..offset].chars().count() + 1)
    }
}

/// Whether a lenient reader can go on after a fault.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Recovery {
    /// The message says what was assumed.
    Assumed,
    /// The file means nothing, or more than one thing.
    Impossible,
}

/// Faults of one file, in the order in which they are met.
#[derive(Debug, Default)]
pub(super) struct Faults {
    found: Vec<(Diagnostic, Recovery)>,
    counts: Vec<(&'static str, Recovery, usize)>,
}

impl Faults {
    /// Adds a fault; `message` is only asked for while there are few of the kind.
    pub fn push(
        &mut self,
        code: &'static str,
        range: Range<usize>,
        recovery: Recovery,
        message: impl FnOnce() -> String,
    ) {
        let index = self.counts.iter().position(|(c, r, _)| *c == code && *r == recovery).unwrap_or_else(|| {
            self.counts.push((code, recovery, 0));
            self.counts.len() - 1
        });
        let count = &mut self.counts[index].2;
        *count += 1;
        if *count <= MAX_ALIKE {
            let (offset, len) = (range.start, range.len());
            let severity = Severity::Error;
            let diagnostic = Diagnostic { severity, code, offset, len, line: 0, column: 0, message: message() };
            self.found.push((diagnostic, recovery));
        }
    }

    /// Whether nothing was found.
    pub fn is_empty(&self) -> bool {
        self.found.is_empty()
    }

    /// All faults in order of their places: warnings alone, or everything if one of them is an error.
    pub fn finish(self, text: &str, mode: Mode) -> Result<Vec<Diagnostic>, Vec<Diagnostic>> {
        let mut found = self.found;
        for (code, recovery, count) in self.counts.into_iter().filter(|(_, _, count)| *count > MAX_ALIKE) {
            let last = found.iter_mut().rev().find(|(d, r)| d.code == code && *r == recovery);
            if let Some((diagnostic, _)) = last {
                diagnostic.message += &format!("; and {} more of this kind", count - MAX_ALIKE);
            }
        }
        found.sort_by_key(|(diagnostic, _)| diagnostic.offset);
        let mut lines = Lines { text, line: 1, line_start: 0, at: 0 };
        for (diagnostic, recovery) in &mut found {
            (diagnostic.line, diagnostic.column) = lines.place(diagnostic.offset);
            if mode == Mode::Lenient && *recovery == Recovery::Assumed {
                diagnostic.severity = Severity::Warning;
            }
        }
        let found: Vec<Diagnostic> = found.into_iter().map(|(diagnostic, _)| diagnostic).collect();
        if found.iter().any(|d| d.severity == Severity::Error) { Err(found) } else { Ok(found) }
    }
}
