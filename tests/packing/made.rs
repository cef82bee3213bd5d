//! Hosts made from hosts: supercells, displaced spheres, other orders; and what is counted in them.

use interstice::crystal::{Cartesian, Fractional, Lattice};
use interstice::packing::{Host, Interstice};
use nalgebra::{Matrix3, Vector3};
use rand::rngs::ChaCha8Rng;
use rand::{Rng, SeedableRng};
use std::collections::BTreeMap;

/// A number in [0, 1) that is the same on every machine.
pub fn uniform(rng: &mut ChaCha8Rng) -> f64 {
    (rng.next_u64() >> 11) as f64 / (1_u64 << 53) as f64
}

pub fn seeded(seed: u64) -> ChaCha8Rng {
    ChaCha8Rng::seed_from_u64(seed)
}

/// A direction, uniform on the sphere.
pub fn direction(rng: &mut ChaCha8Rng) -> Vector3<f64> {
    loop {
        let v = Vector3::new(uniform(rng), uniform(rng), uniform(rng)) * 2.0 - Vector3::repeat(1.0);
        if (0.01..=1.0).contains(&v.norm_squared()) {
            return v.normalize();
        }
    }
}

/// The host in the cell (a, b, c) P of its own: all spheres, in that cell.
pub fn transformed(host: &Host, p: [[i32; 3]; 3]) -> Host {
    let p = Matrix3::from_fn(|i, j| f64::from(p[i][j]));
    let lattice = Lattice::from_basis(host.lattice.basis() * p).unwrap();
    let index = p.determinant().round() as usize;
    let inverse = p.try_inverse().unwrap();
    let (mut spheres, mut role) = (Vec::new(), Vec::new());
    for (sphere, r) in host.spheres.iter().zip(&host.role) {
        let mut images: Vec<Fractional> = Vec::new();
        let reach = 12;
        'search: for i in -reach..=reach {
            for j in -reach..=reach {
                for k in -reach..=reach {
                    let shift = Vector3::new(f64::from(i), f64::from(j), f64::from(k));
                    let image = Fractional(inverse * (sphere.0 + shift)).reduced();
                    if images.iter().all(|other| lattice.distance(other, &image) > 1e-6) {
                        images.push(image);
                        if images.len() == index {
                            break 'search;
                        }
                    }
                }
            }
        }
        assert_eq!(images.len(), index);
        role.extend(vec![*r; index]);
        spheres.extend(images);
    }
    Host { lattice, spheres, role, ..host.clone() }
}

/// Every sphere moved by so much, in radii of the packing sphere, in a random direction.
pub fn displaced(host: &Host, length: f64, rng: &mut ChaCha8Rng) -> Host {
    let moved = |p: &Fractional, rng: &mut ChaCha8Rng| {
        let at = host.lattice.cartesian(p).0 + direction(rng) * length;
        host.lattice.fractional(&Cartesian(at)).reduced()
    };
    Host { spheres: host.spheres.iter().map(|p| moved(p, rng)).collect(), ..host.clone() }
}

/// The spheres in another order.
pub fn shuffled(host: &Host, rng: &mut ChaCha8Rng) -> Host {
    let mut order: Vec<usize> = (0..host.spheres.len()).collect();
    for i in (1..order.len()).rev() {
        order.swap(i, (uniform(rng) * (i + 1) as f64) as usize);
    }
    let spheres = order.iter().map(|i| host.spheres[*i]).collect();
    let role = order.iter().map(|i| host.role[*i]).collect();
    Host { spheres, role, ..host.clone() }
}

/// How many there are of each kind and shell.
pub fn counts(host: &Host, found: &[Interstice]) -> BTreeMap<String, usize> {
    let mut counts = BTreeMap::new();
    for hole in found {
        *counts.entry(format!("{} {}", hole.kind, hole.formula(host))).or_insert(0) += 1;
    }
    counts
}
