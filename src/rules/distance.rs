//! Distances: no two ions nearer than a share of the sum of their radii.
//!
//! The radius of an ion is taken at the coordination found for it; a shared site counts with the mean of its
//! occupants, weighted by their shares.

use super::shell::{Shells, filled};
use super::{Finding, Rule, Severity, Terms};
use crate::crystal::Structure;
use crate::ion::amount::to_f64;
use crate::ion::radius::radius;

/// Two sites that together hold at most one ion are alternatives, not neighbours.
const ONE_ION: f64 = 1.0 + 1e-9;

pub(super) fn judge(structure: &Structure, shells: &Shells, terms: &Terms<'_>) -> Vec<Finding> {
    let radii: Vec<Option<f64>> =
        (0..structure.sites.len()).map(|idx| site_radius(structure, shells, idx, terms)).collect();
    let mut worst: [Option<(f64, Finding)>; 3] = [None, None, None];
    // No limit is longer than this.
    let factors = [terms.limits.cation_anion, terms.limits.anion_anion, terms.limits.cation_cation];
    let longest = radii.iter().flatten().copied().fold(0.0, f64::max) * 2.0 * factors.into_iter().fold(0.0, f64::max);
    for i in 0..structure.sites.len() {
        let near = if radii[i].is_some() { shells.contacts(i, longest) } else { Vec::new() };
        for n in near.iter().filter(|n| n.index >= i) {
            let (rule, factor, source) = match (shells.signs[i], shells.signs[n.index]) {
                (1, 1) => (Rule::CationCation, terms.limits.cation_cation, OWN_LIMIT),
                (-1, -1) => (Rule::AnionAnion, terms.limits.anion_anion, PRACTICE),
                (1, -1) | (-1, 1) => (Rule::CationAnion, terms.limits.cation_anion, PRACTICE),
                _ => continue,
            };
            let (Some(p), Some(q)) = (radii[i], radii[n.index]) else { continue };
            let limit = factor * (p + q);
            if n.distance >= limit || filled(&structure.sites[i]) + filled(&structure.sites[n.index]) <= ONE_ION {
                continue;
            }
            let slot = &mut worst[rule as usize - Rule::CationCation as usize];
            let cases = slot.as_ref().map_or(0, |(_, f)| f.cases) + 1;
            let ratio = n.distance / limit;
            if slot.as_ref().is_none_or(|(r, _)| ratio < r - 1e-9) {
                let text = format!("{:.3} Å apart, {factor} of the sum of radii is {limit:.3} Å", n.distance);
                let sites = vec![i, n.index];
                let finding = Finding {
                    rule,
                    severity: Severity::Broken,
                    measured: n.distance,
                    limit,
                    unit: "Å",
                    sites,
                    cases,
                    text,
                    source,
                };
                *slot = Some((ratio, finding));
            } else if let Some((_, finding)) = slot {
                finding.cases = cases;
            }
        }
    }
    worst.into_iter().flatten().map(|(_, finding)| finding).collect()
}

const PRACTICE: &str = "share of the sum of Shannon (1976) radii; the share is common practice, no source";
const OWN_LIMIT: &str = "share of the sum of Shannon (1976) radii; the share is this project's own choice";

/// Mean radius of a site's occupants in Å, if all are tabulated.
fn site_radius(structure: &Structure, shells: &Shells, idx: usize, terms: &Terms<'_>) -> Option<f64> {
    let coordination = u8::try_from(shells.coordination[idx].max(1)).ok()?;
    let (mut sum, mut share) = (0.0, 0.0);
    for occupant in structure.sites[idx].occupants.iter() {
        let r = radius(&occupant.species.ion()?, coordination, terms.radii).ok()?;
        sum += r.angstrom * to_f64(&occupant.occupancy);
        share += to_f64(&occupant.occupancy);
    }
    (share > 0.0).then(|| sum / share)
}
