//! Long files made of one piece over and over, such as would take a reader with a search in a search very long.

use interstice::format::cif::{Mode, Source, check_syntax, parse, read_structures};

const PIECES: usize = 100_000;

const CELL: &str = "data_x\n_cell_length_a 100\n_cell_length_b 100\n_cell_length_c 100\n_cell_angle_alpha 90\n\
    _cell_angle_beta 90\n_cell_angle_gamma 90\n_space_group_name_H-M_alt 'P 1'\nloop_\n_atom_site_label\n\
    _atom_site_fract_x\n_atom_site_fract_y\n_atom_site_fract_z\n";

#[test]
fn long_files_of_one_piece_come_to_an_end() {
    let two = "#\\#CIF_2.0\ndata_x\nloop_ _a\n";
    for (start, piece) in [
        ("", "data_a\n"),
        ("data_a\n", "save_f\n_a 1\nsave_\n"),
        ("data_a\n", "_a 1\n"),
        ("data_x\n_a ", "["),
        ("data_x\nloop_ _a\n", "[a b\n"),
        ("data_x\nloop_ _a\n", "[a b "),
        ("data_x\nloop_ _a\n", "'a'b"),
        (two, "["),
        (two, "{'a':"),
        (two, "{'a' "),
        (two, "'a'b"),
        (two, "'a'#"),
        (two, "'a'#['b'#"),
        (two, "'''a"),
        (two, ";\n;a\n"),
        ("data_x\n_a\n;", " ;\n"),
        (CELL, "Na 0.1 0.2 0.3\n"),
        (CELL, "Na ? . ?\n"),
    ] {
        let text = start.to_owned() + &piece.repeat(PIECES) + "\n";
        let shown = &piece[..piece.len().min(12)];
        let faults = check_syntax("long", text.as_bytes());
        assert!(start == CELL || !faults.is_empty(), "{shown}");
        let source = Source::decode("long", text.as_bytes()).unwrap();
        if let Ok(document) = parse(&source, Mode::Lenient) {
            assert!(read_structures(&document).iter().all(Result::is_err), "{shown}");
        }
    }
}
