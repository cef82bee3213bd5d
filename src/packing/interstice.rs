//! Interstices: the holes of a packing, each once, with its spheres, its size and its shape.
//!
//! They are the places that spheres enclose, found as vertices of the power diagram (for equal spheres, the Voronoi
//! diagram) gathered to holes. Centres that are no vertices, such as bcc's octahedral interstice (a saddle between its
//! tetrahedral ones, 2/√3 − 1), are no interstices of this list; `saddle` finds them.

use super::basin::{self, Basins, Hole};
use super::cell::Spheres;
use super::diagram::Diagram;
use super::host::Host;
use super::polyhedron::Kind;
use super::site_symmetry::{self, Orbit};
use crate::crystal::Fractional;
use crate::crystal::neighbours::Neighbour;
use crate::crystal::symmetry::{Operation, SymmetryError};
use rayon::prelude::*;

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

impl From<&Neighbour> for Contact {
    fn from(n: &Neighbour) -> Self {
        Self { sphere: n.index, image: n.image, distance: n.distance }
    }
}

/// What kind of place an interstice is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Class {
    /// Enclosed on all sides: the clearance is greatest there. A vertex of the diagram.
    Vertex,
    /// Greatest in the plane of its spheres, least across it: the middle of a window.
    Face,
    /// Greatest along the line of two spheres, least across it.
    Edge,
}

/// A hole of the packing, or a saddle between holes.
#[derive(Clone, Debug, PartialEq)]
pub struct Interstice {
    /// Centre, each coordinate in [0, 1).
    pub position: Fractional,
    /// Radius of the largest sphere about the centre that meets no packing sphere, as a ratio to the packing sphere's:
    /// the critical radius ratio.
    pub ratio: f64,
    /// The spheres around it; their number is the coordination number.
    pub shell: Vec<Contact>,
    /// Shape of the shell.
    pub kind: Kind,
    /// Continuous shape measure from the ideal shape of the kind (0: ideal), where one of so many vertices is known.
    pub shape: Option<f64>,
    /// Vertex of the diagram or saddle.
    pub class: Class,
    /// Number of its orbit under the host's symmetry, from 0, in order of ratio.
    pub orbit: usize,
    /// Interstices of the orbit in the cell.
    pub multiplicity: usize,
    /// Point group of the site, not oriented: `-43m`.
    pub site_symmetry: &'static str,
}

impl Interstice {
    /// The shell as a formula, `X4A2`.
    pub fn formula(&self, host: &Host) -> String {
        formula(host, &self.shell)
    }
}

/// Number of spheres of each role, as a formula.
pub(super) fn formula(host: &Host, contacts: &[Contact]) -> String {
    let of_role = |r: usize| contacts.iter().filter(|c| host.role[c.sphere] == r).count();
    let part = |(r, role): (usize, &super::host::Role)| match of_role(r) {
        0 => String::new(),
        1 => role.name.clone(),
        n => format!("{}{n}", role.name),
    };
    host.roles.iter().enumerate().map(part).collect()
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
    /// More spheres than are taken, or none.
    #[error("host `{host}` has {spheres} spheres; 1 to {MAX_SPHERES} are taken")]
    Spheres {
        /// Name of the host.
        host: String,
        /// How many.
        spheres: usize,
    },
}

/// Most spheres in a host.
pub const MAX_SPHERES: usize = 100_000;

/// Ratios that differ by less than this are one in the order of interstices.
const RATIO_GRID: f64 = 1e-6;

/// The diagram of a host's spheres and its holes.
pub(super) struct Geometry {
    pub diagram: Diagram,
    pub basins: Basins,
}

/// Refuses hosts that are empty or too large.
pub(super) fn check(host: &Host) -> Result<(), PackingError> {
    match host.spheres.len() {
        1..=MAX_SPHERES => Ok(()),
        spheres => Err(PackingError::Spheres { host: host.name.clone(), spheres }),
    }
}

/// Radii of a host's spheres.
pub(super) fn radii(host: &Host) -> Vec<f64> {
    (0..host.spheres.len()).map(|i| host.radius(i)).collect()
}

/// The geometry of a host's spheres.
pub(super) fn geometry(spheres: &Spheres<'_>) -> Geometry {
    let diagram = Diagram::new(spheres);
    let basins = basin::basins(spheres, &diagram);
    Geometry { diagram, basins }
}

/// The holes of a host alone, without shapes and symmetry: linear in the number of spheres.
///
/// # Errors
/// [`PackingError::Spheres`] when the host is empty or too large.
pub fn holes(host: &Host) -> Result<Vec<Hole>, PackingError> {
    check(host)?;
    let radii = radii(host);
    Ok(geometry(&Spheres::new(&host.lattice, &host.spheres, &radii)).basins.holes)
}

/// The interstices of a host that its spheres enclose, in order of ratio, orbit and position.
///
/// # Errors
/// [`PackingError`] when the host is empty, too large, or its symmetry cannot be found.
pub fn interstices(host: &Host) -> Result<Vec<Interstice>, PackingError> {
    let operations = site_symmetry::operations(host)?;
    Ok(classified(host, &operations, Class::Vertex, holes(host)?).0)
}

/// Adds shape and symmetry to holes or saddles and sorts them; and for each of the given ones its place in the list.
pub(super) fn classified(
    host: &Host,
    operations: &[Operation],
    class: Class,
    holes: Vec<Hole>,
) -> (Vec<Interstice>, Vec<usize>) {
    let grid = |x: f64| (x / RATIO_GRID).round() as i64;
    let place = |h: &Hole| -> [i64; 3] { h.position.0.map(grid).into() };
    let mut order: Vec<usize> = (0..holes.len()).collect();
    order.sort_by_key(|i| (grid(holes[*i].ratio), place(&holes[*i])));
    let positions: Vec<Fractional> = order.iter().map(|i| holes[*i].position).collect();
    let orbits = site_symmetry::orbits(host, operations, &positions);
    // Orbits are numbered as they come; within one, by position.
    let mut order: Vec<(Orbit, usize)> = orbits.into_iter().zip(order).collect();
    order.sort_by_key(|(orbit, i)| (orbit.number, place(&holes[*i])));
    let mut went = vec![0; holes.len()];
    order.iter().enumerate().for_each(|(to, (_, from))| went[*from] = to);
    let found = order
        .into_par_iter()
        .map(|(orbit, i)| {
            let hole = &holes[i];
            let vectors: Vec<_> = hole.shell.iter().map(|n| n.vector).collect();
            let (kind, shape) = Kind::of(&vectors);
            Interstice {
                position: hole.position,
                ratio: hole.ratio,
                shell: hole.shell.iter().map(Contact::from).collect(),
                kind,
                shape,
                class,
                orbit: orbit.number,
                multiplicity: orbit.multiplicity,
                site_symmetry: orbit.site_symmetry,
            }
        })
        .collect();
    (found, went)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::crystal::{Cartesian, Lattice};
    use nalgebra::Vector3;

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

    /// AABB per cell: 4 prisms at √(7/3) − 1 (Pauling: 0.528), 2 octahedra, 4 tetrahedra.
    #[test]
    fn layers_straight_above_each_other_leave_prisms() {
        let rows = counts("layers:AABB");
        let of = |kind: Kind| rows.iter().find(|r| r.0 == kind).map(|r| (r.1, r.2, r.3)).unwrap();
        let (n, number, ratio) = of(Kind::TrigonalPrismatic);
        assert_eq!((n, number), (6, 4));
        assert!((ratio - ((7.0_f64 / 3.0).sqrt() - 1.0)).abs() < 1e-12);
        assert_eq!((of(Kind::Octahedral).1, of(Kind::Tetrahedral).1, rows.len()), (2, 4, 3));
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
        let role = vec![0; spheres.len()];
        let found = interstices(&Host { lattice, spheres, role, ..host }).unwrap();
        let number = |kind| found.iter().filter(|h| h.kind == kind).count();
        assert_eq!((number(Kind::Octahedral), number(Kind::Tetrahedral), found.len()), (6, 12, 18));
    }
}
