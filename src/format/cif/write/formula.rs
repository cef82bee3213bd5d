//! Formula, formula units and weight of a cell, consistent with each other by construction.

use crate::ion::amount::to_f64;
use crate::ion::{Amount, Element, Species};
use num_traits::Zero;
use std::collections::BTreeMap;
use std::fmt::Write;

/// Decimals to which amounts that have no finite decimal form are written.
pub(super) const AMOUNT_DECIMALS: u32 = 8;

/// One formula unit and how many of them the cell holds.
pub(super) struct FormulaUnit {
    /// Amounts of one unit, in order of element and charge.
    amounts: BTreeMap<Species, Amount>,
    /// Z: units in the cell.
    pub z: i128,
}

impl FormulaUnit {
    /// The unit of a cell that holds `totals`, spread over kinds of sites that occur `site_counts` times.
    ///
    /// Whole amounts are divided by their greatest common divisor. Where sites are shared or partly vacant and the
    /// amounts are not whole, the unit follows the sites (Ce0.9Gd0.1O1.95 in four units, not Ce36Gd4O78), as long as
    /// its amounts are finite decimals.
    pub fn new(totals: BTreeMap<Species, Amount>, site_counts: impl Iterator<Item = i128>) -> Self {
        let elements = by_element(&totals);
        let z = if elements.values().all(Amount::is_integer) {
            elements.values().map(|a| *a.numer()).fold(0, gcd)
        } else {
            let most = site_counts.fold(0, gcd);
            let exact = |z: &i128| elements.values().all(|a| is_decimal(&(a / Amount::from(*z))));
            (1..=most).rev().filter(|z| most % z == 0).find(exact).unwrap_or(most)
        };
        let z = z.max(1);
        Self { amounts: totals.into_iter().map(|(s, a)| (s, a / Amount::from(z))).collect(), z }
    }

    /// `Al2 Mg O4`: Hill order, a count of 1 left out, blank between elements.
    pub fn sum(&self) -> String {
        let amounts = by_element(&self.amounts);
        let mut text = String::new();
        for element in hill_order(amounts.keys().copied()) {
            if !text.is_empty() {
                text.push(' ');
            }
            text.push_str(element.symbol());
            push_count(&mut text, &amounts[&element]);
        }
        text
    }

    /// `(Al 3+)2, Mg 2+, (O 2-)4`, or `None` when a charge is not known.
    pub fn moiety(&self) -> Option<String> {
        let mut ions: BTreeMap<(Element, i8), Amount> = BTreeMap::new();
        for (species, amount) in &self.amounts {
            *ions.entry((species.element, species.charge?)).or_insert_with(Amount::zero) += amount;
        }
        let mut text = String::new();
        for element in hill_order(ions.keys().map(|(element, _)| *element)) {
            for ((_, charge), amount) in ions.iter().filter(|((e, _), _)| *e == element) {
                if !text.is_empty() {
                    text.push_str(", ");
                }
                let mut ion = element.symbol().to_owned();
                if *charge != 0 {
                    let sign = if *charge < 0 { '-' } else { '+' };
                    // Writing to a `String` cannot fail.
                    let _ = write!(ion, " {}{sign}", charge.unsigned_abs());
                }
                if *amount == Amount::from(1) {
                    text.push_str(&ion);
                } else {
                    let _ = write!(text, "({ion})");
                    push_count(&mut text, amount);
                }
            }
        }
        Some(text)
    }

    /// Weight of one unit, u.
    pub fn weight(&self) -> f64 {
        self.amounts.iter().map(|(species, amount)| species.element.weight() * to_f64(amount)).sum()
    }
}

fn by_element(amounts: &BTreeMap<Species, Amount>) -> BTreeMap<Element, Amount> {
    let mut elements = BTreeMap::new();
    for (species, amount) in amounts {
        *elements.entry(species.element).or_insert_with(Amount::zero) += amount;
    }
    elements
}

/// Hill order: with carbon C, H, then alphabetical; without carbon strictly alphabetical (core dictionary 3.4.0,
/// CHEMICAL_FORMULA, rule 5).
fn hill_order(elements: impl Iterator<Item = Element>) -> Vec<Element> {
    let mut order: Vec<Element> = elements.collect();
    let carbon = order.iter().any(|e| e.symbol() == "C");
    order.sort_by_key(|e| match (carbon, e.symbol()) {
        (true, "C") => (0, ""),
        (true, "H") => (1, ""),
        (_, symbol) => (2, symbol),
    });
    order.dedup();
    order
}

fn push_count(text: &mut String, amount: &Amount) {
    if *amount != Amount::from(1) {
        text.push_str(&decimal(amount));
    }
}

/// Whether [`decimal`] writes the amount exactly.
pub(super) fn is_decimal(amount: &Amount) -> bool {
    (amount * Amount::from(10_i128.pow(AMOUNT_DECIMALS))).is_integer()
}

/// The amount as a decimal of at most [`AMOUNT_DECIMALS`] places, without trailing zeros or exponent.
pub(super) fn decimal(amount: &Amount) -> String {
    let scaled = (amount * Amount::from(10_i128.pow(AMOUNT_DECIMALS))).round().to_integer();
    scaled_decimal(scaled, AMOUNT_DECIMALS)
}

/// `scaled` / 10^`decimals` without trailing zeros.
pub(super) fn scaled_decimal(scaled: i128, decimals: u32) -> String {
    let unit = 10_i128.pow(decimals);
    let sign = if scaled < 0 { "-" } else { "" };
    let (whole, part) = (scaled.abs() / unit, scaled.abs() % unit);
    if part == 0 {
        return format!("{sign}{whole}");
    }
    let part = format!("{part:0width$}", width = decimals as usize);
    format!("{sign}{whole}.{}", part.trim_end_matches('0'))
}

/// Occupancies of one site as multiples of 10^-[`AMOUNT_DECIMALS`], rounded so that they add up to the rounded total
/// (largest remainder): three thirds are written 0.33333334, 0.33333333, 0.33333333 and fill their site.
pub(super) fn rounded_shares(shares: &[Amount]) -> Vec<i128> {
    let unit = Amount::from(10_i128.pow(AMOUNT_DECIMALS));
    let scaled: Vec<Amount> = shares.iter().map(|share| share * unit).collect();
    let total = scaled.iter().sum::<Amount>().round().to_integer();
    let mut rounded: Vec<i128> = scaled.iter().map(|s| s.floor().to_integer()).collect();
    let mut by_remainder: Vec<usize> = (0..shares.len()).collect();
    by_remainder.sort_by_key(|&i| (-scaled[i].fract(), i));
    let missing = (total - rounded.iter().sum::<i128>()).clamp(0, shares.len() as i128) as usize;
    for &i in &by_remainder[..missing] {
        rounded[i] += 1;
    }
    rounded
}

fn gcd(a: i128, b: i128) -> i128 {
    if b == 0 { a.abs() } else { gcd(b, a % b) }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ion::Ion;

    fn unit(parts: &[(&str, i8, i128, i128)], counts: &[i128]) -> FormulaUnit {
        let totals = parts
            .iter()
            .map(|&(symbol, q, n, d)| (Ion::new(Element::from_symbol(symbol).unwrap(), q).into(), Amount::new(n, d)))
            .collect();
        FormulaUnit::new(totals, counts.iter().copied())
    }

    /// Core dictionary 3.4.0, CHEMICAL_FORMULA rules and `_chemical_formula.moiety`.
    #[test]
    fn spinel_is_written_as_the_dictionary_wants() {
        let spinel = unit(&[("Mg", 2, 8, 1), ("Al", 3, 16, 1), ("O", -2, 32, 1)], &[8, 16, 32]);
        assert_eq!((spinel.sum().as_str(), spinel.z), ("Al2 Mg O4", 8));
        assert_eq!(spinel.moiety().unwrap(), "(Al 3+)2, Mg 2+, (O 2-)4");
        // 24.305 + 2 × 26.9815385 + 4 × 15.999, CIAAW standard atomic weights.
        assert!((spinel.weight() - 142.264077).abs() < 1e-9);
    }

    #[test]
    fn shared_sites_keep_the_formula_of_the_sites() {
        let ceria = unit(&[("Ce", 4, 18, 5), ("Gd", 3, 2, 5), ("O", -2, 39, 5)], &[4, 8]);
        assert_eq!((ceria.sum().as_str(), ceria.z), ("Ce0.9 Gd0.1 O1.95", 4));
        // A third of three sites is whole, though a third is no finite decimal.
        let thirds = unit(&[("Fe", 2, 1, 1), ("Mg", 2, 2, 1), ("O", -2, 3, 1)], &[3, 3]);
        assert_eq!((thirds.sum().as_str(), thirds.z), ("Fe Mg2 O3", 1));
        let halves = unit(&[("Fe", 2, 4, 3), ("O", -2, 1, 2)], &[4, 4]);
        assert_eq!(halves.z, 4);
        assert_eq!(halves.sum(), "Fe0.33333333 O0.125");
    }

    #[test]
    fn carbon_comes_first() {
        let carbonate = unit(&[("Ca", 2, 1, 1), ("C", 4, 1, 1), ("O", -2, 3, 1), ("H", 1, 1, 1)], &[1]);
        assert_eq!(carbonate.sum(), "C H Ca O3");
    }

    #[test]
    fn shares_add_up_in_writing() {
        let third = Amount::new(1, 3);
        assert_eq!(rounded_shares(&[third; 3]), [33333334, 33333333, 33333333]);
        assert_eq!(rounded_shares(&[third]), [33333333]);
        assert_eq!(rounded_shares(&[Amount::new(1, 6), Amount::new(5, 6)]), [16666667, 83333333]);
        assert_eq!(decimal(&Amount::new(-3, 8)), "-0.375");
    }
}
