//! Bond-valence parameters of a cation and an anion.
//!
//! Three sets, each with its own fit; parameters of different sets are never mixed in one sum.

use super::{Element, Ion};
use std::sync::LazyLock;

/// Who fitted the parameters.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ValenceSet {
    /// I. D. Brown & D. Altermatt, Acta Cryst. B41, 244 (1985), doi:10.1107/S0108768185002063; B = 0.37 Å.
    Brown1985,
    /// N. E. Brese & M. O'Keeffe, Acta Cryst. B47, 192 (1991), doi:10.1107/S0108768190011041; B = 0.37 Å.
    Brese1991,
    /// O. C. Gagné & F. C. Hawthorne, Acta Cryst. B71, 562 (2015), doi:10.1107/S2052520615016297; oxides, B free.
    Gagne2015,
}

impl ValenceSet {
    /// Short citation.
    pub fn citation(self) -> &'static str {
        match self {
            Self::Brown1985 => "Brown & Altermatt 1985",
            Self::Brese1991 => "Brese & O'Keeffe 1991",
            Self::Gagne2015 => "Gagné & Hawthorne 2015",
        }
    }
}

/// Parameters of s = exp[(R₀ − R)/B].
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Parameters {
    /// Length of a bond of valence 1, Å.
    pub r0: f64,
    /// Softness, Å.
    pub b: f64,
    /// Whose fit.
    pub set: ValenceSet,
}

struct Row {
    cation: &'static str,
    charge: i8,
    anion: &'static str,
    parameters: Parameters,
}

static TABLE: LazyLock<Vec<Row>> = LazyLock::new(|| {
    let row = |line: &'static str| {
        let f: Vec<&'static str> = line.split('\t').collect();
        let set = match *f.get(6)? {
            "a" => ValenceSet::Brown1985,
            "b" => ValenceSet::Brese1991,
            _ => ValenceSet::Gagne2015,
        };
        let parameters = Parameters { r0: f[4].parse().ok()?, b: f[5].parse().ok()?, set };
        Some(Row { cation: f[0], charge: f[1].parse().ok()?, anion: f[2], parameters })
    };
    include_str!("data/bond_valence.tsv").lines().filter(|line| !line.starts_with('#')).filter_map(row).collect()
});

/// Charge of a row whose paper does not part the oxidation states of the cation.
const ANY_CHARGE: i8 = 9;

/// All published parameters of a cation with an anion: those for its oxidation state, the first choice first, then
/// those of sets that have none for it but one for any oxidation state.
pub fn parameters(cation: &Ion, anion: Element) -> impl Iterator<Item = Parameters> {
    let cation = *cation;
    let of_charge = move |charge: i8| {
        let symbols = (cation.element.symbol(), anion.symbol());
        TABLE.iter().filter(move |r| (r.cation, r.anion) == symbols && r.charge == charge).map(|r| r.parameters)
    };
    let general = of_charge(ANY_CHARGE).filter(move |p| of_charge(cation.charge).all(|own| own.set != p.set));
    of_charge(cation.charge).chain(general)
}

/// Valence of one bond, s = exp[(R₀ − R)/B], in valence units (v.u.).
///
/// `length` is R in Å. Parameters hold for one cation, oxidation state and anion; meaningless beyond the first shell.
/// I. D. Brown & D. Altermatt, Acta Cryst. B41, 244 (1985), doi:10.1107/S0108768185002063.
pub fn bond_valence(length: f64, parameters: &Parameters) -> f64 {
    ((parameters.r0 - length) / parameters.b).exp()
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Brown & Altermatt (1985), from memory of the printed table.
    #[test]
    fn printed_values_are_found() {
        let o = Element::from_symbol("O").unwrap();
        for (symbol, charge, r0) in [("Al", 3, 1.651), ("Mg", 2, 1.693), ("Ti", 4, 1.815), ("Fe", 3, 1.759)] {
            let ion = Ion::new(Element::from_symbol(symbol).unwrap(), charge);
            let found = parameters(&ion, o).find(|p| p.set == ValenceSet::Brown1985).unwrap();
            assert_eq!((found.r0, found.b), (r0, 0.37), "{symbol}");
        }
        assert_eq!(TABLE.len(), 1121);
    }

    /// Brese & O'Keeffe (1991) give one value for silver with bromine, 2.22 Å, but Ce3+ and Ce4+ apart with oxygen.
    #[test]
    fn a_value_for_any_state_serves_where_none_is_for_this_one() {
        let find = |symbol: &str, charge, anion: &str| {
            let ion = Ion::new(Element::from_symbol(symbol).unwrap(), charge);
            parameters(&ion, Element::from_symbol(anion).unwrap()).map(|p| p.r0).collect::<Vec<_>>()
        };
        assert_eq!(find("Ag", 1, "Br"), [2.22]);
        assert_ne!(find("Ce", 3, "O"), find("Ce", 4, "O"));
        assert!(find("Na", 1, "Na").is_empty());
    }

    /// Periclase: six bonds of 2.106 Å sum to nearly two (R₀ = 1.693 Å): 6 exp(−0.413/0.37) = 1.965.
    #[test]
    fn periclase_sums_to_two() {
        let p = Parameters { r0: 1.693, b: 0.37, set: ValenceSet::Brown1985 };
        assert!((6.0 * bond_valence(2.106, &p) - 1.965).abs() < 1e-3);
    }
}
