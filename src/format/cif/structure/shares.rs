//! Occupancies of listed sites as exact amounts.

use super::report::Report;
use super::sites::MAX_SUM;
use crate::format::cif::{Diagnostic, Value};
use crate::ion::Amount;
use num_traits::One;

/// Occupancies already read, by their text: a file has few different ones.
#[derive(Default)]
pub(super) struct Shares {
    last: Option<(String, Amount)>,
}

impl Shares {
    pub fn read(&mut self, value: Value<'_>, report: &mut Report<'_, '_>) -> Result<Amount, Diagnostic> {
        let text = value.text();
        if let Some((seen, share)) = &self.last
            && *seen == text
        {
            return Ok(*share);
        }
        if value.is_inapplicable() {
            return Ok(Amount::one());
        }
        if value.is_unknown() {
            report.warn("cif::occupancy", value.place(), "an occupancy of `?` is taken as 1".into());
            return Ok(Amount::one());
        }
        let Some(number) = value.number() else {
            report.warn(
                "cif::occupancy",
                value.place(),
                format!("the occupancy `{text}` is no number and is taken as 1"),
            );
            return Ok(Amount::one());
        };
        // More digits than an exact amount holds are rounded to 1e-9.
        let rounded = || Amount::new((number.value * 1e9).round() as i128, 1_000_000_000);
        if !(0.0..=MAX_SUM.0 as f64 / MAX_SUM.1 as f64).contains(&number.value) {
            let text = format!("the occupancy `{text}` is out of range; it must be from 0 to 1");
            return Err(report.error("cif::occupancy", value.place(), text));
        }
        let mut share = number.exact().unwrap_or_else(rounded);
        if share > Amount::one() {
            report.warn("cif::occupancy", value.place(), format!("the occupancy `{text}` is taken as 1"));
            share = Amount::one();
        }
        self.last = Some((text.into_owned(), share));
        Ok(share)
    }
}
