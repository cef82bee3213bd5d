//! Hosts: packings of spheres by name, by stacking, by template.
//!
//! A host may be packed by spheres of several roles (AX₃ layers: X and the large cation A); the first role sets the unit
//! of length. The framework of a real crystal is built in `framework`.

use super::layers::{self, Layers};
use super::stacking::{Stacking, StackingError};
use super::template::{TemplateError, Templates};
use crate::crystal::symmetry::{self, SymmetryError};
use crate::crystal::{Fractional, Lattice, Parameters};
use serde::{Deserialize, Serialize};
use std::collections::BTreeMap;

/// A periodic packing of spheres; those of the first role have radius 1. Packings built by name are in their primitive
/// cell.
#[derive(Clone, Debug)]
pub struct Host {
    /// As the user names it.
    pub name: String,
    /// Lattice, in radii of the packing sphere.
    pub lattice: Lattice,
    /// Centres of the spheres.
    pub spheres: Vec<Fractional>,
    /// For each sphere its index in [`Self::roles`].
    pub role: Vec<usize>,
    /// What spheres there are; the first is the packing sphere that ratios refer to.
    pub roles: Vec<Role>,
    /// The stacking, for layered packings.
    pub stacking: Option<Stacking>,
    /// Radius of the packing sphere in Å, where it is known.
    pub scale: Option<f64>,
}

/// A kind of sphere in a packing.
#[derive(Clone, Debug, PartialEq)]
pub struct Role {
    /// `X`, `A`, or an element's symbol.
    pub name: String,
    /// Which ions it stands for.
    pub ion: Sign,
    /// Radius over that of the first role.
    pub radius: f64,
}

/// Sign of an ion's charge.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Sign {
    /// Negative.
    Anion,
    /// Positive.
    Cation,
}

impl Role {
    /// X: anions of radius 1.
    pub fn anion() -> Self {
        Self { name: "X".into(), ion: Sign::Anion, radius: 1.0 }
    }
}

/// Why a host cannot be had.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum HostError {
    /// No such name.
    #[error(
        "`{name}` is no packing known here{hint}; take {known}, a stacking of close-packed layers such as `stack:ABAC` or `stack:hc`, or of AX3 layers such as `ax3:hc`"
    )]
    Unknown {
        /// As given.
        name: String,
        /// ` (did you mean …?)`, or nothing.
        hint: String,
        /// The names there are.
        known: String,
    },
    /// A bad stacking.
    #[error(transparent)]
    Stacking(#[from] StackingError),
    /// A template that cannot be used.
    #[error(transparent)]
    Template(#[from] TemplateError),
    /// `NAME:u=0.3` that cannot be read or does not fit the host.
    #[error("packing `{name}`: {reason}")]
    Parameter {
        /// Name of the host.
        name: String,
        /// What is wrong and what would be accepted.
        reason: String,
    },
    /// The framework of a crystal cannot be taken.
    #[error("framework of `{name}`: {reason}")]
    Framework {
        /// Name of the crystal.
        name: String,
        /// What is wrong and what would be accepted.
        reason: String,
    },
    /// The primitive cell could not be found.
    #[error("packing `{name}`: {source}")]
    Symmetry {
        /// As given.
        name: String,
        /// Why.
        source: SymmetryError,
    },
}

/// Names of the packings built without a template.
pub const NAMED: [&str; 4] = ["ccp", "hcp", "bcc", "primitive-cubic"];

/// Names that people use for packings called otherwise here; common practice, no source.
const OTHER_NAMES: [(&str, &str); 7] = [
    ("fcc", "ccp"),
    ("hexagonal", "hcp"),
    ("dhcp", "stack:hc"),
    ("sc", "primitive-cubic"),
    ("simple-cubic", "primitive-cubic"),
    ("cubic", "primitive-cubic"),
    ("perovskite", "ax3:c"),
];

/// Tolerance, in sphere radii, for finding the primitive cell of a packing built exactly.
const TOLERANCE: f64 = 1e-6;

/// Range of a radius given for the A of AX₃ layers, over that of X.
const A_RADIUS: (f64, f64) = (0.5, 1.5);

impl Host {
    /// The host of this name: `ccp`, `hcp`, `bcc`, `primitive-cubic`, `stack:` and layer letters or h/c symbols,
    /// `layers:` and letters that may repeat, `ax3:` and a stacking, or an embedded template. Parameters follow a colon:
    /// `ax3:hc:A=1.1`.
    ///
    /// # Errors
    /// [`HostError`] when the name is unknown, the stacking impossible or a parameter out of range.
    pub fn parse(text: &str) -> Result<Self, HostError> {
        Self::parse_with(text, Templates::embedded())
    }

    /// As [`Self::parse`], with templates of the caller's choice.
    ///
    /// # Errors
    /// As [`Self::parse`].
    pub fn parse_with(text: &str, templates: &Templates) -> Result<Self, HostError> {
        let name = text.trim();
        match name {
            "ccp" => return Self::layered(name, Stacking::parse("ABC")?, layers::simple, 1.0),
            "hcp" => return Self::layered(name, Stacking::parse("AB")?, layers::simple, 1.0),
            // Spheres touch along the body diagonal: a = 4/√3.
            "bcc" => return Self::of_equal_spheres(name, cubic(4.0 / 3.0_f64.sqrt()), &[[0.0; 3], [0.5; 3]]),
            "primitive-cubic" => return Self::of_equal_spheres(name, cubic(2.0), &[[0.0; 3]]),
            _ => {}
        }
        let (first, rest) = name.split_once(':').unwrap_or((name, ""));
        match first {
            "stack" => Self::layered(name, Stacking::parse(rest)?, layers::simple, 1.0),
            "layers" => Self::layered(name, Stacking::parse_layers(rest)?, layers::simple, 1.0),
            "ax3" => {
                let (word, parameters) = rest.split_once(':').unwrap_or((rest, ""));
                let given = parameters_of(name, parameters)?;
                let radius = a_radius(name, &given)?;
                Self::layered(name, Stacking::parse(word)?, layers::ax3, radius)
            }
            _ => match templates.get(first) {
                Some(template) => template.host(name, &parameters_of(name, rest)?),
                None => Err(unknown(name, templates)),
            },
        }
    }

    /// Radius of a sphere of the host over that of the first role.
    pub fn radius(&self, sphere: usize) -> f64 {
        self.roles[self.role[sphere]].radius
    }

    /// The roles of all spheres, as symmetry takes them.
    pub fn kinds(&self) -> Vec<i32> {
        self.role.iter().map(|r| *r as i32).collect()
    }

    fn layered(
        name: &str,
        stacking: Stacking,
        geometry: fn(&Stacking) -> Layers,
        a_radius: f64,
    ) -> Result<Self, HostError> {
        let Layers { cell, spheres, role } = geometry(&stacking);
        let mut roles = vec![Role::anion()];
        if role.contains(&1) {
            roles.push(Role { name: "A".into(), ion: Sign::Cation, radius: a_radius });
        }
        let host = Self::primitive(name, &cell, &spheres, &role, roles)?;
        Ok(Self { stacking: Some(stacking), ..host })
    }

    fn of_equal_spheres(name: &str, cell: Parameters, spheres: &[[f64; 3]]) -> Result<Self, HostError> {
        let spheres: Vec<Fractional> = spheres.iter().map(|p| Fractional::new(p[0], p[1], p[2])).collect();
        Self::primitive(name, &cell, &spheres, &vec![0; spheres.len()], vec![Role::anion()])
    }

    /// Reduces spheres of one cell to the primitive cell.
    pub(super) fn primitive(
        name: &str,
        cell: &Parameters,
        spheres: &[Fractional],
        role: &[usize],
        roles: Vec<Role>,
    ) -> Result<Self, HostError> {
        let fail = |source| HostError::Symmetry { name: name.into(), source };
        let lattice = Lattice::from_parameters(cell)
            .map_err(|e| fail(SymmetryError::NotFound { tolerance: TOLERANCE, reason: e.to_string() }))?;
        let kinds: Vec<i32> = role.iter().map(|r| *r as i32).collect();
        let (lattice, spheres, source) = symmetry::primitive(&lattice, spheres, &kinds, TOLERANCE).map_err(fail)?;
        let role = source.iter().map(|i| role[*i]).collect();
        Ok(Self { name: name.into(), lattice, spheres, role, roles, stacking: None, scale: None })
    }
}

fn cubic(a: f64) -> Parameters {
    Parameters { a, b: a, c: a, alpha: 90.0, beta: 90.0, gamma: 90.0 }
}

/// Reads `u=0.3,ca=1.6`.
fn parameters_of(host: &str, text: &str) -> Result<BTreeMap<String, f64>, HostError> {
    let fail = |reason: String| HostError::Parameter { name: host.into(), reason };
    let mut given = BTreeMap::new();
    for part in text.split(',').map(str::trim).filter(|part| !part.is_empty()) {
        let (name, value) = part
            .split_once('=')
            .ok_or_else(|| fail(format!("`{part}` is no parameter; write a name and a value, for example `u=0.26`")))?;
        let value: f64 = value
            .trim()
            .parse()
            .ok()
            .filter(|v: &f64| v.is_finite())
            .ok_or_else(|| fail(format!("`{value}` is no number; write for example `{}=0.26`", name.trim())))?;
        if given.insert(name.trim().to_string(), value).is_some() {
            return Err(fail(format!("parameter `{}` is given twice", name.trim())));
        }
    }
    Ok(given)
}

fn a_radius(host: &str, given: &BTreeMap<String, f64>) -> Result<f64, HostError> {
    let fail = |reason| HostError::Parameter { name: host.into(), reason };
    if let Some(name) = given.keys().find(|name| *name != "A") {
        return Err(fail(format!("there is no parameter `{name}`; take `A`, the radius of A over that of X")));
    }
    let (low, high) = A_RADIUS;
    match given.get("A") {
        None => Ok(1.0),
        Some(r) if (low..=high).contains(r) => Ok(*r),
        Some(r) => Err(fail(format!("the radius of A is {r} times that of X; it must be {low} to {high}"))),
    }
}

fn unknown(name: &str, templates: &Templates) -> HostError {
    let names = || NAMED.into_iter().chain(templates.names());
    let other = OTHER_NAMES.iter().find(|(other, _)| other.eq_ignore_ascii_case(name)).map(|(_, ours)| *ours);
    // Beyond a third of the letters a likeness is chance.
    let near = || names().map(|n| (edits(name, n), n)).filter(|(d, n)| 3 * d <= n.len()).min().map(|(_, n)| n);
    HostError::Unknown {
        name: name.chars().take(60).collect(),
        hint: other.or_else(near).map(|n| format!(" (did you mean `{n}`?)")).unwrap_or_default(),
        known: names().map(|n| format!("`{n}`")).collect::<Vec<_>>().join(", "),
    }
}

/// Letters to insert, delete or replace to turn one word into the other (Levenshtein distance).
fn edits(a: &str, b: &str) -> usize {
    let b: Vec<char> = b.chars().collect();
    let mut row: Vec<usize> = (0..=b.len()).collect();
    for (i, c) in a.chars().take(60).enumerate() {
        let mut diagonal = row[0];
        row[0] = i + 1;
        for j in 0..b.len() {
            let replaced = diagonal + usize::from(b[j] != c);
            diagonal = row[j + 1];
            row[j + 1] = replaced.min(row[j] + 1).min(diagonal + 1);
        }
    }
    row[b.len()]
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
            ("stack:hc", 4, 12),
            ("stack:ABCACB", 6, 12),
            ("stack:ABCABC", 1, 12),
            // 3R, rhombohedral: a third of the nine layers.
            ("stack:hhc", 3, 12),
            // Six in the layer, one straight above or below, three over the triangle on the other side.
            ("layers:AABB", 4, 10),
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

    /// Layers AX₃: close packed throughout, each A among 12 X, each X among 4 A and 8 X (Wells, as above); formula
    /// units by polytype from the layers: 2H 2, 3C 1, 4H 4, 6H 6, 9R 3.
    #[test]
    fn a_never_touches_a() {
        for (name, units) in [("ax3:h", 2), ("ax3:c", 1), ("ax3:hc", 4), ("ax3:hcc", 6), ("ax3:hhc", 3)] {
            let host = Host::parse(name).unwrap();
            assert_eq!(host.spheres.len(), 4 * units, "{name}");
            assert_eq!(host.role.iter().filter(|r| **r == 1).count(), units, "{name}");
            let list = NeighbourList::new(&host.lattice, &host.spheres, 2.1);
            for i in 0..host.spheres.len() {
                let near = list.of(i, 2.0 + 1e-6);
                let of_a = near.iter().filter(|n| host.role[n.index] == 1).count();
                assert_eq!((near.len(), of_a), if host.role[i] == 1 { (12, 0) } else { (12, 4) }, "{name}");
            }
        }
    }

    #[test]
    fn unknown_hosts_are_told_what_there_is() {
        let message = |name: &str| Host::parse(name).unwrap_err().to_string();
        assert!(message("fcc").contains("did you mean `ccp`"), "{}", message("fcc"));
        assert!(message("primitive-cubik").contains("did you mean `primitive-cubic`"));
        assert!(message("hpc").contains("take `ccp`, `hcp`"));
        assert!(!message("nothing").contains("did you mean"), "{}", message("nothing"));
        assert!(message("ax3:c:A=9").contains("0.5 to 1.5"));
        assert!(message("ax3:c:B=1").contains("no parameter `B`"));
        assert!(message("ax3:c:A").contains("for example `u=0.26`"));
        assert!(message("ax3:c:A=x").contains("`x` is no number"));
    }
}
