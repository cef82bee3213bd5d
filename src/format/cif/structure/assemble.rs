//! The cell from its listed sites: images, shared positions, overlaps.

use super::contacts::Contact;
use super::expand::{MAX_SITES, SHARE_TOLERANCE, near_pairs, orbit, wrapped};
use super::report::Report;
use super::sites::{Listed, MAX_SUM};
use crate::crystal::symmetry::Operation;
use crate::crystal::{Fractional, Lattice, Occupant, Site, Structure};
use crate::format::cif::diagnostic::Diagnostic;
use crate::ion::Amount;
use crate::ion::amount::to_f64;
use num_traits::One;
use std::collections::BTreeSet;

/// Shifts and distances up to this (Å) are mere rounding and not worth a word.
const QUIET_SHIFT: f64 = 2e-3;

/// All sites of the cell, and remarks (code, place, text) to be made if this expansion is the one that is used.
pub(super) struct Expanded {
    pub structure: Structure,
    pub labels: Vec<String>,
    pub remarks: Vec<(&'static str, usize, String)>,
}

/// Expands the listed sites, merges those that share a position and refuses those that overlap.
pub(super) fn expanded(
    lattice: &Lattice,
    operations: &[Operation],
    sites: &[Listed],
    report: &Report<'_, '_>,
) -> Result<Expanded, Diagnostic> {
    let mut remarks = Vec::new();
    let mut positions: Vec<Fractional> = Vec::with_capacity(sites.len());
    // For each position the listed site that it is an image of.
    let mut origin: Vec<u32> = Vec::with_capacity(sites.len());
    for (index, site) in sites.iter().enumerate() {
        if operations.len() == 1 {
            positions.push(wrapped(&site.position));
            origin.push(index as u32);
            continue;
        }
        let Some(images) = orbit(lattice, operations, &site.position) else {
            let text = format!(
                "`{}` lies near a symmetry element, but not near enough to tell whether on it; give its coordinates with more digits",
                site.label
            );
            return Err(report.error("cif::special-position", site.place, text));
        };
        if images.shift > QUIET_SHIFT {
            let text = format!("`{}` is moved by {:.4} Å onto its symmetry element", site.label, images.shift);
            remarks.push(("cif::special-position", site.place, text));
        }
        origin.resize(positions.len() + images.positions.len(), index as u32);
        positions.extend(images.positions);
        if positions.len() > MAX_SITES {
            let text = format!("the cell would hold more than {MAX_SITES} sites");
            return Err(report.error("cif::sites", site.place, text));
        }
    }
    let pairs = near_pairs(lattice, &positions);
    let owner = owners(&positions, &origin, sites, &pairs, &mut remarks, report)?;
    assemble(lattice, &positions, &origin, sites, &owner, remarks, report)
}

/// For each position the first position that it shares; remarks on shared and split sites; an error for sites that
/// overlap.
fn owners(
    positions: &[Fractional],
    origin: &[u32],
    sites: &[Listed],
    pairs: &[Contact],
    remarks: &mut Vec<(&'static str, usize, String)>,
    report: &Report<'_, '_>,
) -> Result<Vec<u32>, Diagnostic> {
    let mut owner: Vec<u32> = (0..positions.len() as u32).collect();
    for &(i, j, distance) in pairs {
        if distance <= SHARE_TOLERANCE && owner[j] as usize == j {
            owner[j] = owner[i];
        }
    }
    let most = Amount::new(MAX_SUM.0, MAX_SUM.1);
    let mut said = BTreeSet::new();
    for &(i, j, distance) in pairs {
        let (first, second) = (&sites[origin[i] as usize], &sites[origin[j] as usize]);
        let together = owner[i] == owner[j];
        if !together && first.occupancy + second.occupancy > most {
            let text = format!(
                "`{}` and `{}` are {distance:.3} Å apart with occupancies {} and {}; no two atoms can be that near",
                first.label,
                second.label,
                to_f64(&first.occupancy),
                to_f64(&second.occupancy)
            );
            return Err(report.error("cif::overlap", second.place, text));
        }
        if distance > QUIET_SHIFT && said.insert((origin[i], origin[j])) {
            let how = if together { "are taken as one shared site" } else { "are taken as alternatives of one atom" };
            let text = format!("`{}` and `{}` are {distance:.3} Å apart and {how}", first.label, second.label);
            remarks.push(("cif::shared", second.place, text));
        }
    }
    Ok(owner)
}

fn assemble(
    lattice: &Lattice,
    positions: &[Fractional],
    origin: &[u32],
    sites: &[Listed],
    owner: &[u32],
    mut remarks: Vec<(&'static str, usize, String)>,
    report: &Report<'_, '_>,
) -> Result<Expanded, Diagnostic> {
    // Where an owner's site stands in the list of the cell.
    let mut at = vec![u32::MAX; positions.len()];
    let mut cell: Vec<Site> = Vec::with_capacity(positions.len());
    let mut labels = Vec::with_capacity(positions.len());
    for (index, position) in positions.iter().enumerate() {
        let site = &sites[origin[index] as usize];
        let occupant = Occupant { species: site.species, occupancy: site.occupancy };
        if owner[index] as usize == index {
            at[index] = cell.len() as u32;
            cell.push(Site { position: *position, occupants: vec![occupant] });
            labels.push(site.label.clone());
            continue;
        }
        let occupants = &mut cell[at[owner[index] as usize] as usize].occupants;
        match occupants.iter_mut().find(|o| o.species == occupant.species) {
            Some(same) => same.occupancy += occupant.occupancy,
            None => occupants.push(occupant),
        }
    }
    let mut said = BTreeSet::new();
    for index in (0..positions.len()).filter(|&i| owner[i] as usize == i) {
        let site = &mut cell[at[index] as usize];
        if site.occupants.len() == 1 && site.occupants[0].occupancy <= Amount::one() {
            continue;
        }
        let total: Amount = site.occupants.iter().map(|o| o.occupancy).sum();
        if total <= Amount::one() {
            continue;
        }
        let listed = &sites[origin[index] as usize];
        if total > Amount::new(MAX_SUM.0, MAX_SUM.1) {
            let here = (0..positions.len()).filter(|&i| owner[i] as usize == index).map(|i| origin[i]);
            let labels: BTreeSet<u32> = here.collect();
            let labels: Vec<_> = labels.iter().map(|&i| format!("`{}`", sites[i as usize].label)).collect();
            let text = format!(
                "the occupancies of {} on one position add up to {:.4}; they must not exceed 1, and of sites that are \
                 images of each other only one is listed",
                labels.join(", "),
                to_f64(&total)
            );
            return Err(report.error("cif::occupancy", listed.place, text));
        }
        // Rounding of the printed shares: the largest bears it.
        let excess = total - Amount::one();
        if let Some(largest) = site.occupants.iter_mut().max_by_key(|o| o.occupancy) {
            largest.occupancy -= excess;
        }
        if said.insert(origin[index]) {
            let text = format!(
                "the occupancies on the position of `{}` add up to {:.4} and are taken as 1 in all",
                listed.label,
                to_f64(&total)
            );
            remarks.push(("cif::occupancy", listed.place, text));
        }
    }
    Ok(Expanded { structure: Structure { lattice: lattice.clone(), sites: cell }, labels, remarks })
}
