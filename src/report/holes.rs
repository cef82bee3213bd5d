//! What a host's spheres leave open, as data for JSON; `text` makes the tables of it.
//!
//! Interstices, saddles and windows are told orbit by orbit, with one member in full. Lengths are in radii of the packing
//! sphere; those whose names end in `angstrom` are there when the host has a size.

mod text;

use crate::crystal::Parameters;
use crate::ion::Amount;
use crate::packing::{Class, Contact, Host, Interstice, Shared, Sign, Survey, Window, shared};
use serde::Serialize;
pub use text::text;

/// The host and all that was found in it.
#[derive(Clone, Debug, Serialize)]
pub struct Holes {
    /// As the user names it.
    pub host: String,
    /// The stacking, of layered packings.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub stacking: Option<Layers>,
    /// Lattice parameters: lengths in radii of the packing sphere, angles in degrees.
    pub cell: Parameters,
    /// Radius of the packing sphere, Å, where it is known.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub sphere_angstrom: Option<f64>,
    /// Kinds of sphere; the first is the packing sphere.
    pub roles: Vec<RoleRow>,
    /// Spheres of the cell, in order of their index.
    pub spheres: Vec<SphereRow>,
    /// Orbits of interstices, in order of ratio.
    pub interstices: Vec<Orbit>,
    /// Orbits of saddles: those of windows (`face`), then those between two spheres (`edge`).
    pub saddles: Vec<Orbit>,
    /// Orbits of windows, the widest first.
    pub windows: Vec<WindowOrbit>,
    /// What the polyhedra of interstices share.
    pub shared: Vec<SharedRow>,
    /// The largest ratio that gets through the crystal in one, two and three dimensions.
    pub critical_ratios: [Option<f64>; 3],
    /// The mobile ion and its ways.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub mobile: Option<Ways>,
    /// Doubts about the host.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub notes: Vec<String>,
}

/// A stacking in both notations.
#[derive(Clone, Debug, Serialize)]
pub struct Layers {
    /// Layer letters.
    pub letters: String,
    /// h/c symbols.
    pub symbols: String,
}

/// A kind of sphere.
#[derive(Clone, Debug, Serialize)]
pub struct RoleRow {
    /// Name.
    pub name: String,
    /// Sign of its ion.
    pub ion: Sign,
    /// Radius over that of the packing sphere.
    pub radius: f64,
    /// Spheres of the cell.
    pub number: usize,
}

/// A sphere.
#[derive(Clone, Debug, Serialize)]
pub struct SphereRow {
    /// Name of its role.
    pub role: String,
    /// Fractional coordinates.
    pub position: [f64; 3],
}

/// A sphere that touches, or forms, a place.
#[derive(Clone, Debug, Serialize)]
pub struct ContactRow {
    /// Index of the sphere, from 0.
    pub sphere: usize,
    /// Cell in which it lies, relative to that of the place.
    pub image: [i32; 3],
    /// Distance between the centres.
    pub distance: f64,
}

/// An orbit of interstices or saddles.
#[derive(Clone, Debug, Serialize)]
pub struct Orbit {
    /// Number in its list, from 1; saddles of windows and of pairs are numbered apart.
    pub orbit: usize,
    /// `vertex`, `face` or `edge`.
    pub class: &'static str,
    /// Kind of polyhedron.
    pub kind: String,
    /// Spheres around it, as a formula of roles.
    pub shell: String,
    /// Their number.
    pub coordination: usize,
    /// Places per sphere of the host, all roles counted: `2` or `1/2`.
    pub per_sphere: String,
    /// Radius over that of the packing sphere.
    pub ratio: f64,
    /// Radius, Å.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub radius_angstrom: Option<f64>,
    /// Continuous shape measure from the ideal polyhedron, 0 to 100.
    pub shape: Option<f64>,
    /// Point group of the site.
    pub site_symmetry: &'static str,
    /// Places in the cell.
    pub multiplicity: usize,
    /// Fractional coordinates of each.
    pub positions: Vec<[f64; 3]>,
    /// The spheres around the first.
    pub spheres: Vec<ContactRow>,
}

/// An orbit of windows.
#[derive(Clone, Debug, Serialize)]
pub struct WindowOrbit {
    /// Number, from 1.
    pub orbit: usize,
    /// Orbits of the interstices that it joins.
    pub between: [usize; 2],
    /// Spheres that form it, as a formula of roles.
    pub rim: String,
    /// Radius of the largest sphere that passes, over that of the packing sphere.
    pub ratio: f64,
    /// The same, Å.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub radius_angstrom: Option<f64>,
    /// Windows in the cell.
    pub multiplicity: usize,
    /// Middle of the first, fractional; not reduced to the cell.
    pub position: [f64; 3],
    /// The spheres that form the first.
    pub spheres: Vec<ContactRow>,
}

/// What each interstice of an orbit shares with those of another at one distance.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct SharedRow {
    /// Orbit of the interstice.
    pub orbit: usize,
    /// Orbit of the others.
    pub with: usize,
    /// `corner`, `edge` or `face`.
    pub sharing: String,
    /// Spheres in common.
    pub spheres: usize,
    /// Distance between the centres.
    pub distance: f64,
    /// How many there are around each interstice of the orbit.
    pub number: usize,
}

/// The ion that is to move.
#[derive(Clone, Debug)]
pub struct Mobile {
    /// What it is: `Li1+, 0.730 Å (IV)`.
    pub name: String,
    /// Radius over that of the packing sphere.
    pub ratio: f64,
}

/// Where a mobile ion gets.
#[derive(Clone, Debug, Serialize)]
pub struct Ways {
    /// What it is.
    pub ion: String,
    /// Radius over that of the packing sphere.
    pub ratio: f64,
    /// Sets of interstices connected for it, those of most dimensions first.
    pub networks: Vec<NetworkRow>,
}

/// Interstices connected for the mobile ion.
#[derive(Clone, Debug, Serialize)]
pub struct NetworkRow {
    /// Dimensions in which it goes on without end.
    pub dimension: usize,
    /// Interstices of the cell that belong to it.
    pub interstices: usize,
    /// Their orbits.
    pub orbits: Vec<usize>,
    /// Independent lattice translations that it connects.
    pub directions: Vec<[i64; 3]>,
}

/// Distances that differ by less than this, in radii of the packing sphere, are one.
const SAME_DISTANCE: f64 = 1e-4;

/// Gathers what there is to say.
pub fn gather(host: &Host, survey: &Survey, mobile: Option<&Mobile>, notes: Vec<String>) -> Holes {
    let number = |r: usize| host.role.iter().filter(|role| **role == r).count();
    let roles = host.roles.iter().enumerate();
    let (faces, edges): (Vec<_>, Vec<_>) = survey.saddles.iter().cloned().partition(|s| s.class == Class::Face);
    Holes {
        host: host.name.clone(),
        stacking: host.stacking.as_ref().map(|s| Layers { letters: s.to_string(), symbols: s.symbols() }),
        cell: host.lattice.parameters(),
        sphere_angstrom: host.scale,
        roles: roles
            .map(|(r, role)| RoleRow { name: role.name.clone(), ion: role.ion, radius: role.radius, number: number(r) })
            .collect(),
        spheres: host
            .spheres
            .iter()
            .zip(&host.role)
            .map(|(p, r)| SphereRow { role: host.roles[*r].name.clone(), position: p.0.into() })
            .collect(),
        interstices: orbits(host, &survey.interstices),
        saddles: [orbits(host, &faces), orbits(host, &edges)].concat(),
        windows: window_orbits(host, survey),
        shared: shared_rows(&survey.interstices, &shared(host, &survey.interstices)),
        critical_ratios: survey.critical_ratios,
        mobile: mobile.map(|ion| ways(survey, ion)),
        notes,
    }
}

fn contacts(all: &[Contact]) -> Vec<ContactRow> {
    all.iter().map(|c| ContactRow { sphere: c.sphere, image: c.image, distance: c.distance }).collect()
}

fn class_name(class: Class) -> &'static str {
    match class {
        Class::Vertex => "vertex",
        Class::Face => "face",
        Class::Edge => "edge",
    }
}

/// Places that stand in order of orbit, as [`crate::packing::interstices`] gives them, orbit by orbit.
fn orbits(host: &Host, places: &[Interstice]) -> Vec<Orbit> {
    places
        .chunk_by(|a, b| a.orbit == b.orbit)
        .map(|members| {
            let first = &members[0];
            Orbit {
                orbit: first.orbit + 1,
                class: class_name(first.class),
                kind: first.kind.to_string(),
                shell: first.formula(host),
                coordination: first.shell.len(),
                per_sphere: Amount::new(members.len() as i128, host.spheres.len() as i128).to_string(),
                ratio: first.ratio,
                radius_angstrom: host.scale.map(|scale| first.ratio * scale),
                shape: first.shape,
                site_symmetry: first.site_symmetry,
                multiplicity: members.len(),
                positions: members.iter().map(|m| m.position.0.into()).collect(),
                spheres: contacts(&first.shell),
            }
        })
        .collect()
}

fn window_orbits(host: &Host, survey: &Survey) -> Vec<WindowOrbit> {
    let mut seen = vec![false; survey.windows.len()];
    let mut firsts: Vec<&Window> =
        survey.windows.iter().filter(|w| !std::mem::replace(&mut seen[w.orbit], true)).collect();
    // Equal ratios, up to rounding, in the order in which they were found.
    firsts.sort_by_key(|w| (-(w.ratio / SAME_DISTANCE).round() as i64, w.orbit));
    firsts
        .into_iter()
        .enumerate()
        .map(|(i, w)| {
            let mut between = [w.from, w.to].map(|at| survey.interstices[at].orbit + 1);
            between.sort_unstable();
            WindowOrbit {
                orbit: i + 1,
                between,
                rim: w.formula(host),
                ratio: w.ratio,
                radius_angstrom: host.scale.map(|scale| w.ratio * scale),
                multiplicity: w.multiplicity,
                position: w.position.0.into(),
                spheres: contacts(&w.spheres),
            }
        })
        .collect()
}

/// What the first interstice of each orbit shares, gathered by orbit, number of spheres and distance.
fn shared_rows(interstices: &[Interstice], pairs: &[Shared]) -> Vec<SharedRow> {
    let is_first = |i: usize| i == 0 || interstices[i].orbit != interstices[i - 1].orbit;
    let mut rows: Vec<SharedRow> = Vec::new();
    // Where the rows of the orbit at hand begin.
    let mut start = 0;
    for pair in pairs.iter().filter(|p| is_first(p.first)) {
        let row = SharedRow {
            orbit: interstices[pair.first].orbit + 1,
            with: interstices[pair.second].orbit + 1,
            sharing: pair.sharing.to_string(),
            spheres: pair.spheres,
            distance: pair.distance,
            number: 1,
        };
        if rows.last().is_some_and(|last| last.orbit != row.orbit) {
            start = rows.len();
        }
        let same = |r: &&mut SharedRow| {
            (r.with, r.spheres) == (row.with, row.spheres) && (r.distance - row.distance).abs() < SAME_DISTANCE
        };
        match rows[start..].iter_mut().find(same) {
            Some(known) => known.number += 1,
            None => rows.push(row),
        }
    }
    rows
}

fn ways(survey: &Survey, ion: &Mobile) -> Ways {
    let row = |network: crate::packing::Network| {
        let mut orbits: Vec<usize> = network.interstices.iter().map(|i| survey.interstices[*i].orbit + 1).collect();
        orbits.sort_unstable();
        orbits.dedup();
        NetworkRow {
            dimension: network.dimension,
            interstices: network.interstices.len(),
            orbits,
            directions: network.directions,
        }
    };
    let networks = survey.networks(ion.ratio).into_iter().map(row).collect();
    Ways { ion: ion.name.clone(), ratio: ion.ratio, networks }
}
