//! The site list of a data block, row by row.

use super::disorder::{Groups, check};
use super::expand::wrapped;
use super::labels::ListedLabels;
use super::position::{axes, position};
use super::report::Report;
use super::shares::Shares;
use super::species::FormulaElements;
use super::types::Types;
use crate::crystal::{Fractional, Lattice, Occupant};
use crate::format::cif::{Block, Diagnostic, Loop};
use crate::ion::{Amount, Species};
use num_traits::{One, Zero};
use std::collections::BTreeMap;

const LABEL: [&str; 1] = ["_atom_site_label"];
const TYPE_SYMBOL: [&str; 1] = ["_atom_site_type_symbol"];
pub(super) const FRACTIONAL: [&str; 3] = ["_atom_site_fract_x", "_atom_site_fract_y", "_atom_site_fract_z"];
pub(super) const CARTESIAN: [&str; 3] = ["_atom_site_Cartn_x", "_atom_site_Cartn_y", "_atom_site_Cartn_z"];

/// Sums of shares up to this are rounding; beyond it a site holds more than it can.
pub(super) const MAX_SUM: (i128, i128) = (101, 100);

/// Kinds that are compared one by one before the ordered index is asked.
const FIRST_KINDS: usize = 8;

/// A row of the site list beside its label and position.
pub(super) struct Listed {
    /// Which of the list's kinds.
    pub kind: u32,
    /// Which of the list's disorder groups.
    pub group: u32,
    pub place: u32,
}

/// The rows that can be used, and the labels of those that were passed over.
pub(super) struct SiteList<'s> {
    pub sites: Vec<Listed>,
    pub labels: ListedLabels,
    /// In [0, 1).
    pub positions: Vec<Fractional>,
    /// Species with their shares, each once.
    pub kinds: Vec<Occupant>,
    pub groups: Groups<'s>,
    pub skipped: Vec<String>,
}

impl SiteList<'_> {
    /// What a row puts on its position.
    pub fn occupant(&self, row: usize) -> Occupant {
        self.kinds[self.sites[row].kind as usize]
    }
}

/// Whether the block lists sites at all.
pub(super) fn has_sites(block: &Block<'_>) -> bool {
    table(block).is_some()
}

fn table<'b, 's>(block: &'b Block<'s>) -> Option<&'b Loop<'s>> {
    block.table(&[FRACTIONAL[0]]).or_else(|| block.table(&[CARTESIAN[0]]))
}

/// Reads every row.
pub(super) fn read<'s>(
    block: &Block<'s>,
    lattice: &Lattice,
    formula: &FormulaElements,
    report: &mut Report<'_, '_>,
) -> Result<SiteList<'s>, Diagnostic> {
    let Some(table) = table(block) else {
        return Err(report.error("cif::sites", report.block_place(), "the block lists no atom sites".into()));
    };
    let (label, type_symbol) = (table.column(&LABEL), table.column(&TYPE_SYMBOL));
    if label.is_none() && type_symbol.is_none() {
        let text = "the site list has neither `_atom_site_label` nor `_atom_site_type_symbol`; its atoms are unknown";
        return Err(report.error("cif::sites", report.block_place(), text.into()));
    }
    let axes = axes(block, table, lattice, report)?;
    let occupancy = table.column(&["_atom_site_occupancy"]);
    let calc_flag = table.column(&["_atom_site_calc_flag"]);
    let disorder = ["_atom_site_disorder_assembly", "_atom_site_disorder_group"].map(|name| table.column(&[name]));
    let mut types = Types::new(block, formula, report);
    let mut shares = Shares::default();
    let mut kinds = Kinds::default();
    let mut list = SiteList {
        sites: Vec::with_capacity(table.n_rows()),
        labels: ListedLabels::default(),
        positions: Vec::with_capacity(table.n_rows()),
        kinds: Vec::new(),
        groups: Groups::default(),
        skipped: Vec::new(),
    };
    for row in 0..table.n_rows() {
        let head = table.value(row, label.or(type_symbol).unwrap_or(0));
        if calc_flag.is_some_and(|c| table.value(row, c).text() == "dum") {
            list.skipped.push(head.text().into_owned());
            report.warn("cif::dummy", head.place(), format!("`{}` is a dummy site and is passed over", head.text()));
            continue;
        }
        let Some(position) = position(table, row, &axes, report)? else {
            list.skipped.push(head.text().into_owned());
            let text = format!("`{}` has no position and is passed over", head.text());
            report.warn("cif::position", head.place(), text);
            continue;
        };
        let share = match occupancy.map(|c| table.value(row, c)) {
            None => Amount::one(),
            Some(value) => shares.read(value, report)?,
        };
        if share.is_zero() {
            list.skipped.push(head.text().into_owned());
            report.warn(
                "cif::occupancy",
                head.place(),
                format!("`{}` has an occupancy of 0 and is passed over", head.text()),
            );
            continue;
        }
        let species =
            types.species(label.map(|c| table.value(row, c)), type_symbol.map(|c| table.value(row, c)), report)?;
        match label {
            Some(_) => list.labels.push(&head.text()),
            None => list.labels.push(&format!("{}{}", species.element, row + 1)),
        }
        let kind = kinds.of(Occupant { species, occupancy: share });
        let group = if disorder[1].is_some() { list.groups.of(table, row, disorder) } else { 0 };
        list.positions.push(wrapped(&position));
        list.sites.push(Listed { kind, group, place: head.place() as u32 });
    }
    list.kinds = kinds.all;
    list.labels.rename_duplicates(|row| list.sites[row].place as usize, report);
    check(&list, report);
    Ok(list)
}

/// Species with their shares, numbered as they come.
#[derive(Default)]
struct Kinds {
    all: Vec<Occupant>,
    index: BTreeMap<(Species, Amount), u32>,
}

impl Kinds {
    fn of(&mut self, occupant: Occupant) -> u32 {
        // Nearly every list has few kinds.
        if let Some(kind) = self.all.iter().take(FIRST_KINDS).position(|kind| *kind == occupant) {
            return kind as u32;
        }
        *self.index.entry((occupant.species, occupant.occupancy)).or_insert_with(|| {
            self.all.push(occupant);
            self.all.len() as u32 - 1
        })
    }
}
