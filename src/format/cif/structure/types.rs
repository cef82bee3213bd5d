//! Species of listed sites, from type symbols, labels and oxidation numbers.

use super::report::Report;
use super::species::{FormulaElements, Reading, of_label, of_type_symbol};
use crate::format::cif::{Block, Diagnostic, Value};
use crate::ion::Species;
use std::collections::BTreeMap;

/// Species already read, by type symbol and label.
pub(super) struct Types<'f> {
    formula: &'f FormulaElements,
    oxidation: BTreeMap<String, Option<i8>>,
    known: BTreeMap<String, Species>,
    labels_only: bool,
}

impl<'f> Types<'f> {
    pub fn new(block: &Block<'_>, formula: &'f FormulaElements, report: &mut Report<'_, '_>) -> Self {
        Self { formula, oxidation: oxidation_numbers(block, report), known: BTreeMap::new(), labels_only: false }
    }

    pub fn species(
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
