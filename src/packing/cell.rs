//! The power cell of one sphere, by clipping.
//!
//! A cell starts as a cube and is cut by the radical planes between its sphere and the others, nearest first, until no
//! plane still to come can reach its farthest vertex; for equal spheres that is the Voronoi cell. Vertices within
//! a rounding error of a plane are kept and count as on it, so cospherical points, the rule in packings, need no special
//! case: the faces are polygons that may share a vertex in any number.
//!
//! Radical plane of spheres at 0 and d with radii r, s: x·d/|d| = (d² + r² − s²)/(2|d|).
//! F. Aurenhammer, SIAM J. Comput. 16, 78 (1987), doi:10.1137/0216006 (power diagrams).

use crate::crystal::neighbours::{Neighbour, NeighbourList};
use crate::crystal::{Fractional, Lattice};
use nalgebra::Vector3;

/// A vertex nearer to a plane than this share of the mean distance between spheres is on it.
const ON_PLANE: f64 = 1e-10;

/// A face of a cell.
#[derive(Clone, Debug, Default)]
pub struct Face {
    /// Sphere on the other side, and the image in which it lies relative to the cell's sphere as given.
    pub sphere: usize,
    /// See [`Self::sphere`].
    pub image: [i32; 3],
    /// Corners in order, as indices of [`PowerCell::vertices`].
    pub corners: Vec<u32>,
}

/// A convex polyhedron around one sphere; also the room in which it is cut, to be used again for the next.
#[derive(Clone, Debug, Default)]
pub struct PowerCell {
    /// Corners relative to the centre of the sphere.
    pub vertices: Vec<Vector3<f64>>,
    /// Faces.
    pub faces: Vec<Face>,
    spare: Vec<Vec<u32>>,
    height: Vec<f64>,
    rim: Vec<(f64, u32)>,
    crossings: Vec<(u32, u32, u32)>,
    renumbered: Vec<u32>,
    epsilon: f64,
}

/// The spheres among which cells are cut.
pub struct Spheres<'a> {
    /// The lattice.
    pub lattice: &'a Lattice,
    /// Centres.
    pub centres: &'a [Fractional],
    /// Radii, in the lattice's unit of length.
    pub radii: &'a [f64],
    /// The centres sorted into boxes.
    pub list: NeighbourList<'a>,
    /// Largest of the radii.
    pub largest: f64,
    /// Cube root of the volume per sphere.
    pub spacing: f64,
    /// No vertex lies farther from its sphere.
    bound: f64,
}

impl<'a> Spheres<'a> {
    /// Sorts the spheres.
    pub fn new(lattice: &'a Lattice, centres: &'a [Fractional], radii: &'a [f64]) -> Self {
        let spacing = (lattice.volume() / centres.len().max(1) as f64).cbrt();
        let largest = radii.iter().copied().fold(0.0, f64::max);
        // A point of the cell has a smaller power to its own sphere than to that one's lattice images: no vertex is
        // farther than the longest vector of a reduced basis, of which the sum of the edges is a safe bound.
        let bound = lattice.basis().column_iter().map(|edge| edge.norm()).sum();
        Self { lattice, centres, radii, list: NeighbourList::new(lattice, centres, spacing), largest, spacing, bound }
    }

    /// Least distance from a point to the surface of any sphere.
    pub fn clearance(&self, point: &Fractional) -> f64 {
        let mut reach = self.spacing;
        loop {
            let near = self.list.around(point, reach);
            let least = near.iter().map(|n| n.distance - self.radii[n.index]).fold(f64::INFINITY, f64::min);
            // A sphere not seen is farther than `reach` less its radius.
            if least <= reach - self.largest || reach > 2.0 * self.bound + self.largest {
                return least;
            }
            reach = (reach * 1.5).max(if least.is_finite() { least + self.largest } else { 0.0 });
        }
    }
}

impl PowerCell {
    /// Cuts the cell of a sphere; it has no faces when larger spheres cover it whole.
    pub fn cut_out(&mut self, spheres: &Spheres<'_>, centre: usize) {
        self.start(spheres.bound, ON_PLANE * spheres.spacing);
        let own = spheres.radii[centre].powi(2);
        let most = spheres.largest.powi(2);
        let offset = |d: f64, other: f64| (d * d + own - other) / (2.0 * d);
        let mut radius = 2.2 * spheres.spacing;
        let mut done = 0.0;
        let mut reach = self.reach();
        loop {
            let mut near: Vec<Neighbour> = spheres.list.around(&spheres.centres[centre], radius);
            near.retain(|n| n.distance > done && (n.index != centre || n.image != [0; 3]));
            near.sort_unstable_by(|a, b| {
                a.distance.total_cmp(&b.distance).then(a.index.cmp(&b.index)).then(a.image.cmp(&b.image))
            });
            for n in &near {
                if offset(n.distance, most) > reach {
                    return;
                }
                let plane = offset(n.distance, spheres.radii[n.index].powi(2));
                if plane <= reach && self.cut(&(n.vector / n.distance), plane, n.index, n.image) {
                    reach = self.reach();
                }
                if self.faces.is_empty() {
                    return;
                }
            }
            done = radius;
            if offset(done, most) > reach {
                return;
            }
            // Farthest sphere whose plane can still come within reach.
            let needed = reach + (reach * reach + most - own).max(0.0).sqrt();
            radius = (1.7 * radius).min(needed * (1.0 + ON_PLANE)).max(1.01 * radius);
        }
    }

    /// Volume, by pyramids over the faces.
    pub fn volume(&self) -> f64 {
        let face = |f: &Face| {
            let p = |k: usize| self.vertices[f.corners[k] as usize];
            (1..f.corners.len() - 1).map(|k| p(0).dot(&p(k).cross(&p(k + 1)))).sum::<f64>().abs() / 6.0
        };
        // The apex, the sphere's centre, may lie outside a cell that larger spheres push away; faces seen from behind
        // then count negative.
        let middle = self.vertices.iter().sum::<Vector3<f64>>() / self.vertices.len().max(1) as f64;
        let sign = |f: &Face| {
            let p = |k: usize| self.vertices[f.corners[k] as usize];
            let normal = (p(1) - p(0)).cross(&(p(2) - p(0)));
            if (normal.dot(&p(0))) * (normal.dot(&(p(0) - middle))) < 0.0 { -1.0 } else { 1.0 }
        };
        self.faces.iter().map(|f| sign(f) * face(f)).sum()
    }

    fn start(&mut self, half: f64, epsilon: f64) {
        self.epsilon = epsilon;
        self.vertices.clear();
        self.spare.extend(self.faces.drain(..).map(|f| f.corners));
        for k in 0..8 {
            let side = |bit: u32| if k >> bit & 1 == 1 { half } else { -half };
            self.vertices.push(Vector3::new(side(0), side(1), side(2)));
        }
        for corners in [[0, 2, 6, 4], [1, 3, 7, 5], [0, 1, 5, 4], [2, 3, 7, 6], [0, 1, 3, 2], [4, 5, 7, 6]] {
            let corners = self.taken(corners.into_iter());
            self.faces.push(Face { sphere: usize::MAX, image: [0; 3], corners });
        }
    }

    /// A list of corners in memory used before.
    fn taken(&mut self, corners: impl Iterator<Item = u32>) -> Vec<u32> {
        let mut list = self.spare.pop().unwrap_or_default();
        list.clear();
        list.extend(corners);
        list
    }

    /// Distance of the farthest vertex.
    fn reach(&self) -> f64 {
        self.vertices.iter().map(|p| p.norm_squared()).fold(0.0, f64::max).sqrt()
    }

    /// Keeps the half space x·normal ≤ offset; says whether anything was cut off.
    fn cut(&mut self, normal: &Vector3<f64>, offset: f64, sphere: usize, image: [i32; 3]) -> bool {
        self.height.clear();
        self.height.extend(self.vertices.iter().map(|p| p.dot(normal) - offset));
        let epsilon = self.epsilon;
        if self.height.iter().all(|h| *h <= epsilon) {
            return false;
        }
        self.crossings.clear();
        let before = self.vertices.len() as u32;
        for at in (0..self.faces.len()).rev() {
            self.cut_face(at);
        }
        let rim = self.rim(before, normal);
        if rim.len() >= 3 {
            self.faces.push(Face { sphere, image, corners: rim });
        } else {
            self.spare.push(rim);
        }
        self.compact();
        true
    }

    fn cut_face(&mut self, at: usize) {
        let epsilon = self.epsilon;
        let old = std::mem::take(&mut self.faces[at].corners);
        if old.iter().all(|i| self.height[*i as usize] <= epsilon) {
            // A face in the plane itself, all the rest of the cell beyond it, goes with the rest.
            if old.iter().any(|i| self.height[*i as usize] < -epsilon) {
                self.faces[at].corners = old;
                return;
            }
        }
        let mut kept = self.spare.pop().unwrap_or_default();
        kept.clear();
        let mut inside = false;
        for (k, &i) in old.iter().enumerate() {
            let j = old[if k + 1 == old.len() { 0 } else { k + 1 }];
            let (h, l) = (self.height[i as usize], self.height[j as usize]);
            if h <= epsilon {
                kept.push(i);
                inside |= h < -epsilon;
            }
            if (h < -epsilon && l > epsilon) || (h > epsilon && l < -epsilon) {
                kept.push(self.crossing(i, j));
            }
        }
        self.spare.push(old);
        if inside && kept.len() >= 3 {
            self.faces[at].corners = kept;
        } else {
            self.spare.push(kept);
            self.faces.swap_remove(at);
        }
    }

    /// The vertex where the edge between two vertices meets the plane; made once for the two faces of the edge.
    fn crossing(&mut self, i: u32, j: u32) -> u32 {
        let (i, j) = (i.min(j), i.max(j));
        if let Some(&(_, _, k)) = self.crossings.iter().find(|(p, q, _)| (*p, *q) == (i, j)) {
            return k;
        }
        let (p, q) = (self.vertices[i as usize], self.vertices[j as usize]);
        let (h, l) = (self.height[i as usize], self.height[j as usize]);
        let k = self.vertices.len() as u32;
        self.vertices.push(p + (q - p) * (h / (h - l)));
        self.crossings.push((i, j, k));
        k
    }

    /// The corners of the new face: vertices in the plane and crossings, in order around their middle.
    fn rim(&mut self, before: u32, normal: &Vector3<f64>) -> Vec<u32> {
        self.rim.clear();
        let on_plane = (0..before).filter(|i| self.height[*i as usize].abs() <= self.epsilon);
        self.rim.extend(on_plane.chain(before..self.vertices.len() as u32).map(|i| (0.0, i)));
        let middle = self.rim.iter().map(|(_, i)| self.vertices[*i as usize]).sum::<Vector3<f64>>()
            / self.rim.len().max(1) as f64;
        let u = normal.cross(&if normal.x.abs() < 0.8 { Vector3::x() } else { Vector3::y() });
        let v = normal.cross(&u);
        for (turn, i) in &mut self.rim {
            let d = self.vertices[*i as usize] - middle;
            *turn = turn_of(d.dot(&u), d.dot(&v));
        }
        self.rim.sort_unstable_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
        let mut list = self.spare.pop().unwrap_or_default();
        list.clear();
        list.extend(self.rim.iter().map(|(_, i)| *i));
        list
    }

    /// Drops the vertices that no face uses any more.
    fn compact(&mut self) {
        const UNUSED: u32 = u32::MAX;
        self.renumbered.clear();
        self.renumbered.resize(self.vertices.len(), UNUSED);
        for face in &self.faces {
            for i in &face.corners {
                self.renumbered[*i as usize] = 0;
            }
        }
        let mut n = 0;
        for i in 0..self.vertices.len() {
            if self.renumbered[i] != UNUSED {
                self.vertices[n] = self.vertices[i];
                self.renumbered[i] = n as u32;
                n += 1;
            }
        }
        self.vertices.truncate(n);
        for face in &mut self.faces {
            for i in &mut face.corners {
                *i = self.renumbered[*i as usize];
            }
        }
    }
}

/// Grows with the angle of (x, y) from −2 to 2, as the angle itself does from −π to π.
fn turn_of(x: f64, y: f64) -> f64 {
    let t = x / (x.abs() + y.abs());
    if y < 0.0 { t - 1.0 } else { 1.0 - t }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::crystal::Parameters;

    fn cube(a: f64) -> Lattice {
        Lattice::from_parameters(&Parameters { a, b: a, c: a, alpha: 90.0, beta: 90.0, gamma: 90.0 }).unwrap()
    }

    fn places(p: &[[f64; 3]]) -> Vec<Fractional> {
        p.iter().map(|p| Fractional::new(p[0], p[1], p[2])).collect()
    }

    /// The cell of a primitive cubic lattice is a cube with 8 vertices, of bcc a truncated octahedron with 24, of fcc a
    /// rhombic dodecahedron with 14 (any textbook of solid state physics, e.g. Ashcroft & Mermin, chapter 4).
    #[test]
    fn wigner_seitz_cells_have_their_vertices_and_faces() {
        let lattice = cube(2.0);
        for (centres, vertices, faces) in [
            (places(&[[0.0; 3]]), 8, 6),
            (places(&[[0.0; 3], [0.5; 3]]), 24, 14),
            (places(&[[0.0; 3], [0.0, 0.5, 0.5], [0.5, 0.0, 0.5], [0.5, 0.5, 0.0]]), 14, 12),
        ] {
            let radii = vec![1.0; centres.len()];
            let spheres = Spheres::new(&lattice, &centres, &radii);
            let mut cell = PowerCell::default();
            for i in 0..centres.len() {
                cell.cut_out(&spheres, i);
                assert_eq!((cell.vertices.len(), cell.faces.len()), (vertices, faces));
                assert!((cell.volume() - 8.0 / centres.len() as f64).abs() < 1e-12);
            }
        }
    }

    /// CsCl's two spheres: the radical plane of touching spheres passes through their contact. A sphere well inside
    /// another has no cell.
    #[test]
    fn unequal_spheres_part_at_the_radical_plane() {
        let lattice = cube(4.0);
        let centres = places(&[[0.0; 3], [0.5; 3]]);
        let contact = 12.0_f64.sqrt();
        let radii = [0.3 * contact, 0.7 * contact];
        let spheres = Spheres::new(&lattice, &centres, &radii);
        let mut cell = PowerCell::default();
        cell.cut_out(&spheres, 0);
        assert_eq!(cell.faces.len(), 8);
        let first = cell.volume();
        cell.cut_out(&spheres, 1);
        assert!((first + cell.volume() - 64.0).abs() < 1e-10);
        // The octahedron |x|+|y|+|z| ≤ s has volume 4s³/3; its faces lie at s/√3 = 0.3 · contact.
        assert!((first - 4.0 / 3.0 * (0.3 * contact * 3.0_f64.sqrt()).powi(3)).abs() < 1e-10);
        let hidden = [0.1, 3.9];
        let near = places(&[[0.0; 3], [0.01, 0.0, 0.0]]);
        cell.cut_out(&Spheres::new(&lattice, &near, &hidden), 0);
        assert!(cell.faces.is_empty());
    }

    #[test]
    fn clearance_is_the_nearest_surface() {
        let lattice = cube(4.0);
        let centres = places(&[[0.0; 3], [0.5; 3]]);
        let spheres = Spheres::new(&lattice, &centres, &[0.2, 1.5]);
        assert!((spheres.clearance(&Fractional::new(0.1, 0.0, 0.0)) - 0.2).abs() < 1e-12);
        assert!((spheres.clearance(&Fractional::new(0.5, 0.0, 0.0)) - (8.0_f64.sqrt() - 1.5)).abs() < 1e-12);
    }
}
