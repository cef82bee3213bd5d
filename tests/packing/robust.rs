//! The same interstices whatever the cell, the order of spheres, rounding, and small disturbance.

use crate::made::{counts, displaced, seeded, shuffled, transformed};
use interstice::packing::{Host, interstices};

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
