//! Ewald sums, kept as a table of pair interactions.
//!
//! φ_ij = Σ_n erfc(α|r_ij + n|)/|r_ij + n| + (4π/V) Σ_{k≠0} exp(−k²/4α²)/k² cos(k·r_ij) − π/(α²V),
//! without n = 0 and less 2α/√π for i = j; E = ½ Σ_ij q_i q_j φ_ij e²/(4πε₀).
//! P. P. Ewald, Ann. Phys. 369, 253 (1921), doi:10.1002/andp.19213690304.
//!
//! Sites of a supercell repeat the parent's basis at every translation it holds, so φ depends only on the two basis
//! sites and the difference of their translations: the table has basis² × translations entries, not sites².

use crate::crystal::supercell::{Cosets, lattice_of};
use crate::crystal::{Fractional, Lattice, Transformation};
use nalgebra::Vector3;
use rayon::prelude::*;
use std::f64::consts::PI;

/// e²/(4πε₀), eV Å (CODATA 2018).
pub const COULOMB: f64 = 14.399_645_478;

/// Smallest and largest relative error that can be asked for.
pub const ERROR_RANGE: (f64, f64) = (1e-13, 1e-3);

/// Largest number of entries in a table; 8 bytes each.
pub const MAX_ENTRIES: usize = 100_000_000;

/// Net charge below which a cell counts as neutral, e; rounding of average charges alone.
const NEUTRAL: f64 = 1e-9;

/// Why there is no energy.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum EwaldError {
    /// A charged cell has no finite energy.
    #[error(
        "the cell carries a net charge of {charge:+.6} e; the electrostatic energy of a charged crystal is infinite"
    )]
    Charged {
        /// e.
        charge: f64,
    },
    /// Two sites coincide.
    #[error("two sites are {distance:.2e} Å apart; the electrostatic energy is infinite")]
    Coincide {
        /// Å.
        distance: f64,
    },
    /// Error out of range.
    #[error("a relative error of {asked:e} cannot be had; ask for {least:e} to {most:e}")]
    Accuracy {
        /// As asked.
        asked: f64,
        /// Least.
        least: f64,
        /// Most.
        most: f64,
    },
    /// Too many sites.
    #[error("{entries} pair energies are needed, more than the {MAX_ENTRIES} that are kept; take a smaller cell")]
    TooLarge {
        /// Entries.
        entries: usize,
    },
    /// The supercell's lattice does not exist.
    #[error(transparent)]
    Lattice(#[from] crate::crystal::lattice::LatticeError),
}

/// Interactions of unit charges on all sites of a supercell, 1/Å.
///
/// Site `b * translations + t` is basis site `b` of the parent at coset `t` (see [`Cosets`]).
#[derive(Clone, Debug)]
pub struct PairTable {
    cosets: Cosets,
    basis: usize,
    /// By basis site, basis site, coset of the second's translation less the first's.
    entries: Vec<f64>,
    /// By coset, coset: the coset of the difference; empty for one translation.
    translations: Vec<Vector3<i32>>,
}

impl PairTable {
    /// Sums over a supercell of `parent` with sites `basis`; `relative_error` bounds the terms left out.
    ///
    /// # Errors
    /// [`EwaldError`] for coinciding sites, an error out of [`ERROR_RANGE`], or more than [`MAX_ENTRIES`] entries.
    pub fn new(
        parent: &Lattice,
        basis: &[Fractional],
        cell: &Transformation,
        relative_error: f64,
    ) -> Result<Self, EwaldError> {
        Self::with_splitting(parent, basis, cell, relative_error, 1.0)
    }

    /// As [`Self::new`], with the splitting parameter α times `splitting`: the result must not depend on it.
    fn with_splitting(
        parent: &Lattice,
        basis: &[Fractional],
        cell: &Transformation,
        relative_error: f64,
        splitting: f64,
    ) -> Result<Self, EwaldError> {
        let (least, most) = ERROR_RANGE;
        if !(least..=most).contains(&relative_error) {
            return Err(EwaldError::Accuracy { asked: relative_error, least, most });
        }
        let cosets = Cosets::new(cell);
        let n = cosets.len();
        let entries = basis.len().checked_mul(basis.len()).and_then(|b| b.checked_mul(n)).unwrap_or(usize::MAX);
        if entries > MAX_ENTRIES {
            return Err(EwaldError::TooLarge { entries });
        }
        let sum = Sum::new(&lattice_of(parent, cell)?, relative_error, splitting);
        let translations: Vec<_> = (0..n).map(|t| cosets.translation(t)).collect();
        let entry = |index: usize| {
            let (b, c, t) = (index / n / basis.len(), index / n % basis.len(), index % n);
            let r = parent.basis() * (basis[c].0 - basis[b].0 + translations[t].map(f64::from));
            if b == c && t == 0 { Ok(sum.same()) } else { sum.at(&r) }
        };
        let entries = (0..entries).into_par_iter().map(entry).collect::<Result<Vec<f64>, _>>()?;
        Ok(Self { cosets, basis: basis.len(), entries, translations })
    }

    /// Number of sites.
    pub fn n_sites(&self) -> usize {
        self.basis * self.translations.len()
    }

    /// φ between two sites, 1/Å; with itself, the interaction with its own periodic images.
    pub fn pair(&self, i: usize, j: usize) -> f64 {
        let n = self.translations.len();
        let t = if n == 1 { 0 } else { self.cosets.number(&(self.translations[j % n] - self.translations[i % n])) };
        self.entries[(i / n * self.basis + j / n) * n + t]
    }

    /// Potential of the charges (e) at every site, 1/Å: V_i = Σ_j φ_ij q_j.
    pub fn potentials(&self, charges: &[f64]) -> Vec<f64> {
        let site = |i: usize| charges.iter().enumerate().map(|(j, q)| q * self.pair(i, j)).sum();
        (0..charges.len()).map(site).collect()
    }

    /// Energy of the cell, eV.
    ///
    /// # Errors
    /// [`EwaldError::Charged`] unless the charges add up to zero.
    pub fn energy(&self, charges: &[f64]) -> Result<f64, EwaldError> {
        let charge: f64 = charges.iter().sum();
        if charge.abs() > NEUTRAL * (1.0 + charges.len() as f64) {
            return Err(EwaldError::Charged { charge });
        }
        let potentials = self.potentials(charges);
        Ok(COULOMB / 2.0 * charges.iter().zip(&potentials).map(|(q, v)| q * v).sum::<f64>())
    }
}

/// The two halves of the sum for one lattice.
struct Sum {
    alpha: f64,
    background: f64,
    /// Real-space images, Å, of the reduced cell, and the square of the cutoff.
    images: Vec<Vector3<f64>>,
    cutoff: f64,
    reduced: Lattice,
    /// Half of the reciprocal vectors with their weights.
    waves: Vec<(Vector3<f64>, f64)>,
}

/// Sites nearer than this coincide, Å.
const COINCIDE: f64 = 1e-3;

impl Sum {
    fn new(lattice: &Lattice, relative_error: f64, splitting: f64) -> Self {
        // Any basis of the lattice gives the same sum; a reduced one needs fewest images.
        let reduced = moyo::base::Lattice { basis: *lattice.basis() }
            .minkowski_reduce()
            .ok()
            .and_then(|(l, _)| Lattice::from_basis(l.basis).or_else(|_| Lattice::from_basis(-l.basis)).ok())
            .unwrap_or_else(|| lattice.clone());
        let volume = reduced.volume();
        // With α = √π/V^(1/3) both halves have about as many terms; their largest omitted term is exp(−s²).
        let alpha = splitting * PI.sqrt() / volume.cbrt();
        let s = (-relative_error.ln()).sqrt() + 0.6;
        let (cutoff, wave_cutoff) = (s / alpha, 2.0 * alpha * s);
        // r_ij is reduced to the nearest cell, so images are needed a cell's half diagonal beyond the cutoff.
        let diagonal: f64 = reduced.basis().column_iter().map(|c| c.norm()).sum();
        let images = points(reduced.basis(), cutoff + diagonal / 2.0);
        let inverse = reduced.basis().try_inverse().unwrap_or_default();
        let waves = points(&(inverse.transpose() * (2.0 * PI)), wave_cutoff)
            .into_iter()
            .filter(|k| (k.x, k.y, k.z) > (0.0, 0.0, 0.0))
            .map(|k| {
                let square = k.norm_squared();
                // Twice: the wave and its opposite.
                (k, 8.0 * PI / volume * (-square / (4.0 * alpha * alpha)).exp() / square)
            })
            .collect();
        Self { alpha, background: PI / (alpha * alpha * volume), images, cutoff, reduced, waves }
    }

    fn waves_at(&self, r: &Vector3<f64>) -> f64 {
        self.waves.iter().map(|(k, weight)| weight * k.dot(r).cos()).sum()
    }

    fn images_at(&self, r: &Vector3<f64>) -> f64 {
        let terms = self.images.iter().map(|n| (r + n).norm()).filter(|d| *d <= self.cutoff && *d > COINCIDE);
        terms.map(|d| libm::erfc(self.alpha * d) / d).sum()
    }

    /// φ of a site with its own images.
    fn same(&self) -> f64 {
        let zero = Vector3::zeros();
        self.images_at(&zero) + self.waves_at(&zero) - self.background - 2.0 * self.alpha / PI.sqrt()
    }

    /// φ of two sites separated by r, Å.
    fn at(&self, r: &Vector3<f64>) -> Result<f64, EwaldError> {
        let mut f = self.reduced.fractional(&crate::crystal::Cartesian(*r)).0;
        f.apply(|x| *x -= x.round());
        let r = self.reduced.basis() * f;
        let nearest = self.images.iter().map(|n| (r + n).norm()).fold(f64::INFINITY, f64::min);
        if nearest <= COINCIDE {
            return Err(EwaldError::Coincide { distance: nearest });
        }
        Ok(self.images_at(&r) + self.waves_at(&r) - self.background)
    }
}

/// All points of the lattice with these basis columns within `radius` of the origin, the origin included, in a fixed
/// order.
fn points(basis: &nalgebra::Matrix3<f64>, radius: f64) -> Vec<Vector3<f64>> {
    let inverse = basis.try_inverse().unwrap_or_default();
    let reach = [0, 1, 2].map(|row| (radius * inverse.row(row).norm()).floor() as i32);
    let mut found = Vec::new();
    for i in -reach[0]..=reach[0] {
        for j in -reach[1]..=reach[1] {
            for k in -reach[2]..=reach[2] {
                let p = basis * Vector3::new(f64::from(i), f64::from(j), f64::from(k));
                if p.norm() <= radius {
                    found.push(p);
                }
            }
        }
    }
    found
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::crystal::Parameters;

    fn cubic() -> Lattice {
        Lattice::from_parameters(&Parameters { a: 1.0, b: 1.0, c: 1.0, alpha: 90.0, beta: 90.0, gamma: 90.0 }).unwrap()
    }

    const F: [[f64; 3]; 4] = [[0.0, 0.0, 0.0], [0.0, 0.5, 0.5], [0.5, 0.0, 0.5], [0.5, 0.5, 0.0]];

    fn shifted(by: [f64; 3], q: f64) -> Vec<([f64; 3], f64)> {
        F.iter().map(|p| ([p[0] + by[0], p[1] + by[1], p[2] + by[2]], q)).collect()
    }

    /// Madelung constants to the shortest distance, as printed in handbooks (CRC Handbook of Chemistry and Physics;
    /// more digits: R. E. Crandall & J. P. Buhler, J. Phys. A 20, 5497 (1987)): rock salt 1.747564594633, CsCl
    /// 1.762674773071, zinc blende 1.638055053388; fluorite 2.519392439979 (charges left out).
    #[test]
    fn madelung_constants_are_the_published_ones() {
        let rock_salt = [shifted([0.0; 3], 1.0), shifted([0.5, 0.0, 0.0], -1.0)].concat();
        let cscl = vec![([0.0; 3], 1.0), ([0.5; 3], -1.0)];
        let zinc_blende = [shifted([0.0; 3], 1.0), shifted([0.25; 3], -1.0)].concat();
        let fluorite = [shifted([0.0; 3], 2.0), shifted([0.25; 3], -1.0), shifted([0.75; 3], -1.0)].concat();
        let quarter = 3.0_f64.sqrt() / 4.0;
        for (sites, units, distance, want, printed) in [
            (&rock_salt, 4.0, 0.5, 1.747_564_594_633, 1e-12),
            (&cscl, 1.0, 2.0 * quarter, 1.762_674_773_071, 1e-12),
            (&zinc_blende, 4.0, quarter, 1.638_055_053_388, 1e-12),
            (&fluorite, 4.0, quarter, 5.038_784_880, 1e-9),
        ] {
            let positions: Vec<_> = sites.iter().map(|(p, _)| Fractional::new(p[0], p[1], p[2])).collect();
            let charges: Vec<_> = sites.iter().map(|(_, q)| *q).collect();
            for splitting in [0.7, 1.0, 1.4] {
                let table =
                    PairTable::with_splitting(&cubic(), &positions, &Transformation::identity(), 1e-12, splitting)
                        .unwrap();
                let madelung = -table.energy(&charges).unwrap() / COULOMB * distance / units;
                // The last printed digit, and the error asked of the sum.
                assert!((madelung - want).abs() < printed + 1e-11, "{madelung} {want} at {splitting}");
            }
        }
    }

    /// The same crystal as a basis of one cell, as a primitive cell with a supercell, and as a skewed supercell.
    #[test]
    fn supercells_have_the_energy_of_their_parents() {
        let primitive =
            Lattice::from_basis(nalgebra::Matrix3::new(0.0, 0.5, 0.5, 0.5, 0.0, 0.5, 0.5, 0.5, 0.0)).unwrap();
        let basis = [Fractional::new(0.0, 0.0, 0.0), Fractional::new(0.5, 0.5, 0.5)];
        let want = -1.747_564_594_633 / 0.5 * COULOMB;
        for cell in ["a,b,c", "2a,2b,2c", "-a+b+c,a-b+c,a+b-c", "a,b+3a,2c+a"] {
            let cell = Transformation::parse(cell).unwrap();
            let table = PairTable::new(&primitive, &basis, &cell, 1e-12).unwrap();
            let charges: Vec<f64> = (0..table.n_sites()).map(|i| if i < cell.index() { 1.0 } else { -1.0 }).collect();
            let energy = table.energy(&charges).unwrap() / cell.index() as f64;
            assert!((energy - want).abs() < 1e-9, "{energy} {want} {cell}");
        }
        let table = PairTable::new(&primitive, &basis, &Transformation::identity(), 1e-8).unwrap();
        assert!(matches!(table.energy(&[1.0, 1.0]), Err(EwaldError::Charged { .. })));
    }

    #[test]
    fn coinciding_sites_are_refused() {
        let basis = [Fractional::new(0.0, 0.0, 0.0), Fractional::new(1.0, 0.0, 0.0)];
        assert!(matches!(
            PairTable::new(&cubic(), &basis, &Transformation::identity(), 1e-8),
            Err(EwaldError::Coincide { .. })
        ));
    }
}
