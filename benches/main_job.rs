//! Speed of the stages: interstices, Ewald sums, every ordering.

use criterion::{Criterion, criterion_group, criterion_main};
use interstice::crystal::{Fractional, Lattice, Transformation};
use interstice::energy::PairTable;
use interstice::ordering::{Contents, Parent, Problem, Progress, every};
use interstice::packing::{Host, interstices};
use nalgebra::Matrix3;
use std::hint::black_box;

fn holes(c: &mut Criterion) {
    for name in ["ccp", "stack:ABCABACBCACB"] {
        let host = Host::parse(name).expect("a packing");
        c.bench_function(&format!("interstices of {name}"), |b| b.iter(|| interstices(black_box(&host))));
    }
}

fn fcc(a: f64) -> Lattice {
    let h = a / 2.0;
    Lattice::from_basis(Matrix3::new(0.0, h, h, h, 0.0, h, h, h, 0.0)).expect("a lattice")
}

/// ccp with its tetrahedral and octahedral interstices.
const SITES: [([f64; 3], usize); 4] = [([0.0; 3], 0), ([0.25; 3], 1), ([0.75; 3], 1), ([0.5; 3], 2)];

fn parent() -> Parent {
    Parent {
        lattice: fcc(4.0),
        positions: SITES.iter().map(|(p, _)| Fractional::new(p[0], p[1], p[2])).collect(),
        class: SITES.iter().map(|(_, c)| *c).collect(),
    }
}

fn ewald(c: &mut Criterion) {
    // Every site its own basis site of one cell: no translation is made use of.
    for n in [14, 112] {
        let cell = Transformation::parse(if n == 14 { "2a,b,7c" } else { "4a,4b,7c" }).expect("a cell");
        let points = interstice::crystal::supercell::Cosets::new(&cell);
        let lattice = interstice::crystal::supercell::lattice_of(&fcc(4.0), &cell).expect("a lattice");
        let inverse = cell.matrix().map(f64::from).try_inverse().expect("a cell");
        let basis: Vec<Fractional> = SITES
            .iter()
            .flat_map(|(p, _)| {
                (0..points.len())
                    .map(|t| Fractional(inverse * (nalgebra::Vector3::from(*p) + points.translation(t).map(f64::from))))
            })
            .collect();
        let name = format!("Ewald table and energy of {} sites to 1e-10", basis.len());
        let charges: Vec<f64> = (0..basis.len()).map(|i| if i % 2 == 0 { 1.0 } else { -1.0 }).collect();
        c.bench_function(&name, |b| {
            b.iter(|| {
                let table = PairTable::new(&lattice, &basis, &Transformation::identity(), 1e-10).expect("a table");
                table.energy(black_box(&charges))
            })
        });
    }
}

fn orderings(c: &mut Criterion) {
    let contents = vec![
        Contents { counts: vec![(0, 8)] },
        Contents { counts: vec![(1, 2), (3, 14)] },
        Contents { counts: vec![(2, 4), (3, 4)] },
    ];
    let cell = Transformation::parse("2a,2b,2c").expect("a cell");
    let problem = Problem::new(&parent(), &cell, contents, vec![-2.0, 2.0, 3.0, 0.0]).expect("a problem");
    c.bench_function("every ordering of spinel's primitive cell", |b| {
        b.iter(|| every(black_box(&problem), &Progress::default()))
    });
}

criterion_group! {
    name = main_job;
    config = Criterion::default().sample_size(10);
    targets = holes, ewald, orderings
}
criterion_main!(main_job);
