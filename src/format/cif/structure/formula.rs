//! `_chemical_formula_sum` as files write it, for checks only: amounts of elements as `f64`.

use super::report::Report;
use super::species::FormulaElements;
use crate::crystal::{Occupant, Structure};
use crate::ion::amount::to_f64;
use crate::ion::{Amount, Element};
use std::collections::{BTreeMap, BTreeSet, HashMap};

/// Amounts in the cell and in the formula times Z may differ by this share.
const FORMULA_TOLERANCE: f64 = 0.01;

/// Deepest nesting of parentheses that is read.
const MAX_DEPTH: usize = 8;

/// Amounts of the elements in one formula unit.
pub type Amounts = BTreeMap<Element, f64>;

/// Reads `Al2 Mg O4`, `Al2MgO4`, `Na.35 (Al1.6 Mg.4)2 O3`, `Fe1/3 O`; deuterium counts as hydrogen. `None` for anything
/// else, charges among it.
pub fn parse(text: &str) -> Option<Amounts> {
    // Sums of the open groups, innermost last.
    let mut open = vec![Amounts::new()];
    let bytes = text.as_bytes();
    let mut at = 0;
    while at < bytes.len() {
        match bytes[at] {
            b' ' | b'\t' | b'\n' | b'\r' | b',' => at += 1,
            b'(' | b'[' => {
                open.push(Amounts::new());
                at += 1;
                if open.len() > MAX_DEPTH {
                    return None;
                }
            }
            b')' | b']' => {
                let group = if open.len() > 1 { open.pop()? } else { return None };
                let (count, next) = count(bytes, at + 1)?;
                at = next;
                let outer = open.last_mut()?;
                for (element, amount) in group {
                    *outer.entry(element).or_insert(0.0) += amount * count;
                }
            }
            c if c.is_ascii_uppercase() => {
                let long = bytes.get(at + 1).is_some_and(u8::is_ascii_lowercase);
                let symbol = std::str::from_utf8(&bytes[at..at + 1 + usize::from(long)]).ok()?;
                let element = Element::from_symbol(if symbol == "D" { "H" } else { symbol })?;
                let (count, next) = count(bytes, at + symbol.len())?;
                at = next;
                *open.last_mut()?.entry(element).or_insert(0.0) += count;
            }
            _ => return None,
        }
    }
    let amounts = open.pop().filter(|_| open.is_empty())?;
    (!amounts.is_empty()).then_some(amounts)
}

/// A count at `at` (1 when there is none), and where it ends.
fn count(bytes: &[u8], at: usize) -> Option<(f64, usize)> {
    let digits = bytes[at..].iter().take_while(|b| b.is_ascii_digit() || matches!(b, b'.' | b'/')).count();
    let text = std::str::from_utf8(&bytes[at..at + digits]).ok()?;
    let value = match text.split_once('/') {
        _ if text.is_empty() => 1.0,
        Some((n, d)) => n.parse::<f64>().ok()? / d.parse::<f64>().ok()?,
        None => text.parse().ok()?,
    };
    value.is_finite().then_some((value, at + digits))
}

/// The elements of a formula.
pub fn elements(amounts: Option<&Amounts>) -> FormulaElements {
    amounts.map(|a| a.keys().copied().collect()).unwrap_or_default()
}

/// Hill order with decimals trimmed: how a formula is shown in a message.
pub fn shown(amounts: &Amounts) -> String {
    let mut parts: Vec<String> = amounts
        .iter()
        .filter(|(_, amount)| **amount > 1e-9)
        .map(|(element, amount)| {
            let count = format!("{amount:.4}");
            let count = count.trim_end_matches('0').trim_end_matches('.');
            format!("{element}{}", if count == "1" { "" } else { count })
        })
        .collect();
    parts.sort();
    parts.join(" ")
}

/// Amounts of the elements in the cell.
fn contents(structure: &Structure) -> Amounts {
    // Sites of a kind share their occupants: those are counted first.
    let mut alike: HashMap<*const Occupant, (&[Occupant], usize)> = HashMap::new();
    for site in &structure.sites {
        alike.entry(site.occupants.as_ptr()).or_insert((&site.occupants, 0)).1 += 1;
    }
    let mut shares: BTreeMap<Element, BTreeMap<Amount, usize>> = BTreeMap::new();
    for (occupants, n) in alike.into_values() {
        for occupant in occupants {
            *shares.entry(occupant.species.element).or_default().entry(occupant.occupancy).or_insert(0) += n;
        }
    }
    let total = |counts: BTreeMap<Amount, usize>| counts.iter().map(|(share, n)| to_f64(share) * *n as f64).sum();
    shares.into_iter().map(|(element, counts)| (element, total(counts))).collect()
}

/// Whether the cell holds `z` formula units.
pub(super) fn fits(structure: &Structure, amounts: &Amounts, z: f64) -> bool {
    let cell = contents(structure);
    let elements: BTreeSet<Element> = cell.keys().chain(amounts.keys()).copied().collect();
    elements.iter().all(|e| {
        let (held, stated) = (cell.get(e).unwrap_or(&0.0), z * amounts.get(e).unwrap_or(&0.0));
        (held - stated).abs() <= FORMULA_TOLERANCE * held.max(stated).max(z)
    })
}

/// A formula that is not that of the sites is a warning that shows both.
pub(super) fn check(
    structure: &Structure,
    amounts: &Amounts,
    z: Option<f64>,
    place: usize,
    report: &mut Report<'_, '_>,
) {
    let cell = contents(structure);
    // Without Z only the ratios can be compared; hydrogens that were not located must not spoil them.
    let common =
        |of: &Amounts| of.iter().filter(|(e, _)| cell.contains_key(e) && amounts.contains_key(e)).map(|(_, n)| n).sum();
    let (held, stated): (f64, f64) = (common(&cell), common(amounts));
    let units = z.unwrap_or(held.max(1e-9) / stated.max(1e-9));
    if fits(structure, amounts, units) {
        return;
    }
    let per_unit: Amounts = cell.iter().map(|(e, amount)| (*e, amount / units)).collect();
    let missing: Vec<&str> =
        amounts.iter().filter(|(e, n)| **n > 0.0 && !cell.contains_key(e)).map(|(e, _)| e.symbol()).collect();
    let lack = if missing.is_empty() { String::new() } else { format!("; no site holds {}", missing.join(", ")) };
    let text = format!(
        "the sites hold `{}` for each of {units:.4} formula units, the formula says `{}`{lack}",
        shown(&per_unit),
        shown(amounts)
    );
    report.warn("cif::formula", place, text);
}

#[cfg(test)]
mod tests {
    use super::*;

    fn read(text: &str) -> String {
        parse(text).map_or("-".into(), |amounts| shown(&amounts))
    }

    #[test]
    fn sums_in_every_spelling() {
        assert_eq!(read("Al2 Mg O4"), "Al2 Mg O4");
        assert_eq!(read("Al2MgO4"), "Al2 Mg O4");
        assert_eq!(read("Na.35 (Al1.624 Mg.376) F3.882"), "Al1.624 F3.882 Mg0.376 Na0.35");
        assert_eq!(read("Fe1/3 I2"), "Fe0.3333 I2");
        assert_eq!(read("Ca (O D)2"), "Ca H2 O2");
        for bad in ["", "2", "Xx", "Al2 (", "Al)", "O-2", "O1/0", "Al2..3", "((((((((((O))))))))))", "CO2 é"] {
            assert_eq!(read(bad), "-", "{bad}");
        }
    }
}
