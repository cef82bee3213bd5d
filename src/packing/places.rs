//! Which of many points lie in one place, up to rounding and lattice translations.
//!
//! Points are sorted by the box of a fine grid in which they lie: those of one place are in one box, but for the few near
//! a wall, which are looked for in the boxes beyond it too.

use crate::crystal::{Fractional, Lattice};
use rayon::prelude::*;

/// Boxes along each axis.
const BOXES: u64 = 1 << 16;

/// Where the walls lie, as shares of a box, so that simple fractions, the rule in packings, are not on one.
const WALL: [f64; 3] = [0.366_025, 0.414_214, 0.236_068];

/// For each point the index of the first that lies in its place, nearer than `same` (in the lattice's unit of length) to
/// it or to another one there.
pub fn firsts(lattice: &Lattice, points: &[Fractional], same: f64) -> Vec<u32> {
    // How many boxes `same` spans along each axis: far less than one.
    let margin = lattice.spacings().map(|d| same / d * BOXES as f64);
    let mut by_box: Vec<(u64, u32)> =
        points.par_iter().enumerate().map(|(i, p)| (key(boxes(p, &margin).map(|b| b.0)), i as u32)).collect();
    by_box.par_sort_unstable();
    let mut first: Vec<u32> = (0..points.len() as u32).collect();
    // Of the points of a box each is held against those before it; the first that is near is, or leads to, the first of all.
    let inside: Vec<(u32, u32)> = by_box
        .par_chunk_by(|a, b| a.0 == b.0)
        .flat_map_iter(|run| {
            run.iter().enumerate().skip(1).filter_map(move |(n, &(_, i))| {
                let j = run[..n].iter().map(|r| r.1).find(|j| near(lattice, points, i, *j, same))?;
                Some((i, j))
            })
        })
        .collect();
    inside.into_iter().for_each(|(i, j)| first[i as usize] = j);
    let beyond: Vec<(u32, u32)> = (0..points.len())
        .into_par_iter()
        .flat_map_iter(|i| {
            let mine = boxes(&points[i], &margin);
            let keys = (1..8_u8).filter(move |mask| (0..3).all(|axis| mask >> axis & 1 == 0 || mine[axis].1.is_some()));
            let keys = keys.map(move |mask| {
                key([0, 1, 2].map(|axis| if mask >> axis & 1 == 1 { mine[axis].1.unwrap_or(0) } else { mine[axis].0 }))
            });
            let by_box = &by_box;
            keys.flat_map(move |wanted| {
                let start = by_box.partition_point(|b| b.0 < wanted);
                by_box[start..].iter().take_while(move |b| b.0 == wanted).map(move |b| (i as u32, b.1))
            })
        })
        .filter(|(i, j)| near(lattice, points, *i, *j, same))
        .collect();
    for (i, j) in beyond {
        let (a, b) = (root(&first, i), root(&first, j));
        first[a.max(b) as usize] = a.min(b);
    }
    (0..points.len() as u32).map(|i| root(&first, i)).collect()
}

/// Along each axis the box of a point and, where a wall is near, the box beyond it.
fn boxes(point: &Fractional, margin: &[f64; 3]) -> [(u64, Option<u64>); 3] {
    let reduced = point.reduced().0;
    [0, 1, 2].map(|axis| {
        let at = reduced[axis] * BOXES as f64 + WALL[axis];
        let here = at.floor();
        let number = here as u64 % BOXES;
        let beyond = if at - here <= margin[axis] {
            Some((number + BOXES - 1) % BOXES)
        } else if here + 1.0 - at <= margin[axis] {
            Some((number + 1) % BOXES)
        } else {
            None
        };
        (number, beyond)
    })
}

fn key(boxes: [u64; 3]) -> u64 {
    (boxes[0] * BOXES + boxes[1]) * BOXES + boxes[2]
}

fn near(lattice: &Lattice, points: &[Fractional], i: u32, j: u32, same: f64) -> bool {
    let apart = points[i as usize].0 - points[j as usize].0;
    (lattice.basis() * (apart - apart.map(f64::round))).norm() <= same
}

fn root(first: &[u32], mut i: u32) -> u32 {
    while first[i as usize] != i {
        i = first[i as usize];
    }
    i
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::crystal::Parameters;

    /// Each place taken several times: shifted by lattice vectors and by rounding, across walls of boxes and of the cell.
    #[test]
    fn points_of_one_place_are_found_across_walls() {
        let lattice =
            Lattice::from_parameters(&Parameters { a: 3.0, b: 5.0, c: 4.0, alpha: 80.0, beta: 110.0, gamma: 70.0 })
                .unwrap();
        let mut points = Vec::new();
        for k in 0..400 {
            // On a wall along each axis, or at a simple fraction.
            let wall = |axis: usize, n: f64| if k % 2 == 0 { (n - WALL[axis]) / BOXES as f64 } else { n / 400.0 };
            let at = [wall(0, f64::from(k)), wall(1, f64::from(k * 7 % 400)), wall(2, 0.0)];
            for copy in 0..4 {
                let sign = f64::from(copy) - 1.5;
                points.push(Fractional::new(at[0] + sign * 3e-9, at[1] - sign * 2e-9 + 1.0, at[2] + sign * 1e-9 - 2.0));
            }
        }
        let first = firsts(&lattice, &points, 1e-7);
        for (i, f) in first.iter().enumerate() {
            assert_eq!(*f as usize, i / 4 * 4, "{i}");
        }
    }
}
