//! Speed of finding interstices: named packings, and random dense packings of growing size on one core and on two.

use criterion::{Criterion, criterion_group, criterion_main};
use interstice::crystal::neighbours::NeighbourList;
use interstice::crystal::{Cartesian, Fractional, Lattice, Parameters};
use interstice::packing::{Host, Role, holes, interstices, survey};
use nalgebra::Vector3;
use rand::SeedableRng;
use rand::rand_core::Rng;
use rand::rngs::ChaCha8Rng;
use std::hint::black_box;

fn named(c: &mut Criterion) {
    for name in ["ccp", "stack:ABCABACBCACB", "bixbyite"] {
        let host = Host::parse(name).expect("a packing");
        c.bench_function(&format!("interstices of {name}"), |b| b.iter(|| interstices(black_box(&host))));
        c.bench_function(&format!("survey of {name}"), |b| b.iter(|| survey(black_box(&host))));
    }
}

/// Unit spheres filling a share of 0.55 of a cube, almost without overlap: points thrown at random, pairs that overlap
/// pushed apart in turn.
fn random_dense(n: usize) -> Host {
    const SHARE: f64 = 0.55;
    let mut rng = ChaCha8Rng::seed_from_u64(1);
    let mut next = || (rng.next_u64() >> 11) as f64 / (1_u64 << 53) as f64;
    let a = (n as f64 * 4.0 / 3.0 * std::f64::consts::PI / SHARE).cbrt();
    let lattice =
        Lattice::from_parameters(&Parameters { a, b: a, c: a, alpha: 90.0, beta: 90.0, gamma: 90.0 }).expect("a cube");
    let mut spheres: Vec<Fractional> = (0..n).map(|_| Fractional::new(next(), next(), next())).collect();
    for _ in 0..100 {
        let list = NeighbourList::new(&lattice, &spheres, 2.0);
        let pushed = (0..n)
            .map(|i| {
                let push = list.of(i, 2.0).iter().map(|p| p.vector * (0.5 - 1.0 / p.distance)).sum::<Vector3<f64>>();
                let at = lattice.cartesian(&spheres[i]).0 + push * 0.5;
                lattice.fractional(&Cartesian(at)).reduced()
            })
            .collect();
        spheres = pushed;
    }
    let (role, roles) = (vec![0; n], vec![Role::anion()]);
    Host { name: format!("{n} random spheres"), lattice, spheres, role, roles, stacking: None, scale: None }
}

/// The spheres as fractions of the cube, for `qhull.py`.
fn write_down(host: &Host) {
    let points: Vec<[f64; 3]> = host.spheres.iter().map(|p| p.0.into()).collect();
    let document = serde_json::json!({ "edge": host.lattice.parameters().a, "points": points });
    std::fs::write(concat!(env!("CARGO_TARGET_TMPDIR"), "/random-10000.json"), document.to_string()).expect("a file");
}

fn random(c: &mut Criterion) {
    let mut group = c.benchmark_group("holes of random dense packings");
    group.sample_size(10);
    for n in [2_500, 5_000, 10_000, 20_000] {
        let host = random_dense(n);
        if n == 10_000 {
            write_down(&host);
        }
        for threads in [1, 2] {
            let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().expect("threads");
            group.bench_function(format!("{n} spheres, {threads} cores"), |b| {
                b.iter(|| pool.install(|| holes(black_box(&host))))
            });
        }
    }
    group.finish();
}

criterion_group!(packing, named, random);
criterion_main!(packing);
