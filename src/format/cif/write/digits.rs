//! Cell parameters and coordinates as the decimals that are written.
//!
//! What a reader computes from the file must hold exactly: a cubic cell has three equal lengths to the last digit,
//! and the coordinates of a site on a symmetry element obey that element's equations.

use super::formula::scaled_decimal;
use crate::crystal::lattice::LatticeError;
use crate::crystal::symmetry::{MIN_SEPARATION, Operation};
use crate::crystal::{Fractional, Lattice, Parameters};
use nalgebra::{Matrix3, Vector3};

/// Coordinates have 8 decimals: 1e-8 of a 30 Å edge is 3e-7 Å.
const COORDINATE_UNIT: f64 = 1e8;

/// Decimals of lengths (Å) and angles (degrees).
const CELL_DECIMALS: u32 = 6;
const CELL_UNIT: f64 = 1e6;

/// Lengths nearer than this (Å), and angles (degrees), are one value with rounding noise.
const CELL_NOISE: f64 = 1e-8;

/// A cell as written: multiples of 1e-6 Å and 1e-6 degrees.
pub(super) struct WrittenCell {
    scaled: [i64; 6],
}

impl WrittenCell {
    /// The cell of a structure without symmetry. Lengths that differ by rounding noise alone are written alike.
    pub fn free(lattice: &Lattice) -> Self {
        let p = lattice.parameters();
        let b = if (p.b - p.a).abs() < CELL_NOISE { p.a } else { p.b };
        let c = [p.a, b].into_iter().find(|x| (p.c - x).abs() < CELL_NOISE).unwrap_or(p.c);
        Self::from_values([p.a, b, c, p.alpha, p.beta, p.gamma])
    }

    /// The conventional cell of a group of this crystal system in the standard setting (unique axis b, hexagonal
    /// axes), its constraints obeyed to the last digit.
    pub fn constrained(lattice: &Lattice, crystal_system: &str) -> Self {
        let p = lattice.parameters();
        let ab = (p.a + p.b) / 2.0;
        Self::from_values(match crystal_system {
            "cubic" => {
                let a = (p.a + p.b + p.c) / 3.0;
                [a, a, a, 90.0, 90.0, 90.0]
            }
            "hexagonal" | "trigonal" => [ab, ab, p.c, 90.0, 90.0, 120.0],
            "tetragonal" => [ab, ab, p.c, 90.0, 90.0, 90.0],
            "orthorhombic" => [p.a, p.b, p.c, 90.0, 90.0, 90.0],
            "monoclinic" => [p.a, p.b, p.c, 90.0, p.beta, 90.0],
            _ => return Self::free(lattice),
        })
    }

    fn from_values(values: [f64; 6]) -> Self {
        Self { scaled: values.map(|v| (v * CELL_UNIT).round() as i64) }
    }

    /// The six values with their data names.
    pub fn items(&self) -> impl Iterator<Item = (&'static str, String)> {
        const NAMES: [&str; 6] = [
            "_cell_length_a",
            "_cell_length_b",
            "_cell_length_c",
            "_cell_angle_alpha",
            "_cell_angle_beta",
            "_cell_angle_gamma",
        ];
        NAMES.into_iter().zip(self.scaled.map(|v| scaled_decimal(v.into(), CELL_DECIMALS)))
    }

    /// Volume that the written digits give, Å³.
    pub fn volume(&self) -> Result<f64, LatticeError> {
        let [a, b, c, alpha, beta, gamma] = self.scaled.map(|v| v as f64 / CELL_UNIT);
        Ok(Lattice::from_parameters(&Parameters { a, b, c, alpha, beta, gamma })?.volume())
    }
}

/// A position as multiples of 1e-8, each in [0, 1): what rounds up to 1 is 0.
pub(super) fn rounded(position: &Fractional) -> [u32; 3] {
    let scaled = position.0.map(|x| {
        let digits = (x * COORDINATE_UNIT).round() as i64;
        digits.rem_euclid(COORDINATE_UNIT as i64) as u32
    });
    [scaled.x, scaled.y, scaled.z]
}

/// Like [`rounded`], for a position that lies exactly on its symmetry element: the free coordinates are rounded and
/// the others computed from them, so that (x, 2x, z) is written with y twice the *written* x. The free ones
/// are chosen such that the others are sums of whole multiples of them.
pub(super) fn rounded_on_element(lattice: &Lattice, operations: &[Operation], position: &Fractional) -> [u32; 3] {
    let round = |x: f64| (x * COORDINATE_UNIT).round() / COORDINATE_UNIT;
    let projector = mean_rotation_of_stabiliser(lattice, operations, position);
    let columns = || projector.column_iter().map(|c| c.into_owned()).filter(|c| c.norm() > 1e-6);
    let mut p = position.0;
    match projector.trace().round() as i32 {
        1 => {
            let Some(v) = columns().next() else { return rounded(position) };
            let whole = |i: &usize| v[*i].abs() > 1e-6 && v.iter().all(|x| is_whole(x / v[*i]));
            if let Some(i) = (0..3).find(whole) {
                p += v / v[i] * (round(p[i]) - p[i]);
            }
        }
        2 => {
            // The plane's normal from the two columns that span it best.
            let cross = |i: usize, j: usize| projector.column(i).cross(&projector.column(j));
            let normals = [cross(0, 1), cross(1, 2), cross(0, 2)];
            let Some(n) = normals.into_iter().max_by(|a, b| a.norm().total_cmp(&b.norm())) else {
                return rounded(position);
            };
            let whole = |k: &usize| n[*k].abs() > 1e-6 && n.iter().all(|x| is_whole(x / n[*k]));
            if let Some(k) = (0..3).rev().find(whole) {
                let shift = p.map(|x| round(x) - x);
                p += shift;
                p[k] -= n.dot(&shift) / n[k];
            }
        }
        _ => {}
    }
    rounded(&Fractional(p))
}

/// Mean of the rotations that leave the position where it is: projects a shift onto the directions in which the
/// position may move without leaving its symmetry element; its trace is the number of free coordinates.
fn mean_rotation_of_stabiliser(lattice: &Lattice, operations: &[Operation], position: &Fractional) -> Matrix3<f64> {
    let mut sum = Matrix3::zeros();
    let mut count = 0.0;
    for operation in operations {
        let shift: Vector3<f64> = operation.apply(position).0 - position.0;
        if (lattice.basis() * (shift - shift.map(f64::round))).norm() < MIN_SEPARATION {
            sum += operation.rotation.map(f64::from);
            count += 1.0;
        }
    }
    if count > 0.0 { sum / count } else { Matrix3::identity() }
}

fn is_whole(x: f64) -> bool {
    (x - x.round()).abs() < 1e-6
}

/// Appends `0.` and eight digits.
pub(super) fn push_coordinate(out: &mut Vec<u8>, scaled: u32) {
    let mut digits = *b"0.00000000";
    let mut rest = scaled;
    for digit in digits[2..].iter_mut().rev() {
        *digit = b'0' + (rest % 10) as u8;
        rest /= 10;
    }
    out.extend_from_slice(&digits);
}

/// Appends a whole number.
pub(super) fn push_number(out: &mut Vec<u8>, number: usize) {
    let mut digits = [0_u8; 20];
    let mut at = digits.len();
    let mut rest = number;
    loop {
        at -= 1;
        digits[at] = b'0' + (rest % 10) as u8;
        rest /= 10;
        if rest == 0 {
            break;
        }
    }
    out.extend_from_slice(&digits[at..]);
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::crystal::symmetry::SpaceGroup;

    fn text(scaled: u32) -> String {
        let mut out = Vec::new();
        push_coordinate(&mut out, scaled);
        String::from_utf8(out).unwrap()
    }

    #[test]
    fn coordinates_stay_below_one() {
        let [x, y, z] = rounded(&Fractional::new(0.999999995, -0.0, 1.0 / 3.0));
        assert_eq!([text(x), text(y), text(z)], ["0.00000000", "0.00000000", "0.33333333"]);
        assert_eq!(rounded(&Fractional::new(-0.25, 1.5, 0.999999994)), [75_000_000, 50_000_000, 99_999_999]);
        let mut out = Vec::new();
        push_number(&mut out, 0);
        push_number(&mut out, 1_000_000);
        assert_eq!(out, b"01000000");
    }

    /// International Tables A, P6/mmm (191): 6l is (x, 2x, 0) and its images (2x, x, 0); Fm-3m (225): 32f is (x, x, x).
    #[test]
    fn dependent_coordinates_follow_the_written_ones() {
        let hexagonal =
            Lattice::from_parameters(&Parameters { a: 5.0, b: 5.0, c: 7.0, alpha: 90.0, beta: 90.0, gamma: 120.0 })
                .unwrap();
        let group = (1..=530).filter_map(SpaceGroup::from_hall_number).find(|g| g.number == 191).unwrap();
        let x = 0.123456784;
        let p = rounded_on_element(&hexagonal, &group.operations, &Fractional::new(x, 2.0 * x, 0.0));
        assert_eq!(p, [12345678, 24691356, 0]);
        let p = rounded_on_element(&hexagonal, &group.operations, &Fractional::new(2.0 * x, x, 0.0));
        assert_eq!(p, [24691356, 12345678, 0]);
        // 12o: (x, 2x, z), one plane.
        let p = rounded_on_element(&hexagonal, &group.operations, &Fractional::new(x, 2.0 * x, 0.2000000049));
        assert_eq!(p, [12345678, 24691356, 20000000]);
        let p = rounded_on_element(&hexagonal, &group.operations, &Fractional::new(1.0 / 3.0, 2.0 / 3.0, x));
        assert_eq!(p, [33333333, 66666667, 12345678]);
    }

    #[test]
    fn cells_obey_their_system() {
        let lattice = Lattice::from_parameters(&Parameters {
            a: 4.2110001,
            b: 4.2109999,
            c: 4.2110002,
            alpha: 90.0,
            beta: 90.0000001,
            gamma: 90.0,
        })
        .unwrap();
        let cell = WrittenCell::constrained(&lattice, "cubic");
        let values: Vec<String> = cell.items().map(|(_, v)| v).collect();
        assert_eq!(values, ["4.211", "4.211", "4.211", "90", "90", "90"]);
        assert!((cell.volume().unwrap() - 4.211_f64.powi(3)).abs() < 1e-9);
    }
}
