//! Interstices: the holes of a packing, each once, with its spheres, its size and its shape.
//!
//! They are the vertices of the Voronoi diagram of the sphere centres. Vertices that coincide within a tolerance are one
//! interstice; its centre is then solved again over *all* spheres around it by least squares, so that rounding in the
//! diagram does not show. Centres that are no vertices, such as bcc's octahedral interstice (a saddle between its
//! tetrahedral ones, 2/√3 − 1), are not found here.

use super::host::Host;
use super::polyhedron::Kind;
use super::voronoi::cell_vertices;
use crate::crystal::neighbours::NeighbourList;
use crate::crystal::symmetry::{self, SymmetryError};
use crate::crystal::{Cartesian, Fractional, Lattice};
use itertools::Itertools;
use nalgebra::{Matrix3, Vector3};

/// A sphere that touches an interstice.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Contact {
    /// Index of the sphere in the host.
    pub sphere: usize,
    /// Cell in which it lies, relative to the cell of the interstice's position.
    pub image: [i32; 3],
    /// Distance between the centres, in radii of the packing sphere.
    pub distance: f64,
}

/// A hole of the packing.
#[derive(Clone, Debug, PartialEq)]
pub struct Interstice {
    /// Centre, each coordinate in [0, 1).
    pub position: Fractional,
    /// Radius of the sphere that just fits, as a ratio to the packing sphere's.
    pub ratio: f64,
    /// The spheres around it; their number is the coordination number.
    pub shell: Vec<Contact>,
    /// Shape of the shell.
    pub kind: Kind,
    /// Number of its orbit under the host's symmetry, from 0, in order of ratio.
    pub orbit: usize,
}

/// Why interstices cannot be found.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum PackingError {
    /// The host's symmetry failed.
    #[error("host `{host}`: {source}")]
    Symmetry {
        /// Name of the host.
        host: String,
        /// Why.
        source: SymmetryError,
    },
    /// More spheres than are taken.
    #[error("host `{host}` has {spheres} spheres; at most {MAX_SPHERES} are taken")]
    TooLarge {
        /// Name of the host.
        host: String,
        /// How many.
        spheres: usize,
    },
}

/// Most spheres in a host.
pub const MAX_SPHERES: usize = 100_000;

/// Vertices nearer than this, in sphere radii, are one interstice; spheres whose distance from a centre differs by less
/// belong to one shell.
const MERGE: f64 = 2e-3;

/// Distance, in sphere radii, within which symmetry maps an interstice onto another.
const SAME_PLACE: f64 = 1e-2;

/// The interstices of a host, in order of ratio, orbit and position.
///
/// # Errors
/// [`PackingError`] when the host is too large or its symmetry cannot be found.
pub fn interstices(host: &Host) -> Result<Vec<Interstice>, PackingError> {
    if host.spheres.len() > MAX_SPHERES {
        return Err(PackingError::TooLarge { host: host.name.clone(), spheres: host.spheres.len() });
    }
    let list = NeighbourList::new(&host.lattice, &host.spheres, 2.0);
    let mut centres: Vec<Fractional> = Vec::new();
    for sphere in 0..host.spheres.len() {
        let origin = host.lattice.cartesian(&host.spheres[sphere]).0;
        for vertex in cell_vertices(&host.lattice, &list, &host.spheres, sphere) {
            let rough = host.lattice.fractional(&Cartesian(origin + vertex));
            centres.push(settled(&host.lattice, &list, rough));
        }
    }
    let mut found: Vec<Interstice> =
        distinct(&host.lattice, &centres).into_iter().map(|c| measured(&host.lattice, &list, c)).collect();
    found.sort_by(|a, b| a.ratio.total_cmp(&b.ratio));
    number_orbits(host, &mut found)?;
    Ok(found)
}

/// The spheres around a point: all whose distance exceeds the nearest's by less than [`MERGE`].
fn shell(
    lattice: &Lattice,
    list: &NeighbourList<'_>,
    centre: &Fractional,
) -> Vec<crate::crystal::neighbours::Neighbour> {
    let mut radius = 1.0;
    let nearest = loop {
        let near = list.around(centre, radius);
        if let Some(d) = near.iter().map(|n| n.distance).min_by(f64::total_cmp) {
            break d;
        }
        radius *= 1.5;
        if radius > lattice.basis().column_iter().map(|c| c.norm()).sum::<f64>() {
            break radius;
        }
    };
    let mut near = list.around(centre, nearest + MERGE);
    near.sort_by(|a, b| a.index.cmp(&b.index).then(a.image.cmp(&b.image)));
    near
}

/// Moves a rough centre to the point equidistant, in the least squares sense, from the spheres around it.
///
/// |c|² − 2 c·p_i + |p_i|² = r² for all i; subtracting the mean leaves linear equations in c.
fn settled(lattice: &Lattice, list: &NeighbourList<'_>, rough: Fractional) -> Fractional {
    let points: Vec<Vector3<f64>> = shell(lattice, list, &rough).iter().map(|n| n.vector).collect();
    let n = points.len() as f64;
    let mean: Vector3<f64> = points.iter().sum::<Vector3<f64>>() / n;
    let mean_square: f64 = points.iter().map(|p| p.norm_squared()).sum::<f64>() / n;
    let (mut normal, mut right) = (Matrix3::zeros(), Vector3::zeros());
    for p in &points {
        let d = p - mean;
        normal += d * d.transpose();
        right += d * ((p.norm_squared() - mean_square) / 2.0);
    }
    match normal.try_inverse() {
        Some(inverse) => {
            let shift = inverse * right;
            Fractional(rough.0 + lattice.fractional(&Cartesian(shift)).0)
        }
        None => rough,
    }
}

/// One of each group of centres nearer to each other than [`MERGE`], reduced to the cell.
fn distinct(lattice: &Lattice, centres: &[Fractional]) -> Vec<Fractional> {
    let list = NeighbourList::new(lattice, centres, MERGE);
    let mut taken = vec![false; centres.len()];
    let mut kept = Vec::new();
    for i in 0..centres.len() {
        if taken[i] {
            continue;
        }
        for n in list.around(&centres[i], MERGE) {
            taken[n.index] = true;
        }
        kept.push(tidy(&centres[i]));
    }
    kept
}

/// Reduced to [0, 1), with coordinates a rounding error from 0 or a simple fraction set on it.
fn tidy(position: &Fractional) -> Fractional {
    const GRID: f64 = 48.0;
    const ROUNDING: f64 = 1e-9;
    let on_grid = |x: f64| {
        let nearest = (x * GRID).round() / GRID;
        if (nearest - x).abs() < ROUNDING { nearest + 0.0 } else { x }
    };
    Fractional(position.0.map(on_grid)).reduced()
}

fn measured(lattice: &Lattice, list: &NeighbourList<'_>, position: Fractional) -> Interstice {
    let near = shell(lattice, list, &position);
    let distance = near.iter().map(|n| n.distance).sum::<f64>() / near.len() as f64;
    let vectors: Vec<_> = near.iter().map(|n| n.vector).collect();
    let shell = near.iter().map(|n| Contact { sphere: n.index, image: n.image, distance: n.distance }).collect();
    Interstice { position, ratio: distance - 1.0, shell, kind: Kind::of(&vectors), orbit: 0 }
}

/// Numbers the orbits under the symmetry of the spheres and sorts by orbit, then position.
fn number_orbits(host: &Host, found: &mut [Interstice]) -> Result<(), PackingError> {
    let (operations, _) = symmetry::operations(&host.lattice, &host.spheres, &vec![0; host.spheres.len()], 1e-4)
        .map_err(|source| PackingError::Symmetry { host: host.name.clone(), source })?;
    let positions: Vec<Fractional> = found.iter().map(|hole| hole.position).collect();
    let list = NeighbourList::new(&host.lattice, &positions, SAME_PLACE);
    let mut orbit = vec![usize::MAX; positions.len()];
    let mut next = 0;
    for i in 0..positions.len() {
        if orbit[i] != usize::MAX {
            continue;
        }
        for operation in &operations {
            for n in list.around(&operation.apply(&positions[i]), SAME_PLACE) {
                orbit[n.index] = next;
            }
        }
        orbit[i] = next;
        next += 1;
    }
    for (hole, orbit) in found.iter_mut().zip(orbit) {
        hole.orbit = orbit;
    }
    let key = |h: &Interstice| h.position.0.map(|x| (x * 1e6).round() as i64);
    let order: Vec<Interstice> = found
        .iter()
        .cloned()
        .sorted_by(|a, b| a.orbit.cmp(&b.orbit).then_with(|| key(a).as_slice().cmp(key(b).as_slice())))
        .collect();
    found.clone_from_slice(&order);
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn counts(name: &str) -> Vec<(Kind, usize, usize, f64)> {
        let host = Host::parse(name).unwrap();
        let found = interstices(&host).unwrap();
        let mut rows: Vec<(Kind, usize, usize, f64)> = Vec::new();
        for hole in found {
            match rows.iter_mut().find(|r| r.0 == hole.kind && (r.3 - hole.ratio).abs() < 1e-9) {
                Some(row) => row.2 += 1,
                None => rows.push((hole.kind, hole.shell.len(), 1, hole.ratio)),
            }
        }
        rows
    }

    /// Critical ratios: L. Pauling, J. Am. Chem. Soc. 51, 1010 (1929); numbers of holes per sphere: A. F. Wells,
    /// Structural Inorganic Chemistry (Oxford), chapter on sphere packings. Closed forms throughout.
    #[test]
    fn ideal_packings_have_their_holes() {
        let tetrahedral = 1.5_f64.sqrt() - 1.0;
        let octahedral = 2.0_f64.sqrt() - 1.0;
        for (name, spheres) in [("ccp", 1), ("hcp", 2), ("stack:ABAC", 4), ("stack:ABCACB", 6), ("stack:ABCACABCB", 9)]
        {
            let rows = counts(name);
            assert_eq!(rows.len(), 2, "{name}: {rows:?}");
            for (kind, n, number, ratio) in rows {
                let (want_n, want_number, want_ratio) = match kind {
                    Kind::Tetrahedral => (4, 2 * spheres, tetrahedral),
                    Kind::Octahedral => (6, spheres, octahedral),
                    other => panic!("{name}: {other}"),
                };
                assert_eq!((n, number), (want_n, want_number), "{name} {kind}");
                assert!((ratio - want_ratio).abs() < 1e-12, "{name} {kind} {ratio}");
            }
        }
        let bcc = counts("bcc");
        assert_eq!((bcc.len(), bcc[0].0, bcc[0].1, bcc[0].2), (1, Kind::Tetrahedral, 4, 6));
        assert!((bcc[0].3 - ((5.0_f64 / 3.0).sqrt() - 1.0)).abs() < 1e-12);
        let cubic = counts("primitive-cubic");
        assert_eq!((cubic.len(), cubic[0].0, cubic[0].1, cubic[0].2), (1, Kind::Cubic, 8, 1));
        assert!((cubic[0].3 - (3.0_f64.sqrt() - 1.0)).abs() < 1e-12);
    }

    /// The same holes whether the host is given in its primitive cell, a skewed one or a supercell, and when every
    /// sphere is displaced by up to 1e-6 of the sphere distance.
    #[test]
    fn neither_the_cell_nor_rounding_changes_the_holes() {
        let host = Host::parse("hcp").unwrap();
        let skew = nalgebra::Matrix3::new(1.0, 2.0, 0.0, 0.0, 1.0, 1.0, 0.0, 0.0, 3.0);
        let lattice = Lattice::from_basis(host.lattice.basis() * skew).unwrap();
        let mut spheres = Vec::new();
        for sphere in &host.spheres {
            for k in 0..3 {
                let p = lattice
                    .fractional(&Cartesian(host.lattice.basis() * (sphere.0 + Vector3::new(0.0, 0.0, f64::from(k)))));
                let jitter = f64::from(k) - 1.0 + sphere.0.x;
                spheres.push(Fractional(p.0 + Vector3::new(1.0, -0.7, 0.4) * 2e-7 * jitter).reduced());
            }
        }
        let found = interstices(&Host { lattice, spheres, ..host }).unwrap();
        let number = |kind| found.iter().filter(|h| h.kind == kind).count();
        assert_eq!((number(Kind::Octahedral), number(Kind::Tetrahedral), found.len()), (6, 12, 18));
    }
}
