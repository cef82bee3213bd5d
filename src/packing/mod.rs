//! Packings of spheres and the interstices between them.
//!
//! A host is a periodic array of spheres, the packing sphere of radius 1; its interstices are found by computation, never
//! from a list, and measured as a ratio to that radius. Does not choose between interstices; `seating` does.

mod assignment;
pub mod basin;
pub mod cell;
pub mod diagram;
mod expression;
pub mod framework;
pub mod host;
pub mod interstice;
mod joining;
mod layers;
pub mod percolation;
mod places;
pub mod polyhedron;
pub mod polytypes;
mod saddle;
pub mod shape;
pub mod sharing;
mod shell;
pub mod site_symmetry;
pub mod stacking;
pub mod survey;
pub mod template;
mod touching;
pub mod window;

pub use basin::Hole;
pub use host::{Host, HostError, Role, Sign};
pub use interstice::{Class, Contact, Interstice, PackingError, holes, interstices};
pub use percolation::Network;
pub use polyhedron::Kind;
pub use polytypes::polytypes;
pub use sharing::{Shared, Sharing, shared, sharing};
pub use stacking::{Stacking, StackingError};
pub use survey::{Survey, survey};
pub use template::{Template, TemplateError, Templates};
pub use window::Window;
