//! Crystals: lattice, sites with occupants, changes of cell, neighbours, symmetry.
//!
//! Does no input or output and knows no file format.

pub mod lattice;
pub mod neighbours;
mod setting;
pub mod structure;
pub mod supercell;
pub mod symmetry;
pub mod transformation;

pub use lattice::{Cartesian, Fractional, Lattice, Parameters};
pub use structure::{Occupant, Site, Structure};
pub use transformation::Transformation;
