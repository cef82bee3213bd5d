//! From an ionic composition and an anion packing to starting cells for first-principles work.
//!
//! The modules are the pipeline: [`ion`] reads the composition and knows charges and radii; [`packing`] builds the host
//! and finds its interstices; [`seating`] decides which of them each cation takes, with the evidence; [`metric`] how
//! large the cell is; [`ordering`] which of the equal sites is taken by whom, by [`energy`] or at random; [`rules`] judge
//! the result; [`mod@format`] reads and writes files; [`report`] what people see. [`mod@build`] runs them all for a [`recipe`].
//!
//! ```
//! use interstice::{build::build, ordering::Progress, recipe::Recipe};
//!
//! let built = build(&Recipe::new("MgO"), &Progress::default())?;
//! assert_eq!(built.cells[0].structure.sites.len(), 2);
//! assert!(built.cells[0].findings.is_empty());
//! # Ok::<(), interstice::error::Error>(())
//! ```
//!
//! A generated cell is a hypothesis, not proof that a phase exists or is safe to make.

pub mod build;
pub mod crystal;
pub mod energy;
pub mod error;
pub mod filling;
pub mod format;
pub mod ion;
pub mod metric;
pub mod ordering;
pub mod packing;
pub mod recipe;
pub mod report;
pub mod rules;
pub mod seating;
