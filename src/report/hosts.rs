//! The packings there are to choose from, as tables and as JSON.

use super::table::layout;
use crate::packing::host::NAMED;
use crate::packing::{Stacking, Templates};
use serde::Serialize;

/// A packing that can be asked for.
#[derive(Debug, Serialize)]
pub struct Row {
    /// Name.
    pub name: String,
    /// What it is.
    pub title: String,
    /// Free parameters with their ranges, as text.
    pub parameters: Vec<String>,
    /// Where a template's geometry comes from.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub source: Option<String>,
}

/// A stacking in both notations.
#[derive(Debug, Serialize)]
pub struct Stacked {
    /// Layer letters.
    pub letters: String,
    /// h/c symbols.
    pub symbols: String,
}

impl From<&Stacking> for Stacked {
    fn from(stacking: &Stacking) -> Self {
        Self { letters: stacking.to_string(), symbols: stacking.symbols() }
    }
}

/// Packings built without a template: name and what it is.
const BUILT: [(&str, &str); 3] = [
    ("stack:LAYERS", "close-packed layers, letters (stack:ABAC) or h/c symbols (stack:hc)"),
    ("layers:LETTERS", "the same where equal letters may follow each other, straight above (layers:AABB)"),
    ("ax3:LAYERS", "close-packed layers AX3, the large cation A a member of the packing (ax3:c, ax3:hc)"),
];

/// All packings.
pub fn gather(templates: &Templates) -> Vec<Row> {
    let titles = [
        "cubic close packing, layers ABC",
        "hexagonal close packing, layers AB",
        "body-centred cubic array",
        "primitive cubic array",
    ];
    let row = |(name, title): (&str, &str)| Row {
        name: name.into(),
        title: title.into(),
        parameters: Vec::new(),
        source: None,
    };
    let mut rows: Vec<Row> = NAMED.into_iter().zip(titles).map(row).chain(BUILT.into_iter().map(row)).collect();
    if let Some(ax3) = rows.last_mut() {
        ax3.parameters.push("A: radius of A over that of X".into());
    }
    for template in templates.names().filter_map(|name| templates.get(name)) {
        rows.push(Row {
            name: template.name.clone(),
            title: template.title.clone(),
            parameters: template.parameters().iter().map(|(name, p)| format!("{name}: {p}")).collect(),
            source: Some(template.source.clone()),
        });
    }
    rows
}

/// The list that people read.
pub fn text(rows: &[Row]) -> String {
    let table: Vec<Vec<String>> =
        rows.iter().map(|r| vec![r.name.clone(), r.title.clone(), r.parameters.join("; ")]).collect();
    layout(&["name", "packing", "parameters (NAME:p=value)"], &table)
}

/// Stackings by both notations.
pub fn stackings(list: &[Stacked]) -> String {
    let rows: Vec<Vec<String>> = list.iter().map(|s| vec![s.letters.clone(), s.symbols.clone()]).collect();
    layout(&["layers", "h/c"], &rows)
}
