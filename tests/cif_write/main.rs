//! Writing CIF: 33 structure types, symmetrised and in P 1, held against what their JSON states and against the
//! dictionary's facts.

#![allow(clippy::unwrap_used, reason = "helpers of tests")]

mod names;
mod prototypes;

use interstice::crystal::neighbours::NeighbourList;
use interstice::crystal::{Occupant, Structure, symmetry};
use interstice::format::cif::citation::Citation;
use interstice::format::cif::write::{CAUTION, Description, WriteError, write};
use interstice::ion::amount::to_f64;
use interstice::ion::{Amount, Element, Species};
use prototypes::Prototype;

fn description(explicit: bool) -> Description {
    Description { block_code: "test".into(), explicit, ..Description::default() }
}

/// Value of a single item, quotes removed.
fn item<'a>(cif: &'a str, name: &str) -> &'a str {
    let line = cif.lines().find(|l| l.split(' ').next() == Some(name)).unwrap_or_else(|| panic!("no {name}"));
    line[name.len()..].trim().trim_matches('\'')
}

/// Rows of the site list, split at blanks.
fn rows(cif: &str) -> Vec<Vec<&str>> {
    let start = cif.rfind("_atom_site_").unwrap();
    cif[start..].lines().skip(1).map(|line| line.split(' ').collect()).collect()
}

/// Space group, setting, formula, Z, multiplicities and Wyckoff letters as the JSON states them (recalled from the
/// papers it names; expanded and verified by spglib 2.8.0 and gemmi 0.7.5).
#[test]
fn prototypes_are_written_in_their_space_group() {
    let mut settings = 0;
    for prototype in Prototype::all() {
        let id = prototype.id();
        let cif = write(&prototype.structure(), &description(false)).unwrap_or_else(|e| panic!("{id}: {e}"));
        names::check(&cif);
        assert_eq!(item(&cif, "_space_group_IT_number"), prototype.number().to_string(), "{id}");
        // In the stated setting the letters are those stated; in another one they may differ.
        let same_setting = item(&cif, "_space_group_name_Hall") == prototype.hall();
        let place = |multiplicity: &str, letter: &str| {
            if same_setting { format!("{multiplicity}{letter}") } else { multiplicity.to_owned() }
        };
        let mut written: Vec<String> = rows(&cif).iter().map(|r| place(r[6], r[7])).collect();
        let mut stated: Vec<String> = prototype.places().iter().map(|(m, letter)| place(m, letter)).collect();
        written.sort();
        stated.sort();
        assert_eq!(written, stated, "{id}");
        settings += usize::from(same_setting);
        assert_eq!(item(&cif, "_cell_formula_units_Z"), prototype.z().to_string(), "{id}");
        let volume: f64 = item(&cif, "_cell_volume").parse().unwrap();
        assert!((volume - prototype.volume()).abs() < 1e-3, "{id}: {volume}");
    }
    assert!(settings >= 30, "{settings} in the stated setting");
}

#[test]
fn prototypes_are_written_atom_by_atom() {
    for prototype in Prototype::all() {
        let structure = prototype.structure();
        let cif = write(&structure, &description(true)).unwrap();
        names::check(&cif);
        assert_eq!(item(&cif, "_space_group_name_H-M_alt"), "P 1");
        assert_eq!(rows(&cif).len(), structure.sites.iter().map(|s| s.occupants.len()).sum::<usize>());
        assert_eq!(item(&cif, "_cell_formula_units_Z"), prototype.z().to_string(), "{}", prototype.id());
    }
}

/// International Tables A: spinel is F d -3 m with 8a, 16d, 32e (origin choice 2).
/// Weight: 24.305 + 2 × 26.9815385 + 4 × 15.999 u (CIAAW).
#[test]
fn spinel_is_written_whole() {
    let spinel = Prototype::named("spinel_normal");
    let mut description = description(false);
    description.name = Some("spinel".into());
    description.source_date = Some("1796083200".into());
    description.notes = vec!["Made for a test; 3 Å; Kröger–Vink.".into()];
    let cif = write(&spinel.structure(), &description).unwrap();
    names::check(&cif);
    assert_eq!(item(&cif, "_space_group_name_H-M_alt"), "F d -3 m");
    assert_eq!(item(&cif, "_space_group_name_Hall"), "-F 4vw 2vw 3");
    assert_eq!(item(&cif, "_chemical_formula_sum"), "Al2 Mg O4");
    assert_eq!(item(&cif, "_chemical_formula_moiety"), "(Al 3+)2, Mg 2+, (O 2-)4");
    assert_eq!(item(&cif, "_chemical_formula_weight"), "142.264");
    assert_eq!(item(&cif, "_audit_creation_date"), "2026-12-01");
    assert!(cif.contains("\n192 "));
    assert!(cif.contains("3 \\%A; Kr\\\"oger--Vink."));
    let letters: Vec<_> = rows(&cif).iter().map(|r| (r[1].to_owned(), r[6].to_owned() + r[7])).collect();
    for (symbol, place) in [("Mg2+", "8a"), ("Al3+", "16d"), ("O2-", "32e")] {
        assert!(letters.contains(&(symbol.into(), place.into())), "{symbol} {letters:?}");
    }
    let density: f64 = item(&cif, "_exptl_crystal_density_diffrn").parse().unwrap();
    let volume: f64 = item(&cif, "_cell_volume").parse().unwrap();
    // Z M / (N_A V) with N_A = 6.02214076e23 exactly (SI).
    assert!((density - 8.0 * 142.264 / (0.602214076 * volume)).abs() < 5.1e-5);
    assert!(cif.replace('\n', " ").contains(&CAUTION[..60]));
}

#[test]
fn shared_sites_stand_in_assemblies() {
    let spinel = Prototype::named("spinel_normal");
    let mut structure = spinel.structure();
    let mg = structure.sites[0].occupants[0].species;
    let al = structure.sites.iter().map(|s| s.occupants[0].species).find(|s| s.element.symbol() == "Al").unwrap();
    for site in &mut structure.sites {
        let symbol = site.occupants[0].species.element.symbol();
        let shares = match symbol {
            "Mg" => [(mg, Amount::new(3, 4)), (al, Amount::new(1, 4))],
            "Al" => [(al, Amount::new(7, 8)), (mg, Amount::new(1, 8))],
            _ => continue,
        };
        site.occupants = shares.map(|(species, occupancy)| Occupant { species, occupancy }).into();
    }
    for explicit in [false, true] {
        let cif = write(&structure, &description(explicit)).unwrap();
        names::check(&cif);
        assert_eq!(item(&cif, "_chemical_formula_sum"), "Al2 Mg O4");
        let rows = rows(&cif);
        let shared: Vec<_> = rows.iter().filter(|r| r[r.len() - 2].starts_with('S')).collect();
        assert_eq!(shared.len(), if explicit { 48 } else { 4 });
        for pair in shared.chunks(2) {
            assert_eq!(pair[0][2..5], pair[1][2..5], "one position");
            assert_eq!([pair[0][pair[0].len() - 1], pair[1][pair[1].len() - 1]], ["1", "2"]);
            let sum: f64 = pair.iter().map(|r| r[5].parse::<f64>().unwrap()).sum();
            assert_eq!(sum, 1.0);
        }
    }
}

#[test]
fn vacancies_and_sources_are_said() {
    let mut structure = Prototype::named("fluorite").structure();
    for site in structure.sites.iter_mut().filter(|s| s.occupants[0].species.element.symbol() == "F") {
        site.occupants = [Occupant { occupancy: Amount::new(39, 40), ..site.occupants[0] }].into();
    }
    let mut description = description(true);
    description.citations = vec![Citation {
        authors: vec!["Nobody, N.".into(), "O'Body, \"S\"".into()],
        title: Some("A title; with 'quotes' and \"more\" of them".into()),
        year: Some(1999),
        ..Citation::default()
    }];
    let cif = write(&structure, &description).unwrap();
    names::check(&cif);
    assert!(cif.contains("8 sites of the cell held by F1- 39/40 are vacant for the remaining 1/40."), "{cif}");
    assert!(cif.contains("0.975 calc\n"));
    assert!(cif.contains("\n;\nA title; with 'quotes' and \"more\" of them\n;\n"));
}

#[test]
fn what_cannot_be_written_is_refused() {
    let good = Prototype::named("rocksalt").structure();
    let mut bad = good.clone();
    bad.sites[3].occupants = [Occupant { occupancy: Amount::new(9, 8), ..bad.sites[3].occupants[0] }].into();
    assert_eq!(
        write(&bad, &description(true)).unwrap_err().to_string(),
        "site 4 has occupancies that add up to 9/8; they must add up to more than 0 and at most 1"
    );
    let mut bad = good.clone();
    bad.sites[0].position.0.x = f64::NAN;
    assert_eq!(write(&bad, &description(true)).unwrap_err(), WriteError::Coordinate { site: 1 });
    let mut bad = good.clone();
    let mut charged = bad.sites[0].occupants[0];
    charged.species.charge = Some(9);
    bad.sites[0].occupants = [charged].into();
    assert!(matches!(write(&bad, &description(false)).unwrap_err(), WriteError::Charge { .. }));
    let mut bad = good.clone();
    bad.sites.clear();
    assert!(matches!(write(&bad, &description(true)).unwrap_err(), WriteError::Symmetry(_)));
    for date in ["", "yesterday", "-1", "99999999999999999999", "253402300800"] {
        let description = Description { source_date: Some(date.into()), ..description(true) };
        assert!(matches!(write(&good, &description).unwrap_err(), WriteError::Date { .. }), "{date}");
    }
    let description = Description { source_date: Some("253402300799".into()), ..description(true) };
    assert!(write(&good, &description).unwrap().contains("9999-12-31"));
}

/// Leaves files, and what we say of them, for the readers of `tests/readers/check.py`, in target/tmp/readers.
#[test]
fn files_for_independent_readers() {
    let folder = std::path::Path::new(env!("CARGO_TARGET_TMPDIR")).join("readers");
    std::fs::create_dir_all(&folder).unwrap();
    for (name, structure) in examples() {
        let found = symmetry::symmetrise(&structure, symmetry::TOLERANCE).unwrap();
        for explicit in [false, true] {
            let described = Description { block_code: name.clone(), explicit, ..Description::default() };
            let cif = write(&structure, &described).unwrap();
            names::check(&cif);
            let (number, sites) = match explicit {
                true => (1, structure.sites.len()),
                false => (found.group.number, found.orbits.iter().map(|o| o.multiplicity).sum()),
            };
            let factor = sites as f64 / structure.sites.len() as f64;
            let mut atoms = std::collections::BTreeMap::new();
            for (species, amount) in structure.amounts() {
                *atoms.entry(species.element.symbol()).or_insert(0.0) += factor * to_f64(&amount);
            }
            let lattice = if explicit { &structure.lattice } else { &found.lattice };
            let p = lattice.parameters();
            let says = serde_json::json!({
                "cell": [p.a, p.b, p.c, p.alpha, p.beta, p.gamma],
                "number": number,
                "found": found.group.number,
                "sites": sites,
                "atoms": atoms,
                "shortest": shortest(&structure),
            });
            let stem = folder.join(format!("{name}{}", if explicit { "-p1" } else { "" }));
            std::fs::write(stem.with_extension("cif"), cif).unwrap();
            std::fs::write(stem.with_extension("json"), says.to_string()).unwrap();
        }
    }
}

/// Every structure type, and one with shared sites, vacancies, mixed valence and an unknown charge.
fn examples() -> Vec<(String, Structure)> {
    let mut all: Vec<_> = Prototype::all().iter().map(|p| (p.id().to_owned(), p.structure())).collect();
    let mut shared = Prototype::named("spinel_normal").structure();
    let share = |symbol, charge: Option<i8>, n, d| Occupant {
        species: Species { element: Element::from_symbol(symbol).unwrap(), charge, spin: None },
        occupancy: Amount::new(n, d),
    };
    for site in &mut shared.sites {
        site.occupants = match site.occupants[0].species.element.symbol() {
            "Mg" => [share("Fe", Some(2), 1, 3), share("Fe", Some(3), 1, 3), share("Zn", None, 1, 3)].into(),
            "Al" => [share("Al", Some(3), 7, 8), share("Fe", Some(3), 1, 16)].into(),
            _ => [share("O", Some(-2), 123, 125)].into(),
        };
    }
    all.push(("shared".into(), shared));
    all
}

/// Shortest distance between two sites, Å.
fn shortest(structure: &Structure) -> f64 {
    let positions = structure.positions();
    let list = NeighbourList::new(&structure.lattice, &positions, 4.0);
    (0..positions.len()).flat_map(|i| list.of(i, 4.0)).map(|n| n.distance).fold(f64::INFINITY, f64::min)
}
