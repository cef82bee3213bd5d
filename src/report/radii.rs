//! Radii, ratios and bond-valence parameters of an ion.

use super::table::layout;
use crate::ion::bond_valence;
use crate::ion::radius::{RadiusError, RadiusSet, radius, rows};
use crate::ion::{Element, Ion, Spin};
use serde::Serialize;

/// One row of Shannon's table for an ion.
#[derive(Debug, Serialize)]
pub struct Row {
    /// Ion, `Fe3+`.
    pub ion: String,
    /// Coordination number, with `SQ` or `PY` where the table says so.
    pub coordination: String,
    /// `high` or `low`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub spin: Option<&'static str>,
    /// Crystal radius, Å.
    pub crystal_angstrom: f64,
    /// Effective radius, Å.
    pub effective_angstrom: f64,
    /// Marked as most reliable in the paper.
    pub reliable: bool,
    /// Ratio to the anion at coordination 6, in the set asked for.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub ratio: Option<f64>,
}

/// All rows of an ion (or of every charge of an element that the table has), with ratios to an anion.
///
/// # Errors
/// [`RadiusError`] when the table lacks the ion or the anion.
pub fn gather(ion: &Ion, with: Option<&Ion>, set: RadiusSet) -> Result<Vec<Row>, RadiusError> {
    radius(ion, 6, set)?;
    let anion = with.map(|anion| radius(anion, 6, set)).transpose()?;
    Ok(rows(ion.element, ion.charge)
        .filter(|row| ion.spin.is_none() || row.spin.is_none() || row.spin == ion.spin)
        .map(|row| Row {
            ion: Ion { spin: None, ..*ion }.to_string(),
            coordination: format!("{}{}", row.coordination, row.shape),
            spin: row.spin.map(|s| if s == Spin::High { "high" } else { "low" }),
            crystal_angstrom: row.crystal,
            effective_angstrom: row.effective,
            reliable: row.reliable,
            ratio: anion.map(|a| row.angstrom(set) / a.angstrom),
        })
        .collect())
}

/// The table that people read.
pub fn text(ion: &Ion, rows: &[Row], with: Option<&Ion>, set: RadiusSet) -> String {
    let mut heading = vec!["ion", "CN", "spin", "crystal / Å", "effective / Å", "reliable"];
    let ratio = with.map(|a| format!("r/r({})", a.element));
    heading.extend(ratio.as_deref());
    let lines: Vec<Vec<String>> = rows
        .iter()
        .map(|r| {
            let mut line = vec![
                r.ion.clone(),
                r.coordination.clone(),
                r.spin.unwrap_or("").to_string(),
                format!("{:.3}", r.crystal_angstrom),
                format!("{:.3}", r.effective_angstrom),
                if r.reliable { "yes" } else { "" }.to_string(),
            ];
            line.extend(r.ratio.map(|x| format!("{x:.3}")));
            line
        })
        .collect();
    let mut out = layout(&heading, &lines);
    out += "\nradii: R. D. Shannon, Acta Cryst. A32, 751 (1976)";
    if let Some(anion) = with {
        let r = radius(anion, 6, set).map_or(f64::NAN, |r| r.angstrom);
        let name = if set == RadiusSet::Crystal { "crystal" } else { "effective" };
        out += &format!("; ratios of {name} radii to {anion} at coordination 6, {r:.2} Å");
    }
    let anion = with.map(|a| a.element).or_else(|| Element::from_symbol("O")).filter(|_| ion.charge > 0);
    for p in anion.into_iter().flat_map(|a| bond_valence::parameters(ion, a)) {
        let name = anion.map_or("", Element::symbol);
        out += &format!("\nbond valence with {name}: R0 {:.3} Å, B {:.3} Å ({})", p.r0, p.b, p.set.citation());
    }
    out + "\n"
}
