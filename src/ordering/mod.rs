//! Which of the equal sites is taken by whom: orderings of a supercell with fixed amounts.
//!
//! A [`Problem`] holds the sites of a supercell, the amounts that each class of sites must hold, and the supercell's
//! symmetry as permutations of sites. [`every()`] lists all symmetry-distinct orderings, [`lowest()`] seeks those of lowest
//! electrostatic energy, [`random()`] draws at random under constraints. Vacancies are a kind like any other.

pub mod anneal;
mod arrangement;
mod burnside;
pub mod every;
pub mod problem;
pub mod random;
mod symmetry;

pub use anneal::{Lowest, Search, lowest};
pub use burnside::burnside;
pub use every::every;
pub use problem::{Contents, Parent, Problem};
pub use random::{Apart, random};

use std::sync::atomic::{AtomicU64, Ordering as Atomic};

/// One way to fill the sites.
#[derive(Clone, Debug, PartialEq)]
pub struct Ordering {
    /// Kind on each site, in the problem's order of sites.
    pub kinds: Vec<u8>,
    /// How many orderings of the cell are equivalent to this one, itself included; 0
    /// where that was not counted.
    pub degeneracy: u128,
    /// Electrostatic energy of the cell, eV.
    pub energy: f64,
}

/// Why there is no ordering.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum OrderingError {
    /// More arrangements than can be gone through.
    #[error(
        "{arrangements} arrangements are too many to go through (at most {limit}); take a smaller cell, or `--order lowest` or `random`"
    )]
    TooMany {
        /// How many, or `more than` some number.
        arrangements: String,
        /// Named limit.
        limit: u128,
    },
    /// A constraint that could not be met.
    #[error(
        "no arrangement found with all {pair} at least {distance} Å apart: {asked} {kind} are asked for, {reached} is the most that was placed (not proved to be the most possible); ask for less distance, a lower amount or a larger cell"
    )]
    Apart {
        /// The pair, `Gd-Gd`.
        pair: String,
        /// Å.
        distance: f64,
        /// The kind that was counted.
        kind: String,
        /// How many were asked for.
        asked: usize,
        /// The most that was reached.
        reached: usize,
    },
    /// More sites than are taken.
    #[error("the cell has {sites} sites to fill; at most {limit} are taken")]
    TooLarge {
        /// How many.
        sites: usize,
        /// Named limit.
        limit: usize,
    },
    /// The sums fail.
    #[error(transparent)]
    Energy(#[from] crate::energy::EwaldError),
    /// The supercell's lattice does not exist.
    #[error(transparent)]
    Lattice(#[from] crate::crystal::lattice::LatticeError),
    /// The parent's symmetry could not be found.
    #[error(transparent)]
    Symmetry(#[from] crate::crystal::symmetry::SymmetryError),
}

/// How far long work is; read by whoever shows it.
#[derive(Debug, Default)]
pub struct Progress {
    /// Steps done.
    pub done: AtomicU64,
    /// Steps in all, 0 while unknown.
    pub total: AtomicU64,
}

impl Progress {
    fn begin(&self, total: u64) {
        self.done.store(0, Atomic::Relaxed);
        self.total.store(total, Atomic::Relaxed);
    }

    fn advance(&self, steps: u64) {
        self.done.fetch_add(steps, Atomic::Relaxed);
    }
}
