//! Pauling's second and fifth rules as evidence for a set of seats, before any order is chosen.
//!
//! Charge neutrality makes the *mean* bond-strength sum of the anions equal to their charge; what a set of seats
//! decides is how far single anions must stray from it while they stay as alike as counting allows (rule 5). With m_g
//! neighbours of group g (strength s_g = charge/CN) on average, an anion then has ⌊m_g⌋ or ⌈m_g⌉ of them. The least
//! variance of Σ n_g s_g over all distributions of such whole numbers with these means is a linear programme in the
//! shares p(n): minimise Σ p(n) (Σ n_g s_g − z)², Σ p(n) n_g = m_g, Σ p(n) = 1.
//!
//! Anions of two very different kinds may satisfy rule 2 where this number is not zero: it weighs seats, it proves
//! nothing. L. Pauling, J. Am. Chem. Soc. 51, 1010 (1929), doi:10.1021/ja01379a006.

use itertools::Itertools;

/// Cations of one bond strength around the anions.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Group {
    /// Charge over coordination number, v.u.
    pub strength: f64,
    /// Mean number of such neighbours of an anion.
    pub mean: f64,
}

/// More groups than this are not weighed at all.
const MAX_GROUPS: usize = 10;

const EPSILON: f64 = 1e-9;

/// Least root mean square deviation, v.u., of the anions' bond-strength sums from their mean; `None` for more groups
/// than can be weighed.
pub(super) fn least_deviation(groups: &[Group]) -> Option<f64> {
    let groups = merged(groups);
    if groups.len() > MAX_GROUPS {
        return None;
    }
    let mean_sum: f64 = groups.iter().map(|g| g.strength * g.mean).sum();
    let counts = |g: &Group| floor(g.mean)..=floor(g.mean) + i64::from(g.mean - floor(g.mean) as f64 > EPSILON);
    let hoods: Vec<Vec<i64>> = groups.iter().map(counts).multi_cartesian_product().collect();
    let cost: Vec<f64> = hoods
        .iter()
        .map(|n| n.iter().zip(&groups).map(|(n, g)| *n as f64 * g.strength).sum::<f64>() - mean_sum)
        .map(|d| d * d)
        .collect();
    let columns = hoods.iter().map(|n| std::iter::once(1.0).chain(n.iter().map(|n| *n as f64)).collect()).collect();
    let target = std::iter::once(1.0).chain(groups.iter().map(|g| g.mean)).collect();
    minimum(columns, target, &cost).map(|variance| variance.max(0.0).sqrt())
}

fn floor(x: f64) -> i64 {
    (x + EPSILON).floor() as i64
}

/// Groups of equal strength are one group.
fn merged(groups: &[Group]) -> Vec<Group> {
    let mut out: Vec<Group> = Vec::new();
    for g in groups {
        match out.iter_mut().find(|o| (o.strength - g.strength).abs() < EPSILON) {
            Some(o) => o.mean += g.mean,
            None => out.push(*g),
        }
    }
    out
}

/// Minimum of cost·p over p ≥ 0 with Σ p_j column_j = target (all ≥ 0): the simplex method with Bland's rule, started
/// from artificial variables of a cost that no share can repay.
fn minimum(mut columns: Vec<Vec<f64>>, target: Vec<f64>, cost: &[f64]) -> Option<f64> {
    let rows = target.len();
    let penalty = 1e4 * (1.0 + cost.iter().copied().fold(0.0, f64::max));
    let mut cost = cost.to_vec();
    let n_real = columns.len();
    for row in 0..rows {
        columns.push((0..rows).map(|r| f64::from(u8::from(r == row))).collect());
        cost.push(penalty);
    }
    let mut basis: Vec<usize> = (n_real..n_real + rows).collect();
    // Tableau by column; the last entry is the right-hand side.
    columns.push(target);
    let last = columns.len() - 1;
    loop {
        let reduced = |j: usize| cost[j] - basis.iter().zip(&columns[j]).map(|(b, a)| cost[*b] * a).sum::<f64>();
        let Some(entering) = (0..last).find(|&j| !basis.contains(&j) && reduced(j) < -EPSILON) else { break };
        let leaving = (0..rows)
            .filter(|&r| columns[entering][r] > EPSILON)
            .map(|r| (columns[last][r] / columns[entering][r], basis[r], r))
            .min_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)))?;
        let row = leaving.2;
        basis[row] = entering;
        let pivot: Vec<f64> = columns[entering].clone();
        for column in &mut columns {
            let value = column[row] / pivot[row];
            for r in 0..rows {
                column[r] = if r == row { value } else { column[r] - pivot[r] * value };
            }
        }
    }
    let feasible = basis.iter().zip(&columns[last]).all(|(b, x)| *b < n_real || x.abs() < 1e-7);
    feasible.then(|| basis.iter().zip(&columns[last]).map(|(b, x)| cost[*b] * x).sum())
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Pauling (1929), spinel: each oxygen has one tetrahedral Mg (1/2) and three octahedral Al (1/2 each): exactly 2.
    #[test]
    fn normal_spinel_obeys_rule_2_and_the_rival_seats_cannot() {
        let normal = [Group { strength: 0.5, mean: 1.0 }, Group { strength: 0.5, mean: 3.0 }];
        assert!(least_deviation(&normal).unwrap() < 1e-9);
        // All in octahedra: 1.5 Mg (1/3) and 3 Al (1/2); sums 11/6 and 13/6.
        let octahedra = [Group { strength: 1.0 / 3.0, mean: 1.5 }, Group { strength: 0.5, mean: 3.0 }];
        assert!((least_deviation(&octahedra).unwrap() - 1.0 / 6.0).abs() < 1e-9);
        // Inverse: Al (3/4) in tetrahedra, 1.5 Al and 1.5 Mg in octahedra; two of one and one of the other.
        let inverse = [
            Group { strength: 0.75, mean: 1.0 },
            Group { strength: 0.5, mean: 1.5 },
            Group { strength: 1.0 / 3.0, mean: 1.5 },
        ];
        assert!((least_deviation(&inverse).unwrap() - 1.0 / 12.0).abs() < 1e-9);
    }

    /// Rutile: three Ti of strength 2/3; corundum: four Al of 1/2.
    #[test]
    fn simple_oxides_have_no_deviation() {
        for group in [Group { strength: 2.0 / 3.0, mean: 3.0 }, Group { strength: 0.5, mean: 4.0 }] {
            assert!(least_deviation(&[group]).unwrap() < 1e-9);
        }
    }
}
