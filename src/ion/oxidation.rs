//! Oxidation states: the neutral assignments of charges to the elements of a formula, ranked.
//!
//! States are drawn from `data/elements.tsv`: those common in oxides and halides first, then the other main ones, then
//! the rarer ones, each step at a penalty. A negative state is given only to an element more electronegative than every
//! cation. Assignments that are equally common are parted by the Gibbs energies of formation of the binary
//! oxides (`data/oxide_gibbs.tsv`): oxygen goes where it is bound most firmly, so FeTiO3 is Fe(II)Ti(IV) and CuFeO2
//! Cu(I)Fe(III); aqueous electrode potentials would get the second wrong. Mixed valence of
//! one element, between two neighbouring common states, is tried only when no uniform assignment is neutral.

use super::amount::{Amount, to_f64};
use super::composition::Composition;
use super::formula::{Formula, Named, numeral};
use super::{Element, Ion, Spin};
use itertools::Itertools;
use num_traits::Zero;
use std::sync::LazyLock;

/// A neutral assignment that was not taken.
#[derive(Clone, Debug, PartialEq)]
pub struct Candidate {
    /// The ions.
    pub composition: Composition,
    /// How uncommon its states are; less is better, dimensionless.
    pub penalty: f64,
    /// Energy of the binary oxides, eV per formula unit, for comparison within a formula; `None` if not tabulated.
    pub redox: Option<f64>,
}

/// The best neutral assignment, its rivals and its doubts.
#[derive(Clone, Debug, PartialEq)]
pub struct Assignment {
    /// The one taken.
    pub best: Composition,
    /// The others, best first.
    pub rivals: Vec<Candidate>,
    /// What is doubtful and how to settle it.
    pub cautions: Vec<String>,
}

/// Why no charges could be assigned.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum OxidationError {
    /// An element without known states.
    #[error("no oxidation state of {element} in ionic solids is known here; state it, for example `{element}(II)`")]
    NoStates {
        /// The element.
        element: Element,
    },
    /// Nothing neutral.
    #[error(
        "no common oxidation states make `{formula}` neutral; the closest is `{closest}` with a net charge of {charge} e per formula unit; check the amounts, or state the charges in Stock notation, for example `Fe(III)`"
    )]
    NotNeutral {
        /// The formula.
        formula: String,
        /// The closest assignment.
        closest: String,
        /// Its charge, with sign.
        charge: String,
    },
    /// The stated charges do not add up.
    #[error(
        "`{formula}` as stated has a net charge of {charge} e per formula unit; check the amounts and the oxidation numbers"
    )]
    StatedNotNeutral {
        /// The formula.
        formula: String,
        /// Its charge, with sign.
        charge: String,
    },
    /// Too many elements to try.
    #[error(
        "`{formula}` has more than {limit} assignments to try; state some of the charges in Stock notation, for example `Fe(III)`"
    )]
    TooMany {
        /// The formula.
        formula: String,
        /// Named limit.
        limit: usize,
    },
    /// Polyatomic ions.
    #[error(
        "`{formula}` needs {ion}, which forms {examples}; complex ions are not modelled, only ions of single atoms in the interstices of a packing"
    )]
    ComplexIon {
        /// The formula.
        formula: String,
        /// The ion that gives it away.
        ion: Ion,
        /// What it forms.
        examples: &'static str,
    },
}

/// Most assignments tried for one formula.
pub const MAX_ASSIGNMENTS: usize = 1_000_000;

/// Rivals kept.
const MAX_RIVALS: usize = 10;

/// An equally common rival whose oxides are less than this above the best is told as a near tie, eV per formula unit.
pub const NEAR_TIE: f64 = 0.6;

/// Penalty of each further place in the list of dominant states.
const PLACE: f64 = 1.0;
/// Penalty of a main state that is not among the dominant ones.
const MAIN: f64 = 4.0;
/// Penalty of a rarer state.
const EXTENDED: f64 = 7.0;
/// Faraday constant in kJ/mol per eV (CODATA 2018).
const KJ_PER_MOL_PER_EV: f64 = 96.485_332;
/// Penalty of mixed valence.
const MIXED: f64 = 2.0;

/// One element (or one stated ion) of the formula and the states it may take.
struct Term {
    element: Element,
    amount: Amount,
    spin: Option<Spin>,
    stated: bool,
    states: Vec<(i8, f64)>,
}

/// The neutral assignments of a formula.
///
/// # Errors
/// [`OxidationError`] when nothing is neutral (with the closest), an element has no known state, or there are too many
/// assignments.
pub fn assign(formula: &Formula) -> Result<Assignment, OxidationError> {
    let vacancies = formula.parts.iter().filter(|p| p.what == Named::Vacancy).map(|p| p.amount).sum();
    let terms = terms(formula)?;
    if terms.iter().all(|t| t.stated) {
        return stated(formula, &terms, vacancies);
    }
    let count = terms.iter().try_fold(1_usize, |n, t| n.checked_mul(t.states.len()));
    if count.is_none_or(|n| n > MAX_ASSIGNMENTS) {
        return Err(OxidationError::TooMany { formula: formula.to_string(), limit: MAX_ASSIGNMENTS });
    }
    let allowed: Vec<Vec<(i8, f64)>> = terms
        .iter()
        .map(|t| t.states.iter().copied())
        .multi_cartesian_product()
        .filter(|states| electronegative_enough(&terms, states))
        .collect();
    let mut found: Vec<Candidate> = allowed
        .iter()
        .filter(|states| net(&terms, states).is_zero())
        .map(|states| uniform(&terms, states, vacancies))
        .collect();
    if found.is_empty() {
        found = mixed(&terms, &allowed, vacancies);
    }
    let redox = |c: &Candidate| c.redox.unwrap_or(f64::INFINITY);
    found.sort_by(|a, b| a.penalty.total_cmp(&b.penalty).then(redox(a).total_cmp(&redox(b))));
    if found.is_empty() {
        return Err(closest(formula, &terms, &allowed, vacancies));
    }
    let best = found.remove(0);
    found.truncate(MAX_RIVALS);
    let cautions = cautions(&best, &found);
    Ok(Assignment { best: best.composition, rivals: found, cautions })
}

/// Refuses compositions whose ions of one atom only exist inside complex ions.
///
/// # Errors
/// [`OxidationError::ComplexIon`].
pub fn refuse_complex_ions(composition: &Composition) -> Result<(), OxidationError> {
    const GIVEAWAYS: [(&str, i8, &str); 4] = [
        ("H", 1, "hydroxide, water, ammonium and the like"),
        ("C", 4, "carbonate"),
        ("N", 5, "nitrate"),
        ("N", 3, "nitrite"),
    ];
    for (ion, _) in &composition.ions {
        if let Some((_, _, examples)) =
            GIVEAWAYS.iter().find(|(s, q, _)| ion.element.symbol() == *s && ion.charge == *q)
        {
            return Err(OxidationError::ComplexIon { formula: composition.formula_text(), ion: *ion, examples });
        }
    }
    Ok(())
}

fn terms(formula: &Formula) -> Result<Vec<Term>, OxidationError> {
    let mut terms = Vec::new();
    for part in &formula.parts {
        let Named::Element { element, charge, spin } = part.what else { continue };
        let states = match charge {
            Some(charge) => vec![(charge, 0.0)],
            None => states_of(element),
        };
        if states.is_empty() {
            return Err(OxidationError::NoStates { element });
        }
        terms.push(Term { element, amount: part.amount, spin, stated: charge.is_some(), states });
    }
    Ok(terms)
}

/// States with penalties; negative ones only where common, since rarer ones stand for bonds between like atoms.
fn states_of(element: Element) -> Vec<(i8, f64)> {
    let dominant = element.dominant_states();
    let mut states: Vec<(i8, f64)> = dominant.iter().enumerate().map(|(i, q)| (*q, PLACE * i as f64)).collect();
    for (list, penalty) in [(element.main_states(), MAIN), (element.extended_states(), EXTENDED)] {
        for q in list.iter().filter(|q| **q > 0) {
            if states.iter().all(|(seen, _)| seen != q) {
                states.push((*q, penalty));
            }
        }
    }
    states
}

/// Every anion is more electronegative than every cation, stated ions excepted.
fn electronegative_enough(terms: &[Term], states: &[(i8, f64)]) -> bool {
    let of = |sign: i8| {
        terms
            .iter()
            .zip(states)
            .filter(move |(t, (q, _))| !t.stated && q.signum() == sign)
            .filter_map(|(t, _)| t.element.electronegativity())
    };
    let least_anion = of(-1).fold(f64::INFINITY, f64::min);
    let greatest_cation = of(1).fold(f64::NEG_INFINITY, f64::max);
    least_anion > greatest_cation
}

fn net(terms: &[Term], states: &[(i8, f64)]) -> Amount {
    terms.iter().zip(states).map(|(t, (q, _))| t.amount * i128::from(*q)).sum()
}

fn uniform(terms: &[Term], states: &[(i8, f64)], vacancies: Amount) -> Candidate {
    let ions: Vec<(Ion, Amount)> = terms
        .iter()
        .zip(states)
        .map(|(t, (q, _))| (Ion { element: t.element, charge: *q, spin: t.spin }, t.amount))
        .collect();
    let common: f64 = states.iter().map(|(_, p)| p).sum();
    let redox = redox_energy(&ions);
    Candidate { composition: Composition { ions: merged(ions), vacancies }, penalty: common, redox }
}

/// One element split between two neighbouring dominant states, all others uniform.
fn mixed(terms: &[Term], allowed: &[Vec<(i8, f64)>], vacancies: Amount) -> Vec<Candidate> {
    let mut found: Vec<Candidate> = Vec::new();
    for states in allowed {
        for (i, term) in terms.iter().enumerate().filter(|(_, t)| !t.stated) {
            let mut ladder: Vec<i8> = term.element.dominant_states().iter().copied().filter(|q| *q > 0).collect();
            ladder.sort_unstable();
            let lower = states[i].0;
            let Some(upper) = ladder.iter().copied().find(|q| *q > lower) else { continue };
            if !ladder.contains(&lower) {
                continue;
            }
            // amount·lower + x (upper − lower) + rest = 0
            let x = -net(terms, states) / i128::from(upper - lower);
            if x <= Amount::zero() || x >= term.amount {
                continue;
            }
            let mut ions: Vec<(Ion, Amount)> = Vec::new();
            for (t, (q, _)) in terms.iter().zip(states) {
                let ion = |charge| Ion { element: t.element, charge, spin: t.spin };
                if std::ptr::eq(t, term) {
                    ions.push((ion(lower), t.amount - x));
                    ions.push((ion(upper), x));
                } else {
                    ions.push((ion(*q), t.amount));
                }
            }
            let common: f64 = states.iter().map(|(_, p)| p).sum();
            let redox = redox_energy(&ions);
            let composition = Composition { ions: merged(ions), vacancies };
            if found.iter().all(|c| c.composition != composition) {
                found.push(Candidate { composition, penalty: common + MIXED, redox });
            }
        }
    }
    found
}

/// Σ amount · ΔG of the binary oxides, eV per formula unit; `None` when an element of variable valence is in a state
/// that the table lacks. Only differences between assignments of the same formula mean anything.
fn redox_energy(ions: &[(Ion, Amount)]) -> Option<f64> {
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

/// A formula may state the same ion that a mixed assignment gives.
fn merged(ions: Vec<(Ion, Amount)>) -> Vec<(Ion, Amount)> {
    let mut out: Vec<(Ion, Amount)> = Vec::new();
    for (ion, amount) in ions {
        match out.iter_mut().find(|(seen, _)| *seen == ion) {
            Some((_, sum)) => *sum += amount,
            None => out.push((ion, amount)),
        }
    }
    out
}

fn stated(formula: &Formula, terms: &[Term], vacancies: Amount) -> Result<Assignment, OxidationError> {
    let states: Vec<_> = terms.iter().map(|t| t.states[0]).collect();
    let charge = net(terms, &states);
    if !charge.is_zero() {
        return Err(OxidationError::StatedNotNeutral { formula: formula.to_string(), charge: signed(&charge) });
    }
    let best = uniform(terms, &states, vacancies).composition;
    Ok(Assignment { best, rivals: Vec::new(), cautions: Vec::new() })
}

fn closest(formula: &Formula, terms: &[Term], allowed: &[Vec<(i8, f64)>], vacancies: Amount) -> OxidationError {
    let size = |charge: Amount| if charge < Amount::zero() { -charge } else { charge };
    let best = allowed.iter().filter(|s| s.iter().all(|(_, p)| *p < MAIN)).min_by(|a, b| {
        let penalty = |s: &[(i8, f64)]| s.iter().map(|(_, p)| p).sum::<f64>();
        size(net(terms, a)).cmp(&size(net(terms, b))).then(penalty(a).total_cmp(&penalty(b)))
    });
    match best.or(allowed.first()) {
        Some(states) => OxidationError::NotNeutral {
            formula: formula.to_string(),
            closest: uniform(terms, states, vacancies).composition.to_string(),
            charge: signed(&net(terms, states)),
        },
        // No anion is possible: metals alone, or noble gases.
        None => OxidationError::NotNeutral {
            formula: formula.to_string(),
            closest: "no anion among its elements".into(),
            charge: "unknown".into(),
        },
    }
}

fn signed(charge: &Amount) -> String {
    if *charge > Amount::zero() { format!("+{charge}") } else { charge.to_string() }
}

fn cautions(best: &Candidate, rivals: &[Candidate]) -> Vec<String> {
    let mut cautions = Vec::new();
    let near = |r: &&Candidate| {
        let gap = best.redox.zip(r.redox).map(|(p, q)| q - p);
        r.penalty - best.penalty < 1e-9 && gap.is_none_or(|gap| gap < NEAR_TIE)
    };
    if let Some(rival) = rivals.first().filter(near) {
        cautions.push(format!(
            "the charges are a near tie: taken `{}`, nearly as likely `{}`; state them in Stock notation to decide",
            best.composition, rival.composition
        ));
    }
    for (ion, _) in &best.composition.ions {
        if ion.charge > 0 && !ion.element.dominant_states().contains(&ion.charge) {
            cautions.push(format!(
                "{}({}) is not a common state; state the charges in Stock notation if it is not meant",
                ion.element,
                numeral(ion.charge)
            ));
        }
    }
    cautions
}

#[cfg(test)]
mod tests {
    use super::super::formula;
    use super::*;

    fn assigned(text: &str) -> String {
        assign(&formula::parse(text).unwrap()).unwrap_or_else(|e| panic!("{text}: {e}")).best.to_string()
    }

    /// Oxidation states as any textbook of inorganic chemistry gives them (common practice, no source).
    #[test]
    fn textbook_states_are_found() {
        for (text, want) in [
            ("Fe3O4", "Fe(II)Fe(III)2O(-II)4"),
            ("Mn3O4", "Mn(II)Mn(III)2O(-II)4"),
            ("Pb3O4", "Pb(II)2Pb(IV)O(-II)4"),
            ("LiMn2O4", "Li(I)Mn(III)Mn(IV)O(-II)4"),
            ("BaTiO3", "Ba(II)Ti(IV)O(-II)3"),
            ("Na3AlF6", "Na(I)3Al(III)F(-I)6"),
            ("CuFeO2", "Cu(I)Fe(III)O(-II)2"),
            ("FeTiO3", "Fe(II)Ti(IV)O(-II)3"),
            ("Ce0.9Gd0.1O1.95", "Ce(IV)0.9Gd(III)0.1O(-II)1.95"),
            ("KMnF3", "K(I)Mn(II)F(-I)3"),
            ("CsPbBr3", "Cs(I)Pb(II)Br(-I)3"),
            ("Li3YCl6", "Li(I)3Y(III)Cl(-I)6"),
            ("La2CuO4", "La(III)2Cu(II)O(-II)4"),
            ("ZrSiO4", "Zr(IV)Si(IV)O(-II)4"),
            ("Y3Al5O12", "Y(III)3Al(III)5O(-II)12"),
            ("LiCoO2", "Li(I)Co(III)O(-II)2"),
            ("CoFe2O4", "Co(II)Fe(III)2O(-II)4"),
            ("MnFe2O4", "Mn(II)Fe(III)2O(-II)4"),
            ("NiO", "Ni(II)O(-II)"),
            ("MoS2", "Mo(IV)S(-II)2"),
            ("SrFeO3", "Sr(II)Fe(IV)O(-II)3"),
            ("KNbO3", "K(I)Nb(V)O(-II)3"),
            ("PbTiO3", "Pb(II)Ti(IV)O(-II)3"),
            ("Cu2O", "Cu(I)2O(-II)"),
            ("CuO", "Cu(II)O(-II)"),
            ("V2O5", "V(V)2O(-II)5"),
            ("WO3", "W(VI)O(-II)3"),
            ("UO2", "U(IV)O(-II)2"),
            ("U3O8", "U(V)2U(VI)O(-II)8"),
            ("CaF2", "Ca(II)F(-I)2"),
            ("ZnS", "Zn(II)S(-II)"),
            ("SnO2", "Sn(IV)O(-II)2"),
            ("SnO", "Sn(II)O(-II)"),
            ("Eu2O3", "Eu(III)2O(-II)3"),
            ("EuO", "Eu(II)O(-II)"),
            ("LiFePO4", "Li(I)Fe(II)P(V)O(-II)4"),
            ("Na2FePO4F", "Na(I)2Fe(II)P(V)O(-II)4F(-I)"),
            ("Ag2S", "Ag(I)2S(-II)"),
            ("TlCl", "Tl(I)Cl(-I)"),
            ("BiFeO3", "Bi(III)Fe(III)O(-II)3"),
            ("Si3N4", "Si(IV)3N(-III)4"),
            ("Cu2ZnSnS4", "Cu(I)2Zn(II)Sn(IV)S(-II)4"),
            ("CuInSe2", "Cu(I)In(III)Se(-II)2"),
            ("Cs2AgBiBr6", "Cs(I)2Ag(I)Bi(III)Br(-I)6"),
            ("K2PtCl6", "K(I)2Pt(IV)Cl(-I)6"),
            ("CuCrO2", "Cu(I)Cr(III)O(-II)2"),
            ("Y0.08Zr0.92O1.96", "Y(III)0.08Zr(IV)0.92O(-II)1.96"),
            ("OF2", "O(II)F(-I)2"),
        ] {
            assert_eq!(assigned(text), want, "{text}");
        }
    }

    #[test]
    fn stated_charges_are_kept() {
        assert_eq!(assigned("Fe(II)Fe(III)2O4"), "Fe(II)Fe(III)2O(-II)4");
        assert_eq!(assigned("FeO(-II)"), "Fe(II)O(-II)");
        let wrong = assign(&formula::parse("Fe(III)O(-II)").unwrap()).unwrap_err();
        assert!(matches!(wrong, OxidationError::StatedNotNeutral { ref charge, .. } if charge == "+1"), "{wrong}");
    }

    #[test]
    fn what_is_not_neutral_is_shown_with_the_closest() {
        let error = assign(&formula::parse("NaCl2").unwrap()).unwrap_err();
        assert!(matches!(error, OxidationError::NotNeutral { ref charge, .. } if charge == "-1"), "{error}");
        assert!(assign(&formula::parse("FeAl").unwrap()).is_err());
        assert!(matches!(assign(&formula::parse("HeO").unwrap()), Err(OxidationError::NoStates { .. })));
    }

    #[test]
    fn ammonium_is_refused_as_complex() {
        let assignment = assign(&formula::parse("(NH4)Cl").unwrap()).unwrap();
        let error = refuse_complex_ions(&assignment.best).unwrap_err();
        assert!(error.to_string().contains("complex ions are not modelled"), "{error}");
    }

    #[test]
    fn doubts_are_spoken() {
        let assignment = assign(&formula::parse("SrFeO3").unwrap()).unwrap();
        assert!(
            assignment.cautions.iter().any(|c| c.contains("Fe(IV) is not a common state")),
            "{:?}",
            assignment.cautions
        );
    }

    #[test]
    fn the_table_of_oxides_is_whole() {
        let rows = include_str!("data/oxide_gibbs.tsv").lines().filter(|l| !l.starts_with('#')).count();
        assert_eq!(rows, 37);
    }
}
