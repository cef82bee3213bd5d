//! Whether a cell already stands in a standard setting, and the Wyckoff letters of its positions there.

use super::symmetry::Operation;
use super::{Fractional, Lattice};
use moyo::data::{WyckoffPosition, iter_wyckoff_positions_from_hall_number};
use nalgebra::{Matrix3, Vector3};

/// Positions of a Wyckoff set are found within this many cells: coefficients are at most 2.
const REACH: i32 = 2;

/// How far from its symmetry element (in fractions of the cell) a position may be that was projected onto it.
const ON_ELEMENT: f64 = 1e-6;

/// Whether the operations found in a cell are those of a group in its standard setting, translations within
/// `tolerance` (Å).
pub fn is_standard(lattice: &Lattice, found: &[Operation], group: &[Operation], tolerance: f64) -> bool {
    let same = |a: &Operation, b: &Operation| {
        let shift = a.translation - b.translation;
        a.rotation == b.rotation && (lattice.basis() * (shift - shift.map(f64::round))).norm() <= tolerance
    };
    found.len() == group.len() && found.iter().all(|a| group.iter().any(|b| same(a, b)))
}

/// The Wyckoff position (International Tables A, as moyo tabulates it) of an orbit of a setting, given its distinct
/// images in the cell, exactly on their symmetry elements.
pub fn wyckoff_position(hall_number: i32, images: &[Fractional]) -> Option<&'static WyckoffPosition> {
    iter_wyckoff_positions_from_hall_number(hall_number)
        .filter(|wyckoff| wyckoff.multiplicity == images.len())
        .find(|wyckoff| Space::parse(wyckoff.coordinates).is_some_and(|s| images.iter().any(|p| s.holds(p))))
}

/// The points L v + o of the first coordinate triplet of a Wyckoff position.
struct Space {
    linear: Matrix3<f64>,
    origin: Vector3<f64>,
}

impl Space {
    /// Reads `x,2x,z` or `x+1/2,-x,1/4`.
    fn parse(coordinates: &str) -> Option<Self> {
        let (mut linear, mut origin) = (Matrix3::zeros(), Vector3::zeros());
        for (row, part) in coordinates.split(',').enumerate().take(3) {
            let spaced = part.replace(' ', "").replace('-', " -").replace('+', " ");
            for term in spaced.split_ascii_whitespace() {
                match term.find(['x', 'y', 'z']) {
                    Some(at) => {
                        let factor = match &term[..at] {
                            "" => 1.0,
                            "-" => -1.0,
                            number => number.parse().ok()?,
                        };
                        linear[(row, usize::from(term.as_bytes()[at] - b'x'))] += factor;
                    }
                    None => {
                        let (n, d) = term.split_once('/').unwrap_or((term, "1"));
                        origin[row] += n.parse::<f64>().ok()? / d.parse::<f64>().ok()?;
                    }
                }
            }
        }
        Some(Self { linear, origin })
    }

    /// Whether some image of the position in a near cell lies in the space.
    fn holds(&self, position: &Fractional) -> bool {
        // Least squares: what remains of a vector outside the column space of L.
        let Ok(pseudo_inverse) = self.linear.pseudo_inverse(1e-9) else { return false };
        let outside = Matrix3::identity() - self.linear * pseudo_inverse;
        let start = outside * (position.0 - self.origin);
        (-REACH..=REACH).any(|i| {
            (-REACH..=REACH).any(|j| {
                (-REACH..=REACH).any(|k| {
                    let cell = Vector3::new(f64::from(i), f64::from(j), f64::from(k));
                    (start + outside * cell).amax() < ON_ELEMENT
                })
            })
        })
    }
}

#[cfg(test)]
mod tests {
    use super::super::Parameters;
    use super::super::symmetry::{SpaceGroup, orbit};
    use super::*;

    /// Letters and multiplicities: International Tables A, groups 225, 227 (origin 2), 166 (hexagonal axes), 191, 47.
    #[test]
    fn letters_are_those_of_the_tables() {
        for (hall_number, hexagonal, position, want) in [
            (523, false, [0.0, 0.0, 0.0], "4a"),
            (523, false, [0.5, 0.5, 0.5], "4b"),
            (523, false, [0.25, 0.75, 0.25], "8c"),
            (526, false, [0.125, 0.125, 0.125], "8a"),
            (526, false, [0.5, 0.0, 0.0], "16d"),
            (526, false, [0.2624, 0.2624, 0.2624], "32e"),
            (458, true, [0.0, 0.0, 0.237], "6c"),
            (458, true, [1.0 / 3.0, 2.0 / 3.0, 2.0 / 3.0 + 0.5], "3b"),
            (485, true, [0.2, 0.4, 0.0], "6l"),
            (485, true, [0.2, 0.8, 0.5], "6m"),
            (227, false, [0.11, 0.23, 0.37], "8A"),
        ] {
            let group = SpaceGroup::from_hall_number(hall_number).unwrap();
            let gamma = if hexagonal { 120.0 } else { 90.0 };
            let p = Parameters { a: 8.0, b: 8.0, c: 8.0, alpha: 90.0, beta: 90.0, gamma };
            let lattice = Lattice::from_parameters(&p).unwrap();
            let [x, y, z] = position;
            let images = orbit(&lattice, &group.operations, &Fractional::new(x, y, z), 1e-2);
            let found = wyckoff_position(hall_number, &images).map(|w| format!("{}{}", w.multiplicity, w.letter));
            assert_eq!(found.as_deref(), Some(want), "{} {position:?}", group.hermann_mauguin);
        }
    }
}
