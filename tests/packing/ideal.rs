//! Ideal packings against closed forms and textbook counts.

use crate::made::{counts, transformed};
use interstice::crystal::{Fractional, Lattice, Parameters};
use interstice::packing::{Class, Host, Interstice, Kind, Role, Sharing, Survey, Templates, Window};
use interstice::packing::{interstices, polytypes, shared, survey};
use std::collections::BTreeMap;

/// 2/√3 − 1: the circle between three touching spheres (Pauling 1929, coordination number 3).
const TRIANGLE: f64 = 0.154_700_538_379_251_5;
/// √(3/2) − 1: coordination number 4, tetrahedron; also the largest circle in bcc's triangle of edges 2, 2, 4/√3.
const TETRAHEDRON: f64 = 0.224_744_871_391_589_05;
/// √2 − 1: coordination number 6, octahedron; coordination number 4, square.
const OCTAHEDRON: f64 = 0.414_213_562_373_095_05;

fn surveyed(name: &str) -> (Host, Survey) {
    let host = Host::parse(name).unwrap();
    let found = survey(&host).unwrap();
    (host, found)
}

/// Windows gathered by what they join and their spheres: number in the cell and ratio.
fn windows(host: &Host, found: &Survey) -> BTreeMap<String, (usize, f64)> {
    let mut all = BTreeMap::new();
    for w in &found.windows {
        let kind = |i: usize| found.interstices[i].kind.to_string();
        let mut ends = [kind(w.from), kind(w.to)];
        ends.sort();
        let entry = all.entry(format!("{}/{}/{}", ends[0], ends[1], w.formula(host))).or_insert((0, w.ratio));
        assert!((entry.1 - w.ratio).abs() < 1e-9, "{} {} {}", host.name, entry.1, w.ratio);
        entry.0 += 1;
    }
    all
}

/// Every face of every interstice of a packing leads somewhere: per sphere of a close packing 8 triangles (an octahedron
/// has 8 faces, two tetrahedra 4 each, each face shared by two).
#[test]
fn windows_are_the_circles_between_spheres() {
    for (name, want) in [
        ("ccp", vec![("octahedral/tetrahedral/X3", 8, TRIANGLE)]),
        (
            "hcp",
            vec![
                ("octahedral/octahedral/X3", 2, TRIANGLE),
                ("octahedral/tetrahedral/X3", 12, TRIANGLE),
                ("tetrahedral/tetrahedral/X3", 2, TRIANGLE),
            ],
        ),
        ("bcc", vec![("tetrahedral/tetrahedral/X3", 12, TETRAHEDRON)]),
        ("primitive-cubic", vec![("cubic/cubic/X4", 3, OCTAHEDRON)]),
        (
            "layers:AABB",
            vec![
                ("octahedral/tetrahedral/X3", 12, TRIANGLE),
                ("octahedral/trigonal prismatic/X3", 4, TRIANGLE),
                ("tetrahedral/trigonal prismatic/X3", 4, TRIANGLE),
                ("trigonal prismatic/trigonal prismatic/X4", 6, OCTAHEDRON),
            ],
        ),
    ] {
        let (host, found) = surveyed(name);
        let all = windows(&host, &found);
        assert_eq!(all.len(), want.len(), "{name}: {all:?}");
        for (key, number, ratio) in want {
            let (n, r) = all[key];
            assert_eq!(n, number, "{name} {key}");
            assert!((r - ratio).abs() < 1e-12, "{name} {key}: {r}");
        }
    }
}

fn saddles(found: &Survey, class: Class, kind: Kind) -> Vec<&Interstice> {
    found.saddles.iter().filter(|s| s.class == class && s.kind == kind).collect()
}

/// bcc's octahedral interstice: 3 a sphere, 2/√3 − 1, between two spheres at a/2 and four at a/√2; hcp's trigonal
/// bipyramid: 1 a sphere, the triangle's circle; ccp has neither. (A. F. Wells; C. Kittel, Introduction to Solid State
/// Physics, for bcc.) Site symmetries: International Tables A, 229 6b 4/mm.m; 194 2d -6m2.
#[test]
fn saddles_are_reported_as_such() {
    let (_, bcc) = surveyed("bcc");
    let octahedra = saddles(&bcc, Class::Edge, Kind::Octahedral);
    assert_eq!(octahedra.len(), 3);
    for s in octahedra {
        assert!((s.ratio - TRIANGLE).abs() < 1e-12);
        assert_eq!((s.multiplicity, s.site_symmetry), (3, "4/mmm"));
        let mut distances: Vec<f64> = s.shell.iter().map(|c| c.distance).collect();
        distances.sort_by(f64::total_cmp);
        let a = 4.0 / 3.0_f64.sqrt();
        for (d, want) in distances.iter().zip([a / 2.0, a / 2.0, a / 2.0_f64.sqrt()]) {
            assert!((d - want).abs() < 1e-12);
        }
    }
    assert_eq!(saddles(&bcc, Class::Face, Kind::Triangular).len(), 12);
    let (_, hcp) = surveyed("hcp");
    let bipyramids = saddles(&hcp, Class::Face, Kind::TrigonalBipyramidal);
    assert_eq!(bipyramids.len(), 2);
    assert!(bipyramids.iter().all(|s| (s.ratio - TRIANGLE).abs() < 1e-12 && s.site_symmetry == "-6m2"));
    assert_eq!(hcp.saddles.len(), 16);
    let (_, ccp) = surveyed("ccp");
    assert!(ccp.saddles.len() == 8 && ccp.saddles.iter().all(|s| s.kind == Kind::Triangular));
    let (_, cubic) = surveyed("primitive-cubic");
    assert!(cubic.saddles.len() == 3 && cubic.saddles.iter().all(|s| s.kind == Kind::Square));
}

/// Layers AX₃ in any stacking, per formula unit: 1 octahedron of X alone, 3 X₄A₂, 8 tetrahedra X₃A, all of the size that
/// they have among equal spheres (Wells, chapter on AX₃ layers).
#[test]
fn ax3_layers_have_their_octahedra() {
    for n in 2..=6 {
        for stacking in polytypes(n).unwrap() {
            let host = Host::parse(&format!("ax3:{stacking}")).unwrap();
            let units = host.spheres.len() / 4;
            let found = interstices(&host).unwrap();
            let want = [("octahedral X4A2", 3), ("octahedral X6", 1), ("tetrahedral X3A", 8)];
            let want = want.into_iter().map(|(k, n)| (k.to_string(), n * units)).collect();
            assert_eq!(counts(&host, &found), want, "{stacking}");
        }
    }
}

/// A larger A narrows what it touches and leaves the X₆ octahedra as they are; between A and A stays √8 − 2 r.
#[test]
fn a_large_a_changes_sizes_not_kinds() {
    for radius in [0.9, 1.05, 1.1, 1.15] {
        for word in ["c", "h", "hc", "hcc"] {
            let host = Host::parse(&format!("ax3:{word}:A={radius}")).unwrap();
            let found = interstices(&host).unwrap();
            assert_eq!(counts(&host, &found).len(), 3, "{word} {radius}");
            for hole in &found {
                match hole.formula(&host).as_str() {
                    "X6" => assert!((hole.ratio - OCTAHEDRON).abs() < 1e-9),
                    "X4A2" if word == "c" => {
                        let want = OCTAHEDRON.min(2.0_f64.sqrt() - radius);
                        assert!((hole.ratio - want).abs() < 1e-9, "{radius}: {}", hole.ratio);
                    }
                    _ => {}
                }
            }
        }
    }
}

/// Every close-packed stacking of up to 8 layers: 2 tetrahedra and 1 octahedron a sphere.
#[test]
fn all_polytypes_have_the_same_holes() {
    for n in 2..=8 {
        for stacking in polytypes(n).unwrap() {
            let host = Host::parse(&format!("stack:{stacking}")).unwrap();
            let found = interstices(&host).unwrap();
            let number = |kind| found.iter().filter(|h| h.kind == kind).count();
            let spheres = host.spheres.len();
            assert_eq!(
                (number(Kind::Tetrahedral), number(Kind::Octahedral), found.len()),
                (2 * spheres, spheres, 3 * spheres),
                "{stacking}"
            );
        }
    }
}

/// MgCu₂ has 17 tetrahedra a formula unit: 12 A₂B₂, 4 AB₃, 1 B₄ (D. P. Shoemaker & C. B. Shoemaker, J. Less-Common Met.
/// 68, 43 (1979), from memory), so argyrodite 136 a cubic cell (Kuhs, Nitsche & Scheunemann 1979). Its fluorite- and
/// scheelite-derived relatives count as their parents do.
#[test]
fn templates_have_the_holes_of_their_arrays() {
    for (name, want) in [
        ("argyrodite", vec![("tetrahedral X4", 2), ("tetrahedral X3Y", 8), ("tetrahedral X2Y2", 24)]),
        ("argyrodite:Y=1.2247", vec![("tetrahedral X4", 2), ("tetrahedral X3Y", 8), ("tetrahedral X2Y2", 24)]),
        ("fluorite-cations", vec![("octahedral M6", 1), ("tetrahedral M4", 2)]),
        ("scheelite-cations", vec![("octahedral A3B3", 4), ("tetrahedral A2B2", 8)]),
        ("body-centred-tetragonal", vec![("tetrahedral X4", 6)]),
        ("body-centred-tetragonal:ca=1.4142", vec![("octahedral X6", 1), ("tetrahedral X4", 2)]),
        // A cube with two of its corners vacant is six-coordinated; the vacancies themselves are octahedra of ratio 1.
        ("pyrochlore", vec![("capped trigonal prismatic X7", 8), ("cubic X8", 4), ("octahedral X6", 6)]),
        ("bixbyite", vec![("octahedral X6", 16), ("trigonal prismatic X6", 24)]),
        ("layer-pairs", vec![("octahedral X6", 1), ("tetrahedral X4", 2), ("trigonal prismatic X6", 2)]),
    ] {
        let host = Host::parse(name).unwrap();
        let want: BTreeMap<String, usize> = want.into_iter().map(|(k, n)| (k.to_string(), n)).collect();
        assert_eq!(counts(&host, &interstices(&host).unwrap()), want, "{name}");
    }
    for name in Templates::embedded().names() {
        let host = Host::parse(name).unwrap();
        // Tetrahedrally close packed or derived from close packings: never fewer holes than spheres.
        assert!(interstices(&host).unwrap().len() >= host.spheres.len(), "{name}");
        assert!(Templates::embedded().get(name).unwrap().source.len() > 20, "{name}");
    }
    assert_eq!(Templates::embedded().names().count(), 8);
}

/// Octahedra share edges in ccp (centres 2 apart) and faces along c in hcp (c/2 = 2√(2/3) apart); a pair of hcp's
/// tetrahedra shares a face at c/4, 0.41 of the sphere's diameter (Wells).
#[test]
fn polyhedra_share_corners_edges_and_faces() {
    let nearest = |name: &str, a: Kind, b: Kind| {
        let (host, found) = surveyed(name);
        let kind = |i: usize| found.interstices[i].kind;
        let pairs = shared(&host, &found.interstices);
        let of = pairs.iter().filter(|p| kind(p.first) == a && kind(p.second) == b);
        let least = of.clone().map(|p| p.distance).fold(f64::INFINITY, f64::min);
        let at_least: Vec<_> = of.filter(|p| p.distance < least + 1e-9).collect();
        let of_kind = found.interstices.iter().filter(|h| h.kind == a).count();
        (at_least[0].sharing, least, at_least.len() / of_kind)
    };
    use Kind::{Cubic, Octahedral, Tetrahedral};
    let layer = 2.0 * (2.0_f64 / 3.0).sqrt();
    for (name, a, b, sharing, distance, number) in [
        ("ccp", Octahedral, Octahedral, Sharing::Edge, 2.0, 12),
        ("ccp", Octahedral, Tetrahedral, Sharing::Face, 1.5_f64.sqrt(), 8),
        ("ccp", Tetrahedral, Tetrahedral, Sharing::Edge, 2.0_f64.sqrt(), 6),
        ("hcp", Octahedral, Octahedral, Sharing::Face, layer, 2),
        ("hcp", Tetrahedral, Tetrahedral, Sharing::Face, layer / 2.0, 1),
        ("primitive-cubic", Cubic, Cubic, Sharing::Face, 2.0, 6),
        ("bcc", Tetrahedral, Tetrahedral, Sharing::Face, 2.0_f64.sqrt() / 3.0_f64.sqrt(), 4),
    ] {
        let (found, d, n) = nearest(name, a, b);
        assert_eq!((found, n), (sharing, number), "{name} {a} {b}");
        assert!((d - distance).abs() < 1e-9, "{name} {a} {b} {d}");
    }
}

/// Primitive tetragonal, a = 2.4, c = 2: through the squares along c, √2 · 1.2 − 1; sideways through rectangles,
/// √(1 + 1.44) − 1.
fn tetragonal() -> Host {
    let p = Parameters { a: 2.4, b: 2.4, c: 2.0, alpha: 90.0, beta: 90.0, gamma: 90.0 };
    Host {
        name: "tetragonal".into(),
        lattice: Lattice::from_parameters(&p).unwrap(),
        spheres: vec![Fractional::new(0.0, 0.0, 0.0)],
        role: vec![0],
        roles: vec![Role::anion()],
        stacking: None,
        scale: None,
    }
}

/// Ways through: the same in a supercell and on skewed axes, where a channel leaves the cell through any face.
#[test]
fn percolation_is_exact_on_any_cell() {
    let prism = OCTAHEDRON;
    let along = 2.0_f64.sqrt() * 1.2 - 1.0;
    let across = (1.0_f64 + 1.44).sqrt() - 1.0;
    for (host, want) in [
        (Host::parse("ccp").unwrap(), [TRIANGLE; 3]),
        (Host::parse("hcp").unwrap(), [TRIANGLE; 3]),
        (Host::parse("bcc").unwrap(), [TETRAHEDRON; 3]),
        (Host::parse("primitive-cubic").unwrap(), [OCTAHEDRON; 3]),
        // Along the double layers through the prisms' squares, across them through triangles.
        (Host::parse("layers:AABB").unwrap(), [prism, prism, TRIANGLE]),
        (tetragonal(), [along, across, across]),
    ] {
        for cell in
            [[[1, 0, 0], [0, 1, 0], [0, 0, 1]], [[1, 3, 0], [0, 1, -2], [0, 0, 1]], [[2, 1, 0], [0, 1, 1], [1, 0, 2]]]
        {
            let found = survey(&transformed(&host, cell)).unwrap();
            for (ratio, want) in found.critical_ratios.iter().zip(want) {
                assert!((ratio.unwrap() - want).abs() < 1e-9, "{} {cell:?} {ratio:?} {want}", host.name);
            }
            for (ratio, dimension) in [(want[0] + 1e-6, 0), (want[2] - 1e-6, 3)] {
                assert_eq!(found.networks(ratio)[0].dimension, dimension, "{} {cell:?}", host.name);
            }
        }
    }
    let found = survey(&tetragonal()).unwrap();
    let networks = found.networks((along + across) / 2.0);
    assert_eq!((networks.len(), networks[0].dimension, &networks[0].interstices[..]), (1, 1, &[0][..]));
    assert_eq!(networks[0].directions[0].map(i64::abs), [0, 0, 1]);
}

/// An ion moving through argyrodite's anions meets three kinds of window: X₃ and X₂Y and XY₂. The widest way in three
/// dimensions avoids X₃. Circle through a triangle of sides 2, s, s (s² = 11/2 for X-Y): by computation of its
/// circumradius s²/√(4s² − 4).
#[test]
fn argyrodite_is_crossed_without_its_narrowest_windows() {
    let (host, found) = surveyed("argyrodite");
    let s2 = 5.5_f64;
    let x2y = s2 / (4.0 * s2 - 4.0).sqrt() - 1.0;
    let ratio = |formula: &str| {
        let of: Vec<&Window> = found.windows.iter().filter(|w| w.formula(&host) == formula).collect();
        assert!(of.iter().all(|w| (w.ratio - of[0].ratio).abs() < 1e-12));
        (of.len(), of[0].ratio)
    };
    assert!((ratio("X2Y").1 - x2y).abs() < 1e-12);
    assert!((ratio("X3").1 - TRIANGLE).abs() < 1e-12);
    assert_eq!((ratio("X3").0, ratio("X2Y").0, ratio("XY2").0), (8, 36, 24));
    assert!((found.critical_ratios[2].unwrap() - x2y).abs() < 1e-12);
}

/// International Tables A: 225 4b m-3m, 8c -43m; 194 2a -3m, 4f 3m; 229 12d -42m; 221 1b m-3m. Continuous shape measures
/// of ideal shapes are 0; bcc's tetrahedron is elongated by √(4/3).
#[test]
fn sites_have_their_symmetry_and_shape() {
    for (name, kind, site, multiplicity, ideal) in [
        ("ccp", Kind::Octahedral, "m-3m", 1, true),
        ("ccp", Kind::Tetrahedral, "-43m", 2, true),
        ("hcp", Kind::Octahedral, "-3m", 2, true),
        ("hcp", Kind::Tetrahedral, "3m", 4, true),
        ("bcc", Kind::Tetrahedral, "-42m", 6, false),
        ("primitive-cubic", Kind::Cubic, "m-3m", 1, true),
    ] {
        let (_, found) = surveyed(name);
        for hole in found.interstices.iter().filter(|h| h.kind == kind) {
            assert_eq!((hole.site_symmetry, hole.multiplicity), (site, multiplicity), "{name} {kind}");
            assert_eq!(hole.shape.unwrap() < 1e-9, ideal, "{name} {kind}");
        }
    }
}
