//! The evidence for one ion in one kind of interstice.
//!
//! Each term is a rule of the trade that is right only part of the time (the radius ratio alone for about two of three
//! environments in oxides: J. George et al., Angew. Chem. Int. Ed. 59, 7569 (2020), doi:10.1002/anie.202000829), so
//! all are shown. Their weights are this project's own choice, set by hand on textbook spinels, rock salts and zinc
//! blendes and not fitted; a penalty ranks, it is no probability.

use super::offer::Offer;
use crate::ion::coordination::mean_observed;
use crate::ion::radius::{Radius, RadiusError, RadiusSet, radius};
use crate::ion::{Element, Ion};

/// How a radius ratio lies to the range that a kind of interstice suits.
#[derive(Clone, Copy, Debug, PartialEq, Eq, serde::Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum Fit {
    /// Below the critical ratio of this interstice: the ion would rattle.
    TooSmall,
    /// Between this critical ratio and that of the next larger kind.
    Fits,
    /// Above that of the next larger kind: the ion asks for more neighbours.
    TooLarge,
}

/// What speaks for and against one ion in one kind of interstice.
#[derive(Clone, Debug)]
pub struct Evidence {
    /// The ion's radius at this coordination, Å.
    pub radius: Radius,
    /// Radius over the mean radius of the packed anions, dimensionless.
    pub ratio: f64,
    /// Where the ratio lies.
    pub fit: Fit,
    /// Natural logarithm of how far the ratio lies outside the range; 0 inside.
    pub misfit: f64,
    /// Pauling bond strength: charge over coordination number, v.u.
    pub bond_strength: f64,
    /// Coordination number expected from the mean observed with oxygen, scaled for the anion at hand.
    pub expected: Option<f64>,
    /// Ligand-field energy that the ion loses in a tetrahedron against an octahedron, kJ/mol.
    pub site_preference: Option<f64>,
    /// Weighted sum of the terms; less is better.
    pub penalty: f64,
}

/// Weight of one unit of [`Evidence::misfit`].
const MISFIT_WEIGHT: f64 = 1.0;
/// Weight of one neighbour between coordination and expected coordination.
const EXPECTED_WEIGHT: f64 = 1.0;
/// Weight of one kJ/mol of ligand-field energy lost.
const PREFERENCE_WEIGHT: f64 = 1.0 / 40.0;

/// Octahedral site preference energies of high-spin ions (Co³⁺ low spin), kJ/mol, from memory of J. D. Dunitz &
/// L. E. Orgel, J. Phys. Chem. Solids 3, 318 (1957) and D. S. McClure, J. Phys. Chem. Solids 3, 311 (1957); d⁰, d⁵ and
/// d¹⁰ ions have none by crystal field theory.
const SITE_PREFERENCE: [(&str, i8, f64); 9] = [
    ("Ti", 3, 28.8),
    ("V", 3, 53.5),
    ("Cr", 3, 157.8),
    ("Mn", 3, 95.4),
    ("Fe", 2, 16.7),
    ("Co", 2, 31.0),
    ("Ni", 2, 86.2),
    ("Cu", 2, 63.6),
    ("Co", 3, 79.5),
];

/// The packed anions as one mean sphere.
#[derive(Clone, Copy, Debug)]
pub(super) struct MeanAnion {
    /// Mean radius at coordination 6, Å.
    pub radius: f64,
    /// Mean charge, e, positive.
    pub charge: f64,
}

/// Weighs an ion in an interstice.
///
/// # Errors
/// [`RadiusError`] when the ion's radius is in no table.
pub(super) fn weigh(ion: &Ion, offer: &Offer, anion: MeanAnion, set: RadiusSet) -> Result<Evidence, RadiusError> {
    let coordination = offer.coordination as f64;
    let radius = radius(ion, offer.coordination as u8, set)?;
    let ratio = radius.angstrom / anion.radius;
    let (fit, misfit) = if ratio < offer.ratio {
        (Fit::TooSmall, (offer.ratio / ratio.max(f64::MIN_POSITIVE)).ln())
    } else if ratio > offer.next_ratio {
        (Fit::TooLarge, (ratio / offer.next_ratio).ln())
    } else {
        (Fit::Fits, 0.0)
    };
    let expected = mean_observed(ion).map(|mean| mean * anion_scale(anion, set));
    let site_preference = SITE_PREFERENCE
        .iter()
        .find(|(symbol, charge, _)| Some(ion.element) == Element::from_symbol(symbol) && ion.charge == *charge)
        .map(|t| t.2);
    let lost = if offer.coordination == 4 { site_preference.unwrap_or(0.0) } else { 0.0 };
    Ok(Evidence {
        radius,
        ratio,
        fit,
        // A ratio of nearly nothing must not outweigh everything else without bound.
        misfit: misfit.min(MAX_MISFIT),
        bond_strength: f64::from(ion.charge) / coordination,
        expected,
        site_preference,
        penalty: MISFIT_WEIGHT * misfit.min(MAX_MISFIT)
            + EXPECTED_WEIGHT * expected.map_or(0.0, |e| (coordination - e).abs())
            + PREFERENCE_WEIGHT * lost,
    })
}

/// Largest misfit counted: a factor of e² outside the range.
const MAX_MISFIT: f64 = 2.0;

/// Mean coordination numbers are known with oxygen. Heavier chalcogenides show smaller ones (zinc blende against zinc's
/// oxides); scaled by the square root of the radii, a rule of thumb of this project, not fitted. Halides keep theirs.
fn anion_scale(anion: MeanAnion, set: RadiusSet) -> f64 {
    let oxide = Element::from_symbol("O").and_then(|o| radius(&Ion::new(o, -2), 6, set).ok());
    match oxide {
        Some(oxide) if anion.charge > 1.5 => (oxide.angstrom / anion.radius).min(1.0).sqrt(),
        _ => 1.0,
    }
}
