//! Windows: the narrowest passages between neighbouring interstices.
//!
//! Two interstices are neighbours when an edge of the diagram leads from one to the other; the window is where that edge
//! passes its spheres. Its spheres enclose it in their plane, so a mobile ion must squeeze through their circle.

use super::basin::{Basins, DEPTH};
use super::cell::Spheres;
use super::diagram::Diagram;
use super::host::Host;
use super::interstice::Contact;
use super::shell;
use super::site_symmetry;
use super::touching;
use crate::crystal::Fractional;
use crate::crystal::symmetry::Operation;
use nalgebra::Vector3;

/// A passage between two interstices.
#[derive(Clone, Debug, PartialEq)]
pub struct Window {
    /// Interstice on one side, as an index into the list of interstices.
    pub from: usize,
    /// Interstice on the other side.
    pub to: usize,
    /// Cell of `to`, relative to that of `from`.
    pub image: [i32; 3],
    /// Middle of the window, in the frame of `from`: not reduced to the cell.
    pub position: Fractional,
    /// Radius of the largest sphere that passes, as a ratio to the packing sphere's.
    pub ratio: f64,
    /// The spheres that form it, images in the frame of `from`.
    pub spheres: Vec<Contact>,
    /// Number of its orbit under the host's symmetry.
    pub orbit: usize,
    /// Windows of the orbit in the cell.
    pub multiplicity: usize,
}

/// Passages between the same two interstices whose middles are nearer than this, in radii of the packing sphere, are one:
/// the parts of a square window, cut along its diagonal by rounding.
const SAME_WINDOW: f64 = 0.5;

/// Largest distance of the origin from the hull of the directions to its spheres at which a middle counts as enclosed.
const ENCLOSED: f64 = 0.05;

/// A passage before it is known to be a window: holes by number in the basins.
struct Passage {
    from: usize,
    to: usize,
    image: [i32; 3],
    position: Fractional,
    ratio: f64,
    inside: bool,
}

/// The windows of a host; `number` gives for each hole of the basins its place in the list of interstices.
pub(super) fn windows(
    host: &Host,
    spheres: &Spheres<'_>,
    diagram: &Diagram,
    basins: &Basins,
    number: &[usize],
    operations: &[Operation],
) -> Vec<Window> {
    let mut found: Vec<Window> = Vec::new();
    let passages = passages(diagram, basins, number);
    for group in passages.chunk_by(|a, b| (a.from, a.to, a.image) == (b.from, b.to, b.image)) {
        let first = found.len();
        for passage in group {
            let at = spheres.lattice.cartesian(&passage.position).0;
            let near = |w: &Window| (spheres.lattice.cartesian(&w.position).0 - at).norm() < SAME_WINDOW;
            if found[first..].iter().any(near) {
                continue;
            }
            let rim = shell::touched(spheres, &passage.position, DEPTH);
            let directions: Vec<Vector3<f64>> = rim.iter().map(|n| n.vector).collect();
            if passage.inside || touching::imbalance(&directions) < ENCLOSED {
                found.push(Window {
                    from: passage.from,
                    to: passage.to,
                    image: passage.image,
                    position: passage.position,
                    ratio: passage.ratio,
                    spheres: rim.iter().map(Contact::from).collect(),
                    orbit: 0,
                    multiplicity: 0,
                });
            }
        }
    }
    let positions: Vec<Fractional> = found.iter().map(|w| w.position.reduced()).collect();
    for (window, orbit) in found.iter_mut().zip(site_symmetry::orbits(host, operations, &positions)) {
        (window.orbit, window.multiplicity) = (orbit.number, orbit.multiplicity);
    }
    found
}

/// Edges that lead from one interstice to another, by pair, the widest first within a pair.
fn passages(diagram: &Diagram, basins: &Basins, number: &[usize]) -> Vec<Passage> {
    let mut passages: Vec<Passage> = diagram
        .edges
        .iter()
        .filter_map(|edge| {
            let ((a, cell_a), (b, cell_b)) = (basins.of_vertex[edge.from], basins.of_vertex[edge.to]);
            let image = [0, 1, 2].map(|k| edge.shift[k] + cell_a[k] - cell_b[k]);
            let (a, b) = (number[a], number[b]);
            if a == b && image == [0; 3] {
                return None;
            }
            let position = Fractional(edge.narrowest.0 + Vector3::from(cell_a.map(f64::from)));
            let (ratio, inside) = (edge.bottleneck, edge.inside);
            Some(if (a, [0; 3]) <= (b, image) {
                Passage { from: a, to: b, image, position, ratio, inside }
            } else {
                let position = Fractional(position.0 - Vector3::from(image.map(f64::from)));
                Passage { from: b, to: a, image: image.map(|k| -k), position, ratio, inside }
            })
        })
        .collect();
    // Equal ratios, up to rounding, in order of place.
    let key = |p: &Passage| {
        let place: [i64; 3] = p.position.0.map(|x| (x * 1e6).round() as i64).into();
        (p.from, p.to, p.image, -(p.ratio * 1e9).round() as i64, place)
    };
    passages.sort_by_key(key);
    passages
}

impl Window {
    /// The spheres as a formula, `X3` or `X2A`.
    pub fn formula(&self, host: &Host) -> String {
        super::interstice::formula(host, &self.spheres)
    }
}
