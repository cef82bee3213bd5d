//! Numbers with their standard uncertainty.
//!
//! Common semantic features of CIF 1.1, paragraph 19 (International Tables G, 2006, section 2.2.7.4.7.1), and the
//! production `Number` of table 2.2.7.1 (d): `34.5(12)` is 34.5 ± 1.2, as is `3.45E1(12)`.

use crate::ion::{Amount, amount};

/// Digits that a whole number below 2^53 has at most.
const EXACT_DIGITS: usize = 15;

/// Powers of ten that an `f64` holds exactly: with a whole number below 2^53 one multiplication or division then rounds
/// correctly (W. D. Clinger, ACM SIGPLAN Notices 25(6), 92 (1990), doi:10.1145/93548.93557).
const EXACT_POWERS: [f64; 23] = [
    1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20,
    1e21, 1e22,
];

/// A number with its standard uncertainty.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Number<'s> {
    /// The value.
    pub value: f64,
    /// Standard uncertainty in the unit of the value, if written.
    pub su: Option<f64>,
    digits: &'s str,
}

impl<'s> Number<'s> {
    /// Reads the whole of a text; `None` if it is no number, or none that an `f64` can hold.
    pub fn parse(text: &'s str) -> Option<Self> {
        let bytes = text.as_bytes();
        let mut at = usize::from(matches!(bytes.first(), Some(b'+' | b'-')));
        let (whole, mut mantissa) = digits_of(&bytes[at..], 0);
        at += whole;
        let mut decimals = 0;
        if bytes.get(at) == Some(&b'.') {
            (decimals, mantissa) = digits_of(&bytes[at + 1..], mantissa);
            at += 1 + decimals;
        }
        if whole + decimals == 0 {
            return None;
        }
        let mut exponent = 0;
        if matches!(bytes.get(at), Some(b'e' | b'E')) {
            let signed = usize::from(matches!(bytes.get(at + 1), Some(b'+' | b'-')));
            let digits = run_of_digits(&bytes[at + 1 + signed..]);
            let end = at + 1 + signed + digits;
            exponent = text.get(at + 1..end).filter(|_| digits > 0)?.parse::<i32>().ok()?;
            at = end;
        }
        let (digits, rest) = text.split_at(at);
        let is_exact = whole + decimals <= EXACT_DIGITS && exponent.unsigned_abs() < 100;
        let value = if is_exact { scaled(mantissa, exponent - decimals as i32) } else { None };
        let value = value.map(|v| if bytes[0] == b'-' { -v } else { v });
        let value = value.or_else(|| digits.parse().ok()).filter(|v: &f64| v.is_finite())?;
        let su = match rest {
            "" => None,
            _ => Some(uncertainty(rest, exponent.checked_sub(decimals as i32)?)?),
        };
        Some(Self { value, su, digits })
    }

    /// The exact decimal that a number without exponent writes, its uncertainty left out.
    pub fn exact(&self) -> Option<Amount> {
        let (negative, digits) = match self.digits.strip_prefix('-') {
            Some(rest) => (true, rest),
            None => (false, self.digits.strip_prefix('+').unwrap_or(self.digits)),
        };
        let amount = amount::parse(digits)?;
        Some(if negative { -amount } else { amount })
    }
}

fn run_of_digits(bytes: &[u8]) -> usize {
    bytes.iter().position(|b| !b.is_ascii_digit()).unwrap_or(bytes.len())
}

/// How many digits come first, and the whole number that they continue, which is exact for up to [`EXACT_DIGITS`].
fn digits_of(bytes: &[u8], mut number: u64) -> (usize, u64) {
    for (count, b) in bytes.iter().enumerate() {
        let digit = b.wrapping_sub(b'0');
        if digit > 9 {
            return (count, number);
        }
        number = number.wrapping_mul(10).wrapping_add(u64::from(digit));
    }
    (bytes.len(), number)
}

/// `mantissa` · 10^`exponent`, correctly rounded; `None` where one operation cannot do it.
fn scaled(mantissa: u64, exponent: i32) -> Option<f64> {
    let power = *EXACT_POWERS.get(exponent.unsigned_abs() as usize)?;
    Some(if exponent < 0 { mantissa as f64 / power } else { mantissa as f64 * power })
}

/// `(12)` in units of 10^`exponent`.
fn uncertainty(text: &str, exponent: i32) -> Option<f64> {
    let digits = text.strip_prefix('(')?.strip_suffix(')')?;
    let (count, number) = digits_of(digits.as_bytes(), 0);
    if count == 0 || count < digits.len() {
        return None;
    }
    let exact = if count <= EXACT_DIGITS { scaled(number, exponent) } else { None };
    exact.or_else(|| format!("{digits}e{exponent}").parse().ok()).filter(|su: &f64| su.is_finite())
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    /// International Tables G, 2.2.7.4.7.1: 34.5(12) = 34.5 ± 1.2 = 3.45E1(12). The others follow from the production.
    #[test]
    fn numbers_are_read_as_the_standard_says() {
        for (text, value, su) in [
            ("34.5(12)", 34.5, Some(1.2)),
            ("3.45E1(12)", 34.5, Some(1.2)),
            ("-1.(2)", -1.0, Some(2.0)),
            (".5(1)", 0.5, Some(0.1)),
            ("1200(100)", 1200.0, Some(100.0)),
            ("+.25", 0.25, None),
            ("-0", -0.0, None),
            ("1.25e+03", 1250.0, None),
            ("0.0625(2)", 0.0625, Some(0.0002)),
            ("12345678901234567890", 12345678901234567890.0, None),
            ("1e-400", 0.0, None),
        ] {
            let n = Number::parse(text).unwrap();
            assert_eq!((n.value, n.su), (value, su), "{text}");
        }
        for bad in [
            "", ".", "+", "-.", "e5", ".e5", "1e", "1e+", "1/3", "0,5", "8.08A", "1.D0", "12.3(", "12.3()", "12.3(-1)",
            "12.3(1)2", "5.64 (2)", "nan", "inf", "1e999", "0x10", "1_0", "١",
        ] {
            assert_eq!(Number::parse(bad), None, "{bad}");
        }
        assert_eq!(Number::parse("-0.125(3)").unwrap().exact(), Some(Amount::new(-1, 8)));
        assert_eq!(Number::parse("1e2").unwrap().exact(), None);
    }

    proptest! {
        /// The standard library rounds correctly.
        #[test]
        fn values_are_rounded_correctly(text in "[+-]?[0-9]{0,18}\\.?[0-9]{0,18}([eE][+-]?[0-9]{1,3})?") {
            let expected = text.parse::<f64>().ok().filter(|v| v.is_finite());
            prop_assert_eq!(Number::parse(&text).map(|n| n.value.to_bits()), expected.map(f64::to_bits), "{}", text);
        }
    }
}
