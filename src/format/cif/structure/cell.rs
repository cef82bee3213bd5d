//! The cell of a data block.

use super::report::Report;
use crate::crystal::{Lattice, Parameters};
use crate::format::cif::{Block, Diagnostic};

/// Stated and computed volume may differ by this share: rounding of the parameters explains no more.
const VOLUME_TOLERANCE: f64 = 5e-3;

const NAMES: [&str; 6] = [
    "_cell_length_a",
    "_cell_length_b",
    "_cell_length_c",
    "_cell_angle_alpha",
    "_cell_angle_beta",
    "_cell_angle_gamma",
];

/// Reads the six parameters and checks that a cell can have them; a stated volume that disagrees is a warning.
pub(super) fn read(block: &Block<'_>, report: &mut Report<'_, '_>) -> Result<Lattice, Diagnostic> {
    let mut values = [0.0; 6];
    let mut place = report.block_place();
    for (value, name) in values.iter_mut().zip(NAMES) {
        let Some(found) = block.value(&[name]) else {
            let text = format!("`{name}` is missing; a structure needs all six cell parameters");
            return Err(report.error("cif::cell", report.block_place(), text));
        };
        place = found.place();
        *value = match found.number() {
            Some(number) => number.value,
            None => {
                let text =
                    format!("`{name}` is `{}`; it must be a plain number, such as 8.08 or 8.083(2)", found.text());
                return Err(report.error("cif::number", place, text));
            }
        };
    }
    let [a, b, c, alpha, beta, gamma] = values;
    let lattice = Lattice::from_parameters(&Parameters { a, b, c, alpha, beta, gamma })
        .map_err(|e| report.error("cif::cell", place, e.to_string()))?;

    if let Some(stated) = block.value(&["_cell_volume"])
        && let Some(number) = stated.number()
    {
        let volume = lattice.volume();
        if (number.value / volume - 1.0).abs() > VOLUME_TOLERANCE {
            let text = format!(
                "`_cell_volume` is {} Å³, but the cell parameters give {volume:.3} Å³; the parameters are used",
                stated.text()
            );
            report.warn("cif::volume", stated.place(), text);
        }
    }
    Ok(lattice)
}
