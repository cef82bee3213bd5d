//! Ions: what a formula names, which charge each element carries, how large it is.
//!
//! Knows nothing of crystals. Tables live in `data/`, each with its birth certificate.

pub mod amount;
pub mod element;
pub mod species;

pub use amount::Amount;
pub use element::Element;
pub use species::{Ion, Species, Spin};
