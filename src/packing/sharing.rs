//! How the polyhedra of two interstices share spheres: a corner, an edge or a face (Pauling's third rule asks).

use super::host::Host;
use super::interstice::{Contact, Interstice};
use nalgebra::Vector3;
use std::fmt;

/// What two polyhedra have in common.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Sharing {
    /// No sphere.
    Nothing,
    /// One sphere.
    Corner,
    /// Two.
    Edge,
    /// Three or more.
    Face,
}

impl fmt::Display for Sharing {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.pad(match self {
            Self::Nothing => "nothing",
            Self::Corner => "corner",
            Self::Edge => "edge",
            Self::Face => "face",
        })
    }
}

/// Two interstices that share spheres.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Shared {
    /// Index of the one, in its own cell.
    pub first: usize,
    /// Index of the other.
    pub second: usize,
    /// Cell of the other, relative to that of the first.
    pub image: [i32; 3],
    /// Number of spheres in common.
    pub spheres: usize,
    /// What that makes.
    pub sharing: Sharing,
    /// Distance between the centres, in radii of the packing sphere.
    pub distance: f64,
}

/// What an interstice shares with the image of another in the cell `image`, and the number of spheres.
pub fn sharing(first: &Interstice, second: &Interstice, image: [i32; 3]) -> (Sharing, usize) {
    let moved = |c: &Contact| (c.sphere, [0, 1, 2].map(|k| c.image[k] + image[k]));
    let common = second.shell.iter().filter(|c| first.shell.iter().any(|d| (d.sphere, d.image) == moved(c))).count();
    (named(common), common)
}

fn named(common: usize) -> Sharing {
    match common {
        0 => Sharing::Nothing,
        1 => Sharing::Corner,
        2 => Sharing::Edge,
        _ => Sharing::Face,
    }
}

/// All that each interstice shares with others and with its own images; every pair appears from both sides. In order of
/// first, distance, second and image.
pub fn shared(host: &Host, interstices: &[Interstice]) -> Vec<Shared> {
    // For each sphere (in its own cell) the interstices around it and the cells they lie in.
    let mut around: Vec<Vec<(usize, [i32; 3])>> = vec![Vec::new(); host.spheres.len()];
    for (i, interstice) in interstices.iter().enumerate() {
        for contact in &interstice.shell {
            around[contact.sphere].push((i, contact.image.map(|k| -k)));
        }
    }
    let mut all = Vec::new();
    for (first, interstice) in interstices.iter().enumerate() {
        let mut others: Vec<(usize, [i32; 3])> = Vec::new();
        for contact in &interstice.shell {
            others.extend(
                around[contact.sphere].iter().map(|(i, cell)| (*i, [0, 1, 2].map(|k| cell[k] + contact.image[k]))),
            );
        }
        others.sort_unstable();
        let mut pairs: Vec<Shared> = others
            .chunk_by(|a, b| a == b)
            .filter(|same| same[0] != (first, [0; 3]))
            .map(|same| {
                let (second, image) = same[0];
                let apart =
                    interstices[second].position.0 + Vector3::from(image.map(f64::from)) - interstice.position.0;
                let distance = (host.lattice.basis() * apart).norm();
                Shared { first, second, image, spheres: same.len(), sharing: named(same.len()), distance }
            })
            .collect();
        let grid = |d: f64| (d * 1e6).round() as i64;
        pairs.sort_by_key(|p| (grid(p.distance), p.second, p.image));
        all.extend(pairs);
    }
    all
}
