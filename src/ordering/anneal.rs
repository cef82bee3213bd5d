//! The orderings of lowest electrostatic energy.
//!
//! While the arrangements are few, all are gone through. Otherwise pairs of unlike occupants of one class are exchanged
//! under a falling temperature, from several independent starts; potentials are kept, so that an attempt costs O(1) and
//! an accepted exchange O(sites). S. Kirkpatrick, C. D. Gelatt & M. P. Vecchi, Science 220, 671 (1983).

use super::arrangement::count;
use super::every::{every, sort};
use super::random::{Draw, shuffled};
use super::{Ordering, OrderingError, Problem, Progress};
use crate::energy::COULOMB;
use rayon::prelude::*;
use serde::Serialize;

/// Arrangements up to which all are gone through.
pub const EXHAUSTIVE: u128 = 3_000_000;

/// Independent starts.
pub const STARTS: usize = 8;

/// Attempts per site and start.
const SWEEPS: usize = 1200;

/// Temperature falls from the first to the last of these shares of the mean energy change of a random exchange.
const TEMPERATURES: (f64, f64) = (1.0, 1e-4);

/// Energies that differ by less are the same, eV.
const SAME_ENERGY: f64 = 1e-6;

/// How the lowest orderings were found.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum Search {
    /// All arrangements were gone through: it is the lowest.
    Exhaustive,
    /// The lowest found by annealing.
    Annealed {
        /// Independent starts.
        starts: usize,
        /// How many of them ended at the lowest energy found.
        agreed: usize,
    },
}

/// The lowest orderings and how sure they are.
#[derive(Clone, Debug)]
pub struct Lowest {
    /// Symmetry-distinct orderings, lowest first.
    pub orderings: Vec<Ordering>,
    /// How they were found.
    pub search: Search,
}

/// The `keep` lowest symmetry-distinct orderings.
///
/// # Errors
/// [`OrderingError::Energy`] for a charged cell.
pub fn lowest(problem: &Problem, keep: usize, seed: u64, progress: &Progress) -> Result<Lowest, OrderingError> {
    if count(problem).is_some_and(|n| n <= EXHAUSTIVE) {
        let mut orderings = every(problem, progress)?;
        orderings.truncate(keep);
        return Ok(Lowest { orderings, search: Search::Exhaustive });
    }
    // Refuses a charged cell before any work.
    problem.energy(&problem.first())?;
    progress.begin(STARTS as u64);
    let ends: Vec<Vec<Vec<u8>>> = (0..STARTS)
        .into_par_iter()
        .map(|start| {
            let ends = annealed(problem, &mut Draw::new(seed, start as u64), keep);
            progress.advance(1);
            ends
        })
        .collect();
    let mut orderings: Vec<Ordering> = Vec::new();
    let mut best_of_start = Vec::new();
    for kept in ends {
        let mut best = f64::INFINITY;
        for kinds in kept {
            let (kinds, degeneracy) = problem.canonical(&kinds);
            let energy = problem.energy(&kinds)?;
            best = best.min(energy);
            if orderings.iter().all(|o| o.kinds != kinds) {
                orderings.push(Ordering { kinds, degeneracy, energy });
            }
        }
        best_of_start.push(best);
    }
    sort(&mut orderings);
    orderings.truncate(keep);
    let lowest = orderings.first().map_or(f64::INFINITY, |o| o.energy);
    let agreed = best_of_start.iter().filter(|e| **e < lowest + SAME_ENERGY).count();
    Ok(Lowest { orderings, search: Search::Annealed { starts: STARTS, agreed } })
}

/// One start: the lowest arrangements of different energy that it came by.
fn annealed(problem: &Problem, draw: &mut Draw, keep: usize) -> Vec<Vec<u8>> {
    let mut kinds = shuffled(problem, draw);
    let charges = problem.site_charges(&kinds);
    let mut potentials = problem.table.potentials(&charges);
    let mut energy = charges.iter().zip(&potentials).map(|(q, v)| q * v).sum::<f64>() / 2.0;
    let movable: Vec<&Vec<usize>> = problem
        .sites_of
        .iter()
        .zip(&problem.contents)
        .filter(|(_, c)| c.counts.iter().filter(|(_, n)| *n > 0).count() > 1)
        .map(|(sites, _)| sites)
        .collect();
    let sites: usize = movable.iter().map(|s| s.len()).sum();
    if sites == 0 {
        return vec![kinds];
    }
    let change = |kinds: &[u8], potentials: &[f64], i: usize, j: usize| {
        let dq = problem.charges[usize::from(kinds[j])] - problem.charges[usize::from(kinds[i])];
        let t = &problem.table;
        (dq, dq * (potentials[i] - potentials[j]) + dq * dq / 2.0 * (t.pair(i, i) + t.pair(j, j) - 2.0 * t.pair(i, j)))
    };
    let pick = |draw: &mut Draw| {
        let mut at = draw.below(sites);
        let class = movable.iter().find(|s| {
            if at < s.len() {
                true
            } else {
                at -= s.len();
                false
            }
        });
        class.map(|class| (class[at], class[draw.below(class.len())]))
    };
    // The scale of temperature: mean size of the change over random exchanges.
    let sampled: Vec<f64> = (0..200)
        .filter_map(|_| pick(draw))
        .map(|(i, j)| change(&kinds, &potentials, i, j).1.abs())
        .filter(|d| *d > 0.0)
        .collect();
    let scale = sampled.iter().sum::<f64>() / sampled.len().max(1) as f64;
    let attempts = SWEEPS * sites;
    let cooling = (TEMPERATURES.1 / TEMPERATURES.0).powf(1.0 / attempts as f64);
    let mut temperature = scale * TEMPERATURES.0;
    let mut kept: Vec<(f64, Vec<u8>)> = vec![(energy, kinds.clone())];
    for _ in 0..attempts {
        temperature *= cooling;
        let Some((i, j)) = pick(draw) else { break };
        if kinds[i] == kinds[j] {
            continue;
        }
        let (dq, delta) = change(&kinds, &potentials, i, j);
        if delta > 0.0 && draw.unit() >= (-delta / temperature).exp() {
            continue;
        }
        kinds.swap(i, j);
        energy += delta;
        for (s, v) in potentials.iter_mut().enumerate() {
            *v += dq * (problem.table.pair(s, i) - problem.table.pair(s, j));
        }
        // Arrangements of one energy are taken as one here; the canonical form decides later.
        let worst = kept.last().map_or(f64::INFINITY, |k| k.0);
        if (kept.len() < keep || energy < worst) && kept.iter().all(|k| (k.0 - energy).abs() * COULOMB > SAME_ENERGY) {
            kept.push((energy, kinds.clone()));
            kept.sort_by(|a, b| a.0.total_cmp(&b.0));
            kept.truncate(keep.max(1));
        }
    }
    kept.into_iter().map(|k| k.1).collect()
}
