//! Cells and diagrams written down for `tests/readers/packing.py`, which holds them against Qhull.

use crate::made::{displaced, seeded, transformed, uniform};
use interstice::crystal::{Fractional, Lattice, Parameters};
use interstice::packing::cell::{PowerCell, Spheres};
use interstice::packing::diagram::Diagram;
use interstice::packing::{Host, Role, Sign};
use rand::rngs::ChaCha8Rng;
use serde_json::{Value, json};
use std::path::Path;

/// Points at random in a skewed cell; with radii of three sizes if asked for.
fn random(seed: u64, unequal: bool) -> Host {
    let rng = &mut seeded(seed);
    let between = |low: f64, high: f64, rng: &mut ChaCha8Rng| low + (high - low) * uniform(rng);
    let lattice = loop {
        let [a, b, c] = [0; 3].map(|_| between(3.0, 9.0, rng));
        let [alpha, beta, gamma] = [0; 3].map(|_| between(55.0, 125.0, rng));
        let made = Lattice::from_parameters(&Parameters { a, b, c, alpha, beta, gamma });
        if let Ok(lattice) = made
            && lattice.spacings().iter().all(|d| *d > 1.5)
        {
            break lattice;
        }
    };
    let n = 2 + seed as usize * 2;
    let spheres = (0..n).map(|_| Fractional::new(uniform(rng), uniform(rng), uniform(rng))).collect();
    let role = (0..n).map(|i| if unequal { i % 3 } else { 0 }).collect();
    let sizes = if unequal { vec![1.0, 1.1, 0.8] } else { vec![1.0] };
    let roles = sizes.into_iter().map(|radius| Role { name: format!("X{radius}"), ion: Sign::Anion, radius }).collect();
    Host { name: format!("random-{seed}"), lattice, spheres, role, roles, stacking: None, scale: None }
}

/// The spheres, the vertices and volume of each cell, and the vertices of the whole diagram.
fn written(host: &Host) -> Value {
    let radii: Vec<f64> = (0..host.spheres.len()).map(|i| host.radius(i)).collect();
    let spheres = Spheres::new(&host.lattice, &host.spheres, &radii);
    let cells: Vec<Value> = (0..host.spheres.len())
        .map(|i| {
            let mut cell = PowerCell::default();
            cell.cut_out(&spheres, i);
            let at = host.lattice.cartesian(&host.spheres[i]).0;
            let vertices: Vec<[f64; 3]> = cell.vertices.iter().map(|v| (v + at).into()).collect();
            json!({ "volume": cell.volume(), "vertices": vertices })
        })
        .collect();
    let basis: Vec<[f64; 3]> = host.lattice.basis().column_iter().map(|c| [c[0], c[1], c[2]]).collect();
    let points: Vec<[f64; 3]> = host.spheres.iter().map(|p| p.0.into()).collect();
    let vertices: Vec<[f64; 3]> = Diagram::new(&spheres).vertices.iter().map(|v| v.position.0.into()).collect();
    json!({ "name": host.name, "vectors": basis, "points": points, "radii": radii, "cells": cells, "vertices": vertices })
}

#[test]
fn diagrams_are_written_for_qhull() {
    let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join("diagrams");
    let _ = std::fs::remove_dir_all(&folder);
    std::fs::create_dir_all(&folder).unwrap();
    let skew = [[2, 1, 0], [0, 1, 1], [1, 0, 2]];
    let named = |name: &str| Host::parse(name).unwrap();
    let mut hosts: Vec<Host> = (1..=20).map(|seed| random(seed, false)).collect();
    hosts
        .extend(["ccp", "hcp", "bcc", "primitive-cubic", "ax3:hc", "stack:ABAC"].map(|n| transformed(&named(n), skew)));
    hosts.extend(["layers:AABB", "pyrochlore", "bixbyite", "argyrodite", "garnet-cations"].map(named));
    // Nearly degenerate.
    hosts.push(displaced(&transformed(&named("ccp"), skew), 1e-4, &mut seeded(1)));
    hosts.extend((3..=7).map(|seed| random(seed, true)));
    for (i, host) in hosts.iter().enumerate() {
        let document = written(host);
        // The cells fill the lattice's cell.
        let volumes = document["cells"].as_array().unwrap().iter().map(|c| c["volume"].as_f64().unwrap());
        let volume = host.lattice.volume();
        assert!((volumes.sum::<f64>() / volume - 1.0).abs() < 1e-10, "{}", host.name);
        std::fs::write(folder.join(format!("{i:02}.json")), document.to_string()).unwrap();
    }
    assert_eq!(hosts.len(), 37);
}
