//! Broken files, one fault each, and all that a user is told of them: one structure file is damaged in many ways, the
//! way that files in the wild are.

use crate::own;
use std::path::Path;
use std::process::Command;

const DAMAGED: &str = "damaged.cif";

/// What is broken, and how: text of the good file and what stands in its place.
const FAULTS: [(&str, &str, &str); 78] = [
    ("nothing", "", ""),
    ("no data_ before the first item", "data_pigment\n", ""),
    ("data_ without a code", "data_pigment", "data_"),
    ("two blocks of one code", "loop_\n_atom_type", "data_Pigment\nloop_\n_atom_type"),
    ("a name twice, the same value", "_cell_volume 62.45", "_cell_volume 62.45\n_cell_volume 62.45"),
    ("a name twice, two values", "_cell_volume 62.45", "_cell_volume 62.45\n_Cell_Volume 63.1"),
    ("a symbol without quotes", "'P 42/m n m'", "P 42/m n m"),
    ("a name without quotes, inside a loop", "Ti1 Ti4+", "Ti 1 Ti4+"),
    ("a quote that is not closed", "'lamp white'", "'lamp white"),
    ("an apostrophe inside, before a blank", "'lamp white'", "'lamp' white'"),
    (
        "an apostrophe inside, in CIF 2.0",
        "#\\#CIF_1.1\ndata_pigment\n_chemical_name_common 'lamp white'",
        "#\\#CIF_2.0\ndata_pigment\n_chemical_name_common 'lamp's white'",
    ),
    ("a text field that is not closed", "'lamp white'", "\n;lamp white"),
    ("a text field whose end is indented", "'lamp white'", "\n;lamp white\n ;"),
    ("something behind the end of a text field", "'lamp white'", "\n;lamp white\n;_cell_measurement_temperature 293"),
    ("a loop that is a value short", "O1 O2- 0.305 0.305 0 1", "O1 O2- 0.305 0.305 0"),
    ("a file cut off in a row", "O2- 0.305 0.305 0 1\n", "O2- 0.3"),
    ("a value that is missing", "'lamp white'", ""),
    ("a value that begins with [", "'lamp white'", "[lamp"),
    ("a value that begins with $", "'lamp white'", "$lamp"),
    ("a list of CIF 2.0 without its code", "'lamp white'", "[lamp white]"),
    ("a letter beyond ASCII", "lamp white", "blanc de lumière"),
    ("a byte order mark", "#\\#CIF_1.1", "\u{FEFF}#\\#CIF_1.1"),
    ("a byte order mark in CIF 2.0 (no fault)", "#\\#CIF_1.1", "\u{FEFF}#\\#CIF_2.0"),
    ("Ctrl-Z at the end", "0.305 0.305 0 1\n", "0.305 0.305 0 1\n\u{1A}"),
    ("a vertical tab", "_cell_volume 62.45", "_cell_volume\u{B}62.45"),
    ("a NUL", "lamp white", "lamp\0white"),
    ("a web page", "#\\#CIF_1.1", "<!DOCTYPE html>"),
    ("global_", "_cell_volume 62.45", "global_"),
    ("stop_", "loop_\n_atom_type", "stop_\nloop_\n_atom_type"),
    ("a loop in a loop", "_atom_site_label\n", "_atom_site_label\nloop_\n"),
    ("values without names", "_cell_volume 62.45", "62.45 62.46"),
    ("a coordinate as a fraction", "0.305 0.305 0 1", "0.305 1/3 0 1"),
    ("a decimal comma", "0.305 0.305 0 1", "0,305 0.305 0 1"),
    ("a unit behind a number", "_cell_length_a 4.594", "_cell_length_a 4.594A"),
    ("an exponent with D", "_cell_length_a 4.594", "_cell_length_a 4.594D0"),
    ("an uncertainty that is not closed", "_cell_length_a 4.594", "_cell_length_a 4.594("),
    ("a blank before the uncertainty", "_cell_length_a 4.594", "_cell_length_a 4.594 (2)"),
    ("a volume that is no number", "_cell_volume 62.45", "_cell_volume 62.45A3"),
    ("a coordinate that is not known", "O1 O2- 0.305 0.305 0 1", "O1 O2- 0.305 0.305 0 1\nH1 H . . . 1"),
    ("an occupancy that is not known", "0.305 0.305 0 1", "0.305 0.305 0 ?"),
    ("an occupancy above 1", "0.305 0.305 0 1", "0.305 0.305 0 2"),
    ("an occupancy below 0", "0.305 0.305 0 1", "0.305 0.305 0 -0.5"),
    ("an old spelling of the symbol", "'P 42/m n m'", "'P4_2/mnm'"),
    ("a symbol of no group", "'P 42/m n m'", "'P 42/m q m'"),
    ("a symbol that contradicts the operations", "'P 42/m n m'", "'P 4/m m m'"),
    ("a number that contradicts the operations", "_space_group_IT_number 136", "_space_group_IT_number 225"),
    ("an operation left out", "y,x,z\n", ""),
    ("an operation twice", "y,x,z\n", "y,x,z\ny,x,z\n"),
    ("a decimal in an operation", "-y+1/2,x+1/2,z+1/2", "-y+.5,x+0.5,z+.5"),
    ("a rounded third in an operation", "y,x,z\n", "y,x,z+.333\n"),
    ("an operation with two parts", "y,x,z\n", "y,x\n"),
    ("an operation with another letter", "y,x,z\n", "y,x,w\n"),
    ("an operation that is no rotation", "y,x,z\n", "x+y,x,z\n"),
    ("a cell that is not tetragonal", "_cell_length_b 4.594", "_cell_length_b 4.894"),
    ("a cell length below 0", "_cell_length_c 2.959", "_cell_length_c -2.959"),
    ("a cell length of 0", "_cell_length_c 2.959", "_cell_length_c 0"),
    ("an angle of 180", "_cell_angle_gamma 90", "_cell_angle_gamma 180"),
    ("a cell length missing", "_cell_length_c 2.959\n", ""),
    ("a volume that is not that of the cell", "_cell_volume 62.45", "_cell_volume 72.45"),
    ("a special position with few digits", "O1 O2- 0.305 0.305 0 1", "O1 O2- 0.305 0.305 0.004 1"),
    ("a position near a special one, but not on it", "O1 O2- 0.305 0.305 0 1", "O1 O2- 0.305 0.305 0.0168 1"),
    ("two atoms on one position", "O1 O2-", "Ti2 Ti4+ 0 0 0 1\nO1 O2-"),
    ("two atoms too near", "O1 O2-", "Ti2 Ti4+ 0.05 0.05 0 1\nO1 O2-"),
    ("shares of a site that add up to 1.006", "Ti1 Ti4+ 0 0 0 1", "Ti1 Ti4+ 0 0 0 0.5\nSn1 Sn4+ 0 0 0.001 0.506"),
    ("shares of a site that add up to 1.02", "Ti1 Ti4+ 0 0 0 1", "Ti1 Ti4+ 0 0 0 0.5\nSn1 Sn4+ 0 0 0 0.52"),
    ("alternatives without groups", "O1 O2- 0.305 0.305 0 1", "O1 O2- 0.305 0.305 0 0.5\nO2 O2- 0.36 0.36 0 0.5"),
    ("a label twice", "O1 O2- 0.305 0.305 0 1", "Ti1 O2- 0.305 0.305 0 1"),
    ("no type symbol", "O1 O2- 0.305", "O1 ? 0.305"),
    ("a type symbol that is no element", "Ti1 Ti4+ 0", "Ti1 Xq 0"),
    ("a label that is no element", "O1 O2- 0.305", "Wat ? 0.305"),
    ("deuterium", "O1 O2- 0.305 0.305 0 1", "O1 O2- 0.305 0.305 0 1\nD1 D 0.5 0 0.25 0.1"),
    ("a charge with its sign first", "Ti1 Ti4+", "Ti1 Ti+4"),
    ("a charge without sign", "O1 O2-", "O1 O2"),
    ("a charge as signs", "O1 O2-", "O1 O--"),
    ("an oxidation number that contradicts the symbol", "Ti4+ 4", "Ti4+ 3"),
    ("a formula that is not that of the sites", "'O2 Ti'", "'O3 Ti'"),
    ("a formula without blanks", "'O2 Ti'", "TiO2"),
    ("a Z that is not that of the sites", "_cell_formula_units_Z 2", "_cell_formula_units_Z 4"),
];

/// A folder of its own for damaged files.
fn scratch(name: &str) -> std::path::PathBuf {
    let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join(name);
    std::fs::create_dir_all(&folder).unwrap();
    folder
}

/// All that `interstice vet` says of a file, and its exit status.
fn vet(folder: &Path, more: &[&str]) -> String {
    let arguments = [&["vet", DAMAGED], more].concat();
    let output = Command::new(env!("CARGO_BIN_EXE_interstice")).args(arguments).current_dir(folder).output().unwrap();
    let text = |bytes| String::from_utf8(bytes).unwrap();
    format!("exit {}\n{}{}", output.status.code().unwrap_or(-1), text(output.stdout), text(output.stderr))
}

#[test]
fn damaged_structures_are_told_in_full() {
    let folder = scratch("gallery");
    let good = std::fs::read_to_string(own::folder().join("gallery.cif")).unwrap();
    let told = FAULTS.iter().map(|(fault, from, to)| {
        assert_eq!(from.is_empty(), from == to, "{fault}");
        assert!(good.contains(from), "{fault}: `{from}` is not in the file");
        std::fs::write(folder.join(DAMAGED), good.replacen(from, to, 1)).unwrap();
        format!("## {fault}\n{}", vet(&folder, &[]))
    });
    insta::assert_snapshot!("damaged", told.collect::<Vec<_>>().join("\n"));
}

/// Every invalid file of ours, by the letter and leniently.
#[test]
fn invalid_files_are_told_in_full() {
    let folder = scratch("invalid");
    let table = crate::conformance::rows(&own::folder(), "expected.tsv");
    let told = table.iter().filter(|row| row["verdict"] == "invalid").map(|row| {
        std::fs::copy(own::folder().join(&row["file"]), folder.join(DAMAGED)).unwrap();
        let strict = vet(&folder, &["--syntax"]);
        assert!(strict.starts_with("exit 1\n"), "{}: {strict}", row["file"]);
        let file = row["file"].trim_start_matches("invalid/");
        format!("## {file}\n{strict}-- leniently, {}", vet(&folder, &[]))
    });
    insta::assert_snapshot!("invalid", told.collect::<Vec<_>>().join("\n"));
}
