//! The cells of a run: the table on the terminal, `summary.json`, and the words that go into each file.

use super::table::layout;
use crate::build::{Built, Cell, formula_units};
use crate::crystal::symmetry::{TOLERANCE, symmetrise};
use crate::ordering::Search;
use crate::rules::{Finding, Severity, worst};
use serde::Serialize;

/// One row of the summary.
#[derive(Debug, Serialize)]
pub struct CellRow {
    /// File stem, `0001`.
    pub name: String,
    /// Formula of the cell.
    pub contents: String,
    /// Atoms in the cell; shared sites count once.
    pub sites: usize,
    /// Number of the space group found.
    pub space_group: Option<i32>,
    /// Its symbol.
    pub symbol: Option<String>,
    /// Supercell of the primitive cell.
    pub cell: String,
    /// Pattern, from 1.
    pub pattern: usize,
    /// Electrostatic energy, eV per packing sphere.
    pub energy: Option<f64>,
    /// Above the first, meV per packing sphere.
    pub above_first: Option<f64>,
    /// Equivalent orderings, as text since it can exceed 2^53; absent where not counted.
    pub degeneracy: Option<String>,
    /// Findings.
    pub findings: Vec<Finding>,
}

/// The summary of a run.
#[derive(Debug, Serialize)]
pub struct Summary {
    /// Version.
    pub version: &'static str,
    /// Ions in Stock notation.
    pub composition: String,
    /// Host.
    pub host: String,
    /// The composition built instead, where `nearest` changed it.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub nearest: Option<String>,
    /// How the lowest orderings were found.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub search: Option<Search>,
    /// Doubts and hazards.
    pub cautions: Vec<String>,
    /// Cells, best first.
    pub cells: Vec<CellRow>,
}

/// Said of every generated cell.
pub const HYPOTHESIS: &str =
    "A generated cell is a hypothesis: no proof that the phase exists, is stable or is safe to make.";

/// Gathers what there is to say.
pub fn gather(built: &Built) -> Summary {
    let first = built.cells.first().and_then(|c| c.energy);
    let mut cautions = built.decision.cautions.clone();
    let searched = matches!(built.recipe.order, crate::recipe::Order::Lowest | crate::recipe::Order::Every);
    if searched && built.recipe.cell == crate::recipe::CellChoice::Smallest {
        cautions.push(
            "only the smallest cell was searched; larger ones may hold lower orders (`--up-to N`, `--atoms N`)".into(),
        );
    }
    let elements = built.decision.composition.ions.iter().map(|(ion, _)| ion.element).collect();
    cautions.extend(crate::ion::hazard::cautions(&elements));
    Summary {
        version: env!("CARGO_PKG_VERSION"),
        composition: built.decision.composition.to_string(),
        host: built.decision.host.name.clone(),
        nearest: built.nearest.clone(),
        search: built.search,
        cautions,
        cells: built.cells.iter().enumerate().map(|(i, c)| row(built, c, i + 1, first)).collect(),
    }
}

fn row(built: &Built, cell: &Cell, number: usize, first: Option<f64>) -> CellRow {
    let group = symmetrise(&cell.structure, TOLERANCE).ok().map(|s| s.group);
    let units = formula_units(&cell.structure, &built.decision.composition);
    let contents = match units {
        Some(z) => format!("{}x {}", crate::error::shown(&z), built.decision.composition.formula_text()),
        None => cell
            .structure
            .amounts()
            .iter()
            .map(|(s, n)| format!("{} {s}", crate::error::shown(n)))
            .collect::<Vec<_>>()
            .join(" "),
    };
    CellRow {
        name: format!("{number:04}"),
        contents,
        sites: cell.structure.sites.len(),
        space_group: group.as_ref().map(|g| g.number),
        symbol: group.map(|g| g.hermann_mauguin),
        cell: cell.transformation.to_string(),
        pattern: cell.pattern,
        energy: cell.energy,
        above_first: cell.energy.zip(first).map(|(e, f)| 1000.0 * (e - f)),
        degeneracy: (cell.degeneracy > 0).then(|| cell.degeneracy.to_string()),
        findings: cell.findings.clone(),
    }
}

/// The table that people read.
pub fn text(summary: &Summary) -> String {
    let rows: Vec<Vec<String>> = summary
        .cells
        .iter()
        .map(|c| {
            vec![
                c.name.clone(),
                c.contents.clone(),
                c.sites.to_string(),
                c.symbol.clone().unwrap_or_else(|| "not found".into()),
                c.cell.clone(),
                c.energy.map_or(String::new(), |e| format!("{e:.4}")),
                c.above_first.map_or(String::new(), |e| format!("{e:.1}")),
                c.degeneracy.clone().unwrap_or_default(),
                findings(&c.findings),
            ]
        })
        .collect();
    let heading = [
        "file",
        "contents",
        "sites",
        "space group",
        "cell",
        "E / eV per anion site",
        "+ / meV",
        "degeneracy",
        "findings",
    ];
    let mut out = layout(&heading, &rows);
    out += &match summary.search {
        Some(Search::Exhaustive) => "lowest: all arrangements were gone through\n".to_string(),
        Some(Search::Annealed { starts, agreed }) => {
            format!("lowest found by annealing ({agreed} of {starts} starts agree); not proved lowest\n")
        }
        None => String::new(),
    };
    if let Some(nearest) = &summary.nearest {
        out += &format!(
            "note: not the composition asked for but the nearest neutral one that this cell holds: {nearest}\n"
        );
    }
    for caution in &summary.cautions {
        out += &format!("note: {caution}\n");
    }
    for cell in &summary.cells {
        for finding in cell.findings.iter().filter(|f| f.severity == Severity::Broken) {
            out += &format!("{}: {} broken: {} ({} cases)\n", cell.name, finding.rule, finding.text, finding.cases);
        }
    }
    out + HYPOTHESIS + "\n"
}

fn findings(findings: &[Finding]) -> String {
    match worst(findings) {
        None => "none".into(),
        Some(severity) => format!("{} ({severity})", findings.len()),
    }
}

/// Paragraphs for the comment of a CIF.
pub fn notes(built: &Built, cell: &Cell) -> Vec<String> {
    let decision = &built.decision;
    let plan = &decision.seating.plans[0];
    let packed = decision.seating.members.iter();
    let packed = packed.map(|m| format!("{} {} as {}", m.amount, m.ion, decision.host.roles[m.role].name));
    let seated = plan.seats.iter();
    let seated = seated.map(|s| format!("{} {} in {}", s.amount, s.ion, decision.seating.offers[s.offer].kind));
    let seats: Vec<String> = packed.chain(seated).collect();
    let mut notes = vec![
        format!(
            "Composition {}; packing {}; seats per formula unit: {}.",
            decision.composition,
            decision.host.name,
            seats.join(", ")
        ),
        format!(
            "Size by contact of ionic radii (Shannon 1976): packing sphere {:.4} Å; coordinates are those of the ideal packing.",
            decision.size.scale
        ),
    ];
    if let Some(nearest) = &built.nearest {
        notes.push(format!(
            "Not the composition asked for but the nearest neutral one that this cell holds: {nearest}."
        ));
    }
    match cell.energy {
        Some(e) => notes.push(format!(
            "Electrostatic energy of the formal charges {e:.6} eV per packing sphere; order: {:?}, seed {}.",
            built.recipe.order, built.recipe.seed
        )),
        None => notes.push(
            "Sites are shared: occupancies are averages, shares that add up to less than 1 leave the rest vacant."
                .into(),
        ),
    }
    for finding in cell.findings.iter().filter(|f| f.severity == Severity::Broken) {
        notes.push(format!("RULE BROKEN, {}: {} ({} cases).", finding.rule, finding.text, finding.cases));
    }
    notes
}
