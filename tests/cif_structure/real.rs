//! Files of the world, from the folder that `INTERSTICE_CIF_REAL` names (they carry licences of their own and are no
//! part of this project), against gemmi's expansion of the same files (`../data/gemmi_expansion.tsv`).

use interstice::format::cif::structure::read_structures;
use interstice::format::cif::{Mode, Source, parse};
use interstice::ion::amount::to_f64;
use std::collections::BTreeMap;

/// Occupancies of a few hundred rows, each printed to 1e-5 or so.
const TOLERANCE: f64 = 1e-3;

/// Files that gemmi counts otherwise, with the reason.
const DIFFERENT: [(&str, &str); 5] = [
    ("cod_1000451.cif", "dummy hydrogen without position: gemmi puts it at the origin"),
    ("cod_1001031.cif", "dummy hydrogen without position: gemmi puts it at the origin"),
    ("cod_1001614.cif", "dummy hydrogens without position: gemmi puts them at the origin"),
    ("cod_1010246.cif", "dummy hydrogen without position: gemmi puts it at the origin"),
    ("cod_1100015.cif", "dummy hydrogen without position: gemmi puts it at the origin"),
];

#[test]
fn real_files_agree_with_gemmi() {
    let Some(folder) = std::env::var_os("INTERSTICE_CIF_REAL") else {
        println!("INTERSTICE_CIF_REAL is not set: no real files are read");
        return;
    };
    let gemmi: BTreeMap<&str, f64> = include_str!("../data/gemmi_expansion.tsv")
        .lines()
        .filter(|line| !line.starts_with('#'))
        .map(|line| line.split_once('\t').map(|(name, atoms)| (name, atoms.parse().unwrap())).unwrap())
        .collect();
    let mut paths: Vec<_> = std::fs::read_dir(folder).unwrap().map(|e| e.unwrap().path()).collect();
    paths.retain(|p| p.extension().is_some_and(|e| e == "cif"));
    paths.sort();
    let (mut read, mut refused, mut wrong) = (0, 0, Vec::new());
    for path in paths {
        let name = path.file_name().unwrap().to_string_lossy().into_owned();
        let bytes = std::fs::read(&path).unwrap();
        let source = Source::decode(&name, &bytes).unwrap();
        let document = match parse(&source, Mode::Lenient) {
            Ok(parsed) => parsed,
            Err(errors) => {
                println!("{name}: {}", errors[0]);
                refused += 1;
                continue;
            }
        };
        for structure in read_structures(&document) {
            match structure {
                Ok(found) => {
                    read += 1;
                    let occupants = found.structure.sites.iter().flat_map(|s| s.occupants.iter());
                    let atoms: f64 = occupants.map(|o| to_f64(&o.occupancy)).sum();
                    let theirs = gemmi.get(name.as_str()).copied().unwrap_or(f64::NAN);
                    let explained = DIFFERENT.iter().find(|(file, _)| *file == name);
                    match ((atoms - theirs).abs() < TOLERANCE * atoms, explained) {
                        (false, None) => wrong.push(format!("{name}: {atoms} atoms, gemmi {theirs}")),
                        (false, Some((_, reason))) => println!("{name}: {atoms} atoms, gemmi {theirs}: {reason}"),
                        (true, Some(_)) => wrong.push(format!("{name}: agrees, but is listed as different")),
                        (true, None) => {}
                    }
                }
                Err(error) => {
                    println!("{name}:{}:{}: {}", error.line, error.column, error.message);
                    refused += 1;
                }
            }
        }
    }
    println!("{read} structures read, {refused} refused");
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
    assert!(read > 0, "no structure in the folder");
}
