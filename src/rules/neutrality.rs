//! Neutrality: the charges of all occupants, weighted by their exact shares, add up to zero.

use super::{Finding, Rule, Severity};
use crate::crystal::Structure;
use crate::ion::amount::to_f64;
use num_traits::Zero;

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
    let text = format!("the cell carries a net charge of {charge} e");
    Some(finding(Rule::Neutrality, Severity::Broken, to_f64(&charge), Vec::new(), 1, text))
}
