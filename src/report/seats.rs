//! The decision on seats with its evidence.

use super::table::layout;
use crate::build::Decision;
use crate::metric::Size;
use crate::seating::{Fit, Plan, Seating};
use serde::Serialize;

/// Assignments listed at most.
const LISTED: usize = 5;

/// One ion in one kind of interstice.
#[derive(Debug, Serialize)]
pub struct SeatRow {
    /// Ion.
    pub ion: String,
    /// Kind of interstice.
    pub interstice: String,
    /// Coordination number.
    pub coordination: usize,
    /// Ions per formula unit, exact.
    pub amount: String,
    /// Radius at this coordination, Å; `~` interpolated, `?` of another coordination.
    pub radius: String,
    /// Radius ratio.
    pub ratio: f64,
    /// Range of ratio that this interstice suits; the upper end is absent for the largest kind.
    pub ratio_range: (f64, Option<f64>),
    /// Where the ratio lies.
    pub fit: Fit,
    /// Pauling bond strength, v.u.
    pub bond_strength: f64,
    /// Coordination number expected from those observed.
    pub expected_coordination: Option<f64>,
    /// Octahedral site preference, kJ/mol.
    pub site_preference: Option<f64>,
}

/// One assignment.
#[derive(Debug, Serialize)]
pub struct PlanRow {
    /// Rank, from 1.
    pub rank: usize,
    /// Weighted evidence against it; less is better.
    pub penalty: f64,
    /// Least deviation of bond-strength sums at the anions, v.u.
    pub rule2_deviation: Option<f64>,
    /// Fill of each kind used, exact.
    pub fills: Vec<(String, String)>,
    /// Seats.
    pub seats: Vec<SeatRow>,
}

/// A cation that belongs to the packing.
#[derive(Debug, Serialize)]
pub struct PackedRow {
    /// Ion.
    pub ion: String,
    /// Name of its sphere in the host.
    pub sphere: String,
    /// Anions around it.
    pub coordination: usize,
    /// Ions per formula unit, exact.
    pub amount: String,
    /// Radius at this coordination, Å; `~` interpolated, `?` of another coordination.
    pub radius: String,
}

/// The whole decision.
#[derive(Debug, Serialize)]
pub struct Seats {
    /// Ions in Stock notation.
    pub composition: String,
    /// Host.
    pub host: String,
    /// Packing spheres per formula unit.
    pub spheres: String,
    /// Vacant ones among them.
    pub vacant: String,
    /// Mean anion radius, Å, of the ratios.
    pub anion_radius: f64,
    /// Radius of the packing sphere, Å, by contact, for the first assignment.
    pub sphere_radius: f64,
    /// Cations that belong to the packing.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub packed: Vec<PackedRow>,
    /// Assignments, best first.
    pub assignments: Vec<PlanRow>,
    /// Doubts.
    pub cautions: Vec<String>,
}

/// Gathers what there is to say.
pub fn gather(decision: &Decision) -> Seats {
    let seating = &decision.seating;
    Seats {
        composition: decision.composition.to_string(),
        host: decision.host.name.clone(),
        spheres: seating.spheres.spheres.to_string(),
        vacant: seating.spheres.vacant.to_string(),
        anion_radius: seating.anion_radius,
        sphere_radius: decision.size.scale,
        packed: seating
            .members
            .iter()
            .map(|m| PackedRow {
                ion: m.ion.to_string(),
                sphere: decision.host.roles[m.role].name.clone(),
                coordination: m.coordination,
                amount: m.amount.to_string(),
                radius: m.radius.to_string(),
            })
            .collect(),
        assignments: seating.plans.iter().take(LISTED).enumerate().map(|(i, p)| plan_row(seating, p, i + 1)).collect(),
        cautions: decision.cautions.clone(),
    }
}

fn plan_row(seating: &Seating, plan: &Plan, rank: usize) -> PlanRow {
    let used = |o: &usize| plan.seats.iter().any(|s| s.offer == *o);
    PlanRow {
        rank,
        penalty: plan.penalty,
        rule2_deviation: plan.rule2_deviation,
        fills: (0..seating.offers.len())
            .filter(used)
            .map(|o| (seating.offers[o].kind.to_string(), plan.fills[o].to_string()))
            .collect(),
        seats: plan
            .seats
            .iter()
            .map(|seat| {
                let (offer, e) = (&seating.offers[seat.offer], &seat.evidence);
                SeatRow {
                    ion: seat.ion.to_string(),
                    interstice: offer.kind.to_string(),
                    coordination: offer.coordination,
                    amount: seat.amount.to_string(),
                    radius: e.radius.to_string(),
                    ratio: e.ratio,
                    ratio_range: (offer.ratio, offer.next_ratio.is_finite().then_some(offer.next_ratio)),
                    fit: e.fit,
                    bond_strength: e.bond_strength,
                    expected_coordination: e.expected,
                    site_preference: e.site_preference,
                }
            })
            .collect(),
    }
}

/// What people read.
pub fn text(seats: &Seats, size: &Size) -> String {
    let mut out =
        format!("{}  in {}, {} packing spheres per formula unit", seats.composition, seats.host, seats.spheres);
    out += &if seats.vacant == "0" { "\n".to_string() } else { format!(", {} of them vacant\n", seats.vacant) };
    for m in &seats.packed {
        out += &format!(
            "in the packing: {} {} as {}, {} anions around it; r {} Å\n",
            m.amount, m.ion, m.sphere, m.coordination, m.radius
        );
    }
    for plan in &seats.assignments {
        let fills: Vec<String> = plan.fills.iter().map(|(kind, fill)| format!("{fill} of the {kind}")).collect();
        let rule2 = plan.rule2_deviation.map_or("not weighed".into(), |d| format!("{d:.3} v.u."));
        out += &format!(
            "\n{}. fills {} interstices; rule 2 deviation at the anions {rule2}; weight against {:.2}\n",
            plan.rank,
            fills.join(" and "),
            plan.penalty
        );
        let rows: Vec<Vec<String>> = plan.seats.iter().map(row).collect();
        out += &layout(
            &[
                "ion",
                "interstice",
                "CN",
                "amount",
                "r / Å",
                "ratio",
                "range",
                "verdict",
                "bond / v.u.",
                "usual CN",
                "OSPE / kJ/mol",
            ],
            &rows,
        );
    }
    out += &format!(
        "\nratios to a mean anion of {:.3} Å; size by contact: packing sphere {:.4} Å{}\n",
        seats.anion_radius,
        size.scale,
        if size.anions_touch { " (anions touch)" } else { "" }
    );
    if let (Some(tightest), true) = (size.contacts.first(), size.contacts.len() > 1) {
        out += &format!(
            "tightest pair: {} at {:.3} Å would ask for {:.4} Å\n",
            tightest.cation, tightest.distance, tightest.scale
        );
    }
    for caution in &seats.cautions {
        out += &format!("note: {caution}\n");
    }
    out + "The radius ratio alone is right for about two of three environments in oxides (George et al. 2020); the weights are \
        hand-set, not fitted. Jahn-Teller distortion, lone pairs, covalency and spin order are not modelled.\n"
}

fn row(seat: &SeatRow) -> Vec<String> {
    let (low, high) = seat.ratio_range;
    let verdict = match seat.fit {
        Fit::Fits => "fits",
        Fit::TooSmall => "too small",
        Fit::TooLarge => "too large",
    };
    vec![
        seat.ion.clone(),
        seat.interstice.clone(),
        seat.coordination.to_string(),
        seat.amount.clone(),
        seat.radius.clone(),
        format!("{:.3}", seat.ratio),
        high.map_or(format!("{low:.3} up"), |h| format!("{low:.3} to {h:.3}")),
        verdict.into(),
        format!("{:.3}", seat.bond_strength),
        seat.expected_coordination.map_or(String::new(), |c| format!("{c:.1}")),
        seat.site_preference.map_or(String::new(), |p| format!("{p:.0}")),
    ]
}
