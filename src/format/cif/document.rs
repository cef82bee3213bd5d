//! A CIF as data blocks of names and values; knows nothing of atoms.
//!
//! Nothing is lost: every name and value keeps its place, its delimiters and its spelling.

use super::diagnostic::{Diagnostic, Severity, place};
use super::names::is_same_item;
use super::source::Version;
use super::value::{Ground, Span, Value};
use std::ops::Range;

/// A whole file.
#[derive(Clone, Debug)]
pub struct Document<'s> {
    /// The text that all places refer to.
    pub source: &'s str,
    /// Version that it was read by.
    pub version: Version,
    /// Data blocks in order.
    pub blocks: Vec<Block<'s>>,
    /// What was taken otherwise than written, in order of place.
    pub warnings: Vec<Diagnostic>,
}

impl Document<'_> {
    /// A fault of the whole at an offset.
    pub fn fault(&self, offset: usize, message: impl Into<String>) -> Diagnostic {
        let (line, column) = self.place(offset);
        let severity = Severity::Error;
        Diagnostic { severity, code: "cif::content", offset, len: 1, line, column, message: message.into() }
    }

    /// Line and column (in characters) of a byte offset, both from 1.
    pub fn place(&self, offset: usize) -> (usize, usize) {
        place(self.source, offset)
    }

    /// Warnings that concern a block: those inside it, for the first block what stands before it, for the last what
    /// stands behind it.
    pub fn warnings_of(&self, block: &Block<'_>) -> &[Diagnostic] {
        let is = |other: Option<&Block<'_>>| other.is_some_and(|other| other.extent == block.extent);
        let start = if is(self.blocks.first()) { 0 } else { block.extent.start };
        let end = if is(self.blocks.last()) { usize::MAX } else { block.extent.end };
        let at = |offset| self.warnings.partition_point(|w| w.offset < offset);
        &self.warnings[at(start)..at(end)]
    }
}

/// A data block, or a save frame inside one.
#[derive(Clone, Debug)]
pub struct Block<'s> {
    code: String,
    extent: Range<usize>,
    /// Items outside loops, as one row.
    pub pairs: Loop<'s>,
    /// Loops in order.
    pub loops: Vec<Loop<'s>>,
    /// Save frames in order; a frame holds none.
    pub frames: Vec<Block<'s>>,
}

impl<'s> Block<'s> {
    pub(super) fn new(code: String, start: usize, ground: Ground<'s>) -> Self {
        let pairs = Loop::new(ground, start);
        Self { code, extent: start..start, pairs, loops: Vec::new(), frames: Vec::new() }
    }

    pub(super) fn close(&mut self, end: usize) {
        self.extent.end = end;
    }

    /// Its code.
    pub fn code(&self) -> &str {
        &self.code
    }

    /// Offset of its heading.
    pub fn place(&self) -> usize {
        self.extent.start
    }

    /// The value of the first of these names that the block has, alone or in a loop of one row. Names compare without
    /// case, dotted and underscored spelling alike.
    pub fn value(&self, names: &[&str]) -> Option<Value<'s>> {
        names.iter().find_map(|name| {
            let table = self.table(&[name]).filter(|table| table.n_rows() == 1)?;
            Some(table.value(0, table.column(&[name])?))
        })
    }

    /// The loop that has the first of these names that the block has; items outside loops together are one of one row.
    pub fn table(&self, names: &[&str]) -> Option<&Loop<'s>> {
        let tables = || std::iter::once(&self.pairs).chain(&self.loops);
        names.iter().find_map(|name| tables().find(|table| table.column(&[name]).is_some()))
    }

    /// Number of data names in the block and its frames.
    pub fn n_names(&self) -> usize {
        let own = self.pairs.names.len() + self.loops.iter().map(|l| l.names.len()).sum::<usize>();
        own + self.frames.iter().map(Block::n_names).sum::<usize>()
    }
}

/// A data name where it stands.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Name<'s> {
    /// As written.
    pub text: &'s str,
    /// Byte offset.
    pub place: usize,
}

/// A loop: names and rows of values.
#[derive(Clone, Debug)]
pub struct Loop<'s> {
    ground: Ground<'s>,
    place: usize,
    /// Names in order.
    pub names: Vec<Name<'s>>,
    /// Row by row; a multiple of the names in number.
    pub(super) values: Vec<Span>,
}

impl<'s> Loop<'s> {
    pub(super) fn new(ground: Ground<'s>, place: usize) -> Self {
        Self { ground, place, names: Vec::new(), values: Vec::new() }
    }

    /// Offset of `loop_`; for items outside loops, of their block.
    pub fn place(&self) -> usize {
        self.place
    }

    /// The column of the first of these names that the loop has; see [`Block::value`].
    pub fn column(&self, names: &[&str]) -> Option<usize> {
        names.iter().find_map(|name| self.names.iter().position(|n| is_same_item(n.text, name)))
    }

    /// Number of rows.
    pub fn n_rows(&self) -> usize {
        self.values.len() / self.names.len().max(1)
    }

    /// The value in a row and column, both from 0 and in range.
    pub fn value(&self, row: usize, column: usize) -> Value<'s> {
        Value::new(self.ground, self.values[row * self.names.len() + column])
    }

    /// Values of a row in order.
    pub fn row(&self, row: usize) -> impl ExactSizeIterator<Item = Value<'s>> {
        (0..self.names.len()).map(move |column| self.value(row, column))
    }
}
