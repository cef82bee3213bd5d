//! Exact amounts: stoichiometric numbers, fills and occupancies as rationals.
//!
//! A decimal such as 0.08 is 2/25 from the moment it is read until a file is written.

use num_rational::Ratio;
use num_traits::ToPrimitive;

/// An exact rational number of ions, sites or shares; dimensionless.
pub type Amount = Ratio<i128>;

/// Most digits accepted before or after the point of a written amount.
pub const MAX_DIGITS: usize = 9;

/// Largest denominator accepted in an amount written as a fraction.
pub const MAX_DENOMINATOR: i128 = 1_000_000;

/// The amount as the nearest `f64`.
pub fn to_f64(amount: &Amount) -> f64 {
    amount.to_f64().unwrap_or(f64::NAN)
}

/// Reads `3`, `0.25`, `.5` or `1/3` exactly; `None` when the text is none of these,
/// has more than [`MAX_DIGITS`] digits on a side, or a denominator of zero or above [`MAX_DENOMINATOR`].
pub fn parse(text: &str) -> Option<Amount> {
    let digits = |s: &str| s.len() <= MAX_DIGITS && s.bytes().all(|b| b.is_ascii_digit());
    if let Some((numerator, denominator)) = text.split_once('/') {
        if numerator.is_empty() || denominator.is_empty() || !digits(numerator) || !digits(denominator) {
            return None;
        }
        let (n, d): (i128, i128) = (numerator.parse().ok()?, denominator.parse().ok()?);
        return (d != 0 && d <= MAX_DENOMINATOR).then(|| Amount::new(n, d));
    }
    let (whole, fraction) = text.split_once('.').unwrap_or((text, ""));
    if (whole.is_empty() && fraction.is_empty()) || !digits(whole) || !digits(fraction) {
        return None;
    }
    let scale = 10_i128.pow(fraction.len() as u32);
    let whole: i128 = if whole.is_empty() { 0 } else { whole.parse().ok()? };
    let part: i128 = if fraction.is_empty() { 0 } else { fraction.parse().ok()? };
    Some(Amount::new(whole * scale + part, scale))
}

/// Serialises an [`Amount`] as text, `"3"` or `"2/25"`, so that no digit is lost in JSON.
pub mod as_text {
    use super::{Amount, parse};
    use serde::{Deserialize, Deserializer, Serializer, de::Error};

    /// Writes `n` or `n/d`.
    pub fn serialize<S: Serializer>(amount: &Amount, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.collect_str(amount)
    }

    /// Reads `n`, `n/d` or a decimal.
    pub fn deserialize<'de, D: Deserializer<'de>>(deserializer: D) -> Result<Amount, D::Error> {
        let text = String::deserialize(deserializer)?;
        parse(&text).ok_or_else(|| D::Error::custom(format!("`{text}` is not an amount; write 3, 0.25 or 1/3")))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn decimals_and_fractions_are_exact() {
        assert_eq!(parse("0.08"), Some(Amount::new(2, 25)));
        assert_eq!(parse(".5"), Some(Amount::new(1, 2)));
        assert_eq!(parse("1/3"), Some(Amount::new(1, 3)));
        assert_eq!(parse("12"), Some(Amount::new(12, 1)));
        for bad in ["", ".", "1/0", "1/", "/2", "-1", "1e3", "1.2.3", "1234567890"] {
            assert_eq!(parse(bad), None, "{bad}");
        }
    }
}
