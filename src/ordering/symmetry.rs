//! The symmetry of a supercell as permutations of its sites.
//!
//! Every operation of the parent that maps the superlattice onto itself, followed by every translation that the supercell
//! holds. Only one permutation for each operation is stored; translations act through the cosets.

use super::Parent;
use crate::crystal::Transformation;
use crate::crystal::supercell::Cosets;
use crate::crystal::symmetry::Operation;
use nalgebra::Vector3;
use std::cmp::Ordering;

/// An operation maps a site onto another when they agree within this, in the parent's fractional coordinates.
const SAME_SITE: f64 = 1e-3;

#[derive(Clone, Debug)]
pub(super) struct SiteSymmetry {
    translations: usize,
    cosets: Cosets,
    vectors: Vec<Vector3<i32>>,
    /// For each operation, where each site goes.
    operations: Vec<Vec<u32>>,
}

impl SiteSymmetry {
    pub(super) fn new(parent: &Parent, cell: &Transformation, cosets: &Cosets, operations: &[Operation]) -> Self {
        let n = cosets.len();
        let p = cell.matrix().map(f64::from);
        let inverse = p.try_inverse().unwrap_or_default();
        let vectors: Vec<Vector3<i32>> = (0..n).map(|t| cosets.translation(t)).collect();
        let keeps_superlattice = |op: &&Operation| {
            let m = inverse * op.rotation.map(f64::from) * p;
            m.iter().all(|x| (x - x.round()).abs() < 1e-6)
        };
        let mut maps: Vec<Vec<u32>> = Vec::new();
        for operation in operations.iter().filter(keeps_superlattice) {
            let Some(map) = Self::permutation(parent, cosets, &vectors, operation) else { continue };
            if !maps.contains(&map) {
                maps.push(map);
            }
        }
        Self { translations: n, cosets: cosets.clone(), vectors, operations: maps }
    }

    /// Where each site of the supercell goes; `None` if the operation does not map the sites onto each other.
    fn permutation(parent: &Parent, cosets: &Cosets, vectors: &[Vector3<i32>], op: &Operation) -> Option<Vec<u32>> {
        let n = vectors.len();
        let mut map = Vec::with_capacity(parent.positions.len() * n);
        for (b, position) in parent.positions.iter().enumerate() {
            let image = op.apply(position);
            let near = |c: &usize| {
                let d = image.0 - parent.positions[*c].0;
                parent.class[*c] == parent.class[b] && d.iter().all(|x| (x - x.round()).abs() < SAME_SITE)
            };
            let target = (0..parent.positions.len()).find(near)?;
            let shift = (image.0 - parent.positions[target].0).map(|x| x.round() as i32);
            for t in vectors {
                map.push((target * n + cosets.number(&(op.rotation * t + shift))) as u32);
            }
        }
        Some(map)
    }

    /// Number of permutations, translations included.
    pub(super) fn order(&self) -> usize {
        self.operations.len() * self.translations
    }

    /// Where site `i` goes under translation `t`.
    pub(super) fn translated(&self, i: usize, t: usize) -> usize {
        let n = self.translations;
        i / n * n + self.cosets.number(&(self.vectors[i % n] + self.vectors[t]))
    }

    /// All permutations, written out: where each site goes.
    pub(super) fn permutations(&self) -> Vec<Vec<u32>> {
        let mut all = Vec::with_capacity(self.order());
        for t in 0..self.translations {
            let shift: Vec<u32> = (0..self.operations[0].len()).map(|i| self.translated(i, t) as u32).collect();
            for map in &self.operations {
                all.push(map.iter().map(|i| shift[*i as usize]).collect());
            }
        }
        // Different pairs of operation and translation can permute alike when the parent is not primitive.
        all.sort_unstable();
        all.dedup();
        all
    }

    /// The least image and the size of the orbit.
    pub(super) fn canonical(&self, kinds: &[u8]) -> (Vec<u8>, u128) {
        let mut least = kinds.to_vec();
        let mut image = vec![0; kinds.len()];
        let mut fixed: u128 = 0;
        let mut total: u128 = 0;
        for t in 0..self.translations {
            let shift: Vec<usize> = (0..kinds.len()).map(|i| self.translated(i, t)).collect();
            for map in &self.operations {
                for (i, target) in map.iter().enumerate() {
                    image[shift[*target as usize]] = kinds[i];
                }
                total += 1;
                fixed += u128::from(image == kinds);
                if image < least {
                    least.copy_from_slice(&image);
                }
            }
        }
        (least, total / fixed.max(1))
    }
}

/// How an ordering compares with its image under the inverse of a permutation, kind by kind: site i of the image holds
/// what site `map[i]` of the ordering holds. Stops at the first difference.
pub(super) fn compare_image(kinds: &[u8], map: &[u32]) -> Ordering {
    for (kind, source) in kinds.iter().zip(map) {
        match kind.cmp(&kinds[*source as usize]) {
            Ordering::Equal => {}
            other => return other,
        }
    }
    Ordering::Equal
}
