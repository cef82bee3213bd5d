//! Where the spheres of stacked layers lie.
//!
//! Unit spheres. A close-packed layer is a hexagonal net of edge 2; the next lies 2√(2/3) above it over its triangles, or
//! 2 above it where it repeats the letter. A layer AX₃ is the same net in a cell of twice the edge, A at its corner: no
//! two A touch, in the layer or between layers. A. F. Wells, Structural Inorganic Chemistry (Oxford), chapter on
//! close-packed AX₃ layers.

use super::stacking::Stacking;
use crate::crystal::{Fractional, Parameters};

/// Spacing of close-packed layers of spheres of radius 1: 2√(2/3).
const SPACING: f64 = 1.632_993_161_855_452;

/// Spacing of layers straight above each other.
const SPACING_OVER: f64 = 2.0;

/// A cell of stacked layers: parameters in sphere radii, centres, and for each whether it is an A.
pub struct Layers {
    /// Hexagonal cell, c along the stacking.
    pub cell: Parameters,
    /// Centres.
    pub spheres: Vec<Fractional>,
    /// 0 for X, 1 for A.
    pub role: Vec<usize>,
}

/// Layers of equal spheres.
pub fn simple(stacking: &Stacking) -> Layers {
    stacked(stacking, 2.0, &[([0.0, 0.0], 0)])
}

/// Layers AX₃.
pub fn ax3(stacking: &Stacking) -> Layers {
    stacked(stacking, 4.0, &[([0.0, 0.0], 1), ([0.5, 0.0], 0), ([0.0, 0.5], 0), ([0.5, 0.5], 0)])
}

fn stacked(stacking: &Stacking, edge: f64, layer: &[([f64; 2], usize)]) -> Layers {
    let places = stacking.layers();
    let n = places.len();
    let step = |i: usize| if places[i] == places[(i + 1) % n] { SPACING_OVER } else { SPACING };
    let height: f64 = (0..n).map(step).sum();
    let cell = Parameters { a: edge, b: edge, c: height, alpha: 90.0, beta: 90.0, gamma: 120.0 };
    let (mut spheres, mut role) = (Vec::new(), Vec::new());
    let mut z = 0.0;
    for (i, place) in places.iter().enumerate() {
        let shift = f64::from(*place) / 3.0;
        for ([x, y], kind) in layer {
            spheres.push(Fractional::new(x + 2.0 * shift, y + shift, z / height).reduced());
            role.push(*kind);
        }
        z += step(i);
    }
    Layers { cell, spheres, role }
}
