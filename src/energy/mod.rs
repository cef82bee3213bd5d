//! Electrostatic energies of point charges in periodic cells.

mod ewald;

pub use ewald::{COULOMB, EwaldError, PairTable};
