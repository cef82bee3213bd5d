//! The interstices of a host, as a table and as JSON.

use super::table::layout;
use crate::packing::{Host, Interstice};
use crate::seating::{Offer, offers};
use serde::Serialize;

/// One orbit of interstices.
#[derive(Debug, Serialize)]
pub struct Row {
    /// Kind.
    pub kind: String,
    /// Spheres around it.
    pub coordination: usize,
    /// Interstices per packing sphere, `2` or `1/2`.
    pub per_sphere: String,
    /// Radius over the packing sphere's.
    pub ratio: f64,
    /// Positions in the primitive cell, fractional, one list an orbit.
    pub orbits: Vec<Vec<[f64; 3]>>,
}

/// The host and its kinds of interstice.
#[derive(Debug, Serialize)]
pub struct Holes {
    /// Name.
    pub host: String,
    /// Layer letters and h/c symbols, for close packings.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub stacking: Option<[String; 2]>,
    /// Primitive lattice: a, b, c in sphere radii, angles in degrees.
    pub primitive_cell: crate::crystal::Parameters,
    /// Spheres in the primitive cell.
    pub spheres: usize,
    /// Kinds, smallest first.
    pub interstices: Vec<Row>,
}

/// Gathers what there is to say.
pub fn gather(host: &Host, found: &[Interstice]) -> Holes {
    let row = |offer: &Offer| {
        let mut orbits: Vec<(usize, Vec<[f64; 3]>)> = Vec::new();
        for &idx in &offer.interstices {
            let position = found[idx].position.0.into();
            match orbits.iter_mut().find(|(o, _)| *o == found[idx].orbit) {
                Some((_, list)) => list.push(position),
                None => orbits.push((found[idx].orbit, vec![position])),
            }
        }
        Row {
            kind: offer.kind.to_string(),
            coordination: offer.coordination,
            per_sphere: offer.per_sphere.to_string(),
            ratio: offer.ratio,
            orbits: orbits.into_iter().map(|(_, list)| list).collect(),
        }
    };
    Holes {
        host: host.name.clone(),
        stacking: host.stacking.as_ref().map(|s| [s.to_string(), s.symbols()]),
        primitive_cell: host.lattice.parameters(),
        spheres: host.spheres.len(),
        interstices: offers(host, found).iter().map(row).collect(),
    }
}

/// The table that people read.
pub fn text(holes: &Holes) -> String {
    let p = &holes.primitive_cell;
    let mut out = holes.host.to_string();
    if let Some([letters, symbols]) = &holes.stacking {
        out += &format!(", layers {letters} ({symbols})");
    }
    out += &format!(
        "\nprimitive cell: {} spheres of radius 1; a {:.4}, b {:.4}, c {:.4}, alpha {:.2}, beta {:.2}, gamma {:.2}\n\n",
        holes.spheres, p.a, p.b, p.c, p.alpha, p.beta, p.gamma
    );
    let rows: Vec<Vec<String>> = holes
        .interstices
        .iter()
        .map(|r| {
            let first = r.orbits.first().and_then(|o| o.first()).copied().unwrap_or_default();
            vec![
                r.kind.clone(),
                r.coordination.to_string(),
                r.per_sphere.clone(),
                format!("{:.6}", r.ratio),
                r.orbits.iter().map(|o| o.len().to_string()).collect::<Vec<_>>().join("+"),
                format!("{:.4} {:.4} {:.4}", first[0], first[1], first[2]),
            ]
        })
        .collect();
    out + &layout(&["kind", "CN", "per sphere", "ratio", "in cell", "first at"], &rows)
}
