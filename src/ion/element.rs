//! The chemical elements: symbol, name, standard atomic weight, electronegativity, oxidation states.
//!
//! Data and their sources: `data/elements.tsv`.

use std::fmt;
use std::sync::LazyLock;

/// A chemical element, held by its atomic number (1 to 118).
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Element(u8);

struct Row {
    symbol: &'static str,
    name: &'static str,
    weight: f64,
    standard_weight: bool,
    electronegativity: Option<f64>,
    main: Vec<i8>,
    extended: Vec<i8>,
    dominant: Vec<i8>,
}

static TABLE: LazyLock<Vec<Row>> = LazyLock::new(|| {
    let states = |field: &str| field.split(',').filter_map(|s| s.trim_start_matches('+').parse().ok()).collect();
    include_str!("data/elements.tsv")
        .lines()
        .filter(|line| !line.starts_with('#'))
        .map(|line| {
            let field: Vec<&'static str> = line.split('\t').collect();
            Row {
                symbol: field[1],
                name: field[2],
                weight: field[3].parse().unwrap_or(f64::NAN),
                standard_weight: field[4] == "0",
                electronegativity: field[5].parse().ok(),
                main: states(field[6]),
                extended: states(field[7]),
                dominant: states(field[8]),
            }
        })
        .collect()
});

impl Element {
    /// The element of this symbol, spelt exactly (`Co` is not `CO`).
    pub fn from_symbol(symbol: &str) -> Option<Self> {
        TABLE.iter().position(|row| row.symbol == symbol).map(|idx| Self(idx as u8 + 1))
    }

    /// The element of this atomic number, 1 to 118.
    pub fn from_number(number: u8) -> Option<Self> {
        (1..=118).contains(&number).then_some(Self(number))
    }

    /// All elements in order of atomic number.
    pub fn all() -> impl Iterator<Item = Self> {
        (1..=118).map(Self)
    }

    fn row(self) -> &'static Row {
        &TABLE[usize::from(self.0) - 1]
    }

    /// Atomic number.
    pub fn number(self) -> u8 {
        self.0
    }

    /// Symbol, `Fe`.
    pub fn symbol(self) -> &'static str {
        self.row().symbol
    }

    /// English name, `Iron`.
    pub fn name(self) -> &'static str {
        self.row().name
    }

    /// Standard atomic weight, or the mass of one isotope where there is none (see [`Self::has_standard_weight`]); u.
    pub fn weight(self) -> f64 {
        self.row().weight
    }

    /// Whether the element has a standard atomic weight; those without one have no stable isotope.
    pub fn has_standard_weight(self) -> bool {
        self.row().standard_weight
    }

    /// Pauling electronegativity, dimensionless, where one is tabulated.
    pub fn electronegativity(self) -> Option<f64> {
        self.row().electronegativity
    }

    /// Main oxidation states, in e, ascending.
    pub fn main_states(self) -> &'static [i8] {
        &self.row().main
    }

    /// Rarer oxidation states, in e, ascending.
    pub fn extended_states(self) -> &'static [i8] {
        &self.row().extended
    }

    /// Oxidation states in oxides and halides, most common first, in e.
    pub fn dominant_states(self) -> &'static [i8] {
        &self.row().dominant
    }
}

impl fmt::Display for Element {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.pad(self.symbol())
    }
}

impl fmt::Debug for Element {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.symbol())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_table_is_whole() {
        assert_eq!(TABLE.len(), 118);
        for (idx, row) in TABLE.iter().enumerate() {
            assert!(row.weight.is_finite(), "{}", row.symbol);
            assert_eq!(Element::from_symbol(row.symbol).map(Element::number), Some(idx as u8 + 1));
        }
    }

    /// CIAAW abridged standard atomic weights (2021), from memory of the printed table.
    #[test]
    fn weights_are_the_standard_ones() {
        for (symbol, weight) in [("H", 1.008), ("O", 15.999), ("Mg", 24.305), ("Fe", 55.845), ("Gd", 157.25)] {
            assert_eq!(Element::from_symbol(symbol).unwrap().weight(), weight, "{symbol}");
        }
        assert!(!Element::from_symbol("Tc").unwrap().has_standard_weight());
        assert!(Element::from_symbol("U").unwrap().has_standard_weight());
    }
}
