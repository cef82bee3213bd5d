//! The one error of the pipeline; each stage's own is wrapped.

use crate::ion::Amount;

/// Whatever can stop a run. Messages are sentences with their data: what, where, and what to do next.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum Error {
    /// A formula that cannot be read.
    #[error(transparent)]
    Formula(#[from] crate::ion::formula::FormulaError),
    /// No neutral charges.
    #[error(transparent)]
    Oxidation(#[from] crate::ion::oxidation::OxidationError),
    /// No radius.
    #[error(transparent)]
    Radius(#[from] crate::ion::radius::RadiusError),
    /// No such host.
    #[error(transparent)]
    Host(#[from] crate::packing::HostError),
    /// No interstices.
    #[error(transparent)]
    Packing(#[from] crate::packing::PackingError),
    /// No seats.
    #[error(transparent)]
    Seating(#[from] crate::seating::SeatingError),
    /// A bad change of cell.
    #[error(transparent)]
    Transformation(#[from] crate::crystal::transformation::TransformationError),
    /// An impossible lattice.
    #[error(transparent)]
    Lattice(#[from] crate::crystal::lattice::LatticeError),
    /// No symmetry.
    #[error(transparent)]
    Symmetry(#[from] crate::crystal::symmetry::SymmetryError),
    /// No ordering.
    #[error(transparent)]
    Ordering(#[from] crate::ordering::OrderingError),
    /// No CIF.
    #[error(transparent)]
    CifWrite(#[from] crate::format::cif::write::WriteError),
    /// No CIF of interstices.
    #[error(transparent)]
    Interstices(#[from] crate::format::interstices::InterstitialError),
    /// No plain XYZ.
    #[error(transparent)]
    Xyz(#[from] crate::format::xyz::XyzError),
    /// A recipe that cannot be read.
    #[error("recipe `{path}`{place}: {message}")]
    Recipe {
        /// File.
        path: String,
        /// Where in it.
        place: String,
        /// What is wrong.
        message: String,
    },
    /// A cell that cannot hold the composition.
    #[error(
        "a cell of {index} times the primitive one cannot hold `{composition}` exactly: it would hold {would_hold}; cells of {fitting} times the primitive one can{nearest}"
    )]
    DoesNotFit {
        /// Index asked for.
        index: usize,
        /// The composition.
        composition: String,
        /// Amounts that are not whole.
        would_hold: String,
        /// The smallest indices that can.
        fitting: String,
        /// The nearest neutral amounts.
        nearest: String,
    },
    /// No cell of the size asked for.
    #[error("no cell of at most {limit} holds `{composition}` exactly; the smallest that does has {smallest}")]
    TooSmall {
        /// `N atoms`, or `index N`.
        limit: String,
        /// The composition.
        composition: String,
        /// The smallest.
        smallest: String,
    },
    /// A request beyond a named limit.
    #[error("{what} of {asked} is refused; the limit is {limit}")]
    Limit {
        /// What was asked for.
        what: &'static str,
        /// How much.
        asked: String,
        /// Named limit.
        limit: String,
    },
    /// An option that cannot be read.
    #[error("{option} `{given}`: {reason}")]
    Option {
        /// Its name.
        option: &'static str,
        /// As given.
        given: String,
        /// What is wrong and what would be right.
        reason: String,
    },
    /// A file that cannot be read or written.
    #[error("{action} `{path}`: {source}")]
    File {
        /// `cannot read` or `cannot write`.
        action: &'static str,
        /// Path.
        path: String,
        /// Why.
        source: std::io::Error,
    },
    /// An output folder that exists.
    #[error("`{path}` exists; choose another folder{remedy}")]
    Exists {
        /// Path.
        path: String,
        /// `--replace` where it may be replaced.
        remedy: &'static str,
    },
    /// An output file that exists.
    #[error("`{path}` exists; choose another file, or give `--replace`")]
    FileExists {
        /// Path.
        path: String,
    },
    /// Faults in a CIF.
    #[error("{report}")]
    Cif {
        /// Path.
        path: String,
        /// The faults.
        faults: Vec<crate::format::cif::Diagnostic>,
        /// Each fault with its place and the line that it stands on.
        report: String,
    },
    /// No neutral amounts near the composition.
    #[error(
        "a cell of {index} times the primitive one holds no neutral composition near `{composition}`; take a larger cell"
    )]
    NothingNear {
        /// Index.
        index: usize,
        /// The composition.
        composition: String,
    },
}

impl Error {
    /// Whether the call was right but a constraint could not be met (exit status 1, not 2).
    pub fn is_unmet_constraint(&self) -> bool {
        matches!(self, Self::Ordering(crate::ordering::OrderingError::Apart { .. }))
    }
}

/// Largest number of atoms in a cell.
pub const MAX_ATOMS: usize = 1_000_000;

/// An amount times a whole number, as a table shows it.
pub(crate) fn shown(amount: &Amount) -> String {
    if amount.is_integer() { amount.to_string() } else { format!("{:.3}", crate::ion::amount::to_f64(amount)) }
}

/// A number of things, as a sentence says it; for nouns that take an `s`.
pub(crate) fn counted(n: usize, noun: &str) -> String {
    format!("{n} {noun}{}", if n == 1 { "" } else { "s" })
}
