//! Electrostatic energies of point charges in periodic cells.

pub mod ewald;

pub use ewald::{COULOMB, EwaldError, PairTable};
