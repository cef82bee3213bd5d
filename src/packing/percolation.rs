//! Through which windows a mobile ion gets across the crystal.
//!
//! The edges of the diagram carry every widest path (the space between spheres shrinks onto them), so joining vertices
//! along edges, widest first, finds the critical radius at which a way through the crystal opens, exactly, in one, two
//! and three dimensions.

use super::diagram::Diagram;
use super::joining::{Joined, Joining};

/// A set of interstices connected with each other for an ion of a given size.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Network {
    /// Interstices it runs through, ascending; indices into the list of interstices.
    pub interstices: Vec<usize>,
    /// In how many dimensions it goes on without end: 0 is a cage.
    pub dimension: usize,
    /// As many independent lattice translations that it connects.
    pub directions: Vec<[i64; 3]>,
}

/// For one, two and three dimensions the largest ratio (radius of the mobile ion over that of the packing sphere) that
/// gets through; `None` where spheres close every way.
pub fn critical_ratios(diagram: &Diagram) -> [Option<f64>; 3] {
    let mut order: Vec<&super::diagram::Edge> = diagram.edges.iter().filter(|e| e.bottleneck > 0.0).collect();
    order.sort_by(|a, b| b.bottleneck.total_cmp(&a.bottleneck));
    let mut joining = Joining::new(diagram.vertices.len());
    let mut critical = [None; 3];
    for edge in order {
        if let Joined::Wider(dimension) = joining.join(edge.from, edge.to, edge.shift) {
            for ratio in &mut critical[..dimension] {
                ratio.get_or_insert(edge.bottleneck);
            }
        }
    }
    critical
}

/// The networks open to an ion of this ratio, those of most dimensions first; `interstice` gives for each vertex of the
/// diagram the interstice it belongs to.
pub(super) fn networks(diagram: &Diagram, interstice: &[usize], ratio: f64) -> Vec<Network> {
    let n = diagram.vertices.len();
    let mut joining = Joining::new(n);
    for edge in diagram.edges.iter().filter(|e| e.bottleneck >= ratio) {
        joining.join(edge.from, edge.to, edge.shift);
    }
    let mut members: Vec<Vec<usize>> = vec![Vec::new(); n];
    for v in (0..n).filter(|v| diagram.vertices[*v].clearance >= ratio) {
        members[joining.root(v).0].push(interstice[v]);
    }
    let mut networks: Vec<Network> = Vec::new();
    for (root, mut interstices) in members.into_iter().enumerate().filter(|(_, m)| !m.is_empty()) {
        interstices.sort_unstable();
        interstices.dedup();
        let directions = joining.loops(root).to_vec();
        networks.push(Network { interstices, dimension: directions.len(), directions });
    }
    networks.sort_by(|a, b| b.dimension.cmp(&a.dimension).then_with(|| a.interstices.cmp(&b.interstices)));
    networks
}
