//! Ionic radii by ion, coordination number, spin and set.
//!
//! R. D. Shannon, Acta Cryst. A32, 751 (1976), doi:10.1107/S0567739476001551, Table 1, whole. The two sets are never
//! mixed: a cation's crystal radius is 0.14 Å larger than its effective one, an anion's 0.14 Å smaller. Radii of ions
//! charged above +5, or smaller than 0.2 Å, are nominal.

use super::formula::numeral;
use super::{Element, Ion, Spin};
use serde::{Deserialize, Serialize};
use std::fmt;
use std::sync::LazyLock;

/// Which of Shannon's two columns.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum RadiusSet {
    /// Crystal radii (O²⁻, VI: 1.26 Å); truer ratios, the default.
    #[default]
    Crystal,
    /// Effective ionic radii (O²⁻, VI: 1.40 Å).
    Effective,
}

/// One row of the table.
#[derive(Clone, Debug, PartialEq)]
pub struct Row {
    /// Symbol; `OH` and `D` occur too.
    pub symbol: &'static str,
    /// Charge, e.
    pub charge: i8,
    /// Coordination number.
    pub coordination: u8,
    /// `SQ` for square, `PY` for pyramidal, else empty.
    pub shape: &'static str,
    /// Spin, where the table parts them.
    pub spin: Option<Spin>,
    /// Effective ionic radius, Å.
    pub effective: f64,
    /// Crystal radius, Å.
    pub crystal: f64,
    /// Marked by the paper as most reliable.
    pub reliable: bool,
    /// Not in the 1976 paper.
    pub added_later: bool,
}

impl Row {
    /// The radius in one set, Å.
    pub fn angstrom(&self, set: RadiusSet) -> f64 {
        match set {
            RadiusSet::Crystal => self.crystal,
            RadiusSet::Effective => self.effective,
        }
    }
}

/// What a radius rests on.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum Basis {
    /// In the table.
    Tabulated,
    /// Linear in the coordination number between two rows.
    Interpolated {
        /// Coordination number of the row below.
        from: u8,
        /// Coordination number of the row above.
        to: u8,
    },
    /// Outside the table's range; the nearest row as it stands.
    Nearest {
        /// Its coordination number.
        coordination: u8,
    },
}

/// A radius and how sure it is.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Radius {
    /// Length, Å.
    pub angstrom: f64,
    /// What it rests on.
    pub basis: Basis,
}

/// `0.720`; an interpolated value ends in `~`, one of another coordination number in `?`.
impl fmt::Display for Radius {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let mark = match self.basis {
            Basis::Tabulated => "",
            Basis::Interpolated { .. } => "~",
            Basis::Nearest { .. } => "?",
        };
        f.pad(&format!("{:.3}{mark}", self.angstrom))
    }
}

/// An ion that the table lacks.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("Shannon (1976) tabulates no radius of {ion}{hint}")]
pub struct RadiusError {
    /// The ion.
    pub ion: Ion,
    /// What the table has of the element.
    pub hint: String,
}

/// The table: 512 rows.
pub fn table() -> &'static [Row] {
    static TABLE: LazyLock<Vec<Row>> = LazyLock::new(|| {
        include_str!("data/shannon.tsv").lines().filter(|line| !line.starts_with('#')).filter_map(row).collect()
    });
    &TABLE
}

fn row(line: &'static str) -> Option<Row> {
    let field: Vec<&'static str> = line.split('\t').collect();
    let (number, shape) = match field.get(2)?.find(['S', 'P']) {
        Some(at) => field[2].split_at(at),
        None => (field[2], ""),
    };
    Some(Row {
        symbol: field[0],
        charge: field[1].parse().ok()?,
        coordination: coordination_number(number)?,
        shape,
        spin: match *field.get(3)? {
            "HS" => Some(Spin::High),
            "LS" => Some(Spin::Low),
            _ => None,
        },
        effective: field.get(4)?.parse().ok()?,
        crystal: field.get(5)?.parse().ok()?,
        reliable: *field.get(6)? == "1",
        added_later: *field.get(7)? == "1",
    })
}

fn coordination_number(roman: &str) -> Option<u8> {
    const NUMERALS: [&str; 14] =
        ["I", "II", "III", "IV", "V", "VI", "VII", "VIII", "IX", "X", "XI", "XII", "XIII", "XIV"];
    NUMERALS.iter().position(|n| *n == roman).map(|i| i as u8 + 1)
}

/// Rows of one element and charge, in the table's order.
pub fn rows(element: Element, charge: i8) -> impl Iterator<Item = &'static Row> {
    table().iter().filter(move |row| row.symbol == element.symbol() && row.charge == charge)
}

/// Radius of `ion` at a coordination number.
///
/// Square and pyramidal rows are passed over. Where the table parts spins and the ion states none, high spin is taken,
/// but low spin for Co³⁺ and Ni³⁺, as in nearly all oxides (common practice, no source); where the stated spin has no
/// row, the other's are used. Between tabulated coordination numbers the radius is interpolated linearly; outside
/// their range it is that of the nearest.
///
/// # Errors
/// [`RadiusError`] when the table has no row of this ion.
pub fn radius(ion: &Ion, coordination: u8, set: RadiusSet) -> Result<Radius, RadiusError> {
    let spin = ion.spin.unwrap_or(match (ion.element.symbol(), ion.charge) {
        ("Co" | "Ni", 3) => Spin::Low,
        _ => Spin::High,
    });
    let plain = || rows(ion.element, ion.charge).filter(|row| row.shape.is_empty());
    let mut points: Vec<(u8, f64)> = Vec::new();
    let mut numbers: Vec<u8> = plain().map(|row| row.coordination).collect();
    numbers.sort_unstable();
    numbers.dedup();
    // An ion known only in a square (Pd²⁺ has other rows, Cu³⁺ none) is measured there.
    let any = || rows(ion.element, ion.charge);
    if numbers.is_empty() {
        points.extend(any().map(|row| (row.coordination, row.angstrom(set))));
    }
    for n in numbers {
        let at = |wanted: Option<Spin>| plain().find(|row| row.coordination == n && row.spin == wanted);
        let other = if spin == Spin::High { Spin::Low } else { Spin::High };
        if let Some(row) = at(Some(spin)).or_else(|| at(None)).or_else(|| at(Some(other))) {
            points.push((n, row.angstrom(set)));
        }
    }
    points.sort_by_key(|p| p.0);
    let above = points.iter().find(|p| p.0 >= coordination);
    let below = points.iter().rev().find(|p| p.0 <= coordination);
    match (below, above) {
        (Some(p), Some(_)) if p.0 == coordination => Ok(Radius { angstrom: p.1, basis: Basis::Tabulated }),
        (Some(p), Some(q)) => {
            let t = f64::from(coordination - p.0) / f64::from(q.0 - p.0);
            let basis = Basis::Interpolated { from: p.0, to: q.0 };
            Ok(Radius { angstrom: p.1 + t * (q.1 - p.1), basis })
        }
        (Some(p), None) | (None, Some(p)) => Ok(Radius { angstrom: p.1, basis: Basis::Nearest { coordination: p.0 } }),
        (None, None) => Err(RadiusError { ion: *ion, hint: hint(ion) }),
    }
}

fn hint(ion: &Ion) -> String {
    let mut charges: Vec<i8> = table().iter().filter(|r| r.symbol == ion.element.symbol()).map(|r| r.charge).collect();
    charges.sort_unstable();
    charges.dedup();
    if charges.is_empty() {
        return format!(", nor of any other ion of {}", ion.element.name().to_lowercase());
    }
    let list: Vec<String> = charges.iter().map(|q| format!("{}({})", ion.element, numeral(*q))).collect();
    format!("; of this element it has {}", list.join(", "))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn ion(symbol: &str, charge: i8) -> Ion {
        Ion::new(Element::from_symbol(symbol).unwrap(), charge)
    }

    #[test]
    fn the_table_is_whole() {
        assert_eq!(table().len(), 512);
        assert_eq!(table().iter().filter(|r| r.added_later).count(), 15);
        let odd: Vec<_> = table()
            .iter()
            .filter(|r| (r.crystal - r.effective - 0.14 * f64::from(r.charge.signum())).abs() > 1e-9)
            .map(|r| (r.symbol, r.charge))
            .collect();
        assert_eq!(odd, [("N", 5)], "the paper's own exception");
    }

    /// Shannon (1976), Table 1, effective ionic radii, from memory of the printed table.
    #[test]
    fn printed_values_are_found() {
        for (symbol, charge, n, want) in [
            ("Li", 1, 4, 0.59),
            ("Li", 1, 6, 0.76),
            ("Na", 1, 6, 1.02),
            ("K", 1, 6, 1.38),
            ("K", 1, 12, 1.64),
            ("Cs", 1, 8, 1.74),
            ("Mg", 2, 4, 0.57),
            ("Mg", 2, 6, 0.72),
            ("Ca", 2, 6, 1.00),
            ("Ca", 2, 8, 1.12),
            ("Sr", 2, 12, 1.44),
            ("Ba", 2, 12, 1.61),
            ("Al", 3, 4, 0.39),
            ("Al", 3, 6, 0.535),
            ("Y", 3, 8, 1.019),
            ("La", 3, 12, 1.36),
            ("Gd", 3, 8, 1.053),
            ("Ce", 4, 8, 0.97),
            ("Zr", 4, 8, 0.84),
            ("Ti", 4, 6, 0.605),
            ("Si", 4, 4, 0.26),
            ("Nb", 5, 6, 0.64),
            ("W", 6, 6, 0.60),
            ("Zn", 2, 4, 0.60),
            ("Ni", 2, 6, 0.69),
            ("O", -2, 6, 1.40),
            ("O", -2, 4, 1.38),
            ("F", -1, 6, 1.33),
            ("Cl", -1, 6, 1.81),
            ("S", -2, 6, 1.84),
            ("I", -1, 6, 2.20),
            ("Fe", 2, 6, 0.780),
            ("Fe", 3, 6, 0.645),
            ("Fe", 3, 4, 0.49),
        ] {
            let r = radius(&ion(symbol, charge), n, RadiusSet::Effective).unwrap();
            assert_eq!((r.angstrom, r.basis), (want, Basis::Tabulated), "{symbol}{charge:+} {n}");
        }
    }

    /// The same table: Fe²⁺ VI 0.61 low and 0.78 high spin, Co³⁺ VI 0.545 low and 0.61 high spin, Ni³⁺ VI 0.56 low spin;
    /// crystal set +0.14.
    #[test]
    fn spin_and_set_are_told_apart() {
        let low = Ion { spin: Some(Spin::Low), ..ion("Fe", 2) };
        assert_eq!(radius(&low, 6, RadiusSet::Effective).unwrap().angstrom, 0.61);
        assert_eq!(radius(&ion("Co", 3), 6, RadiusSet::Effective).unwrap().angstrom, 0.545);
        assert_eq!(radius(&ion("Ni", 3), 6, RadiusSet::Effective).unwrap().angstrom, 0.56);
        let high = Ion { spin: Some(Spin::High), ..ion("Co", 3) };
        assert_eq!(radius(&high, 6, RadiusSet::Effective).unwrap().angstrom, 0.61);
        assert_eq!(radius(&ion("O", -2), 6, RadiusSet::Crystal).unwrap().angstrom, 1.26);
        assert_eq!(radius(&ion("Mg", 2), 6, RadiusSet::Crystal).unwrap().angstrom, 0.86);
    }

    #[test]
    fn gaps_are_marked() {
        let between = radius(&ion("Mg", 2), 7, RadiusSet::Effective).unwrap();
        assert_eq!(between.basis, Basis::Interpolated { from: 6, to: 8 });
        assert!((between.angstrom - 0.805).abs() < 1e-12);
        assert_eq!(between.to_string(), "0.805~");
        let outside = radius(&ion("Cl", -1), 4, RadiusSet::Effective).unwrap();
        assert_eq!(outside.basis, Basis::Nearest { coordination: 6 });
        let missing = radius(&ion("Sn", 2), 6, RadiusSet::Effective).unwrap_err();
        assert!(missing.to_string().contains("Sn(IV)"), "{missing}");
    }
}
