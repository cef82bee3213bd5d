//! `--seats`: the user's own word on where ions sit.

use super::SeatingError;
use crate::ion::amount;
use crate::ion::composition::Composition;
use crate::ion::{Amount, Ion, formula};
use crate::packing::{Host, Kind, Sign};

/// An ion sent to a kind of interstice, wholly or in a stated amount.
#[derive(Clone, Debug, PartialEq)]
pub struct SeatRequest {
    /// Which ion.
    pub ion: Ion,
    /// Which kind of interstice.
    pub kind: Kind,
    /// Ions per formula unit; the whole rest if `None`.
    pub amount: Option<Amount>,
}

/// An ion sent to a role of the packing, wholly or in a stated amount.
#[derive(Clone, Debug, PartialEq)]
pub struct MemberRequest {
    /// Which ion.
    pub ion: Ion,
    /// Index of the role in the host.
    pub role: usize,
    /// Ions per formula unit; all of them if `None`.
    pub amount: Option<Amount>,
}

impl SeatRequest {
    /// Reads `Mg:tetrahedral,Al:octahedral`, `Fe(III):tetrahedral=1,Fe(III):octahedral` or `Sr:A`, where A is a sphere of
    /// the host that stands for cations; an element without a charge stands for all its ions in the composition.
    ///
    /// # Errors
    /// [`SeatingError::Request`] that names the entry and what is wrong with it.
    pub fn parse_list(
        text: &str,
        composition: &Composition,
        host: &Host,
    ) -> Result<(Vec<Self>, Vec<MemberRequest>), SeatingError> {
        let fail = |reason: String| SeatingError::Request { text: text.into(), reason };
        let (mut requests, mut members) = (Vec::new(), Vec::new());
        for entry in split_outside_parentheses(text) {
            let entry = entry.trim();
            let (ion_text, rest) =
                entry.split_once(':').ok_or_else(|| fail(format!("`{entry}` lacks the colon between ion and kind")))?;
            let (kind_text, amount) = match rest.split_once('=') {
                None => (rest.trim(), None),
                Some((kind, amount)) => {
                    let value = amount::parse(amount.trim())
                        .ok_or_else(|| fail(format!("`{}` is not an amount", amount.trim())))?;
                    (kind.trim(), Some(value))
                }
            };
            let role = host.roles.iter().position(|role| role.ion == Sign::Cation && role.name == kind_text);
            let kind = Kind::parse(kind_text);
            if kind.is_none() && role.is_none() {
                return Err(fail(format!("`{kind_text}` is not a kind of interstice")));
            }
            let ions = ions_named(ion_text.trim(), composition);
            if ions.is_empty() {
                return Err(fail(format!("`{}` is no cation of `{composition}`", ion_text.trim())));
            }
            match (role, kind) {
                (Some(role), _) => members.extend(ions.into_iter().map(|ion| MemberRequest { ion, role, amount })),
                (None, Some(kind)) => requests.extend(ions.into_iter().map(|ion| Self { ion, kind, amount })),
                (None, None) => {}
            }
        }
        Ok((requests, members))
    }
}

/// Commas inside `Co(III,ls)` do not part entries.
fn split_outside_parentheses(text: &str) -> Vec<&str> {
    let (mut depth, mut start, mut parts) = (0_i32, 0, Vec::new());
    for (at, c) in text.char_indices() {
        match c {
            '(' => depth += 1,
            ')' => depth -= 1,
            ',' if depth == 0 => {
                parts.push(&text[start..at]);
                start = at + 1;
            }
            _ => {}
        }
    }
    parts.push(&text[start..]);
    parts
}

/// Cations of the composition that `Fe` or `Fe(III)` stands for.
fn ions_named(text: &str, composition: &Composition) -> Vec<Ion> {
    let Ok(parsed) = formula::parse(text) else { return Vec::new() };
    let [formula::Part { what: formula::Named::Element { element, charge, spin }, .. }] = parsed.parts.as_slice()
    else {
        return Vec::new();
    };
    composition
        .cations()
        .map(|(ion, _)| *ion)
        .filter(|ion| ion.element == *element && charge.is_none_or(|q| q == ion.charge))
        .filter(|ion| spin.is_none_or(|s| Some(s) == ion.spin))
        .collect()
}
