//! Cations that belong to the packing: the large A of layers AX₃ and of other hosts with spheres for cations.
//!
//! The user's word comes first. Otherwise those cations take a role whose radius, among as many anions as the role has
//! around it, is near that of the anions, largest first, as long as they find room wholly: Sr of SrTiO₃, but no ion of
//! ReO₃, whose A stay vacant.

use super::request::MemberRequest;
use super::{SeatRequest, SeatingError, SphereCount};
use crate::crystal::neighbours::NeighbourList;
use crate::ion::amount::to_f64;
use crate::ion::composition::Composition;
use crate::ion::radius::{Radius, RadiusSet, radius};
use crate::ion::{Amount, Ion};
use crate::packing::{Host, Sign};
use num_traits::Zero;

/// Least radius of a member of a close packing over that of the anions. Perovskites and their relatives are made with
/// A down to about that of the small lanthanides; this project's own choice.
const LEAST_RATIO: f64 = 0.9;

/// Anions around a member lie within this multiple of the nearest one's distance.
const SHELL: f64 = 1.1;

/// Longest distance at which they are looked for, in radii of the packing sphere.
const REACH: f64 = 4.0;

/// A cation in the packing.
#[derive(Clone, Debug)]
pub struct Member {
    /// The ion.
    pub ion: Ion,
    /// Index of its role in the host.
    pub role: usize,
    /// Ions per formula unit.
    pub amount: Amount,
    /// Its radius among its anions.
    pub radius: Radius,
    /// Anions around it.
    pub coordination: usize,
    /// Distance to them, in radii of the packing sphere.
    pub distance: f64,
}

/// A role for cations.
struct Place {
    role: usize,
    /// Places per formula unit.
    room: Amount,
    coordination: usize,
    distance: f64,
}

/// The cations that belong to the packing, and doubts.
///
/// # Errors
/// [`SeatingError`] when the host has no spheres for anions, or a request finds no room.
pub fn members(
    composition: &Composition,
    host: &Host,
    spheres: &SphereCount,
    requests: &[MemberRequest],
    seats: &[SeatRequest],
    set: RadiusSet,
) -> Result<(Vec<Member>, Vec<String>), SeatingError> {
    let places = places(host, spheres)?;
    let (mut members, mut notes) = (Vec::new(), Vec::new());
    for place in &places {
        let of_role: Vec<&MemberRequest> = requests.iter().filter(|r| r.role == place.role).collect();
        let taken = if of_role.is_empty() {
            let free =
                |ion: &Ion| seats.iter().all(|r| r.ion != *ion) && members.iter().all(|m: &Member| m.ion != *ion);
            largest(composition, place, free, set)
        } else {
            of_role.iter().map(|r| (r.ion, r.amount.unwrap_or_else(|| rest(composition, r, requests, seats)))).collect()
        };
        let name = &host.roles[place.role].name;
        let total: Amount = taken.iter().map(|(_, amount)| *amount).sum();
        if total > place.room {
            return Err(SeatingError::NoSphere {
                composition: composition.to_string(),
                needed: total,
                sphere: name.clone(),
                host: host.name.clone(),
                available: place.room,
                element: taken[0].0.element,
            });
        }
        if total < place.room {
            let vacant = place.room - total;
            notes
                .push(format!("of {} {name} spheres of the packing per formula unit {vacant} stay vacant", place.room));
        }
        for (ion, amount) in taken {
            let radius = radius(&ion, place.coordination as u8, set)?;
            let (coordination, distance) = (place.coordination, place.distance);
            members.push(Member { ion, role: place.role, amount, radius, coordination, distance });
        }
    }
    Ok((members, notes))
}

/// What other requests leave of an ion.
fn rest(composition: &Composition, of: &MemberRequest, requests: &[MemberRequest], seats: &[SeatRequest]) -> Amount {
    let members = requests.iter().filter(|r| r.ion == of.ion).filter_map(|r| r.amount);
    let seated = seats.iter().filter(|r| r.ion == of.ion).filter_map(|r| r.amount);
    let rest = composition.amount_of(&of.ion) - members.chain(seated).sum::<Amount>();
    rest.max(Amount::zero())
}

fn places(host: &Host, spheres: &SphereCount) -> Result<Vec<Place>, SeatingError> {
    let number = |wanted: &dyn Fn(usize) -> bool| host.role.iter().filter(|r| wanted(**r)).count();
    let is_anion = |r: usize| host.roles[r].ion == Sign::Anion;
    let anions = number(&is_anion);
    if anions == 0 {
        return Err(SeatingError::CationHost { host: host.name.clone() });
    }
    let list = NeighbourList::new(&host.lattice, &host.spheres, REACH);
    let cation_roles = (0..host.roles.len()).filter(|r| !is_anion(*r));
    Ok(cation_roles
        .filter_map(|role| {
            let first = host.role.iter().position(|r| *r == role)?;
            let near: Vec<f64> =
                list.of(first, REACH).iter().filter(|n| is_anion(host.role[n.index])).map(|n| n.distance).collect();
            let least = near.iter().copied().fold(f64::INFINITY, f64::min);
            let shell: Vec<f64> = near.into_iter().filter(|d| *d <= SHELL * least).collect();
            let room = spheres.spheres * Amount::new(number(&|r| r == role) as i128, anions as i128);
            let distance = shell.iter().sum::<f64>() / shell.len() as f64;
            (!shell.is_empty()).then_some(Place { role, room, coordination: shell.len(), distance })
        })
        .collect())
}

/// Cations large enough for a place, largest first, that find room wholly.
fn largest(
    composition: &Composition,
    place: &Place,
    free: impl Fn(&Ion) -> bool,
    set: RadiusSet,
) -> Vec<(Ion, Amount)> {
    let mean = |coordination: u8| {
        let (mut r, mut n) = (0.0, 0.0);
        for (ion, amount) in composition.anions() {
            let share = to_f64(amount);
            r += share * radius(ion, coordination, set).map_or(f64::NAN, |r| r.angstrom);
            n += share;
        }
        r / n
    };
    let anion = mean(6);
    let mut fitting: Vec<(f64, Ion, Amount)> = composition
        .cations()
        .filter(|(ion, _)| free(ion))
        .filter_map(|(ion, amount)| {
            let r = radius(ion, place.coordination as u8, set).ok()?.angstrom;
            (r >= LEAST_RATIO * anion).then_some((r, *ion, *amount))
        })
        .collect();
    fitting.sort_by(|a, b| b.0.total_cmp(&a.0));
    let mut room = place.room;
    fitting.retain(|(_, _, amount)| {
        let fits = *amount <= room;
        room -= if fits { *amount } else { Amount::zero() };
        fits
    });
    fitting.into_iter().map(|(_, ion, amount)| (ion, amount)).collect()
}
