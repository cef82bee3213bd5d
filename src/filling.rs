//! What the sites of a primitive cell hold: kinds, classes and exact amounts, and whole numbers of them in a supercell.

use crate::error::shown;
use crate::ion::amount::to_f64;
use crate::ion::{Amount, Species};
use crate::ordering::{Contents, Parent};
use itertools::Itertools;
use num_integer::Integer;
use num_traits::Zero;

/// What can sit on a site.
#[derive(Clone, Debug, PartialEq)]
pub struct Kind {
    /// The species; `None` for a vacancy.
    pub species: Option<Species>,
    /// Charge, e.
    pub charge: Amount,
}

impl Kind {
    /// Nothing.
    pub fn vacancy() -> Self {
        Self { species: None, charge: Amount::zero() }
    }

    /// A species of known charge.
    pub fn of(species: Species) -> Self {
        Self { species: Some(species), charge: Amount::from(i128::from(species.charge.unwrap_or_default())) }
    }

    fn name(&self) -> String {
        self.species.map_or("vacant".to_string(), |s| s.to_string())
    }
}

/// Sites that share their contents.
#[derive(Clone, Debug)]
pub struct Class {
    /// `packing`, or the kind of interstice.
    pub name: String,
    /// Distance from these sites to the spheres around them, Å; 0 for the packing itself.
    pub reach: f64,
    /// Kind (index) and amount per primitive cell; the rest of the sites is vacant.
    pub amounts: Vec<(usize, Amount)>,
}

/// A primitive cell and its contents; kind 0 is the vacancy, class 0 the packing.
#[derive(Clone, Debug)]
pub struct Filling {
    /// Sites.
    pub parent: Parent,
    /// Kinds.
    pub kinds: Vec<Kind>,
    /// Classes.
    pub classes: Vec<Class>,
}

impl Filling {
    /// Number of sites of a class in the primitive cell.
    pub fn sites_in(&self, class: usize) -> usize {
        self.parent.class.iter().filter(|c| **c == class).count()
    }

    /// Atoms per primitive cell.
    pub fn atoms(&self) -> Amount {
        self.classes.iter().flat_map(|c| &c.amounts).map(|a| a.1).sum()
    }

    /// The smallest supercell in which every amount is whole.
    pub fn smallest_index(&self) -> usize {
        let denominators = self.classes.iter().flat_map(|c| &c.amounts).map(|(_, a)| *a.denom());
        denominators.fold(1_i128, |m, d| m.lcm(&d)) as usize
    }

    /// Whole numbers of each class's kinds (in the order of its amounts) in a supercell; `None` if some are not whole.
    pub fn counts(&self, index: usize) -> Option<Vec<Vec<usize>>> {
        let whole = |a: Amount| a.is_integer().then(|| a.to_integer() as usize);
        self.classes
            .iter()
            .map(|c| c.amounts.iter().map(|(_, a)| whole(a * Amount::from(index as i128))).collect())
            .collect()
    }

    /// Contents of a supercell, with the vacancies that make up each class's sites.
    pub fn contents(&self, counts: &[Vec<usize>], index: usize) -> Vec<Contents> {
        self.classes
            .iter()
            .enumerate()
            .map(|(c, class)| {
                let sites = self.sites_in(c) * index;
                let mut filled: Vec<(u8, usize)> = class
                    .amounts
                    .iter()
                    .zip(&counts[c])
                    .map(|((kind, _), n)| (*kind as u8, *n))
                    .filter(|c| c.1 > 0)
                    .collect();
                let vacant = sites.saturating_sub(filled.iter().map(|f| f.1).sum());
                if vacant > 0 {
                    filled.push((0, vacant));
                }
                filled.sort_unstable();
                Contents { counts: filled }
            })
            .collect()
    }

    /// Charge of each kind, e.
    pub fn charges(&self) -> Vec<f64> {
        self.kinds.iter().map(|k| to_f64(&k.charge)).collect()
    }

    /// Kinds of an element or ion, `Gd` or `Gd3+`; `□` and `[]` for the vacancy.
    pub fn kinds_named(&self, name: &str) -> Vec<u8> {
        let named = |k: &Kind| match k.species {
            None => name == "□" || name == "[]",
            Some(s) => s.element.symbol() == name || s.to_string() == name,
        };
        (0..self.kinds.len()).filter(|i| named(&self.kinds[*i])).map(|i| i as u8).collect()
    }

    /// The same with all that sits in one class taken as one average ion; the packing counts as full.
    pub fn averaged(&self) -> Self {
        let mut kinds = vec![Kind::vacancy()];
        let classes = self
            .classes
            .iter()
            .enumerate()
            .map(|(c, class)| {
                let charge: Amount = class.amounts.iter().map(|(kind, a)| self.kinds[*kind].charge * a).sum();
                let placed: Amount = class.amounts.iter().map(|a| a.1).sum();
                let amount = if c == 0 { Amount::from(self.sites_in(0) as i128) } else { placed };
                // Any species will do to mark the sites as filled.
                let species = class.amounts.first().and_then(|(kind, _)| self.kinds[*kind].species);
                kinds.push(Kind { species, charge: if amount.is_zero() { Amount::zero() } else { charge / amount } });
                Class { amounts: vec![(kinds.len() - 1, amount)], ..class.clone() }
            })
            .collect();
        Self { parent: self.parent.clone(), kinds, classes }
    }

    /// The same contents, per site of each class, on another primitive cell all of whose interstices are filled.
    pub fn moved_to(&self, parent: Parent) -> Self {
        let sites = |class: usize| Amount::from(parent.class.iter().filter(|c| **c == class).count() as i128);
        let classes = self
            .classes
            .iter()
            .enumerate()
            .map(|(c, class)| {
                let placed: Amount = if c == 0 {
                    Amount::from(self.sites_in(0) as i128)
                } else {
                    class.amounts.iter().map(|a| a.1).sum()
                };
                let amounts = class.amounts.iter().map(|(kind, a)| (*kind, a / placed * sites(c))).collect();
                Class { amounts, ..class.clone() }
            })
            .collect();
        Self { parent, kinds: self.kinds.clone(), classes }
    }

    /// The neutral whole numbers nearest to the amounts (least sum of squared differences) within two of each, if any.
    pub fn nearest(&self, index: usize) -> Option<Vec<Vec<usize>>> {
        const MAX_TRIED: usize = 2_000_000;
        let wanted: Vec<(usize, usize, f64)> = self
            .classes
            .iter()
            .enumerate()
            .flat_map(|(c, class)| class.amounts.iter().map(move |(kind, a)| (c, *kind, to_f64(a) * index as f64)))
            .collect();
        let range = |x: f64| (x.floor() as i64 - 1).max(0)..=(x.ceil() as i64 + 1);
        if wanted.iter().try_fold(1_usize, |n, w| n.checked_mul(range(w.2).count())).is_none_or(|n| n > MAX_TRIED) {
            return None;
        }
        let neutral = |n: &Vec<i64>| {
            wanted
                .iter()
                .zip(n)
                .map(|((_, kind, _), n)| self.kinds[*kind].charge * i128::from(*n))
                .sum::<Amount>()
                .is_zero()
        };
        let fits = |n: &Vec<i64>| {
            (0..self.classes.len()).all(|c| {
                let placed: i64 = wanted.iter().zip(n).filter(|(w, _)| w.0 == c).map(|(_, n)| *n).sum();
                placed <= (self.sites_in(c) * index) as i64
            })
        };
        let distance = |n: &Vec<i64>| wanted.iter().zip(n).map(|(w, n)| (w.2 - *n as f64).powi(2)).sum::<f64>();
        // A composition that loses one of its ions is another one: taken only if there is no other.
        let lost = |n: &Vec<i64>| n.iter().filter(|k| **k == 0).count();
        let best = wanted
            .iter()
            .map(|w| range(w.2))
            .multi_cartesian_product()
            .filter(|n| neutral(n) && fits(n) && n.iter().any(|k| *k > 0))
            .min_by(|a, b| lost(a).cmp(&lost(b)).then(distance(a).total_cmp(&distance(b))))?;
        Some(
            (0..self.classes.len())
                .map(|c| wanted.iter().zip(&best).filter(|(w, _)| w.0 == c).map(|(_, n)| *n as usize).collect())
                .collect(),
        )
    }

    /// `3 Gd3+, 29 Ce4+, 62 O2-`.
    pub fn describe(&self, counts: &[Vec<usize>]) -> String {
        let of_class = |(class, counts): (&Class, &Vec<usize>)| {
            class
                .amounts
                .iter()
                .zip(counts)
                .map(|((kind, _), n)| format!("{n} {}", self.kinds[*kind].name()))
                .collect::<Vec<_>>()
        };
        self.classes.iter().zip(counts).flat_map(of_class).join(", ")
    }

    /// The amounts of a supercell as they would be, fractions included.
    pub fn fractional(&self, index: usize) -> String {
        let amounts = self.classes.iter().flat_map(|c| &c.amounts);
        amounts
            .map(|(kind, a)| format!("{} {}", shown(&(a * Amount::from(index as i128))), self.kinds[*kind].name()))
            .join(", ")
    }
}
