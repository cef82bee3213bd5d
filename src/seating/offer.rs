//! What a host offers: its interstices gathered by kind, with the range of radius ratio that each suits.

use crate::ion::Amount;
use crate::packing::{Class, Host, Interstice, Kind, Sign, interstices};
use std::sync::LazyLock;

/// Two interstices of one kind are the same offer when their ratios differ by less than this.
const SAME_RATIO: f64 = 1e-6;

/// Hosts whose interstices make the ladder of critical ratios.
const LADDER_HOSTS: [&str; 4] = ["ccp", "hcp", "bcc", "primitive-cubic"];

/// All interstices of one kind and size in a host.
#[derive(Clone, Debug)]
pub struct Offer {
    /// Their kind.
    pub kind: Kind,
    /// Number of spheres around each.
    pub coordination: usize,
    /// Critical radius ratio: that of the interstice itself, computed from the packing; dimensionless.
    pub ratio: f64,
    /// Critical ratio of the next larger kind of interstice in any named packing; infinite if there is none.
    pub next_ratio: f64,
    /// Enclosed on all sides, or a saddle, which is taken by the user's word only.
    pub class: Class,
    /// Interstices per anion of the packing.
    pub per_sphere: Amount,
    /// Mean distance from the centre to its spheres, in radii of the packing sphere.
    pub distance: f64,
    /// Distance to the farthest of them, in the same unit.
    pub reach: f64,
    /// Indices into the list of interstices of the host's primitive cell.
    pub interstices: Vec<usize>,
}

/// A kind of interstice that some named packing has.
#[derive(Clone, Debug)]
pub struct Rung {
    /// Kind.
    pub kind: Kind,
    /// Number of spheres around it.
    pub coordination: usize,
    /// Critical ratio.
    pub ratio: f64,
    /// Packings that have it, by name.
    pub hosts: Vec<&'static str>,
}

/// Kinds of interstice of the named packings, smallest ratio first; computed, not listed.
pub fn ladder() -> &'static [Rung] {
    static LADDER: LazyLock<Vec<Rung>> = LazyLock::new(|| {
        let mut rungs: Vec<Rung> = Vec::new();
        for name in LADDER_HOSTS {
            let Ok(found) = Host::parse(name).map(|host| interstices(&host).unwrap_or_default()) else { continue };
            for hole in found {
                let same = |r: &&mut Rung| r.kind == hole.kind && (r.ratio - hole.ratio).abs() < SAME_RATIO;
                match rungs.iter_mut().find(same) {
                    Some(rung) if !rung.hosts.contains(&name) => rung.hosts.push(name),
                    Some(_) => {}
                    None => rungs.push(Rung {
                        kind: hole.kind,
                        coordination: hole.shell.len(),
                        ratio: hole.ratio,
                        hosts: vec![name],
                    }),
                }
            }
        }
        rungs.sort_by(|a, b| a.ratio.total_cmp(&b.ratio));
        rungs
    });
    &LADDER
}

/// The interstices of a host gathered by kind, smallest ratio first. Those that touch a sphere for cations are left out:
/// no cation is put beside one.
pub fn offers(host: &Host, found: &[Interstice]) -> Vec<Offer> {
    let is_anion = |sphere: usize| host.roles[host.role[sphere]].ion == Sign::Anion;
    let mut offers: Vec<Offer> = Vec::new();
    for (idx, hole) in found.iter().enumerate().filter(|(_, h)| h.shell.iter().all(|c| is_anion(c.sphere))) {
        let same =
            |o: &&mut Offer| (o.kind, o.class) == (hole.kind, hole.class) && (o.ratio - hole.ratio).abs() < SAME_RATIO;
        if let Some(offer) = offers.iter_mut().find(same) {
            offer.interstices.push(idx);
            continue;
        }
        let coordination = hole.shell.len();
        let larger = |rung: &&Rung| rung.coordination > coordination && rung.ratio > hole.ratio + SAME_RATIO;
        offers.push(Offer {
            kind: hole.kind,
            coordination,
            ratio: hole.ratio,
            next_ratio: ladder().iter().find(larger).map_or(f64::INFINITY, |rung| rung.ratio),
            class: hole.class,
            per_sphere: Amount::from(0),
            distance: distance(hole),
            reach: hole.shell.iter().map(|c| c.distance).fold(1.0 + hole.ratio, f64::max),
            interstices: vec![idx],
        });
    }
    let anions = (0..host.spheres.len()).filter(|i| is_anion(*i)).count().max(1);
    for offer in &mut offers {
        offer.per_sphere = Amount::new(offer.interstices.len() as i128, anions as i128);
    }
    offers.sort_by(|a, b| a.ratio.total_cmp(&b.ratio));
    offers
}

/// Mean distance of the spheres; that of the nearest where all are equally near.
fn distance(hole: &Interstice) -> f64 {
    let nearest = 1.0 + hole.ratio;
    if hole.shell.iter().all(|c| c.distance - nearest < SAME_RATIO) {
        return nearest;
    }
    hole.shell.iter().map(|c| c.distance).sum::<f64>() / hole.shell.len() as f64
}
