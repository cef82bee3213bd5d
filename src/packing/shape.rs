//! Continuous shape measures: how far a coordination polyhedron is from an ideal one.
//!
//! S = 100 · min Σ|q_k − s R p_π(k)|² / Σ|q_k|² over rotations and reflections R, scales s and pairings π, where q are
//! the vertices and the centre of the polyhedron found, p those of the ideal one, both taken from the mean of their
//! points; the centres are paired with each other. S is 0 for the ideal shape and below 100 for any other.
//! M. Pinsky & D. Avnir, Inorg. Chem. 37, 5575 (1998), doi:10.1021/ic9804925.
//!
//! For a pairing, the best R and s follow from the singular values σ of Σ q pᵀ: S = 100 [1 − (Σσ)²/(Σq² Σp²)]. Up to six
//! vertices every pairing is tried that the symmetry of the ideal shape does not relate to another. Beyond, pairing
//! (assignment problem) and rotation are improved in turn from every start that lays two vertices of the ideal shape
//! along two of the shape found.

use super::assignment::assign;
use itertools::Itertools;
use nalgebra::{Matrix3, SVD, Vector3};

/// Most vertices for which all pairings are tried.
const ALL_PAIRINGS: usize = 6;

/// Most rounds of pairing and rotation from one start.
const ROUNDS: usize = 20;

/// An ideal shape, ready to be compared with.
#[derive(Clone, Debug)]
pub struct Shape {
    /// Vertices, then the centre; their mean at the origin, their squares adding up to 1.
    points: Vec<Vector3<f64>>,
    /// Pairings to try, for few vertices.
    pairings: Vec<Vec<usize>>,
}

impl Shape {
    /// From vectors from the centre to the vertices.
    pub fn new(vertices: &[Vector3<f64>]) -> Self {
        let points = normalised(vertices);
        let pairings = if vertices.len() <= ALL_PAIRINGS { distinct_pairings(&points) } else { Vec::new() };
        Self { points, pairings }
    }

    /// The measure of a polyhedron given as vectors from its centre to as many vertices; `None` for another number.
    pub fn measure(&self, vertices: &[Vector3<f64>]) -> Option<f64> {
        let n = vertices.len();
        if n + 1 != self.points.len() || n == 0 {
            return None;
        }
        let found = normalised(vertices);
        let best = if n <= ALL_PAIRINGS {
            self.pairings.iter().map(|pairing| overlap(&found, &self.points, pairing)).fold(0.0, f64::max)
        } else {
            self.searched(&found)
        };
        Some((100.0 * (1.0 - best * best)).max(0.0))
    }

    /// The largest overlap that alternating assignment and rotation reaches.
    fn searched(&self, found: &[Vector3<f64>]) -> f64 {
        let n = found.len() - 1;
        let Some(reference) = (1..n).find_map(|j| frame(&self.points[0], &self.points[j])) else { return 0.0 };
        let mut best = 0.0_f64;
        for (i, j) in (0..n).cartesian_product(0..n) {
            let Some(frame) = frame(&found[i], &found[j]) else { continue };
            for mirror in [1.0, -1.0] {
                let flip = Matrix3::from_diagonal(&Vector3::new(1.0, 1.0, mirror));
                let mut rotation = frame * flip * reference.transpose();
                let mut last = 0.0;
                for _ in 0..ROUNDS {
                    let pairing = assign(n, |k, m| -found[k].dot(&(rotation * self.points[m])));
                    let svd = SVD::new(covariance(found, &self.points, &pairing), true, true);
                    let value = svd.singular_values.sum();
                    if value <= last + 1e-12 {
                        break;
                    }
                    last = value;
                    let (Some(u), Some(v)) = (svd.u, svd.v_t) else { break };
                    rotation = u * v;
                }
                best = best.max(last);
            }
        }
        best
    }
}

/// Vertices and centre from their mean, scaled to a sum of squares of 1.
fn normalised(vertices: &[Vector3<f64>]) -> Vec<Vector3<f64>> {
    let n = vertices.len() as f64 + 1.0;
    let mean = vertices.iter().sum::<Vector3<f64>>() / n;
    let mut points: Vec<Vector3<f64>> = vertices.iter().map(|v| v - mean).collect();
    points.push(-mean);
    let size = points.iter().map(|p| p.norm_squared()).sum::<f64>().sqrt();
    points.iter_mut().for_each(|p| *p /= size);
    points
}

fn covariance(found: &[Vector3<f64>], ideal: &[Vector3<f64>], pairing: &[usize]) -> Matrix3<f64> {
    let n = pairing.len();
    let centre = found[n] * ideal[n].transpose();
    (0..n).fold(centre, |sum, k| sum + found[k] * ideal[pairing[k]].transpose())
}

/// Σ q · R p at the best R: the sum of the singular values.
fn overlap(found: &[Vector3<f64>], ideal: &[Vector3<f64>], pairing: &[usize]) -> f64 {
    SVD::new(covariance(found, ideal, pairing), false, false).singular_values.sum()
}

/// One pairing of each set that the symmetry of the shape relates.
fn distinct_pairings(points: &[Vector3<f64>]) -> Vec<Vec<usize>> {
    let n = points.len() - 1;
    let all: Vec<Vec<usize>> = (0..n).permutations(n).collect();
    let symmetry: Vec<&Vec<usize>> = all.iter().filter(|p| overlap(points, points, p) > 1.0 - 1e-9).collect();
    let least = |p: &Vec<usize>| symmetry.iter().all(|g| *p <= p.iter().map(|k| g[*k]).collect());
    all.iter().filter(|p| least(p)).cloned().collect()
}

/// Orthonormal axes: along the first vector, in the plane of the two, across it.
fn frame(first: &Vector3<f64>, second: &Vector3<f64>) -> Option<Matrix3<f64>> {
    let x = first.try_normalize(1e-9)?;
    let y = (second - x * x.dot(second)).try_normalize(1e-6)?;
    Some(Matrix3::from_columns(&[x, y, x.cross(&y)]))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::packing::Kind;

    /// Distances between ideal shapes, with the centre. Square to tetrahedron: Pinsky & Avnir (1998). Trigonal prism to
    /// octahedron: S. Alvarez et al., New J. Chem. 26, 996 (2002). Eight vertices: D. Casanova, M. Llunell, P. Alemany &
    /// S. Alvarez, Chem. Eur. J. 11, 1479 (2005). All from memory, to the digits shown.
    #[test]
    fn distances_between_ideal_shapes_are_the_published_ones() {
        for (kind, from, published, digit) in [
            (Kind::Square, Kind::Tetrahedral, 33.33, 0.01),
            (Kind::TrigonalPrismatic, Kind::Octahedral, 16.74, 0.02),
            (Kind::Cubic, Kind::SquareAntiprismatic, 10.99, 0.02),
            (Kind::Dodecahedral, Kind::SquareAntiprismatic, 2.85, 0.02),
            (Kind::Dodecahedral, Kind::Cubic, 7.95, 0.05),
        ] {
            let s = Shape::new(&from.ideal()).measure(&kind.ideal()).unwrap();
            assert!((s - published).abs() < digit, "{kind} from {from}: {s}");
        }
    }

    /// Neither turning, reflecting, scaling nor reordering changes a measure; it is symmetric between shapes.
    #[test]
    fn measures_do_not_depend_on_the_description() {
        let turn = nalgebra::Rotation3::from_euler_angles(0.3, -1.1, 2.0);
        for (a, b) in [
            (Kind::SquarePyramidal, Kind::TrigonalBipyramidal),
            (Kind::Octahedral, Kind::TrigonalPrismatic),
            (Kind::PentagonalBipyramidal, Kind::CappedTrigonalPrismatic),
            (Kind::Cubic, Kind::Dodecahedral),
            (Kind::Cuboctahedral, Kind::Icosahedral),
        ] {
            let shape = Shape::new(&a.ideal());
            let s = shape.measure(&b.ideal()).unwrap();
            let other: Vec<_> = b.ideal().iter().rev().map(|p| turn * Vector3::new(-p.x, p.y, p.z) * 3.0).collect();
            assert!((shape.measure(&other).unwrap() - s).abs() < 1e-9, "{a} {b}");
            assert!((Shape::new(&b.ideal()).measure(&a.ideal()).unwrap() - s).abs() < 1e-9, "{a} {b}");
            assert!(s > 1.0, "{a} {b} {s}");
        }
    }

    /// The search finds what trying all pairings finds, on irregular shapes of six vertices.
    #[test]
    fn the_search_reaches_the_exact_minimum() {
        for kind in [Kind::Octahedral, Kind::TrigonalPrismatic] {
            let shape = Shape::new(&kind.ideal());
            for seed in 0..20 {
                let bend = |i: usize| {
                    let t = f64::from(seed) * 1.7 + i as f64;
                    Vector3::new(t.sin(), (1.3 * t).cos(), (2.1 * t).sin()) * 0.25
                };
                let points: Vec<_> = Kind::Octahedral.ideal().iter().enumerate().map(|(i, p)| p + bend(i)).collect();
                let exact = shape.measure(&points).unwrap();
                let best = shape.searched(&normalised(&points));
                assert!((100.0 * (1.0 - best * best) - exact).abs() < 1e-9, "{kind} {seed} {exact}");
            }
        }
    }
}
