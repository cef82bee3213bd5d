//! The cell from its listed sites: images, shared positions, overlaps.

use super::contacts::{Contact, MAX_NEAR};
use super::disorder::Relation;
use super::expand::{MAX_SITES, OVERLAP, SHARE_TOLERANCE, near_pairs, orbit};
use super::report::Report;
use super::sites::{MAX_SUM, SiteList};
use crate::crystal::symmetry::Operation;
use crate::crystal::{Fractional, Lattice, Occupant, Site, Structure};
use crate::format::cif::diagnostic::Diagnostic;
use crate::ion::Amount;
use crate::ion::amount::to_f64;
use num_traits::One;
use std::borrow::Cow;
use std::collections::{BTreeMap, BTreeSet};
use std::sync::Arc;

/// Shifts and distances up to this (Å) are mere rounding and not worth a word.
const QUIET_SHIFT: f64 = 2e-3;

/// A remark to be made if this expansion is the one that is used: code, place, text.
type Remark = (&'static str, usize, String);

/// All sites of the cell, and the remarks on them.
pub(super) struct Expanded {
    pub structure: Structure,
    /// For each site its row in the list.
    pub rows: Vec<u32>,
    pub remarks: Vec<Remark>,
}

/// Positions of the cell, and for each the row of the list that it is an image of.
struct Images<'l> {
    positions: Cow<'l, [Fractional]>,
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
        let row = images.row[index] as usize;
        let text = format!("more than {MAX_NEAR} sites lie within {OVERLAP} Å of `{}`", list.labels.get(row));
        report.error("cif::overlap", list.sites[row].place as usize, text)
    })?;
    let owner = owners(&images, list, &pairs, &mut remarks, report)?;
    assemble(lattice, images, list, &owner, remarks, report)
}

fn images<'l>(
    lattice: &Lattice,
    operations: &[Operation],
    list: &'l SiteList<'_>,
    remarks: &mut Vec<Remark>,
    report: &Report<'_, '_>,
) -> Result<Images<'l>, Diagnostic> {
    if operations.len() == 1 {
        let positions = Cow::Borrowed(&list.positions[..]);
        return Ok(Images { positions, row: (0..list.sites.len() as u32).collect() });
    }
    let (mut positions, mut rows) = (Vec::new(), Vec::new());
    for (row, (site, position)) in list.sites.iter().zip(&list.positions).enumerate() {
        let Some(orbit) = orbit(lattice, operations, position) else {
            let text = format!(
                "`{}` lies near a symmetry element, but not near enough to tell whether on it; give its coordinates with more digits",
                list.labels.get(row)
            );
            return Err(report.error("cif::special-position", site.place as usize, text));
        };
        if orbit.shift > QUIET_SHIFT {
            let text = format!("`{}` is moved by {:.4} Å onto its symmetry element", list.labels.get(row), orbit.shift);
            remarks.push(("cif::special-position", site.place as usize, text));
        }
        positions.extend(orbit.positions);
        rows.resize(positions.len(), row as u32);
        if positions.len() > MAX_SITES {
            let text = format!("the cell would hold more than {MAX_SITES} sites");
            return Err(report.error("cif::sites", site.place as usize, text));
        }
    }
    Ok(Images { positions: positions.into(), row: rows })
}

/// For each position that shares another's the first position there; remarks on shared and split sites; an error for
/// sites that overlap.
fn owners(
    images: &Images<'_>,
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
        let label = list.labels.get(rows[0]);
        let [share, other] = rows.map(|row| list.occupant(row).occupancy);
        let together = owner.get(&i).unwrap_or(&i) == owner.get(&j).unwrap_or(&j);
        let relation = list.groups.relation(first.group, second.group, rows[0] == rows[1]);
        if relation == Relation::Apart && !together {
            continue;
        }
        if !together && share + other > most {
            let other_label =
                if rows[0] == rows[1] { "an image of it".into() } else { format!("`{}`", list.labels.get(rows[1])) };
            let text = format!(
                "`{label}` and {other_label} are {distance:.3} Å apart with occupancies {} and {}; no two atoms can be that near",
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
            let other_label =
                if rows[0] == rows[1] { "an image of it".into() } else { format!("`{}`", list.labels.get(rows[1])) };
            let text = format!("`{label}` and {other_label} are {distance:.3} Å apart and {how}");
            remarks.push(("cif::shared", second.place as usize, text));
        }
    }
    Ok(owner)
}

fn assemble(
    lattice: &Lattice,
    images: Images<'_>,
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
    for (index, (position, row)) in images.positions.iter().zip(images.row).enumerate() {
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
        sites.push(Site { position: *position, occupants });
        row_of_site.push(row);
    }
    Ok(Expanded { structure: Structure { lattice: lattice.clone(), sites }, rows: row_of_site, remarks })
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
        let labels: Vec<_> = labels.iter().map(|&row| format!("`{}`", list.labels.get(row))).collect();
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
            list.labels.get(rows[0]),
            to_f64(&total)
        );
        remark(("cif::occupancy", first.place as usize, text));
    }
    Ok(occupants.into())
}
