//! Vertices of the diagram gathered to holes.
//!
//! Symmetry and rounding put many vertices in one place, disturbance spreads them over a neighbourhood, and a vertex
//! that its spheres do not enclose is only a step on the way up to another. Vertices belong to one hole unless a
//! passage between them is narrower, by [`DEPTH`] at least, than the smaller of the two: then the wall counts. (This is
//! the simplification of a landscape by persistence: H. Edelsbrunner, D. Letscher & A. Zomorodian, Discrete Comput.
//! Geom. 28, 511 (2002), doi:10.1007/s00454-002-2885-2.)

use super::cell::Spheres;
use super::diagram::Diagram;
use super::joining::Joining;
use super::shell;
use super::touching;
use crate::crystal::neighbours::{Neighbour, NeighbourList};
use crate::crystal::{Cartesian, Fractional};
use nalgebra::Vector3;
use rayon::prelude::*;

/// A hole's least depth over the passages out of it, in radii of the packing sphere. Half of hcp's tetrahedra over the
/// triangle that a pair shares is 0.035; displacing spheres by 1 % of their distance makes steps of 0.02.
pub const DEPTH: f64 = 0.025;

/// Vertices of a hole farther than this from its best one, in radii of the packing sphere, do not shape its centre.
const CORE: f64 = 0.6;

/// A centre that moves farther than this, or loses more of its clearance than [`LOSS`], does not fit its shell.
const MOVE: f64 = 0.6;

/// See [`MOVE`]; in radii of the packing sphere.
const LOSS: f64 = 0.15;

/// Holes nearer than this, in radii of the packing sphere, are one.
const SAME_HOLE: f64 = 0.02;

/// Rounds of shell and centre.
const ROUNDS: usize = 8;

/// A hole: where it is, how large, and its spheres.
#[derive(Clone, Debug)]
pub struct Hole {
    /// Centre, each coordinate in [0, 1).
    pub position: Fractional,
    /// Radius of the largest sphere about the centre that meets no packing sphere, in radii of the packing sphere.
    pub ratio: f64,
    /// Its spheres, seen from the centre, in order of index and image.
    pub shell: Vec<Neighbour>,
}

/// Holes, and to which of them each vertex of the diagram belongs.
#[derive(Clone, Debug)]
pub struct Basins {
    /// The holes.
    pub holes: Vec<Hole>,
    /// For each vertex its hole, and the cell of the vertex relative to that of the hole's centre.
    pub of_vertex: Vec<(usize, [i32; 3])>,
}

/// Gathers the vertices.
pub fn basins(spheres: &Spheres<'_>, diagram: &Diagram) -> Basins {
    let (mut joining, peak) = gathered(diagram);
    let n = diagram.vertices.len();
    let mut members: Vec<Vec<(usize, [i32; 3])>> = vec![Vec::new(); n];
    for v in 0..n {
        let (root, cell) = joining.root(v);
        members[root].push((v, cell));
    }
    let roots: Vec<usize> = (0..n).filter(|v| !members[*v].is_empty()).collect();
    // Place of each root's basin in the list, and the cell of the root's frame relative to the hole's centre.
    let mut of_root = vec![usize::MAX; n];
    roots.iter().enumerate().for_each(|(place, root)| of_root[*root] = place);
    let found: Vec<(Hole, [i32; 3])> =
        roots.into_par_iter().map(|root| settled(spheres, diagram, peak[root], &members[root])).collect();
    let (holes, same_as) = distinct(spheres, found.iter().map(|(hole, _)| hole));
    let of_vertex = (0..n)
        .map(|v| {
            let (root, cell) = joining.root(v);
            let (hole, shift) = same_as[of_root[root]];
            let frame = found[of_root[root]].1;
            (hole, [0, 1, 2].map(|k| cell[k] + frame[k] + shift[k]))
        })
        .collect();
    Basins { holes, of_vertex }
}

/// Joins vertices along edges, widest first, where the wall is too low to count; gives each root's best vertex.
fn gathered(diagram: &Diagram) -> (Joining, Vec<usize>) {
    const GRID: f64 = 1e9;
    let n = diagram.vertices.len();
    let clearance = |v: usize| diagram.vertices[v].clearance;
    let mut order: Vec<(i64, usize)> =
        diagram.edges.iter().enumerate().map(|(i, e)| (-(e.bottleneck * GRID).round() as i64, i)).collect();
    order.par_sort_unstable();
    let mut joining = Joining::new(n);
    let mut peak: Vec<usize> = (0..n).collect();
    for (_, i) in order {
        let edge = &diagram.edges[i];
        let (a, b) = (joining.root(edge.from).0, joining.root(edge.to).0);
        let lower = clearance(peak[a]).min(clearance(peak[b]));
        if a == b || lower - edge.bottleneck >= DEPTH {
            continue;
        }
        let (p, q) = (peak[a], peak[b]);
        joining.join(edge.from, edge.to, edge.shift);
        let higher = if (clearance(p) * GRID).round() >= (clearance(q) * GRID).round() { p } else { q };
        peak[joining.root(edge.from).0] = higher;
    }
    (joining, peak)
}

/// The centre of a basin and its shell; and the cell of the basin's frame relative to that of the centre.
fn settled(spheres: &Spheres<'_>, diagram: &Diagram, peak: usize, members: &[(usize, [i32; 3])]) -> (Hole, [i32; 3]) {
    let place = |v: usize, cell: [i32; 3]| {
        spheres.lattice.cartesian(&Fractional(diagram.vertices[v].position.0 + Vector3::from(cell.map(f64::from)))).0
    };
    let top = diagram.vertices[peak].clearance;
    let home = members.iter().find(|(v, _)| *v == peak).map_or([0; 3], |(_, cell)| *cell);
    let best = place(peak, home);
    let core: Vec<Vector3<f64>> = members
        .iter()
        .filter(|(v, _)| diagram.vertices[*v].clearance >= top - DEPTH)
        .map(|(v, cell)| place(*v, *cell))
        .filter(|p| (p - best).norm() <= CORE)
        .collect();
    let middle = core.iter().sum::<Vector3<f64>>() / core.len().max(1) as f64;
    let centred = centred(spheres, middle, top).or_else(|| centred(spheres, best, top));
    let (at, shell) = centred.unwrap_or_else(|| {
        let point = spheres.lattice.fractional(&Cartesian(best));
        (best, shell::around(spheres, &point, 4))
    });
    let exact = tidy(&spheres.lattice.fractional(&Cartesian(at)));
    let position = exact.reduced();
    let frame = (position.0 - exact.0).map(|x| x.round() as i32);
    let frame: [i32; 3] = frame.into();
    let shell = shell.into_iter().map(|n| Neighbour { image: [0, 1, 2].map(|k| n.image[k] + frame[k]), ..n }).collect();
    (Hole { position, ratio: spheres.clearance(&position), shell }, frame)
}

/// The point that its own shell agrees on best, from a start; `None` when it runs off.
fn centred(spheres: &Spheres<'_>, start: Vector3<f64>, top: f64) -> Option<(Vector3<f64>, Vec<Neighbour>)> {
    let mut at = start;
    let mut before: Vec<(usize, [i32; 3])> = Vec::new();
    for _ in 0..ROUNDS {
        let point = spheres.lattice.fractional(&Cartesian(at));
        let (shell, clearance) = shell::expected(spheres, &point, 4, top);
        let members: Vec<_> = shell.iter().map(|n| (n.index, n.image)).collect();
        if members == before {
            return (clearance > top - LOSS).then_some((at, shell));
        }
        let touched: Vec<touching::Sphere> = shell.iter().map(|n| (n.vector, spheres.radii[n.index])).collect();
        at += touching::centre(&touched).0;
        let moved = (at - start).norm();
        if moved.is_nan() || moved > MOVE {
            return None;
        }
        before = members;
    }
    None
}

/// Coordinates a rounding error from 0 or a simple fraction set on it.
pub fn tidy(position: &Fractional) -> Fractional {
    const GRID: f64 = 48.0;
    const ROUNDING: f64 = 1e-9;
    let on_grid = |x: f64| {
        let nearest = (x * GRID).round() / GRID;
        if (nearest - x).abs() < ROUNDING { nearest + 0.0 } else { x }
    };
    Fractional(position.0.map(on_grid))
}

/// Holes with those in one place taken once, the largest; and for each given hole its number and the cell of its centre
/// relative to its own that is the one kept.
fn distinct<'a>(spheres: &Spheres<'_>, found: impl Iterator<Item = &'a Hole>) -> (Vec<Hole>, Vec<(usize, [i32; 3])>) {
    let found: Vec<&Hole> = found.collect();
    let positions: Vec<Fractional> = found.iter().map(|h| h.position).collect();
    let list = NeighbourList::new(spheres.lattice, &positions, SAME_HOLE);
    let mut order: Vec<usize> = (0..found.len()).collect();
    order.sort_by(|a, b| found[*b].ratio.total_cmp(&found[*a].ratio).then(a.cmp(b)));
    let mut same_as: Vec<Option<(usize, [i32; 3])>> = vec![None; found.len()];
    let mut kept: Vec<usize> = Vec::new();
    for i in order {
        if same_as[i].is_some() {
            continue;
        }
        for n in list.around(&positions[i], SAME_HOLE) {
            // The image of hole `n.index` in the cell `n.image` is the one kept.
            same_as[n.index].get_or_insert((kept.len(), n.image));
        }
        kept.push(i);
    }
    let holes = kept.iter().map(|i| found[*i].clone()).collect();
    (holes, same_as.into_iter().map(|s| s.unwrap_or_default()).collect())
}
