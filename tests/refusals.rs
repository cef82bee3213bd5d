//! Wrong calls: the whole message and the exit status of each, as a user meets them.

#![allow(clippy::unwrap_used, reason = "a failed test may panic")]

use std::path::Path;
use std::process::Command;

/// Runs the binary in a fresh folder; standard error, exit status, and whether an output folder was left.
fn run(arguments: &[&str], folder: &Path) -> String {
    let output = Command::new(env!("CARGO_BIN_EXE_interstice")).args(arguments).current_dir(folder).output().unwrap();
    let stderr = String::from_utf8(output.stderr).unwrap();
    let left: Vec<String> =
        std::fs::read_dir(folder).unwrap().map(|e| e.unwrap().file_name().into_string().unwrap()).collect();
    assert!(!left.iter().any(|n| n == "cells"), "nothing is left behind by {arguments:?}");
    assert!(!left.iter().any(|n| n.contains("partial")), "nothing is left half-written by {arguments:?}");
    format!("$ interstice {}\nexit {}\n{stderr}", arguments.join(" "), output.status.code().unwrap_or(-1))
}

fn scratch(name: &str) -> std::path::PathBuf {
    let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join(name);
    let _ = std::fs::remove_dir_all(&folder);
    std::fs::create_dir_all(&folder).unwrap();
    folder
}

#[test]
fn wrong_input_is_told_with_place_and_remedy() {
    let folder = scratch("refusals");
    std::fs::create_dir(folder.join("taken")).unwrap();
    std::fs::write(folder.join("file"), "x").unwrap();
    std::fs::write(
        folder.join("truncated.cif"),
        "data_x\n_cell_length_a 4.2\nloop_\n_atom_site_label\n_atom_site_fract_x\nMg1 0\nO1",
    )
    .unwrap();
    std::fs::write(folder.join("open.cif"), "data_x\n_chemical_name_common 'spinel\n").unwrap();
    std::fs::write(folder.join("empty.cif"), "").unwrap();
    std::fs::write(
        folder.join("rocksalt.cif"),
        "data_x\n_cell_length_a 4.2\n_cell_length_b 4.2\n_cell_length_c 4.2\n_cell_angle_alpha 90\n_cell_angle_beta 90\n\
         _cell_angle_gamma 90\n_space_group_name_H-M_alt 'F m -3 m'\nloop_\n_atom_site_label\n_atom_site_fract_x\n\
         _atom_site_fract_y\n_atom_site_fract_z\nMg1 0 0 0\nO1 0.5 0.5 0.5\n",
    )
    .unwrap();
    std::fs::create_dir(folder.join("hosts")).unwrap();
    std::fs::write(
        folder.join("hosts/mine.json"),
        include_str!("../templates/hosts/fluorite-cations.json").replace("\"at\": [0, 0, 0]", "\"at\": [0, \"v\", 0]"),
    )
    .unwrap();
    std::fs::write(folder.join("recipe.json"), "{\"composition\": \"MgO\", \"sede\": 3}").unwrap();
    std::fs::write(folder.join("wrong.json"), "{\"composition\": \"MgO\", \"cell\": {\"atoms\": -3}}").unwrap();
    let build = |composition: &'static str, more: &[&'static str]| -> Vec<&'static str> {
        [&["build", composition, "--into", "cells"], more].concat()
    };
    let calls: Vec<Vec<&str>> = vec![
        build("MgXxO", &[]),
        build("MG2O", &[]),
        build("Mg(Al2O4", &[]),
        build("MgAl2)O4", &[]),
        build("Mg0O", &[]),
        build("Mg-1O", &[]),
        build("", &[]),
        build("NaCl2", &[]),
        build("Fe(III)O(-II)", &[]),
        build("(NH4)Cl", &[]),
        build("FeAl", &[]),
        build("MgO", &["--packing", "fcc"]),
        build("MgO", &["--packing", "stack:ABB"]),
        build("MgO", &["--packing", "stack:ABX"]),
        build("SnO", &[]),
        build("MgO", &["--cell", "a,b,a"]),
        build("MgO", &["--cell", "1.5a,b,c"]),
        build("MgO", &["--cell", "b,a,c"]),
        build("MgO", &["--cell", "a,b"]),
        build("MgAl2O4", &["--cell", "a,b,3c"]),
        build("Ce0.9Gd0.1O1.95", &["--packing", "primitive-cubic", "--order", "random", "--cell", "2a,2b,2c"]),
        build("MgO", &["--atoms", "1000000000"]),
        build("MgAl2O4", &["--atoms", "5"]),
        build("MgO", &["--span", "-3"]),
        build("MgO", &["--up-to", "0"]),
        build("MgO", &["--up-to", "4", "--order", "random"]),
        build("MgO", &["--keep", "0"]),
        build("MgO", &["--as", "pdf"]),
        build("MgO", &["--threads", "0"]),
        build("MgO", &["--seats", "Mg"]),
        build("MgO", &["--seats", "Mg:round"]),
        build("MgO", &["--seats", "Al:octahedral"]),
        build("MgO", &["--seats", "Mg:cubic"]),
        build("K3O", &[]),
        build("Na3Cl3", &["--seats", "Na:octahedral=4"]),
        build("Li3N", &["--packing", "primitive-cubic"]),
        build("Ce0.5Gd0.5O1.75", &["--packing", "primitive-cubic", "--order", "random", "--apart", "Gd-Gd:5.5"]),
        build("Ce0.5Gd0.5O1.75", &["--packing", "primitive-cubic", "--order", "random", "--apart", "Gd:5.5"]),
        build("Ce0.5Gd0.5O1.75", &["--packing", "primitive-cubic", "--order", "random", "--apart", "Gd-La:5.5"]),
        build("MgAl2O4", &["--order", "every", "--cell", "8a,4b,4c"]),
        build("recipe.json", &[]),
        build("wrong.json", &[]),
        build("missing.json", &[]),
        vec!["build", "MgO", "--into", "taken"],
        vec!["build", "MgO", "--into", "taken", "--replace"],
        vec!["build", "MgO", "--into", "file/cells"],
        vec!["vet", "truncated.cif"],
        vec!["vet", "open.cif"],
        vec!["vet", "empty.cif"],
        vec!["vet", "missing.cif"],
        vec!["radii", "Sn(II)"],
        vec!["radii", "Og"],
        vec!["radii", "Fe", "--with", "Mg"],
        vec!["holes", "nothing"],
        vec!["holes", "stack:"],
        vec!["holes", "stack:hx"],
        vec!["holes", "ax3:hc:A=3"],
        vec!["holes", "ax3:hc:B=1"],
        vec!["holes", "pyrochlore:x=0.4"],
        vec!["holes", "missing.cif#O"],
        vec!["holes", "rocksalt.cif"],
        vec!["holes", "rocksalt.cif#S"],
        vec!["holes", "rocksalt.cif#Qq"],
        vec!["holes", "rocksalt.cif#O:9"],
        vec!["holes", "truncated.cif#O"],
        vec!["holes", "rocksalt.cif#O", "--spheres", "O"],
        vec!["holes", "ccp", "--spheres", "Y=O"],
        vec!["holes", "ccp", "--spheres", "X=1"],
        vec!["holes", "ccp", "--mobile", "Li"],
        vec!["holes", "ccp", "--mobile", "-1"],
        vec!["holes", "ccp", "--into", "ccp.cif"],
        vec!["holes", "ax3:c", "--spheres", "O", "--into", "ax3.cif"],
        vec!["holes", "ccp", "--spheres", "O", "--into", "file"],
        vec!["holes", "ccp", "--templates", "taken"],
        vec!["holes", "ccp", "--templates", "hosts"],
        vec!["holes", "--stackings", "99"],
        vec!["seat", "CaF2", "--packing", "fluorite-cations"],
        vec!["seat", "SrTiO3", "--packing", "ax3:c", "--seats", "Sr:A=2"],
        vec!["seat", "MgO", "--packing", "rocksalt.cif#O,F"],
    ];
    let shown: Vec<String> = calls.iter().map(|call| run(call, &folder)).collect();
    insta::assert_snapshot!(shown.join("\n"));
}

/// An earlier run's folder is kept unless `--replace` is given, and then replaced whole.
#[test]
fn a_folder_is_replaced_only_when_asked() {
    let folder = scratch("replace");
    let call = |more: &[&str]| {
        let arguments = [&["build", "MgO", "--into", "out", "--quiet"], more].concat();
        Command::new(env!("CARGO_BIN_EXE_interstice")).args(arguments).current_dir(&folder).output().unwrap()
    };
    assert_eq!(call(&[]).status.code(), Some(0));
    let first = std::fs::read(folder.join("out/0001.cif")).unwrap();
    assert_eq!(call(&[]).status.code(), Some(2));
    std::fs::write(folder.join("out/stale"), "").unwrap();
    assert_eq!(call(&["--replace"]).status.code(), Some(0));
    assert!(!folder.join("out/stale").exists());
    assert_eq!(std::fs::read(folder.join("out/0001.cif")).unwrap(), first, "the same bytes again");
    // The resolved recipe gives the same bytes.
    let again = Command::new(env!("CARGO_BIN_EXE_interstice"))
        .args(["build", "out/recipe.json", "--into", "again", "--threads", "3"])
        .current_dir(&folder)
        .output()
        .unwrap();
    assert_eq!(again.status.code(), Some(0));
    for file in ["0001.cif", "0001.xyz", "recipe.json", "summary.json"] {
        assert_eq!(
            std::fs::read(folder.join("again").join(file)).unwrap(),
            std::fs::read(folder.join("out").join(file)).unwrap(),
            "{file}"
        );
    }
}
