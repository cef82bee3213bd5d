//! Neighbours within a radius in a periodic cell, by a list of small boxes.
//!
//! Linear in the number of positions for a fixed radius and density. Images are found through the plane
//! spacings, so skewed and flat cells are right too.

use super::{Fractional, Lattice};
use nalgebra::Vector3;

/// Most boxes along one axis of the list.
const MAX_BOXES: usize = 128;

/// A neighbour of some position.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Neighbour {
    /// Index of the neighbouring position.
    pub index: usize,
    /// Cell in which it lies, relative to the cell of the position as given.
    pub image: [i32; 3],
    /// Vector from the position to it, Å.
    pub vector: Vector3<f64>,
    /// Length of that vector, Å.
    pub distance: f64,
}

/// Positions of one cell sorted into boxes, ready for radius queries.
pub struct NeighbourList<'a> {
    lattice: &'a Lattice,
    positions: &'a [Fractional],
    boxes: [usize; 3],
    /// Positions sorted by box.
    sorted: Vec<Sorted>,
    /// Start of each box in `sorted`, one more at the end.
    starts: Vec<usize>,
}

/// A position in its box.
#[derive(Clone, Copy)]
struct Sorted {
    index: usize,
    /// Coordinates in [0, 1).
    reduced: Vector3<f64>,
    /// The same on orthogonal axes.
    cartesian: Vector3<f64>,
    /// Cell from which the position was brought there.
    shift: [i32; 3],
}

/// Share by which the quick test of a distance lets more pass than the exact one.
const ROUNDING: f64 = 1e-9;

impl<'a> NeighbourList<'a> {
    /// Sorts the positions for queries of about `radius` (Å); other radii work too, less quickly.
    pub fn new(lattice: &'a Lattice, positions: &'a [Fractional], radius: f64) -> Self {
        let most = (positions.len() as f64).cbrt().ceil().max(1.0) as usize * 2;
        let boxes = lattice.spacings().map(|s| ((s / radius.max(1e-6)).floor() as usize).clamp(1, MAX_BOXES.min(most)));
        let reduced: Vec<_> = positions
            .iter()
            .map(|p| {
                let r = p.reduced();
                (r.0, [0, 1, 2].map(|axis| (p.0[axis] - r.0[axis]).round() as i32))
            })
            .collect();
        let box_of = |r: &Vector3<f64>| {
            let at = [0, 1, 2].map(|axis| ((r[axis] * boxes[axis] as f64) as usize).min(boxes[axis] - 1));
            (at[0] * boxes[1] + at[1]) * boxes[2] + at[2]
        };
        let n_boxes = boxes.iter().product::<usize>();
        let mut starts = vec![0; n_boxes + 1];
        for (r, _) in &reduced {
            starts[box_of(r) + 1] += 1;
        }
        for i in 0..n_boxes {
            starts[i + 1] += starts[i];
        }
        let mut next = starts.clone();
        let nowhere = Sorted { index: 0, reduced: Vector3::zeros(), cartesian: Vector3::zeros(), shift: [0; 3] };
        let mut sorted = vec![nowhere; positions.len()];
        for (index, (reduced, shift)) in reduced.into_iter().enumerate() {
            let slot = &mut next[box_of(&reduced)];
            sorted[*slot] = Sorted { index, reduced, cartesian: lattice.basis() * reduced, shift };
            *slot += 1;
        }
        Self { lattice, positions, boxes, sorted, starts }
    }

    /// All positions and images within `radius` (Å) of `centre` (any fractional position), one that coincides with it
    /// included. Unordered.
    pub fn around(&self, centre: &Fractional, radius: f64) -> Vec<Neighbour> {
        let home = centre.reduced();
        let home_shift = [0, 1, 2].map(|axis| (centre.0[axis] - home.0[axis]).round() as i32);
        let spacings = self.lattice.spacings();
        let mut found = Vec::new();
        // Boxes along each axis that a sphere around the centre can touch.
        let range = [0, 1, 2].map(|axis| {
            let n = self.boxes[axis] as f64;
            let reach = radius / spacings[axis];
            (((home.0[axis] - reach) * n).floor() as i64, ((home.0[axis] + reach) * n).floor() as i64)
        });
        // Each box of a range as the cell it lies in and its number there.
        let on = |axis: usize, at: i64| {
            let n = self.boxes[axis] as i64;
            (at.div_euclid(n) as i32, at.rem_euclid(n) as usize)
        };
        let basis = self.lattice.basis();
        let origin = basis * home.0;
        let most = radius * radius + ROUNDING * (radius * radius + basis.norm_squared());
        for (x, i) in (range[0].0..=range[0].1).map(|at| on(0, at)) {
            for (y, j) in (range[1].0..=range[1].1).map(|at| on(1, at)) {
                for (z, k) in (range[2].0..=range[2].1).map(|at| on(2, at)) {
                    let idx = (i * self.boxes[1] + j) * self.boxes[2] + k;
                    let inside = &self.sorted[self.starts[idx]..self.starts[idx + 1]];
                    if inside.is_empty() {
                        continue;
                    }
                    let cell = Vector3::new(f64::from(x), f64::from(y), f64::from(z));
                    let offset = basis * cell - origin;
                    for p in inside.iter().filter(|p| (p.cartesian + offset).norm_squared() <= most) {
                        let vector = basis * (p.reduced + cell - home.0);
                        let distance = vector.norm();
                        if distance <= radius {
                            let image = [0, 1, 2].map(|axis| [x, y, z][axis] - p.shift[axis] + home_shift[axis]);
                            found.push(Neighbour { index: p.index, image, vector, distance });
                        }
                    }
                }
            }
        }
        found
    }

    /// Neighbours of position `index` within `radius` (Å), itself left out, nearest first; ties in order of index and
    /// image.
    pub fn of(&self, index: usize, radius: f64) -> Vec<Neighbour> {
        let mut found = self.around(&self.positions[index], radius);
        found.retain(|n| n.index != index || n.image != [0; 3]);
        found.sort_by(|a, b| a.distance.total_cmp(&b.distance).then(a.index.cmp(&b.index)).then(a.image.cmp(&b.image)));
        found
    }
}

#[cfg(test)]
mod tests {
    use super::super::Parameters;
    use super::*;

    /// Against brute force over many images, in skewed and flat cells, with unreduced positions.
    #[test]
    fn finds_what_brute_force_finds() {
        let cells =
            [(4.0, 4.0, 4.0, 90.0, 90.0, 90.0), (2.0, 9.0, 3.0, 50.0, 110.0, 75.0), (1.0, 1.0, 9.0, 90.0, 90.0, 20.0)];
        for (a, b, c, alpha, beta, gamma) in cells {
            let lattice = Lattice::from_parameters(&Parameters { a, b, c, alpha, beta, gamma }).unwrap();
            let positions: Vec<_> = (0..7)
                .map(|i| {
                    let t = f64::from(i);
                    Fractional::new((t * 0.377).fract() + t - 3.0, (t * 0.611).fract(), (t * 0.193).fract() - 1.0)
                })
                .collect();
            let list = NeighbourList::new(&lattice, &positions, 1.7);
            for radius in [0.9, 1.7, 4.1] {
                for (i, p) in positions.iter().enumerate() {
                    let mut brute = Vec::new();
                    for (j, q) in positions.iter().enumerate() {
                        for x in -25..=25_i32 {
                            for y in -25..=25_i32 {
                                for z in -12..=12_i32 {
                                    let shift = Vector3::new(f64::from(x), f64::from(y), f64::from(z));
                                    let d = (lattice.basis() * (q.0 + shift - p.0)).norm();
                                    if d <= radius && d > 1e-9 {
                                        brute.push((j, [x, y, z]));
                                    }
                                }
                            }
                        }
                    }
                    let mut found: Vec<_> = list.of(i, radius).iter().map(|n| (n.index, n.image)).collect();
                    brute.sort_unstable();
                    found.sort_unstable();
                    assert_eq!(found, brute, "cell {a} {b} {c}, radius {radius}, position {i}");
                }
            }
        }
    }
}
