//! Reading structures from CIFs: round trips of what we write, and files as the world writes them.

#![allow(clippy::unwrap_used, reason = "helpers of tests")]

mod cases;
mod matcher;
#[path = "../cif_write/prototypes.rs"]
#[allow(dead_code, reason = "shared with another test")]
mod prototypes;
mod real;
mod symbols;

use interstice::crystal::{Fractional, Lattice, Occupant, Parameters, Site, Structure};
use interstice::format::cif::structure::{ReadStructure, read_structures};
use interstice::format::cif::write::{Description, write};
use interstice::format::cif::{Mode, Source, parse};
use interstice::ion::{Amount, Element, Ion};
use matcher::assert_alike;
use prototypes::Prototype;

/// The only structure of a file, or its error as `line:column: text`.
pub fn read(cif: &str) -> Result<ReadStructure, String> {
    let source = Source::decode("test", cif.as_bytes()).map_err(|e| e.to_string())?;
    let document = parse(&source, Mode::Lenient).map_err(|e| e[0].to_string())?;
    let mut found = read_structures(&document);
    assert_eq!(found.len(), 1, "blocks with sites");
    found.remove(0).map_err(|e| format!("{}:{}: {}", e.line, e.column, e.message))
}

fn description(explicit: bool) -> Description {
    Description { block_code: "test".into(), explicit, ..Description::default() }
}

/// Write, read, write: the same bytes, no warnings, the same structure.
#[track_caller]
fn check_round_trip(structure: &Structure, name: &str) {
    for explicit in [true, false] {
        let first = write(structure, &description(explicit)).unwrap_or_else(|e| panic!("{name}: {e}"));
        let back = read(&first).unwrap_or_else(|e| panic!("{name}: {e}\n{first}"));
        assert!(back.warnings.is_empty(), "{name}: {:?}", back.warnings);
        assert_alike(structure, &back.structure, name);
        let second = write(&back.structure, &description(explicit)).unwrap();
        for (a, b) in first.lines().zip(second.lines()) {
            assert_eq!(a, b, "{name}, explicit {explicit}");
        }
        assert_eq!(first, second, "{name}");
        // The other way of writing the same cell says the same.
        let other = read(&write(&back.structure, &description(!explicit)).unwrap()).unwrap();
        assert_alike(structure, &other.structure, name);
    }
}

#[test]
fn prototypes_survive_round_trips() {
    for prototype in Prototype::all() {
        check_round_trip(&prototype.structure(), prototype.id());
    }
}

/// Every expanded atom of the JSON (made by spglib 2.8.0 and gemmi 0.7.5) is where the reader puts it.
#[test]
fn prototypes_are_read_as_others_expand_them() {
    for prototype in Prototype::all() {
        let back = read(&write(&prototype.structure(), &description(true)).unwrap()).unwrap();
        let expanded = prototype.expanded();
        assert_eq!(back.structure.sites.len(), expanded.len());
        for position in expanded {
            // The JSON has 6 decimals.
            let near = |s: &Site| back.structure.lattice.distance(&s.position, &position) < 2e-5;
            assert!(back.structure.sites.iter().any(near), "{} {position:?}", prototype.id());
        }
    }
}

fn ion(symbol: &str, charge: i8) -> interstice::ion::Species {
    Ion::new(Element::from_symbol(symbol).unwrap(), charge).into()
}

/// A low-discrepancy sequence in place of random numbers: reproducible without a generator.
fn weyl(i: usize) -> Fractional {
    let t = i as f64 + 0.5;
    Fractional::new((t * 0.8191725133961645) % 1.0, (t * 0.6710436067037893) % 1.0, (t * 0.5497004779019703) % 1.0)
}

#[test]
fn hard_cells_survive_round_trips() {
    for (name, p) in [
        ("skewed", Parameters { a: 5.1, b: 7.3, c: 9.7, alpha: 71.3, beta: 103.2, gamma: 64.9 }),
        ("needle", Parameters { a: 2.9, b: 3.1, c: 60.0, alpha: 90.0, beta: 95.0, gamma: 90.0 }),
        ("cubic metric", Parameters { a: 9.0, b: 9.0, c: 9.0, alpha: 90.0, beta: 90.0, gamma: 90.0 }),
    ] {
        let lattice = Lattice::from_parameters(&p).unwrap();
        let mut sites: Vec<Site> = Vec::new();
        for i in 0..60 {
            let position = weyl(i);
            if sites.len() < 16 && sites.iter().all(|s| lattice.distance(&s.position, &position) > 1.2) {
                sites.push(Site::full(
                    position,
                    if sites.len().is_multiple_of(2) { ion("Na", 1) } else { ion("Cl", -1) },
                ));
            }
        }
        check_round_trip(&Structure { lattice, sites }, name);
    }
}

#[test]
fn shared_sites_and_vacancies_survive_round_trips() {
    let mut structure = Prototype::named("spinel_normal").structure();
    let third = Amount::new(1, 4);
    for site in &mut structure.sites {
        let element = site.occupants[0].species.element.symbol();
        let share = |symbol, charge, n, d| Occupant { species: ion(symbol, charge), occupancy: Amount::new(n, d) };
        site.occupants = match element {
            "Mg" => [share("Mg", 2, 1, 2), share("Fe", 2, 1, 4), Occupant { occupancy: third, ..share("Fe", 3, 1, 4) }]
                .into(),
            "Al" => [share("Al", 3, 7, 8), share("Fe", 3, 1, 16)].into(),
            _ => [share("O", -2, 123, 125)].into(),
        };
    }
    check_round_trip(&structure, "shared");
}
