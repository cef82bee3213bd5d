//! Warnings and errors of one data block, with their places.

use crate::format::cif::{Diagnostic, Document, Severity};
use std::collections::BTreeMap;

/// Warnings of one kind that are shown in full; the rest is counted.
const MAX_ALIKE: usize = 20;

/// Collects what is to be said about a block.
pub(super) struct Report<'d, 's> {
    document: &'d Document<'s>,
    block_place: usize,
    warnings: Vec<Diagnostic>,
    counts: BTreeMap<&'static str, usize>,
}

impl<'d, 's> Report<'d, 's> {
    /// For the block that begins at `block_place`.
    pub fn new(document: &'d Document<'s>, block_place: usize) -> Self {
        Self { document, block_place, warnings: Vec::new(), counts: BTreeMap::new() }
    }

    /// Where the block begins: the place of what is missing.
    pub fn block_place(&self) -> usize {
        self.block_place
    }

    /// Something that was taken otherwise than written.
    pub fn warn(&mut self, code: &'static str, place: usize, message: String) {
        let count = self.counts.entry(code).or_insert(0);
        *count += 1;
        if *count <= MAX_ALIKE {
            let warning = self.diagnostic(Severity::Warning, code, place, message);
            self.warnings.push(warning);
        }
    }

    /// What makes the block unusable.
    pub fn error(&self, code: &'static str, place: usize, message: String) -> Diagnostic {
        self.diagnostic(Severity::Error, code, place, message)
    }

    /// All warnings in order of their places.
    pub fn finish(mut self) -> Vec<Diagnostic> {
        for (code, count) in std::mem::take(&mut self.counts) {
            if count > MAX_ALIKE {
                let text = format!("{} more warnings like `{code}`", count - MAX_ALIKE);
                let warning = self.diagnostic(Severity::Warning, code, self.block_place, text);
                self.warnings.push(warning);
            }
        }
        self.warnings.sort_by_key(|w| w.offset);
        self.warnings
    }

    fn diagnostic(&self, severity: Severity, code: &'static str, place: usize, message: String) -> Diagnostic {
        let (line, column) = self.document.place(place);
        Diagnostic { severity, code, offset: place, len: 1, line, column, message }
    }
}
