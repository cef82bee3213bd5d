//! Everything there is to say of a host: interstices, saddles, windows, ways through.

use super::cell::Spheres;
use super::diagram::Diagram;
use super::host::Host;
use super::interstice::{self, Class, Interstice, PackingError};
use super::percolation::{self, Network};
use super::saddle::saddles;
use super::site_symmetry;
use super::window::{Window, windows};

/// What a host's spheres leave open.
#[derive(Clone, Debug)]
pub struct Survey {
    /// Enclosed places, in order of ratio, orbit and position; as [`interstice::interstices`] gives them.
    pub interstices: Vec<Interstice>,
    /// Places enclosed in a plane or on a line only; orbits are numbered anew for each class.
    pub saddles: Vec<Interstice>,
    /// Passages between interstices.
    pub windows: Vec<Window>,
    /// For one, two and three dimensions the largest ratio that gets through the crystal.
    pub critical_ratios: [Option<f64>; 3],
    diagram: Diagram,
    /// Interstice of each vertex of the diagram.
    of_vertex: Vec<usize>,
}

/// Surveys a host.
///
/// # Errors
/// [`PackingError`] when the host is empty, too large, or its symmetry cannot be found.
pub fn survey(host: &Host) -> Result<Survey, PackingError> {
    interstice::check(host)?;
    let operations = site_symmetry::operations(host)?;
    let radii = interstice::radii(host);
    let spheres = Spheres::new(&host.lattice, &host.spheres, &radii);
    let interstice::Geometry { diagram, basins } = interstice::geometry(&spheres);
    let (interstices, number) = interstice::classified(host, &operations, Class::Vertex, basins.holes.clone());
    let windows = windows(host, &spheres, &diagram, &basins, &number, &operations);
    let saddles = saddles(host, &spheres, &diagram, &basins, &windows, &operations);
    let critical_ratios = percolation::critical_ratios(&diagram);
    let of_vertex = basins.of_vertex.iter().map(|(hole, _)| number[*hole]).collect();
    Ok(Survey { interstices, saddles, windows, critical_ratios, diagram, of_vertex })
}

impl Survey {
    /// The networks of interstices open to an ion of this ratio (its radius over that of the packing sphere), those of
    /// most dimensions first.
    pub fn networks(&self, ratio: f64) -> Vec<Network> {
        percolation::networks(&self.diagram, &self.of_vertex, ratio)
    }
}
