//! The site list of a data block, row by row.

use super::report::Report;
use super::species::{FormulaElements, Reading, of_label, of_type_symbol};
use crate::crystal::{Cartesian, Fractional, Lattice, Occupant};
use crate::format::cif::{Block, Diagnostic, Loop, Value};
use crate::ion::{Amount, Species};
use nalgebra::{Matrix3, Vector3};
use num_traits::{One, Zero};
use std::borrow::Cow;
use std::collections::{BTreeMap, HashSet};

const LABEL: [&str; 1] = ["_atom_site_label"];
const TYPE_SYMBOL: [&str; 1] = ["_atom_site_type_symbol"];
const FRACTIONAL: [&str; 3] = ["_atom_site_fract_x", "_atom_site_fract_y", "_atom_site_fract_z"];
const CARTESIAN: [&str; 3] = ["_atom_site_Cartn_x", "_atom_site_Cartn_y", "_atom_site_Cartn_z"];

/// Sums of shares up to this are rounding; beyond it a site holds more than it can.
pub(super) const MAX_SUM: (i128, i128) = (101, 100);

/// Largest coordinate accepted: cells away, not garbage.
const MAX_COORDINATE: f64 = 1e6;

/// Kinds that are compared one by one before the ordered index is asked.
const FIRST_KINDS: usize = 8;

/// A row of the site list. A list may have a million: its kinds are kept apart, and its labels stay in the text.
pub(super) struct Listed<'s> {
    pub label: Cow<'s, str>,
    pub position: Fractional,
    /// Which of the list's kinds.
    pub kind: u32,
    pub place: u32,
}

/// The rows that can be used, and the labels of those that were passed over.
pub(super) struct SiteList<'s> {
    pub sites: Vec<Listed<'s>>,
    /// Species with their shares, each once.
    pub kinds: Vec<Occupant>,
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

/// Where the coordinates of a row stand, and what makes them fractional.
enum Axes {
    Fractional([usize; 3]),
    /// Columns, and the way from the file's orthogonal axes to fractions.
    Cartesian([usize; 3], Matrix3<f64>, Vector3<f64>),
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
    let mut types = Types::new(block, formula, report);
    let mut shares = Shares::default();
    let mut kinds = Kinds::default();
    let mut list = SiteList { sites: Vec::with_capacity(table.n_rows()), kinds: Vec::new(), skipped: Vec::new() };
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
        let label = match label {
            Some(_) => head.text(),
            None => Cow::Owned(format!("{}{}", species.element, row + 1)),
        };
        let kind = kinds.of(Occupant { species, occupancy: share });
        list.sites.push(Listed { label, position, kind, place: head.place() as u32 });
    }
    list.kinds = kinds.all;
    rename_duplicates(&mut list.sites, report);
    Ok(list)
}

fn axes(
    block: &Block<'_>,
    table: &Loop<'_>,
    lattice: &Lattice,
    report: &mut Report<'_, '_>,
) -> Result<Axes, Diagnostic> {
    let columns = |names: [&'static str; 3]| {
        let found = names.map(|name| table.column(&[name]));
        match found {
            [Some(x), Some(y), Some(z)] => Ok(Some([x, y, z])),
            [None, None, None] => Ok(None),
            _ => {
                let missing = names.iter().zip(found).find(|(_, c)| c.is_none()).map_or("", |(name, _)| *name);
                let text = format!("the site list lacks `{missing}`; it needs all three coordinates");
                Err(report.error("cif::sites", report.block_place(), text))
            }
        }
    };
    if let Some(columns) = columns(FRACTIONAL)? {
        return Ok(Axes::Fractional(columns));
    }
    let Some(columns) = columns(CARTESIAN)? else {
        return Err(report.error("cif::sites", report.block_place(), "the site list holds no coordinates".into()));
    };
    // x(orthogonal) = M x(fractional) + v, with M and v stated by the file.
    let number = |name: String| block.value(&[&name]).and_then(|v| v.number()).map(|n| n.value);
    let mut matrix = Matrix3::zeros();
    let mut complete = true;
    for i in 0..3 {
        for j in 0..3 {
            match number(format!("_atom_sites_Cartn_tran_matrix_{}{}", i + 1, j + 1)) {
                Some(value) => matrix[(i, j)] = value,
                None => complete = false,
            }
        }
    }
    if !complete {
        let text = "orthogonal coordinates without `_atom_sites_Cartn_tran_matrix_*` are taken with a along x and b in the xy plane";
        report.warn("cif::orthogonal", report.block_place(), text.into());
        let origin = Vector3::zeros();
        let to_fractions = Matrix3::from_columns(
            &[Vector3::x(), Vector3::y(), Vector3::z()].map(|axis| lattice.fractional(&Cartesian(axis)).0),
        );
        return Ok(Axes::Cartesian(columns, to_fractions, origin));
    }
    let vector = [1, 2, 3].map(|i| number(format!("_atom_sites_Cartn_tran_vector_{i}")).unwrap_or(0.0));
    match matrix.try_inverse() {
        Some(inverse) => Ok(Axes::Cartesian(columns, inverse, Vector3::from(vector))),
        None => {
            let text = "`_atom_sites_Cartn_tran_matrix_*` is singular; it spans no volume".into();
            Err(report.error("cif::orthogonal", report.block_place(), text))
        }
    }
}

/// The position of a row; `None` when it is not known.
fn position(
    table: &Loop<'_>,
    row: usize,
    axes: &Axes,
    report: &Report<'_, '_>,
) -> Result<Option<Fractional>, Diagnostic> {
    let (Axes::Fractional(columns) | Axes::Cartesian(columns, ..)) = axes;
    let mut xyz = Vector3::zeros();
    for (x, column) in xyz.iter_mut().zip(columns) {
        let value = table.value(row, *column);
        match value.number() {
            Some(number) if number.value.abs() <= MAX_COORDINATE => *x = number.value,
            Some(_) => {
                let text =
                    format!("coordinate `{}` is out of range; it must be within ±{MAX_COORDINATE}", value.text());
                return Err(report.error("cif::number", value.place(), text));
            }
            None if value.is_unknown() || value.is_inapplicable() => return Ok(None),
            None => {
                let text =
                    format!("coordinate `{}` is no number; write a decimal such as 0.25 or 0.2624(3)", value.text());
                return Err(report.error("cif::number", value.place(), text));
            }
        }
    }
    Ok(Some(Fractional(match axes {
        Axes::Fractional(_) => xyz,
        Axes::Cartesian(_, to_fractions, origin) => to_fractions * (xyz - origin),
    })))
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

/// Occupancies already read, by their text: a file has few different ones.
#[derive(Default)]
struct Shares {
    last: Option<(String, Amount)>,
}

impl Shares {
    fn read(&mut self, value: Value<'_>, report: &mut Report<'_, '_>) -> Result<Amount, Diagnostic> {
        let text = value.text();
        if let Some((seen, share)) = &self.last
            && *seen == text
        {
            return Ok(*share);
        }
        if value.is_inapplicable() {
            return Ok(Amount::one());
        }
        if value.is_unknown() {
            report.warn("cif::occupancy", value.place(), "an occupancy of `?` is taken as 1".into());
            return Ok(Amount::one());
        }
        let Some(number) = value.number() else {
            report.warn(
                "cif::occupancy",
                value.place(),
                format!("the occupancy `{text}` is no number and is taken as 1"),
            );
            return Ok(Amount::one());
        };
        // More digits than an exact amount holds are rounded to 1e-9.
        let rounded = || Amount::new((number.value * 1e9).round() as i128, 1_000_000_000);
        if !(0.0..=MAX_SUM.0 as f64 / MAX_SUM.1 as f64).contains(&number.value) {
            let text = format!("the occupancy `{text}` is out of range; it must be from 0 to 1");
            return Err(report.error("cif::occupancy", value.place(), text));
        }
        let mut share = number.exact().unwrap_or_else(rounded);
        if share > Amount::one() {
            report.warn("cif::occupancy", value.place(), format!("the occupancy `{text}` is taken as 1"));
            share = Amount::one();
        }
        self.last = Some((text.into_owned(), share));
        Ok(share)
    }
}

/// Species already read, by type symbol and label.
struct Types<'f> {
    formula: &'f FormulaElements,
    oxidation: BTreeMap<String, Option<i8>>,
    known: BTreeMap<String, Species>,
    labels_only: bool,
}

impl<'f> Types<'f> {
    fn new(block: &Block<'_>, formula: &'f FormulaElements, report: &mut Report<'_, '_>) -> Self {
        Self { formula, oxidation: oxidation_numbers(block, report), known: BTreeMap::new(), labels_only: false }
    }

    fn species(
        &mut self,
        label: Option<Value<'_>>,
        type_symbol: Option<Value<'_>>,
        report: &mut Report<'_, '_>,
    ) -> Result<Species, Diagnostic> {
        let stated = type_symbol.filter(|v| !v.is_unknown() && !v.is_inapplicable());
        let Some(value) = stated.or(label) else {
            let place = type_symbol.map_or(report.block_place(), |v| v.place());
            return Err(report.error("cif::type", place, "the site has neither label nor type symbol".into()));
        };
        let text = value.text();
        if stated.is_none() && type_symbol.is_some() {
            let said = format!("`{text}` has no type symbol; its element is taken from the label");
            report.warn("cif::type", value.place(), said);
        }
        // Labels differ in their numbers; unless they end in a charge, what is before the first digit decides.
        let key = if stated.is_some() || text.ends_with(['+', '-']) {
            &text[..]
        } else {
            &text[..text.find(|c: char| !c.is_ascii_alphabetic()).unwrap_or(text.len())]
        };
        if let Some(species) = self.known.get(key) {
            return Ok(*species);
        }
        let reading =
            if stated.is_some() { of_type_symbol(&text, self.formula) } else { of_label(&text, self.formula) };
        let reading = reading.map_err(|why| {
            let what = if stated.is_some() { "type symbol" } else { "label" };
            let way = "state elements with `_atom_site_type_symbol`, such as `Fe3+` or `O2-`";
            report.error("cif::type", value.place(), format!("{what} `{text}` {why}; {way}"))
        })?;
        if stated.is_none() && type_symbol.is_none() && !self.labels_only {
            self.labels_only = true;
            report.warn(
                "cif::type",
                value.place(),
                "there are no type symbols; elements are taken from the labels".into(),
            );
        }
        let species = self.with_oxidation(&text, reading, value.place(), report);
        self.known.insert(key.to_owned(), species);
        Ok(species)
    }

    fn with_oxidation(&self, symbol: &str, reading: Reading, place: usize, report: &mut Report<'_, '_>) -> Species {
        if let Some(assumed) = reading.assumed {
            report.warn("cif::type", place, assumed);
        }
        // Files that take elements from labels may still state oxidation numbers by element.
        let stated =
            self.oxidation.get(symbol).or_else(|| self.oxidation.get(reading.element.symbol())).copied().flatten();
        if let (Some(charge), Some(number)) = (reading.charge, stated)
            && charge != number
        {
            let text = format!(
                "type `{symbol}` says {charge:+} e, its `_atom_type_oxidation_number` {number:+}; the oxidation number is used"
            );
            report.warn("cif::charge", place, text);
        }
        Species { element: reading.element, charge: stated.or(reading.charge), spin: None }
    }
}

/// `_atom_type_oxidation_number` by symbol; `None` for one that is no whole number.
fn oxidation_numbers(block: &Block<'_>, report: &mut Report<'_, '_>) -> BTreeMap<String, Option<i8>> {
    let mut numbers = BTreeMap::new();
    let Some(table) = block.table(&["_atom_type_oxidation_number"]) else { return numbers };
    let columns = (table.column(&["_atom_type_symbol"]), table.column(&["_atom_type_oxidation_number"]));
    let (Some(symbol), Some(number)) = columns else { return numbers };
    for row in 0..table.n_rows() {
        let (symbol, value) = (table.value(row, symbol).text().into_owned(), table.value(row, number));
        if value.is_unknown() || value.is_inapplicable() {
            continue;
        }
        let whole = value.number().map(|n| n.value).filter(|v| v.fract() == 0.0 && v.abs() <= 9.0);
        if whole.is_none() {
            let text = format!(
                "the oxidation number `{}` of `{symbol}` is no whole number from -9 to 9; it is taken as unknown",
                value.text()
            );
            report.warn("cif::charge", value.place(), text);
        }
        numbers.insert(symbol, whole.map(|v| v as i8));
    }
    numbers
}

/// A label that occurs again gets a suffix.
fn rename_duplicates(sites: &mut [Listed<'_>], report: &mut Report<'_, '_>) {
    if labels_ascend(sites) {
        return;
    }
    let mut seen: HashSet<Cow<'_, str>> = HashSet::with_capacity(sites.len());
    let mut next: BTreeMap<Cow<'_, str>, usize> = BTreeMap::new();
    for site in sites {
        if seen.insert(site.label.clone()) {
            continue;
        }
        let number = next.entry(site.label.clone()).or_insert(2);
        let mut renamed = format!("{}_{number}", site.label);
        while !seen.insert(Cow::Owned(renamed.clone())) {
            *number += 1;
            renamed = format!("{}_{number}", site.label);
        }
        *number += 1;
        report.warn(
            "cif::label",
            site.place as usize,
            format!("label `{}` stands twice; here it is called `{renamed}`", site.label),
        );
        site.label = Cow::Owned(renamed);
    }
}

/// Whether every label is letters and a number that grows with each use of the letters: then none stands twice, which
/// spares a large file the search.
fn labels_ascend(sites: &[Listed<'_>]) -> bool {
    let mut last: Vec<(&str, u64)> = Vec::new();
    sites.iter().all(|site| {
        let (letters, digits) = site.label.split_at(site.label.find(|c: char| c.is_ascii_digit()).unwrap_or(0));
        let number = digits.parse::<u64>().ok().filter(|_| !digits.starts_with('0') && digits.len() < 19);
        let Some(number) = number.filter(|_| last.len() < 100) else { return false };
        match last.iter_mut().find(|(seen, _)| *seen == letters) {
            Some((_, before)) => number > std::mem::replace(before, number),
            None => {
                last.push((letters, number));
                true
            }
        }
    })
}
