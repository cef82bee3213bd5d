//! CIF: read by the letter of 1.1 and 2.0 or leniently, and written as 1.1.
//!
//! Source (bytes → text) → lexer → grammar → document → structure, and the writer. Syntax knows nothing of atoms.
//! Standards: International Tables for Crystallography G (2006), section 2.2.7 (CIF 1.1); Bernstein et al., J. Appl.
//! Cryst. 49, 277 (2016), doi:10.1107/S1600576715021871 (CIF 2.0).

mod characters;
pub mod citation;
pub mod diagnostic;
pub mod document;
pub mod emit;
mod grammar;
mod lexer;
mod names;
pub mod nested;
pub mod number;
mod protocol;
pub mod source;
pub mod structure;
pub mod symbols;
pub mod value;
pub mod write;

pub use diagnostic::{Diagnostic, Mode, Severity};
pub use document::{Block, Document, Loop, Name};
pub use emit::{EmitError, Emitter};
pub use grammar::{MAX_CODE, MAX_NAME, parse};
pub use number::Number;
pub use source::{Source, Version};
pub use structure::{ReadStructure, read_structures};
pub use value::{Datum, Kind, Value};
pub use write::{Description, write};

/// What the standard says about the syntax of the file `name`, fault by fault; nothing for a valid file.
pub fn check_syntax(name: &str, bytes: &[u8]) -> Vec<Diagnostic> {
    match Source::decode(name, bytes) {
        Ok(source) => parse(&source, Mode::Strict).err().unwrap_or_default(),
        Err(refusal) => vec![refusal],
    }
}
