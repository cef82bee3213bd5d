//! Writing a structure as CIF 1.1: pure ASCII, LF, the found space group in its standard setting, or P1.
//!
//! Names and meanings: the core dictionary, version 3.4.0, in the underscore spelling. Nothing is invented: no
//! uncertainties, no displacement parameters, no diffraction items. Volume, density, weight, formula and Z are computed
//! from what is written.

use crate::crystal::symmetry::{self, OrbitSite, SpaceGroup, SymmetryError};
use crate::crystal::{Lattice, Parameters, Site, Structure};
use crate::ion::amount::to_f64;
use crate::ion::{Amount, Element, Species};
use num_integer::Integer;
use num_traits::{One, Zero};
use std::collections::BTreeMap;
use std::fmt::Write as _;

/// What is written beside the structure itself.
#[derive(Clone, Debug, Default)]
pub struct Description {
    /// Block code: letters, digits, hyphens.
    pub block_code: String,
    /// How the file came to be: program, version, seed.
    pub method: String,
    /// Date `YYYY-MM-DD`, if one is to be written.
    pub date: Option<String>,
    /// Paragraphs of text for the reader.
    pub notes: Vec<String>,
    /// Write all atoms in P1 instead of the space group found.
    pub p1: bool,
    /// Distance tolerance of the symmetry search, Å.
    pub tolerance: f64,
}

/// Grams per cubic centimetre of one u per Å³ (CODATA 2018).
const DENSITY: f64 = 1.660_539_066_6;

/// Column of the values in the list of single items.
const COLUMN: usize = 33;

/// Writes the structure.
///
/// # Errors
/// [`SymmetryError`] when the space group cannot be found (never with `p1`).
pub fn write(structure: &Structure, description: &Description) -> Result<String, SymmetryError> {
    let (group, lattice, orbits) = if description.p1 {
        let orbits = structure.sites.iter().enumerate().map(|(input_site, site)| OrbitSite {
            site: site.clone(),
            multiplicity: 1,
            wyckoff: 'a',
            site_symmetry: "1".into(),
            input_site,
        });
        (SpaceGroup::p1(), structure.lattice.clone(), orbits.collect())
    } else {
        let found = symmetry::symmetrise(structure, description.tolerance)?;
        (found.group, found.lattice, found.orbits)
    };
    let mut out = String::with_capacity(1000 + 60 * orbits.len());
    heading(&mut out, description);
    chemistry(&mut out, &orbits);
    cell(&mut out, &lattice, &group, &orbits);
    space_group(&mut out, &group);
    atom_types(&mut out, &orbits);
    atom_sites(&mut out, &orbits);
    Ok(out)
}

fn item(out: &mut String, name: &str, value: &str) {
    let _ = writeln!(out, "{name:<COLUMN$}{value}");
}

/// A value as the grammar needs it: bare, quoted, or a text field.
fn quoted(text: &str) -> String {
    let reserved = ["data_", "save_", "loop_", "stop_", "global_"];
    let lower = text.to_ascii_lowercase();
    let bare = !text.is_empty()
        && !text.starts_with(['_', '#', '$', '\'', '"', '[', ']', ';'])
        && !text.contains(char::is_whitespace)
        && !reserved.iter().any(|r| lower.starts_with(r))
        && text != "?"
        && text != ".";
    if bare {
        text.into()
    } else if !text.contains(['\'', '\n']) {
        format!("'{text}'")
    } else if !text.contains(['"', '\n']) {
        format!("\"{text}\"")
    } else {
        format!("\n;{}\n;", text.replace("\n;", "\n ;"))
    }
}

/// ASCII for every character: what a CIF 1.1 cannot hold is spelt out.
fn ascii(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            'Å' => out.push_str("\\%A"),
            '□' => out.push_str("[]"),
            '–' | '−' => out.push('-'),
            c if c.is_ascii() && (!c.is_control() || c == '\n') => out.push(c),
            _ => out.push('?'),
        }
    }
    out
}

/// Lines of at most 80 characters.
fn wrapped(text: &str) -> String {
    let mut out = String::new();
    let mut length = 0;
    for word in text.split_whitespace() {
        if length > 0 && length + 1 + word.len() > 78 {
            out.push('\n');
            length = 0;
        }
        if length > 0 {
            out.push(' ');
            length += 1;
        }
        out.push_str(word);
        length += word.len();
    }
    out
}

fn heading(out: &mut String, description: &Description) {
    let code: String = description
        .block_code
        .chars()
        .filter(|c| c.is_ascii_alphanumeric() || *c == '-' || *c == '_')
        .take(75)
        .collect();
    let _ = writeln!(out, "#\\#CIF_1.1\ndata_{}", if code.is_empty() { "cell" } else { &code });
    item(out, "_audit_creation_method", &quoted(&ascii(&description.method)));
    if let Some(date) = &description.date {
        item(out, "_audit_creation_date", &quoted(date));
    }
    item(out, "_audit_conform_dict_name", "CIF_CORE");
    item(out, "_audit_conform_dict_version", "3.4.0");
    if !description.notes.is_empty() {
        let text: Vec<String> = description.notes.iter().map(|n| wrapped(&ascii(n))).collect();
        let _ = writeln!(out, "_publ_section_comment\n;\n{}\n;", text.join("\n").replace("\n;", "\n ;"));
    }
}

/// Amounts in the conventional cell.
fn contents(orbits: &[OrbitSite]) -> (BTreeMap<Species, Amount>, BTreeMap<Element, Amount>) {
    let (mut species, mut elements) = (BTreeMap::new(), BTreeMap::new());
    for orbit in orbits {
        for occupant in &orbit.site.occupants {
            let amount = occupant.occupancy * orbit.multiplicity as i128;
            let plain = Species { spin: None, ..occupant.species };
            *species.entry(plain).or_insert_with(Amount::zero) += amount;
            *elements.entry(occupant.species.element).or_insert_with(Amount::zero) += amount;
        }
    }
    (species, elements)
}

/// Formula units of the cell: the greatest common divisor of whole amounts; for fractional ones, of their whole parts'
/// site counts, so that the sum formula keeps the dopant's fraction.
fn formula_units(elements: &BTreeMap<Element, Amount>, orbits: &[OrbitSite]) -> i128 {
    if elements.values().all(Amount::is_integer) {
        elements.values().fold(0, |d, a| d.gcd(a.numer())).max(1)
    } else {
        orbits.iter().fold(0, |d: i128, o| d.gcd(&(o.multiplicity as i128))).max(1)
    }
}

/// A decimal of at most 8 digits without trailing zeros.
fn decimal(amount: &Amount) -> String {
    let text = format!("{:.8}", to_f64(amount));
    text.trim_end_matches('0').trim_end_matches('.').to_string()
}

fn chemistry(out: &mut String, orbits: &[OrbitSite]) {
    let (species, elements) = contents(orbits);
    let z = formula_units(&elements, orbits);
    let term = |name: &str, amount: &Amount| {
        let share = amount / z;
        if share.is_one() { name.to_string() } else { format!("{name}{}", decimal(&share)) }
    };
    // Hill order: carbon, hydrogen, then the rest by symbol; without carbon strictly by symbol.
    let mut order: Vec<(&Element, &Amount)> = elements.iter().collect();
    let carbon = elements.keys().any(|e| e.symbol() == "C");
    order.sort_by_key(|(e, _)| {
        let first = if carbon {
            match e.symbol() {
                "C" => 0,
                "H" => 1,
                _ => 2,
            }
        } else {
            2
        };
        (first, e.symbol())
    });
    let sum: Vec<String> = order.iter().map(|(e, a)| term(e.symbol(), a)).collect();
    item(out, "_chemical_formula_sum", &quoted(&sum.join(" ")));
    if species.keys().all(|s| s.charge.is_some_and(|q| q != 0)) {
        let mut ions: Vec<(Species, Amount)> = species.into_iter().collect();
        ions.sort_by_key(|(s, _)| (s.charge < Some(0), s.element.symbol(), s.charge));
        let moieties: Vec<String> = ions
            .iter()
            .map(|(s, amount)| {
                let q = s.charge.unwrap_or_default();
                let ion = format!("{} {}{}", s.element, q.abs(), if q < 0 { '-' } else { '+' });
                let share = amount / z;
                if share.is_one() { ion } else { format!("({ion}){}", decimal(&share)) }
            })
            .collect();
        item(out, "_chemical_formula_moiety", &text_item(&moieties.join(", ")));
    }
    item(out, "_chemical_formula_weight", &format!("{:.3}", weight(&elements) / z as f64));
}

/// A value that may be too long for its line.
fn text_item(text: &str) -> String {
    if text.len() + COLUMN > 78 { format!("\n;{}\n;", wrapped(text)) } else { quoted(text) }
}

fn weight(elements: &BTreeMap<Element, Amount>) -> f64 {
    elements.iter().map(|(e, a)| e.weight() * to_f64(a)).sum()
}

/// The parameters with the equalities that the crystal system demands made exact, as they will be written.
fn constrained(lattice: &Lattice, system: &str) -> Parameters {
    let p = lattice.parameters();
    let round = |x: f64| (x * 1e6).round() / 1e6;
    let (a, b, c) = (round(p.a), round(p.b), round(p.c));
    match system {
        "cubic" => Parameters { a, b: a, c: a, alpha: 90.0, beta: 90.0, gamma: 90.0 },
        "tetragonal" => Parameters { a, b: a, c, alpha: 90.0, beta: 90.0, gamma: 90.0 },
        "hexagonal" | "trigonal" => Parameters { a, b: a, c, alpha: 90.0, beta: 90.0, gamma: 120.0 },
        "orthorhombic" => Parameters { a, b, c, alpha: 90.0, beta: 90.0, gamma: 90.0 },
        "monoclinic" => Parameters { a, b, c, alpha: 90.0, beta: round(p.beta), gamma: 90.0 },
        _ => Parameters { a, b, c, alpha: round(p.alpha), beta: round(p.beta), gamma: round(p.gamma) },
    }
}

fn cell(out: &mut String, lattice: &Lattice, group: &SpaceGroup, orbits: &[OrbitSite]) {
    let p = constrained(lattice, group.crystal_system);
    let number = |x: f64, digits: usize| {
        let text = format!("{x:.digits$}");
        if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.').to_string() } else { text }
    };
    for (name, value) in [("a", p.a), ("b", p.b), ("c", p.c)] {
        item(out, &format!("_cell_length_{name}"), &number(value, 6));
    }
    for (name, value) in [("alpha", p.alpha), ("beta", p.beta), ("gamma", p.gamma)] {
        item(out, &format!("_cell_angle_{name}"), &number(value, 6));
    }
    // From the digits written, so that a reader finds the same.
    let volume = Lattice::from_parameters(&p).map_or_else(|_| lattice.volume(), |l| l.volume());
    item(out, "_cell_volume", &format!("{volume:.4}"));
    let (_, elements) = contents(orbits);
    item(out, "_cell_formula_units_Z", &formula_units(&elements, orbits).to_string());
    item(out, "_exptl_crystal_density_diffrn", &format!("{:.4}", weight(&elements) * DENSITY / volume));
}

fn space_group(out: &mut String, group: &SpaceGroup) {
    item(out, "_space_group_crystal_system", group.crystal_system);
    item(out, "_space_group_IT_number", &group.number.to_string());
    item(out, "_space_group_name_H-M_alt", &format!("'{}'", group.hermann_mauguin));
    // Some Hall symbols hold a double quote: single ones are always right.
    item(out, "_space_group_name_Hall", &format!("'{}'", group.hall));
    out.push_str("loop_\n_space_group_symop_id\n_space_group_symop_operation_xyz\n");
    for (number, operation) in group.operations.iter().enumerate() {
        let _ = writeln!(out, "{} {operation}", number + 1);
    }
}

/// Type symbol with the charge, digits before the sign; an unknown charge is left out.
fn type_symbol(species: &Species) -> String {
    match species.charge {
        Some(q) if q != 0 => format!("{}{}{}", species.element, q.abs(), if q < 0 { '-' } else { '+' }),
        _ => species.element.symbol().to_string(),
    }
}

fn atom_types(out: &mut String, orbits: &[OrbitSite]) {
    let mut types: BTreeMap<String, Option<i8>> = BTreeMap::new();
    for occupant in orbits.iter().flat_map(|o| &o.site.occupants) {
        types.insert(type_symbol(&occupant.species), occupant.species.charge);
    }
    let charged = types.values().any(Option::is_some);
    out.push_str("loop_\n_atom_type_symbol\n");
    if charged {
        out.push_str("_atom_type_oxidation_number\n");
    }
    for (symbol, charge) in types {
        let _ = match charge {
            Some(q) if charged => writeln!(out, "{symbol} {q}"),
            None if charged => writeln!(out, "{symbol} ?"),
            _ => writeln!(out, "{symbol}"),
        };
    }
}

fn atom_sites(out: &mut String, orbits: &[OrbitSite]) {
    let shared = |site: &Site| site.occupants.len() > 1;
    let any_shared = orbits.iter().any(|o| shared(&o.site));
    out.push_str(
        "loop_\n_atom_site_label\n_atom_site_type_symbol\n_atom_site_fract_x\n_atom_site_fract_y\n_atom_site_fract_z\n\
         _atom_site_occupancy\n_atom_site_site_symmetry_multiplicity\n_atom_site_Wyckoff_symbol\n_atom_site_calc_flag\n",
    );
    if any_shared {
        out.push_str("_atom_site_disorder_assembly\n_atom_site_disorder_group\n");
    }
    let mut order: Vec<&OrbitSite> = orbits.iter().collect();
    let key = |o: &OrbitSite| {
        let first = o.site.occupants.first().map(|x| x.species);
        (first.is_some_and(|s| s.charge < Some(0)), first.map(|s| (s.element.symbol(), s.charge)))
    };
    order.sort_by(|a, b| key(a).cmp(&key(b)));
    let mut numbers: BTreeMap<Element, usize> = BTreeMap::new();
    let mut assembly = 0;
    for orbit in order {
        assembly += usize::from(shared(&orbit.site));
        for (group, occupant) in orbit.site.occupants.iter().enumerate() {
            let number = numbers.entry(occupant.species.element).or_insert(0);
            *number += 1;
            let _ = write!(out, "{}{number} {}", occupant.species.element, type_symbol(&occupant.species));
            for x in orbit.site.position.0.iter() {
                let _ = write!(out, " {}", coordinate(*x));
            }
            // The 27th letter is \a in CIF 1.1.
            let letter = if orbit.wyckoff.is_ascii_lowercase() { orbit.wyckoff.to_string() } else { "\\a".into() };
            let _ = write!(out, " {} {} {letter} calc", decimal(&occupant.occupancy), orbit.multiplicity);
            if any_shared {
                let _ = match shared(&orbit.site) {
                    true => write!(out, " S{assembly} {}", group + 1),
                    false => write!(out, " . ."),
                };
            }
            out.push('\n');
        }
    }
}

/// Eight decimals in [0, 1): neither -0 nor 1.00000000.
fn coordinate(x: f64) -> String {
    let text = format!("{:.8}", x.rem_euclid(1.0));
    if text.starts_with('1') { "0.00000000".into() } else { text }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn values_are_quoted_as_the_grammar_needs() {
        for (text, want) in [
            ("cubic", "cubic"),
            ("F d -3 m", "'F d -3 m'"),
            ("?", "'?'"),
            ("", "''"),
            ("data_x", "'data_x'"),
            ("_x", "'_x'"),
            ("it's", "it's"),
            ("it's so", "\"it's so\""),
        ] {
            assert_eq!(quoted(text), want);
        }
        assert_eq!(coordinate(-1e-17), "0.00000000");
        assert_eq!(coordinate(0.999_999_999), "0.00000000");
        assert_eq!(decimal(&Amount::new(19, 20)), "0.95");
        assert_eq!(ascii("3 Å □"), "3 \\%A []");
    }
}
