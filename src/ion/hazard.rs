//! A word of caution for elements whose compounds can hurt whoever makes them.
//!
//! Common practice, no source; no safety advice, only a pointer to where it is found.

use super::Element;
use std::collections::BTreeSet;

const TOXIC: [&str; 12] = ["Be", "Cr", "Ni", "As", "Se", "Cd", "Sb", "Te", "Os", "Hg", "Tl", "Pb"];
const REACTIVE: [&str; 9] = ["Li", "Na", "K", "Rb", "Cs", "F", "P", "Ca", "Ba"];
const NO_STABLE_ISOTOPE: [&str; 3] = ["Th", "Pa", "U"];

/// Lines of caution for the elements of a composition: none, or one a class of hazard.
pub fn cautions(elements: &BTreeSet<Element>) -> Vec<String> {
    let list = |members: &dyn Fn(&Element) -> bool| -> Vec<&'static str> {
        elements.iter().filter(|e| members(e)).map(|e| e.symbol()).collect()
    };
    let radioactive = list(&|e| !e.has_standard_weight() || NO_STABLE_ISOTOPE.contains(&e.symbol()));
    let toxic = list(&|e| TOXIC.contains(&e.symbol()));
    let reactive = list(&|e| REACTIVE.contains(&e.symbol()));
    let refer = "consult safety data and local rules, and leave handling to licensed practice";
    [
        ("is radioactive", radioactive),
        ("has toxic compounds", toxic),
        ("can react violently, as element or precursor", reactive),
    ]
    .into_iter()
    .filter(|(_, members)| !members.is_empty())
    .map(|(what, members)| format!("{} {what}: {refer}", members.join(", ")))
    .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lead_and_uranium_are_spoken_of_and_magnesium_is_not() {
        let set = |symbols: &[&str]| symbols.iter().filter_map(|s| Element::from_symbol(s)).collect::<BTreeSet<_>>();
        assert!(cautions(&set(&["Pb", "O"]))[0].contains("toxic"));
        assert!(cautions(&set(&["U", "O"]))[0].contains("radioactive"));
        assert!(cautions(&set(&["Tc"]))[0].contains("radioactive"));
        assert!(cautions(&set(&["Mg", "Al", "O"])).is_empty());
    }
}
