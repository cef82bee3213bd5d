//! The shape of a coordination polyhedron, told from its angles.
//!
//! The cosines of all angles that pairs of neighbours make at the centre, sorted, are compared with those of ideal
//! polyhedra; the smallest root mean square difference names the shape. The comparison needs no pairing of vertices and
//! does not look at the count of neighbours alone: four in a square are told from four in a tetrahedron.

use nalgebra::Vector3;
use std::fmt;

/// Shape of an interstice.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Kind {
    /// Two neighbours, opposite.
    Linear,
    /// Three in a plane.
    Triangular,
    /// Four at the corners of a tetrahedron, regular or distorted.
    Tetrahedral,
    /// Four in a square.
    Square,
    /// Five: triangle and two poles.
    TrigonalBipyramidal,
    /// Five: square and a pole.
    SquarePyramidal,
    /// Six at the corners of an octahedron.
    Octahedral,
    /// Six: two triangles one above the other.
    TrigonalPrismatic,
    /// Seven: pentagon and two poles.
    PentagonalBipyramidal,
    /// Eight at the corners of a cube.
    Cubic,
    /// Eight: two squares turned by 45 degrees.
    SquareAntiprismatic,
    /// Twelve as in ccp.
    Cuboctahedral,
    /// Twelve as in hcp.
    Anticuboctahedral,
    /// Twelve at the corners of an icosahedron.
    Icosahedral,
    /// So many neighbours in no shape named here.
    Other(u8),
}

/// Largest root mean square difference of cosines at which a shape is still named. The tetrahedron of bcc, 0.19 from the
/// regular one and 0.28 from the square, is a tetrahedron; this project's own choice.
const NAME_LIMIT: f64 = 0.25;

impl Kind {
    const NAMES: [(Kind, &'static str); 14] = [
        (Kind::Linear, "linear"),
        (Kind::Triangular, "triangular"),
        (Kind::Tetrahedral, "tetrahedral"),
        (Kind::Square, "square"),
        (Kind::TrigonalBipyramidal, "trigonal bipyramidal"),
        (Kind::SquarePyramidal, "square pyramidal"),
        (Kind::Octahedral, "octahedral"),
        (Kind::TrigonalPrismatic, "trigonal prismatic"),
        (Kind::PentagonalBipyramidal, "pentagonal bipyramidal"),
        (Kind::Cubic, "cubic"),
        (Kind::SquareAntiprismatic, "square antiprismatic"),
        (Kind::Cuboctahedral, "cuboctahedral"),
        (Kind::Anticuboctahedral, "anticuboctahedral"),
        (Kind::Icosahedral, "icosahedral"),
    ];

    /// The kind of this name, as [`fmt::Display`] writes it; a hyphen may stand for the blank.
    pub fn parse(text: &str) -> Option<Self> {
        let text = text.replace('-', " ").to_ascii_lowercase();
        Self::NAMES.iter().find(|(_, name)| *name == text).map(|(kind, _)| *kind)
    }

    /// All names there are.
    pub fn names() -> impl Iterator<Item = &'static str> {
        Self::NAMES.iter().map(|(_, name)| *name)
    }

    /// Names the shape that these vectors from the centre to its neighbours form.
    pub fn of(neighbours: &[Vector3<f64>]) -> Self {
        let found = cosines(neighbours);
        Self::NAMES
            .iter()
            .map(|(kind, _)| (*kind, cosines(&ideal(*kind))))
            .filter(|(_, reference)| reference.len() == found.len())
            .map(|(kind, reference)| {
                let sum: f64 = found.iter().zip(&reference).map(|(p, q)| (p - q).powi(2)).sum();
                (kind, (sum / found.len().max(1) as f64).sqrt())
            })
            .filter(|(_, difference)| *difference < NAME_LIMIT)
            .min_by(|a, b| a.1.total_cmp(&b.1))
            .map_or(Self::Other(neighbours.len().min(255) as u8), |(kind, _)| kind)
    }
}

impl fmt::Display for Kind {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match Self::NAMES.iter().find(|(kind, _)| kind == self) {
            Some((_, name)) => f.pad(name),
            None => {
                let Self::Other(n) = self else { return Ok(()) };
                f.pad(&format!("{n}-coordinated"))
            }
        }
    }
}

/// Cosines of all angles between pairs of vectors, sorted; one neighbour has none.
fn cosines(vectors: &[Vector3<f64>]) -> Vec<f64> {
    let unit: Vec<_> = vectors.iter().map(|v| v.normalize()).collect();
    let mut cosines: Vec<f64> =
        (0..unit.len()).flat_map(|i| (0..i).map(move |j| (i, j))).map(|(i, j)| unit[i].dot(&unit[j])).collect();
    cosines.sort_by(f64::total_cmp);
    cosines
}

/// `n` points around the z axis at a height, turned by an angle in units of their spacing.
fn ring(n: u32, height: f64, turn: f64) -> impl Iterator<Item = Vector3<f64>> {
    (0..n).map(move |i| {
        let angle = std::f64::consts::TAU * (f64::from(i) + turn) / f64::from(n);
        Vector3::new(angle.cos(), angle.sin(), height)
    })
}

/// Vertices of the ideal polyhedron; lengths do not matter.
fn ideal(kind: Kind) -> Vec<Vector3<f64>> {
    let poles = || [Vector3::z(), -Vector3::z()].into_iter();
    match kind {
        Kind::Linear => poles().collect(),
        Kind::Triangular => ring(3, 0.0, 0.0).collect(),
        // The pole and a ring at cos θ = −1/3.
        Kind::Tetrahedral => std::iter::once(Vector3::z()).chain(ring(3, -(8.0_f64.sqrt()).recip(), 0.0)).collect(),
        Kind::Square => ring(4, 0.0, 0.0).collect(),
        Kind::TrigonalBipyramidal => ring(3, 0.0, 0.0).chain(poles()).collect(),
        Kind::SquarePyramidal => ring(4, 0.0, 0.0).chain(poles().take(1)).collect(),
        Kind::Octahedral => ring(4, 0.0, 0.0).chain(poles()).collect(),
        // Square sides: edge √3 of a triangle of circumradius 1.
        Kind::TrigonalPrismatic => {
            let h = 3.0_f64.sqrt() / 2.0;
            ring(3, h, 0.0).chain(ring(3, -h, 0.0)).collect()
        }
        Kind::PentagonalBipyramidal => ring(5, 0.0, 0.0).chain(poles()).collect(),
        Kind::Cubic => {
            let h = 0.5_f64.sqrt();
            ring(4, h, 0.0).chain(ring(4, -h, 0.0)).collect()
        }
        // All edges equal: height² = 1/√8 for squares of circumradius 1.
        Kind::SquareAntiprismatic => {
            let h = 8.0_f64.powf(-0.25);
            ring(4, h, 0.0).chain(ring(4, -h, 0.5)).collect()
        }
        Kind::Cuboctahedral => {
            let h = 2.0_f64.sqrt();
            let t = 3.0_f64.sqrt().recip();
            ring(6, 0.0, 0.0)
                .chain(ring(3, h, 0.25).map(move |p| flat(p, t)))
                .chain(ring(3, -h, 0.75).map(move |p| flat(p, t)))
                .collect()
        }
        Kind::Anticuboctahedral => {
            let h = 2.0_f64.sqrt();
            let t = 3.0_f64.sqrt().recip();
            ring(6, 0.0, 0.0)
                .chain(ring(3, h, 0.25).map(move |p| flat(p, t)))
                .chain(ring(3, -h, 0.25).map(move |p| flat(p, t)))
                .collect()
        }
        Kind::Icosahedral => ring(5, 0.5, 0.0).chain(ring(5, -0.5, 0.5)).chain(poles()).collect(),
        Kind::Other(_) => Vec::new(),
    }
}

/// Scales a point of a close-packed neighbouring layer: triangle of circumradius 1/√3 of the sphere distance at height
/// √(2/3).
fn flat(p: Vector3<f64>, scale: f64) -> Vector3<f64> {
    p * scale
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ideal_shapes_name_themselves_and_have_equal_edges() {
        for (kind, name) in Kind::NAMES {
            assert_eq!(Kind::of(&ideal(kind)), kind);
            assert_eq!(Kind::parse(name), Some(kind));
            assert_eq!(Kind::parse(&kind.to_string()), Some(kind));
        }
    }

    /// Closed forms of the angles: tetrahedron −1/3, cube ±1/3 and −1, icosahedron ±1/√5 and −1, cuboctahedron ±1/2.
    #[test]
    fn angles_are_the_closed_forms() {
        let all = |kind: Kind, values: &[f64]| {
            cosines(&ideal(kind)).iter().all(|c| values.iter().any(|v| (c - v).abs() < 1e-12))
        };
        assert!(all(Kind::Tetrahedral, &[-1.0 / 3.0]));
        assert!(all(Kind::Octahedral, &[0.0, -1.0]));
        assert!(all(Kind::Cubic, &[1.0 / 3.0, -1.0 / 3.0, -1.0]));
        assert!(all(Kind::Cuboctahedral, &[0.5, -0.5, 0.0, -1.0]));
        assert!(all(Kind::Icosahedral, &[5.0_f64.sqrt().recip(), -5.0_f64.sqrt().recip(), -1.0]));
    }

    #[test]
    fn a_crowd_has_no_name() {
        let crowd: Vec<_> = (0..20).map(|i| Vector3::new(1.0, f64::from(i), 0.3)).collect();
        assert_eq!(Kind::of(&crowd), Kind::Other(20));
        assert_eq!(Kind::Other(20).to_string(), "20-coordinated");
    }
}
