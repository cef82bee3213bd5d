//! A data block as a crystal structure: cell, symmetry, sites with their occupants.
//!
//! Order of trust for the symmetry: listed operations, Hall symbol, Hermann–Mauguin symbol, number. Positions are set
//! on the symmetry element they lie on; images within [`MERGE`] are one site. What was assumed is said in a warning.

use super::document::{Block, Document, Loop, Value};
use super::{CifError, symbols};
use crate::crystal::symmetry::{Operation, on_symmetry_element, orbit};
use crate::crystal::{Fractional, Lattice, Occupant, Parameters, Site, Structure};
use crate::ion::{Amount, Element, Species};
use num_traits::{One, Zero};
use std::collections::BTreeMap;

/// Images nearer than this are one site, Å.
pub const MERGE: f64 = 0.01;

/// Listed sites nearer than this share a position if their occupancies allow it, Å.
pub const SHARED: f64 = 0.05;

/// Most sites of an expanded cell.
pub const MAX_SITES: usize = 5_000_000;

/// A structure as a file describes it.
#[derive(Clone, Debug)]
pub struct ReadStructure {
    /// Code of the data block.
    pub block: String,
    /// Every site of the cell.
    pub structure: Structure,
    /// For each site, the label of the listed atom that it comes from (the first, where several share it).
    pub labels: Vec<String>,
    /// Operations used.
    pub operations: Vec<Operation>,
    /// Space-group symbol as the file writes it.
    pub symbol: Option<String>,
    /// What was assumed or repaired.
    pub warnings: Vec<CifError>,
}

/// The structures of all blocks that list atoms, in order.
pub fn read_structures(document: &Document<'_>) -> Vec<Result<ReadStructure, CifError>> {
    document.blocks.iter().filter(|b| b.table(FRACT_X).is_some()).map(|b| read(document, b)).collect()
}

const FRACT_X: &[&str] = &["_atom_site_fract_x"];

fn read(document: &Document<'_>, block: &Block<'_>) -> Result<ReadStructure, CifError> {
    let mut warnings = Vec::new();
    let lattice = cell(document, block)?;
    let symbol = block
        .value(&["_space_group_name_H-M_alt", "_symmetry_space_group_name_H-M", "_space_group_name_H-M_full"])
        .filter(Value::is_given);
    let operations = operations(document, block, symbol, &mut warnings)?;
    check_metric(document, block, &lattice, &operations)?;
    let table = block.table(FRACT_X).ok_or_else(|| document.fault(block.offset, "no atoms"))?;
    let charges = oxidation_numbers(block);
    let listed = listed_sites(document, &table, &charges, &mut warnings)?;
    let (structure, labels) = expand(document, lattice, &operations, listed, &mut warnings)?;
    Ok(ReadStructure {
        block: block.code.to_string(),
        structure,
        labels,
        operations,
        symbol: symbol.map(|v| v.text.to_string()),
        warnings,
    })
}

fn cell(document: &Document<'_>, block: &Block<'_>) -> Result<Lattice, CifError> {
    let mut offset = block.offset;
    let mut get = |name: &str| {
        let value = block
            .value(&[name])
            .ok_or_else(|| document.fault(block.offset, format!("block `{}` has atoms but no `{name}`", block.code)))?;
        offset = value.offset;
        value
            .number()
            .map(|n| n.value)
            .ok_or_else(|| document.fault(value.offset, format!("`{}` is no number for `{name}`", value.text)))
    };
    let parameters = Parameters {
        a: get("_cell_length_a")?,
        b: get("_cell_length_b")?,
        c: get("_cell_length_c")?,
        alpha: get("_cell_angle_alpha")?,
        beta: get("_cell_angle_beta")?,
        gamma: get("_cell_angle_gamma")?,
    };
    Lattice::from_parameters(&parameters).map_err(|e| document.fault(offset, e.to_string()))
}

const OPERATION: &[&str] = &["_space_group_symop_operation_xyz", "_symmetry_equiv_pos_as_xyz"];

fn operations(
    document: &Document<'_>,
    block: &Block<'_>,
    symbol: Option<Value<'_>>,
    warnings: &mut Vec<CifError>,
) -> Result<Vec<Operation>, CifError> {
    if let Some(table) = block.table(OPERATION) {
        let column = table.column(OPERATION).unwrap_or(0);
        let mut operations = Vec::new();
        for row in table.rows() {
            let value = row[column];
            let found = symbols::operation(value.text).ok_or_else(|| {
                document.fault(
                    value.offset,
                    format!("`{}` is no symmetry operation; write for example -x+1/2,y,z", value.text),
                )
            })?;
            operations.push(found);
        }
        let added = close(&mut operations).ok_or_else(|| {
            document.fault(table.values[0].offset, "the operations listed do not belong to one space group")
        })?;
        if added > 0 {
            let message = format!("the operations listed are no whole group; {added} were added to close it");
            warnings.push(document.fault(table.values[0].offset, message));
        }
        if let Some(value) = symbol {
            let named = symbols::from_hermann_mauguin(value.text).map(|(g, _)| g.operations.len());
            if named.is_some_and(|n| n != operations.len()) {
                let message = format!(
                    "`{}` has {} operations in its standard setting, {} are listed; the list is used",
                    value.text,
                    named.unwrap_or_default(),
                    operations.len()
                );
                warnings.push(document.fault(value.offset, message));
            }
        }
        return Ok(operations);
    }
    if let Some(value) =
        block.value(&["_space_group_name_Hall", "_symmetry_space_group_name_Hall"]).filter(Value::is_given)
    {
        match symbols::from_hall(value.text) {
            Some(operations) => return Ok(operations),
            None => {
                warnings.push(document.fault(value.offset, format!("`{}` is no Hall symbol; passed over", value.text)))
            }
        }
    }
    if let Some(value) = symbol {
        match symbols::from_hermann_mauguin(value.text) {
            Some((group, note)) => {
                let assumed = note.map_or(String::new(), |n| format!(", {n}"));
                let message = format!("no operations are listed; those of `{}` are used{assumed}", value.text);
                warnings.push(document.fault(value.offset, message));
                return Ok(group.operations);
            }
            None => {
                warnings.push(
                    document.fault(value.offset, format!("`{}` is no space-group symbol known here", value.text)),
                );
            }
        }
    }
    if let Some(value) = block.value(&["_space_group_IT_number", "_symmetry_Int_Tables_number"]).filter(Value::is_given)
        && let Some(group) = value.text.parse().ok().and_then(symbols::from_number)
    {
        let message =
            format!("only the number {} is given; its standard setting `{}` is used", group.number, group.hall);
        warnings.push(document.fault(value.offset, message));
        return Ok(group.operations);
    }
    Err(document
        .fault(block.offset, format!("block `{}` states no symmetry: no operations, no symbol, no number", block.code)))
}

/// Largest order of a space group's operations in a conventional cell.
const MAX_OPERATIONS: usize = 192;

/// Completes a list to a group; how many were added, or `None` if it grows beyond any space group.
fn close(operations: &mut Vec<Operation>) -> Option<usize> {
    type Key = ([i32; 9], [i64; 3]);
    let key = |op: &Operation| -> Key {
        let mut rotation = [0; 9];
        rotation.copy_from_slice(op.rotation.as_slice());
        let t = op.translation.map(|x| (x * 1e4).round() as i64 % 10_000);
        (rotation, [t.x, t.y, t.z])
    };
    let product = |a: &Operation, b: &Operation| Operation {
        rotation: a.rotation * b.rotation,
        translation: Fractional(a.rotation.map(f64::from) * b.translation + a.translation)
            .reduced()
            .0
            .map(|x| if x > 1.0 - 1e-6 { 0.0 } else { x }),
    };
    let mut seen: BTreeMap<Key, ()> = BTreeMap::new();
    operations.retain(|op| seen.insert(key(op), ()).is_none());
    let listed = operations.len();
    let generators = operations.clone();
    if seen.insert(key(&Operation::identity()), ()).is_none() {
        operations.insert(0, Operation::identity());
    }
    let mut next = 0;
    while next < operations.len() {
        for generator in &generators {
            let found = product(&operations[next], generator);
            if seen.insert(key(&found), ()).is_none() {
                operations.push(found);
                if operations.len() > MAX_OPERATIONS {
                    return None;
                }
            }
        }
        next += 1;
    }
    Some(operations.len() - listed)
}

/// Every operation keeps the metric: Wᵀ G W = G.
fn check_metric(
    document: &Document<'_>,
    block: &Block<'_>,
    lattice: &Lattice,
    operations: &[Operation],
) -> Result<(), CifError> {
    const TOLERANCE: f64 = 5e-3;
    let g = lattice.metric();
    for operation in operations {
        let w = operation.rotation.map(f64::from);
        if (w.transpose() * g * w - g).amax() > TOLERANCE * g.amax() {
            let message = format!("the operation `{operation}` does not fit the cell of block `{}`", block.code);
            return Err(document.fault(block.offset, message));
        }
    }
    Ok(())
}

/// Charges by type symbol, from the loop of atom types.
fn oxidation_numbers(block: &Block<'_>) -> BTreeMap<String, i8> {
    let mut charges = BTreeMap::new();
    let Some(table) = block.table(&["_atom_type_oxidation_number"]) else { return charges };
    let columns = (table.column(&["_atom_type_symbol"]), table.column(&["_atom_type_oxidation_number"]));
    let (Some(symbol), Some(number)) = columns else { return charges };
    for row in table.rows() {
        if let Some(n) = row[number].number().filter(|n| n.value.fract() == 0.0 && n.value.abs() <= 8.0) {
            charges.insert(row[symbol].text.to_string(), n.value as i8);
        }
    }
    charges
}

struct Listed {
    label: String,
    position: Fractional,
    occupant: Occupant,
    offset: usize,
}

fn listed_sites(
    document: &Document<'_>,
    table: &Loop<'_>,
    charges: &BTreeMap<String, i8>,
    warnings: &mut Vec<CifError>,
) -> Result<Vec<Listed>, CifError> {
    let column = |name: &str| table.column(&[name]);
    let missing = |name: &str| document.fault(table.values[0].offset, format!("the atoms have no `{name}`"));
    let axes = ["_atom_site_fract_x", "_atom_site_fract_y", "_atom_site_fract_z"];
    let axes = [
        column(axes[0]).ok_or_else(|| missing(axes[0]))?,
        column(axes[1]).ok_or_else(|| missing(axes[1]))?,
        column(axes[2]).ok_or_else(|| missing(axes[2]))?,
    ];
    let (label, kind, occupancy) =
        (column("_atom_site_label"), column("_atom_site_type_symbol"), column("_atom_site_occupancy"));
    if label.or(kind).is_none() {
        return Err(missing("_atom_site_label"));
    }
    let mut sites = Vec::with_capacity(table.rows().len());
    for row in table.rows() {
        let name = label.map_or("", |c| row[c].text);
        let coordinates = axes.map(|c| row[c]);
        if let Some(absent) = coordinates.iter().find(|v| !v.is_given()) {
            warnings.push(document.fault(absent.offset, format!("site `{name}` has no coordinates and is left out")));
            continue;
        }
        let mut x = [0.0; 3];
        for (x, value) in x.iter_mut().zip(coordinates) {
            *x = value.number().map(|n| n.value).filter(|v| v.abs() < 1e6).ok_or_else(|| {
                document.fault(value.offset, format!("`{}` is no fractional coordinate; write a decimal", value.text))
            })?;
        }
        let source = kind.map(|c| row[c]).filter(Value::is_given).or(label.map(|c| row[c])).unwrap_or(row[axes[0]]);
        let mut species = species(source.text)
            .ok_or_else(|| document.fault(source.offset, format!("`{}` names no element", source.text)))?;
        if species.charge.is_none() {
            species.charge = charges.get(source.text).copied();
        }
        let share = match occupancy.map(|c| row[c]).filter(|v| !v.is_inapplicable()) {
            None => Amount::one(),
            Some(value) if value.is_unknown() => {
                warnings.push(
                    document.fault(value.offset, format!("the occupancy of `{name}` is not known; 1 is assumed")),
                );
                Amount::one()
            }
            Some(value) => {
                value.exact().filter(|a| *a >= Amount::zero() && *a <= Amount::from(2)).ok_or_else(|| {
                    document
                        .fault(value.offset, format!("`{}` is no occupancy; write a decimal from 0 to 1", value.text))
                })?
            }
        };
        if share.is_zero() {
            warnings
                .push(document.fault(row[axes[0]].offset, format!("site `{name}` has occupancy 0 and is left out")));
            continue;
        }
        sites.push(Listed {
            label: name.to_string(),
            position: Fractional::new(x[0], x[1], x[2]).reduced(),
            occupant: Occupant { species, occupancy: share },
            offset: row[axes[0]].offset,
        });
    }
    if sites.is_empty() {
        return Err(document.fault(table.values[0].offset, "no site has coordinates"));
    }
    Ok(sites)
}

/// Element and charge of a type symbol or label: `Fe3+`, `O2-`, `Fe+3`, `Cl-`, `Mg`, `Fe1`, `D`.
fn species(text: &str) -> Option<Species> {
    let letters: String = text.chars().take_while(char::is_ascii_alphabetic).take(2).collect();
    let proper = |s: &str| {
        let mut c = s.chars();
        c.next().map(|f| f.to_ascii_uppercase().to_string() + &c.as_str().to_ascii_lowercase()).unwrap_or_default()
    };
    // `Co` before `C`; `CO`, all capitals, only if `C` alone fails to be meant: a type symbol is written properly.
    let (element, used) = [2, 1].into_iter().filter_map(|n| letters.get(..n)).find_map(|s| {
        let named =
            if s.eq_ignore_ascii_case("D") || s.eq_ignore_ascii_case("T") { "H".to_string() } else { proper(s) };
        Element::from_symbol(&named).map(|e| (e, s.len()))
    })?;
    let tail = &text[used..];
    let digits: String = tail.chars().filter(char::is_ascii_digit).collect();
    let sign = if tail.contains('+') { 1 } else { -1 };
    let charge = if tail.chars().all(|c| c.is_ascii_digit() || c == '+' || c == '-') && tail.contains(['+', '-']) {
        let signs = tail.chars().filter(|c| !c.is_ascii_digit()).count() as i8;
        let size = if digits.is_empty() { Some(signs) } else { digits.parse().ok() };
        size.filter(|n| *n <= 8).map(|n: i8| sign * n)
    } else {
        None
    };
    Some(Species { element, charge, spin: None })
}

fn expand(
    document: &Document<'_>,
    lattice: Lattice,
    operations: &[Operation],
    listed: Vec<Listed>,
    warnings: &mut Vec<CifError>,
) -> Result<(Structure, Vec<String>), CifError> {
    if listed.len().saturating_mul(operations.len()) > MAX_SITES * 4 {
        return Err(document.fault(listed[0].offset, format!("more than {MAX_SITES} sites in the cell")));
    }
    let mut groups: Vec<(Listed, Vec<Occupant>)> = Vec::new();
    // Only sites that are part empty can share a position; full ones, the many, need no search.
    let mut partial: Vec<usize> = Vec::new();
    for site in listed {
        let exact = on_symmetry_element(&lattice, operations, &site.position);
        let shift = lattice.distance(&exact, &site.position);
        if shift > 2e-3 {
            let message = format!("site `{}` lies {shift:.4} Å from its special position and is set on it", site.label);
            warnings.push(document.fault(site.offset, message));
        }
        let site = Listed { position: exact, ..site };
        if site.occupant.occupancy < Amount::one() {
            let same = partial.iter().copied().find(|g| lattice.distance(&groups[*g].0.position, &exact) < SHARED);
            if let Some(group) = same {
                groups[group].1.push(site.occupant);
                continue;
            }
            partial.push(groups.len());
        }
        let occupant = site.occupant;
        groups.push((site, vec![occupant]));
    }
    let (mut sites, mut labels) = (Vec::with_capacity(groups.len()), Vec::with_capacity(groups.len()));
    for (site, occupants) in groups {
        let images = if operations.len() == 1 {
            vec![site.position]
        } else {
            orbit(&lattice, operations, &site.position, MERGE)
        };
        for position in images {
            sites.push(Site { position, occupants: occupants.clone() });
            labels.push(site.label.clone());
        }
        if sites.len() > MAX_SITES {
            return Err(document.fault(site.offset, format!("more than {MAX_SITES} sites in the cell")));
        }
    }
    Ok((Structure { lattice, sites }, labels))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn type_symbols_are_read_as_files_write_them() {
        for (text, symbol, charge) in [
            ("Fe3+", "Fe", Some(3)),
            ("O2-", "O", Some(-2)),
            ("Fe+3", "Fe", Some(3)),
            ("Cl-", "Cl", Some(-1)),
            ("O--", "O", Some(-2)),
            ("Na1+", "Na", Some(1)),
            ("Mg", "Mg", None),
            ("Fe12", "Fe", None),
            ("D", "H", None),
            ("O1A", "O", None),
        ] {
            let s = species(text).unwrap();
            assert_eq!((s.element.symbol(), s.charge), (symbol, charge), "{text}");
        }
        assert!(species("Xx1").is_none() && species("").is_none());
    }

    /// Rock salt by its symbol alone, in the old spelling: eight atoms.
    #[test]
    fn a_symbol_alone_is_enough_and_is_warned_of() {
        let text = "data_x\n_cell_length_a 5.64(1)\n_cell_length_b 5.64\n_cell_length_c 5.64\n_cell_angle_alpha 90\n\
            _cell_angle_beta 90\n_cell_angle_gamma 90\n_symmetry_space_group_name_H-M 'F m 3 m'\nloop_\n_atom_site_label\n\
            _atom_site_fract_x\n_atom_site_fract_y\n_atom_site_fract_z\nNa1 0 0 0\nCl1 0.5001 .5 1/2\n";
        let wrong = Document::parse(text).unwrap();
        let error = read_structures(&wrong).remove(0).unwrap_err();
        assert_eq!((error.line, error.column), (15, 15), "{error}");
        let text = text.replace("1/2", ".5");
        let document = Document::parse(&text).unwrap();
        let read = read_structures(&document).remove(0).unwrap();
        assert_eq!(read.structure.sites.len(), 8);
        assert!(read.warnings.iter().any(|w| w.message.contains("no operations are listed")));
        assert!((read.structure.sites[4].position.0.x * 2.0).fract().abs() < 1e-12);
    }

    #[test]
    fn incomplete_operations_are_closed() {
        let mut ops = vec![
            symbols::operation("x,y,z").unwrap(),
            symbols::operation("-x,-y,-z").unwrap(),
            symbols::operation("x+1/2,y+1/2,z").unwrap(),
        ];
        assert_eq!(close(&mut ops), Some(1));
        let mut wild = vec![symbols::operation("x+0.013,y,z").unwrap()];
        assert_eq!(close(&mut wild), None, "a translation of no crystal");
    }
}
