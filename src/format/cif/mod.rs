//! CIF 1.1: lexer → document → structure, and the writer.
//!
//! Syntax knows nothing of atoms. Grammar: International Tables for Crystallography G (2006), section 2.2.7.

pub mod citation;
pub mod document;
pub mod lexer;
pub mod structure;
pub mod symbols;
pub mod write;

pub use document::{Block, Diagnostic, Document, Loop, Severity, Value};
pub use structure::{ReadStructure, read_structures};
pub use write::{Description, write};
