//! Plain XYZ: the number of atoms, a comment, and a line `symbol x y z` in Å for each.

use crate::crystal::Structure;
use std::fmt::Write as _;

/// A site that the format cannot hold.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error(
    "XYZ holds whole atoms only, but {sites} sites are shared or part empty; write CIF, or choose an ordering other than `average`"
)]
pub struct XyzError {
    /// How many such sites.
    pub sites: usize,
}

/// Writes all atoms of the cell; the comment's line ends are replaced by blanks.
///
/// # Errors
/// [`XyzError`] when a site is shared or part empty.
pub fn write(structure: &Structure, comment: &str) -> Result<String, XyzError> {
    let whole = |occupants: &[crate::crystal::Occupant]| matches!(occupants, [one] if one.occupancy == crate::ion::Amount::from(1));
    let sites = structure.sites.iter().filter(|site| !whole(&site.occupants)).count();
    if sites > 0 {
        return Err(XyzError { sites });
    }
    let mut out = String::with_capacity(40 * structure.sites.len() + 100);
    let _ = writeln!(out, "{}\n{}", structure.sites.len(), comment.replace(['\n', '\r'], " "));
    for site in &structure.sites {
        let r = structure.lattice.cartesian(&site.position).0;
        let symbol = site.occupants[0].species.element.symbol();
        // Adding zero turns −0 into 0.
        let _ = writeln!(out, "{symbol:<2} {:>14.8} {:>14.8} {:>14.8}", r.x + 0.0, r.y + 0.0, r.z + 0.0);
    }
    Ok(out)
}
