//! Chemical formulas, read exactly.
//!
//! ```text
//! formula   = blank* unit (adduct unit)* blank*
//! adduct    = blank* ("·" | "•" | "*") blank*          an adduct unit may open with its number, CaSO4·2H2O
//! unit      = [amount] group+
//! group     = (element | vacancy | "(" group+ ")" | "[" group+ "]") [amount] blank*
//! element   = symbol ["(" numeral ["," ("hs" | "ls")] ")"]
//! numeral   = ["-"] roman, I to IX, or "0"              oxidation number in Stock notation
//! vacancy   = "□" | "[]"
//! amount    = digits ["." digits] | "." digits | digits "/" digits
//! ```
//! Right after an element, a parenthesis that holds only a Roman numeral (with an optional spin) is an oxidation number;
//! `I` inside it is therefore never iodine: write `Na[I]` for a group of iodine alone. Blanks part the terms of a sum as
//! CIF writes it (`Al2 Mg O4`). A dot is a decimal point, so an adduct needs the raised one or `*`: `CaSO4.2H2O` has
//! 5.2 O, and only its lack of neutrality gives it away.
//!
//! Whatever is read can be written and read again: [`Formula`]'s text parses to the same formula.

use super::amount::{self, Amount, MAX_DENOMINATOR, MAX_DIGITS};
use super::{Element, Spin};
use nom::branch::alt;
use nom::bytes::complete::tag;
use nom::character::complete::{char, digit0, digit1, one_of};
use nom::combinator::{map, opt, recognize, value};
use nom::sequence::{delimited, pair, preceded, terminated};
use nom::{IResult, Parser};
use num_traits::{CheckedAdd, CheckedMul, One, Zero};
use std::fmt;

/// Longest formula accepted, in bytes.
pub const MAX_LENGTH: usize = 1000;

/// Deepest nesting of brackets accepted.
pub const MAX_DEPTH: usize = 16;

/// Largest amount accepted, of one term or of a whole formula.
pub const MAX_AMOUNT: i128 = 1_000_000_000;

/// Largest common denominator of a formula's amounts accepted, so that sums over them stay exact.
pub const MAX_COMMON_DENOMINATOR: i128 = 1_000_000_000_000;

/// What a term names.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Named {
    /// An element, with its oxidation state and spin where the formula states them.
    Element {
        /// The element.
        element: Element,
        /// Stated oxidation state, e.
        charge: Option<i8>,
        /// Stated spin.
        spin: Option<Spin>,
    },
    /// A vacant place.
    Vacancy,
}

/// A term of a formula.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Part {
    /// What.
    pub what: Named,
    /// How much per formula unit; above zero.
    pub amount: Amount,
}

/// A formula with its brackets multiplied out: equal terms merged, in order of first appearance.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Formula {
    /// The terms.
    pub parts: Vec<Part>,
}

/// Where and why a formula cannot be read.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("formula `{text}`, character {column}: {message}")]
pub struct FormulaError {
    /// The formula as given.
    pub text: String,
    /// Character at fault, counted from 1.
    pub column: usize,
    /// What was found and what would be accepted.
    pub message: String,
}

/// Reads a formula.
///
/// # Errors
/// [`FormulaError`] with the character at fault and what would be accepted there.
pub fn parse(text: &str) -> Result<Formula, FormulaError> {
    let fail = |at: usize, message: String| FormulaError {
        text: text.chars().take(MAX_LENGTH).collect(),
        column: text.get(..at).map_or(0, |head| head.chars().count()) + 1,
        message,
    };
    if text.len() > MAX_LENGTH {
        return Err(fail(0, format!("longer than {MAX_LENGTH} bytes")));
    }
    let mut reader = Reader { text, at: 0, parts: Vec::new() };
    reader.formula().map_err(|(at, message)| fail(at, message))?;
    Ok(Formula { parts: reader.parts })
}

/// A fault: byte offset and sentence.
type Fault = (usize, String);

const EXPECTED_TERM: &str = "expected an element symbol, `(`, `[`, or a vacancy `□`";

struct Reader<'t> {
    text: &'t str,
    at: usize,
    parts: Vec<Part>,
}

impl<'t> Reader<'t> {
    fn rest(&self) -> &'t str {
        &self.text[self.at..]
    }

    /// Runs a nom parser at the current place; moves on when it succeeds.
    fn take<T>(
        &mut self,
        mut parser: impl Parser<&'t str, Output = T, Error = nom::error::Error<&'t str>>,
    ) -> Option<T> {
        let (rest, found) = parser.parse(self.rest()).ok()?;
        self.at = self.text.len() - rest.len();
        Some(found)
    }

    fn blanks(&mut self) {
        self.at = self.text.len() - self.rest().trim_start().len();
    }

    fn formula(&mut self) -> Result<(), Fault> {
        self.blanks();
        if self.rest().is_empty() {
            return Err((self.at, format!("the formula is empty; {EXPECTED_TERM}")));
        }
        loop {
            self.unit()?;
            self.blanks();
            if self.rest().is_empty() {
                return self.check_total();
            }
            if self.take(adduct).is_none() {
                return Err((self.at, self.unexpected()));
            }
            self.blanks();
        }
    }

    fn unit(&mut self) -> Result<(), Fault> {
        let factor = self.amount()?;
        let first = self.parts.len();
        let parts = std::mem::take(&mut self.parts);
        let terms = self.groups()?;
        self.parts = parts;
        debug_assert_eq!(self.parts.len(), first);
        self.add(terms, factor)
    }

    /// Groups up to a closing bracket, an adduct or the end; brackets on an explicit stack, so nesting costs no recursion.
    fn groups(&mut self) -> Result<Vec<Part>, Fault> {
        let mut stack: Vec<(usize, char, Vec<Part>)> = Vec::new();
        let mut terms: Vec<Part> = Vec::new();
        loop {
            self.blanks();
            let start = self.at;
            if self.take(vacancy).is_some() {
                let amount = self.amount()?;
                push(&mut terms, Part { what: Named::Vacancy, amount }).map_err(|m| (start, m))?;
            } else if let Some(open) = self.take(one_of::<_, _, nom::error::Error<&str>>("([")) {
                if stack.len() == MAX_DEPTH {
                    return Err((start, format!("brackets nested deeper than {MAX_DEPTH}")));
                }
                stack.push((start, open, std::mem::take(&mut terms)));
            } else if let Some(close) = self.rest().chars().next().filter(|c| matches!(c, ')' | ']')) {
                let Some((opened, open, outer)) = stack.pop() else {
                    return Err((start, format!("`{close}` closes no bracket")));
                };
                if (open == '(') != (close == ')') {
                    let wanted = if open == '(' { ')' } else { ']' };
                    return Err((start, format!("found `{close}`, expected `{wanted}`")));
                }
                if terms.is_empty() {
                    return Err((opened, "the bracket holds nothing".into()));
                }
                self.at += 1;
                let factor = self.amount()?;
                let inner = std::mem::replace(&mut terms, outer);
                add_terms(&mut terms, inner, factor).map_err(|m| (start, m))?;
            } else if self.rest().chars().next().is_some_and(|c| c.is_ascii_alphabetic()) {
                let what = self.element()?;
                let amount = self.amount()?;
                push(&mut terms, Part { what, amount }).map_err(|m| (start, m))?;
            } else if let Some((opened, open, _)) = stack.last().filter(|_| self.rest().is_empty()) {
                return Err((*opened, format!("`{open}` is not closed")));
            } else if terms.is_empty() || !stack.is_empty() {
                return Err((self.at, self.unexpected()));
            } else {
                return Ok(terms);
            }
        }
    }

    fn element(&mut self) -> Result<Named, Fault> {
        let start = self.at;
        let letters: String = self.rest().chars().take_while(char::is_ascii_alphabetic).take(2).collect();
        // Two letters if they are a symbol (`Co`), else one (`CO` is carbon and oxygen).
        let found = [2, 1].into_iter().filter_map(|n| letters.get(..n)).find_map(Element::from_symbol);
        let element = found.ok_or_else(|| (start, unknown_element(self.rest())))?;
        self.at += element.symbol().len();
        let (charge, spin) = self.take(stock).unwrap_or((None, None));
        Ok(Named::Element { element, charge, spin })
    }

    /// An amount if there is one, else 1; zero, negative and unreadable ones are faults.
    fn amount(&mut self) -> Result<Amount, Fault> {
        let start = self.at;
        if self.rest().starts_with('-') {
            return Err((start, "an amount cannot be negative".into()));
        }
        let Some(written) = self.take(amount_text) else { return Ok(Amount::one()) };
        let amount = amount::parse(written)
            .ok_or_else(|| (start, format!("cannot read the amount `{written}`; {}", amount_limits())))?;
        if amount.is_zero() {
            return Err((start, format!("an amount of {written} is no part of a formula; leave the term out")));
        }
        if self.rest().starts_with('.') {
            return Err((self.at, "a second decimal point; an adduct needs the raised dot `·` or `*`".into()));
        }
        Ok(amount)
    }

    fn add(&mut self, terms: Vec<Part>, factor: Amount) -> Result<(), Fault> {
        add_terms(&mut self.parts, terms, factor).map_err(|message| (self.at, message))
    }

    /// Amounts as multiplied out: bounded, with a common denominator, and each one that can be written again.
    fn check_total(&self) -> Result<(), Fault> {
        let total = self.parts.iter().try_fold(Amount::zero(), |sum, part| sum.checked_add(&part.amount));
        if total.is_none_or(|total| total > Amount::from(MAX_AMOUNT)) {
            return Err((0, format!("amounts add up to more than {MAX_AMOUNT} or cannot be added exactly")));
        }
        let common = self.parts.iter().try_fold(1_i128, |common, part| {
            common
                .checked_mul(*Amount::new(common, *part.amount.denom()).denom())
                .filter(|d| *d <= MAX_COMMON_DENOMINATOR)
        });
        if common.is_none() {
            return Err((0, format!("the amounts have no common denominator of at most {MAX_COMMON_DENOMINATOR}")));
        }
        match self.parts.iter().find(|part| !part.amount.is_one() && !writable(&part.amount)) {
            None => Ok(()),
            Some(part) => Err((0, format!("an amount comes to {}; {}", part.amount, amount_limits()))),
        }
    }

    fn unexpected(&self) -> String {
        match self.rest().chars().next() {
            None => format!("the formula ends here; {EXPECTED_TERM}"),
            Some(c) => format!("found `{c}`, {EXPECTED_TERM}{}", remedy(c)),
        }
    }
}

/// What a character out of place was probably meant for.
fn remedy(c: char) -> &'static str {
    match c {
        '.' => "; an adduct needs the raised dot `·` or `*`",
        '+' | '-' | '−' | '⁺' | '⁻' => "; a charge is written as an oxidation number, `Fe(III)`",
        '₀'..='₉' => "; write amounts in plain digits",
        '0'..='9' => "; an amount follows its symbol without a blank, an oxidation number is Roman, `Fe(III)`",
        _ => "",
    }
}

fn amount_limits() -> String {
    format!("at most {MAX_DIGITS} digits on a side, a denominator of 1 to {MAX_DENOMINATOR}")
}

fn writable(amount: &Amount) -> bool {
    amount::parse(&amount_suffix(amount)).as_ref() == Some(amount)
}

fn adduct(input: &str) -> IResult<&str, ()> {
    value((), one_of("·•*⋅∙")).parse(input)
}

fn vacancy(input: &str) -> IResult<&str, ()> {
    value((), alt((tag("□"), tag("[]")))).parse(input)
}

fn amount_text(input: &str) -> IResult<&str, &str> {
    // Not `digit0` last: in nom 8 it leaves the rest of a text that it uses up at the wrong place for `recognize`.
    let fraction = recognize((digit1, char('/'), opt(digit1)));
    let decimal = recognize((digit0, char('.'), digit1));
    alt((fraction, decimal, digit1)).parse(input)
}

/// `(III)`, `(II,hs)`, `(-II)`.
fn stock(input: &str) -> IResult<&str, (Option<i8>, Option<Spin>)> {
    let spin = alt((value(Spin::High, tag("hs")), value(Spin::Low, tag("ls"))));
    let number = map(pair(opt(char('-')), roman), |(minus, n)| if minus.is_some() { -n } else { n });
    let inner = pair(map(number, Some), opt(preceded((tag(","), opt(char(' '))), spin)));
    delimited(char('('), inner, char(')')).parse(input)
}

fn roman(input: &str) -> IResult<&str, i8> {
    // Longest first, so that `I` does not stop `III` short; the closing bracket then decides.
    alt((
        value(8, tag("VIII")),
        value(7, tag("VII")),
        value(6, tag("VI")),
        value(4, tag("IV")),
        value(9, tag("IX")),
        value(5, tag("V")),
        value(3, tag("III")),
        value(2, tag("II")),
        value(1, tag("I")),
        value(0, terminated(tag("0"), nom::combinator::peek(one_of("),")))),
    ))
    .parse(input)
}

fn push(terms: &mut Vec<Part>, part: Part) -> Result<(), String> {
    let too_much = || format!("amounts above {MAX_AMOUNT}, or that cannot be added exactly, are refused");
    match terms.iter_mut().find(|t| t.what == part.what) {
        Some(term) => term.amount = term.amount.checked_add(&part.amount).ok_or_else(too_much)?,
        None => terms.push(part),
    }
    if terms.iter().any(|t| t.amount > Amount::from(MAX_AMOUNT)) { Err(too_much()) } else { Ok(()) }
}

fn add_terms(into: &mut Vec<Part>, terms: Vec<Part>, factor: Amount) -> Result<(), String> {
    for part in terms {
        let amount = part.amount.checked_mul(&factor).ok_or("amounts too large to multiply exactly")?;
        push(into, Part { what: part.what, amount })?;
    }
    Ok(())
}

/// Names the stranger and symbols that it may be meant for: other case, or the same first letter.
fn unknown_element(rest: &str) -> String {
    let letters: String = rest.chars().take_while(char::is_ascii_alphabetic).take(2).collect();
    let name = |s: &str| {
        let mut c = s.chars();
        c.next()
            .map(|first| first.to_ascii_uppercase().to_string() + &c.as_str().to_ascii_lowercase())
            .unwrap_or_default()
    };
    let meant = [2, 1].into_iter().filter_map(|n| letters.get(..n)).map(name).find_map(|s| Element::from_symbol(&s));
    match meant {
        Some(element) => format!("`{letters}` is no element symbol; did you mean `{element}`?"),
        None => {
            let first = letters.chars().next().map(|c| c.to_ascii_uppercase());
            let near: Vec<_> = Element::all().map(Element::symbol).filter(|s| s.chars().next() == first).collect();
            match near.is_empty() {
                true => format!("`{letters}` is no element symbol"),
                false => format!("`{letters}` is no element symbol; those that begin alike: {}", near.join(", ")),
            }
        }
    }
}

/// Roman numeral of an oxidation state of at most 9 in size, in Stock notation.
pub(crate) fn numeral(charge: i8) -> String {
    const ROMAN: [&str; 10] = ["0", "I", "II", "III", "IV", "V", "VI", "VII", "VIII", "IX"];
    let sign = if charge < 0 { "-" } else { "" };
    match ROMAN.get(usize::from(charge.unsigned_abs())) {
        Some(roman) => format!("{sign}{roman}"),
        None => format!("{charge}"),
    }
}

/// An amount as a formula writes it: nothing for 1, a terminating decimal as such, any other as a fraction.
pub(crate) fn amount_suffix(amount: &Amount) -> String {
    if amount.is_one() {
        return String::new();
    }
    let mut denominator = *amount.denom();
    let mut digits = 0;
    for prime in [2, 5] {
        let mut power = 0;
        while denominator % prime == 0 {
            denominator /= prime;
            power += 1;
        }
        digits = digits.max(power);
    }
    if denominator != 1 || digits > MAX_DIGITS {
        return amount.to_string();
    }
    let scaled = (amount * Amount::from(10_i128.pow(digits as u32))).to_integer();
    let text = format!("{scaled:0width$}", width = digits + 1);
    let (whole, fraction) = text.split_at(text.len() - digits);
    if fraction.is_empty() { whole.into() } else { format!("{whole}.{fraction}") }
}

impl fmt::Display for Formula {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for part in &self.parts {
            match part.what {
                Named::Vacancy => f.write_str("□")?,
                Named::Element { element, charge, spin } => {
                    write!(f, "{element}")?;
                    if let Some(charge) = charge {
                        let spin = match spin {
                            None => "",
                            Some(Spin::High) => ",hs",
                            Some(Spin::Low) => ",ls",
                        };
                        write!(f, "({}{spin})", numeral(charge))?;
                    }
                }
            }
            f.write_str(&amount_suffix(&part.amount))?;
        }
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn shown(text: &str) -> String {
        parse(text).unwrap().to_string()
    }

    #[test]
    fn formulas_are_multiplied_out() {
        for (text, want) in [
            ("MgAl2O4", "MgAl2O4"),
            ("Al2 Mg O4", "Al2MgO4"),
            ("Ca(OH)2", "CaO2H2"),
            ("[Fe(CN)6]2", "Fe2C12N12"),
            ("CaSO4·2H2O", "CaSO6H4"),
            ("Ce0.9Gd0.1O1.95", "Ce0.9Gd0.1O1.95"),
            ("Fe1/3O", "Fe1/3O"),
            ("OFe1/3", "OFe1/3"),
            ("OFe12/35", "OFe12/35"),
            ("Fe(II)Fe(III)2O4", "Fe(II)Fe(III)2O4"),
            ("LiCo(III,ls)O2", "LiCo(III,ls)O2"),
            ("Na(I)2O(-II)", "Na(I)2O(-II)"),
            ("CO2", "CO2"),
            ("CoO", "CoO"),
            ("ZrO1.9□0.1", "ZrO1.9□0.1"),
            ("ZrO1.9[]0.1", "ZrO1.9□0.1"),
            ("Na[I]", "NaI"),
            ("Ir(IX)O4.5", "Ir(IX)O4.5"),
            ("((Fe)2)3O", "Fe6O"),
            (" .5Ca O ", "Ca0.5O0.5"),
        ] {
            assert_eq!(shown(text), want, "{text}");
        }
    }

    #[test]
    fn faults_point_at_the_character() {
        for (text, column, part) in [
            ("", 1, "empty"),
            ("MGO", 1, "did you mean `Mg`"),
            ("MgXxO", 3, "no element symbol"),
            ("Mg(Al2O4", 3, "not closed"),
            ("MgAl2)O4", 6, "closes no bracket"),
            ("Mg(Al]2", 6, "expected `)`"),
            ("Mg()", 3, "holds nothing"),
            ("Mg0O", 3, "leave the term out"),
            ("Mg-1O", 3, "negative"),
            ("Mg1/0O", 3, "denominator"),
            ("Mg?O", 3, "found `?`"),
            ("Mg1.2.3", 6, "decimal point"),
            ("Mg1234567890O", 3, "digits"),
            ("MgO*", 5, "ends here"),
            ("2", 2, "ends here"),
            ("□é", 2, "found `é`"),
            ("MgO.Al2O3", 4, "raised dot"),
            ("MgAl₂O4", 5, "plain digits"),
            ("Fe3+", 4, "oxidation number, `Fe(III)`"),
            ("Fe(3)O", 4, "Roman"),
            ("(Fe500000000)2O", 1, "add up to more than"),
            ("(Fe1/999983)1/999979O", 1, "denominator"),
            ("(Fe0.000000001)0.1O", 1, "denominator"),
            ("Fe1/999983O1/999979Mg1/999961", 1, "common denominator"),
        ] {
            let error = parse(text).unwrap_err();
            assert_eq!(error.column, column, "{error}");
            assert!(error.message.contains(part), "{error}");
        }
        assert!(parse(&"(".repeat(900)).unwrap_err().message.contains("deeper"));
        assert!(parse("(((O999999999)999999999)999999999)999999999").is_err());
    }

    fn built_amount() -> impl Strategy<Value = String> {
        prop_oneof![
            Just(String::new()),
            (1_u32..20).prop_map(|n| n.to_string()),
            "0\\.[0-9]{1,9}",
            "[1-9][0-9]{0,8}/[1-9][0-9]{0,5}",
        ]
    }

    proptest! {
        #[test]
        fn never_panics(text in "\\PC{0,40}") {
            let _ = parse(&text);
        }

        #[test]
        fn built_formulas_read_back(terms in proptest::collection::vec((1_u8..=118, built_amount(), 0_usize..4), 1..8)) {
            let text: String = terms
                .iter()
                .map(|(z, amount, kind)| {
                    let symbol = Element::from_number(*z).unwrap();
                    match kind {
                        0 => format!("({symbol}2[]){amount}"),
                        1 => format!("{symbol}(III,ls){amount}"),
                        2 => format!("[{symbol}(-II)3O]{amount}"),
                        _ => format!("{symbol}{amount} "),
                    }
                })
                .collect();
            if let Ok(formula) = parse(&text) {
                prop_assert_eq!(parse(&formula.to_string()).unwrap(), formula);
            }
        }

        #[test]
        fn near_formulas_never_panic(text in "[A-Za-z0-9()\\[\\]./,□·* -]{0,40}") {
            if let Ok(formula) = parse(&text) {
                prop_assert_eq!(parse(&formula.to_string()).unwrap(), formula);
            }
        }
    }
}
