//! The lattice: basis vectors as the columns of a matrix, and the two kinds of coordinates.
//!
//! cartesian = A · fractional, with a along x and b in the xy plane when built from parameters.

use nalgebra::{Matrix3, Vector3};
use serde::{Deserialize, Serialize};

/// Coordinates along a, b, c of the cell they belong to; dimensionless.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Fractional(pub Vector3<f64>);

/// Coordinates on orthogonal axes, in Å.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Cartesian(pub Vector3<f64>);

impl Fractional {
    /// From three numbers.
    pub fn new(x: f64, y: f64, z: f64) -> Self {
        Self(Vector3::new(x, y, z))
    }

    /// The same position reduced to [0, 1) on each axis.
    pub fn reduced(&self) -> Self {
        Self(self.0.map(|x| {
            if (0.0..1.0).contains(&x) {
                return x;
            }
            let r = x.rem_euclid(1.0);
            // rem_euclid of a tiny negative number rounds up to 1.
            if r >= 1.0 { 0.0 } else { r }
        }))
    }
}

/// Lattice parameters: lengths in Å, angles in degrees.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Parameters {
    /// Length of a, Å.
    pub a: f64,
    /// Length of b, Å.
    pub b: f64,
    /// Length of c, Å.
    pub c: f64,
    /// Angle between b and c, degrees.
    pub alpha: f64,
    /// Angle between a and c, degrees.
    pub beta: f64,
    /// Angle between a and b, degrees.
    pub gamma: f64,
}

/// A lattice that cannot exist.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum LatticeError {
    /// A length or angle out of range.
    #[error("cell {name} is {value}; it must be {allowed}")]
    OutOfRange {
        /// Which parameter.
        name: &'static str,
        /// What it is.
        value: f64,
        /// What it may be.
        allowed: &'static str,
    },
    /// Angles that no three vectors can form, or vectors in one plane.
    #[error("cell angles {alpha}, {beta}, {gamma} degrees span no volume; no three vectors can form them")]
    Flat {
        /// Degrees.
        alpha: f64,
        /// Degrees.
        beta: f64,
        /// Degrees.
        gamma: f64,
    },
}

/// Longest cell edge accepted, Å; beyond it coordinates of 8 decimals no longer fix a position to 1e-3 Å.
pub const MAX_EDGE: f64 = 1e5;

/// Smallest ratio V/(abc) accepted; a flatter cell has no usable geometry.
pub const MIN_FLATNESS: f64 = 1e-4;

/// Three basis vectors (columns of a matrix), Å, right-handed.
#[derive(Clone, Debug, PartialEq)]
pub struct Lattice {
    basis: Matrix3<f64>,
    inverse: Matrix3<f64>,
}

impl Lattice {
    /// From basis vectors as columns, Å.
    ///
    /// # Errors
    /// [`LatticeError`] when a length is not in (0, [`MAX_EDGE`]], or the vectors are left-handed or nearly coplanar.
    pub fn from_basis(basis: Matrix3<f64>) -> Result<Self, LatticeError> {
        check_lengths([0, 1, 2].map(|axis| basis.column(axis).norm()))?;
        let edges: f64 = basis.column_iter().map(|c| c.norm()).product();
        let inverse = basis.try_inverse();
        match inverse {
            Some(inverse) if basis.determinant() / edges >= MIN_FLATNESS => Ok(Self { basis, inverse }),
            _ => {
                let p = parameters_of(&basis);
                Err(LatticeError::Flat { alpha: p.alpha, beta: p.beta, gamma: p.gamma })
            }
        }
    }

    /// From lattice parameters (Å, degrees): a along x, b in the xy plane.
    ///
    /// # Errors
    /// [`LatticeError`] when a parameter is out of range or the angles span no volume.
    pub fn from_parameters(p: &Parameters) -> Result<Self, LatticeError> {
        check_lengths([p.a, p.b, p.c])?;
        for (name, value) in [("angle alpha", p.alpha), ("angle beta", p.beta), ("angle gamma", p.gamma)] {
            if !(value > 0.0 && value < 180.0) {
                return Err(LatticeError::OutOfRange { name, value, allowed: "above 0 and below 180 degrees" });
            }
        }
        let (cos_a, cos_b, cos_g) = (cosine(p.alpha), cosine(p.beta), cosine(p.gamma));
        let sin_g = if p.gamma == 90.0 { 1.0 } else { p.gamma.to_radians().sin() };
        let cy = (cos_a - cos_b * cos_g) / sin_g;
        let cz_squared = 1.0 - cos_b * cos_b - cy * cy;
        if cz_squared <= 0.0 {
            return Err(LatticeError::Flat { alpha: p.alpha, beta: p.beta, gamma: p.gamma });
        }
        Self::from_basis(Matrix3::from_columns(&[
            Vector3::new(p.a, 0.0, 0.0),
            Vector3::new(p.b * cos_g, p.b * sin_g, 0.0),
            Vector3::new(p.c * cos_b, p.c * cy, p.c * cz_squared.sqrt()),
        ]))
    }

    /// Basis vectors as columns, Å.
    pub fn basis(&self) -> &Matrix3<f64> {
        &self.basis
    }

    /// Lengths (Å) and angles (degrees).
    pub fn parameters(&self) -> Parameters {
        parameters_of(&self.basis)
    }

    /// Cell volume, Å³.
    pub fn volume(&self) -> f64 {
        self.basis.determinant()
    }

    /// A · x, in Å.
    pub fn cartesian(&self, position: &Fractional) -> Cartesian {
        Cartesian(self.basis * position.0)
    }

    /// A⁻¹ · r.
    pub fn fractional(&self, position: &Cartesian) -> Fractional {
        Fractional(self.inverse * position.0)
    }

    /// Metric tensor AᵀA, Å².
    pub fn metric(&self) -> Matrix3<f64> {
        self.basis.transpose() * self.basis
    }

    /// Distance between neighbouring lattice planes (100), (010), (001): 1/|a*|, 1/|b*|, 1/|c*|, Å.
    pub fn spacings(&self) -> [f64; 3] {
        [0, 1, 2].map(|row| 1.0 / self.inverse.row(row).norm())
    }

    /// Along each axis, how many cells away an image within `radius` (Å) of a position in [0, 1) of the
    /// same cell's position can lie.
    pub fn images_within(&self, radius: f64) -> [i32; 3] {
        self.spacings().map(|spacing| (radius / spacing).ceil() as i32)
    }

    /// The same shape with all lengths multiplied by `factor` (> 0).
    ///
    /// # Errors
    /// [`LatticeError`] when the result is out of range.
    pub fn scaled(&self, factor: f64) -> Result<Self, LatticeError> {
        Self::from_basis(self.basis * factor)
    }

    /// The same lattice and cell in the standard orientation, a along x and b in the xy plane.
    ///
    /// # Errors
    /// None in practice: a lattice that exists has a standard orientation.
    pub fn oriented(&self) -> Result<Self, LatticeError> {
        Self::from_parameters(&self.parameters())
    }

    /// Shortest vector from `from` to any image of `to`, Å, found by search over the images that the plane
    /// spacings allow; rounding alone is only right below half the smallest spacing.
    pub fn nearest_image(&self, from: &Fractional, to: &Fractional) -> Vector3<f64> {
        let mut delta = to.0 - from.0;
        delta.apply(|x| *x -= x.round());
        let mut best = self.basis * delta;
        let reach = self.spacings().map(|spacing| (best.norm() / spacing + 0.5).floor() as i32);
        for i in -reach[0]..=reach[0] {
            for j in -reach[1]..=reach[1] {
                for k in -reach[2]..=reach[2] {
                    let candidate = self.basis * (delta + Vector3::new(f64::from(i), f64::from(j), f64::from(k)));
                    if candidate.norm_squared() < best.norm_squared() {
                        best = candidate;
                    }
                }
            }
        }
        best
    }

    /// Shortest distance between two positions and all their images, Å.
    pub fn distance(&self, a: &Fractional, b: &Fractional) -> f64 {
        self.nearest_image(a, b).norm()
    }
}

fn check_lengths(lengths: [f64; 3]) -> Result<(), LatticeError> {
    for (name, value) in ["length a", "length b", "length c"].into_iter().zip(lengths) {
        if !(value > 0.0 && value <= MAX_EDGE) {
            return Err(LatticeError::OutOfRange { name, value, allowed: "above 0 and at most 100000 Å" });
        }
    }
    Ok(())
}

/// Cosine of an angle in degrees, exact at 60, 90 and 120.
fn cosine(degrees: f64) -> f64 {
    match degrees {
        60.0 => 0.5,
        90.0 => 0.0,
        120.0 => -0.5,
        other => other.to_radians().cos(),
    }
}

fn parameters_of(basis: &Matrix3<f64>) -> Parameters {
    let v: Vec<Vector3<f64>> = basis.column_iter().map(|c| c.into_owned()).collect();
    let angle = |p: &Vector3<f64>, q: &Vector3<f64>| {
        // atan2 keeps full precision near 0, 90 and 180 degrees.
        p.cross(q).norm().atan2(p.dot(q)).to_degrees()
    };
    Parameters {
        a: v[0].norm(),
        b: v[1].norm(),
        c: v[2].norm(),
        alpha: angle(&v[1], &v[2]),
        beta: angle(&v[0], &v[2]),
        gamma: angle(&v[0], &v[1]),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn skewed() -> Lattice {
        Lattice::from_parameters(&Parameters { a: 3.0, b: 5.0, c: 7.0, alpha: 50.0, beta: 110.0, gamma: 75.0 }).unwrap()
    }

    #[test]
    fn parameters_survive_a_round_trip() {
        let p = skewed().parameters();
        for (got, want) in [(p.a, 3.0), (p.b, 5.0), (p.c, 7.0), (p.alpha, 50.0), (p.beta, 110.0), (p.gamma, 75.0)] {
            assert!((got - want).abs() < 1e-12, "{got} {want}");
        }
    }

    /// V² = a²b²c²(1 − cos²α − cos²β − cos²γ + 2 cosα cosβ cosγ), International Tables.
    #[test]
    fn volume_matches_the_closed_form() {
        let [ca, cb, cg] = [50.0_f64, 110.0, 75.0].map(|x| x.to_radians().cos());
        let want = 105.0 * (1.0 - ca * ca - cb * cb - cg * cg + 2.0 * ca * cb * cg).sqrt();
        assert!((skewed().volume() - want).abs() < 1e-10);
    }

    #[test]
    fn nearest_image_searches_where_rounding_fails() {
        let flat =
            Lattice::from_parameters(&Parameters { a: 1.0, b: 1.0, c: 9.0, alpha: 90.0, beta: 90.0, gamma: 15.0 })
                .unwrap();
        let (a, b) = (Fractional::new(0.0, 0.0, 0.0), Fractional::new(0.45, 0.5, 0.0));
        let mut brute = f64::INFINITY;
        for i in -9..=9 {
            for j in -9..=9 {
                let d = flat.basis() * (b.0 + Vector3::new(f64::from(i), f64::from(j), 0.0));
                brute = brute.min(d.norm());
            }
        }
        assert!((flat.distance(&a, &b) - brute).abs() < 1e-12);
    }

    #[test]
    fn impossible_cells_are_refused() {
        let p = Parameters { a: 1.0, b: 1.0, c: 1.0, alpha: 60.0, beta: 60.0, gamma: 150.0 };
        assert!(matches!(Lattice::from_parameters(&p), Err(LatticeError::Flat { .. })));
        for bad in [0.0, -1.0, f64::NAN, f64::INFINITY] {
            let p = Parameters { a: bad, b: 1.0, c: 1.0, alpha: 90.0, beta: 90.0, gamma: 90.0 };
            assert!(matches!(Lattice::from_parameters(&p), Err(LatticeError::OutOfRange { .. })), "{bad}");
        }
    }
}
