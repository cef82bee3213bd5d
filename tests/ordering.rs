//! Orderings against published counts and known ground states.

#![allow(clippy::unwrap_used, reason = "a failed test may panic")]

use interstice::crystal::supercell::{compact, distinct};
use interstice::crystal::symmetry::{TOLERANCE, operations};
use interstice::crystal::{Fractional, Lattice, Transformation};
use interstice::ordering::{
    Apart, Contents, OrderingError, Parent, Problem, Progress, Search, burnside, every, lowest, random,
};
use nalgebra::Matrix3;

fn fcc(a: f64) -> Lattice {
    let h = a / 2.0;
    Lattice::from_basis(Matrix3::new(0.0, h, h, h, 0.0, h, h, h, 0.0)).unwrap()
}

fn parent(lattice: Lattice, sites: &[([f64; 3], usize)]) -> Parent {
    Parent {
        lattice,
        positions: sites.iter().map(|(p, _)| Fractional::new(p[0], p[1], p[2])).collect(),
        class: sites.iter().map(|(_, c)| *c).collect(),
    }
}

/// Number of binary derivative structures of fcc with A and B distinguishable, index 2 to 6, superperiodic ones left
/// out: G. L. W. Hart & R. W. Forcade, Phys. Rev. B 77, 224115 (2008) give 2, 3, 12, 14, 50 with A and B exchangeable;
/// with A and B told apart an independent orbit search (numpy, not ours) gives 2, 6, 19, 28, 80.
#[test]
fn derivative_structures_of_fcc_are_counted() {
    let parent = parent(fcc(4.0), &[([0.0; 3], 0)]);
    let (ops, _) = operations(&parent.lattice, &parent.positions, &[0], TOLERANCE).unwrap();
    for (index, want) in (2..).zip([2, 6, 19, 28, 80]) {
        let mut found = 0;
        for form in distinct(index, &ops) {
            let cell = compact(&parent.lattice, &form).unwrap();
            for b in 1..index {
                let contents = vec![Contents { counts: vec![(0, index - b), (1, b)] }];
                // Charges do not matter for counting; zero keeps every cell neutral.
                let problem = Problem::new(&parent, &cell, contents, vec![0.0, 0.0]).unwrap();
                let all = every(&problem, &Progress::default()).unwrap();
                assert_eq!(Some(all.len() as u128), burnside(&problem));
                found += all.iter().filter(|o| !problem.is_superperiodic(&o.kinds)).count();
            }
        }
        assert_eq!(found, want, "index {index}");
    }
}

/// Anions, tetrahedral and octahedral holes of ccp in a cell of four: the sizes of the orbits add up to the number of
/// arrangements (elementary counting), and their number is Burnside's.
#[test]
fn degeneracies_add_up() {
    let parent = parent(fcc(4.0), &[([0.0; 3], 0), ([0.25; 3], 1), ([0.75; 3], 1), ([0.5; 3], 2)]);
    let cell = Transformation::parse("2a,b,2c").unwrap();
    let contents = vec![
        Contents { counts: vec![(0, 4)] },
        Contents { counts: vec![(1, 1), (3, 7)] },
        Contents { counts: vec![(1, 1), (2, 2), (3, 1)] },
    ];
    let problem = Problem::new(&parent, &cell, contents, vec![-2.0, 2.0, 2.0, 0.0]).unwrap();
    let all = every(&problem, &Progress::default()).unwrap();
    assert_eq!(all.iter().map(|o| o.degeneracy).sum::<u128>(), 8 * 12);
    assert_eq!(Some(all.len() as u128), burnside(&problem));
    for ordering in &all {
        assert_eq!(problem.canonical(&ordering.kinds), (ordering.kinds.clone(), ordering.degeneracy));
    }
}

/// Opposite charges on the two sublattices of a primitive cubic lattice order as rock salt: the lowest Madelung energy
/// of the lattice gas at half filling (the textbook antiferromagnet of a bipartite lattice). Exhaustive search and
/// annealing agree with its constant 1.747565 (per pair, to the nearest distance).
#[test]
fn rock_salt_is_the_ground_state() {
    let cubic = Lattice::from_basis(Matrix3::identity() * 2.0).unwrap();
    let parent = parent(cubic, &[([0.0; 3], 0)]);
    for (cell, exhaustive) in [("2a,2b,2c", true), ("2a,2b,4c", true), ("4a,4b,2c", false)] {
        let cell = Transformation::parse(cell).unwrap();
        let half = cell.index() / 2;
        let contents = vec![Contents { counts: vec![(0, half), (1, half)] }];
        let problem = Problem::new(&parent, &cell, contents, vec![1.0, -1.0]).unwrap();
        let found = lowest(&problem, 3, 7, &Progress::default()).unwrap();
        assert_eq!(found.search == Search::Exhaustive, exhaustive);
        let want = -1.747_564_594_633 * interstice::energy::COULOMB / 2.0;
        let got = found.orderings[0].energy / half as f64;
        assert!((got - want).abs() < 1e-7, "{got} {want}");
    }
}

/// With a first shell forbidden on fcc, at most one site in four can be held (a tetrahedron of neighbours holds one):
/// elementary. Draws keep the distance, repeat with the seed and do not depend on threads.
#[test]
fn kinds_keep_apart_or_the_most_that_can_is_told() {
    let parent = parent(fcc(4.0), &[([0.0; 3], 0)]);
    let cell = Transformation::parse("-2a+2b+2c,2a-2b+2c,2a+2b-2c").unwrap();
    let problem = |few: usize| {
        let contents = vec![Contents { counts: vec![(0, 32 - few), (1, few)] }];
        Problem::new(&parent, &cell, contents, vec![0.0, 0.0]).unwrap()
    };
    let apart = [Apart { first: 1, second: 1, distance: 3.0, name: "Y-Y".into() }];
    for few in [4, 6, 8] {
        let p = problem(few);
        let drawn = random(&p, 2, 11, &apart, &Progress::default()).unwrap();
        let held: Vec<usize> = (0..32).filter(|i| drawn[0].kinds[*i] == 1).collect();
        assert_eq!(held.len(), few);
        for (n, i) in held.iter().enumerate() {
            for j in &held[..n] {
                assert!(p.lattice.distance(&p.positions[*i], &p.positions[*j]) > 3.0);
            }
        }
        assert_eq!(drawn, random(&p, 2, 11, &apart, &Progress::default()).unwrap());
    }
    match random(&problem(10), 1, 11, &apart, &Progress::default()) {
        Err(OrderingError::Apart { asked: 10, reached: 8, .. }) => {}
        other => panic!("{other:?}"),
    }
}

/// Two ions on six sites of a chain of cells: 15 arrangements, all equally likely; chi-square with 14 degrees of freedom
/// is below 29.14 with probability 0.99 (any table of the distribution). The seed is fixed.
#[test]
fn draws_are_uniform() {
    let cubic = Lattice::from_basis(Matrix3::identity() * 2.0).unwrap();
    let parent = parent(cubic, &[([0.0; 3], 0)]);
    let contents = vec![Contents { counts: vec![(0, 4), (1, 2)] }];
    let problem = Problem::new(&parent, &Transformation::parse("6a,b,c").unwrap(), contents, vec![0.0, 0.0]).unwrap();
    let mut seen = std::collections::BTreeMap::new();
    let draws = 6000;
    for seed in 0..draws {
        let drawn = random(&problem, 1, seed, &[], &Progress::default()).unwrap();
        *seen.entry(drawn[0].kinds.clone()).or_insert(0.0) += 1.0;
    }
    assert_eq!(seen.len(), 15);
    let expected = draws as f64 / 15.0;
    let chi_square: f64 = seen.values().map(|n: &f64| (n - expected).powi(2) / expected).sum();
    assert!(chi_square < 29.14, "{chi_square}");
}
