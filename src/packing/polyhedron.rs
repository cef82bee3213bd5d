//! The kinds of coordination polyhedra, and which of them a shell of spheres is nearest to.
//!
//! The kind is that of the least continuous shape measure among those with as many vertices: four in a square are told
//! from four in a tetrahedron.

use super::shape::Shape;
use nalgebra::Vector3;
use std::fmt;
use std::sync::LazyLock;

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
    /// Seven: a trigonal prism with a cap over one of its squares.
    CappedTrigonalPrismatic,
    /// Eight at the corners of a cube.
    Cubic,
    /// Eight: two squares turned by 45 degrees.
    SquareAntiprismatic,
    /// Eight at the corners of a dodecahedron with triangular faces, as in garnet and zircon.
    Dodecahedral,
    /// Nine: a trigonal prism with a cap over each of its squares.
    TricappedTrigonalPrismatic,
    /// Twelve as in ccp.
    Cuboctahedral,
    /// Twelve as in hcp.
    Anticuboctahedral,
    /// Twelve at the corners of an icosahedron.
    Icosahedral,
    /// So many neighbours in no shape named here.
    Other(u8),
}

/// Largest shape measure at which a shape is still named: a little less than lies between octahedron and trigonal prism
/// (16.7). This project's own choice.
const NAME_LIMIT: f64 = 15.0;

static SHAPES: LazyLock<Vec<(Kind, usize, Shape)>> = LazyLock::new(|| {
    Kind::NAMES
        .iter()
        .map(|(kind, _)| {
            let ideal = kind.ideal();
            (*kind, ideal.len(), Shape::new(&ideal))
        })
        .collect()
});

impl Kind {
    const NAMES: [(Kind, &'static str); 17] = [
        (Kind::Linear, "linear"),
        (Kind::Triangular, "triangular"),
        (Kind::Tetrahedral, "tetrahedral"),
        (Kind::Square, "square"),
        (Kind::TrigonalBipyramidal, "trigonal bipyramidal"),
        (Kind::SquarePyramidal, "square pyramidal"),
        (Kind::Octahedral, "octahedral"),
        (Kind::TrigonalPrismatic, "trigonal prismatic"),
        (Kind::PentagonalBipyramidal, "pentagonal bipyramidal"),
        (Kind::CappedTrigonalPrismatic, "capped trigonal prismatic"),
        (Kind::Cubic, "cubic"),
        (Kind::SquareAntiprismatic, "square antiprismatic"),
        (Kind::Dodecahedral, "dodecahedral"),
        (Kind::TricappedTrigonalPrismatic, "tricapped trigonal prismatic"),
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

    /// The kind that these vectors from the centre to its neighbours are nearest to, and their measure from its ideal
    /// shape (0: ideal); no measure where no shape of so many vertices is known.
    pub fn of(neighbours: &[Vector3<f64>]) -> (Self, Option<f64>) {
        let nearest = SHAPES
            .iter()
            .filter(|(_, vertices, _)| *vertices == neighbours.len())
            .filter_map(|(kind, _, shape)| shape.measure(neighbours).map(|s| (*kind, s)))
            .min_by(|a, b| a.1.total_cmp(&b.1));
        match nearest {
            Some((kind, s)) if s < NAME_LIMIT => (kind, Some(s)),
            other => (Self::Other(neighbours.len().min(255) as u8), other.map(|(_, s)| s)),
        }
    }

    /// Vectors from the centre to the vertices of the ideal polyhedron, all of length 1.
    pub(super) fn ideal(self) -> Vec<Vector3<f64>> {
        let poles = || [0.0, 180.0].map(|polar| ring(1, polar, 0.0)).concat();
        match self {
            Kind::Linear => poles(),
            Kind::Triangular => ring(3, 90.0, 0.0),
            // cos θ = −1/3.
            Kind::Tetrahedral => [ring(1, 0.0, 0.0), ring(3, (-1.0_f64 / 3.0).acos().to_degrees(), 0.0)].concat(),
            Kind::Square => ring(4, 90.0, 0.0),
            Kind::TrigonalBipyramidal => [poles(), ring(3, 90.0, 0.0)].concat(),
            // Angle between pole and base of five-coordinate complexes; common practice, no source.
            Kind::SquarePyramidal => [ring(1, 0.0, 0.0), ring(4, 104.45, 0.0)].concat(),
            Kind::Octahedral => [poles(), ring(4, 90.0, 0.0)].concat(),
            Kind::TrigonalPrismatic => prism(SQUARE_SIDES),
            Kind::PentagonalBipyramidal => [poles(), ring(5, 90.0, 0.0)].concat(),
            Kind::CappedTrigonalPrismatic => [prism(SQUARE_SIDES), ring(1, 90.0, 0.5 / 3.0)].concat(),
            // tan θ = √2.
            Kind::Cubic => {
                let polar = 2.0_f64.sqrt().atan().to_degrees();
                [ring(4, polar, 0.0), ring(4, 180.0 - polar, 0.0)].concat()
            }
            // All edges equal: height of a square over the centre 8^(−1/4) of its circumradius.
            Kind::SquareAntiprismatic => {
                let polar = 8.0_f64.powf(0.25).atan().to_degrees();
                [ring(4, polar, 0.0), ring(4, 180.0 - polar, 0.125)].concat()
            }
            // J. L. Hoard & J. V. Silverton, Inorg. Chem. 2, 235 (1963), from memory: 36.85 and 69.46 degrees from the
            // fourfold inversion axis.
            Kind::Dodecahedral => {
                [ring(2, 36.85, 0.0), ring(2, 180.0 - 36.85, 0.25), ring(2, 69.46, 0.25), ring(2, 180.0 - 69.46, 0.0)]
                    .concat()
            }
            // Between the prism of square sides and a taller one; common practice, no source.
            Kind::TricappedTrigonalPrismatic => [prism(45.0), ring(3, 90.0, 0.5 / 3.0)].concat(),
            Kind::Cuboctahedral => close_packed(0.5),
            Kind::Anticuboctahedral => close_packed(0.0),
            // tan θ = 2.
            Kind::Icosahedral => {
                let polar = 2.0_f64.atan().to_degrees();
                [poles(), ring(5, polar, 0.0), ring(5, 180.0 - polar, 0.1)].concat()
            }
            Kind::Other(_) => Vec::new(),
        }
    }
}

/// `n` directions at an angle (degrees) from the z axis, the first turned by a share of a full turn.
fn ring(n: u32, polar: f64, turn: f64) -> Vec<Vector3<f64>> {
    let (sin, cos) = polar.to_radians().sin_cos();
    (0..n)
        .map(|i| {
            let angle = std::f64::consts::TAU * (f64::from(i) / f64::from(n) + turn);
            Vector3::new(sin * angle.cos(), sin * angle.sin(), cos)
        })
        .collect()
}

/// Angle in degrees at which a trigonal prism has square sides: tan θ = 2/√3.
const SQUARE_SIDES: f64 = 49.106_605_350_869_1;

/// Two triangles one above the other, at an angle (degrees) from the axis.
fn prism(polar: f64) -> Vec<Vector3<f64>> {
    [ring(3, polar, 0.0), ring(3, 180.0 - polar, 0.0)].concat()
}

/// Twelve close-packed neighbours: six around, three above, three below turned by a share of their spacing.
fn close_packed(turn: f64) -> Vec<Vector3<f64>> {
    // Layers 2√(2/3) apart at a distance of 2: cos θ = √(2/3).
    let polar = (2.0_f64 / 3.0).sqrt().acos().to_degrees();
    [ring(6, 90.0, 0.0), ring(3, polar, 0.25 / 3.0), ring(3, 180.0 - polar, (0.25 + turn) / 3.0)].concat()
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

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ideal_shapes_name_themselves() {
        for (kind, name) in Kind::NAMES {
            let (named, measure) = Kind::of(&kind.ideal());
            assert_eq!(named, kind);
            assert!(measure.unwrap() < 1e-9, "{kind}");
            assert_eq!(Kind::parse(name), Some(kind));
            assert_eq!(Kind::parse(&kind.to_string()), Some(kind));
        }
    }

    /// Closed forms of the angles: tetrahedron −1/3, octahedron 0 and −1, cube ±1/3 and −1, icosahedron ±1/√5 and −1,
    /// cuboctahedron ±1/2, 0 and −1; the anticuboctahedron has −1/3 and −5/6 besides. Prism: sides 2/√3 of the
    /// triangle's circumradius.
    #[test]
    fn angles_are_the_closed_forms() {
        let all = |kind: Kind, values: &[f64]| {
            let points = kind.ideal();
            (0..points.len())
                .all(|i| (0..i).all(|j| values.iter().any(|v| (points[i].dot(&points[j]) - v).abs() < 1e-12)))
        };
        assert!(all(Kind::Tetrahedral, &[-1.0 / 3.0]));
        assert!(all(Kind::Octahedral, &[0.0, -1.0]));
        assert!(all(Kind::Cubic, &[1.0 / 3.0, -1.0 / 3.0, -1.0]));
        assert!(all(Kind::Cuboctahedral, &[0.5, -0.5, 0.0, -1.0]));
        assert!(all(Kind::Anticuboctahedral, &[0.5, -0.5, 0.0, -1.0, -1.0 / 3.0, -5.0 / 6.0]));
        assert!(all(Kind::Icosahedral, &[5.0_f64.sqrt().recip(), -5.0_f64.sqrt().recip(), -1.0]));
        let prism = Kind::TrigonalPrismatic.ideal();
        assert!(((prism[0] - prism[1]).norm() - (prism[0] - prism[3]).norm()).abs() < 1e-12);
    }

    #[test]
    fn a_crowd_has_no_name() {
        let crowd: Vec<_> = (0..20).map(|i| Vector3::new(1.0, f64::from(i), 0.3)).collect();
        assert_eq!(Kind::of(&crowd), (Kind::Other(20), None));
        assert_eq!(Kind::Other(20).to_string(), "20-coordinated");
        let fan: Vec<_> = (0..6).map(|i| Vector3::new(1.0, f64::from(i) / 10.0, 0.0)).collect();
        assert!(matches!(Kind::of(&fan), (Kind::Other(6), Some(s)) if s > 15.0));
    }
}
