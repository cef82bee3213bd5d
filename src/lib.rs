//! From an ionic composition and an anion packing to starting cells for first-principles work.

pub mod crystal;
pub mod energy;
pub mod format;
pub mod ion;
pub mod metric;
pub mod ordering;
pub mod packing;
pub mod report;
pub mod rules;
pub mod seating;
