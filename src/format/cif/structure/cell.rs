//! The cell of a data block.

use super::report::Report;
use crate::crystal::lattice::LatticeError;
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
    let mut places = [report.block_place(); 6];
    for ((value, place), name) in values.iter_mut().zip(&mut places).zip(NAMES) {
        let Some(found) = block.value(&[name]) else {
            let text = format!("`{name}` is missing; a structure needs all six cell parameters");
            return Err(report.error("cif::cell", report.block_place(), text));
        };
        *place = found.place();
        *value = match found.number() {
            Some(number) => number.value,
            None => {
                let text =
                    format!("`{name}` is `{}`; it must be a plain number, such as 8.08 or 8.083(2)", found.text());
                return Err(report.error("cif::number", *place, text));
            }
        };
    }
    let [a, b, c, alpha, beta, gamma] = values;
    let lattice = Lattice::from_parameters(&Parameters { a, b, c, alpha, beta, gamma }).map_err(|error| {
        let at = match &error {
            LatticeError::OutOfRange { name, .. } => NAMES.iter().position(|n| n.ends_with(&name.replace(' ', "_"))),
            LatticeError::Flat { .. } => None,
        };
        report.error("cif::cell", places[at.unwrap_or(3)], error.to_string())
    })?;
    check_volume(block, lattice.volume(), report);
    Ok(lattice)
}

/// A stated volume is for checking only.
fn check_volume(block: &Block<'_>, volume: f64, report: &mut Report<'_, '_>) {
    let Some(stated) = block.value(&["_cell_volume"]).filter(|v| !v.is_unknown() && !v.is_inapplicable()) else {
        return;
    };
    let says = match stated.number() {
        None => ", which is no number".to_owned(),
        Some(number) if (number.value / volume - 1.0).abs() > VOLUME_TOLERANCE => {
            format!(" Å³, but the cell parameters give {volume:.3} Å³")
        }
        Some(_) => return,
    };
    let text = format!("`_cell_volume` is {}{says}; the parameters are used", stated.text());
    report.warn("cif::volume", stated.place(), text);
}
