//! Occupancy: the shares of one site add up to at most 1, and each is above 0.

use super::{Finding, Rule, Severity};
use crate::crystal::Structure;
use crate::ion::Amount;
use crate::ion::amount::to_f64;
use num_traits::{One, Zero};

pub(super) fn judge(structure: &Structure) -> Option<Finding> {
    let sums: Vec<Amount> =
        structure.sites.iter().map(|site| site.occupants.iter().map(|o| o.occupancy).sum()).collect();
    let bad = |idx: &usize| {
        sums[*idx] > Amount::one() || structure.sites[*idx].occupants.iter().any(|o| o.occupancy <= Amount::zero())
    };
    let cases: Vec<usize> = (0..sums.len()).filter(bad).collect();
    let worst = *cases.iter().max_by_key(|idx| sums[**idx])?;
    Some(Finding {
        rule: Rule::Occupancy,
        severity: Severity::Broken,
        measured: to_f64(&sums[worst]),
        limit: 1.0,
        unit: "1",
        sites: vec![worst],
        cases: cases.len(),
        text: format!("the shares of a site add up to {}", sums[worst]),
        source: "International Tables G, core dictionary, _atom_site_occupancy: the sum over a site may not exceed 1",
    })
}
