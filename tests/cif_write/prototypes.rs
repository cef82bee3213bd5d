//! The structure types of `../data/prototypes`, as structures.

use interstice::crystal::symmetry::{SpaceGroup, orbit};
use interstice::crystal::{Fractional, Lattice, Occupant, Parameters, Site, Structure};
use interstice::ion::amount;
use interstice::ion::{Amount, Element, Ion};
use serde_json::Value;
use std::sync::Arc;

/// One of them.
pub struct Prototype(Value);

impl Prototype {
    /// All, in order of their file names.
    pub fn all() -> Vec<Self> {
        let mut paths: Vec<_> = std::fs::read_dir("tests/data/prototypes")
            .unwrap()
            .map(|entry| entry.unwrap().path())
            .filter(|path| path.extension().is_some_and(|e| e == "json"))
            .collect();
        paths.sort();
        assert_eq!(paths.len(), 33);
        paths.iter().map(|path| Self(serde_json::from_slice(&std::fs::read(path).unwrap()).unwrap())).collect()
    }

    /// The one of this name.
    pub fn named(id: &str) -> Self {
        Self::all().into_iter().find(|p| p.id() == id).unwrap()
    }

    pub fn id(&self) -> &str {
        self.0["id"].as_str().unwrap()
    }

    pub fn number(&self) -> i64 {
        self.0["space_group"]["it_number"].as_i64().unwrap()
    }

    pub fn z(&self) -> i64 {
        self.0["formula_units"].as_i64().unwrap()
    }

    /// Å³.
    pub fn volume(&self) -> f64 {
        self.0["volume_A3"].as_f64().unwrap()
    }

    fn sites(&self) -> &[Value] {
        self.0["sites"].as_array().unwrap()
    }

    pub fn hall(&self) -> &str {
        self.0["space_group"]["hall_symbol"].as_str().unwrap()
    }

    /// Multiplicity and Wyckoff letter of each site.
    pub fn places(&self) -> Vec<(String, String)> {
        let place = |s: &Value| {
            let wyckoff = s["wyckoff"].as_str().unwrap();
            let (multiplicity, letter) = wyckoff.split_at(wyckoff.len() - 1);
            (multiplicity.to_owned(), letter.to_owned())
        };
        self.sites().iter().map(place).collect()
    }

    /// Positions of every atom as spglib and gemmi expanded them, 6 decimals.
    #[allow(dead_code, reason = "not every test that shares this module needs it")]
    pub fn expanded(&self) -> Vec<Fractional> {
        let atoms = self.0["expanded"].as_array().unwrap();
        atoms
            .iter()
            .map(|a| {
                Fractional::new(
                    a["xyz"][0].as_f64().unwrap(),
                    a["xyz"][1].as_f64().unwrap(),
                    a["xyz"][2].as_f64().unwrap(),
                )
            })
            .collect()
    }

    /// Every atom of the cell, in the stated setting.
    pub fn structure(&self) -> Structure {
        let number = |v: &Value| v.as_f64().unwrap();
        let cell = &self.0["cell"];
        let [a, b, c, alpha, beta, gamma] = ["a", "b", "c", "alpha", "beta", "gamma"].map(|key| number(&cell[key]));
        let lattice = Lattice::from_parameters(&Parameters { a, b, c, alpha, beta, gamma }).unwrap();
        let hall = self.0["space_group"]["spglib_hall_number"].as_i64().unwrap();
        let group = SpaceGroup::from_hall_number(hall as i32).unwrap();
        let mut sites = Vec::new();
        for site in self.sites() {
            let occupants: Arc<[Occupant]> = site["species"].as_array().unwrap().iter().map(occupant).collect();
            let position = Fractional::new(number(&site["x"]), number(&site["y"]), number(&site["z"]));
            let images = orbit(&lattice, &group.operations, &position, 1e-2);
            assert_eq!(images.len() as i64, site["multiplicity"].as_i64().unwrap(), "{}", self.id());
            sites.extend(images.into_iter().map(|position| Site { position, occupants: occupants.clone() }));
        }
        assert_eq!(sites.len(), self.0["expanded"].as_array().unwrap().len());
        Structure { lattice, sites }
    }
}

fn occupant(species: &Value) -> Occupant {
    let element = Element::from_symbol(species["element"].as_str().unwrap()).unwrap();
    let charge = species["oxidation_state"].as_i64().unwrap() as i8;
    let occupancy: Amount = amount::parse(&species["occupancy"].to_string()).unwrap();
    Occupant { species: Ion::new(element, charge).into(), occupancy }
}
