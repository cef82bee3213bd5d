//! Random orderings, uniform over the arrangements that keep chosen kinds apart.
//!
//! Without constraint each class is shuffled, so every arrangement is equally likely. With one, a first allowed
//! arrangement is sought by moving conflicting occupants to where they conflict least (min-conflicts: S. Minton et al.,
//! Artif. Intell. 58, 161 (1992)); then random exchanges that keep the constraint are accepted, whose stationary
//! distribution is uniform over the arrangements that such exchanges can reach. That all allowed arrangements are
//! reachable is not guaranteed near the densest ones.
//!
//! Draws come from ChaCha8 (rand 0.10) through `next_u64` alone, so the stream is the same on every machine.

use super::{Ordering, OrderingError, Problem, Progress};
use crate::crystal::neighbours::NeighbourList;
use rand::SeedableRng;
use rand::rand_core::Rng;
use rand::rngs::ChaCha8Rng;

/// Kinds that must keep a distance.
#[derive(Clone, Debug, PartialEq)]
pub struct Apart {
    /// First kind.
    pub first: u8,
    /// Second kind; may be the same.
    pub second: u8,
    /// Least distance between their sites, through periodic images too, Å.
    pub distance: f64,
    /// As the user wrote the pair, `Gd-Gd`.
    pub name: String,
}

/// Steps of repair per site before a start is given up.
const REPAIR_STEPS: usize = 200;

/// Starts before a request is given up.
const REPAIR_STARTS: usize = 20;

/// Exchanges attempted per site to forget the first allowed arrangement.
const MIXING: usize = 50;

/// Draws tried for each distinct ordering wanted.
pub const DRAWS_PER_ORDERING: usize = 200;

/// Orderings are compared under symmetry while permutations × sites is at most this; their degeneracy is given as 0
/// above it.
const COMPARED: usize = 100_000_000;

/// A seeded stream of random numbers; streams of one seed are independent.
pub(super) struct Draw(ChaCha8Rng);

impl Draw {
    pub(super) fn new(seed: u64, stream: u64) -> Self {
        let mut generator = ChaCha8Rng::seed_from_u64(seed);
        generator.set_stream(stream);
        Self(generator)
    }

    /// Uniform in 0..n (n > 0): multiplication with rejection of the uneven part.
    pub(super) fn below(&mut self, n: usize) -> usize {
        let n = n as u64;
        let uneven = n.wrapping_neg() % n;
        loop {
            let product = u128::from(self.0.next_u64()) * u128::from(n);
            if product as u64 >= uneven {
                return (product >> 64) as usize;
            }
        }
    }

    /// Uniform in [0, 1).
    pub(super) fn unit(&mut self) -> f64 {
        (self.0.next_u64() >> 11) as f64 / (1_u64 << 53) as f64
    }
}

/// An arrangement drawn uniformly from all.
pub(super) fn shuffled(problem: &Problem, draw: &mut Draw) -> Vec<u8> {
    let mut kinds = problem.first();
    for sites in &problem.sites_of {
        for i in (1..sites.len()).rev() {
            kinds.swap(sites[i], sites[draw.below(i + 1)]);
        }
    }
    kinds
}

/// `keep` random orderings, distinct under symmetry, in the order drawn; fewer when the cell has no more or luck runs
/// out after [`DRAWS_PER_ORDERING`] draws each.
///
/// # Errors
/// [`OrderingError::Apart`] when no allowed arrangement is found, with the largest number of the kind that could be
/// placed.
pub fn random(
    problem: &Problem,
    keep: usize,
    seed: u64,
    apart: &[Apart],
    progress: &Progress,
) -> Result<Vec<Ordering>, OrderingError> {
    let conflicts = Conflicts::new(problem, apart);
    progress.begin(keep as u64);
    let mut seen: Vec<Vec<u8>> = Vec::new();
    let mut found = Vec::new();
    for number in 0..keep * DRAWS_PER_ORDERING {
        if found.len() == keep {
            break;
        }
        let mut draw = Draw::new(seed, number as u64);
        let kinds = allowed(problem, &conflicts, &mut draw).ok_or_else(|| impossible(problem, apart, seed))?;
        // In a large cell two draws are never alike, and its orbit is too large to go through.
        let small = problem.symmetry.order().saturating_mul(kinds.len()) <= COMPARED;
        let (canonical, degeneracy) = if small { problem.canonical(&kinds) } else { (kinds.clone(), 0) };
        if !seen.contains(&canonical) {
            let energy = problem.energy(&kinds)?;
            seen.push(canonical);
            found.push(Ordering { kinds, degeneracy, energy });
            progress.advance(1);
        }
    }
    Ok(found)
}

/// Which pairs of sites may not hold which pairs of kinds.
struct Conflicts {
    /// For each rule: its kinds and, by site, the sites nearer than its distance.
    rules: Vec<(u8, u8, Vec<Vec<usize>>)>,
}

impl Conflicts {
    fn new(problem: &Problem, apart: &[Apart]) -> Self {
        let rules = apart
            .iter()
            .map(|rule| {
                let list = NeighbourList::new(&problem.lattice, &problem.positions, rule.distance);
                // Exactly the distance asked for is allowed.
                let near = |i| list.of(i, rule.distance - 1e-6).iter().map(|n| n.index).collect::<Vec<_>>();
                (rule.first, rule.second, (0..problem.positions.len()).map(near).collect())
            })
            .collect();
        Self { rules }
    }

    /// Number of forbidden pairs that site `i` takes part in.
    fn at(&self, kinds: &[u8], i: usize) -> usize {
        let mut count = 0;
        for (a, b, near) in &self.rules {
            for (mine, other) in [(a, b), (b, a)] {
                if kinds[i] == *mine {
                    count += near[i].iter().filter(|j| kinds[**j] == *other).count();
                }
                if a == b {
                    break;
                }
            }
        }
        count
    }

    fn any(&self, kinds: &[u8]) -> Vec<usize> {
        (0..kinds.len()).filter(|i| self.at(kinds, *i) > 0).collect()
    }
}

fn allowed(problem: &Problem, conflicts: &Conflicts, draw: &mut Draw) -> Option<Vec<u8>> {
    if conflicts.rules.is_empty() {
        return Some(shuffled(problem, draw));
    }
    let mut kinds = (0..REPAIR_STARTS).find_map(|_| repaired(problem, conflicts, draw))?;
    for _ in 0..MIXING * kinds.len() {
        let i = draw.below(kinds.len());
        let sites = &problem.sites_of[problem.class[i]];
        let j = sites[draw.below(sites.len())];
        if kinds[i] != kinds[j] {
            kinds.swap(i, j);
            if conflicts.at(&kinds, i) + conflicts.at(&kinds, j) > 0 {
                kinds.swap(i, j);
            }
        }
    }
    Some(kinds)
}

/// A random arrangement, repaired until nothing conflicts.
fn repaired(problem: &Problem, conflicts: &Conflicts, draw: &mut Draw) -> Option<Vec<u8>> {
    let mut kinds = shuffled(problem, draw);
    let mut bad = conflicts.any(&kinds);
    for _ in 0..REPAIR_STEPS * kinds.len().max(50) {
        if bad.is_empty() {
            return Some(kinds);
        }
        let i = bad[draw.below(bad.len())];
        let sites = &problem.sites_of[problem.class[i]];
        // The exchange that leaves fewest conflicts among a random sample of partners; ties and one in ten at random,
        // so that plateaus are crossed.
        const SAMPLE: usize = 40;
        let wander = draw.below(10) == 0;
        let mut best = None;
        for _ in 0..if wander { 1 } else { SAMPLE } {
            let j = sites[draw.below(sites.len())];
            if kinds[j] == kinds[i] {
                continue;
            }
            let before = conflicts.at(&kinds, i) + conflicts.at(&kinds, j);
            kinds.swap(i, j);
            let after = conflicts.at(&kinds, i) + conflicts.at(&kinds, j);
            kinds.swap(i, j);
            let gain = after as i64 - before as i64;
            if best.is_none_or(|(g, _)| gain < g) {
                best = Some((gain, j));
            }
        }
        if let Some((_, j)) = best {
            kinds.swap(i, j);
            bad = conflicts.any(&kinds);
        }
    }
    None
}

/// Counts how many of the first constrained kind could be placed: fewer and fewer, the rest given to the commonest other
/// kind of the class.
fn impossible(problem: &Problem, apart: &[Apart], seed: u64) -> OrderingError {
    let rule = apart.iter().max_by(|a, b| a.distance.total_cmp(&b.distance));
    let (pair, distance, kind) = rule.map_or((String::new(), 0.0, 0), |r| (r.name.clone(), r.distance, r.first));
    let class = problem.contents.iter().position(|c| c.counts.iter().any(|(k, n)| *k == kind && *n > 0)).unwrap_or(0);
    let count = |p: &Problem| p.contents[class].counts.iter().filter(|c| c.0 == kind).map(|c| c.1).sum::<usize>();
    let asked = count(problem);
    let mut fewer = problem.clone();
    let other = (0..fewer.contents[class].counts.len())
        .filter(|i| fewer.contents[class].counts[*i].0 != kind)
        .max_by_key(|i| fewer.contents[class].counts[*i].1);
    // Without another kind in the class there is nothing to exchange with: no number of them can be tried.
    let mut reached = if other.is_some() { asked } else { 0 };
    while reached > 0 {
        for (at, entry) in fewer.contents[class].counts.iter_mut().enumerate() {
            if entry.0 == kind {
                entry.1 -= 1;
            } else if Some(at) == other {
                entry.1 += 1;
            }
        }
        reached -= 1;
        let conflicts = Conflicts::new(&fewer, apart);
        if repaired(&fewer, &conflicts, &mut Draw::new(seed, u64::MAX - reached as u64)).is_some() {
            break;
        }
    }
    let name = pair.split('-').next().unwrap_or_default().to_string();
    OrderingError::Apart { pair, distance, kind: name, asked, reached }
}
