//! Vertices of the periodic Voronoi diagram, by clipping the cell of each centre.
//!
//! A cell starts as a cube and is cut by the planes midway to its neighbours, nearest first, until no plane still to
//! come can reach its farthest vertex. Points on a plane count as inside, so cospherical vertices, the rule in
//! packings, need no special case: the planes that meet in one point all keep it.
//!
//! For a fixed density the work is linear in the number of centres.
//! F. Aurenhammer, ACM Comput. Surv. 23, 345 (1991), doi:10.1145/116873.116880.

use crate::crystal::neighbours::NeighbourList;
use crate::crystal::{Fractional, Lattice};
use nalgebra::Vector3;

/// Points nearer to a plane than this share of the first radius are on it.
const ON_PLANE: f64 = 1e-9;

/// Vertices nearer than this share of the cell's size are one.
const SAME_POINT: f64 = 1e-7;

/// The vertices of the Voronoi cell of `centre`, relative to it, in the lattice's unit of length.
pub fn cell_vertices(
    lattice: &Lattice,
    list: &NeighbourList<'_>,
    centres: &[Fractional],
    centre: usize,
) -> Vec<Vector3<f64>> {
    // Every point of the cell is nearer to the centre than to its own lattice images: no vertex is farther than the
    // longest vector of a reduced basis, of which the sum of the edges is a safe bound.
    let bound: f64 = lattice.basis().column_iter().map(|edge| edge.norm()).sum();
    let mut cell = Cell::cube(bound);
    // Start from the mean distance between centres and widen until no farther centre can cut.
    let mut radius = 2.0 * (lattice.volume() / centres.len() as f64).cbrt();
    let mut done = 0.0;
    loop {
        let mut near = list.around(&centres[centre], radius);
        near.retain(|n| n.distance > done && (n.index != centre || n.image != [0; 3]));
        near.sort_by(|a, b| a.distance.total_cmp(&b.distance));
        for neighbour in &near {
            if neighbour.distance > 2.0 * cell.reach() {
                break;
            }
            cell.cut(&neighbour.vector);
        }
        done = radius;
        if radius >= 2.0 * cell.reach() {
            return cell.vertices();
        }
        radius = (2.0 * radius).min(2.0 * cell.reach() * (1.0 + ON_PLANE)).max(radius * 1.01);
    }
}

/// A convex polyhedron as its faces, each a polygon of points in order.
struct Cell {
    faces: Vec<Vec<Vector3<f64>>>,
    epsilon: f64,
}

impl Cell {
    fn cube(half: f64) -> Self {
        let corner = |x: usize, y: usize, z: usize| Vector3::new([-half, half][x], [-half, half][y], [-half, half][z]);
        let ring = [(0, 0), (0, 1), (1, 1), (1, 0)];
        let faces = (0..2)
            .flat_map(|side| {
                [
                    ring.map(|(u, v)| corner(side, u, v)).to_vec(),
                    ring.map(|(u, v)| corner(u, side, v)).to_vec(),
                    ring.map(|(u, v)| corner(u, v, side)).to_vec(),
                ]
            })
            .collect();
        Self { faces, epsilon: ON_PLANE * half }
    }

    /// Distance of the farthest vertex.
    fn reach(&self) -> f64 {
        self.faces.iter().flatten().map(|p| p.norm_squared()).fold(0.0, f64::max).sqrt()
    }

    /// Keeps the half space nearer to the origin than to `neighbour`.
    fn cut(&mut self, neighbour: &Vector3<f64>) {
        let distance = neighbour.norm();
        let normal = neighbour / distance;
        let height = |p: &Vector3<f64>| p.dot(&normal) - distance / 2.0;
        if self.faces.iter().flatten().all(|p| height(p) <= self.epsilon) {
            return;
        }
        let mut rim: Vec<Vector3<f64>> = Vec::new();
        for face in &mut self.faces {
            let mut kept: Vec<Vector3<f64>> = Vec::with_capacity(face.len() + 1);
            for (i, p) in face.iter().enumerate() {
                let q = &face[(i + 1) % face.len()];
                let (h, k) = (height(p), height(q));
                if h <= self.epsilon {
                    kept.push(*p);
                    if h >= -self.epsilon {
                        rim.push(*p);
                    }
                }
                if (h < -self.epsilon && k > self.epsilon) || (h > self.epsilon && k < -self.epsilon) {
                    let crossing = p + (q - p) * (h / (h - k));
                    kept.push(crossing);
                    rim.push(crossing);
                }
            }
            *face = kept;
        }
        self.faces.retain(|face| face.len() >= 3);
        let cap = ordered(rim, &normal, self.epsilon * 10.0);
        if cap.len() >= 3 {
            self.faces.push(cap);
        }
    }

    fn vertices(&self) -> Vec<Vector3<f64>> {
        let same = SAME_POINT * self.reach();
        let mut vertices: Vec<Vector3<f64>> = Vec::new();
        for p in self.faces.iter().flatten() {
            if vertices.iter().all(|v| (v - p).norm() > same) {
                vertices.push(*p);
            }
        }
        vertices
    }
}

/// Distinct points of a plane's convex polygon, in order around its middle.
fn ordered(points: Vec<Vector3<f64>>, normal: &Vector3<f64>, same: f64) -> Vec<Vector3<f64>> {
    let mut distinct: Vec<Vector3<f64>> = Vec::new();
    for p in points {
        if distinct.iter().all(|q| (q - p).norm() > same) {
            distinct.push(p);
        }
    }
    let middle = distinct.iter().sum::<Vector3<f64>>() / distinct.len().max(1) as f64;
    let u = normal.cross(&if normal.x.abs() < 0.8 { Vector3::x() } else { Vector3::y() }).normalize();
    let v = normal.cross(&u);
    let angle = |p: &Vector3<f64>| (p - middle).dot(&v).atan2((p - middle).dot(&u));
    distinct.sort_by(|p, q| angle(p).total_cmp(&angle(q)));
    distinct
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::crystal::Parameters;

    /// The cell of a primitive cubic lattice is a cube with 8 vertices, of bcc a truncated octahedron with 24, of fcc a
    /// rhombic dodecahedron with 14 (any textbook of solid state physics, e.g. Ashcroft & Mermin, chapter 4).
    #[test]
    fn wigner_seitz_cells_have_their_vertices() {
        let cube =
            Lattice::from_parameters(&Parameters { a: 2.0, b: 2.0, c: 2.0, alpha: 90.0, beta: 90.0, gamma: 90.0 })
                .unwrap();
        let f = |p: [f64; 3]| Fractional::new(p[0], p[1], p[2]);
        for (centres, vertices) in [
            (vec![[0.0; 3]], 8),
            (vec![[0.0; 3], [0.5; 3]], 24),
            (vec![[0.0; 3], [0.0, 0.5, 0.5], [0.5, 0.0, 0.5], [0.5, 0.5, 0.0]], 14),
        ] {
            let centres: Vec<_> = centres.into_iter().map(f).collect();
            let list = NeighbourList::new(&cube, &centres, 2.0);
            assert_eq!(cell_vertices(&cube, &list, &centres, 0).len(), vertices);
        }
    }
}
