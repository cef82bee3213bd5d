//! Symmetry found in a cell: the bridge to the moyo library.
//!
//! Operations act on fractional coordinates, x′ = W x + w. The standard setting is moyo's: origin choice 2,
//! hexagonal axes for rhombohedral groups, unique axis b.

use super::neighbours::NeighbourList;
use super::transformation::write_terms;
use super::{Fractional, Lattice, Occupant, Site, Structure, setting};
use crate::ion::Amount;
use moyo::MoyoDataset;
use moyo::base::{AngleTolerance, Cell};
use moyo::data::{
    ArithmeticCrystalClassEntry, CrystalSystem, HallSymbolEntry, Setting, arithmetic_crystal_class_entry,
    hall_symbol_entry, operations_from_number,
};
use nalgebra::{Matrix3, Vector3};
use std::collections::BTreeMap;
use std::fmt;
use std::sync::Arc;

/// Default distance within which positions count as symmetric images of each other, Å.
pub const TOLERANCE: f64 = 1e-3;

/// Smallest distance between two positions that the search accepts, Å; nearer ones are one position written twice.
pub const MIN_SEPARATION: f64 = 1e-2;

/// Translations are written as fractions of this number; all standard settings need no finer ones.
const TRANSLATION_GRID: i64 = 24;

/// One operation x′ = W x + w on fractional coordinates.
#[derive(Clone, Debug, PartialEq)]
pub struct Operation {
    /// W.
    pub rotation: Matrix3<i32>,
    /// w, each component in [0, 1).
    pub translation: Vector3<f64>,
}

impl Operation {
    /// The identity.
    pub fn identity() -> Self {
        Self { rotation: Matrix3::identity(), translation: Vector3::zeros() }
    }

    /// W x + w, not reduced.
    pub fn apply(&self, position: &Fractional) -> Fractional {
        Fractional(self.rotation.map(f64::from) * position.0 + self.translation)
    }
}

impl From<&moyo::base::Operation> for Operation {
    fn from(operation: &moyo::base::Operation) -> Self {
        let translation = Fractional(operation.translation).reduced().0;
        // A translation a rounding error below 1 is none.
        let translation = translation.map(|t| if t > 1.0 - 1e-9 { 0.0 } else { t });
        Self { rotation: operation.rotation, translation }
    }
}

/// `-x+1/2,y,z+1/4`: no blanks, fractions of the common crystallographic denominators, decimals for any other.
impl fmt::Display for Operation {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for row in 0..3 {
            if row > 0 {
                f.write_str(",")?;
            }
            let any = write_terms(f, [0, 1, 2].map(|column| self.rotation[(row, column)]), ["x", "y", "z"])?;
            let w = self.translation[row].rem_euclid(1.0);
            let fraction = Amount::new((w * TRANSLATION_GRID as f64).round() as i128, TRANSLATION_GRID.into()).fract();
            if (crate::ion::amount::to_f64(&fraction) - w).abs() > 1e-6 && (w - 1.0).abs() > 1e-6 {
                write!(f, "+{w:.8}")?;
            } else if *fraction.numer() != 0 {
                write!(f, "+{fraction}")?;
            } else if !any {
                f.write_str("0")?;
            }
        }
        Ok(())
    }
}

/// Why no symmetry could be found.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum SymmetryError {
    /// A cell without atoms has the symmetry of its lattice alone, which no reader wants.
    #[error("the cell holds no atoms, so it has no space group")]
    Empty,
    /// Two positions coincide.
    #[error(
        "sites {first} and {second} are {distance:.4} Å apart, nearer than {MIN_SEPARATION} Å: they are one position"
    )]
    Coincide {
        /// Index from 1.
        first: usize,
        /// Index from 1.
        second: usize,
        /// Å.
        distance: f64,
    },
    /// The library gave up.
    #[error("no space group found with a tolerance of {tolerance} Å: {reason}; try another tolerance")]
    NotFound {
        /// Å.
        tolerance: f64,
        /// As the library says it.
        reason: String,
    },
}

/// A space group in one setting.
#[derive(Clone, Debug)]
pub struct SpaceGroup {
    /// Number in International Tables A, 1 to 230.
    pub number: i32,
    /// Serial number of the setting, 1 to 530, in the order of moyo's and spglib's tables.
    pub hall_number: i32,
    /// Hermann–Mauguin symbol with blanks, as CIF writes it: `F d -3 m`.
    pub hermann_mauguin: String,
    /// Hall symbol, `-F 4vw 2vw 3`.
    pub hall: String,
    /// Crystal system in CIF's spelling: `cubic`.
    pub crystal_system: &'static str,
    /// All operations, centring translations included, the identity first.
    pub operations: Vec<Operation>,
}

impl SpaceGroup {
    /// The setting of this serial number (1 to 530).
    pub fn from_hall_number(hall_number: i32) -> Option<Self> {
        let entry = (1..=530).contains(&hall_number).then(|| hall_symbol_entry(hall_number)).flatten()?;
        let class = arithmetic_crystal_class_entry(entry.arithmetic_number)?;
        let operations = operations_from_number(0, Setting::HallNumber(hall_number), false).ok()?;
        Some(Self {
            number: entry.number,
            hall_number,
            hermann_mauguin: spaced_symbol(&entry),
            // moyo's table writes `=` for the double quote of the standard symbol.
            hall: entry.hall_symbol.replace('=', "\""),
            crystal_system: system_name(&class),
            operations: operations.iter().map(Operation::from).collect(),
        })
    }

    /// P 1.
    pub fn p1() -> Self {
        Self {
            number: 1,
            hall_number: 1,
            hermann_mauguin: "P 1".into(),
            hall: "P 1".into(),
            crystal_system: "triclinic",
            operations: vec![Operation::identity()],
        }
    }
}

/// moyo writes `F d -3 m` and `P 2_1/c`; CIF wants no underscore.
fn spaced_symbol(entry: &HallSymbolEntry) -> String {
    // The full symbol names the monoclinic axis; elsewhere CIF's alternative symbol is the short one.
    let monoclinic = (3..=15).contains(&entry.number);
    let symbol = if monoclinic { entry.hm_full } else { entry.hm_short };
    symbol.replace('_', "")
}

fn system_name(class: &ArithmeticCrystalClassEntry) -> &'static str {
    match CrystalSystem::from_geometric_crystal_class(class.geometric_crystal_class) {
        CrystalSystem::Triclinic => "triclinic",
        CrystalSystem::Monoclinic => "monoclinic",
        CrystalSystem::Orthorhombic => "orthorhombic",
        CrystalSystem::Tetragonal => "tetragonal",
        CrystalSystem::Trigonal => "trigonal",
        CrystalSystem::Hexagonal => "hexagonal",
        CrystalSystem::Cubic => "cubic",
    }
}

/// An orbit of symmetry-equal sites in the standard setting.
#[derive(Clone, Debug, PartialEq)]
pub struct OrbitSite {
    /// The representative: exact position on its symmetry element, each coordinate in [0, 1).
    pub site: Site,
    /// Images in the conventional cell, centring included.
    pub multiplicity: usize,
    /// Wyckoff letter in this setting.
    pub wyckoff: char,
    /// Site symmetry, oriented as International Tables write it.
    pub site_symmetry: String,
    /// Index of a site of the **input** structure that lies on this orbit.
    pub input_site: usize,
}

/// A structure in the standard setting of the space group found.
#[derive(Clone, Debug)]
pub struct Symmetrised {
    /// The group.
    pub group: SpaceGroup,
    /// The conventional cell.
    pub lattice: Lattice,
    /// One representative of each orbit.
    pub orbits: Vec<OrbitSite>,
    /// Pearson symbol, `cF56`.
    pub pearson: String,
    /// Distance tolerance that the search really used, Å.
    pub tolerance: f64,
}

/// Largest cell whose symmetry is worth a search, in sites: the search for pure translations compares all pairs and
/// takes seconds here.
pub const MAX_SEARCHED: usize = 10_000;

/// Symmetrising moves a site by less than this, Å.
const REFINEMENT: f64 = 1.0;

/// Operations of the cell that map every position onto one of the same kind within `tolerance` (Å), in the basis of
/// the **input** cell, and for each position the first position of its orbit.
///
/// # Errors
/// [`SymmetryError`] for no positions, coinciding ones, or when the search fails.
pub fn operations(
    lattice: &Lattice,
    positions: &[Fractional],
    kinds: &[i32],
    tolerance: f64,
) -> Result<(Vec<Operation>, Vec<usize>), SymmetryError> {
    let dataset = dataset(lattice, positions, kinds, tolerance)?;
    Ok((dataset.operations.iter().map(Operation::from).collect(), dataset.orbits))
}

/// The primitive cell of a set of positions, in the standard orientation of its space group: lattice, positions, and
/// for each the index of an **input** position that maps to it.
///
/// # Errors
/// As [`operations`].
pub fn primitive(
    lattice: &Lattice,
    positions: &[Fractional],
    kinds: &[i32],
    tolerance: f64,
) -> Result<(Lattice, Vec<Fractional>, Vec<usize>), SymmetryError> {
    let dataset = dataset(lattice, positions, kinds, tolerance)?;
    let cell = &dataset.prim_std_cell;
    let source =
        (0..cell.positions.len()).map(|k| dataset.mapping_std_prim.iter().position(|&m| m == k).unwrap_or(0)).collect();
    let lattice = Lattice::from_basis(cell.lattice.basis).map_err(|e| not_found(tolerance, &e))?;
    Ok((lattice, cell.positions.iter().map(|p| Fractional(*p).reduced()).collect(), source))
}

/// The space group of a structure, its standard cell and asymmetric unit. Sites are alike when they hold the same
/// species in the same shares. A cell that already stands in the standard setting is left in it, so that a structure
/// written and read again is not turned over into another, equivalent description.
///
/// # Errors
/// As [`operations`].
pub fn symmetrise(structure: &Structure, tolerance: f64) -> Result<Symmetrised, SymmetryError> {
    let (kinds, occupants) = kinds_of(structure);
    let positions = structure.positions();
    let dataset = dataset(&structure.lattice, &positions, &kinds, tolerance)?;
    let group = SpaceGroup::from_hall_number(dataset.hall_number)
        .ok_or_else(|| not_found(tolerance, &format!("unknown setting {}", dataset.hall_number)))?;
    let found: Vec<Operation> = dataset.operations.iter().map(Operation::from).collect();
    let keep = setting::is_standard(&structure.lattice, &found, &group.operations, tolerance);
    let lattice = if keep {
        structure.lattice.clone()
    } else {
        Lattice::from_basis(dataset.std_cell.lattice.basis).map_err(|e| not_found(tolerance, &e))?
    };
    let standard: Vec<_> = dataset.std_cell.positions.iter().map(|p| Fractional(*p)).collect();
    let to_standard =
        dataset.std_linear.try_inverse().ok_or_else(|| not_found(tolerance, &"singular transformation"))?;

    let mut orbits = Vec::new();
    let near = NeighbourList::new(&lattice, &standard, REFINEMENT);
    for input_site in (0..positions.len()).filter(|&i| dataset.orbits[i] == i) {
        let rough = Fractional(to_standard * (positions[input_site].0 - dataset.std_origin_shift));
        let refined = || {
            let all = near.around(&rough, REFINEMENT);
            let alike = all.iter().filter(|n| dataset.std_cell.numbers[n.index] == kinds[input_site]);
            let nearest = alike.min_by(|p, q| p.distance.total_cmp(&q.distance));
            nearest.map(|n| standard[n.index]).ok_or_else(|| not_found(tolerance, &"a site was lost on standardising"))
        };
        let start = if keep { positions[input_site] } else { refined()? };
        let exact = on_symmetry_element(&lattice, &group.operations, &start);
        let images = orbit(&lattice, &group.operations, &exact, MIN_SEPARATION);
        let position = images.iter().copied().min_by(preferred).unwrap_or(exact);
        let mut wyckoff = (dataset.wyckoffs[input_site], dataset.site_symmetry_symbols[input_site].clone());
        if keep && let Some(here) = setting::wyckoff_position(group.hall_number, &images) {
            wyckoff = (here.letter, here.site_symmetry.to_owned());
        }
        orbits.push(OrbitSite {
            site: Site { position, occupants: occupants[kinds[input_site] as usize].clone() },
            multiplicity: images.len(),
            wyckoff: wyckoff.0,
            site_symmetry: wyckoff.1,
            input_site,
        });
    }
    let expanded: usize = orbits.iter().map(|o| o.multiplicity).sum();
    if expanded != standard.len() {
        let reason = format!("the orbits hold {expanded} sites, the standard cell {}", standard.len());
        return Err(not_found(tolerance, &reason));
    }
    Ok(Symmetrised { group, lattice, orbits, pearson: dataset.pearson_symbol, tolerance: dataset.symprec })
}

/// All distinct images of `position` in the cell, each reduced to [0, 1), in order of the operations that make them.
/// Images within `tolerance` (Å) of each other are one.
pub fn orbit(lattice: &Lattice, operations: &[Operation], position: &Fractional, tolerance: f64) -> Vec<Fractional> {
    let mut images: Vec<Fractional> = Vec::new();
    for operation in operations {
        let image = wrapped(&operation.apply(position));
        if images.iter().all(|seen| lattice.distance(seen, &image) > tolerance) {
            images.push(image);
        }
    }
    images
}

/// Projects a position onto the symmetry element that it lies near: the mean of its images under the operations that
/// carry it to within [`MIN_SEPARATION`] of itself (its stabiliser).
pub fn on_symmetry_element(lattice: &Lattice, operations: &[Operation], position: &Fractional) -> Fractional {
    let mut sum = Vector3::zeros();
    let mut count = 0.0;
    for operation in operations {
        let image = operation.apply(position);
        let shift = (image.0 - position.0).map(f64::round);
        let near = Fractional(image.0 - shift);
        if (lattice.basis() * (near.0 - position.0)).norm() < MIN_SEPARATION {
            sum += near.0;
            count += 1.0;
        }
    }
    if count > 0.0 { wrapped(&Fractional(sum / count)) } else { *position }
}

/// Reduces to [0, 1), a coordinate within 1e-9 below 1 becoming 0.
fn wrapped(position: &Fractional) -> Fractional {
    Fractional(position.reduced().0.map(|x| if !(1e-9..=1.0 - 1e-9).contains(&x) { 0.0 } else { x }))
}

/// Order in which images compete to represent their orbit: smallest sum, then smallest x, y, z, compared on a grid of
/// 1e-6 so that rounding cannot change the choice.
fn preferred(p: &Fractional, q: &Fractional) -> std::cmp::Ordering {
    let key = |f: &Fractional| {
        let grid = f.0.map(|x| (x * 1e6).round() as i64);
        (grid.sum(), [grid.x, grid.y, grid.z])
    };
    key(p).cmp(&key(q))
}

/// A number for each distinct set of occupants, and the sets.
fn kinds_of(structure: &Structure) -> (Vec<i32>, Vec<Arc<[Occupant]>>) {
    let key = |site: &Site| {
        let mut key: Vec<_> = site.occupants.iter().map(|o| (o.species, o.occupancy)).collect();
        key.sort_unstable();
        key
    };
    let mut numbers = BTreeMap::new();
    for site in &structure.sites {
        numbers.entry(key(site)).or_insert(0);
    }
    for (number, value) in numbers.values_mut().enumerate() {
        *value = number as i32;
    }
    let occupants = numbers
        .keys()
        .map(|key| key.iter().map(|&(species, occupancy)| Occupant { species, occupancy }).collect())
        .collect();
    (structure.sites.iter().map(|site| numbers[&key(site)]).collect(), occupants)
}

fn dataset(
    lattice: &Lattice,
    positions: &[Fractional],
    kinds: &[i32],
    tolerance: f64,
) -> Result<MoyoDataset, SymmetryError> {
    if positions.is_empty() {
        return Err(SymmetryError::Empty);
    }
    let list = super::neighbours::NeighbourList::new(lattice, positions, MIN_SEPARATION);
    for (first, position) in positions.iter().enumerate() {
        if let Some(n) = list.around(position, MIN_SEPARATION).into_iter().find(|n| n.index != first) {
            return Err(SymmetryError::Coincide { first: first + 1, second: n.index + 1, distance: n.distance });
        }
    }
    let cell = Cell::new(
        moyo::base::Lattice { basis: *lattice.basis() },
        positions.iter().map(|p| p.0).collect(),
        kinds.to_vec(),
    );
    MoyoDataset::new(&cell, tolerance, AngleTolerance::Default, Setting::Standard, true)
        .map_err(|e| not_found(tolerance, &e))
}

fn not_found(tolerance: f64, reason: &dyn fmt::Display) -> SymmetryError {
    SymmetryError::NotFound { tolerance, reason: reason.to_string() }
}

#[cfg(test)]
mod tests {
    use super::super::Parameters;
    use super::*;
    use crate::ion::{Element, Ion};

    fn ion(symbol: &str, charge: i8) -> crate::ion::Species {
        Ion::new(Element::from_symbol(symbol).unwrap(), charge).into()
    }

    fn cubic(a: f64) -> Lattice {
        Lattice::from_parameters(&Parameters { a, b: a, c: a, alpha: 90.0, beta: 90.0, gamma: 90.0 }).unwrap()
    }

    /// International Tables A, group 225: rock salt in 4a and 4b, 192 operations.
    #[test]
    fn rock_salt_is_found() {
        let f = [[0.0, 0.0, 0.0], [0.0, 0.5, 0.5], [0.5, 0.0, 0.5], [0.5, 0.5, 0.0]];
        let mut sites = Vec::new();
        for p in f {
            sites.push(Site::full(Fractional::new(p[0], p[1], p[2]), ion("Mg", 2)));
            sites.push(Site::full(Fractional::new(p[0] + 0.5, p[1], p[2]), ion("O", -2)));
        }
        let s = symmetrise(&Structure { lattice: cubic(4.212), sites }, TOLERANCE).unwrap();
        assert_eq!((s.group.number, s.group.hermann_mauguin.as_str()), (225, "F m -3 m"));
        assert_eq!(s.group.hall, "-F 4 2 3");
        assert_eq!(s.group.operations.len(), 192);
        assert_eq!(s.group.operations[0].to_string(), "x,y,z");
        assert_eq!(s.orbits.iter().map(|o| (o.multiplicity, o.wyckoff)).collect::<Vec<_>>().len(), 2);
        assert!(s.orbits.iter().all(|o| o.multiplicity == 4));
        assert_eq!(s.pearson, "cF8");
    }

    #[test]
    fn coinciding_sites_are_named() {
        let sites = vec![
            Site::full(Fractional::new(0.0, 0.0, 0.0), ion("Mg", 2)),
            Site::full(Fractional::new(0.999999, 0.0, 0.0), ion("O", -2)),
        ];
        let error = symmetrise(&Structure { lattice: cubic(4.0), sites }, TOLERANCE).unwrap_err();
        assert!(matches!(error, SymmetryError::Coincide { first: 1, second: 2, .. }), "{error}");
    }

    #[test]
    fn all_settings_have_operations() {
        for hall_number in 1..=530 {
            let group = SpaceGroup::from_hall_number(hall_number).unwrap();
            assert_eq!(group.operations[0], Operation::identity(), "{hall_number}");
            assert!(!group.hermann_mauguin.contains('_'));
        }
    }
}
