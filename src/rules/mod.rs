//! What a structure must satisfy, one file a rule.
//!
//! A rule never edits the structure that it judges; a strange structure is a [`Finding`], not an error.

mod coordination;
mod distance;
mod neutrality;
mod occupancy;
mod shell;

use crate::crystal::Structure;
use crate::ion::radius::RadiusSet;
use serde::{Deserialize, Serialize};
use std::fmt;

pub use shell::{REACH, SHELL_FACTOR, Shells};

/// Which rule speaks.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum Rule {
    /// Charges add up to zero, exactly.
    Neutrality,
    /// Shares of a site add up to at most 1.
    Occupancy,
    /// Cations keep apart.
    CationCation,
    /// A cation and an anion do not overlap.
    CationAnion,
    /// Anions do not overlap.
    AnionAnion,
    /// A cation has the neighbours that its seat promised.
    Coordination,
    /// Something that the other rules need is not known.
    Unknown,
}

impl fmt::Display for Rule {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.pad(match self {
            Self::Neutrality => "neutrality",
            Self::Occupancy => "occupancy",
            Self::CationCation => "cation-cation",
            Self::CationAnion => "cation-anion",
            Self::AnionAnion => "anion-anion",
            Self::Coordination => "coordination",
            Self::Unknown => "unknown",
        })
    }
}

/// How grave a finding is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum Severity {
    /// Worth knowing.
    Note,
    /// Doubtful: look before computing.
    Warning,
    /// The rule is broken.
    Broken,
}

impl fmt::Display for Severity {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.pad(match self {
            Self::Note => "note",
            Self::Warning => "warning",
            Self::Broken => "broken",
        })
    }
}

/// One verdict of one rule on one structure. `measured` and `limit` share `unit`.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Finding {
    /// The rule.
    pub rule: Rule,
    /// How grave.
    pub severity: Severity,
    /// What was measured.
    pub measured: f64,
    /// What is allowed.
    pub limit: f64,
    /// `Å`, `e`, `neighbours` or `1`.
    pub unit: &'static str,
    /// Indices of the sites concerned in the structure's order, the worst case only.
    pub sites: Vec<usize>,
    /// How many such cases there are in the cell.
    pub cases: usize,
    /// The finding as a sentence, without the sites.
    pub text: String,
    /// Where the limit comes from.
    pub source: &'static str,
}

/// Limits of the rules; all dimensionless factors.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct Limits {
    /// A cation-anion distance below this share of the sum of their radii is broken.
    pub cation_anion: f64,
    /// An anion-anion distance below this share of the sum of their radii is broken.
    pub anion_anion: f64,
    /// A cation-cation distance below this share of the sum of their radii is broken.
    pub cation_cation: f64,
}

/// 0.75 and 0.80 of the sum of radii are common practice, no source; 0.90 for two cations is this project's own
/// choice: face-sharing octahedra pass (corundum 2.65 Å of 1.35 Å), both halves of a face-sharing pair of tetrahedra
/// fail.
impl Default for Limits {
    fn default() -> Self {
        Self { cation_anion: 0.75, anion_anion: 0.80, cation_cation: 0.90 }
    }
}

/// What the rules need beside the structure.
#[derive(Clone, Debug)]
pub struct Terms<'a> {
    /// Limits.
    pub limits: Limits,
    /// Radii by which the limits are measured.
    pub radii: RadiusSet,
    /// For each site, the number of anions that its seat promised; empty when nobody promised anything.
    pub promised: &'a [Option<usize>],
}

/// Every finding of every rule, in order of rule; never stops at the first.
pub fn judge(structure: &Structure, terms: &Terms<'_>) -> Vec<Finding> {
    let positions = structure.positions();
    let shells = Shells::new(structure, &positions);
    let mut findings = Vec::new();
    findings.extend(neutrality::judge(structure));
    findings.extend(occupancy::judge(structure));
    findings.extend(distance::judge(structure, &shells, terms));
    findings.extend(coordination::judge(&shells, terms));
    findings.sort_by_key(|f| f.rule);
    findings
}

/// The gravest severity among findings, if there are any.
pub fn worst(findings: &[Finding]) -> Option<Severity> {
    findings.iter().map(|f| f.severity).max()
}
