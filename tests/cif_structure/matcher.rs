//! Whether two structures are the same, whatever their cells and origins: by the distances around every atom.

use interstice::crystal::Structure;
use interstice::crystal::neighbours::NeighbourList;
use std::collections::BTreeMap;

/// Neighbours are compared up to here, Å.
const RADIUS: f64 = 4.5;
/// Distances are equal within this, Å: the decimals of cells and coordinates leave 1e-6.
const TOLERANCE: f64 = 1e-4;

/// Kind of a site: species and shares.
type Kind = Vec<(String, String)>;

fn kind(structure: &Structure, index: usize) -> Kind {
    let occupants = &structure.sites[index].occupants;
    let mut kind: Kind = occupants.iter().map(|o| (o.species.to_string(), o.occupancy.to_string())).collect();
    kind.sort();
    kind
}

/// For each kind of site the sorted lists of (kind, distance) around its sites.
fn surroundings(structure: &Structure) -> BTreeMap<Kind, Vec<Vec<(f64, Kind)>>> {
    let positions = structure.positions();
    let list = NeighbourList::new(&structure.lattice, &positions, RADIUS);
    let mut all: BTreeMap<Kind, Vec<Vec<(f64, Kind)>>> = BTreeMap::new();
    for index in 0..positions.len() {
        let around = list.of(index, RADIUS);
        let around = around.into_iter().map(|n| (n.distance, kind(structure, n.index))).collect();
        all.entry(kind(structure, index)).or_default().push(around);
    }
    all
}

fn same(a: &[(f64, Kind)], b: &[(f64, Kind)]) -> bool {
    // Neighbours at the edge of the sphere may fall out by rounding.
    let inner = |list: &[(f64, Kind)]| list.iter().filter(|(d, _)| *d < RADIUS - 0.1).count();
    let by_kind = |list: &[(f64, Kind)]| {
        let mut kinds: BTreeMap<Kind, Vec<f64>> = BTreeMap::new();
        for (d, k) in list {
            kinds.entry(k.clone()).or_default().push(*d);
        }
        kinds
    };
    let (a, b) = (&a[..inner(a)], &b[..inner(b)]);
    let (a, b) = (by_kind(a), by_kind(b));
    a.len() == b.len()
        && a.iter().zip(&b).all(|((ka, da), (kb, db))| {
            ka == kb && da.len() == db.len() && da.iter().zip(db).all(|(x, y)| (x - y).abs() < TOLERANCE)
        })
}

/// Fails unless every kind of site has the same surroundings in both, in the same proportion.
#[track_caller]
pub fn assert_alike(a: &Structure, b: &Structure, name: &str) {
    let (sa, sb) = (surroundings(a), surroundings(b));
    assert_eq!(sa.keys().collect::<Vec<_>>(), sb.keys().collect::<Vec<_>>(), "{name}: kinds");
    let ratio = b.lattice.volume() / a.lattice.volume();
    for (kind, around_a) in &sa {
        let around_b = &sb[kind];
        assert!((around_b.len() as f64 - ratio * around_a.len() as f64).abs() < 1e-3, "{name}: number of {kind:?}");
        for one in around_a {
            let in_a = around_a.iter().filter(|other| same(one, other)).count() as f64;
            let in_b = around_b.iter().filter(|other| same(one, other)).count() as f64;
            assert!((in_b - ratio * in_a).abs() < 1e-3, "{name}: surroundings of {kind:?}");
        }
    }
}
