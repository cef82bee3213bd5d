//! Mean coordination numbers observed with oxygen.
//!
//! I. D. Brown, The Chemical Bond in Inorganic Chemistry (Oxford University Press, 2006), Table A4.1, after Acta Cryst.
//! B44, 545 (1988); nine rows, marked in the table, are from memory of the latter and not verified.

use super::Ion;
use std::sync::LazyLock;

static TABLE: LazyLock<Vec<(&'static str, i8, f64)>> = LazyLock::new(|| {
    include_str!("data/observed_coordination.tsv")
        .lines()
        .filter(|line| !line.starts_with('#'))
        .filter_map(|line| {
            let mut f = line.split('\t');
            Some((f.next()?, f.next()?.parse().ok()?, f.next()?.parse().ok()?))
        })
        .collect()
});

/// Mean number of oxygen neighbours observed around this cation in oxides and oxysalts, if tabulated.
pub fn mean_observed(ion: &Ion) -> Option<f64> {
    TABLE.iter().find(|(symbol, charge, _)| *symbol == ion.element.symbol() && *charge == ion.charge).map(|row| row.2)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ion::Element;

    #[test]
    fn the_table_is_whole() {
        assert_eq!(TABLE.len(), 56);
        let unverified = include_str!("data/observed_coordination.tsv").lines().filter(|l| l.ends_with("\tmemory"));
        assert_eq!(unverified.count(), 9);
        let silicon = Ion::new(Element::from_symbol("Si").unwrap(), 4);
        assert_eq!(mean_observed(&silicon), Some(4.02));
    }
}
