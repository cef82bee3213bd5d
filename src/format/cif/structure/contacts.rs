//! Positions that lie very near each other, found in linear time.

use crate::crystal::{Fractional, Lattice};

/// Most boxes along one axis.
const MAX_BOXES: usize = 256;

/// Most positions that may lie near one: more than the alternatives and occupants of any site.
pub const MAX_NEAR: usize = 200;

/// Two positions (indices in ascending order) and their distance, Å.
pub type Contact = (usize, usize, f64);

/// All pairs of positions, each in [0, 1), that lie within `radius` (Å) of each other, periodic images included, in
/// order of their indices. In a cell so flat that a pair could meet through two of its walls, the radius is reduced to
/// what the nearest images tell.
///
/// # Errors
/// The index of a position that more than [`MAX_NEAR`] others lie near: no structure, and too many pairs to hold.
pub fn contacts(lattice: &Lattice, positions: &[Fractional], radius: f64) -> Result<Vec<Contact>, usize> {
    let spacings = lattice.spacings();
    let radius = spacings.into_iter().fold(radius, |r, spacing| r.min(0.49 * spacing));
    // About one position a box, but no box narrower than the radius.
    let most = (positions.len() as f64).cbrt().ceil().max(1.0) as usize;
    let boxes = spacings.map(|s| ((s / radius) as usize).clamp(1, MAX_BOXES.min(most)));
    let reach = spacings.map(|s| radius / s);
    let (starts, order) = sorted_into_boxes(positions, boxes);
    let mut found = Vec::new();
    for &i in &order {
        let before = found.len();
        let p = positions[i as usize].0;
        // Boxes that the sphere touches, along each axis: its own and at most one on either side.
        let range = [0, 1, 2].map(|axis| {
            // The floor of what is not below -1.
            let floor = |x: f64| (x + 1.0) as i64 - 1;
            let n = boxes[axis] as f64;
            (floor((p[axis] - reach[axis]) * n), floor((p[axis] + reach[axis]) * n))
        });
        for a in range[0].0..=range[0].1 {
            for b in range[1].0..=range[1].1 {
                for c in range[2].0..=range[2].1 {
                    let at = wrapped_box([a, b, c], boxes);
                    for &j in &order[starts[at] as usize..starts[at + 1] as usize] {
                        if j <= i {
                            continue;
                        }
                        let delta = (positions[j as usize].0 - p).map(nearest_image);
                        let distance = (lattice.basis() * delta).norm_squared();
                        if distance <= radius * radius {
                            found.push((i as usize, j as usize, distance.sqrt()));
                        }
                    }
                }
            }
            if found.len() - before > MAX_NEAR {
                return Err(i as usize);
            }
        }
    }
    found.sort_by_key(|(i, j, _)| (*i, *j));
    // A cell one box wide is seen from both sides.
    found.dedup_by_key(|(i, j, _)| (*i, *j));
    Ok(found)
}

/// A difference of two fractions in [0, 1), brought to the nearest whole number.
fn nearest_image(x: f64) -> f64 {
    if x > 0.5 {
        x - 1.0
    } else if x < -0.5 {
        x + 1.0
    } else {
        x
    }
}

fn wrapped_box(at: [i64; 3], boxes: [usize; 3]) -> usize {
    let [a, b, c] = [0, 1, 2].map(|axis| {
        let n = boxes[axis] as i64;
        // At most one box beyond the wall.
        (if at[axis] < 0 {
            at[axis] + n
        } else if at[axis] >= n {
            at[axis] - n
        } else {
            at[axis]
        }) as usize
    });
    (a * boxes[1] + b) * boxes[2] + c
}

/// Start of each box (one more at the end) in the list of positions sorted by box.
fn sorted_into_boxes(positions: &[Fractional], boxes: [usize; 3]) -> (Vec<u32>, Vec<u32>) {
    let box_of = |p: &Fractional| {
        let at = [0, 1, 2].map(|axis| ((p.0[axis] * boxes[axis] as f64) as usize).min(boxes[axis] - 1));
        (at[0] * boxes[1] + at[1]) * boxes[2] + at[2]
    };
    let n_boxes = boxes.iter().product::<usize>();
    let mut starts = vec![0_u32; n_boxes + 1];
    for p in positions {
        starts[box_of(p) + 1] += 1;
    }
    for i in 0..n_boxes {
        starts[i + 1] += starts[i];
    }
    let mut next = starts.clone();
    let mut order = vec![0_u32; positions.len()];
    for (i, p) in positions.iter().enumerate() {
        let slot = &mut next[box_of(p)];
        order[*slot as usize] = i as u32;
        *slot += 1;
    }
    (starts, order)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::crystal::Parameters;

    #[test]
    fn pairs_match_a_direct_search() {
        for (n, alpha, gamma) in [(1, 90.0, 90.0), (2, 90.0, 90.0), (40, 75.0, 110.0), (900, 90.0, 120.0)] {
            let lattice =
                Lattice::from_parameters(&Parameters { a: 6.0, b: 7.0, c: 8.0, alpha, beta: 90.0, gamma }).unwrap();
            // A Weyl sequence: reproducible, spread, with near pairs.
            let positions: Vec<_> = (0..n)
                .map(|i| {
                    let t = f64::from(i);
                    Fractional::new((t * 0.7548776662).fract(), (t * 0.5698402910).fract(), (t * 0.3247).fract())
                })
                .collect();
            let radius = 0.9;
            let mut brute = Vec::new();
            for i in 0..positions.len() {
                for j in i + 1..positions.len() {
                    if lattice.distance(&positions[i], &positions[j]) <= radius {
                        brute.push((i, j));
                    }
                }
            }
            let found: Vec<_> =
                contacts(&lattice, &positions, radius).unwrap().iter().map(|(i, j, _)| (*i, *j)).collect();
            assert_eq!(found, brute, "{n} positions");
        }
    }

    #[test]
    fn a_heap_of_positions_is_refused() {
        let lattice =
            Lattice::from_parameters(&Parameters { a: 9.0, b: 9.0, c: 9.0, alpha: 90.0, beta: 90.0, gamma: 90.0 })
                .unwrap();
        let heap = |n| vec![Fractional::new(0.5, 0.5, 0.5); n];
        assert_eq!(contacts(&lattice, &heap(50), 0.5).unwrap().len(), 50 * 49 / 2);
        assert_eq!(contacts(&lattice, &heap(100_000), 0.5), Err(0));
    }
}
