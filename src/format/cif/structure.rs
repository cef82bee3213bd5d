//! A crystal structure from the data blocks of a CIF.
//!
//! What the file says is taken in the order of how far it can be trusted: listed operations before the Hall symbol
//! before the Hermann–Mauguin symbol before the number; type symbols before labels; sites before the formula. Every
//! assumption is a warning with its place. Nothing is guessed: what cannot be known is an error that says what to add.

mod assemble;
mod cell;
mod contacts;
mod disorder;
mod expand;
mod formula;
mod group;
mod labels;
pub(super) mod operations;
mod position;
mod report;
mod shares;
mod sites;
mod source;
mod species;
mod types;

use super::citation::Citation;
use super::{Block, Diagnostic, Document};
use crate::crystal::symmetry::Operation;
use crate::crystal::{Lattice, Structure};
use assemble::{Expanded, expanded};
use formula::Amounts;
use group::Candidate;
pub use labels::Labels;
use report::Report;
use sites::SiteList;

/// Where a symbol leaves the origin open, an origin that brings two sites nearer than this (Å) is wrong.
const SHORTEST_CONTACT: f64 = 1.0;

/// The space group as the block names it.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct StatedGroup {
    /// Hermann–Mauguin symbol as written.
    pub hermann_mauguin: Option<String>,
    /// Hall symbol as written.
    pub hall: Option<String>,
    /// Number in International Tables A.
    pub number: Option<i32>,
}

/// A structure as read, and what the block says beside it.
#[derive(Clone, Debug)]
pub struct ReadStructure {
    /// Every site of the cell (P 1), in the order of the list, each followed by its images in the order of the
    /// operations.
    pub structure: Structure,
    /// For each site of the cell the label of the listed site that it came from; of a shared site, of the first.
    pub labels: Labels,
    /// Code of the data block.
    pub block: String,
    /// Common, mineral or systematic name of the compound.
    pub name: Option<String>,
    /// The space group as stated.
    pub stated_group: Option<StatedGroup>,
    /// The operations used, on the cell of the file; the identity first.
    pub operations: Vec<Operation>,
    /// Formula as stated.
    pub formula_sum: Option<String>,
    /// Formula units in the cell, as stated.
    pub z: Option<f64>,
    /// Published sources.
    pub citations: Vec<Citation>,
    /// Labels of listed sites that were passed over: dummies, sites without position, empty ones.
    pub skipped: Vec<String>,
    /// What was taken otherwise than written, in order of place.
    pub warnings: Vec<Diagnostic>,
}

/// The structure of each block that lists atom sites, in the order of the file; blocks without atoms are passed over.
/// A file without any such block gives an empty list.
pub fn read_structures(document: &Document<'_>) -> Vec<Result<ReadStructure, Diagnostic>> {
    document.blocks.iter().filter(|block| sites::has_sites(block)).map(|block| read_block(document, block)).collect()
}

/// The structure of one block.
///
/// # Errors
/// A [`Diagnostic`] at the first place that makes the block unusable.
pub fn read_block(document: &Document<'_>, block: &Block<'_>) -> Result<ReadStructure, Diagnostic> {
    let mut report = Report::new(document, block.place());
    let lattice = cell::read(block, &mut report)?;
    let (candidates, stated_group) = group::candidates(block, &lattice, &mut report)?;
    let formula_value = block.value(&["_chemical_formula_sum"]).filter(|v| !v.is_unknown() && !v.is_inapplicable());
    let formula_sum = formula_value.map(|v| v.text().split_whitespace().collect::<Vec<_>>().join(" "));
    let amounts = formula_sum.as_deref().and_then(formula::parse);
    let z = block.value(&["_cell_formula_units_Z"]).and_then(|v| v.number()).map(|n| n.value).filter(|z| *z > 0.0);
    let list = sites::read(block, &lattice, &formula::elements(amounts.as_ref()), &mut report)?;
    if list.sites.is_empty() {
        return Err(report.error("cif::sites", report.block_place(), "no listed site has a position".into()));
    }

    let (operations, expanded) = choose(candidates, &lattice, &list, amounts.as_ref().zip(z), &mut report)?;
    let Expanded { structure, rows, remarks } = expanded;
    for (code, place, text) in remarks {
        report.warn(code, place, text);
    }
    if let (Some(amounts), Some(value)) = (&amounts, formula_value) {
        formula::check(&structure, amounts, z, value.place(), &mut report);
    }
    let known = |names: &[&str]| {
        let value = block.value(names).filter(|v| !v.is_unknown() && !v.is_inapplicable());
        value.map(|v| v.text().split_whitespace().collect::<Vec<_>>().join(" "))
    };
    Ok(ReadStructure {
        structure,
        labels: Labels::new(list.labels, rows),
        block: block.code().to_owned(),
        name: known(&["_chemical_name_common", "_chemical_name_mineral", "_chemical_name_systematic"]),
        stated_group,
        operations,
        formula_sum,
        z,
        citations: source::read(block),
        skipped: list.skipped,
        warnings: document.warnings_of(block).iter().cloned().chain(report.finish()).collect(),
    })
}

/// Tries the groups that the block can mean and takes the first that brings no sites too near and agrees with the
/// formula, else the first that gives a structure at all.
fn choose(
    candidates: Vec<Candidate>,
    lattice: &Lattice,
    list: &SiteList<'_>,
    formula: Option<(&Amounts, f64)>,
    report: &mut Report<'_, '_>,
) -> Result<(Vec<Operation>, Expanded), Diagnostic> {
    let alone = candidates.len() == 1;
    let mut first_error = None;
    let mut fallback = None;
    for candidate in candidates {
        match expanded(lattice, &candidate.operations, list, report) {
            Ok(expanded) => {
                let fits = alone || {
                    let positions = expanded.structure.positions();
                    contacts::contacts(lattice, &positions, SHORTEST_CONTACT).is_ok_and(|pairs| pairs.is_empty())
                        && formula.is_none_or(|(amounts, z)| formula::fits(&expanded.structure, amounts, z))
                };
                if fits {
                    fallback = Some((candidate, expanded));
                    break;
                }
                fallback.get_or_insert((candidate, expanded));
            }
            Err(error) => {
                first_error.get_or_insert(error);
            }
        }
    }
    match (fallback, first_error) {
        (Some((candidate, expanded)), _) => {
            if let Some((place, text)) = candidate.assumed {
                report.warn("cif::symmetry", place, text);
            }
            Ok((candidate.operations, expanded))
        }
        (None, Some(error)) => Err(error),
        (None, None) => Err(report.error("cif::symmetry", report.block_place(), "no space group fits".into())),
    }
}
