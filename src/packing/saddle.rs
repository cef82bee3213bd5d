//! Saddles: places that spheres enclose only in a plane or on a line.
//!
//! A face of the dual that holds its own circumcentre gives the middle of a window (in hcp the trigonal bipyramid between
//! two tetrahedra), an edge that does gives the middle between two spheres (bcc's octahedral interstice, 2/√3 − 1, and
//! linear sites). An ion put there is held by the nearest spheres and pushed on by nothing but them: users ask for such
//! places by the name of their whole shell, so where the spheres up to the widest gap enclose it on all sides they are its
//! shell, otherwise the spheres touched.

use super::basin::{Basins, DEPTH, Hole, tidy};
use super::cell::Spheres;
use super::diagram::{self, Diagram};
use super::host::Host;
use super::interstice::{Class, Interstice, classified};
use super::shell;
use super::touching;
use super::window::Window;
use crate::crystal::neighbours::NeighbourList;
use crate::crystal::symmetry::Operation;
use crate::crystal::{Cartesian, Fractional};

/// Least ratio of a saddle that is listed: between spheres in contact there is no place.
const LEAST: f64 = 1e-3;

/// How much nearer than the two spheres of an edge a third may come by rounding, in radii of the packing sphere.
const ROUNDING: f64 = 1e-9;

/// How much of the unit sphere's radius the hull of the directions to a whole shell must leave around the saddle.
const MARGIN: f64 = 0.1;

/// Largest distance of the origin from the hull of the directions to the spheres of a saddle: where spheres of very
/// different radii overlap, a passage may be narrowed from one side only.
const HELD: f64 = 0.25;

/// A saddle nearer than this to an interstice of the same size, in radii of the packing sphere, is part of it.
const IN_HOLE: f64 = 0.3;

/// All saddles, windows first; each class in order of ratio, orbit and position. Orbits are numbered by class.
pub(super) fn saddles(
    host: &Host,
    spheres: &Spheres<'_>,
    diagram: &Diagram,
    basins: &Basins,
    windows: &[Window],
    operations: &[Operation],
) -> Vec<Interstice> {
    let centres: Vec<Fractional> = basins.holes.iter().map(|h| h.position).collect();
    let list = NeighbourList::new(spheres.lattice, &centres, IN_HOLE);
    let apart = |hole: &Hole| {
        let directions: Vec<_> = hole.shell.iter().map(|n| n.vector).collect();
        if touching::imbalance(&directions) > HELD {
            return false;
        }
        let near = list.around(&hole.position, IN_HOLE);
        near.iter().all(|n| basins.holes[n.index].ratio - hole.ratio >= DEPTH)
    };
    let faces = windows.iter().filter(|w| w.ratio > LEAST).map(|w| saddle(spheres, w.position, w.ratio));
    let edges = diagram
        .faces
        .iter()
        .filter_map(|(i, j, image)| between(spheres, *i, (*j, *image)))
        .map(|(position, ratio)| saddle(spheres, position, ratio));
    let (mut all, _) = classified(host, operations, Class::Face, faces.filter(apart).collect());
    all.extend(classified(host, operations, Class::Edge, edges.filter(apart).collect()).0);
    all
}

/// A place and its shell.
fn saddle(spheres: &Spheres<'_>, position: Fractional, ratio: f64) -> Hole {
    let position = tidy(&position).reduced();
    let whole = shell::around(spheres, &position, 2);
    let directions: Vec<_> = whole.iter().map(|n| n.vector).collect();
    let shell = if touching::enclosed(&directions, MARGIN) { whole } else { shell::touched(spheres, &position, DEPTH) };
    Hole { position, ratio, shell }
}

/// The middle between the surfaces of two spheres and half their gap, if no third sphere comes near.
fn between(spheres: &Spheres<'_>, i: usize, other: diagram::Image) -> Option<(Fractional, f64)> {
    let start = spheres.lattice.cartesian(&spheres.centres[i]).0;
    let pair: [touching::Sphere; 2] = [(i, [0; 3]), other].map(|image| diagram::sphere(spheres, image, &start));
    let (along, r) = (pair[1].0, spheres.radii[i]);
    let ratio = (along.norm() - r - pair[1].1) / 2.0;
    if ratio <= LEAST {
        return None;
    }
    let point = spheres.lattice.fractional(&Cartesian(start + along * ((r + ratio) / along.norm())));
    // A third sphere as near makes it a window or a hole; one nearer, nothing at all.
    let alone = spheres.clearance(&point) >= ratio - ROUNDING && shell::touched(spheres, &point, DEPTH).len() == 2;
    alone.then_some((point, ratio))
}
