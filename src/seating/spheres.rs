//! How many packing spheres a formula unit stands for, and how many of them are vacant.

use crate::ion::Amount;
use crate::ion::composition::Composition;
use num_traits::Zero;

/// Packing spheres of one formula unit.
#[derive(Clone, Debug, PartialEq)]
pub struct SphereCount {
    /// Spheres, occupied or not.
    pub spheres: Amount,
    /// Of these, vacant.
    pub vacant: Amount,
    /// Why vacancies are assumed that the formula does not name.
    pub assumption: Option<String>,
}

/// The anions pack. Vacancies named in the formula (`□0.05`) belong to the packing. If none is named, the amount of
/// anions is no whole number and the cations' is, the packing is taken to have the next whole number of spheres, as in
/// doped crystals written per cation: Ce0.9Gd0.1O1.95 stands for two spheres of which 0.05 are vacant.
pub fn sphere_count(composition: &Composition) -> SphereCount {
    let sum = |ions: &mut dyn Iterator<Item = Amount>| ions.fold(Amount::zero(), |a, b| a + b);
    let anions = sum(&mut composition.anions().map(|(_, amount)| *amount));
    let cations = sum(&mut composition.cations().map(|(_, amount)| *amount));
    if !composition.vacancies.is_zero() || anions.is_integer() || !cations.is_integer() {
        return SphereCount {
            spheres: anions + composition.vacancies,
            vacant: composition.vacancies,
            assumption: None,
        };
    }
    let (spheres, vacant) = (anions.ceil(), anions.ceil() - anions);
    let assumption = format!(
        "{anions} anions per {cations} cations are read as {spheres} packing spheres with {vacant} vacant; name the \
         vacancies (`□`) in the formula to say otherwise"
    );
    SphereCount { spheres, vacant, assumption: Some(assumption) }
}
