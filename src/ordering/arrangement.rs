//! Counting and numbering of arrangements: multisets of kinds on the sites of each class.

use super::Problem;
use num_integer::Integer;

/// n! / Π k_i! in exact arithmetic; `None` when it exceeds 128 bits.
pub(super) fn multinomial(counts: &[usize]) -> Option<u128> {
    let (mut result, mut placed) = (1_u128, 0_u128);
    for &count in counts {
        for k in 1..=count as u128 {
            placed += 1;
            // result · placed / k is whole; what k does not share with the result it shares with `placed`.
            let common = result.gcd(&k);
            result = (result / common).checked_mul(placed / (k / common))?;
        }
    }
    Some(result)
}

/// Number of arrangements of a problem, all classes together.
pub(super) fn count(problem: &Problem) -> Option<u128> {
    problem.contents.iter().try_fold(1_u128, |product, contents| {
        let counts: Vec<usize> = contents.counts.iter().map(|c| c.1).collect();
        product.checked_mul(multinomial(&counts)?)
    })
}

/// The arrangement of this number, from 0, in lexicographic order (the last class turning fastest).
pub(super) fn unrank(problem: &Problem, mut number: u128) -> Vec<u8> {
    let mut kinds = vec![0; problem.class.len()];
    for (sites, contents) in problem.sites_of.iter().zip(&problem.contents).rev() {
        let mut left: Vec<(u8, usize)> = sorted(&contents.counts);
        let counts: Vec<usize> = left.iter().map(|c| c.1).collect();
        let of_class = multinomial(&counts).unwrap_or(1).max(1);
        let mut rank = number % of_class;
        number /= of_class;
        for &site in sites {
            for choice in 0..left.len() {
                if left[choice].1 == 0 {
                    continue;
                }
                left[choice].1 -= 1;
                let rest: Vec<usize> = left.iter().map(|c| c.1).collect();
                let below = multinomial(&rest).unwrap_or(u128::MAX);
                if rank < below {
                    kinds[site] = left[choice].0;
                    break;
                }
                rank -= below;
                left[choice].1 += 1;
            }
        }
    }
    kinds
}

fn sorted(counts: &[(u8, usize)]) -> Vec<(u8, usize)> {
    let mut counts = counts.to_vec();
    counts.sort_unstable();
    counts
}

/// Steps to the next arrangement in the order of [`unrank`]; from the last back to the first.
pub(super) fn advance(problem: &Problem, kinds: &mut [u8]) {
    for sites in problem.sites_of.iter().rev() {
        if next_permutation(sites, kinds) {
            return;
        }
    }
}

/// The next larger arrangement on these sites; wraps to the smallest and says `false` at the end.
fn next_permutation(sites: &[usize], kinds: &mut [u8]) -> bool {
    let descent = (1..sites.len()).rev().find(|&i| kinds[sites[i - 1]] < kinds[sites[i]]);
    let reverse = |from: usize, kinds: &mut [u8]| {
        let (mut a, mut b) = (from, sites.len());
        while a + 1 < b {
            b -= 1;
            kinds.swap(sites[a], sites[b]);
            a += 1;
        }
    };
    match descent {
        None => {
            reverse(0, kinds);
            false
        }
        Some(i) => {
            let pivot = kinds[sites[i - 1]];
            if let Some(j) = (i..sites.len()).rev().find(|&j| kinds[sites[j]] > pivot) {
                kinds.swap(sites[i - 1], sites[j]);
            }
            reverse(i, kinds);
            true
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn multinomials_are_exact() {
        assert_eq!(multinomial(&[4, 8]), Some(495));
        assert_eq!(multinomial(&[2, 2, 2]), Some(90));
        assert_eq!(multinomial(&[]), Some(1));
        assert_eq!(multinomial(&[8, 8, 8]), Some(9_465_511_770));
        assert_eq!(multinomial(&[50, 50]), Some(100_891_344_545_564_193_334_812_497_256));
        assert_eq!(multinomial(&[500, 500]), None);
    }
}
