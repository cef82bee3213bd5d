//! The first coordination shell of every site: which ions of opposite sign surround it.

use crate::crystal::neighbours::{Neighbour, NeighbourList};
use crate::crystal::{Fractional, Site, Structure};
use crate::ion::amount::to_f64;

/// An ion of opposite sign belongs to the first shell when its distance is at most this multiple of the nearest's.
/// 1.25 keeps a Jahn–Teller octahedron (1.9 and 2.4 Å) nearly whole and stops well before the second shell of the ideal
/// packings (at 1.67 for a tetrahedron); this project's own choice, no source.
pub const SHELL_FACTOR: f64 = 1.25;

/// Radius up to which contacts are looked for, Å; more than the longest first-shell distance of any pair of ions.
pub const REACH: f64 = 4.5;

/// Sign of the mean charge of a site: +1 cation, −1 anion, 0 neutral or unknown.
pub(super) fn sign(site: &Site) -> i8 {
    let charge: Option<f64> =
        site.occupants.iter().map(|o| Some(f64::from(o.species.charge?) * to_f64(&o.occupancy))).sum();
    match charge {
        Some(q) if q > 0.0 => 1,
        Some(q) if q < 0.0 => -1,
        _ => 0,
    }
}

/// Share of a site that is occupied.
pub(super) fn filled(site: &Site) -> f64 {
    site.occupants.iter().map(|o| to_f64(&o.occupancy)).sum()
}

/// Contacts and first shells of all sites of a structure.
pub struct Shells<'a> {
    list: NeighbourList<'a>,
    /// Distance of the nearest site to each within [`REACH`], Å.
    pub nearest: Vec<Option<f64>>,
    /// +1 cation, −1 anion, 0 neutral or unknown, by site.
    pub signs: Vec<i8>,
    /// For each site the number of neighbours in its first shell.
    pub coordination: Vec<usize>,
}

impl<'a> Shells<'a> {
    /// Linear in the number of sites. `positions` are those of the structure.
    pub fn new(structure: &'a Structure, positions: &'a [Fractional]) -> Self {
        let list = NeighbourList::new(&structure.lattice, positions, REACH);
        let signs: Vec<i8> = structure.sites.iter().map(sign).collect();
        let shells = signs.iter().enumerate().map(|(idx, sign)| {
            // Not kept: a large cell has tens of contacts a site.
            let near = list.of(idx, REACH);
            let opposite = || near.iter().filter(|n| signs[n.index] * sign < 0);
            let first = opposite().next().map_or(0.0, |n| n.distance);
            let coordination = opposite().take_while(|n| n.distance <= first * SHELL_FACTOR).count();
            (near.first().map(|n| n.distance), coordination)
        });
        let (nearest, coordination) = shells.unzip();
        Self { list, nearest, signs, coordination }
    }

    /// Neighbours of a site within a radius of at most [`REACH`] (Å), nearest first.
    pub fn contacts(&self, idx: usize, radius: f64) -> Vec<Neighbour> {
        self.list.of(idx, radius.min(REACH))
    }
}
