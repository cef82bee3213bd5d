//! A composition: ions with exact amounts per formula unit.

use super::amount::Amount;
use super::formula::{amount_suffix, numeral};
use super::{Ion, Spin};
use num_traits::Zero;
use std::fmt;

/// Ions and vacancies of one formula unit.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Composition {
    /// Each ion once, with its amount (above 0), in the formula's order.
    pub ions: Vec<(Ion, Amount)>,
    /// Vacant places named in the formula.
    pub vacancies: Amount,
}

impl Composition {
    /// Ions of positive charge.
    pub fn cations(&self) -> impl Iterator<Item = &(Ion, Amount)> {
        self.ions.iter().filter(|(ion, _)| ion.charge > 0)
    }

    /// Ions of negative charge.
    pub fn anions(&self) -> impl Iterator<Item = &(Ion, Amount)> {
        self.ions.iter().filter(|(ion, _)| ion.charge < 0)
    }

    /// Net charge per formula unit, e.
    pub fn charge(&self) -> Amount {
        self.ions.iter().map(|(ion, amount)| amount * i128::from(ion.charge)).sum()
    }

    /// Amount of one ion per formula unit; zero if absent.
    pub fn amount_of(&self, ion: &Ion) -> Amount {
        self.ions.iter().find(|(other, _)| other == ion).map_or(Amount::zero(), |(_, amount)| *amount)
    }

    /// The formula without charges, `MgAl2O4`; ions of one element merged.
    pub fn formula_text(&self) -> String {
        let mut parts: Vec<(super::Element, Amount)> = Vec::new();
        for (ion, amount) in &self.ions {
            match parts.iter_mut().find(|(element, _)| *element == ion.element) {
                Some((_, sum)) => *sum += amount,
                None => parts.push((ion.element, *amount)),
            }
        }
        parts.iter().map(|(element, amount)| format!("{element}{}", amount_suffix(amount))).collect()
    }
}

/// Stock notation that [`super::formula::parse`] reads back: `Mg(II)Al(III)2O(-II)4`.
impl fmt::Display for Composition {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (ion, amount) in &self.ions {
            let spin = match ion.spin {
                None => "",
                Some(Spin::High) => ",hs",
                Some(Spin::Low) => ",ls",
            };
            write!(f, "{}({}{spin}){}", ion.element, numeral(ion.charge), amount_suffix(amount))?;
        }
        if !self.vacancies.is_zero() {
            write!(f, "□{}", amount_suffix(&self.vacancies))?;
        }
        Ok(())
    }
}
