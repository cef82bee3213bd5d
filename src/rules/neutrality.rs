//! Neutrality: the charges of all occupants, weighted by their exact shares, add up to zero.

use super::{Finding, Rule, Severity};
use crate::crystal::Structure;
use crate::ion::amount::to_f64;
use num_traits::Zero;

/// Half a unit of the third decimal, to which files commonly write occupancies (common practice, no source).
const ROUNDING: f64 = 0.0005;

pub(super) fn judge(structure: &Structure) -> Option<Finding> {
    let unknown: Vec<usize> = structure
        .sites
        .iter()
        .enumerate()
        .filter(|(_, site)| site.occupants.iter().any(|o| o.species.charge.is_none()))
        .map(|(idx, _)| idx)
        .collect();
    let finding = |rule, severity, measured, sites: Vec<usize>, cases, text| Finding {
        rule,
        severity,
        measured,
        limit: 0.0,
        unit: "e",
        sites,
        cases,
        text,
        source: "charge neutrality of a periodic crystal; exact arithmetic, no tolerance",
    };
    if let Some(first) = unknown.first() {
        let text = "charges are not stated, so neutrality and the limits from radii are not checked".into();
        return Some(finding(Rule::Unknown, Severity::Note, f64::NAN, vec![*first], unknown.len(), text));
    }
    let charge = structure.charge().filter(|charge| !charge.is_zero())?;
    let measured = to_f64(&charge);
    let text = format!("the cell carries a net charge of {measured:.4} e");
    // A file of measured shares is neutral only as far as their last digit goes.
    let rounding: f64 = structure
        .sites
        .iter()
        .flat_map(|site| site.occupants.iter())
        .filter(|o| !o.occupancy.is_integer())
        .map(|o| ROUNDING * f64::from(o.species.charge.unwrap_or_default()).abs())
        .sum();
    let (severity, text) = if measured.abs() <= rounding {
        (Severity::Warning, text + ", no more than shares rounded to three decimals explain")
    } else {
        (Severity::Broken, text)
    };
    Some(finding(Rule::Neutrality, severity, measured, Vec::new(), 1, text))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::crystal::{Fractional, Lattice, Occupant, Site};
    use crate::ion::{Amount, Element, Ion};

    fn cell(iron: Amount) -> Structure {
        let ion = |symbol, charge| Ion::new(Element::from_symbol(symbol).unwrap(), charge).into();
        let lattice = Lattice::from_basis(nalgebra::Matrix3::identity() * 4.0).unwrap();
        let shared = vec![Occupant { species: ion("Fe", 3), occupancy: iron }];
        let sites = vec![
            Site { position: Fractional::new(0.0, 0.0, 0.0), occupants: shared.into() },
            Site::full(Fractional::new(0.5, 0.5, 0.5), ion("O", -2)),
        ];
        Structure { lattice, sites }
    }

    #[test]
    fn exact_shares_are_neutral_and_rounded_ones_warned_of() {
        assert_eq!(judge(&cell(Amount::new(2, 3))), None);
        assert_eq!(judge(&cell(Amount::new(667, 1000))).unwrap().severity, Severity::Warning);
        assert_eq!(judge(&cell(Amount::new(7, 10))).unwrap().severity, Severity::Broken);
        assert!((judge(&cell(Amount::new(7, 10))).unwrap().measured - 0.1).abs() < 1e-12);
    }
}
