//! Published structures: their anions as packing spheres, every cation looked for in an interstice of them.

use interstice::crystal::{Fractional, Lattice, Parameters, Site, Structure};
use interstice::ion::radius::RadiusSet;
use interstice::ion::{Element, Ion};
use interstice::packing::framework::{framework, parse_elements};
use interstice::packing::{Host, Interstice, Survey, survey};
use serde_json::Value;
use std::path::Path;

/// A structure type of the data folder: its structure, the elements that are anions, and its cation sites (label, number
/// of its neighbours as published, position).
struct Type {
    structure: Structure,
    anions: Vec<Element>,
    cations: Vec<(String, usize, Fractional)>,
    /// Label of every site of the cell.
    all: Vec<String>,
}

fn read(name: &str) -> Type {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join(format!("tests/data/prototypes/{name}.json"));
    let json: Value = serde_json::from_str(&std::fs::read_to_string(path).unwrap()).unwrap();
    let parameters: Parameters = serde_json::from_value(json["cell"].clone()).unwrap();
    let sites = json["sites"].as_array().unwrap();
    let ion_of = |label: &str| {
        let site = sites.iter().find(|s| s["label"] == label).unwrap();
        let species = &site["species"][0];
        let element = Element::from_symbol(species["element"].as_str().unwrap()).unwrap();
        Ion::new(element, species["oxidation_state"].as_i64().unwrap() as i8)
    };
    let (mut sites_of_cell, mut all, mut cations, mut anions) = (Vec::new(), Vec::new(), Vec::new(), Vec::new());
    for atom in json["expanded"].as_array().unwrap() {
        let label = atom["label"].as_str().unwrap();
        let x = |k: usize| atom["xyz"][k].as_f64().unwrap();
        let position = Fractional::new(x(0), x(1), x(2)).reduced();
        let ion = ion_of(label);
        sites_of_cell.push(Site::full(position, ion.into()));
        all.push(label.to_string());
        if ion.charge < 0 && !anions.contains(&ion.element) {
            anions.push(ion.element);
        }
        if ion.charge > 0 && cations.iter().all(|(l, _, _): &(String, usize, Fractional)| l != label) {
            let n = json["environments"][label]["cn"].as_u64().unwrap_or(0) as usize;
            cations.push((label.to_string(), n, position));
        }
    }
    let structure = Structure { lattice: Lattice::from_parameters(&parameters).unwrap(), sites: sites_of_cell };
    Type { structure, anions, cations, all }
}

/// The interstice, or failing one within half an Å the saddle, nearest to a position; and how far it is, Å.
fn nearest<'a>(survey: &'a Survey, lattice: &Lattice, position: &Fractional) -> (&'a Interstice, f64) {
    let near = |list: &'a [Interstice]| {
        list.iter().map(|h| (h, lattice.distance(&h.position, position))).min_by(|a, b| a.1.total_cmp(&b.1))
    };
    match near(&survey.interstices) {
        Some(found) if found.1 < 0.5 => found,
        other => near(&survey.saddles).into_iter().chain(other).min_by(|a, b| a.1.total_cmp(&b.1)).unwrap(),
    }
}

/// Farthest from the centre of its interstice that a cation may sit, Å. Most sit in it by symmetry; olivine's M2 is the
/// farthest of those known here, 0.12 Å.
const BOUND: f64 = 0.125;

/// Structure types with the shape of the site of each cation. The number of neighbours is the published one of the data
/// file (its `environments`); the names of shapes follow A. F. Wells, Structural Inorganic Chemistry (Oxford).
const TYPES: [(&str, &[&str]); 33] = [
    ("aluminium_chloride", &["octahedral"]),
    ("anatase", &["octahedral"]),
    ("antifluorite", &["tetrahedral"]),
    ("bismuth_iodide", &["octahedral"]),
    ("bixbyite", &["octahedral", "octahedral"]),
    ("brookite", &["octahedral"]),
    ("cadmium_chloride", &["octahedral"]),
    ("cadmium_iodide", &["octahedral"]),
    ("cesium_chloride", &["cubic"]),
    ("chromium_chloride_r", &["octahedral"]),
    ("corundum", &["octahedral"]),
    ("cuprite", &["linear"]),
    ("delafossite", &["linear", "octahedral"]),
    ("fluorite", &["cubic"]),
    // Between cube and dodecahedron, nearer to the cube in YAG.
    ("garnet", &["cubic", "octahedral", "tetrahedral"]),
    ("iron_trifluoride", &["octahedral"]),
    ("k2nif4", &["tricapped trigonal prismatic", "octahedral"]),
    ("k2ptcl6", &["cuboctahedral", "octahedral"]),
    ("li2mno3", &["octahedral", "octahedral", "octahedral", "octahedral"]),
    ("li3ycl6", &["octahedral", "octahedral", "octahedral", "octahedral"]),
    ("nickeline", &["octahedral"]),
    ("olivine", &["octahedral", "octahedral", "tetrahedral"]),
    ("perovskite_6h", &["anticuboctahedral", "cuboctahedral", "octahedral", "octahedral"]),
    ("perovskite_cubic", &["cuboctahedral", "octahedral"]),
    ("pyrochlore", &["cubic", "octahedral"]),
    ("rhenium_trioxide", &["octahedral"]),
    ("rocksalt", &["octahedral"]),
    ("rutile", &["octahedral"]),
    ("scheelite", &["dodecahedral", "tetrahedral"]),
    ("spinel_normal", &["tetrahedral", "octahedral"]),
    ("trirutile", &["octahedral", "octahedral"]),
    ("wurtzite", &["tetrahedral"]),
    ("zincblende", &["tetrahedral"]),
];

fn host_of(name: &str, t: &Type) -> Host {
    // Shannon (1976) has no As3-: half the distance of touching As, 3.26 Å, in NiAs.
    let radius = |e: &Element| (e.symbol() == "As").then_some(1.63);
    let elements: Vec<_> = t.anions.iter().map(|e| (*e, radius(e))).collect();
    framework(name, &t.structure, &elements, RadiusSet::Crystal).unwrap()
}

#[test]
fn every_cation_sits_in_an_interstice_of_its_anions() {
    for (name, kinds) in TYPES {
        let t = read(name);
        let host = host_of(name, &t);
        let found = survey(&host).unwrap();
        assert_eq!(t.cations.len(), kinds.len(), "{name}");
        for ((label, n, position), kind) in t.cations.iter().zip(kinds) {
            let (hole, distance) = nearest(&found, &t.structure.lattice, position);
            println!("{name} {label}: {} {}, {distance:.3} Å from its centre", hole.formula(&host), hole.kind);
            assert!(distance < BOUND, "{name} {label}: {distance:.3} Å");
            assert_eq!((hole.shell.len(), hole.kind.to_string().as_str()), (*n, *kind), "{name} {label}");
        }
    }
}

/// How much of a kind of interstice is filled, as the type's source states it (`packing` of the data file): kind,
/// labels of the cations in it, filled, of how many. Types whose empty octahedra are too distorted to remain one hole
/// (the rutile family, anatase, brookite) are left out.
#[test]
fn the_published_share_of_interstices_is_filled() {
    for (name, kind, labels, filled, of) in [
        ("rocksalt", "octahedral", "Na", 1, 1),
        ("zincblende", "tetrahedral", "Zn", 1, 2),
        ("wurtzite", "tetrahedral", "Zn", 1, 2),
        ("nickeline", "octahedral", "Ni", 1, 1),
        ("cesium_chloride", "cubic", "Cs", 1, 1),
        ("fluorite", "cubic", "Ca", 1, 2),
        ("antifluorite", "tetrahedral", "Li", 1, 1),
        ("corundum", "octahedral", "Al", 2, 3),
        ("spinel_normal", "octahedral", "Al", 1, 2),
        ("spinel_normal", "tetrahedral", "Mg", 1, 8),
        ("olivine", "octahedral", "M1 M2", 1, 2),
        ("cadmium_iodide", "octahedral", "Cd", 1, 2),
        ("cadmium_chloride", "octahedral", "Cd", 1, 2),
        ("bismuth_iodide", "octahedral", "Bi", 1, 3),
        ("chromium_chloride_r", "octahedral", "Cr", 1, 3),
        ("aluminium_chloride", "octahedral", "Al", 1, 3),
        ("li2mno3", "octahedral", "Mn Li1 Li2 Li3", 1, 1),
        // Li2 half occupied, the rest empty: a sixth Y, two thirds of the sites named at all.
        ("li3ycl6", "octahedral", "Y1 Y2", 1, 6),
        ("delafossite", "octahedral", "Fe", 1, 1),
        ("perovskite_cubic", "octahedral", "Ti", 1, 1),
        ("perovskite_6h", "octahedral", "Ti1 Ti2", 1, 1),
        ("rhenium_trioxide", "octahedral", "Re", 1, 1),
        ("k2ptcl6", "octahedral", "Pt", 1, 2),
        ("scheelite", "dodecahedral", "Ca", 1, 1),
    ] {
        let t = read(name);
        let found = survey(&host_of(name, &t)).unwrap().interstices;
        let holes = found.iter().filter(|h| h.kind.to_string() == kind).count();
        let cations: usize = labels.split(' ').map(|label| t.all.iter().filter(|l| *l == label).count()).sum();
        assert_eq!(cations * of, holes * filled, "{name}: {cations} cations in {holes} {kind}");
    }
}

/// Perovskites with the large cation in the packing: all B cations in octahedra of anions alone, a quarter of all.
#[test]
fn large_cations_belong_to_the_packing() {
    for (name, elements) in [("perovskite_cubic", "O,Sr"), ("perovskite_6h", "O,Ba"), ("k2ptcl6", "Cl,K")] {
        let t = read(name);
        let host = framework(name, &t.structure, &parse_elements(name, elements).unwrap(), RadiusSet::Crystal).unwrap();
        let found = survey(&host).unwrap();
        let inside = format!("{}6", host.roles[0].name);
        for (label, _, position) in t.cations.iter().filter(|(_, n, _)| *n == 6) {
            let (hole, distance) = nearest(&found, &t.structure.lattice, position);
            assert_eq!((hole.formula(&host), hole.kind.to_string().as_str()), (inside.clone(), "octahedral"), "{name}");
            assert!(distance < BOUND, "{name} {label}: {distance:.3} Å");
        }
        let all = found.interstices.iter().filter(|h| h.formula(&host) == inside).count();
        assert_eq!(4 * all, host.spheres.len(), "{name}");
    }
}

/// Cu+ of delafossite sits between two oxygens straight above each other; Li+ of antifluorite passes through triangles.
#[test]
fn windows_of_real_frameworks_are_in_angstrom() {
    let t = read("antifluorite");
    let host = host_of("antifluorite", &t);
    let found = survey(&host).unwrap();
    // Oxygens at a/√2 from each other, a 4.619 Å; circle through three of them, less the radius 1.26 Å of O2- (VI).
    let want = (4.619 / 2.0_f64.sqrt() / 3.0_f64.sqrt() - 1.26) / 1.26;
    for critical in found.critical_ratios {
        assert!((critical.unwrap() - want).abs() < 1e-6);
    }
    assert!((host.scale.unwrap() - 1.26).abs() < 1e-12);
    assert!(found.networks(want - 1e-6)[0].dimension == 3 && found.networks(want + 1e-6)[0].dimension == 0);
}

#[test]
fn frameworks_that_cannot_be_are_refused() {
    let t = read("perovskite_cubic");
    let refused = |text: &str| {
        parse_elements("SrTiO3", text)
            .and_then(|elements| framework("SrTiO3", &t.structure, &elements, RadiusSet::Crystal))
            .unwrap_err()
            .to_string()
    };
    for (text, part) in [
        ("F", "no site is held mainly by F; the crystal holds O2-, Ti4+, Sr2+"),
        ("Xx", "`Xx` is no element; write for example `#O,F`"),
        ("O,O", "O is named twice"),
        ("O:9", "`9` is no radius of O; 0.1 to 4 Å are accepted"),
        ("O:x", "`x` is no radius of O"),
        ("", "`` is no element"),
        ("O:4", "split positions of one ion; keep one"),
    ] {
        let message = refused(text);
        assert!(message.starts_with("framework of `SrTiO3`: ") && message.contains(part), "{text}: {message}");
    }
}
