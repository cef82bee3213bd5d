//! Orbits of points under the symmetry of a host, and the point group that leaves each in place.

use super::host::Host;
use super::interstice::PackingError;
use crate::crystal::Fractional;
use crate::crystal::neighbours::NeighbourList;
use crate::crystal::symmetry::{self, Operation};
use nalgebra::Matrix3;

/// Most spheres for which symmetry is sought; a larger host counts as having none but its translations.
pub const MAX_SPHERES_FOR_SYMMETRY: usize = 2_000;

/// Distance, in sphere radii, within which symmetry must map spheres onto spheres.
const TOLERANCE: f64 = 1e-4;

/// Distance, in sphere radii, within which symmetry maps one point onto another.
const SAME_PLACE: f64 = 1e-2;

/// What symmetry says of a point.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Orbit {
    /// Number of the orbit, from 0, in the order of the points.
    pub number: usize,
    /// Points of the orbit in the cell.
    pub multiplicity: usize,
    /// Hermann–Mauguin symbol of the point group of the site, not oriented: `-43m`.
    pub site_symmetry: &'static str,
}

/// The operations of a host that keep the role of every sphere.
///
/// # Errors
/// [`PackingError::Symmetry`] when the search fails.
pub fn operations(host: &Host) -> Result<Vec<Operation>, PackingError> {
    if host.spheres.len() > MAX_SPHERES_FOR_SYMMETRY {
        return Ok(vec![Operation::identity()]);
    }
    symmetry::operations(&host.lattice, &host.spheres, &host.kinds(), TOLERANCE)
        .map(|(operations, _)| operations)
        .map_err(|source| PackingError::Symmetry { host: host.name.clone(), source })
}

/// The orbit of each of a set of points that the operations map onto each other.
pub fn orbits(host: &Host, operations: &[Operation], points: &[Fractional]) -> Vec<Orbit> {
    let list = NeighbourList::new(&host.lattice, points, SAME_PLACE);
    let mut number = vec![usize::MAX; points.len()];
    let mut symbols: Vec<&'static str> = Vec::new();
    let mut sizes: Vec<usize> = Vec::new();
    for i in 0..points.len() {
        if number[i] != usize::MAX {
            continue;
        }
        let mut fixing: Vec<Matrix3<i32>> = Vec::new();
        number[i] = sizes.len();
        sizes.push(1);
        for operation in operations {
            for n in list.around(&operation.apply(&points[i]), SAME_PLACE) {
                if n.index == i && !fixing.contains(&operation.rotation) {
                    fixing.push(operation.rotation);
                }
                if number[n.index] == usize::MAX {
                    number[n.index] = number[i];
                    sizes[number[i]] += 1;
                }
            }
        }
        symbols.push(point_group(&fixing));
    }
    number
        .into_iter()
        .map(|number| Orbit { number, multiplicity: sizes[number], site_symmetry: symbols[number] })
        .collect()
}

/// Numbers of the operations −6, −4, −3, m, −1, 2, 3, 4, 6 in each crystallographic point group: International Tables A,
/// chapter 10.1 (from memory; each row adds up to the order of its group less the identity).
const GROUPS: [(&str, [usize; 9]); 32] = [
    ("1", [0, 0, 0, 0, 0, 0, 0, 0, 0]),
    ("-1", [0, 0, 0, 0, 1, 0, 0, 0, 0]),
    ("2", [0, 0, 0, 0, 0, 1, 0, 0, 0]),
    ("m", [0, 0, 0, 1, 0, 0, 0, 0, 0]),
    ("2/m", [0, 0, 0, 1, 1, 1, 0, 0, 0]),
    ("222", [0, 0, 0, 0, 0, 3, 0, 0, 0]),
    ("mm2", [0, 0, 0, 2, 0, 1, 0, 0, 0]),
    ("mmm", [0, 0, 0, 3, 1, 3, 0, 0, 0]),
    ("4", [0, 0, 0, 0, 0, 1, 0, 2, 0]),
    ("-4", [0, 2, 0, 0, 0, 1, 0, 0, 0]),
    ("4/m", [0, 2, 0, 1, 1, 1, 0, 2, 0]),
    ("422", [0, 0, 0, 0, 0, 5, 0, 2, 0]),
    ("4mm", [0, 0, 0, 4, 0, 1, 0, 2, 0]),
    ("-42m", [0, 2, 0, 2, 0, 3, 0, 0, 0]),
    ("4/mmm", [0, 2, 0, 5, 1, 5, 0, 2, 0]),
    ("3", [0, 0, 0, 0, 0, 0, 2, 0, 0]),
    ("-3", [0, 0, 2, 0, 1, 0, 2, 0, 0]),
    ("32", [0, 0, 0, 0, 0, 3, 2, 0, 0]),
    ("3m", [0, 0, 0, 3, 0, 0, 2, 0, 0]),
    ("-3m", [0, 0, 2, 3, 1, 3, 2, 0, 0]),
    ("6", [0, 0, 0, 0, 0, 1, 2, 0, 2]),
    ("-6", [2, 0, 0, 1, 0, 0, 2, 0, 0]),
    ("6/m", [2, 0, 2, 1, 1, 1, 2, 0, 2]),
    ("622", [0, 0, 0, 0, 0, 7, 2, 0, 2]),
    ("6mm", [0, 0, 0, 6, 0, 1, 2, 0, 2]),
    ("-6m2", [2, 0, 0, 4, 0, 3, 2, 0, 0]),
    ("6/mmm", [2, 0, 2, 7, 1, 7, 2, 0, 2]),
    ("23", [0, 0, 0, 0, 0, 3, 8, 0, 0]),
    ("m-3", [0, 0, 8, 3, 1, 3, 8, 0, 0]),
    ("432", [0, 0, 0, 0, 0, 9, 8, 6, 0]),
    ("-43m", [0, 6, 0, 6, 0, 3, 8, 0, 0]),
    ("m-3m", [0, 6, 8, 9, 1, 9, 8, 6, 0]),
];

/// The symbol of a group of rotation parts, `?` if they form none.
fn point_group(rotations: &[Matrix3<i32>]) -> &'static str {
    let mut counts = [0; 9];
    for w in rotations {
        let determinant = w.map(f64::from).determinant().round() as i32;
        let column = match (determinant, w.trace()) {
            (1, 3) => continue,
            (-1, -2) => 0,
            (-1, -1) => 1,
            (-1, 0) => 2,
            (-1, 1) => 3,
            (-1, -3) => 4,
            (1, -1) => 5,
            (1, 0) => 6,
            (1, 1) => 7,
            (1, 2) => 8,
            _ => return "?",
        };
        counts[column] += 1;
    }
    GROUPS.iter().find(|(_, row)| *row == counts).map_or("?", |(symbol, _)| symbol)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Orders of the point groups: 1, 2, 3, 4, 6, 8, 12, 16, 24 or 48; no two rows alike.
    #[test]
    fn the_table_is_of_groups() {
        for (i, (symbol, row)) in GROUPS.iter().enumerate() {
            let order = 1 + row.iter().sum::<usize>();
            assert!([1, 2, 3, 4, 6, 8, 12, 16, 24, 48].contains(&order), "{symbol}");
            assert!(GROUPS[..i].iter().all(|(_, other)| other != row), "{symbol}");
            // A group with improper operations has as many of them as proper ones.
            let improper: usize = row[..5].iter().sum();
            assert!(improper == 0 || 2 * improper == order, "{symbol}");
        }
    }

    /// International Tables A, groups 225 (4a, 4b: m-3m; 8c: -43m) and 194 (2a: -3m; 2c: -6m2; 4f: 3m).
    #[test]
    fn site_symmetries_are_those_of_the_tables() {
        let host = Host::parse("ccp").unwrap();
        let base = host.spheres[0].0;
        let at = |x: f64| Fractional(base + nalgebra::Vector3::repeat(x)).reduced();
        let found = orbits(&host, &operations(&host).unwrap(), &[at(0.5), at(0.25), at(0.75)]);
        assert_eq!(found[0], Orbit { number: 0, multiplicity: 1, site_symmetry: "m-3m" });
        assert_eq!(found[1], Orbit { number: 1, multiplicity: 2, site_symmetry: "-43m" });
        let host = Host::parse("hcp").unwrap();
        let found = orbits(&host, &operations(&host).unwrap(), &host.spheres);
        assert_eq!(found[0], Orbit { number: 0, multiplicity: 2, site_symmetry: "-6m2" });
    }
}
