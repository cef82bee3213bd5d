//! The same interstices whatever the cell, the order of spheres, rounding, and small disturbance.

use crate::made::{counts, displaced, seeded, shuffled, transformed, uniform};
use interstice::crystal::{Fractional, Lattice, Parameters};
use interstice::packing::cell::Spheres;
use interstice::packing::{Host, Role, Sign, interstices, survey};
use interstice::report::holes::{Mobile, gather, text};
use nalgebra::Vector3;

const HOSTS: [&str; 8] = ["ccp", "hcp", "stack:hc", "bcc", "primitive-cubic", "layers:AABB", "ax3:c", "ax3:hc:A=1.12"];

/// Supercell, two skewed cells, and a long one.
const CELLS: [[[i32; 3]; 3]; 4] = [
    [[2, 0, 0], [0, 2, 0], [0, 0, 2]],
    [[1, 2, 0], [0, 1, 1], [0, 0, 3]],
    [[1, 0, 3], [0, 1, -2], [0, 0, 1]],
    [[1, 0, 0], [-1, 1, 0], [0, 2, 5]],
];

#[test]
fn cells_orders_and_rounding_do_not_matter() {
    for name in HOSTS {
        let host = Host::parse(name).unwrap();
        let ideal = counts(&host, &interstices(&host).unwrap());
        for (k, cell) in CELLS.into_iter().enumerate() {
            let large = transformed(&host, cell);
            let index = large.spheres.len() / host.spheres.len();
            for (e, length) in [0.0, 1e-13, 1e-11, 1e-9, 1e-8, 1e-7, 1e-6, 1e-5, 1e-4].into_iter().enumerate() {
                let mut rng = seeded(100 * k as u64 + e as u64);
                let disturbed = shuffled(&displaced(&large, length, &mut rng), &mut rng);
                let found = interstices(&disturbed).unwrap();
                let want = ideal.iter().map(|(kind, n)| (kind.clone(), n * index)).collect();
                assert_eq!(counts(&disturbed, &found), want, "{name}, cell {cell:?}, displaced by {length}");
            }
        }
    }
}

/// Every sphere displaced by 1 % of the distance between spheres (0.02 radii) in a random direction.
#[test]
fn one_percent_of_noise_keeps_kinds_and_numbers() {
    for name in HOSTS {
        let host = Host::parse(name).unwrap();
        let ideal = counts(&host, &interstices(&host).unwrap());
        for seed in 0..20 {
            let large = transformed(&host, [[3, 0, 0], [0, 3, 0], [0, 0, 3]]);
            let noisy = displaced(&large, 0.02, &mut seeded(seed));
            let want = ideal.iter().map(|(kind, n)| (kind.clone(), n * 27)).collect();
            assert_eq!(counts(&noisy, &interstices(&noisy).unwrap()), want, "{name}, seed {seed}");
        }
    }
}

/// Spheres of any size anywhere, overlapping, one inside another, in skewed cells: what is found is consistent.
#[test]
fn random_hosts_keep_the_invariants() {
    for seed in 0..400 {
        let host = scattered(seed);
        let found = survey(&host).unwrap();
        let radii: Vec<f64> = (0..host.spheres.len()).map(|i| host.radius(i)).collect();
        let spheres = Spheres::new(&host.lattice, &host.spheres, &radii);
        for hole in found.interstices.iter().chain(&found.saddles) {
            assert!((spheres.clearance(&hole.position) - hole.ratio).abs() < 1e-6, "{seed}: {hole:?}");
            assert!(hole.shell.len() >= 2 && hole.multiplicity >= 1, "{seed}: {hole:?}");
            for contact in &hole.shell {
                let image = host.spheres[contact.sphere].0 + Vector3::from(contact.image.map(f64::from));
                let distance = (host.lattice.basis() * (image - hole.position.0)).norm();
                assert!((distance - contact.distance).abs() < 1e-6, "{seed}: {hole:?}");
                assert!(distance - radii[contact.sphere] > hole.ratio - 1e-6, "{seed}: {hole:?}");
            }
        }
        // A passage is no wider than the places that it joins; centres are settled after the joining.
        for window in &found.windows {
            let ends = found.interstices[window.from].ratio.min(found.interstices[window.to].ratio);
            assert!(window.ratio < ends + 0.15, "{seed}: {window:?} {ends}");
        }
        let [one, two, three] = found.critical_ratios.map(|r| r.unwrap_or(f64::NEG_INFINITY));
        assert!(one >= two && two >= three, "{seed}");
        if let Some(widest) = found.critical_ratios[0] {
            assert!(found.networks(widest - 1e-9)[0].dimension >= 1, "{seed}");
            assert!(found.networks(widest + 1e-9).iter().all(|n| n.dimension == 0), "{seed}");
        }
        // Whatever is found can be told.
        let told = gather(&host, &found, Some(&Mobile { name: "ion".into(), ratio: 0.1 }), Vec::new());
        assert!(text(&told).contains("largest ratio"), "{seed}");
        assert!(!serde_json::to_string(&told).unwrap().is_empty());
    }
}

fn scattered(seed: u64) -> Host {
    let rng = &mut seeded(seed);
    let lattice = loop {
        let [a, b, c] = [0; 3].map(|_| 1.5 + 6.0 * uniform(rng));
        let [alpha, beta, gamma] = [0; 3].map(|_| 40.0 + 100.0 * uniform(rng));
        if let Ok(lattice) = Lattice::from_parameters(&Parameters { a, b, c, alpha, beta, gamma }) {
            break lattice;
        }
    };
    let n = 1 + (uniform(rng) * 12.0) as usize;
    let spheres = (0..n).map(|_| Fractional::new(uniform(rng), uniform(rng), uniform(rng))).collect();
    let sizes = [1.0, 0.3 + uniform(rng), 1.0 + uniform(rng)];
    let roles = sizes.map(|radius| Role { name: format!("X{radius:.2}"), ion: Sign::Anion, radius }).to_vec();
    let role = (0..n).map(|i| i % 3).collect();
    Host { name: format!("scattered {seed}"), lattice, spheres, role, roles, stacking: None, scale: None }
}
