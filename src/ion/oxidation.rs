//! Oxidation states: the neutral assignments of charges to the elements of a formula, ranked.
//!
//! 1. Uniform assignments from the states of `data/elements.tsv` that are common in oxides and halides, and from the
//!    other main ones at a penalty.
//! 2. If none is neutral: rarer states of elements of variable valence, and mixed valence of one element between
//!    neighbouring states, ranked together. SrFeO3 is Fe(IV), but Li0.5CoO2 is Co(III) and Co(IV).
//!
//! A negative state is given only to an element more electronegative than every cation. Assignments of equal penalty
//! are parted by the Gibbs energies of formation of the binary oxides (`data/oxide_gibbs.tsv`): oxygen goes where it is
//! bound most firmly, so FeTiO3 is Fe(II)Ti(IV) and CuFeO2 Cu(I)Fe(III); aqueous electrode potentials would get the
//! second wrong. States that these elements skip (Pb(III), Sb(IV), Au(II), ...) are never chosen: C. M. Varma, Phys.
//! Rev. Lett. 61, 2713 (1988), cited from memory.

use super::amount::Amount;
use super::composition::Composition;
use super::formula::{Formula, Named, numeral};
use super::states::{MAIN, PLACE, clashes, redox_energy, states_of};
use super::{Element, Ion, Spin};
use itertools::Itertools;
use num_traits::Zero;

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
    /// Nothing can be negative.
    #[error(
        "`{formula}` has no anion: none of its elements has a common negative state and is more electronegative than all others; state the charges in Stock notation if they are meant, for example `Mo(IV)Te(-II)2`"
    )]
    NoAnion {
        /// The formula.
        formula: String,
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
pub const MAX_ASSIGNMENTS: usize = 200_000;

/// Rivals kept.
const MAX_RIVALS: usize = 10;

/// A rival at most one place less common, whose oxides are less than this above the best (or not tabulated), is told as
/// a near tie; eV per formula unit.
pub const NEAR_TIE: f64 = 0.6;

/// Penalty of mixed valence.
const MIXED: f64 = 2.0;

/// Highest states of 3d cations that sulfide, selenide and telluride leave unreduced; above them the anions are
/// likelier to have paired, as in pyrite, Fe(II)S2 (common practice, no source).
const HIGHEST_BESIDE_SULFIDE: [(&str, i8); 5] = [("Mn", 3), ("Fe", 3), ("Co", 3), ("Ni", 2), ("Cu", 1)];

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
    let common: Vec<_> = terms.iter().map(|t| t.states.iter().copied().filter(|(_, p)| *p <= MAIN).collect()).collect();
    let every: Vec<_> = terms.iter().map(|t| t.states.clone()).collect();
    let allowed = choices(formula, &terms, &common)?;
    let mut found = neutral(&terms, &allowed, vacancies);
    if found.is_empty() {
        let allowed = choices(formula, &terms, &every)?;
        found = neutral(&terms, &allowed, vacancies);
        found.extend(mixed(&terms, &allowed, vacancies));
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
    let complex = |ion: &Ion| match (ion.element.symbol(), ion.charge) {
        ("H", 1) => Some("hydroxide, water, ammonium and the like"),
        ("H", -1) if composition.ions.iter().any(|(i, _)| i.element.symbol() == "B") => Some("borohydride"),
        ("C", 1..) => Some("carbonate, oxalate, cyanide and the like"),
        ("N", 1..) => Some("nitrate, nitrite and the like"),
        ("Hg", 1) => Some("the pair Hg2(2+)"),
        _ => None,
    };
    match composition.ions.iter().find_map(|(ion, _)| complex(ion).map(|examples| (*ion, examples))) {
        Some((ion, examples)) => Err(OxidationError::ComplexIon { formula: composition.formula_text(), ion, examples }),
        None => Ok(()),
    }
}

/// All choices of one state for each term in which the anions are the most electronegative.
fn choices(
    formula: &Formula,
    terms: &[Term],
    states: &[Vec<(i8, f64)>],
) -> Result<Vec<Vec<(i8, f64)>>, OxidationError> {
    let count = states.iter().try_fold(1_usize, |n, s| n.checked_mul(s.len()));
    if count.is_none_or(|n| n > MAX_ASSIGNMENTS) {
        return Err(OxidationError::TooMany { formula: formula.to_string(), limit: MAX_ASSIGNMENTS });
    }
    let all = states.iter().map(|s| s.iter().copied()).multi_cartesian_product();
    Ok(all.filter(|states| electronegative_enough(terms, states)).collect())
}

fn neutral(terms: &[Term], allowed: &[Vec<(i8, f64)>], vacancies: Amount) -> Vec<Candidate> {
    let neutral = allowed.iter().filter(|states| net(terms, states).is_zero());
    neutral.map(|states| uniform(terms, states, vacancies)).collect()
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
    let ions =
        terms.iter().zip(states).map(|(t, (q, _))| (Ion { element: t.element, charge: *q, spin: t.spin }, t.amount));
    candidate(ions.collect(), states.iter().map(|(_, p)| p).sum(), vacancies)
}

fn candidate(ions: Vec<(Ion, Amount)>, penalty: f64, vacancies: Amount) -> Candidate {
    let states: Vec<(Element, i8)> = ions.iter().map(|(ion, _)| (ion.element, ion.charge)).collect();
    let redox = redox_energy(&ions);
    let composition = Composition { ions: merged(ions), vacancies };
    Candidate { composition, penalty: penalty + clashes(&states), redox }
}

/// One element split between two neighbouring states, all others uniform.
fn mixed(terms: &[Term], allowed: &[Vec<(i8, f64)>], vacancies: Amount) -> Vec<Candidate> {
    let mut found: Vec<Candidate> = Vec::new();
    for states in allowed {
        for (i, term) in terms.iter().enumerate().filter(|(_, t)| !t.stated) {
            let (lower, _) = states[i];
            let above = term.states.iter().filter(|(q, _)| *q > lower && lower > 0);
            let Some(&(upper, upper_penalty)) = above.min_by_key(|(q, _)| *q) else { continue };
            // amount·lower + x (upper − lower) + rest = 0
            let x = -net(terms, states) / i128::from(upper - lower);
            if x <= Amount::zero() || x >= term.amount {
                continue;
            }
            let mut ions: Vec<(Ion, Amount)> = Vec::new();
            let mut penalty = MIXED;
            for (k, (t, (q, p))) in terms.iter().zip(states).enumerate() {
                let ion = |charge| Ion { element: t.element, charge, spin: t.spin };
                if k == i {
                    ions.extend([(ion(lower), t.amount - x), (ion(upper), x)]);
                    penalty += p.max(upper_penalty);
                } else {
                    ions.push((ion(*q), t.amount));
                    penalty += p;
                }
            }
            found.push(candidate(ions, penalty, vacancies));
        }
    }
    found
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
    let penalty = |s: &[(i8, f64)]| s.iter().map(|(_, p)| p).sum::<f64>();
    let ionic = allowed.iter().filter(|s| s.iter().any(|(q, _)| *q < 0));
    let best =
        ionic.min_by(|a, b| size(net(terms, a)).cmp(&size(net(terms, b))).then(penalty(a).total_cmp(&penalty(b))));
    match best {
        Some(states) => OxidationError::NotNeutral {
            formula: formula.to_string(),
            closest: uniform(terms, states, vacancies).composition.to_string(),
            charge: signed(&net(terms, states)),
        },
        None => OxidationError::NoAnion { formula: formula.to_string() },
    }
}

fn signed(charge: &Amount) -> String {
    if *charge > Amount::zero() { format!("+{charge}") } else { charge.to_string() }
}

fn cautions(best: &Candidate, rivals: &[Candidate]) -> Vec<String> {
    let mut cautions = Vec::new();
    let near = |r: &&Candidate| {
        let gap = best.redox.zip(r.redox).map(|(p, q)| q - p);
        r.penalty - best.penalty <= PLACE && gap.is_none_or(|gap| gap < NEAR_TIE)
    };
    if let Some(rival) = rivals.iter().find(near) {
        cautions.push(format!(
            "the charges are a near tie: taken `{}`, nearly as likely `{}`; state them in Stock notation to decide",
            best.composition, rival.composition
        ));
    }
    let pairing = |symbol: &str| matches!(symbol, "S" | "Se" | "Te");
    let paired = best.composition.anions().map(|(ion, _)| ion.element).find(|e| pairing(e.symbol()));
    for (ion, _) in best.composition.cations() {
        let name = format!("{}({})", ion.element, numeral(ion.charge));
        let reduced = HIGHEST_BESIDE_SULFIDE.iter().any(|(s, q)| *s == ion.element.symbol() && ion.charge > *q);
        if let Some(anion) = paired.filter(|_| reduced) {
            cautions.push(format!(
                "{name} is doubtful beside {anion}(-II): pairs of {anion} atoms, as in pyrite, are likelier and are not modelled"
            ));
        } else if !ion.element.dominant_states().contains(&ion.charge) {
            cautions
                .push(format!("{name} is not a common state; state the charges in Stock notation if it is not meant"));
        }
    }
    cautions
}
