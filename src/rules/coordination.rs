//! Coordination: each cation has as many anions around it as its seat promised.

use super::{Finding, Rule, SHELL_FACTOR, Severity, Shells, Terms};

pub(super) fn judge(shells: &Shells, terms: &Terms<'_>) -> Option<Finding> {
    let differs = |(idx, promised): (usize, &Option<usize>)| {
        promised.filter(|p| *p != shells.coordination[idx]).map(|p| (idx, p))
    };
    let cases: Vec<(usize, usize)> = terms.promised.iter().enumerate().filter_map(differs).collect();
    let &(site, promised) = cases.iter().max_by_key(|(idx, p)| p.abs_diff(shells.coordination[*idx]))?;
    let found = shells.coordination[site];
    Some(Finding {
        rule: Rule::Coordination,
        severity: Severity::Broken,
        measured: found as f64,
        limit: promised as f64,
        unit: "neighbours",
        sites: vec![site],
        cases: cases.len(),
        text: format!("{found} anions within {SHELL_FACTOR} times the nearest, {promised} expected from the seat"),
        source: "geometry of the packing",
    })
}
