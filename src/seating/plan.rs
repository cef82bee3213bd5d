//! Assignments of all cations to kinds of interstice, weighed and ranked.

use super::evidence::{Evidence, Fit, MeanAnion, weigh};
use super::offer::{Offer, ladder};
use super::rule2::{Group, least_deviation};
use super::spheres::SphereCount;
use super::{Member, SeatRequest, SeatingError};
use crate::ion::amount::to_f64;
use crate::ion::composition::Composition;
use crate::ion::radius::{RadiusSet, radius};
use crate::ion::{Amount, Element, Ion};
use crate::packing::Class;
use itertools::Itertools;
use num_traits::Zero;

/// An ion, or a part of its amount, in one kind of interstice.
#[derive(Clone, Debug)]
pub struct Seat {
    /// The ion.
    pub ion: Ion,
    /// Index of the kind in [`Seating::offers`].
    pub offer: usize,
    /// Ions per formula unit.
    pub amount: Amount,
    /// What speaks for and against.
    pub evidence: Evidence,
}

/// One assignment of every cation.
#[derive(Clone, Debug)]
pub struct Plan {
    /// Seats in order of ion, then of kind.
    pub seats: Vec<Seat>,
    /// Fraction of each offered kind that is filled, in order of [`Seating::offers`].
    pub fills: Vec<Amount>,
    /// Least root mean square deviation of the anions' bond-strength sums that these seats allow, v.u.
    pub rule2_deviation: Option<f64>,
    /// Weighted sum of all evidence per cation; less is better.
    pub penalty: f64,
}

/// The decision and what it rests on.
#[derive(Clone, Debug)]
pub struct Seating {
    /// Kinds of interstice of the host, smallest ratio first.
    pub offers: Vec<Offer>,
    /// Cations that belong to the packing.
    pub members: Vec<Member>,
    /// Spheres for anions per formula unit.
    pub spheres: SphereCount,
    /// Mean radius of the packed anions at coordination 6, Å, by which ratios are formed.
    pub anion_radius: f64,
    /// Assignments that the host can hold, best first.
    pub plans: Vec<Plan>,
    /// Ions that ask for a kind of interstice which this host lacks, and who has it.
    pub notes: Vec<String>,
}

/// Weight of 1 v.u. of rule 2 deviation against the other terms of the evidence.
const RULE2_WEIGHT: f64 = 10.0;

/// Most assignments weighed.
pub const MAX_PLANS: usize = 20_000;

/// Two plans are told as a near tie when their penalties differ by less than this.
pub const NEAR_TIE: f64 = 0.2;

/// Decides the seats of a composition in a host with these offers, so many spheres and these cations in the packing,
/// honouring `requests`.
///
/// # Errors
/// [`SeatingError`]: no cation or anion, too few interstices, an untabulated radius, too many assignments.
pub fn decide(
    composition: &Composition,
    host_name: &str,
    offers: Vec<Offer>,
    requests: &[SeatRequest],
    (spheres, members): (SphereCount, Vec<Member>),
    set: RadiusSet,
) -> Result<Seating, SeatingError> {
    for (missing, empty) in
        [("cation", composition.cations().next().is_none()), ("anion", composition.anions().next().is_none())]
    {
        if empty {
            return Err(SeatingError::OneSided { composition: composition.to_string(), missing });
        }
    }
    let anion = mean_anion(composition, set)?;
    let in_packing = |ion: &Ion| members.iter().filter(|m| m.ion == *ion).map(|m| m.amount).sum::<Amount>();
    let cations: Vec<(Ion, Amount)> = composition
        .cations()
        .map(|(ion, amount)| (*ion, amount - in_packing(ion)))
        .filter(|(_, amount)| *amount > Amount::zero())
        .collect();
    check_requests(requests, &offers, host_name)?;

    // The evidence of every ion in every kind; weighed once, used by all plans.
    let evidence: Vec<Vec<Evidence>> = cations
        .iter()
        .map(|(ion, _)| offers.iter().map(|offer| weigh(ion, offer, anion, set)).collect::<Result<_, _>>())
        .collect::<Result<_, _>>()?;
    let available: Vec<Amount> = offers.iter().map(|offer| offer.per_sphere * spheres.spheres).collect();

    let mut plans: Vec<Plan> = distributions(&cations, &offers, requests)?
        .into_iter()
        .filter_map(|amounts| {
            let taken = |o: usize| amounts.iter().map(|row| row[o]).sum::<Amount>();
            let fits = (0..offers.len()).all(|o| taken(o) <= available[o]);
            fits.then(|| weigh_plan(&cations, &offers, &evidence, &amounts, &available, spheres.spheres))
        })
        .collect();
    if plans.is_empty() {
        return Err(too_few(composition, host_name, &offers, &available, &cations, requests));
    }
    plans.sort_by(|a, b| a.penalty.total_cmp(&b.penalty));
    let notes = unmet_wishes(&cations, &offers, &evidence, anion, set);
    Ok(Seating { offers, members, spheres, anion_radius: anion.radius, plans, notes })
}

fn mean_anion(composition: &Composition, set: RadiusSet) -> Result<MeanAnion, SeatingError> {
    let (mut r, mut q, mut n) = (0.0, 0.0, 0.0);
    for (ion, amount) in composition.anions() {
        let share = to_f64(amount);
        r += share * radius(ion, 6, set)?.angstrom;
        q -= share * f64::from(ion.charge);
        n += share;
    }
    Ok(MeanAnion { radius: r / n, charge: q / n })
}

fn check_requests(requests: &[SeatRequest], offers: &[Offer], host: &str) -> Result<(), SeatingError> {
    match requests.iter().find(|r| offers.iter().all(|offer| offer.kind != r.kind)) {
        None => Ok(()),
        Some(request) => {
            let hosts = ladder()
                .iter()
                .filter(|rung| rung.kind == request.kind)
                .flat_map(|rung| &rung.hosts)
                .unique()
                .join(", ");
            Err(SeatingError::NoSuchKind {
                host: host.into(),
                kind: request.kind.to_string(),
                offered: offers.iter().map(|offer| offer.kind.to_string()).unique().join(", "),
                elsewhere: if hosts.is_empty() { String::new() } else { format!("hosts with that kind: {hosts}") },
            })
        }
    }
}

/// Amounts of each cation (row) in each kind (column) for every assignment to be weighed: each ion wholly in one kind,
/// and every exchange of one ion's place with an equal amount of another's (inverse spinel among them). Requests fix
/// what they name.
fn distributions(
    cations: &[(Ion, Amount)],
    offers: &[Offer],
    requests: &[SeatRequest],
) -> Result<Vec<Vec<Vec<Amount>>>, SeatingError> {
    let rows: Vec<Vec<Vec<Amount>>> =
        cations.iter().map(|(ion, amount)| rows_of(ion, *amount, offers, requests)).collect::<Result<_, _>>()?;
    let too_many = SeatingError::TooMany { ions: cations.len(), kinds: offers.len(), limit: MAX_PLANS };
    let count =
        rows.iter().try_fold(1_usize, |n, r| n.checked_mul(r.len())).filter(|n| *n <= MAX_PLANS).ok_or(too_many)?;
    let mut all: Vec<Vec<Vec<Amount>>> = Vec::with_capacity(count);
    for choice in rows.iter().map(|r| r.iter().cloned()).multi_cartesian_product() {
        for swapped in exchanges(&choice, cations, requests) {
            if !all.contains(&swapped) {
                all.push(swapped);
            }
        }
        if !all.contains(&choice) {
            all.push(choice);
        }
    }
    Ok(all)
}

/// The rows that one ion may have: all in one kind, or what the requests say with the rest in one kind.
fn rows_of(
    ion: &Ion,
    amount: Amount,
    offers: &[Offer],
    requests: &[SeatRequest],
) -> Result<Vec<Vec<Amount>>, SeatingError> {
    let mine: Vec<&SeatRequest> = requests.iter().filter(|r| r.ion == *ion).collect();
    let mut fixed = vec![Amount::zero(); offers.len()];
    let mut rest_in = None;
    for request in &mine {
        // Two sizes of one kind: the request means the first; a host with several is asked for by size elsewhere.
        let Some(o) = offers.iter().position(|offer| offer.kind == request.kind) else { continue };
        match request.amount {
            Some(part) => fixed[o] += part,
            None => rest_in = Some(o),
        }
    }
    let rest = amount - fixed.iter().sum::<Amount>();
    if rest < Amount::zero()
        || (rest > Amount::zero() && !mine.is_empty() && rest_in.is_none() && mine.iter().all(|r| r.amount.is_none()))
    {
        return Err(SeatingError::Request {
            text: mine.iter().map(|r| format!("{}:{}", r.ion, r.kind)).join(","),
            reason: format!("more {ion} is seated than the {amount} of the composition"),
        });
    }
    let with = |o: usize| {
        let mut row = fixed.clone();
        row[o] += rest;
        row
    };
    Ok(match rest_in {
        Some(o) => vec![with(o)],
        None if rest.is_zero() => vec![fixed],
        None => (0..offers.len()).filter(|o| offers[*o].class == Class::Vertex).map(with).collect(),
    })
}

/// For every two ions in different kinds, the assignment with the smaller amount exchanged.
fn exchanges(choice: &[Vec<Amount>], cations: &[(Ion, Amount)], requests: &[SeatRequest]) -> Vec<Vec<Vec<Amount>>> {
    let free = |i: usize| requests.iter().all(|r| r.ion != cations[i].0);
    let home = |i: usize| choice[i].iter().position(|a| *a == cations[i].1);
    let mut out = Vec::new();
    for [i, j] in (0..cations.len()).array_combinations() {
        let (Some(p), Some(q)) = (home(i), home(j)) else { continue };
        if p == q || !free(i) || !free(j) {
            continue;
        }
        let moved = cations[i].1.min(cations[j].1);
        let mut swapped = choice.to_vec();
        swapped[i][p] -= moved;
        swapped[i][q] += moved;
        swapped[j][q] -= moved;
        swapped[j][p] += moved;
        out.push(swapped);
    }
    out
}

fn weigh_plan(
    cations: &[(Ion, Amount)],
    offers: &[Offer],
    evidence: &[Vec<Evidence>],
    amounts: &[Vec<Amount>],
    available: &[Amount],
    spheres: Amount,
) -> Plan {
    let mut seats = Vec::new();
    let (mut penalty, mut total) = (0.0, 0.0);
    let mut bonds = Vec::new();
    for (i, (ion, _)) in cations.iter().enumerate() {
        for (o, offer) in offers.iter().enumerate() {
            let amount = amounts[i][o];
            if amount.is_zero() {
                continue;
            }
            let share = to_f64(&amount);
            penalty += share * evidence[i][o].penalty;
            total += share;
            bonds.push((
                ion.element,
                o,
                evidence[i][o].bond_strength,
                share * offer.coordination as f64 / to_f64(&spheres),
            ));
            seats.push(Seat { ion: *ion, offer: o, amount, evidence: evidence[i][o].clone() });
        }
    }
    let rule2_deviation = least_deviation(&groups(&bonds));
    let fills = (0..offers.len()).map(|o| amounts.iter().map(|row| row[o]).sum::<Amount>() / available[o]).collect();
    // All cations may belong to the packing.
    let mean = if total > 0.0 { penalty / total } else { 0.0 };
    Plan { seats, fills, rule2_deviation, penalty: mean + RULE2_WEIGHT * rule2_deviation.unwrap_or(0.0) }
}

/// Cations by bond strength as the anions meet them. Ions of one element in one kind of interstice count with their mean
/// strength: there the valence is shared between them (magnetite, LiMn2O4).
fn groups(bonds: &[(Element, usize, f64, f64)]) -> Vec<Group> {
    let mut groups: Vec<(Element, usize, Group)> = Vec::new();
    for &(element, offer, strength, mean) in bonds {
        match groups.iter_mut().find(|g| g.0 == element && g.1 == offer) {
            Some((_, _, group)) => {
                group.strength = (group.strength * group.mean + strength * mean) / (group.mean + mean);
                group.mean += mean;
            }
            None => groups.push((element, offer, Group { strength, mean })),
        }
    }
    groups.into_iter().map(|g| g.2).collect()
}

fn too_few(
    composition: &Composition,
    host: &str,
    offers: &[Offer],
    available: &[Amount],
    cations: &[(Ion, Amount)],
    requests: &[SeatRequest],
) -> SeatingError {
    let all: Amount = cations.iter().map(|(_, amount)| *amount).sum();
    let (needed, kind, available) = match requests.first() {
        Some(first) => {
            let o = offers.iter().position(|offer| offer.kind == first.kind).unwrap_or(0);
            let needed = requests
                .iter()
                .filter(|r| r.kind == first.kind)
                .map(|r| r.amount.unwrap_or_else(|| composition.amount_of(&r.ion)))
                .sum();
            (needed, format!("{} kind", first.kind), available[o])
        }
        None => (all, "one kind".to_string(), available.iter().copied().max().unwrap_or_default()),
    };
    SeatingError::TooFew {
        composition: composition.to_string(),
        needed,
        kind,
        host: host.into(),
        available,
        remedy: "take another packing, or check the formula".into(),
    }
}

/// Ions whose ratio lies above every kind of interstice that this host has room for in the ladder.
fn unmet_wishes(
    cations: &[(Ion, Amount)],
    offers: &[Offer],
    evidence: &[Vec<Evidence>],
    anion: MeanAnion,
    set: RadiusSet,
) -> Vec<String> {
    let mut notes = Vec::new();
    for ((ion, _), row) in cations.iter().zip(evidence) {
        if row.iter().any(|e| e.fit == Fit::Fits) {
            continue;
        }
        // The largest rung whose critical ratio the ion reaches at that rung's coordination.
        let wanted = ladder().iter().rev().find(|rung| {
            radius(ion, rung.coordination as u8, set).is_ok_and(|r| r.angstrom / anion.radius >= rung.ratio)
        });
        match wanted {
            Some(rung) if offers.iter().all(|offer| offer.kind != rung.kind) => {
                let ratio = radius(ion, rung.coordination as u8, set).map_or(f64::NAN, |r| r.angstrom / anion.radius);
                notes.push(format!(
                    "{ion}: its radius ratio of {ratio:.3} asks for a {} interstice (above {:.3}), which this host lacks; \
                     hosts that offer it: {}",
                    rung.kind,
                    rung.ratio,
                    rung.hosts.join(", ")
                ));
            }
            Some(_) => notes.push(format!("{ion}: its radius ratio lies outside the range of every kind offered here")),
            None => notes.push(format!(
                "{ion}: its radius ratio lies below every interstice known here; it wants three neighbours or fewer"
            )),
        }
    }
    notes
}
