//! Which element, and which charge, a type symbol or a site label means.
//!
//! The standard's form is element and charge with the digits before the sign (`Fe3+`); files have many more. Nothing
//! is guessed: what cannot be read is refused, what is assumed comes with a sentence that says so.

use crate::ion::Element;
use std::collections::BTreeSet;

/// What a symbol or label was taken for.
#[derive(Clone, Debug, PartialEq)]
pub struct Reading {
    /// The element.
    pub element: Element,
    /// Charge in e, if the text states one that can be read.
    pub charge: Option<i8>,
    /// What was assumed, if anything.
    pub assumed: Option<String>,
}

/// Elements that the formula of the file names; empty when it names none.
pub type FormulaElements = BTreeSet<Element>;

/// Largest charge read, in e.
const MAX_CHARGE: u32 = 9;

/// Reads a type symbol: `Fe3+`, `O2-`, `Fe`; with an assumption also `Fe+3`, `FE3+`, `O--`, `Fe3`, `D`.
///
/// # Errors
/// A sentence's end: why it names no element.
pub fn of_type_symbol(text: &str, formula: &FormulaElements) -> Result<Reading, String> {
    let (letters, rest) = split_letters(text);
    let (element, mut assumed) = match exact_element(letters) {
        Some(element) => (element, None),
        None => element_of(letters, formula)?,
    };
    let (charge, note) = charge_of(element, rest, text);
    if let Some(note) = note {
        assumed = Some(assumed.map_or(note.clone(), |first: String| format!("{first}; {note}")));
    }
    Ok(Reading { element, charge, assumed })
}

/// Reads a site label, which begins with an element's symbol: `Ca1`, `O2A`; with an assumption also `CA1`, `OH5`, and
/// the charge at the end of `FeT2+`.
///
/// # Errors
/// A sentence's end: why it names no element.
pub fn of_label(text: &str, formula: &FormulaElements) -> Result<Reading, String> {
    let (letters, rest) = split_letters(text);
    // `Co` is cobalt by its spelling, unless the formula has no cobalt.
    let (element, mut assumed) = match exact_element(letters).filter(|e| formula.is_empty() || formula.contains(e)) {
        Some(element) => (element, None),
        None => element_of(letters, formula)?,
    };
    let charge = match rest.as_bytes() {
        [digit @ b'1'..=b'9', sign @ (b'+' | b'-')] => Some((digit - b'0') as i8 * if *sign == b'-' { -1 } else { 1 }),
        _ => None,
    };
    if let Some(charge) = charge {
        assumed =
            Some(format!("label `{text}` is taken for {} with a charge of {charge:+}", element.name().to_lowercase()));
    }
    Ok(Reading { element, charge, assumed })
}

/// The leading letters, and the rest.
fn split_letters(text: &str) -> (&str, &str) {
    text.split_at(text.find(|c: char| !c.is_ascii_alphabetic()).unwrap_or(text.len()))
}

/// The element spelt exactly so.
fn exact_element(letters: &str) -> Option<Element> {
    Element::from_symbol(letters)
}

/// The element that letters in a looser spelling begin with, and what was assumed.
fn element_of(letters: &str, formula: &FormulaElements) -> Result<(Element, Option<String>), String> {
    let isotope = matches!(letters, "D" | "T");
    let hydrogen = Element::from_symbol("H");
    if let Some(element) = hydrogen.filter(|h| isotope && (letters == "D" || formula.contains(h))) {
        return Ok((element, Some(format!("`{letters}` is taken for hydrogen; the isotope is not kept"))));
    }
    let candidates = candidates(letters);
    let in_formula: Vec<&(Element, bool)> = candidates.iter().filter(|(e, _)| formula.contains(e)).collect();
    let chosen = match (in_formula.as_slice(), candidates.as_slice()) {
        ([only], _) => Some(**only),
        ([first, ..], _) => Some(**first),
        ([], [first, ..]) if formula.is_empty() => Some(*first),
        // Spelt exactly: an oversight of the formula, as of a trace in a mineral.
        ([], [(element, true)]) => {
            let text =
                format!("`{letters}` is taken for {}, which the formula does not name", element.name().to_lowercase());
            return Ok((*element, Some(text)));
        }
        _ => None,
    };
    match chosen {
        Some((element, true)) => Ok((element, None)),
        Some((element, false)) => {
            Ok((element, Some(format!("`{letters}` is taken for {}", element.name().to_lowercase()))))
        }
        None if candidates.is_empty() => Err("begins with no element's symbol".into()),
        None => {
            let names: Vec<&str> = candidates.iter().map(|(e, _)| e.symbol()).collect();
            Err(format!("could mean {}, but the formula names no such element", names.join(" or ")))
        }
    }
}

/// Elements whose symbol the letters begin with, the likeliest first, and whether that needs no assumption.
///
/// A second letter counts when it is small (`CaM`), or when it ends the letters (`CA1`); a single one when what follows
/// is a capital (`OW`, `SiT`). `Wat` and `Vac` are thus no tungsten and no vanadium.
fn candidates(letters: &str) -> Vec<(Element, bool)> {
    let mut found = Vec::new();
    let bytes = letters.as_bytes();
    let (Some(first), second) = (bytes.first(), bytes.get(1)) else { return found };
    let first = first.to_ascii_uppercase() as char;
    if let Some(second) = second {
        let pair = format!("{first}{}", second.to_ascii_lowercase() as char);
        let spelt_exactly = letters.starts_with(&pair);
        let follows_capital = bytes.get(2).is_none_or(u8::is_ascii_uppercase);
        if let Some(element) =
            Element::from_symbol(&pair).filter(|_| follows_capital && (spelt_exactly || bytes.len() == 2))
        {
            found.push((element, spelt_exactly));
        }
    }
    if second.is_none_or(u8::is_ascii_uppercase)
        && let Some(element) = Element::from_symbol(&first.to_string())
    {
        found.push((element, letters.len() == 1 && letters.as_bytes()[0].is_ascii_uppercase()));
    }
    found
}

/// The charge that follows the element in a type symbol, and what was assumed.
fn charge_of(element: Element, rest: &str, text: &str) -> (Option<i8>, Option<String>) {
    let rest = rest.trim();
    let signs = rest.chars().filter(|c| "+-".contains(*c)).count();
    let digits: String = rest.chars().filter(char::is_ascii_digit).collect();
    let only = |allowed: &str| rest.chars().all(|c| allowed.contains(c));
    let value = match (signs, digits.is_empty()) {
        (0, true) if rest.is_empty() => return (None, None),
        // Signs alone: `O--`.
        (n, true) if n > 0 && (only("+") || only("-")) => Some(n as u32),
        (1, false) if only("+-0123456789") => digits.parse().ok(),
        (0, false) if only("0123456789") => return bare_digits(element, &digits, text),
        _ => None,
    };
    let standard = rest.ends_with(['+', '-']) && signs == 1;
    match value.filter(|v| *v <= MAX_CHARGE) {
        Some(value) => {
            let charge = value as i8 * if rest.contains('-') { -1 } else { 1 };
            let note = (!standard).then(|| format!("`{text}` is taken for a charge of {charge:+}"));
            (Some(charge), note)
        }
        None => (None, Some(format!("the charge in `{text}` cannot be read and is taken as unknown"))),
    }
}

/// Digits without a sign, `Fe3`: a charge only if the element has that oxidation state in one sign and not the other.
fn bare_digits(element: Element, digits: &str, text: &str) -> (Option<i8>, Option<String>) {
    let value: Option<i8> = digits.parse().ok().filter(|v| (1..=MAX_CHARGE as i8).contains(v));
    let states = element.main_states();
    let charge = value.and_then(|v| match (states.contains(&v), states.contains(&-v)) {
        (true, false) => Some(v),
        (false, true) => Some(-v),
        _ => None,
    });
    let note = match charge {
        Some(charge) => format!("`{text}` has no sign and is taken for a charge of {charge:+}"),
        None => format!("`{text}` has no sign; its charge is taken as unknown"),
    };
    (charge, Some(note))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn formula(symbols: &str) -> FormulaElements {
        symbols.split_whitespace().map(|s| Element::from_symbol(s).unwrap()).collect()
    }

    #[test]
    fn type_symbols() {
        for (text, element, charge, assumed) in [
            ("Fe3+", "Fe", Some(3), false),
            ("O2-", "O", Some(-2), false),
            ("Na", "Na", None, false),
            ("F1-", "F", Some(-1), false),
            ("Fe0+", "Fe", Some(0), false),
            ("Cl-", "Cl", Some(-1), false),
            ("Fe+3", "Fe", Some(3), true),
            ("O-2", "O", Some(-2), true),
            ("O--", "O", Some(-2), true),
            ("Fe3", "Fe", Some(3), true),
            ("O2", "O", Some(-2), true),
            ("Fe1", "Fe", None, true),
            ("FE3+", "Fe", Some(3), true),
            ("na", "Na", None, true),
            ("Fe2.5+", "Fe", None, true),
            ("D", "H", None, true),
            ("D1+", "H", Some(1), true),
        ] {
            let got = of_type_symbol(text, &formula("")).unwrap_or_else(|e| panic!("{text}: {e}"));
            assert_eq!((got.element.symbol(), got.charge, got.assumed.is_some()), (element, charge, assumed), "{text}");
        }
        for bad in ["", "X", "M1", "3+", "Wat", "Vac", "?", "é", "Xyz"] {
            assert!(of_type_symbol(bad, &formula("")).is_err(), "{bad}");
        }
    }

    #[test]
    fn the_formula_decides_labels() {
        for (label, elements, element, assumed) in [
            ("Ca1", "Ca O", "Ca", false),
            ("CA1", "Ca O", "Ca", true),
            ("CA1", "C H O", "C", true),
            ("CO1", "Co O", "Co", true),
            ("Co1", "", "Co", false),
            ("SI1", "Si O", "Si", true),
            ("O2A", "Si O", "O", false),
            ("OH5", "H Mg O", "O", true),
            ("CaM4", "Ca Mg O", "Ca", false),
            ("AlT1", "Al O", "Al", false),
            ("D1", "H O", "H", true),
            ("H1A", "H O", "H", false),
            ("Na'", "Na Cl", "Na", false),
            ("MnT", "Mg Al O", "Mn", true),
        ] {
            let got = of_label(label, &formula(elements)).unwrap_or_else(|e| panic!("{label}: {e}"));
            assert_eq!((got.element.symbol(), got.assumed.is_some()), (element, assumed), "{label} {elements}");
            assert_eq!(got.charge, None);
        }
        assert_eq!(of_label("FeT3+", &formula("Fe O")).unwrap().charge, Some(3));
        assert_eq!(of_label("O2-", &formula("")).unwrap().charge, Some(-2));
        for (bad, elements) in
            [("Wat", "H O W"), ("M1", "Mg O"), ("X", ""), ("Vac1", "V O"), ("T1", "Si O"), ("", ""), ("SI1", "Mg O")]
        {
            assert!(of_label(bad, &formula(elements)).is_err(), "{bad}");
        }
    }
}
