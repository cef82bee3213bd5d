//! What the rules say of a structure that was read.

use crate::crystal::symmetry::MAX_SEARCHED;
use crate::format::cif::{Diagnostic, ReadStructure};
use crate::rules::Finding;
use serde::Serialize;

/// One structure of one file.
#[derive(Debug, Serialize)]
pub struct Vetted {
    /// Path as given.
    pub path: String,
    /// Data block.
    pub block: String,
    /// Sites in the cell.
    pub sites: usize,
    /// Space group found by search.
    pub space_group: Option<i32>,
    /// Shortest distance between any two sites, Å; absent if none are within reach.
    pub shortest: Option<f64>,
    /// Whether charges were assigned here because the file states none.
    pub charges_assigned: bool,
    /// Warnings of the reader, with their places.
    pub warnings: Vec<Diagnostic>,
    /// Findings.
    pub findings: Vec<Finding>,
    /// Labels of the sites that each finding names.
    pub labels: Vec<Vec<String>>,
}

/// Labels of the sites of a finding.
pub fn labels(read: &ReadStructure, finding: &Finding) -> Vec<String> {
    finding.sites.iter().filter_map(|i| read.labels.get(*i).map(str::to_owned)).collect()
}

/// What people read.
pub fn text(vetted: &Vetted) -> String {
    let group = match vetted.space_group {
        Some(number) => format!("space group {number}"),
        None if vetted.sites > MAX_SEARCHED => format!("space group not searched (more than {MAX_SEARCHED} sites)"),
        None => "space group not found".to_owned(),
    };
    let mut out = format!("{}: block {}, {} sites in the cell, {group}\n", vetted.path, vetted.block, vetted.sites);
    for warning in &vetted.warnings {
        out += &format!("  warning: {}\n", warning.one_line(&vetted.path));
    }
    if vetted.charges_assigned {
        out += "  charges are not stated in the file; the common oxidation states were assigned\n";
    }
    for (finding, labels) in vetted.findings.iter().zip(&vetted.labels) {
        let sites = if labels.is_empty() { String::new() } else { format!(" [{}]", labels.join(", ")) };
        let cases = if finding.cases > 1 { format!(", {} cases", finding.cases) } else { String::new() };
        out +=
            &format!("  {}: {}: {}{sites}{cases}; {}\n", finding.severity, finding.rule, finding.text, finding.source);
    }
    if vetted.findings.is_empty() {
        out += "  no findings\n";
    }
    out
}
