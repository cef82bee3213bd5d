//! Supercells: superlattices by Hermite normal form, their shapes, and the translations that they hold.
//!
//! A superlattice of index n has exactly one basis whose matrix P (columns, in the parent's basis) is lower triangular
//! with positive diagonal and 0 ≤ P_rc < P_rr left of it. There are Σ_{d|n} d σ(d) of them (OEIS A001001).

use super::symmetry::Operation;
use super::{Lattice, Transformation};
use nalgebra::{Matrix3, Vector3};

/// More superlattices of one index than this are not searched one by one for their shape.
pub const MAX_SHAPES: usize = 200_000;

/// Largest index for which supercells are looked for.
pub const MAX_INDEX: usize = 1_000_000;

/// All Hermite normal forms of determinant `index`, in lexicographic order of (diagonal, off-diagonal).
pub fn hermite_normal_forms(index: usize) -> impl Iterator<Item = Matrix3<i32>> {
    let n = index as i32;
    let divisors = move |n: i32| (1..=n).filter(move |d| n % d == 0);
    divisors(n).flat_map(move |a| divisors(n / a).map(move |c| (a, c, n / a / c))).flat_map(|(a, c, f)| {
        (0..c).flat_map(move |b| (0..f).flat_map(move |d| (0..f).map(move |e| Matrix3::new(a, 0, 0, b, c, 0, d, e, f))))
    })
}

/// How many superlattices of this index there are: Σ_{d|n} d σ(d).
pub fn count(index: usize) -> usize {
    let sigma = |n: usize| (1..=n).filter(|d| n.is_multiple_of(*d)).sum::<usize>();
    (1..=index).filter(|d| index.is_multiple_of(*d)).map(|d| d * sigma(d)).sum()
}

/// The Hermite normal form of the superlattice spanned by the columns of `matrix` (determinant not zero).
pub fn hermite(matrix: &Matrix3<i32>) -> Matrix3<i32> {
    let mut m = matrix.map(i64::from);
    for row in 0..3 {
        // Euclid on the columns from `row` on, until only one of them has an entry in this row.
        loop {
            let pivot = (row..3).filter(|&c| m[(row, c)] != 0).min_by_key(|&c| m[(row, c)].abs());
            let Some(pivot) = pivot else { break };
            m.swap_columns(row, pivot);
            if m[(row, row)] < 0 {
                let flipped = -m.column(row);
                m.set_column(row, &flipped);
            }
            let mut clean = true;
            for c in row + 1..3 {
                let q = m[(row, c)].div_euclid(m[(row, row)]);
                let reduced = m.column(c) - m.column(row) * q;
                m.set_column(c, &reduced);
                clean &= m[(row, c)] == 0;
            }
            if clean {
                break;
            }
        }
        for c in 0..row {
            if m[(row, row)] != 0 {
                let q = m[(row, c)].div_euclid(m[(row, row)]);
                let reduced = m.column(c) - m.column(row) * q;
                m.set_column(c, &reduced);
            }
        }
    }
    m.map(|x| x as i32)
}

/// One superlattice of each class under the rotations of `operations` (in the parent's basis), in order of Hermite
/// normal form.
pub fn distinct(index: usize, operations: &[Operation]) -> Vec<Matrix3<i32>> {
    let mut rotations: Vec<Matrix3<i32>> = Vec::new();
    for operation in operations {
        if !rotations.contains(&operation.rotation) {
            rotations.push(operation.rotation);
        }
    }
    let key = |m: &Matrix3<i32>| [m[(0, 0)], m[(1, 1)], m[(2, 2)], m[(1, 0)], m[(2, 0)], m[(2, 1)]];
    hermite_normal_forms(index)
        .filter(|form| rotations.iter().all(|w| key(&hermite(&(w * form))) >= key(form)))
        .collect()
}

/// The lattice of a supercell.
///
/// # Errors
/// [`super::lattice::LatticeError`] when an edge becomes too long.
pub fn lattice_of(parent: &Lattice, cell: &Transformation) -> Result<Lattice, super::lattice::LatticeError> {
    Lattice::from_basis(parent.basis() * cell.matrix().map(f64::from))
}

/// The same superlattice by its shortest basis (Minkowski-reduced, right-handed); `None` when it cannot be written with
/// coefficients in range.
pub fn compact(parent: &Lattice, matrix: &Matrix3<i32>) -> Option<Transformation> {
    let basis = parent.basis() * matrix.map(f64::from);
    let (_, change) = moyo::base::Lattice { basis }.minkowski_reduce().ok()?;
    let reduced = matrix * change;
    Transformation::from_matrix(reduced).or_else(|| Transformation::from_matrix(-reduced))
}

/// How compact a cell is: the shortest distance between its periodic images, then the smallness of its edges.
fn compactness(parent: &Lattice, cell: &Transformation) -> (f64, f64) {
    let basis = parent.basis() * cell.matrix().map(f64::from);
    let squares: Vec<f64> = basis.column_iter().map(|c| c.norm_squared()).collect();
    (squares.iter().copied().fold(f64::INFINITY, f64::min).sqrt(), -squares.iter().sum::<f64>())
}

/// Differences of lengths below this share of the longer are rounding.
const SAME_LENGTH: f64 = 1e-9;

fn better(a: (f64, f64), b: (f64, f64)) -> bool {
    let gain = |p: f64, q: f64| (p - q) / p.abs().max(q.abs()).max(f64::MIN_POSITIVE);
    gain(a.0, b.0) > SAME_LENGTH || (gain(a.0, b.0) > -SAME_LENGTH && gain(a.1, b.1) > SAME_LENGTH)
}

/// The most compact supercell of this index: the longest shortest distance between periodic images, then the smallest
/// sum of squared edges, then the first Hermite normal form.
///
/// Above [`MAX_SHAPES`] superlattices only those are compared that repeat the most compact cell of a divisor along its
/// axes.
pub fn most_compact(parent: &Lattice, index: usize) -> Option<Transformation> {
    let mut best: Option<((f64, f64), Transformation)> = None;
    let mut consider = |matrix: &Matrix3<i32>| {
        if let Some(cell) = compact(parent, matrix) {
            let value = compactness(parent, &cell);
            if best.as_ref().is_none_or(|(seen, _)| better(value, *seen)) {
                best = Some((value, cell));
            }
        }
    };
    if index == 0 || index > MAX_INDEX {
        return None;
    }
    if count(index) <= MAX_SHAPES {
        hermite_normal_forms(index).for_each(|form| consider(&form));
    } else {
        const MAX_CORE: usize = 64;
        let divisors: Vec<usize> = (1..=index).filter(|d| index.is_multiple_of(*d)).collect();
        for &core in divisors.iter().filter(|d| **d <= MAX_CORE) {
            let Some(cell) = most_compact(parent, core) else { continue };
            let rest = index / core;
            for &x in divisors.iter().filter(|d| rest.is_multiple_of(**d)) {
                for &y in divisors.iter().filter(|d| (rest / x).is_multiple_of(**d)) {
                    let scale = Vector3::new(x as i32, y as i32, (rest / x / y) as i32);
                    if scale.max() <= super::transformation::MAX_COEFFICIENT {
                        consider(&(cell.matrix() * Matrix3::from_diagonal(&scale)));
                    }
                }
            }
        }
    }
    best.map(|(_, cell)| cell)
}

/// The smallest supercell whose index is a multiple of `step` and whose periodic images are at least `span` (in the
/// lattice's unit of length) apart; `None` when no index up to `max_index` gives one.
pub fn spanning(parent: &Lattice, step: usize, span: f64, max_index: usize) -> Option<Transformation> {
    // A cell of volume V has images nearer than (√2 V)^(1/3), the densest lattice packing of spheres.
    let volume = span.powi(3) / 2.0_f64.sqrt();
    let least = ((volume * (1.0 - 1e-9) / parent.volume()).ceil() as usize).div_ceil(step).max(1) * step;
    (least..=max_index).step_by(step).find_map(|index| {
        most_compact(parent, index).filter(|cell| compactness(parent, cell).0 >= span * (1.0 - SAME_LENGTH))
    })
}

/// The cosets of a superlattice in its parent: the translations that a supercell holds, numbered from 0.
#[derive(Clone, Debug)]
pub struct Cosets {
    form: Matrix3<i32>,
}

impl Cosets {
    /// Of the superlattice spanned by a transformation.
    pub fn new(cell: &Transformation) -> Self {
        Self { form: hermite(cell.matrix()) }
    }

    /// How many there are: the index of the superlattice.
    pub fn len(&self) -> usize {
        (self.form[(0, 0)] * self.form[(1, 1)] * self.form[(2, 2)]) as usize
    }

    /// Never: a superlattice holds at least the translation zero.
    pub fn is_empty(&self) -> bool {
        false
    }

    /// The number of the coset of an integer translation of the parent.
    pub fn number(&self, translation: &Vector3<i32>) -> usize {
        let h = &self.form;
        let mut v = *translation;
        for axis in 0..3 {
            let q = v[axis].div_euclid(h[(axis, axis)]);
            v -= h.column(axis) * q;
        }
        ((v.x * h[(1, 1)] + v.y) * h[(2, 2)] + v.z) as usize
    }

    /// A translation of coset `number`, in the parent's basis.
    pub fn translation(&self, number: usize) -> Vector3<i32> {
        let (m, n) = (self.form[(1, 1)], self.form[(2, 2)]);
        let k = number as i32;
        Vector3::new(k / n / m, k / n % m, k % n)
    }
}

#[cfg(test)]
mod tests {
    use super::super::{Fractional, Parameters, symmetry};
    use super::*;

    fn fcc() -> Lattice {
        Lattice::from_basis(Matrix3::new(0.0, 0.5, 0.5, 0.5, 0.0, 0.5, 0.5, 0.5, 0.0) * 4.0).unwrap()
    }

    /// OEIS A001001: 1, 7, 13, 35, 31, 91, 57, 155, 130, 217, 133, 455.
    #[test]
    fn superlattices_are_counted() {
        for (index, want) in [1, 7, 13, 35, 31, 91, 57, 155, 130, 217, 133, 455].into_iter().enumerate() {
            assert_eq!(hermite_normal_forms(index + 1).count(), want);
            assert_eq!(count(index + 1), want);
        }
    }

    /// Symmetry-distinct superlattices of fcc: G. L. W. Hart & R. W. Forcade, Phys. Rev. B 77, 224115 (2008), Table IV;
    /// OEIS A159842: 1, 2, 3, 7, 5, 10, 7, 20, 14, 18.
    #[test]
    fn distinct_superlattices_of_fcc_are_counted() {
        let lattice = fcc();
        let (operations, _) = symmetry::operations(&lattice, &[Fractional::new(0.0, 0.0, 0.0)], &[0], 1e-4).unwrap();
        for (index, want) in [1, 2, 3, 7, 5, 10, 7, 20, 14, 18].into_iter().enumerate() {
            assert_eq!(distinct(index + 1, &operations).len(), want, "index {}", index + 1);
        }
    }

    #[test]
    fn the_cube_is_the_most_compact_cell_of_four() {
        let cell = most_compact(&fcc(), 4).unwrap();
        let p = lattice_of(&fcc(), &cell).unwrap().parameters();
        for (got, want) in [(p.a, 4.0), (p.b, 4.0), (p.c, 4.0), (p.alpha, 90.0), (p.beta, 90.0), (p.gamma, 90.0)] {
            assert!((got - want).abs() < 1e-9, "{p:?}");
        }
        let spanned = spanning(&fcc(), 1, 8.0, 1000).unwrap();
        assert!(compactness(&fcc(), &spanned).0 >= 8.0 - 1e-6);
    }

    #[test]
    fn cosets_number_every_translation_once() {
        let cell = Transformation::parse("2a-b,a+3b,c-a+2b").unwrap();
        let cosets = Cosets::new(&cell);
        assert_eq!(cosets.len(), cell.index());
        for k in 0..cosets.len() {
            let t = cosets.translation(k);
            assert_eq!(cosets.number(&t), k);
            for axis in 0..3 {
                assert_eq!(cosets.number(&(t - cell.matrix().column(axis))), k);
            }
        }
    }

    #[test]
    fn needles_are_reduced() {
        let cube =
            Lattice::from_parameters(&Parameters { a: 1.0, b: 1.0, c: 1.0, alpha: 90.0, beta: 90.0, gamma: 90.0 })
                .unwrap();
        let cell = compact(&cube, &Matrix3::new(1, 0, 0, 7, 1, 0, 3, 5, 1)).unwrap();
        assert_eq!(compactness(&cube, &cell), (1.0, -3.0));
    }
}
