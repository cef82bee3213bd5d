//! The number of symmetry-distinct orderings, by counting what each permutation leaves unchanged.
//!
//! W. Burnside, Theory of Groups of Finite Order (Cambridge, 1897), §118: the mean over the group of the number of fixed
//! orderings. An ordering is fixed when every cycle of the permutation is of one kind; how many there are with the given
//! amounts is counted cycle by cycle.

use super::Problem;
use std::collections::BTreeMap;

/// Exact number of symmetry-distinct orderings; `None` when a count exceeds 128 bits.
pub fn burnside(problem: &Problem) -> Option<u128> {
    let permutations = problem.symmetry.permutations();
    let mut total = 0_u128;
    for map in &permutations {
        let mut fixed = 1_u128;
        for (sites, contents) in problem.sites_of.iter().zip(&problem.contents) {
            let counts: Vec<usize> = contents.counts.iter().map(|c| c.1).collect();
            fixed = fixed.checked_mul(fixed_fillings(&cycles(sites, map), &counts)?)?;
            if fixed == 0 {
                break;
            }
        }
        total = total.checked_add(fixed)?;
    }
    Some(total / permutations.len() as u128)
}

fn cycles(sites: &[usize], map: &[u32]) -> Vec<usize> {
    let mut seen = vec![false; map.len()];
    let mut lengths = Vec::new();
    for &start in sites {
        let (mut at, mut length) = (start, 0);
        while !seen[at] {
            seen[at] = true;
            at = map[at] as usize;
            length += 1;
        }
        if length > 0 {
            lengths.push(length);
        }
    }
    lengths
}

/// Ways to give each cycle one kind so that the kinds fill their counts.
fn fixed_fillings(cycles: &[usize], counts: &[usize]) -> Option<u128> {
    let mut states: BTreeMap<Vec<usize>, u128> = BTreeMap::from([(counts.to_vec(), 1)]);
    for &length in cycles {
        let mut next: BTreeMap<Vec<usize>, u128> = BTreeMap::new();
        for (left, ways) in &states {
            for kind in (0..left.len()).filter(|k| left[*k] >= length) {
                let mut rest = left.clone();
                rest[kind] -= length;
                let sum = next.entry(rest).or_insert(0);
                *sum = sum.checked_add(*ways)?;
            }
        }
        states = next;
    }
    Some(states.values().sum())
}
