//! The sphere that touches given spheres, and whether they enclose it.

use nalgebra::{Matrix3, SymmetricEigen, Vector3};

/// A sphere to be touched: its centre relative to the starting point, and its radius.
pub type Sphere = (Vector3<f64>, f64);

/// Most steps; convergence is quadratic where the spheres can all be touched.
const MAX_STEPS: usize = 40;

/// Steps shorter than this, in the unit of the radii (that of the packing sphere is 1), end the search.
const CONVERGED: f64 = 1e-14;

/// Directions in which the spheres determine the centre more weakly than this share of the best are left alone: across
/// the plane of three spheres, along the plane between two.
const DETERMINED: f64 = 1e-7;

/// Where the sphere lies, relative to the starting point, whose surface is at one distance ρ from all given surfaces, and
/// ρ itself: |c − pᵢ| − rᵢ = ρ. With more spheres than can be touched, the least sum of squares of |c − pᵢ| − rᵢ − ρ. With
/// three or two, the smallest sphere between them on the plane or line through the starting point that they leave open.
///
/// Gauss-Newton steps: with uᵢ = (c − pᵢ)/|c − pᵢ| and means taken off, Σ(uᵢ − ū)(uᵢ − ū)ᵀ δ = −Σ(uᵢ − ū)(gᵢ − ḡ),
/// g = |c − p| − r.
pub fn centre(spheres: &[Sphere]) -> (Vector3<f64>, f64) {
    let n = spheres.len().max(1) as f64;
    let mut at = Vector3::zeros();
    let mut mean = 0.0;
    for _ in 0..MAX_STEPS {
        let arms = || spheres.iter().map(|(p, r)| (at - p, r));
        let middle: Vector3<f64> = arms().map(|(d, _)| d.normalize()).sum::<Vector3<f64>>() / n;
        mean = arms().map(|(d, r)| d.norm() - r).sum::<f64>() / n;
        let (mut normal, mut right) = (Matrix3::zeros(), Vector3::zeros());
        for (d, r) in arms() {
            let u = d.normalize() - middle;
            normal += u * u.transpose();
            right -= u * (d.norm() - r - mean);
        }
        let step = solve(&normal, &right);
        if !step.iter().all(|x| x.is_finite()) {
            break;
        }
        at += step;
        if step.norm() < CONVERGED {
            break;
        }
    }
    (at, mean)
}

/// The shortest solution, in the directions that are determined.
fn solve(normal: &Matrix3<f64>, right: &Vector3<f64>) -> Vector3<f64> {
    // The product of eigenvalues against the cube of their mean tells a sound matrix cheaply.
    let scale = normal.trace() / 3.0;
    if normal.determinant() > 1e-3 * scale.powi(3)
        && let Some(inverse) = normal.try_inverse()
    {
        return inverse * right;
    }
    let eigen = SymmetricEigen::new(*normal);
    let most = eigen.eigenvalues.amax();
    let mut step = Vector3::zeros();
    for (value, vector) in eigen.eigenvalues.iter().zip(eigen.eigenvectors.column_iter()) {
        if *value > DETERMINED * most && *value > 0.0 {
            step += vector * (vector.dot(right) / value);
        }
    }
    step
}

/// How far spheres in these directions are from enclosing a point: the distance from the origin to the convex hull of
/// the unit vectors, 0 when it lies inside or in a face.
pub fn imbalance(directions: &[Vector3<f64>]) -> f64 {
    let unit: Vec<Vector3<f64>> = directions.iter().map(|d| d.normalize()).collect();
    distance_to_hull(&unit)
}

/// Whether spheres in these directions enclose a point on all sides: the convex hull of the unit vectors holds the
/// origin and a neighbourhood of size `margin`.
pub fn enclosed(directions: &[Vector3<f64>], margin: f64) -> bool {
    let unit: Vec<Vector3<f64>> = directions.iter().map(|d| d.normalize()).collect();
    [Vector3::x(), -Vector3::x(), Vector3::y(), -Vector3::y(), Vector3::z(), -Vector3::z()].iter().all(|axis| {
        let shifted: Vec<Vector3<f64>> = unit.iter().map(|u| u + axis * margin).collect();
        distance_to_hull(&shifted) < margin / 10.0
    })
}

/// Distance from the origin to the convex hull of points of about unit length, to 1e-3 or so.
///
/// Gilbert's iteration for the point of a hull nearest to the origin: E. G. Gilbert, SIAM J. Control 4, 61 (1966),
/// doi:10.1137/0304007.
fn distance_to_hull(points: &[Vector3<f64>]) -> f64 {
    const STEPS: usize = 200;
    const GAP: f64 = 1e-4;
    let Some(mut at) = points.first().copied() else { return 1.0 };
    for _ in 0..STEPS {
        let Some(support) = points.iter().copied().min_by(|a, b| a.dot(&at).total_cmp(&b.dot(&at))) else { break };
        let along = support - at;
        if at.dot(&along) > -GAP * GAP || at.norm() < GAP {
            break;
        }
        at += along * (-at.dot(&along) / along.norm_squared()).clamp(0.0, 1.0);
    }
    at.norm()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn at(shift: Vector3<f64>, points: &[[f64; 3]], radii: &[f64]) -> Vec<Sphere> {
        points.iter().zip(radii).map(|(p, r)| (Vector3::from(*p) - shift, *r)).collect()
    }

    /// Four mutually touching unit spheres: the fifth between them has radius √(3/2) − 1 (Pauling 1929).
    #[test]
    fn the_sphere_in_a_tetrahedron() {
        let corners = [[1.0, 1.0, 1.0], [1.0, -1.0, -1.0], [-1.0, 1.0, -1.0], [-1.0, -1.0, 1.0]];
        let edge = 0.5_f64.sqrt();
        let corners = corners.map(|c| c.map(|x| x * edge));
        let start = Vector3::new(0.2, -0.1, 0.15);
        let (c, rho) = centre(&at(start, &corners, &[1.0; 4]));
        assert!((c + start).norm() < 1e-14);
        assert!((rho - (1.5_f64.sqrt() - 1.0)).abs() < 1e-14);
    }

    /// Mutually touching spheres of curvatures k₁…k₄ hold a fifth between them of curvature k with
    /// (Σk)² = 3 Σk² (F. Soddy, Nature 137, 1021 (1936), doi:10.1038/1371021a0).
    #[test]
    fn unequal_spheres_obey_soddys_theorem() {
        let r: [f64; 4] = [1.0, 1.2, 0.7, 0.9];
        let side = |i: usize, j: usize| r[i] + r[j];
        let x2 = side(0, 1);
        let x3 = (side(0, 2).powi(2) - side(1, 2).powi(2) + x2 * x2) / (2.0 * x2);
        let y3 = (side(0, 2).powi(2) - x3 * x3).sqrt();
        let x4 = (side(0, 3).powi(2) - side(1, 3).powi(2) + x2 * x2) / (2.0 * x2);
        let y4 = (side(0, 3).powi(2) - side(2, 3).powi(2) + x3 * x3 + y3 * y3 - 2.0 * x4 * x3) / (2.0 * y3);
        let z4 = (side(0, 3).powi(2) - x4 * x4 - y4 * y4).sqrt();
        let points = [[0.0; 3], [x2, 0.0, 0.0], [x3, y3, 0.0], [x4, y4, z4]];
        let start = points.iter().map(|p| Vector3::from(*p)).sum::<Vector3<f64>>() / 4.0;
        let (_, rho) = centre(&at(start, &points, &r));
        let k: f64 = r.iter().map(|r| 1.0 / r).sum::<f64>() + 1.0 / rho;
        let squares: f64 = r.iter().map(|r| 1.0 / (r * r)).sum::<f64>() + 1.0 / (rho * rho);
        assert!((k * k / squares - 3.0).abs() < 1e-12);
    }

    /// Between three touching unit spheres 2/√3 − 1, between two at distance 3 half the gap, both found from beside.
    #[test]
    fn three_and_two_spheres_leave_directions_open() {
        let h = 3.0_f64.sqrt();
        let triangle = [[0.0, 0.0, 0.0], [2.0, 0.0, 0.0], [1.0, h, 0.0]];
        let start = Vector3::new(0.9, 0.4, 0.0);
        let (c, rho) = centre(&at(start, &triangle, &[1.0; 3]));
        assert!((c + start - Vector3::new(1.0, h / 3.0, 0.0)).norm() < 1e-12);
        assert!((rho - (2.0 / h - 1.0)).abs() < 1e-12);
        let (c, rho) = centre(&at(Vector3::new(1.0, 0.0, 0.0), &[[0.0; 3], [3.0, 0.0, 0.0]], &[1.0; 2]));
        assert!((c.x - 0.5).abs() < 1e-14 && (rho - 0.5).abs() < 1e-14);
    }

    #[test]
    fn enclosure_is_told() {
        let octahedron = [Vector3::x(), -Vector3::x(), Vector3::y(), -Vector3::y(), Vector3::z(), -Vector3::z()];
        assert!(imbalance(&octahedron) < 1e-3);
        assert!(imbalance(&octahedron[..2]) < 1e-3);
        let corner = [Vector3::x(), Vector3::y(), Vector3::z()];
        assert!((imbalance(&corner) - 3.0_f64.sqrt().recip()).abs() < 1e-3);
        assert_eq!(imbalance(&[]), 1.0);
        assert!(enclosed(&octahedron, 0.1));
        // Four in a square enclose in their plane only.
        assert!(imbalance(&octahedron[..4]) < 1e-3 && !enclosed(&octahedron[..4], 0.1));
        assert!(!enclosed(&octahedron[..5], 0.1));
    }
}
