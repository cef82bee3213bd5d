//! How real files break, one case a test row: what is read, and what is said about it.

use crate::read;

const SYMOPS: &str = "loop_\n_space_group_symop_operation_xyz\n";

fn block(cell: &str, symmetry: &str, sites: &str) -> String {
    format!("data_test\n{cell}\n{symmetry}\n{sites}\n")
}

fn cell(a: &str, c: &str, gamma: &str) -> String {
    format!(
        "_cell_length_a {a}\n_cell_length_b {a}\n_cell_length_c {c}\n\
         _cell_angle_alpha 90\n_cell_angle_beta 90\n_cell_angle_gamma {gamma}"
    )
}

fn sites(rows: &str) -> String {
    format!(
        "loop_\n_atom_site_label\n_atom_site_type_symbol\n_atom_site_fract_x\n_atom_site_fract_y\n_atom_site_fract_z\n\
         _atom_site_occupancy\n{rows}"
    )
}

const HALITE: &str = "Na1 Na1+ 0 0 0 1\nCl1 Cl1- 0.5 0.5 0.5 1";

/// Sites in the cell, and all warnings in one text.
#[track_caller]
fn reads(cif: &str) -> (usize, String) {
    let structure = read(cif).unwrap_or_else(|e| panic!("{e}\n{cif}"));
    let said: Vec<_> = structure.warnings.iter().map(|w| format!("{}:{}: {}", w.line, w.column, w.message)).collect();
    (structure.structure.sites.len(), said.join("\n"))
}

#[track_caller]
fn refuses(cif: &str, part: &str) {
    let error = read(cif).expect_err("an error");
    assert!(error.contains(part), "{error}\nlacks: {part}");
}

/// International Tables A: rock salt holds 8 atoms, diamond's origin choices differ by 1/8 along each axis.
#[test]
fn symbols_stand_in_for_operations() {
    let halite = |symmetry: &str| reads(&block(&cell("5.64", "5.64", "90"), symmetry, &sites(HALITE)));
    for symmetry in [
        "_symmetry_space_group_name_H-M 'F m 3 m'",
        "_symmetry_space_group_name_H-M Fm-3m",
        "_space_group_name_H-M_alt 'F m -3 m'",
        "_space_group.name_H-M_alt 'F m -3 m'",
        "_symmetry_space_group_name_Hall '-F 4 2 3'",
        "_space_group_IT_number 225",
        "_symmetry_Int_Tables_number 225",
    ] {
        let (n, said) = halite(symmetry);
        assert_eq!(n, 8, "{symmetry}");
        assert!(said.contains("no operations are listed"), "{symmetry}: {said}");
    }
    refuses(&block(&cell("5.64", "5.64", "90"), "", &sites(HALITE)), "neither operations nor a space group");
    refuses(
        &block(&cell("5.64", "5.64", "90"), "_symmetry_space_group_name_H-M 'Q m'", &sites(HALITE)),
        "no space group of the tables",
    );
}

/// Spinel in both origins (8a at 1/8 1/8 1/8 and 16d at 1/2 in the second, 0 0 0 and 5/8 in the first): only one brings
/// the atoms of the formula into the cell.
#[test]
fn an_open_origin_is_decided_by_the_sites_and_said() {
    let formula = "_chemical_formula_sum 'Al2 Mg O4'\n_cell_formula_units_Z 8\n_space_group_name_H-M_alt 'F d -3 m'";
    let second = "Mg1 Mg2+ 0.125 0.125 0.125 1\nAl1 Al3+ 0.5 0.5 0.5 1\nO1 O2- 0.2624 0.2624 0.2624 1";
    let first = "Mg1 Mg2+ 0 0 0 1\nAl1 Al3+ 0.625 0.625 0.625 1\nO1 O2- 0.3874 0.3874 0.3874 1";
    for (rows, hall) in [(second, "-F 4vw 2vw 3"), (first, "F 4d 2 3 -1d")] {
        let (n, said) = reads(&block(&cell("8.0832", "8.0832", "90"), formula, &sites(rows)));
        assert_eq!(n, 56);
        assert!(said.contains(hall) && said.contains("one of 2 that it can mean"), "{said}");
    }
}

#[test]
fn incomplete_and_contradicted_operations() {
    let half = format!("{SYMOPS}x,y,z\n-x,-y,z\nx,-y,-z\nz,x,y\nx,y+1/2,z+.5\n-x,-y,-z\ny,x,-z");
    let (n, said) = reads(&block(&cell("5.64", "5.64", "90"), &half, &sites(HALITE)));
    // Centring along a is made by the threefold axis from the one that is listed.
    assert_eq!(n, 8);
    assert!(said.contains("the 7 listed operations are no whole group; 185 more are added"), "{said}");
    let contradicted = format!("_symmetry_space_group_name_H-M 'F m -3 m'\n{SYMOPS}x,y,z\n-x,-y,-z");
    let (n, said) = reads(&block(&cell("5.64", "5.64", "90"), &contradicted, &sites(HALITE)));
    assert_eq!(n, 2);
    assert!(said.contains("`F m -3 m` does not stand for the 2 operations listed"), "{said}");
    let thirds = format!("{SYMOPS}x,y,z\n-y,x-y,z+.333\n-x+y,-x,z+0.667");
    let (n, said) = reads(&block(&cell("5", "7", "120"), &thirds, &sites("Na1 Na1+ 0.1 0.2 0.3 1")));
    assert_eq!(n, 3);
    assert!(said.contains("decimals in `-y,x-y,z+.333`"), "{said}");
    for (operation, why) in
        [("x,y", "2 parts"), ("x,y,w", "no sum of x, y, z"), ("2x,y,z", "factor of 2"), ("x+y,y,z", "no group")]
    {
        refuses(&block(&cell("5", "5", "90"), &format!("{SYMOPS}{operation}"), &sites(HALITE)), why);
    }
}

#[test]
fn cells_that_the_symmetry_does_not_allow() {
    let cubic = format!("{SYMOPS}x,y,z\nz,x,y\ny,z,x");
    refuses(&block(&cell("5", "6", "90"), &cubic, &sites(HALITE)), "does not have the symmetry");
    let hexagonal = format!("{SYMOPS}x,y,z\n-y,x-y,z\n-x+y,-x,z");
    refuses(&block(&cell("5", "6", "90"), &hexagonal, &sites(HALITE)), "hexagonal or rhombohedral");
    // The axes of an R group follow from the cell.
    let rhombohedral = "_cell_length_a 5\n_cell_length_b 5\n_cell_length_c 5\n_cell_angle_alpha 55\n_cell_angle_beta 55\n_cell_angle_gamma 55";
    let (n, said) = reads(&block(rhombohedral, "_symmetry_space_group_name_H-M 'R -3 m'", &sites("Na1 Na1+ 0 0 0 1")));
    assert_eq!(n, 1);
    assert!(said.contains("-P 3* 2"), "{said}");
    let (n, _) =
        reads(&block(&cell("5", "12", "120"), "_symmetry_space_group_name_H-M 'R -3 m'", &sites("Na1 Na1+ 0 0 0 1")));
    assert_eq!(n, 3);
    for (bad, why) in [
        ("_cell_length_a 8.08A", "`_cell_length_a` is `8.08A`"),
        ("_cell_length_a ?", "`_cell_length_a` is `?`"),
        ("_cell_length_a -5", "must be above 0"),
        ("_cell_length_q 5", "`_cell_length_a` is missing"),
    ] {
        let cell = cell("5", "5", "90").replace("_cell_length_a 5", bad);
        refuses(&block(&cell, &format!("{SYMOPS}x,y,z"), &sites(HALITE)), why);
    }
    let (_, said) = reads(&block(
        &format!("{}\n_cell_volume 126", cell("5", "5", "90")),
        &format!("{SYMOPS}x,y,z"),
        &sites(HALITE),
    ));
    assert!(said.contains("126 Å³, but the cell parameters give 125.000"), "{said}");
}

#[test]
fn special_positions_are_found_and_overlaps_refused() {
    let trigonal = "_space_group_name_H-M_alt 'P -3 m 1'";
    let (n, said) = reads(&block(&cell("11.2", "6", "120"), trigonal, &sites("Y1 Y3+ 0.333 0.667 0.5 1")));
    assert_eq!(n, 2);
    assert!(said.contains("`Y1` is moved by 0.0065 Å onto its symmetry element"), "{said}");
    let p1 = format!("{SYMOPS}x,y,z");
    let at = |rows: &str| block(&cell("5", "5", "90"), &p1, &sites(rows));
    refuses(&at("Na1 Na1+ 0 0 0 1\nCl1 Cl1- 0.05 0 0 1"), "`Na1` and `Cl1` are 0.250 Å apart with occupancies 1 and 1");
    refuses(&at("Na1 Na1+ 0 0 0 1\nCl1 Cl1- 0.9999999 0 0 1"), "`Na1`, `Cl1` on one position add up to 2.0000");
    // Shared sites: exact, rounded, differing in the third decimal, split.
    let (n, said) = reads(&at("Na1 Na1+ 0 0 0 0.333\nK1 K1+ 0 0 0 0.667"));
    assert_eq!((n, said.as_str()), (1, ""));
    let (n, said) = reads(&at("Na1 Na1+ 0 0 0 0.5\nK1 K1+ 0.002 0 0 0.506"));
    assert_eq!(n, 1);
    assert!(
        said.contains("0.010 Å apart and are taken as one shared site") && said.contains("add up to 1.0060"),
        "{said}"
    );
    refuses(&at("Na1 Na1+ 0 0 0 0.5\nK1 K1+ 0 0 0 0.52"), "add up to 1.0200");
    let (n, said) = reads(&at("Na1 Na1+ 0 0 0 0.5\nK1 K1+ 0.05 0 0 0.5"));
    assert_eq!(n, 2);
    assert!(said.contains("taken as alternatives of one atom"), "{said}");
}

/// Core CIF dictionary 3.4.0, `_atom_site.disorder_assembly` and `_atom_site.disorder_group`.
#[test]
fn disorder_groups_tell_alternatives() {
    let p1 = format!("{SYMOPS}x,y,z\n-x,-y,-z");
    let list =
        sites("").replace("_occupancy\n", "_occupancy\n_atom_site_disorder_assembly\n_atom_site_disorder_group\n");
    let at =
        |rows: &str| reads(&block(&cell("5", "5", "90"), &p1, &format!("{list}{rows}\nCl1 Cl1- 0.5 0.5 0.5 1 . .")));
    let (n, said) = at("Na1 Na1+ 0.2 0.2 0.2 0.5 A 1\nNa2 Na1+ 0.26 0.2 0.2 0.5 A 2");
    assert_eq!((n, said.as_str()), (5, ""), "stated alternatives need no word");
    let (_, said) = at("Na1 Na1+ 0.2 0.2 0.2 0.5 . .\nNa2 Na1+ 0.26 0.2 0.2 0.5 . .");
    assert!(said.contains("`Na1` and `Na2` are 0.300 Å apart and are taken as alternatives of one atom"), "{said}");
    let (_, said) = at("Na1 Na1+ 0.2 0.2 0.2 0.5 A 1\nNa2 Na1+ 0.26 0.2 0.2 0.5 A 1");
    assert!(said.contains("are in one disorder group, but cannot both be there"), "{said}");
    let (n, said) = at("Na1 Na1+ 0.2 0.2 0.2 1 A 1\nNa2 Na1+ 0.26 0.2 0.2 1 A 2");
    assert_eq!(n, 5);
    assert!(
        said.contains("`Na1`, `Na2` are alternatives of other sites by their disorder groups, but have an"),
        "{said}"
    );
    // About the centre of inversion, each image half the time.
    let (_, said) = at("Na1 Na1+ 0.04 0.02 0 0.5 A -1");
    assert_eq!(said, "");
    let (_, said) = at("Na1 Na1+ 0.04 0.02 0 0.5 A 1");
    assert!(said.contains("`Na1` and an image of it are 0.447 Å apart"), "{said}");
}

#[test]
fn occupancies_are_exact() {
    let p1 = format!("{SYMOPS}x,y,z");
    let at = |share: &str| block(&cell("5", "5", "90"), &p1, &sites(&format!("Na1 Na1+ 0 0 0 {share}")));
    for (text, want, said) in [
        ("0.333", "333/1000", ""),
        ("0.25(3)", "1/4", ""),
        (".5", "1/2", ""),
        (".", "1", ""),
        ("?", "1", "an occupancy of `?` is taken as 1"),
        ("1.004", "1", "is taken as 1"),
        ("much", "1", "`much` is no number and is taken as 1"),
    ] {
        let structure = read(&at(text)).unwrap();
        assert_eq!(structure.structure.sites[0].occupants[0].occupancy.to_string(), want, "{text}");
        let warnings: String = structure.warnings.iter().map(|w| w.message.as_str()).collect();
        assert!(warnings.contains(said) && warnings.is_empty() == said.is_empty(), "{text}: {warnings}");
    }
    refuses(&at("1.2"), "must be from 0 to 1");
    refuses(&at("-0.1"), "must be from 0 to 1");
    refuses(&at("0"), "no listed site has a position");
}

#[test]
fn positions_that_are_not_known() {
    let p1 = format!("{SYMOPS}x,y,z");
    let at = |x: &str| block(&cell("5", "5", "90"), &p1, &sites(&format!("{HALITE}\nH1 H ? {x} 0.1 1")));
    let structure = read(&at(".")).unwrap();
    assert_eq!((structure.structure.sites.len(), structure.skipped.as_slice()), (2, &["H1".to_owned()][..]));
    for (bad, why) in
        [("1/4", "`1/4` is no number"), ("0,5", "`0,5` is no number"), ("1e9", "out of range"), ("nan", "no number")]
    {
        refuses(&at(bad).replace("H1 H ?", "H1 H 0.1"), why);
    }
    let lacking = sites(HALITE).replace("_atom_site_fract_y\n", "_atom_site_y\n");
    refuses(&block(&cell("5", "5", "90"), &p1, &lacking), "lacks `_atom_site_fract_y`");
    let orthogonal = sites("Na1 Na1+ 0 0 0 1\nCl1 Cl1- 2.5 2.5 2.5 1").replace("fract", "Cartn");
    let structure = read(&block(&cell("5", "5", "90"), &p1, &orthogonal)).unwrap();
    assert!((structure.structure.sites[1].position.0.x - 0.5).abs() < 1e-12);
    assert!(structure.warnings.iter().any(|w| w.message.contains("a along x")));
}

#[test]
fn labels_types_and_charges() {
    let p1 = format!("{SYMOPS}x,y,z");
    let types = "loop_\n_atom_type_symbol\n_atom_type_oxidation_number\nFe3+ 2\nO2- -2\nCu2+ 1.7";
    let cif = block(
        &cell("5", "5", "90"),
        &format!("{types}\n{p1}"),
        &sites("A Fe3+ 0 0 0 1\nA O2- 0.5 0 0 1\nB Cu2+ 0 0.5 0 1"),
    );
    let structure = read(&cif).unwrap();
    let species: Vec<String> = structure.structure.sites.iter().map(|s| s.occupants[0].species.to_string()).collect();
    assert_eq!(species, ["Fe2+", "O2-", "Cu2+"]);
    assert_eq!(structure.labels.iter().collect::<Vec<_>>(), ["A", "A_2", "B"]);
    let said: Vec<_> = structure.warnings.iter().map(|w| w.message.as_str()).collect();
    for part in [
        "says +3 e, its `_atom_type_oxidation_number` +2",
        "`1.7` of `Cu2+` is no whole number",
        "label `A` stands twice",
    ] {
        assert!(said.iter().any(|s| s.contains(part)), "{part}: {said:?}");
    }
    for (label, why) in
        [("Vac1", "begins with no element"), ("M1", "begins with no element"), ("Wat", "begins with no element")]
    {
        let rows = sites(&format!("{label} ? 0 0 0 1"));
        refuses(&block(&cell("5", "5", "90"), &p1, &rows), why);
    }
}

#[test]
fn a_formula_that_is_not_that_of_the_sites() {
    let p1 = format!("_chemical_formula_sum 'Na Cl H2'\n_cell_formula_units_Z 1\n{SYMOPS}x,y,z");
    let (_, said) = reads(&block(&cell("5", "5", "90"), &p1, &sites(HALITE)));
    assert!(said.contains("the sites hold `Cl Na`") && said.contains("no site holds H"), "{said}");
}

/// Hostile sizes and nonsense end in errors, not in panics.
#[test]
fn nothing_panics() {
    let p1 = format!("{SYMOPS}x,y,z");
    for a in ["1e-300", "1e300", "99999", "0.0001"] {
        let _ = read(&block(&cell(a, "5", "90"), &p1, &sites(HALITE)));
    }
    for gamma in ["179.999999", "0.000001", "180", "1e-9"] {
        let _ = read(&block(&cell("5", "5", gamma), &p1, &sites(HALITE)));
    }
    for symbol in ["'P 3* 6z'", "'\u{e9}'", "'-'", "' '", "'F 4d 2 3 -1d (1 1 1'", "'P 2 (0.3 0 0)'"] {
        let _ = read(&block(&cell("5", "5", "90"), &format!("_space_group_name_Hall {symbol}"), &sites(HALITE)));
        let _ = read(&block(&cell("5", "5", "90"), &format!("_space_group_name_H-M_alt {symbol}"), &sites(HALITE)));
    }
    for text in ["1e400", "-0", "1e-400", "0.99999999999999999999", "999999"] {
        let rows = format!("Na1 Na {text} 0 0 1\nCl1 Cl 0.5 0.5 0.5 1");
        let _ = read(&block(&cell("5", "5", "90"), "_space_group_name_H-M_alt 'F d -3 m'", &sites(&rows)));
    }
}
