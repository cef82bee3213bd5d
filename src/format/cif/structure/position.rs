//! Positions of listed sites, from fractional or orthogonal coordinates.

use super::report::Report;
use super::sites::{CARTESIAN, FRACTIONAL};
use crate::crystal::{Cartesian, Fractional, Lattice};
use crate::format::cif::{Block, Diagnostic, Loop};
use nalgebra::{Matrix3, Vector3};

/// Largest coordinate accepted: cells away, not garbage.
const MAX_COORDINATE: f64 = 1e6;

/// Where the coordinates of a row stand, and what makes them fractional.
pub(super) enum Axes {
    Fractional([usize; 3]),
    /// Columns, and the way from the file's orthogonal axes to fractions.
    Cartesian([usize; 3], Matrix3<f64>, Vector3<f64>),
}

/// Which columns hold coordinates, and of which kind.
pub(super) fn axes(
    block: &Block<'_>,
    table: &Loop<'_>,
    lattice: &Lattice,
    report: &mut Report<'_, '_>,
) -> Result<Axes, Diagnostic> {
    let columns = |names: [&'static str; 3]| {
        let found = names.map(|name| table.column(&[name]));
        match found {
            [Some(x), Some(y), Some(z)] => Ok(Some([x, y, z])),
            [None, None, None] => Ok(None),
            _ => {
                let missing = names.iter().zip(found).find(|(_, c)| c.is_none()).map_or("", |(name, _)| *name);
                let text = format!("the site list lacks `{missing}`; it needs all three coordinates");
                Err(report.error("cif::sites", report.block_place(), text))
            }
        }
    };
    if let Some(columns) = columns(FRACTIONAL)? {
        return Ok(Axes::Fractional(columns));
    }
    let Some(columns) = columns(CARTESIAN)? else {
        return Err(report.error("cif::sites", report.block_place(), "the site list holds no coordinates".into()));
    };
    // x(orthogonal) = M x(fractional) + v, with M and v stated by the file.
    let number = |name: String| block.value(&[&name]).and_then(|v| v.number()).map(|n| n.value);
    let mut matrix = Matrix3::zeros();
    let mut complete = true;
    for i in 0..3 {
        for j in 0..3 {
            match number(format!("_atom_sites_Cartn_tran_matrix_{}{}", i + 1, j + 1)) {
                Some(value) => matrix[(i, j)] = value,
                None => complete = false,
            }
        }
    }
    if !complete {
        let text = "orthogonal coordinates without `_atom_sites_Cartn_tran_matrix_*` are taken with a along x and b in the xy plane";
        report.warn("cif::orthogonal", report.block_place(), text.into());
        let origin = Vector3::zeros();
        let to_fractions = Matrix3::from_columns(
            &[Vector3::x(), Vector3::y(), Vector3::z()].map(|axis| lattice.fractional(&Cartesian(axis)).0),
        );
        return Ok(Axes::Cartesian(columns, to_fractions, origin));
    }
    let vector = [1, 2, 3].map(|i| number(format!("_atom_sites_Cartn_tran_vector_{i}")).unwrap_or(0.0));
    match matrix.try_inverse() {
        Some(inverse) => Ok(Axes::Cartesian(columns, inverse, Vector3::from(vector))),
        None => {
            let text = "`_atom_sites_Cartn_tran_matrix_*` is singular; it spans no volume".into();
            Err(report.error("cif::orthogonal", report.block_place(), text))
        }
    }
}

/// The position of a row; `None` when it is not known.
pub(super) fn position(
    table: &Loop<'_>,
    row: usize,
    axes: &Axes,
    report: &Report<'_, '_>,
) -> Result<Option<Fractional>, Diagnostic> {
    let (Axes::Fractional(columns) | Axes::Cartesian(columns, ..)) = axes;
    let mut xyz = Vector3::zeros();
    for (x, column) in xyz.iter_mut().zip(columns) {
        let value = table.value(row, *column);
        match value.number() {
            Some(number) if number.value.abs() <= MAX_COORDINATE => *x = number.value,
            Some(_) => {
                let text =
                    format!("coordinate `{}` is out of range; it must be within ±{MAX_COORDINATE}", value.text());
                return Err(report.error("cif::number", value.place(), text));
            }
            None if value.is_unknown() || value.is_inapplicable() => return Ok(None),
            None => {
                let text =
                    format!("coordinate `{}` is no number; write a decimal such as 0.25 or 0.2624(3)", value.text());
                return Err(report.error("cif::number", value.place(), text));
            }
        }
    }
    Ok(Some(Fractional(match axes {
        Axes::Fractional(_) => xyz,
        Axes::Cartesian(_, to_fractions, origin) => to_fractions * (xyz - origin),
    })))
}
