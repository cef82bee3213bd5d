//! CIF 1.1: lexer → document → structure, and the writer.
//!
//! Syntax knows nothing of atoms. Grammar: International Tables for Crystallography G (2006), section 2.2.7.

pub mod document;
pub mod lexer;
pub mod structure;
pub mod symbols;
pub mod write;

pub use document::{Block, Document, Loop, Value};
pub use structure::{ReadStructure, read_structures};
pub use write::{Description, write};

/// A fault in a CIF, with its place.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("line {line}, column {column}: {message}")]
pub struct CifError {
    /// Byte offset in the file.
    pub offset: usize,
    /// From 1.
    pub line: usize,
    /// In characters, from 1.
    pub column: usize,
    /// What was found and what would be right, or what was assumed.
    pub message: String,
}

impl CifError {
    /// At a byte offset of a source.
    pub fn at(source: &str, offset: usize, message: impl Into<String>) -> Self {
        let offset = offset.min(source.len());
        let head = source.get(..offset).unwrap_or_default();
        let line_start = head.rfind('\n').map_or(0, |i| i + 1);
        Self {
            offset,
            line: head.bytes().filter(|b| *b == b'\n').count() + 1,
            column: head[line_start..].chars().count() + 1,
            message: message.into(),
        }
    }
}
