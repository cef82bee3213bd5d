//! Ions: what a formula names, which charge each element carries, how large it is.
//!
//! Knows nothing of crystals. Tables live in `data/`, each with its birth certificate.

pub mod amount;
pub mod bond_valence;
pub mod composition;
pub mod coordination;
pub mod element;
pub mod formula;
pub mod hazard;
pub mod oxidation;
pub mod radius;
pub mod species;
mod states;

pub use amount::Amount;
pub use composition::Composition;
pub use element::Element;
pub use species::{Ion, Species, Spin};
