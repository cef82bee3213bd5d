//! XYZ: a count, a comment line, then `symbol x y z` in Å for every atom of the cell.
//!
//! The format has neither cell nor occupancy. The comment is free text; the cell can be named there.

use crate::crystal::Structure;
use num_traits::One;
use std::fmt::Write;

/// Why a structure has no XYZ form.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum XyzError {
    /// A shared or partly vacant site: the format can only say that an atom is there.
    #[error(
        "site {site} holds {held}, and an XYZ file knows only whole atoms; order the structure first, or write a CIF"
    )]
    Shared {
        /// Index from 1.
        site: usize,
        /// Who holds it.
        held: String,
    },
}

/// The atoms of the cell on orthogonal axes, in the order of the sites. Line ends and control characters in `comment`
/// become blanks.
///
/// # Errors
/// [`XyzError::Shared`] when a site is not wholly held by one species.
pub fn write(structure: &Structure, comment: &str) -> Result<String, XyzError> {
    let comment: String = comment.chars().map(|c| if c.is_control() { ' ' } else { c }).collect();
    let mut out = format!("{}\n{comment}\n", structure.sites.len());
    for (idx, site) in structure.sites.iter().enumerate() {
        match &site.occupants[..] {
            [only] if only.occupancy.is_one() => {
                // Adding 0 turns -0 into 0.
                let r = structure.lattice.cartesian(&site.position).0.map(|x| (x * 1e8).round() / 1e8 + 0.0);
                // Writing to a `String` cannot fail.
                let _ = writeln!(out, "{:<2} {:14.8} {:14.8} {:14.8}", only.species.element.symbol(), r.x, r.y, r.z);
            }
            shared => {
                let held: Vec<String> = shared.iter().map(|o| format!("{} {}", o.occupancy, o.species)).collect();
                let held = if held.is_empty() { "nothing".into() } else { held.join(" + ") };
                return Err(XyzError::Shared { site: idx + 1, held });
            }
        }
    }
    Ok(out)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::crystal::{Fractional, Lattice, Occupant, Parameters, Site};
    use crate::ion::{Amount, Element, Ion};

    fn halite() -> Structure {
        let lattice =
            Lattice::from_parameters(&Parameters { a: 4.0, b: 4.0, c: 5.0, alpha: 90.0, beta: 90.0, gamma: 120.0 })
                .unwrap();
        let species = |symbol, q| Ion::new(Element::from_symbol(symbol).unwrap(), q).into();
        let sites = vec![
            Site::full(Fractional::new(0.0, 0.0, 0.0), species("Na", 1)),
            Site::full(Fractional::new(0.0, 0.5, 0.5), species("Cl", -1)),
        ];
        Structure { lattice, sites }
    }

    #[test]
    fn atoms_stand_on_orthogonal_axes() {
        let text = write(&halite(), "two\nlines").unwrap();
        assert_eq!(
            text,
            "2\ntwo lines\nNa     0.00000000     0.00000000     0.00000000\n\
             Cl    -1.00000000     1.73205081     2.50000000\n"
        );
    }

    #[test]
    fn shared_sites_are_refused() {
        let mut structure = halite();
        let half = Occupant { occupancy: Amount::new(1, 2), ..structure.sites[1].occupants[0] };
        structure.sites[1].occupants = [half].into();
        let error = write(&structure, "").unwrap_err().to_string();
        assert_eq!(
            error,
            "site 2 holds 1/2 Cl1-, and an XYZ file knows only whole atoms; order the structure first, or write a CIF"
        );
    }
}
