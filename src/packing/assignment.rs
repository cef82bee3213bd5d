//! The assignment problem: pair rows with columns of a square table for the least sum of costs.
//!
//! H. W. Kuhn, Nav. Res. Logist. Q. 2, 83 (1955), doi:10.1002/nav.3800020109, in the form with potentials and one
//! shortest augmenting path a row: O(n³).

/// For each row its column.
pub fn assign(n: usize, cost: impl Fn(usize, usize) -> f64) -> Vec<usize> {
    // Column n stands for "none yet" and starts each path.
    let (mut row_potential, mut column_potential) = (vec![0.0; n], vec![0.0; n + 1]);
    let mut row_of: Vec<usize> = vec![usize::MAX; n + 1];
    let mut came_from = vec![n; n + 1];
    for row in 0..n {
        row_of[n] = row;
        let mut column = n;
        let mut slack = vec![f64::INFINITY; n];
        let mut used = vec![false; n + 1];
        while row_of[column] != usize::MAX {
            used[column] = true;
            let here = row_of[column];
            let (mut least, mut next) = (f64::INFINITY, n);
            for j in (0..n).filter(|j| !used[*j]) {
                let reduced = cost(here, j) - row_potential[here] - column_potential[j];
                if reduced < slack[j] {
                    slack[j] = reduced;
                    came_from[j] = column;
                }
                if slack[j] < least {
                    (least, next) = (slack[j], j);
                }
            }
            if next == n {
                // Costs that are no numbers leave nothing to choose.
                return (0..n).collect();
            }
            for j in 0..=n {
                if used[j] {
                    row_potential[row_of[j]] += least;
                    column_potential[j] -= least;
                } else if j < n {
                    slack[j] -= least;
                }
            }
            column = next;
        }
        while column != n {
            let before = came_from[column];
            row_of[column] = row_of[before];
            column = before;
        }
    }
    let mut column_of = vec![0; n];
    for (column, row) in row_of.iter().take(n).enumerate() {
        column_of[*row] = column;
    }
    column_of
}

#[cfg(test)]
mod tests {
    use super::*;
    use itertools::Itertools;

    /// Against all permutations, on tables from a small linear congruence.
    #[test]
    fn no_permutation_costs_less() {
        let mut state = 7_u64;
        let mut next = || {
            state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
            (state >> 40) as f64 / 1e6 - 8.0
        };
        for n in 1..=6 {
            for _ in 0..20 {
                let table: Vec<Vec<f64>> = (0..n).map(|_| (0..n).map(|_| next()).collect()).collect();
                let sum = |p: &[usize]| p.iter().enumerate().map(|(i, j)| table[i][*j]).sum::<f64>();
                let best = (0..n).permutations(n).map(|p| sum(&p)).min_by(f64::total_cmp).unwrap();
                let found = assign(n, |i, j| table[i][j]);
                assert_eq!(found.iter().copied().sorted().collect_vec(), (0..n).collect_vec());
                assert!((sum(&found) - best).abs() < 1e-9, "{n}");
            }
        }
        assert_eq!(assign(2, |_, _| f64::NAN), [0, 1]);
    }
}
