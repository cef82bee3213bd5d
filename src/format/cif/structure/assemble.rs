//! The cell from its listed sites: images, shared positions, overlaps.

use super::contacts::{Contact, MAX_NEAR};
use super::disorder::Relation;
use super::expand::{MAX_SITES, OVERLAP, SHARE_TOLERANCE, near_pairs, orbit, wrapped};
use super::labels::Labels;
use super::report::Report;
use super::sites::{MAX_SUM, SiteList};
use crate::crystal::symmetry::Operation;
use crate::crystal::{Fractional, Lattice, Occupant, Site, Structure};
use crate::format::cif::diagnostic::Diagnostic;
use crate::ion::Amount;
use crate::ion::amount::to_f64;
use num_traits::One;
use std::collections::{BTreeMap, BTreeSet};
use std::sync::Arc;

/// Shifts and distances up to this (Å) are mere rounding and not worth a word.
const QUIET_SHIFT: f64 = 2e-3;

/// A remark to be made if this expansion is the one that is used: code, place, text.
type Remark = (&'static str, usize, String);

/// All sites of the cell, and the remarks on them.
pub(super) struct Expanded {
    pub structure: Structure,
    pub labels: Labels,
    pub remarks: Vec<Remark>,
}

/// Positions of the cell, and for each the row of the list that it is an image of.
#[derive(Default)]
struct Images {
    positions: Vec<Fractional>,
    row: Vec<u32>,
}

/// Expands the listed sites, merges those that share a position and refuses those that overlap.
pub(super) fn expanded(
    lattice: &Lattice,
    operations: &[Operation],
    list: &SiteList<'_>,
    report: &Report<'_, '_>,
) -> Result<Expanded, Diagnostic> {
    let mut remarks = Vec::new();
    let images = images(lattice, operations, list, &mut remarks, report)?;
    let pairs = near_pairs(lattice, &images.positions).map_err(|index| {
        let site = &list.sites[images.row[index] as usize];
        let text = format!("more than {MAX_NEAR} sites lie within {OVERLAP} Å of `{}`", site.label);
        report.error("cif::overlap", site.place as usize, text)
    })?;
    let owner = owners(&images, list, &pairs, &mut remarks, report)?;
    assemble(lattice, images, list, &owner, remarks, report)
}

fn images(
    lattice: &Lattice,
    operations: &[Operation],
    list: &SiteList<'_>,
    remarks: &mut Vec<Remark>,
    report: &Report<'_, '_>,
) -> Result<Images, Diagnostic> {
    if operations.len() == 1 {
        let positions = list.sites.iter().map(|site| wrapped(&site.position)).collect();
        return Ok(Images { positions, row: (0..list.sites.len() as u32).collect() });
    }
    let mut images = Images::default();
    for (row, site) in list.sites.iter().enumerate() {
        let Some(orbit) = orbit(lattice, operations, &site.position) else {
            let text = format!(
                "`{}` lies near a symmetry element, but not near enough to tell whether on it; give its coordinates with more digits",
                site.label
            );
            return Err(report.error("cif::special-position", site.place as usize, text));
        };
        if orbit.shift > QUIET_SHIFT {
            let text = format!("`{}` is moved by {:.4} Å onto its symmetry element", site.label, orbit.shift);
            remarks.push(("cif::special-position", site.place as usize, text));
        }
        images.positions.extend(orbit.positions);
        images.row.resize(images.positions.len(), row as u32);
        if images.positions.len() > MAX_SITES {
            let text = format!("the cell would hold more than {MAX_SITES} sites");
            return Err(report.error("cif::sites", site.place as usize, text));
        }
    }
    Ok(images)
}

/// For each position that shares another's the first position there; remarks on shared and split sites; an error for
/// sites that overlap.
fn owners(
    images: &Images,
    list: &SiteList<'_>,
    pairs: &[Contact],
    remarks: &mut Vec<Remark>,
    report: &Report<'_, '_>,
) -> Result<BTreeMap<usize, usize>, Diagnostic> {
    let mut owner: BTreeMap<usize, usize> = BTreeMap::new();
    for &(i, j, distance) in pairs {
        if distance <= SHARE_TOLERANCE && !owner.contains_key(&j) {
            owner.insert(j, owner.get(&i).copied().unwrap_or(i));
        }
    }
    let most = Amount::new(MAX_SUM.0, MAX_SUM.1);
    let mut said = BTreeSet::new();
    for &(i, j, distance) in pairs {
        let rows = [i, j].map(|at| images.row[at] as usize);
        let [first, second] = rows.map(|row| &list.sites[row]);
        let [share, other] = rows.map(|row| list.occupant(row).occupancy);
        let together = owner.get(&i).unwrap_or(&i) == owner.get(&j).unwrap_or(&j);
        let relation = list.groups.relation(first.group, second.group, rows[0] == rows[1]);
        if relation == Relation::Apart && !together {
            continue;
        }
        if !together && share + other > most {
            let other_label = if rows[0] == rows[1] { "an image of it".into() } else { format!("`{}`", second.label) };
            let text = format!(
                "`{}` and {other_label} are {distance:.3} Å apart with occupancies {} and {}; no two atoms can be that near",
                first.label,
                to_f64(&share),
                to_f64(&other)
            );
            return Err(report.error("cif::overlap", second.place as usize, text));
        }
        if distance > QUIET_SHIFT && said.insert(rows) {
            let how = match (together, relation) {
                (true, _) => "are taken as one shared site",
                (false, Relation::Together) => "are in one disorder group, but cannot both be there",
                (false, _) => "are taken as alternatives of one atom",
            };
            let other_label = if rows[0] == rows[1] { "an image of it".into() } else { format!("`{}`", second.label) };
            let text = format!("`{}` and {other_label} are {distance:.3} Å apart and {how}", first.label);
            remarks.push(("cif::shared", second.place as usize, text));
        }
    }
    Ok(owner)
}

fn assemble(
    lattice: &Lattice,
    images: Images,
    list: &SiteList<'_>,
    owner: &BTreeMap<usize, usize>,
    mut remarks: Vec<Remark>,
    report: &Report<'_, '_>,
) -> Result<Expanded, Diagnostic> {
    // Rows that share the position of an owner, itself first.
    let mut sharing: BTreeMap<usize, Vec<usize>> = BTreeMap::new();
    for (&other, &first) in owner {
        let rows = sharing.entry(first).or_insert_with(|| vec![images.row[first] as usize]);
        rows.push(images.row[other] as usize);
    }
    let alone: Vec<Arc<[Occupant]>> = list.kinds.iter().map(|occupant| Arc::from([*occupant])).collect();
    let n_sites = images.positions.len() - owner.len();
    let mut sites = Vec::with_capacity(n_sites);
    let mut row_of_site = Vec::with_capacity(n_sites);
    let mut said = BTreeSet::new();
    for (index, (position, row)) in images.positions.into_iter().zip(images.row).enumerate() {
        if owner.contains_key(&index) {
            continue;
        }
        let occupants = match sharing.get(&index) {
            None => alone[list.sites[row as usize].kind as usize].clone(),
            Some(rows) => {
                let remark = |remark| {
                    if said.insert(row) {
                        remarks.push(remark);
                    }
                };
                together(rows, list, remark, report)?
            }
        };
        sites.push(Site { position, occupants });
        row_of_site.push(row);
    }
    let labels = Labels::new(&list.sites, row_of_site);
    Ok(Expanded { structure: Structure { lattice: lattice.clone(), sites }, labels, remarks })
}

/// The occupants of one position that several rows share.
fn together(
    rows: &[usize],
    list: &SiteList<'_>,
    remark: impl FnOnce(Remark),
    report: &Report<'_, '_>,
) -> Result<Arc<[Occupant]>, Diagnostic> {
    let mut occupants: Vec<Occupant> = Vec::new();
    for &row in rows {
        let occupant = list.occupant(row);
        match occupants.iter_mut().find(|o| o.species == occupant.species) {
            Some(same) => same.occupancy += occupant.occupancy,
            None => occupants.push(occupant),
        }
    }
    let total: Amount = occupants.iter().map(|o| o.occupancy).sum();
    let first = &list.sites[rows[0]];
    if total > Amount::new(MAX_SUM.0, MAX_SUM.1) {
        let labels: BTreeSet<usize> = rows.iter().copied().collect();
        let labels: Vec<_> = labels.iter().map(|&row| format!("`{}`", list.sites[row].label)).collect();
        let text = format!(
            "the occupancies of {} on one position add up to {:.4}; they must not exceed 1, and of sites that are \
             images of each other only one is listed",
            labels.join(", "),
            to_f64(&total)
        );
        return Err(report.error("cif::occupancy", first.place as usize, text));
    }
    // Rounding of the printed shares: the largest bears it.
    let excess = total - Amount::one();
    if excess > Amount::from(0) {
        if let Some(largest) = occupants.iter_mut().max_by_key(|o| o.occupancy) {
            largest.occupancy -= excess;
        }
        let text = format!(
            "the occupancies on the position of `{}` add up to {:.4} and are taken as 1 in all",
            first.label,
            to_f64(&total)
        );
        remark(("cif::occupancy", first.place as usize, text));
    }
    Ok(occupants.into())
}
