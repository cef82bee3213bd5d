//! What speaks for and against an oxidation state: how common it is, its neighbours, the energy of its oxide.
//!
//! Penalties are dimensionless and chosen by hand so that textbook compounds come out right (common practice, no
//! source); the energies are measured ones, see `data/oxide_gibbs.tsv`. `oxidation` ranks whole assignments with them.

use super::amount::{Amount, to_f64};
use super::{Element, Ion};
use std::sync::LazyLock;

/// Penalty of each further place in the list of dominant states.
pub(super) const PLACE: f64 = 1.0;
/// Penalty of a main state that is not among the dominant ones.
pub(super) const MAIN: f64 = 4.0;
/// Penalty of a rarer state next to a common one.
const EXTENDED: f64 = 7.0;
/// Penalty of each further step from the nearest common state, and of any rarer state of a lanthanoid, which leaves the
/// common ones less readily than a d element: Nd0.8Sr0.2NiO2 holds Ni(I), not Nd(II).
const STEP: f64 = 4.0;
/// Penalty of each element below its highest common state beside another that is above its own, or the reverse: the
/// one would oxidise the other.
const CLASH: f64 = 2.0;

/// Faraday constant in kJ/mol per eV (CODATA 2018).
const KJ_PER_MOL_PER_EV: f64 = 96.485_332;

/// Elements whose rarer states are met in ionic solids, by atomic number: groups 4 to 11, lanthanoids and actinoids,
/// and Ga(I), In(I) (common practice, no source). Those of others (Mg(I), Si(II)) belong to molecules and metals.
const VARIABLE: [std::ops::RangeInclusive<u8>; 6] = [22..=29, 31..=31, 40..=47, 49..=49, 57..=79, 89..=103];

/// Elements of variable valence in which the state I is met: Ni, Cu, Ga, Pd, Ag, In, Pt, Au.
const UNIVALENT: [u8; 8] = [28, 29, 31, 46, 47, 49, 78, 79];

/// Lanthanoids by atomic number.
const LANTHANOIDS: std::ops::RangeInclusive<u8> = 57..=71;

/// States that disproportionate, so that an average is a mixture of the neighbours; Varma (1988), as above.
const SKIPPED: [(&str, i8); 12] = [
    ("Ga", 2),
    ("Ge", 3),
    ("As", 4),
    ("Se", 5),
    ("In", 2),
    ("Sn", 3),
    ("Sb", 4),
    ("Te", 5),
    ("Au", 2),
    ("Tl", 2),
    ("Pb", 3),
    ("Bi", 4),
];

/// States with penalties; negative ones only where common, since rarer ones stand for bonds between like atoms.
pub(super) fn states_of(element: Element) -> Vec<(i8, f64)> {
    let dominant = element.dominant_states();
    let mut states: Vec<(i8, f64)> = dominant.iter().enumerate().map(|(i, q)| (*q, PLACE * i as f64)).collect();
    let number = element.number();
    let least = if UNIVALENT.contains(&number) { 1 } else { 2 };
    let variable = VARIABLE.iter().any(|range| range.contains(&number));
    let extended = element.extended_states().iter().filter(|q| variable && **q >= least).map(|q| {
        let steps = match LANTHANOIDS.contains(&number) {
            true => 1,
            false => dominant.iter().map(|d| d.abs_diff(*q)).min().unwrap_or(1).saturating_sub(1),
        };
        (*q, EXTENDED + STEP * f64::from(steps))
    });
    for (q, penalty) in element.main_states().iter().map(|q| (*q, MAIN)).chain(extended).filter(|(q, _)| *q > 0) {
        if states.iter().all(|(seen, _)| *seen != q) && !SKIPPED.contains(&(element.symbol(), q)) {
            states.push((q, penalty));
        }
    }
    states
}

/// Penalty of the states as they stand together; `states` may hold an element twice.
pub(super) fn clashes(states: &[(Element, i8)]) -> f64 {
    let common = |element: Element| element.dominant_states().iter().copied().filter(|q| *q > 0);
    let above = |(e, q): &(Element, i8)| common(*e).max().is_some_and(|most| *q > most);
    let below = |(e, q): &(Element, i8)| *q > 0 && common(*e).min().is_some_and(|least| *q < least);
    let reducing = |(e, q): &(Element, i8)| *q > 0 && common(*e).max().is_some_and(|most| *q < most);
    let oxidising = |(e, q): &(Element, i8)| common(*e).min().is_some_and(|least| *q > least);
    let pairs = |strong: &dyn Fn(&(Element, i8)) -> bool, weak: &dyn Fn(&(Element, i8)) -> bool| {
        let strong: Vec<Element> = states.iter().filter(|s| strong(s)).map(|s| s.0).collect();
        states.iter().filter(|s| weak(s) && strong.iter().any(|e| *e != s.0)).count()
    };
    CLASH * (pairs(&above, &reducing) + pairs(&below, &oxidising)) as f64
}

/// Σ amount · ΔG of the binary oxides, eV per formula unit; `None` when an element of variable valence is in a state
/// that the table lacks. Only differences between assignments of the same formula mean anything.
pub(super) fn redox_energy(ions: &[(Ion, Amount)]) -> Option<f64> {
    static TABLE: LazyLock<Vec<(&'static str, i8, f64)>> = LazyLock::new(|| {
        include_str!("data/oxide_gibbs.tsv")
            .lines()
            .filter(|line| !line.starts_with('#'))
            .filter_map(|line| {
                let mut f = line.split('\t');
                Some((f.next()?, f.next()?.parse().ok()?, f.next()?.parse::<f64>().ok()? / KJ_PER_MOL_PER_EV))
            })
            .collect()
    });
    let energy = |(ion, amount): &(Ion, Amount)| {
        let single = ion.element.dominant_states().iter().filter(|q| **q > 0).count() <= 1;
        let row = TABLE.iter().find(|(symbol, q, _)| *symbol == ion.element.symbol() && *q == ion.charge);
        match row {
            Some((_, _, per_mole)) => Some(to_f64(amount) * per_mole),
            None => (single || ion.charge <= 0).then_some(0.0),
        }
    };
    ions.iter().map(energy).sum()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_table_of_oxides_is_whole() {
        let rows = include_str!("data/oxide_gibbs.tsv").lines().filter(|l| !l.starts_with('#')).count();
        assert_eq!(rows, 42);
    }

    #[test]
    fn every_element_with_a_charge_has_a_common_state_first() {
        for element in Element::all().filter(|e| !e.dominant_states().is_empty()) {
            assert_eq!(states_of(element)[0], (element.dominant_states()[0], 0.0), "{element}");
        }
        let lead = Element::from_symbol("Pb").unwrap();
        assert_eq!(states_of(lead).iter().map(|s| s.0).collect::<Vec<_>>(), [2, 4]);
    }
}
