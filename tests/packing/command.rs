//! `interstice holes` as a user meets it: JSON, files, frameworks, templates.

use interstice::format::cif::{Mode, Source, parse, read_structures};
use serde_json::Value;
use std::collections::BTreeSet;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

fn scratch(name: &str) -> PathBuf {
    let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join(name);
    let _ = std::fs::remove_dir_all(&folder);
    std::fs::create_dir_all(&folder).unwrap();
    folder
}

fn run(arguments: &[&str], folder: &Path) -> Output {
    Command::new(env!("CARGO_BIN_EXE_interstice")).args(arguments).current_dir(folder).output().unwrap()
}

#[track_caller]
fn text(arguments: &[&str], folder: &Path) -> String {
    let output = run(arguments, folder);
    assert!(output.status.success(), "{arguments:?}: {}", String::from_utf8_lossy(&output.stderr));
    String::from_utf8(output.stdout).unwrap()
}

#[track_caller]
fn json(arguments: &[&str], folder: &Path) -> Value {
    serde_json::from_str(&text(&[arguments, &["--json"]].concat(), folder)).unwrap()
}

/// Every key of a document as a path, arrays as `[]`.
fn paths(value: &Value, at: &str, all: &mut BTreeSet<String>) {
    match value {
        Value::Object(fields) => {
            for (key, inner) in fields {
                let path = if at.is_empty() { key.clone() } else { format!("{at}.{key}") };
                all.insert(path.clone());
                paths(inner, &path, all);
            }
        }
        Value::Array(items) => items.iter().for_each(|item| paths(item, &format!("{at}[]"), all)),
        _ => {}
    }
}

/// src/report/holes.md lists every field of the JSON, and none that there is not.
#[test]
fn the_documented_fields_are_those_written() {
    let folder = scratch("holes-fields");
    let mut written = BTreeSet::new();
    let full = ["holes", "ax3:hc", "--spheres", "X=O,A=Ba", "--mobile", "Li:0.2"];
    paths(&json(&full, &folder), "", &mut written);
    std::fs::write(folder.join("doubt.cif"), cif_of_rutile().replace("O1 O", "O1 ?")).unwrap();
    paths(&json(&["holes", "doubt.cif#O"], &folder), "", &mut written);
    let page = include_str!("../../src/report/holes.md");
    let documented: BTreeSet<String> =
        page.lines().filter_map(|line| line.strip_prefix("| `")?.split('`').next().map(String::from)).collect();
    assert_eq!(documented, written);
}

/// TiO₂, rutile: R. J. Swope, J. R. Smyth & A. C. Larson, Am. Mineral. 80, 448 (1995), from memory.
fn cif_of_rutile() -> String {
    "data_rutile\n_cell_length_a 4.594\n_cell_length_b 4.594\n_cell_length_c 2.959\n_cell_angle_alpha 90\n\
     _cell_angle_beta 90\n_cell_angle_gamma 90\n_space_group_name_H-M_alt 'P 42/m n m'\nloop_\n_atom_site_label\n\
     _atom_site_type_symbol\n_atom_site_fract_x\n_atom_site_fract_y\n_atom_site_fract_z\nTi1 Ti 0 0 0\n\
     O1 O 0.3051 0.3051 0\n"
        .into()
}

/// Titanium's place is found in the array of its oxygens, with lengths in Å: four at 1.949, two at 1.982.
#[test]
fn the_framework_of_a_file_is_surveyed() {
    let folder = scratch("holes-framework");
    std::fs::write(folder.join("rutile.cif"), cif_of_rutile()).unwrap();
    let found = json(&["holes", "rutile.cif#O"], &folder);
    let scale = found["sphere_angstrom"].as_f64().unwrap();
    assert!((scale - 1.26).abs() < 1e-12);
    let at_origin = found["interstices"].as_array().unwrap().iter().find(|i| {
        let at = i["positions"].as_array().unwrap();
        at.iter().any(|p| p.as_array().unwrap().iter().all(|x| x.as_f64().unwrap().abs() < 1e-6))
    });
    let titanium = at_origin.expect("an interstice where titanium sits");
    assert_eq!((titanium["kind"].as_str(), titanium["site_symmetry"].as_str()), (Some("octahedral"), Some("mmm")));
    let distances: Vec<f64> =
        titanium["spheres"].as_array().unwrap().iter().map(|s| s["distance"].as_f64().unwrap() * scale).collect();
    let near = |d: f64| distances.iter().filter(|x| (**x - d).abs() < 2e-3).count();
    assert_eq!((near(1.949), near(1.982)), (4, 2), "{distances:?}");
}

/// The file holds the spheres as atoms and one dummy for every interstice and saddle; this project's reader passes over
/// the dummies. (tests/readers/holes.py opens the same file in gemmi.)
#[test]
fn dummies_stand_in_the_file() {
    let folder = scratch("holes-dummies");
    for (name, host, ions) in
        [("spinel-array.cif", "ccp", "O"), ("ax3.cif", "ax3:hc", "X=O,A=Ba"), ("iodide.cif", "bcc", "I")]
    {
        let found = json(&["holes", host, "--spheres", ions, "--into", name], &folder);
        let bytes = std::fs::read(folder.join(name)).unwrap();
        let source = Source::decode(name, &bytes).unwrap();
        let strict = parse(&source, Mode::Strict).unwrap();
        let read = read_structures(&strict).remove(0).unwrap();
        let number = |list: &str| -> u64 {
            found[list].as_array().unwrap().iter().map(|o| o["multiplicity"].as_u64().unwrap()).sum()
        };
        assert_eq!(read.structure.sites.len(), found["spheres"].as_array().unwrap().len(), "{name}");
        assert_eq!(read.skipped.len() as u64, number("interstices") + number("saddles"), "{name}");
        assert!(read.warnings.iter().all(|w| w.code == "cif::dummy"), "{name}");
        // An existing file stays unless it may be replaced.
        assert_eq!(run(&["holes", host, "--spheres", ions, "--into", name], &folder).status.code(), Some(2));
        assert_eq!(std::fs::read(folder.join(name)).unwrap(), bytes);
        text(&["holes", host, "--spheres", ions, "--into", name, "--replace"], &folder);
        assert_eq!(std::fs::read(folder.join(name)).unwrap(), bytes, "the same bytes again");
    }
}

/// The file of a framework is read back as the framework: the same interstices.
#[test]
fn a_written_host_is_the_same_host() {
    let folder = scratch("holes-again");
    std::fs::write(folder.join("rutile.cif"), cif_of_rutile()).unwrap();
    let first = json(&["holes", "rutile.cif#O", "--into", "array.cif"], &folder);
    let again = json(&["holes", "array.cif#O"], &folder);
    let sizes = |value: &Value| -> Vec<(String, i64, u64)> {
        value["interstices"]
            .as_array()
            .unwrap()
            .iter()
            .map(|i| {
                let ratio = (i["ratio"].as_f64().unwrap() * 1e5).round() as i64;
                (i["kind"].as_str().unwrap().into(), ratio, i["multiplicity"].as_u64().unwrap())
            })
            .collect()
    };
    assert_eq!(sizes(&first), sizes(&again));
}

#[test]
fn templates_of_a_folder_count_everywhere() {
    let folder = scratch("holes-templates");
    std::fs::create_dir(folder.join("mine")).unwrap();
    let own =
        include_str!("../../templates/hosts/body-centred-tetragonal.json").replace("body-centred-tetragonal", "bct");
    std::fs::write(folder.join("mine/bct.json"), own).unwrap();
    assert!(text(&["holes", "--hosts", "--templates", "mine"], &folder).contains("\nbct "));
    let found = json(&["holes", "bct:ca=1.2", "--templates", "mine"], &folder);
    assert_eq!(found["spheres"].as_array().unwrap().len(), 1);
    let seat = ["seat", "AgI", "--packing", "bct:ca=1.2", "--templates", "mine"];
    assert!(text(&seat, &folder).contains("in bct:ca=1.2"));
    text(&["build", "AgI", "--packing", "bct:ca=1.2", "--templates", "mine", "--into", "cells"], &folder);
    // The recipe holds the template: the folder is not needed again.
    std::fs::remove_dir_all(folder.join("mine")).unwrap();
    text(&["build", "cells/recipe.json", "--into", "again"], &folder);
    assert_eq!(
        std::fs::read(folder.join("cells/0001.cif")).unwrap(),
        std::fs::read(folder.join("again/0001.cif")).unwrap()
    );
}

/// MgF₂ in rutile's array of anions: the octahedra that titanium leaves are taken by magnesium, and the group is rutile's.
#[test]
fn a_framework_is_a_host_of_the_main_job() {
    let folder = scratch("holes-build");
    std::fs::write(folder.join("rutile.cif"), cif_of_rutile()).unwrap();
    let summary =
        json(&["build", "MgF2", "--packing", "rutile.cif#O", "--seats", "Mg:octahedral", "--into", "cells"], &folder);
    assert_eq!(summary["cells"][0]["space_group"], 136, "{summary}");
    std::fs::remove_file(folder.join("rutile.cif")).unwrap();
    text(&["build", "cells/recipe.json", "--into", "again"], &folder);
    assert_eq!(
        std::fs::read(folder.join("cells/0001.cif")).unwrap(),
        std::fs::read(folder.join("again/0001.cif")).unwrap()
    );
}

/// The published numbers of polytypes (see `packing::polytypes`), each in both notations.
#[test]
fn stackings_are_listed_in_both_notations() {
    let folder = scratch("holes-stackings");
    for (n, count) in [(2, 1), (6, 2), (8, 6), (12, 43)] {
        let list = json(&["holes", "--stackings", &n.to_string()], &folder);
        let list = list.as_array().unwrap();
        assert_eq!(list.len(), count, "{n}");
        let length = |row: &Value, key: &str| row[key].as_str().unwrap().len();
        assert!(list.iter().all(|row| length(row, "letters") == n && length(row, "symbols") == n));
    }
}

/// A mobile ion gets through what is wider than it: in ccp of O²⁻ (r 1.26 Å) the windows are 0.1547 · 1.26 = 0.195 Å.
#[test]
fn a_mobile_ion_is_told_its_ways() {
    let folder = scratch("holes-mobile");
    let dimension = |ion: &str| {
        let found = json(&["holes", "ccp", "--spheres", "O", "--mobile", ion], &folder);
        found["mobile"]["networks"][0]["dimension"].as_u64().unwrap()
    };
    assert_eq!((dimension("Li:0.194"), dimension("Li:0.196"), dimension("0.15"), dimension("0.16")), (3, 0, 3, 0));
    assert!(
        text(&["holes", "ccp", "--spheres", "O", "--mobile", "Li"], &folder).contains("no interstice is large enough")
    );
}
