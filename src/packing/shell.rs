//! The coordination shell of a point: the spheres nearest to it, up to the widest gap.
//!
//! The distances of real and of disturbed packings scatter, so the shell ends not at a tolerance but where the distances
//! to the surfaces leave the widest gap. A gap is looked for among spheres up to [`FAR`] times as far as the nearest:
//! wide enough for the octahedron of bcc (distances 1 and √2) and the bipyramid of hcp (the same).

use super::cell::Spheres;
use crate::crystal::Fractional;
use crate::crystal::neighbours::Neighbour;

/// Farthest sphere of a shell, as a multiple of the nearest's distance (for spheres of the packing sphere's size).
const FAR: f64 = 1.5;

/// Gaps whose widths differ by less than this, in radii of the packing sphere, are equally wide; the inner one counts.
const SAME_GAP: f64 = 1e-6;

/// How much farther than to the clearance expected spheres are looked for at once.
const ROOM: f64 = 0.1;

/// The shell of a point, `least` spheres at least, in order of index and image.
pub fn around(spheres: &Spheres<'_>, point: &Fractional, least: usize) -> Vec<Neighbour> {
    expected(spheres, point, least, spheres.clearance(point)).0
}

/// The same, with the clearance of the point: quicker where that is nearly known beforehand.
pub fn expected(spheres: &Spheres<'_>, point: &Fractional, least: usize, clearance: f64) -> (Vec<Neighbour>, f64) {
    // Distance as it would be from a sphere of radius 1.
    let of = |n: &Neighbour| n.distance - spheres.radii[n.index] + 1.0;
    let reach = |clearance: f64| FAR * FAR * (clearance + 1.0) - 1.0 + spheres.largest;
    let seen = reach(clearance) + ROOM;
    let mut near = spheres.list.around(point, seen);
    let found = near.iter().map(|n| n.distance - spheres.radii[n.index]).fold(f64::INFINITY, f64::min);
    // A sphere not seen is farther than `seen` less its radius.
    let nearest = if found <= seen - spheres.largest { found } else { spheres.clearance(point) };
    if reach(nearest) > seen {
        near = spheres.list.around(point, reach(nearest));
    }
    near.retain(|n| n.distance <= reach(nearest));
    let far = FAR * (nearest + 1.0);
    near.sort_unstable_by(|a, b| of(a).total_cmp(&of(b)).then(a.index.cmp(&b.index)).then(a.image.cmp(&b.image)));
    let mut best = (0.0, near.len().min(least));
    for n in least..=near.len() {
        if n == 0 || of(&near[n - 1]) > far {
            break;
        }
        let next = near.get(n).map_or(FAR * far, of);
        let gap = next - of(&near[n - 1]);
        if gap > best.0 + SAME_GAP {
            best = (gap, n);
        }
    }
    near.truncate(best.1);
    near.sort_unstable_by(|a, b| a.index.cmp(&b.index).then(a.image.cmp(&b.image)));
    (near, nearest)
}

/// The spheres whose surfaces are nearest to a point, to within `slack`, in order of index and image.
pub fn touched(spheres: &Spheres<'_>, point: &Fractional, slack: f64) -> Vec<Neighbour> {
    let reach = spheres.clearance(point) + slack;
    let mut near = spheres.list.around(point, reach + spheres.largest);
    near.retain(|n| n.distance - spheres.radii[n.index] <= reach);
    near.sort_unstable_by(|a, b| a.index.cmp(&b.index).then(a.image.cmp(&b.image)));
    near
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::packing::Host;

    /// Shells of points known by symmetry: textbook coordination numbers (Wells).
    #[test]
    fn shells_of_known_points() {
        for (name, point, least, n) in [
            ("primitive-cubic", [0.5, 0.5, 0.5], 4, 8),
            ("primitive-cubic", [0.5, 0.5, 0.0], 3, 4),
            ("ccp", [0.5, 0.5, 0.5], 4, 6),
            ("ccp", [0.25, 0.25, 0.25], 4, 4),
        ] {
            let host = Host::parse(name).unwrap();
            let radii = vec![1.0; host.spheres.len()];
            let spheres = Spheres::new(&host.lattice, &host.spheres, &radii);
            let point = Fractional(host.spheres[0].0 + nalgebra::Vector3::from(point));
            assert_eq!(around(&spheres, &point, least).len(), n, "{name} {point:?}");
        }
    }
}
