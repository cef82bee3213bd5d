//! Symmetry operations as files list them: `x,y,z` triplets read, corrected and completed to a group.

use crate::crystal::Lattice;
use crate::crystal::symmetry::Operation;
use nalgebra::{Matrix3, Vector3};
use std::collections::HashMap;

/// Most operations of a group on one cell: 192 of the largest space groups, in a cell of up to eight times the volume.
pub const MAX_OPERATIONS: usize = 1536;

/// Largest coefficient of x, y, z accepted.
const MAX_COEFFICIENT: i32 = 6;

/// Translations are multiples of 1/24 in every setting of International Tables; decimals as near as this to one
/// (`.333`, `0.67`) are taken for it.
const DECIMAL_SLACK: f64 = 5.1e-3;
const GRID: f64 = 24.0;

/// How far an operation may change the metric: |(WᵀGW − G)ij| relative to √(Gii Gjj). Lengths printed to 0.01 Å and
/// angles to 0.1° stay below.
pub const METRIC_TOLERANCE: f64 = 4e-3;

/// An operation as read.
#[derive(Clone, Debug, PartialEq)]
pub struct Triplet {
    /// The operation, its translation in [0, 1).
    pub operation: Operation,
    /// Whether a decimal was taken for the fraction that it abbreviates.
    pub corrected: bool,
}

/// Reads `-x+1/2, y, 1/2+z`, in any case, with blanks, and decimals for fractions; the error is a sentence's end.
pub fn parse(text: &str) -> Result<Triplet, String> {
    let parts: Vec<&str> = text.split(',').collect();
    let [x, y, z] = parts.as_slice() else {
        return Err(format!("has {} parts, not the three of `x,y,z`", parts.len()));
    };
    let mut rotation = Matrix3::zeros();
    let mut translation = Vector3::zeros();
    let mut corrected = false;
    for (row, part) in [x, y, z].into_iter().enumerate() {
        let (coefficients, shift, exact) =
            row_of(part).ok_or_else(|| format!("has `{}`, which is no sum of x, y, z and a fraction", part.trim()))?;
        rotation.set_row(row, &nalgebra::RowVector3::from(coefficients));
        let snapped = if exact { shift } else { snapped(shift, DECIMAL_SLACK) };
        corrected |= (snapped - shift).abs() > 1e-6;
        translation[row] = reduced(snapped);
    }
    let determinant = rotation.map(f64::from).determinant();
    if (determinant.abs() - 1.0).abs() > 1e-6 {
        return Err(format!("changes the volume by a factor of {determinant:.0}; a symmetry operation keeps it"));
    }
    Ok(Triplet { operation: Operation { rotation, translation }, corrected })
}

/// Coefficients of x, y, z, the shift, and whether the shift is exact (a fraction or a whole number).
fn row_of(part: &str) -> Option<([i32; 3], f64, bool)> {
    let bytes: Vec<u8> = part.bytes().filter(|b| !b.is_ascii_whitespace() && *b != b'*').collect();
    let mut coefficients = [0_i32; 3];
    let (mut shift, mut exact) = (0.0, true);
    let mut at = 0;
    while at < bytes.len() {
        let mut sign = 1.0;
        if matches!(bytes[at], b'+' | b'-') {
            sign = if bytes[at] == b'-' { -1.0 } else { 1.0 };
            at += 1;
        } else if at > 0 {
            return None;
        }
        let start = at;
        while at < bytes.len() && (bytes[at].is_ascii_digit() || matches!(bytes[at], b'.' | b'/')) {
            at += 1;
        }
        let number = if at > start { Some(number_of(std::str::from_utf8(&bytes[start..at]).ok()?)?) } else { None };
        match bytes.get(at).map(u8::to_ascii_lowercase) {
            Some(axis @ b'x'..=b'z') => {
                let k = number.map_or(1.0, |(value, _)| value);
                if k.fract() != 0.0 || k > f64::from(MAX_COEFFICIENT) {
                    return None;
                }
                let slot = &mut coefficients[usize::from(axis - b'x')];
                *slot += (sign * k) as i32;
                if slot.abs() > MAX_COEFFICIENT {
                    return None;
                }
                at += 1;
            }
            _ => {
                let (value, is_exact) = number?;
                shift += sign * value;
                exact &= is_exact;
            }
        }
    }
    (!bytes.is_empty()).then_some((coefficients, shift, exact))
}

/// `1/2`, `3` or `0.25`, and whether it is exact.
fn number_of(text: &str) -> Option<(f64, bool)> {
    let plain = |s: &str| s.parse::<f64>().ok().filter(|v| v.is_finite() && *v < 1e3);
    match text.split_once('/') {
        Some((n, d)) => {
            let (n, d) = (plain(n)?, plain(d)?);
            (d != 0.0).then(|| (n / d, n.fract() == 0.0 && d.fract() == 0.0))
        }
        None => plain(text).map(|v| (v, v.fract() == 0.0)),
    }
}

fn snapped(shift: f64, slack: f64) -> f64 {
    let near = (shift * GRID).round() / GRID;
    if (near - shift).abs() <= slack { near } else { shift }
}

/// In [0, 1); a rounding error below 1 is 0.
fn reduced(x: f64) -> f64 {
    let r = x.rem_euclid(1.0);
    if r > 1.0 - 1e-9 { 0.0 } else { r }
}

/// What a set of operations generates.
#[derive(Clone, Debug, PartialEq)]
pub enum Group {
    /// The whole group, the identity first, then the given operations in their order, then what was missing.
    Finite(Vec<Operation>),
    /// More than [`MAX_OPERATIONS`].
    TooLarge,
}

/// The group that the operations generate.
pub fn close(given: &[Operation]) -> Group {
    let mut seen: HashMap<[i64; 12], ()> = HashMap::new();
    let mut group = vec![Operation::identity()];
    seen.insert(key(&group[0]), ());
    let mut generators: Vec<Operation> = Vec::new();
    for operation in given {
        if seen.contains_key(&key(operation)) {
            continue;
        }
        generators.push(operation.clone());
        // Every element times every generator, until nothing new appears.
        let mut at = 0;
        while at < group.len() {
            for generator in &generators {
                let product = product(&group[at], generator);
                if product.rotation.iter().any(|k| k.abs() > MAX_COEFFICIENT) || group.len() > MAX_OPERATIONS {
                    return Group::TooLarge;
                }
                if seen.insert(key(&product), ()).is_none() {
                    group.push(product);
                }
            }
            at += 1;
        }
    }
    // The order of the file, so that what was added stands last.
    let mut order: HashMap<[i64; 12], usize> = HashMap::new();
    for operation in given {
        let next = order.len();
        order.entry(key(operation)).or_insert(next);
    }
    let identity = key(&Operation::identity());
    group.sort_by_key(|o| {
        let k = key(o);
        (k != identity, order.get(&k).copied().unwrap_or(usize::MAX))
    });
    Group::Finite(group)
}

/// `first` after `second`: (V v)(W w) = (VW, Vw + v).
fn product(first: &Operation, second: &Operation) -> Operation {
    let translation = first.rotation.map(f64::from) * second.translation + first.translation;
    Operation {
        rotation: first.rotation * second.rotation,
        translation: translation.map(|t| reduced(snapped(t, 1e-6))),
    }
}

/// Identifies an operation up to 1e-4 in its translation.
fn key(operation: &Operation) -> [i64; 12] {
    let mut key = [0; 12];
    for (slot, k) in key.iter_mut().zip(operation.rotation.iter()) {
        *slot = i64::from(*k);
    }
    for (slot, t) in key[9..].iter_mut().zip(operation.translation.iter()) {
        *slot = (t * 1e4).round() as i64 % 10_000;
    }
    key
}

/// How much the operation changes the metric of the cell; see [`METRIC_TOLERANCE`].
pub fn metric_change(operation: &Operation, lattice: &Lattice) -> f64 {
    let metric = lattice.metric();
    let rotation = operation.rotation.map(f64::from);
    let change = rotation.transpose() * metric * rotation - metric;
    let mut worst: f64 = 0.0;
    for i in 0..3 {
        for j in 0..3 {
            worst = worst.max(change[(i, j)].abs() / (metric[(i, i)] * metric[(j, j)]).sqrt());
        }
    }
    worst
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn triplets_in_every_spelling() {
        for (text, want, corrected) in [
            ("x,y,z", "x,y,z", false),
            (" -X + 1/2 , 1/2+Y, -z-1/4", "-x+1/2,y+1/2,-z+3/4", false),
            ("x-y,x,z+.5", "x-y,x,z+1/2", false),
            ("-y,x-y,0.333+z", "-y,x-y,z+1/3", true),
            ("+x,-0.6667+y,z+5/6", "x,y+1/3,z+5/6", true),
            ("2x+y,x+y,z", "2x+y,x+y,z", false),
        ] {
            let got = parse(text).unwrap();
            assert_eq!((got.operation.to_string().as_str(), got.corrected), (want, corrected), "{text}");
        }
        for bad in [
            "",
            "x,y",
            "x,y,z,t",
            "x,y,w",
            "x,y,",
            "x,x,z",
            "x,y,z+1/0",
            "x,y,1e5",
            "x 2,y,z3",
            "9x,y,z",
            "x,y,z+a",
            "1/2 1/2,y,z",
        ] {
            assert!(parse(bad).is_err(), "{bad}");
        }
    }

    /// F d -3 m has 192 operations on its conventional cell (International Tables A, group 227); three generators and
    /// the centring make them.
    #[test]
    fn groups_are_completed() {
        let ops = |list: &[&str]| list.iter().map(|t| parse(t).unwrap().operation).collect::<Vec<_>>();
        let generators = ops(&["-x,-y,-z", "y+3/4,x+1/4,-z+1/2", "z,x,y", "x,y+1/2,z+1/2", "x+1/2,y,z+1/2"]);
        match close(&generators) {
            Group::Finite(group) => {
                assert_eq!(group[0], Operation::identity());
                assert_eq!(group[1], generators[0]);
                assert_eq!(group.len() % 48, 0);
            }
            Group::TooLarge => panic!("too large"),
        }
        // A translation by 1/1000 and a shear of infinite order.
        let mut tiny = Operation::identity();
        tiny.translation.x = 4e-4;
        assert_eq!(close(&[tiny]), Group::TooLarge);
        assert_eq!(close(&ops(&["x+y,y,z"])), Group::TooLarge);
    }
}
