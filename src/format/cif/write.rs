//! Writes a structure as CIF 1.1, the form that every reader takes: ASCII, LF, no deprecated names.
//!
//! Data names and their meaning: core CIF dictionary 3.4.0. Nothing is invented: no standard uncertainties, no
//! displacement parameters, nothing that only a diffraction experiment could tell.

mod atoms;
mod digits;
mod formula;
mod text;

use super::citation::Citation;
use super::emit::quoted;
use crate::crystal::Structure;
use crate::crystal::lattice::LatticeError;
use crate::crystal::symmetry::{self, SpaceGroup, SymmetryError, TOLERANCE};
use crate::ion::{Amount, Species};
use atoms::AtomList;
use digits::{WrittenCell, rounded, rounded_on_element};
use num_traits::{One, Zero};
use text::{ascii, text_field};

/// Longest block code of CIF 1.1 (file syntax, paragraph 30).
const MAX_BLOCK_CODE: usize = 75;

/// Column, from 0, in which the values of single items begin; longer than any name that is written on one line.
const VALUE_COLUMN: usize = 33;

/// Longest line of ours; the standard allows 2048.
const MAX_LINE: usize = 80;

/// Largest oxidation number that the dictionary admits, in e.
const MAX_OXIDATION: u8 = 8;

/// g/cm³ in u/Å³: the atomic mass constant, 1.66053906660e-27 kg (CODATA 2018, value from memory).
const DENSITY_UNIT: f64 = 1.660_539_066_60;

/// Stands in every file: what a generated cell is, and what it is not.
pub const CAUTION: &str = "Generated model, not the result of an experiment or a refinement: a starting point for \
    calculations. It is a hypothesis, and no proof that such a phase exists.";

/// What a file says beside the structure itself.
#[derive(Clone, Debug)]
pub struct Description {
    /// Name of the data block. Characters that a block code cannot hold become `_`.
    pub block_code: String,
    /// Common name of the compound.
    pub name: Option<String>,
    /// How the cell was made: program, version, method, seed.
    pub method: String,
    /// Paragraphs for the reader of the file.
    pub notes: Vec<String>,
    /// Published sources of the structure that this one was made from.
    pub citations: Vec<Citation>,
    /// Every atom of the cell in P 1, instead of the asymmetric unit of the space group found.
    pub explicit: bool,
    /// Distance within which positions count as symmetric images, Å; not used for an explicit file.
    pub tolerance: f64,
    /// Seconds since 1970-01-01T00:00:00Z in decimal, as `SOURCE_DATE_EPOCH` gives them; without it the file bears no
    /// date, so that its bytes can be made again.
    pub source_date: Option<String>,
}

impl Default for Description {
    fn default() -> Self {
        Self {
            block_code: "structure".into(),
            name: None,
            method: concat!("interstice ", env!("CARGO_PKG_VERSION")).into(),
            notes: Vec::new(),
            citations: Vec::new(),
            explicit: false,
            tolerance: TOLERANCE,
            source_date: None,
        }
    }
}

/// Why a structure cannot be written.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum WriteError {
    /// No space group.
    #[error(transparent)]
    Symmetry(#[from] SymmetryError),
    /// The cell does not survive rounding to the digits that are written.
    #[error("the cell cannot be written with 6 decimals: {0}")]
    Lattice(#[from] LatticeError),
    /// A site that holds nothing, or more than it can.
    #[error("site {site} has occupancies that add up to {total}; they must add up to more than 0 and at most 1")]
    Occupancy {
        /// Index from 1.
        site: usize,
        /// The sum.
        total: Amount,
    },
    /// A coordinate that is no number.
    #[error("site {site} has a coordinate that is not a finite number")]
    Coordinate {
        /// Index from 1.
        site: usize,
    },
    /// An oxidation number outside the dictionary's range.
    #[error("`{species}` has a charge beyond the -8 to 8 e that a CIF can state")]
    Charge {
        /// Which.
        species: Species,
    },
    /// A date that is no number of seconds.
    #[error("`{text}` is no time; `SOURCE_DATE_EPOCH` is a whole number of seconds from 0 to 253402300799")]
    Date {
        /// As given.
        text: String,
    },
}

/// The structure as one CIF 1.1 data block: in the standard setting of its space group with its asymmetric unit, or
/// atom by atom in P 1 ([`Description::explicit`]).
///
/// Lengths and angles have 6 decimals, coordinates 8; volume, formula, weight, Z and density follow from what is
/// written. Occupancies are exact decimals where 8 places allow, else rounded so that each site's sum is right.
///
/// # Errors
/// [`WriteError`]: no atoms, coinciding sites, impossible occupancies or charges, a bad date.
pub fn write(structure: &Structure, description: &Description) -> Result<String, WriteError> {
    check(structure)?;
    let mut atoms = AtomList::default();
    if description.explicit {
        for site in &structure.sites {
            atoms.push(rounded(&site.position), &site.occupants, None);
        }
        let cell = WrittenCell::free(&structure.lattice);
        return assemble(&SpaceGroup::p1(), &cell, &atoms, description);
    }
    let found = symmetry::symmetrise(structure, description.tolerance)?;
    for orbit in &found.orbits {
        let position = rounded_on_element(&found.lattice, &found.group.operations, &orbit.site.position);
        atoms.push(position, &orbit.site.occupants, Some((orbit.multiplicity, orbit.wyckoff)));
    }
    let cell = WrittenCell::constrained(&found.lattice, found.group.crystal_system);
    assemble(&found.group, &cell, &atoms, description)
}

fn check(structure: &Structure) -> Result<(), WriteError> {
    if structure.sites.is_empty() {
        return Err(SymmetryError::Empty.into());
    }
    for (idx, site) in structure.sites.iter().enumerate() {
        if !site.position.0.iter().all(|x| x.is_finite()) {
            return Err(WriteError::Coordinate { site: idx + 1 });
        }
        let full = site.occupants.len() == 1 && site.occupants[0].occupancy.is_one();
        let total = if full { Amount::one() } else { site.occupants.iter().map(|o| o.occupancy).sum() };
        let positive = site.occupants.iter().all(|o| o.occupancy > Amount::zero());
        if !positive || total <= Amount::zero() || total > Amount::one() {
            return Err(WriteError::Occupancy { site: idx + 1, total });
        }
        for occupant in site.occupants.iter() {
            if occupant.species.charge.is_some_and(|q| q.unsigned_abs() > MAX_OXIDATION) {
                return Err(WriteError::Charge { species: occupant.species });
            }
        }
    }
    Ok(())
}

/// The block: audit, chemistry, cell, symmetry, atoms, in the order of the standard's own examples.
fn assemble(
    group: &SpaceGroup,
    cell: &WrittenCell,
    atoms: &AtomList<'_>,
    description: &Description,
) -> Result<String, WriteError> {
    let unit = atoms.formula_unit();
    let weight = format!("{:.3}", unit.weight());
    let volume = format!("{:.4}", cell.volume()?);
    // Density of the digits as written, so that a reader who checks finds the same.
    let density = match (weight.parse::<f64>(), volume.parse::<f64>()) {
        (Ok(weight), Ok(volume)) => DENSITY_UNIT * weight * unit.z as f64 / volume,
        _ => f64::NAN,
    };

    let mut out = format!("#\\#CIF_1.1\ndata_{}\n", block_code(&description.block_code));
    let mut item = |name: &str, value: &str| push_item(&mut out, name, value);
    item("_audit_creation_method", &description.method);
    if let Some(seconds) = &description.source_date {
        item("_audit_creation_date", &date(seconds)?);
    }
    item("_audit_conform_dict_name", "CIF_CORE");
    item("_audit_conform_dict_version", "3.4.0");
    if let Some(name) = &description.name {
        item("_chemical_name_common", name);
    }
    item("_chemical_formula_sum", &unit.sum());
    if let Some(moiety) = unit.moiety() {
        item("_chemical_formula_moiety", &moiety);
    }
    item("_chemical_formula_weight", &weight);
    for (name, value) in cell.items() {
        item(name, &value);
    }
    item("_cell_volume", &volume);
    item("_cell_formula_units_Z", &unit.z.to_string());
    item("_exptl_crystal_density_diffrn", &format!("{density:.4}"));
    item("_space_group_crystal_system", group.crystal_system);
    item("_space_group_IT_number", &group.number.to_string());
    item("_space_group_name_H-M_alt", &group.hermann_mauguin);
    // The double prime of a Hall symbol is `"` (International Tables B, 2010, table A1.4.2.5).
    item("_space_group_name_Hall", &group.hall);

    let mut notes = vec![CAUTION.to_owned()];
    notes.extend(atoms.notes());
    notes.extend(description.notes.iter().cloned());
    out.push_str("_atom_sites_special_details\n");
    out.push_str(&text_field(&notes));
    super::citation::push(&mut out, &description.citations);

    out.push_str("loop_\n_space_group_symop_id\n_space_group_symop_operation_xyz\n");
    for (idx, operation) in group.operations.iter().enumerate() {
        out.push_str(&format!("{} {operation}\n", idx + 1));
    }
    let mut bytes = out.into_bytes();
    atoms.push_types(&mut bytes);
    atoms.push_sites(&mut bytes);
    // Everything pushed is ASCII: the lossy path never copies.
    Ok(String::from_utf8(bytes).unwrap_or_else(|e| String::from_utf8_lossy(e.as_bytes()).into_owned()))
}

/// A single item; the value begins in column [`VALUE_COLUMN`] where it fits into the line.
fn push_item(out: &mut String, name: &str, value: &str) {
    match quoted(&ascii(value)) {
        Some(quoted) if VALUE_COLUMN + quoted.len() <= MAX_LINE => {
            out.push_str(&format!("{name:<VALUE_COLUMN$}{quoted}\n"));
        }
        _ => {
            out.push_str(&format!("{name}\n"));
            push_value(out, Some(value));
        }
    }
}

/// A value on a line of its own, or as a text field; `.` for one that does not apply.
pub(super) fn push_value(out: &mut String, value: Option<&str>) {
    match value.map(|value| quoted(&ascii(value))) {
        None => out.push_str(".\n"),
        Some(Some(quoted)) if quoted.len() <= MAX_LINE => out.push_str(&format!("{quoted}\n")),
        Some(_) => out.push_str(&text_field(&[value.unwrap_or_default().to_owned()])),
    }
}

/// A block code of at most [`MAX_BLOCK_CODE`] printable characters without blanks.
fn block_code(wanted: &str) -> String {
    let keep = |c: char| if c.is_ascii_graphic() { c } else { '_' };
    let code: String = wanted.chars().map(keep).take(MAX_BLOCK_CODE).collect();
    if code.is_empty() { "structure".into() } else { code }
}

/// `YYYY-MM-DD` (UTC) of a number of seconds since 1970-01-01.
fn date(seconds: &str) -> Result<String, WriteError> {
    let bad = || WriteError::Date { text: seconds.to_owned() };
    let seconds: u64 = seconds.trim().parse().map_err(|_| bad())?;
    let mut days = seconds / 86_400;
    let mut year = 1970;
    let leap = |year: u64| year.is_multiple_of(4) && (!year.is_multiple_of(100) || year.is_multiple_of(400));
    loop {
        let length = if leap(year) { 366 } else { 365 };
        if days < length {
            break;
        }
        (days, year) = (days - length, year + 1);
        if year > 9999 {
            return Err(bad());
        }
    }
    let february = if leap(year) { 29 } else { 28 };
    let mut month = 1;
    for length in [31, february, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31] {
        if days < length {
            break;
        }
        (days, month) = (days - length, month + 1);
    }
    Ok(format!("{year:04}-{month:02}-{:02}", days + 1))
}
