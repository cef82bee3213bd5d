//! How large the cell is: the length of the packing sphere's radius, from contacts of ionic radii.
//!
//! Every contact of a cation with the spheres of its interstice asks for one scale,
//! s = (r₊ + r₋)/d, where d is the distance from the interstice's centre to its spheres in radii of the packing sphere.
//! With one kind of seat this is contact of hard spheres. With several, an ideal packing cannot satisfy all; the scale
//! is their mean over the contacts (a real crystal lets each polyhedron have its own size by shifting the anions), and
//! the tightest is reported beside it. Anions touch at s = r₋, which is a lower bound.
//!
//! Radii: R. D. Shannon, Acta Cryst. A32, 751 (1976), doi:10.1107/S0567739476001551; the anion's is that for the number
//! of cations around it.

use crate::ion::Ion;
use crate::ion::amount::to_f64;
use crate::ion::composition::Composition;
use crate::ion::radius::{Radius, RadiusError, RadiusSet, radius};
use crate::seating::{Plan, Seating};
use serde::{Deserialize, Serialize};

/// Which contacts set the size.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Sizing {
    /// The mean over all cation-anion contacts.
    #[default]
    Mean,
    /// The pair that is squeezed most.
    Tightest,
}

/// One pair in contact.
#[derive(Clone, Debug)]
pub struct Contact {
    /// The cation.
    pub cation: Ion,
    /// Its radius at its coordination, Å.
    pub radius: Radius,
    /// Index of the kind of interstice in [`Seating::offers`]; `None` for a cation of the packing.
    pub offer: Option<usize>,
    /// Sum of the radii, Å: the distance wished.
    pub distance: f64,
    /// Packing-sphere radius at which this pair is in contact, Å.
    pub scale: f64,
    /// Contacts of this kind per formula unit.
    pub count: f64,
}

/// The size of the packing and what it rests on.
#[derive(Clone, Debug)]
pub struct Size {
    /// Length of the packing sphere's radius, Å; lattice vectors of a host of unit spheres are multiplied by it.
    pub scale: f64,
    /// Mean anion radius at its coordination, Å.
    pub anion_radius: f64,
    /// Coordination number at which the anion's radius was taken.
    pub anion_coordination: usize,
    /// Contacts, tightest (largest scale) first.
    pub contacts: Vec<Contact>,
    /// Whether touching anions, not cations, set the scale.
    pub anions_touch: bool,
}

/// The size for a plan.
///
/// # Errors
/// [`RadiusError`] when a radius is in no table.
pub fn fit(
    composition: &Composition,
    seating: &Seating,
    plan: &Plan,
    set: RadiusSet,
    sizing: Sizing,
) -> Result<Size, RadiusError> {
    let anions: f64 = composition.anions().map(|(_, amount)| to_f64(amount)).sum();
    let seated = plan.seats.iter().map(|s| to_f64(&s.amount) * seating.offers[s.offer].coordination as f64);
    let packed = seating.members.iter().map(|m| to_f64(&m.amount) * m.coordination as f64);
    let bonds: f64 = seated.chain(packed).sum();
    let anion_coordination = (bonds / anions).round().max(1.0) as usize;
    let mut anion_radius = 0.0;
    for (ion, amount) in composition.anions() {
        anion_radius += radius(ion, anion_coordination as u8, set)?.angstrom * to_f64(amount) / anions;
    }
    let mut contacts: Vec<Contact> = plan
        .seats
        .iter()
        .map(|seat| {
            let offer = &seating.offers[seat.offer];
            let distance = seat.evidence.radius.angstrom + anion_radius;
            Contact {
                cation: seat.ion,
                radius: seat.evidence.radius,
                offer: Some(seat.offer),
                distance,
                scale: distance / offer.distance,
                count: to_f64(&seat.amount) * offer.coordination as f64,
            }
        })
        .collect();
    contacts.extend(seating.members.iter().map(|member| {
        let distance = member.radius.angstrom + anion_radius;
        Contact {
            cation: member.ion,
            radius: member.radius,
            offer: None,
            distance,
            scale: distance / member.distance,
            count: to_f64(&member.amount) * member.coordination as f64,
        }
    }));
    contacts.sort_by(|a, b| b.scale.total_cmp(&a.scale));
    // Ions that share a kind of interstice count as one of mean radius, so the tightest is taken over kinds.
    let kinds = (0..seating.offers.len()).map(Some).chain([None]);
    let by_kind = kinds.filter_map(|offer| {
        let of_kind = || contacts.iter().filter(move |c| c.offer == offer);
        let count: f64 = of_kind().map(|c| c.count).sum();
        (count > 0.0).then(|| of_kind().map(|c| c.scale * c.count).sum::<f64>() / count)
    });
    let wished = match sizing {
        Sizing::Tightest => by_kind.fold(0.0, f64::max),
        Sizing::Mean => contacts.iter().map(|c| c.scale * c.count).sum::<f64>() / bonds,
    };
    let anions_touch = wished < anion_radius;
    Ok(Size { scale: wished.max(anion_radius), anion_radius, anion_coordination, contacts, anions_touch })
}
