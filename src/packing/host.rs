//! Hosts: packings of equal spheres by name or by stacking sequence.

use super::stacking::{Stacking, StackingError};
use crate::crystal::symmetry::{self, SymmetryError};
use crate::crystal::{Fractional, Lattice, Parameters};

/// A periodic packing of spheres of radius 1 in its primitive cell.
#[derive(Clone, Debug)]
pub struct Host {
    /// As the user names it.
    pub name: String,
    /// Primitive lattice, in radii of the packing sphere.
    pub lattice: Lattice,
    /// Centres of the spheres.
    pub spheres: Vec<Fractional>,
    /// The stacking, for close packings.
    pub stacking: Option<Stacking>,
}

/// Why a host cannot be had.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum HostError {
    /// No such name.
    #[error(
        "`{name}` is no packing known here; take {known}, or a stacking of close-packed layers such as `stack:ABAC`"
    )]
    Unknown {
        /// As given.
        name: String,
        /// The names there are.
        known: String,
    },
    /// A bad stacking.
    #[error(transparent)]
    Stacking(#[from] StackingError),
    /// The primitive cell could not be found.
    #[error("packing `{name}`: {source}")]
    Symmetry {
        /// As given.
        name: String,
        /// Why.
        source: SymmetryError,
    },
}

/// Names of the packings, with the stacking where there is one.
pub const NAMED: [&str; 4] = ["ccp", "hcp", "bcc", "primitive-cubic"];

/// Spacing of close-packed layers of spheres of radius 1: 2√(2/3).
const LAYER_SPACING: f64 = 1.632_993_161_855_452;

/// Tolerance, in sphere radii, for finding the primitive cell of a packing built exactly.
const TOLERANCE: f64 = 1e-6;

impl Host {
    /// The host of this name: `ccp`, `hcp`, `bcc`, `primitive-cubic`, or `stack:` and layer letters.
    ///
    /// # Errors
    /// [`HostError`] when the name is unknown or the stacking impossible.
    pub fn parse(text: &str) -> Result<Self, HostError> {
        let name = text.trim();
        match name {
            "ccp" => Self::stacked(name, Stacking::parse("ABC")?),
            "hcp" => Self::stacked(name, Stacking::parse("AB")?),
            // Spheres touch along the body diagonal: a = 4/√3.
            "bcc" => Self::primitive(name, cubic(4.0 / 3.0_f64.sqrt()), &[[0.0; 3], [0.5; 3]], None),
            "primitive-cubic" => Self::primitive(name, cubic(2.0), &[[0.0; 3]], None),
            _ => match name.strip_prefix("stack:") {
                Some(letters) => Self::stacked(name, Stacking::parse(letters)?),
                None => {
                    Err(HostError::Unknown { name: name.into(), known: NAMED.map(|n| format!("`{n}`")).join(", ") })
                }
            },
        }
    }

    /// Layers of touching spheres: the lattice of one layer is hexagonal with a = 2.
    fn stacked(name: &str, stacking: Stacking) -> Result<Self, HostError> {
        let n = stacking.layers().len() as f64;
        let cell = Parameters { a: 2.0, b: 2.0, c: n * LAYER_SPACING, alpha: 90.0, beta: 90.0, gamma: 120.0 };
        let places = [(0.0, 0.0), (2.0 / 3.0, 1.0 / 3.0), (1.0 / 3.0, 2.0 / 3.0)];
        let spheres: Vec<[f64; 3]> = stacking
            .layers()
            .iter()
            .enumerate()
            .map(|(z, place)| {
                let (x, y) = places[usize::from(*place)];
                [x, y, z as f64 / n]
            })
            .collect();
        Self::primitive(name, cell, &spheres, Some(stacking))
    }

    fn primitive(
        name: &str,
        cell: Parameters,
        spheres: &[[f64; 3]],
        stacking: Option<Stacking>,
    ) -> Result<Self, HostError> {
        let fail = |source| HostError::Symmetry { name: name.into(), source };
        let lattice = Lattice::from_parameters(&cell)
            .map_err(|e| fail(SymmetryError::NotFound { tolerance: TOLERANCE, reason: e.to_string() }))?;
        let positions: Vec<Fractional> = spheres.iter().map(|p| Fractional::new(p[0], p[1], p[2])).collect();
        let (lattice, spheres, _) =
            symmetry::primitive(&lattice, &positions, &vec![0; positions.len()], TOLERANCE).map_err(fail)?;
        Ok(Self { name: name.into(), lattice, spheres, stacking })
    }
}

fn cubic(a: f64) -> Parameters {
    Parameters { a, b: a, c: a, alpha: 90.0, beta: 90.0, gamma: 90.0 }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::crystal::neighbours::NeighbourList;

    /// Twelve neighbours in every close packing, eight in bcc, six in primitive cubic, all touching: common practice.
    #[test]
    fn spheres_touch_their_neighbours() {
        for (name, spheres, neighbours) in [
            ("ccp", 1, 12),
            ("hcp", 2, 12),
            ("bcc", 1, 8),
            ("primitive-cubic", 1, 6),
            ("stack:ABAC", 4, 12),
            ("stack:ABCACB", 6, 12),
            ("stack:ABCABC", 1, 12),
        ] {
            let host = Host::parse(name).unwrap();
            assert_eq!(host.spheres.len(), spheres, "{name}");
            let list = NeighbourList::new(&host.lattice, &host.spheres, 2.1);
            for i in 0..spheres {
                let near = list.of(i, 2.1);
                assert_eq!(near.len(), neighbours, "{name}");
                assert!(near.iter().all(|n| (n.distance - 2.0).abs() < 1e-9), "{name}");
            }
        }
    }

    #[test]
    fn unknown_hosts_are_told_what_there_is() {
        let error = Host::parse("fcc").unwrap_err();
        assert!(error.to_string().contains("`ccp`"), "{error}");
    }
}
