//! Every symmetry-distinct ordering of a cell.
//!
//! Arrangements are gone through by number; one is kept when it is the least of its orbit. No arrangement needs to know
//! of another, so ranges of numbers are worked on side by side and joined in order.

use super::arrangement::{advance, count, unrank};
use super::symmetry::compare_image;
use super::{Ordering, OrderingError, Problem, Progress, burnside};
use rayon::prelude::*;
use std::cmp::Ordering as Compared;

/// Most arrangements gone through.
pub const MAX_ARRANGEMENTS: u128 = 500_000_000;

/// Most orderings kept in memory.
pub const MAX_KEPT: u128 = 2_000_000;

/// Arrangements in one piece of work.
const CHUNK: u128 = 50_000;

/// All symmetry-distinct orderings, by increasing energy, then by kinds.
///
/// Work: arrangements × permutations, with most comparisons ending after a few sites.
///
/// # Errors
/// [`OrderingError::TooMany`] above [`MAX_ARRANGEMENTS`] or [`MAX_KEPT`]; [`OrderingError::Energy`] for a charged cell.
pub fn every(problem: &Problem, progress: &Progress) -> Result<Vec<Ordering>, OrderingError> {
    let total = count(problem).filter(|n| *n <= MAX_ARRANGEMENTS);
    let Some(total) = total else {
        let arrangements = count(problem).map_or_else(|| "more than 10^38".to_string(), |n| n.to_string());
        return Err(OrderingError::TooMany { arrangements, limit: MAX_ARRANGEMENTS });
    };
    let permutations = problem.symmetry.permutations();
    if total / permutations.len() as u128 > MAX_KEPT {
        return Err(OrderingError::TooMany { arrangements: format!("more than {MAX_KEPT} distinct"), limit: MAX_KEPT });
    }
    progress.begin(total as u64);
    let chunks: Vec<u128> = (0..total.div_ceil(CHUNK)).collect();
    let found: Vec<Vec<Ordering>> = chunks
        .into_par_iter()
        .map(|chunk| {
            let range = chunk * CHUNK..((chunk + 1) * CHUNK).min(total);
            let steps = (range.end - range.start) as u64;
            let kept = least_of(problem, &permutations, range);
            progress.advance(steps);
            kept
        })
        .collect::<Result<_, _>>()?;
    let mut orderings: Vec<Ordering> = found.into_iter().flatten().collect();
    debug_assert_eq!(Some(orderings.len() as u128), burnside(problem), "the orbits agree with Burnside's count");
    sort(&mut orderings);
    Ok(orderings)
}

/// By energy, equal within rounding counting as equal, then by kinds: the same order on every machine.
pub(super) fn sort(orderings: &mut [Ordering]) {
    let key = |o: &Ordering| (o.energy * 1e6).round();
    orderings.sort_by(|a, b| key(a).total_cmp(&key(b)).then_with(|| a.kinds.cmp(&b.kinds)));
}

fn least_of(
    problem: &Problem,
    permutations: &[Vec<u32>],
    range: std::ops::Range<u128>,
) -> Result<Vec<Ordering>, OrderingError> {
    let mut kept = Vec::new();
    let mut kinds = unrank(problem, range.start);
    for _ in range {
        let mut fixed = 0_u128;
        let least = permutations.iter().all(|map| match compare_image(&kinds, map) {
            Compared::Less => true,
            Compared::Equal => {
                fixed += 1;
                true
            }
            Compared::Greater => false,
        });
        if least {
            let degeneracy = permutations.len() as u128 / fixed;
            kept.push(Ordering { kinds: kinds.clone(), degeneracy, energy: problem.energy(&kinds)? });
        }
        advance(problem, &mut kinds);
    }
    Ok(kept)
}
