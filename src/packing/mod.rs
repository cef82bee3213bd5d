//! Packings of spheres and the interstices between them.
//!
//! A host is a periodic array of spheres of radius 1; its interstices are found by computation, never from a list, and
//! measured as a ratio to that radius. Does not choose between interstices; `seating` does.

pub mod host;
pub mod interstice;
pub mod polyhedron;
pub mod stacking;
pub mod voronoi;

pub use host::{Host, HostError};
pub use interstice::{Contact, Interstice, PackingError, interstices};
pub use polyhedron::Kind;
pub use stacking::Stacking;
