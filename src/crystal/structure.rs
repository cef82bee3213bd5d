//! A structure: a lattice with sites, each held by one or more occupants.

use super::{Fractional, Lattice};
use crate::ion::{Amount, Species};
use num_traits::Zero;
use std::collections::BTreeMap;
use std::sync::Arc;

/// A species and its share of a site.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Occupant {
    /// What sits there.
    pub species: Species,
    /// Its share of the site, above 0 and at most 1.
    pub occupancy: Amount,
}

/// One position of a P1 cell; shares that add up to less than 1 leave the rest vacant.
#[derive(Clone, Debug, PartialEq)]
pub struct Site {
    /// Position, each coordinate in [0, 1).
    pub position: Fractional,
    /// Who holds it. Sites with the same occupants may share them: a large cell has few different ones.
    pub occupants: Arc<[Occupant]>,
}

impl Site {
    /// A site wholly held by one species.
    pub fn full(position: Fractional, species: Species) -> Self {
        Self { position: position.reduced(), occupants: Arc::new([Occupant { species, occupancy: Amount::from(1) }]) }
    }
}

/// Every site of one cell, without symmetry (P1).
#[derive(Clone, Debug, PartialEq)]
pub struct Structure {
    /// The cell.
    pub lattice: Lattice,
    /// All sites of the cell.
    pub sites: Vec<Site>,
}

impl Structure {
    /// How much of each species the cell holds, in order of element and charge.
    pub fn amounts(&self) -> BTreeMap<Species, Amount> {
        let mut amounts = BTreeMap::new();
        for occupant in self.sites.iter().flat_map(|site| site.occupants.iter()) {
            *amounts.entry(occupant.species).or_insert_with(Amount::zero) += occupant.occupancy;
        }
        amounts
    }

    /// Net charge of the cell in e, if every species' charge is known.
    pub fn charge(&self) -> Option<Amount> {
        self.amounts().into_iter().map(|(species, amount)| Some(amount * i128::from(species.charge?))).sum()
    }

    /// Positions of all sites, in order.
    pub fn positions(&self) -> Vec<Fractional> {
        self.sites.iter().map(|site| site.position).collect()
    }
}
