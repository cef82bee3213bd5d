//! From the listed sites to every site of the cell.

use super::contacts::{Contact, contacts};
use crate::crystal::symmetry::Operation;
use crate::crystal::{Fractional, Lattice};
use nalgebra::Vector3;

/// Images of a site within this distance (Å) of it are the site itself, its coordinates rounded; it is moved onto the
/// symmetry element. 0.333 for 1/3 in a cell of 12 Å errs by 0.01 Å.
pub const IMAGE_TOLERANCE: f64 = 0.05;

/// Positions of different rows within this distance (Å) are one shared site.
pub const SHARE_TOLERANCE: f64 = 0.05;

/// Sites nearer than this (Å) cannot both be occupied.
pub const OVERLAP: f64 = 0.5;

/// Most sites of a cell.
pub const MAX_SITES: usize = 4_000_000;

/// Images of one listed site.
pub struct Orbit {
    /// Distinct positions in [0, 1), that of the listed site first.
    pub positions: Vec<Fractional>,
    /// How far the listed position was moved onto its symmetry element, Å.
    pub shift: f64,
}

/// All distinct images of a position. `None` when the operations that leave it in place are no group, so that its
/// images cannot be told apart: the position is too far from the symmetry element that it is near.
pub fn orbit(lattice: &Lattice, operations: &[Operation], position: &Fractional) -> Option<Orbit> {
    let (exact, stabiliser) = projected(lattice, operations, position);
    let shift = (lattice.basis() * (exact.0 - position.0)).norm();
    let mut positions: Vec<Fractional> = Vec::with_capacity(operations.len() / stabiliser);
    for operation in operations {
        let image = wrapped(&operation.apply(&exact));
        let same = |seen: &Fractional| {
            let delta = image.0 - seen.0;
            delta.iter().all(|d| (d - d.round()).abs() < 1e-6)
        };
        if !positions.iter().any(same) {
            positions.push(image);
        }
    }
    (positions.len() * stabiliser == operations.len()).then_some(Orbit { positions, shift })
}

/// The mean of the images near the position, and how many there are.
fn projected(lattice: &Lattice, operations: &[Operation], position: &Fractional) -> (Fractional, usize) {
    let (mut sum, mut count) = (Vector3::zeros(), 0);
    for operation in operations {
        let delta = operation.apply(position).0 - position.0;
        let delta = delta - delta.map(f64::round);
        if (lattice.basis() * delta).norm() < IMAGE_TOLERANCE {
            sum += delta;
            count += 1;
        }
    }
    (Fractional(position.0 + sum / f64::from(count.max(1))), count.max(1) as usize)
}

/// Reduced to [0, 1), a rounding error around 0 becoming 0.
pub fn wrapped(position: &Fractional) -> Fractional {
    Fractional(position.reduced().0.map(|x| if !(1e-9..=1.0 - 1e-9).contains(&x) { 0.0 } else { x }))
}

/// Pairs of sites that share a position or overlap.
///
/// # Errors
/// As [`contacts`].
pub fn near_pairs(lattice: &Lattice, positions: &[Fractional]) -> Result<Vec<Contact>, usize> {
    contacts(lattice, positions, OVERLAP)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::crystal::Parameters;
    use crate::crystal::symmetry::SpaceGroup;

    /// International Tables A, P -3 m 1 (164): 2d is (1/3, 2/3, z), 6i is (x, -x, z), general positions 12j.
    #[test]
    fn rounded_special_positions_find_their_multiplicity() {
        let group = (1..=530).filter_map(SpaceGroup::from_hall_number).find(|g| g.number == 164).unwrap();
        let lattice =
            Lattice::from_parameters(&Parameters { a: 11.2, b: 11.2, c: 6.0, alpha: 90.0, beta: 90.0, gamma: 120.0 })
                .unwrap();
        // A shift by (-d, +d, 0) on hexagonal axes is d a √3 long.
        let long = 11.2 * 3.0_f64.sqrt();
        for (x, y, z, count, shift) in [
            (0.333, 0.667, 0.5, 2, long / 3e3),
            (0.3333, 0.6667, 0.2, 2, long / 3e4),
            (0.1111, -0.1112, 0.25, 6, 0.5 * 11.2e-4),
            (0.999999999, 1e-12, 0.0, 1, 0.0),
            (0.1, 0.3, 0.2, 12, 0.0),
        ] {
            let orbit = orbit(&lattice, &group.operations, &Fractional::new(x, y, z)).unwrap();
            assert_eq!(orbit.positions.len(), count, "{x} {y} {z}");
            assert!((orbit.shift - shift).abs() < 1e-7, "{} {shift}", orbit.shift);
            assert!(orbit.positions.iter().all(|p| p.0.iter().all(|x| (0.0..1.0).contains(x))));
        }
    }
}
