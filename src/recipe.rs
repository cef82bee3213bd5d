//! A whole run as one JSON document.
//!
//! Every field but the composition has a default; the resolved recipe, written beside the output, has all of them filled
//! in, so that it gives the same bytes again.

use crate::error::Error;
use crate::ion::radius::RadiusSet;
use crate::metric::Sizing;
use crate::rules::Limits;
use serde::{Deserialize, Serialize};

/// How large the cell is.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum CellChoice {
    /// The smallest index that holds the composition exactly, in its most compact shape.
    #[default]
    Smallest,
    /// A transformation of the primitive cell, `2a,2b,2c`.
    Transformation(String),
    /// The largest cell of at most so many atoms that holds the composition exactly, in its most compact shape.
    Atoms(usize),
    /// The smallest cell whose periodic images are at least this far apart, Å.
    Span(f64),
    /// All symmetry-distinct supercells of index 1 to this.
    UpTo(usize),
}

/// Who sits in the filled interstices.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Order {
    /// The lowest electrostatic energy.
    #[default]
    Lowest,
    /// All symmetry-distinct orderings.
    Every,
    /// A random one.
    Random,
    /// Shared sites.
    Average,
}

/// Which interstices are filled, apart from who fills them.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Pattern {
    /// The lowest electrostatic energy of the average cation.
    Lowest,
    /// All symmetry-distinct patterns.
    Every,
    /// A random one.
    Random,
    /// Decided together with the order.
    Joint,
}

/// A run of the main job.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Recipe {
    /// Formula.
    pub composition: String,
    /// Host.
    #[serde(default = "default_packing")]
    pub packing: String,
    /// A template of the user's own by which `packing` names the host.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub template: Option<serde_json::Value>,
    /// Seats by the user's word, `Mg:tetrahedral,Al:octahedral`.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub seats: Option<String>,
    /// Cell.
    #[serde(default)]
    pub cell: CellChoice,
    /// Accept the nearest neutral composition that the cell can hold.
    #[serde(default)]
    pub nearest: bool,
    /// Order.
    #[serde(default)]
    pub order: Order,
    /// Pattern; by default joint for `lowest` and `every`, lowest for `random` and `average`.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub pattern: Option<Pattern>,
    /// How many cells to keep; by default 1, and all of them for `every`.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub keep: Option<usize>,
    /// Seed of all random draws (ChaCha8, rand 0.10).
    #[serde(default)]
    pub seed: u64,
    /// Pairs kept apart, `Gd-Gd:3.6`, distances in Å.
    #[serde(default)]
    pub apart: Vec<String>,
    /// Shannon's radii.
    #[serde(default)]
    pub radii: RadiusSet,
    /// How contacts set the size.
    #[serde(default)]
    pub size: Sizing,
    /// Formats, `cif` and `xyz`.
    #[serde(default = "default_formats", rename = "as")]
    pub formats: Vec<String>,
    /// Write CIFs in P1.
    #[serde(default)]
    pub p1: bool,
    /// Limits of the rules.
    #[serde(default)]
    pub limits: Limits,
    /// Version that resolved the recipe.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub version: Option<String>,
}

/// The host taken when none is named.
pub fn default_packing() -> String {
    "ccp".into()
}

/// The formats written when none is named.
pub fn default_formats() -> Vec<String> {
    vec!["cif".into(), "xyz".into()]
}

/// Most cells kept.
pub const MAX_KEEP: usize = 10_000;

impl Recipe {
    /// A recipe with every default.
    pub fn new(composition: &str) -> Self {
        Self {
            composition: composition.into(),
            packing: default_packing(),
            template: None,
            seats: None,
            cell: CellChoice::default(),
            nearest: false,
            order: Order::default(),
            pattern: None,
            keep: None,
            seed: 0,
            apart: Vec::new(),
            radii: RadiusSet::default(),
            size: Sizing::default(),
            formats: default_formats(),
            p1: false,
            limits: Limits::default(),
            version: None,
        }
    }

    /// Reads JSON; `path` is for messages.
    ///
    /// # Errors
    /// [`Error::Recipe`] with the field and line.
    pub fn from_json(text: &str, path: &str) -> Result<Self, Error> {
        let deserializer = &mut serde_json::Deserializer::from_str(text);
        serde_path_to_error::deserialize(deserializer).map_err(|error| {
            let field = error.path().to_string();
            let inner = error.into_inner();
            let mut place = format!(", line {}, column {}", inner.line(), inner.column());
            if field != "." {
                place += &format!(", field `{field}`");
            }
            Error::Recipe { path: path.into(), place, message: inner.to_string() }
        })
    }

    /// The recipe with every default filled in.
    pub fn resolved(&self) -> Self {
        let joint = matches!(self.order, Order::Lowest | Order::Every);
        Self {
            pattern: Some(self.pattern.unwrap_or(if joint { Pattern::Joint } else { Pattern::Lowest })),
            keep: Some(self.keep.unwrap_or(if self.order == Order::Every { MAX_KEEP } else { 1 })),
            version: Some(env!("CARGO_PKG_VERSION").into()),
            ..self.clone()
        }
    }
}
