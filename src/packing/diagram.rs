//! Vertices and edges of the periodic power diagram of the spheres, each once.
//!
//! Cells are cut one by one (in parallel, merged in order); what they share is recognised by its place. For spheres of
//! different radii every vertex is moved to where it touches the spheres that made it, and the bottleneck of an edge is
//! the narrowest sphere between its three spheres: the topology is that of the power diagram, the sizes are true.

use super::cell::{PowerCell, Spheres};
use super::places;
use super::touching;
use crate::crystal::{Cartesian, Fractional};
use nalgebra::Vector3;
use rayon::prelude::*;

/// A sphere and the cell in which it lies.
pub type Image = (usize, [i32; 3]);

/// A point where cells meet.
#[derive(Clone, Debug)]
pub struct Vertex {
    /// Place, each coordinate in [0, 1).
    pub position: Fractional,
    /// Distance to the nearest sphere's surface.
    pub clearance: f64,
}

/// A line where cells meet, between two vertices.
#[derive(Clone, Debug)]
pub struct Edge {
    /// Vertex at one end.
    pub from: usize,
    /// Vertex at the other.
    pub to: usize,
    /// Cell of `to`, relative to that of `from`.
    pub shift: [i32; 3],
    /// Least clearance along the edge.
    pub bottleneck: f64,
    /// Where that is, in the frame of `from`.
    pub narrowest: Fractional,
    /// Whether it lies between the ends rather than at one of them.
    pub inside: bool,
}

/// Two spheres whose cells share a face; the second lies in the image given.
pub type Neighbours = (usize, usize, [i32; 3]);

/// The diagram.
#[derive(Clone, Debug)]
pub struct Diagram {
    /// Vertices.
    pub vertices: Vec<Vertex>,
    /// Edges, each in one direction.
    pub edges: Vec<Edge>,
    /// Faces, each from one side.
    pub faces: Vec<Neighbours>,
}

/// Vertices of different cells nearer than this share of the mean distance between spheres are one.
const SAME_POINT: f64 = 1e-7;

/// A bottleneck at less than this share of an edge from its end is at the end.
const AT_END: f64 = 1e-6;

/// What the cell of one sphere contributes.
struct Piece {
    /// Absolute fractional coordinates.
    points: Vec<Fractional>,
    /// Three other spheres that meet at each point.
    makers: Vec<[Image; 3]>,
    /// Ends (as points) and the two other spheres that share the edge.
    edges: Vec<(u32, u32, [Image; 2])>,
    faces: Vec<Neighbours>,
}

impl Diagram {
    /// Cuts all cells and joins them.
    pub fn new(spheres: &Spheres<'_>) -> Self {
        let pieces: Vec<Piece> = (0..spheres.centres.len())
            .into_par_iter()
            .map_init(PowerCell::default, |cell, centre| {
                cell.cut_out(spheres, centre);
                piece(spheres, cell, centre)
            })
            .collect();
        let (mut vertices, place) = joined(spheres, &pieces);
        let equal = spheres.radii.iter().all(|r| *r == spheres.largest);
        if !equal {
            settle(spheres, &pieces, &place, &mut vertices);
        }
        let edges = edges(spheres, &pieces, &place, &vertices, equal);
        let faces = pieces.into_iter().flat_map(|p| p.faces).collect();
        Self { vertices, edges, faces }
    }
}

fn piece(spheres: &Spheres<'_>, cell: &PowerCell, centre: usize) -> Piece {
    let origin = spheres.lattice.cartesian(&spheres.centres[centre]).0;
    let points = cell.vertices.iter().map(|v| spheres.lattice.fractional(&Cartesian(origin + v))).collect();
    let image = |f: usize| (cell.faces[f].sphere, cell.faces[f].image);
    let mut of_point: Vec<[usize; 3]> = vec![[usize::MAX; 3]; cell.vertices.len()];
    // Each edge is met in two faces, once in each direction.
    let mut directed: Vec<(u32, u32, usize)> = Vec::with_capacity(6 * cell.vertices.len());
    for (f, face) in cell.faces.iter().enumerate() {
        for (k, &i) in face.corners.iter().enumerate() {
            if let Some(free) = of_point[i as usize].iter_mut().find(|g| **g == usize::MAX) {
                *free = f;
            }
            let j = face.corners[if k + 1 == face.corners.len() { 0 } else { k + 1 }];
            directed.push((i.min(j), i.max(j), f));
        }
    }
    directed.sort_unstable();
    let edges = directed
        .windows(2)
        .filter(|w| (w[0].0, w[0].1) == (w[1].0, w[1].1))
        .map(|w| (w[0].0, w[0].1, [image(w[0].2), image(w[1].2)]))
        .collect();
    let makers =
        of_point.iter().map(|faces| faces.map(|f| if f == usize::MAX { (centre, [0; 3]) } else { image(f) })).collect();
    let once = |f: &&super::cell::Face| (centre, [0; 3]) < (f.sphere, f.image);
    let faces = cell.faces.iter().filter(once).map(|f| (centre, f.sphere, f.image)).collect();
    Piece { points, makers, edges, faces }
}

/// Index of the vertex that a point of a piece is, and the cell in which the point lies relative to it.
type Place = (u32, [i32; 3]);

/// The points of all pieces, each place once, and where each point went.
fn joined(spheres: &Spheres<'_>, pieces: &[Piece]) -> (Vec<Vertex>, Vec<Place>) {
    let points: Vec<Fractional> = pieces.par_iter().flat_map_iter(|p| p.points.iter().copied()).collect();
    let first = places::firsts(spheres.lattice, &points, SAME_POINT * spheres.spacing);
    let mut id = vec![u32::MAX; points.len()];
    let mut vertices: Vec<Vertex> = Vec::with_capacity(points.len() / 4);
    let mut place = Vec::with_capacity(points.len());
    let own = pieces.iter().enumerate().flat_map(|(own, piece)| std::iter::repeat_n(own, piece.points.len()));
    for ((i, point), own) in points.iter().enumerate().zip(own) {
        if first[i] as usize == i {
            id[i] = vertices.len() as u32;
            let centre = spheres.lattice.cartesian(&spheres.centres[own]).0;
            let arm = spheres.lattice.cartesian(point).0 - centre;
            let clearance = arm.norm() - spheres.radii[own];
            vertices.push(Vertex { position: point.reduced(), clearance });
        }
        let id = id[first[i] as usize];
        let apart = point.0 - vertices[id as usize].position.0;
        place.push((id, [0, 1, 2].map(|k| apart[k].round() as i32)));
    }
    (vertices, place)
}

/// Moves each vertex to the point that touches the four spheres of its first maker.
fn settle(spheres: &Spheres<'_>, pieces: &[Piece], place: &[Place], vertices: &mut [Vertex]) {
    let mut first: Vec<Option<[Image; 4]>> = vec![None; vertices.len()];
    let mut at = 0;
    for (centre, piece) in pieces.iter().enumerate() {
        for makers in &piece.makers {
            let (id, shift) = place[at];
            let moved = |(s, t): Image| (s, minus(t, shift));
            let four = [(centre, [0; 3]), makers[0], makers[1], makers[2]].map(moved);
            first[id as usize].get_or_insert(four);
            at += 1;
        }
    }
    vertices.par_iter_mut().zip(first).for_each(|(vertex, makers)| {
        let Some(makers) = makers else { return };
        let start = spheres.lattice.cartesian(&vertex.position).0;
        let (shift, _) = touching::centre(&makers.map(|image| sphere(spheres, image, &start)));
        // Four spheres nearly in a plane may be touched far away: such a vertex stays where the power diagram has it.
        if shift.norm() < spheres.spacing {
            let moved = spheres.lattice.fractional(&Cartesian(start + shift));
            vertex.position = moved;
        }
        vertex.clearance = spheres.clearance(&vertex.position);
    });
}

fn minus(a: [i32; 3], b: [i32; 3]) -> [i32; 3] {
    [a[0] - b[0], a[1] - b[1], a[2] - b[2]]
}

/// Centre relative to `start` and radius of the image of a sphere.
pub fn sphere(spheres: &Spheres<'_>, (index, image): Image, start: &Vector3<f64>) -> touching::Sphere {
    let p = spheres.centres[index].0 + Vector3::from(image.map(f64::from));
    (spheres.lattice.cartesian(&Fractional(p)).0 - start, spheres.radii[index])
}

fn edges(spheres: &Spheres<'_>, pieces: &[Piece], place: &[Place], vertices: &[Vertex], equal: bool) -> Vec<Edge> {
    let starts: Vec<usize> = pieces
        .iter()
        .scan(0, |next, p| {
            let start = *next;
            *next += p.points.len();
            Some(start)
        })
        .collect();
    let ends = |centre: usize, edge: usize| {
        let (i, j, _) = pieces[centre].edges[edge];
        directed(place[starts[centre] + i as usize], place[starts[centre] + j as usize])
    };
    // Every cell around an edge has it; but for rounding, it is the same in each. The first cell's is taken.
    let mut raw: Vec<(u32, u32, [i32; 3], u32, u32)> = (0..pieces.len())
        .into_par_iter()
        .flat_map_iter(|centre| {
            (0..pieces[centre].edges.len()).filter_map(move |edge| {
                let (from, to, shift, _) = ends(centre, edge);
                ((from, [0; 3]) != (to, shift)).then_some((from, to, shift, centre as u32, edge as u32))
            })
        })
        .collect();
    raw.par_sort_unstable();
    raw.dedup_by_key(|e| (e.0, e.1, e.2));
    raw.into_par_iter()
        .map(|(from, to, shift, centre, edge)| {
            let (centre, edge) = (centre as usize, edge as usize);
            let (frame, others) = (ends(centre, edge).3, pieces[centre].edges[edge].2);
            let makers = [(centre, [0; 3]), others[0], others[1]].map(|(s, t)| (s, minus(t, frame)));
            let (from, to) = (from as usize, to as usize);
            let end = Fractional(vertices[to].position.0 + Vector3::from(shift.map(f64::from)));
            let ends = [(vertices[from].position, vertices[from].clearance), (end, vertices[to].clearance)];
            let (narrowest, bottleneck, inside) = bottleneck(spheres, ends, &makers, equal);
            Edge { from, to, shift, bottleneck, narrowest, inside }
        })
        .collect()
}

/// An edge between two points in the one direction in which it is kept: from, to, the cell of the latter relative to that
/// of the former, and the cell in which the former lies.
fn directed((a, s): Place, (b, t): Place) -> (u32, u32, [i32; 3], [i32; 3]) {
    let shift = minus(t, s);
    if (a, [0; 3]) < (b, shift) { (a, b, shift, s) } else { (b, a, shift.map(|k| -k), t) }
}

/// The narrowest place on an edge: where it passes the plane of its three spheres, if it does, else at an end.
fn bottleneck(
    spheres: &Spheres<'_>,
    ends: [(Fractional, f64); 2],
    makers: &[Image; 3],
    equal: bool,
) -> (Fractional, f64, bool) {
    let [p, q] = ends.map(|(position, _)| spheres.lattice.cartesian(&position).0);
    let at_end = || {
        let end = if ends[0].1 <= ends[1].1 { ends[0] } else { ends[1] };
        (end.0, end.1, false)
    };
    let (arm, radius) = sphere(spheres, makers[0], &p);
    let along = q - p;
    if equal {
        let t = arm.dot(&along) / along.norm_squared();
        if !(AT_END..=1.0 - AT_END).contains(&t) {
            return at_end();
        }
        let point = p + along * t;
        return (spheres.lattice.fractional(&Cartesian(point)), (along * t - arm).norm() - radius, true);
    }
    let [a, b, c] = makers.map(|image| sphere(spheres, image, &p));
    let normal = (b.0 - a.0).cross(&(c.0 - a.0));
    let (height_p, height_q) = (-a.0.dot(&normal), (along - a.0).dot(&normal));
    if height_p * height_q >= 0.0 {
        return at_end();
    }
    // From where the straight line between the ends passes the plane.
    let start = along * (height_p / (height_p - height_q));
    let (shift, _) = touching::centre(&[a, b, c].map(|(v, r)| (v - start, r)));
    // Three spheres of which one lies nearly within another are touched far away or nowhere.
    let nearby = shift.norm() < spheres.spacing;
    if !nearby {
        return at_end();
    }
    let point = spheres.lattice.fractional(&Cartesian(p + start + shift));
    let clearance = spheres.clearance(&point);
    if clearance < ends[0].1.min(ends[1].1) { (point, clearance, true) } else { at_end() }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::packing::Host;

    fn diagram(host: &Host) -> Diagram {
        let radii: Vec<f64> = (0..host.spheres.len()).map(|i| host.radius(i)).collect();
        Diagram::new(&Spheres::new(&host.lattice, &host.spheres, &radii))
    }

    /// Per sphere of ccp: 3 vertices, 8 edges from octahedron to tetrahedron, 6 faces; of bcc: 6, 12, 7; of primitive
    /// cubic 1, 3, 3. Counts of the space-filling polyhedra (rhombic dodecahedron, truncated octahedron, cube), each
    /// face shared by two, each edge by three or, in the cube, four.
    #[test]
    fn counts_are_those_of_the_space_filling_polyhedra() {
        for (name, vertices, edges, faces) in [("ccp", 3, 8, 6), ("bcc", 6, 12, 7), ("primitive-cubic", 1, 3, 3)] {
            let d = diagram(&Host::parse(name).unwrap());
            assert_eq!((d.vertices.len(), d.edges.len(), d.faces.len()), (vertices, edges, faces), "{name}");
        }
    }

    /// In ccp the passage from octahedron to tetrahedron is the triangle 2/√3 − 1.
    #[test]
    fn edges_pass_their_triangles() {
        let d = diagram(&Host::parse("ccp").unwrap());
        for edge in &d.edges {
            assert!(edge.inside && (edge.bottleneck - (2.0 / 3.0_f64.sqrt() - 1.0)).abs() < 1e-12);
        }
    }
}
