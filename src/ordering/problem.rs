//! The sites of a supercell, what they must hold, and their symmetry.

use super::OrderingError;
use super::symmetry::SiteSymmetry;
use crate::crystal::supercell::{Cosets, lattice_of};
use crate::crystal::symmetry as crystal_symmetry;
use crate::crystal::{Fractional, Lattice, Transformation};
use crate::energy::PairTable;

/// The cell that a supercell repeats: sites that may be filled, gathered into classes.
#[derive(Clone, Debug)]
pub struct Parent {
    /// Lattice, Å.
    pub lattice: Lattice,
    /// Sites.
    pub positions: Vec<Fractional>,
    /// Class of each site; sites of one class share their contents, and symmetry never mixes classes.
    pub class: Vec<usize>,
}

/// What the sites of one class hold in the whole supercell.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Contents {
    /// Kind and number of sites; the numbers add up to the class's number of sites.
    pub counts: Vec<(u8, usize)>,
}

/// Most sites in a supercell.
pub const MAX_SITES: usize = 200_000;

/// Relative error asked of the Ewald sums.
const ENERGY_ERROR: f64 = 1e-10;

/// Tolerance for the parent's symmetry, Å.
const TOLERANCE: f64 = 1e-3;

/// A supercell to be filled.
#[derive(Clone, Debug)]
pub struct Problem {
    /// Lattice of the supercell, Å.
    pub lattice: Lattice,
    /// Sites of the supercell: basis site `b` of the parent at translation `t` is number `b * translations + t`.
    pub positions: Vec<Fractional>,
    /// Class of each site.
    pub class: Vec<usize>,
    /// Translations of the parent that the supercell holds.
    pub translations: usize,
    /// Contents of each class.
    pub contents: Vec<Contents>,
    /// Charge of each kind, e.
    pub charges: Vec<f64>,
    /// Pair interactions of the sites.
    pub table: PairTable,
    pub(super) symmetry: SiteSymmetry,
    /// Sites of each class, in order.
    pub(super) sites_of: Vec<Vec<usize>>,
}

impl Problem {
    /// Sets up a supercell of `parent`; `contents` by class, `charges` (e) by kind.
    ///
    /// # Errors
    /// [`OrderingError`] for too many sites, coinciding sites, or symmetry that cannot be found.
    pub fn new(
        parent: &Parent,
        cell: &Transformation,
        contents: Vec<Contents>,
        charges: Vec<f64>,
    ) -> Result<Self, OrderingError> {
        let n = cell.index();
        let sites = parent.positions.len() * n;
        if sites > MAX_SITES {
            return Err(OrderingError::TooLarge { sites, limit: MAX_SITES });
        }
        let kinds: Vec<i32> = parent.class.iter().map(|c| *c as i32).collect();
        let (operations, _) = crystal_symmetry::operations(&parent.lattice, &parent.positions, &kinds, TOLERANCE)?;
        let lattice = lattice_of(&parent.lattice, cell)?;
        let cosets = Cosets::new(cell);
        let inverse = cell.matrix().map(f64::from).try_inverse().unwrap_or_default();
        let positions = (0..sites)
            .map(|i| {
                let in_parent = parent.positions[i / n].0 + cosets.translation(i % n).map(f64::from);
                Fractional(inverse * in_parent).reduced()
            })
            .map(|p| Fractional(p.0.map(|x| if x > 1.0 - 1e-12 { 0.0 } else { x })))
            .collect();
        let class: Vec<usize> = (0..sites).map(|i| parent.class[i / n]).collect();
        let sites_of = (0..contents.len()).map(|c| (0..sites).filter(|i| class[*i] == c).collect()).collect();
        Ok(Self {
            lattice,
            positions,
            class,
            translations: n,
            contents,
            charges,
            table: PairTable::new(&parent.lattice, &parent.positions, cell, ENERGY_ERROR)?,
            symmetry: SiteSymmetry::new(parent, cell, &cosets, &operations),
            sites_of,
        })
    }

    /// Charges by site of an ordering, e.
    pub fn site_charges(&self, kinds: &[u8]) -> Vec<f64> {
        kinds.iter().map(|k| self.charges[usize::from(*k)]).collect()
    }

    /// Energy of an ordering, eV.
    ///
    /// # Errors
    /// [`OrderingError::Energy`] when the cell is charged.
    pub fn energy(&self, kinds: &[u8]) -> Result<f64, OrderingError> {
        Ok(self.table.energy(&self.site_charges(kinds))?)
    }

    /// Whether some translation of the parent carries the ordering onto itself, so that a smaller cell holds it.
    pub fn is_superperiodic(&self, kinds: &[u8]) -> bool {
        (1..self.translations).any(|t| (0..kinds.len()).all(|i| kinds[self.symmetry.translated(i, t)] == kinds[i]))
    }

    /// The least of the ordering's symmetric images, which names its orbit, and the size of the orbit.
    pub fn canonical(&self, kinds: &[u8]) -> (Vec<u8>, u128) {
        self.symmetry.canonical(kinds)
    }

    /// The ordering with all sites of each class filled in order of the contents.
    pub(super) fn first(&self) -> Vec<u8> {
        let mut kinds = vec![0; self.class.len()];
        for (sites, contents) in self.sites_of.iter().zip(&self.contents) {
            let fill = contents.counts.iter().flat_map(|(kind, n)| std::iter::repeat_n(*kind, *n));
            for (site, kind) in sites.iter().zip(fill) {
                kinds[*site] = kind;
            }
        }
        kinds
    }
}
