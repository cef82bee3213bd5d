//! The conformance set: files with the standard's verdict on each, from the folder that `INTERSTICE_CIF_CONFORMANCE`
//! names. Its files carry licences of their own and are no part of this project.

use crate::round_trip::content;
use interstice::format::cif::{Block, Datum, Document, Emitter, Mode, Source, check_syntax, parse};
use std::collections::BTreeMap;
use std::path::Path;

/// Verdicts of the table that the standard does not bear out.
const ARGUED: [(&str, &str); 2] = [
    (
        "valid-1.1/cifapi_bom.cif",
        "U+FEFF is not in the character set (file syntax, paragraph 22), as for invalid/x11_bom.cif; the set itself calls it disputed",
    ),
    (
        "invalid/cod_test.cif",
        "nothing in the file is at fault, and the four readers of the table accept it; the fault described is that of trip_test.cif",
    ),
];

/// First lines of error that differ from the table's, which are those of one reader: our line and the reason.
const OTHER_LINES: [(&str, usize, &str); 22] = [
    ("invalid/cod_9003354-unexpected-loop-end.cif", 12, BYTES),
    ("invalid/cod_non-ascii-comment.cif", 2, BYTES),
    ("invalid/cod_non-ascii-side-comment.cif", 2, BYTES),
    ("invalid/cod_weird-unclosed-quote.cif", 2, BYTES),
    ("invalid/x11_latin1.cif", 2, BYTES),
    ("invalid/x20_latin1.cif", 3, BYTES),
    ("invalid/cod_err_loop_01.cif", 8, CAUSE),
    ("invalid/cod_unterminated-text-field.cif", 4, CAUSE),
    ("invalid/trip_ciftest9.cif", 24, CAUSE),
    ("invalid/x11_frame_unclosed.cif", 2, CAUSE),
    ("invalid/x11_loop_no_names.cif", 2, CAUSE),
    ("invalid/x11_loop_no_values.cif", 2, CAUSE),
    ("invalid/x11_loop_ragged.cif", 7, CAUSE),
    ("invalid/x11_name_no_value.cif", 2, CAUSE),
    ("invalid/x11_name_no_value_eof.cif", 3, CAUSE),
    ("invalid/x11_nested_loop.cif", 2, CAUSE),
    ("invalid/x11_textfield_indented_end.cif", 3, CAUSE),
    ("invalid/x11_unterminated_text.cif", 3, CAUSE),
    ("invalid/x20_list_unclosed.cif", 3, CAUSE),
    ("invalid/x20_triple_unclosed.cif", 3, CAUSE),
    (
        "invalid/cod_unquoted_str_02.cif",
        14,
        "`Value3]` on line 3 is legal: `]` only must not begin a value (paragraph 19)",
    ),
    ("invalid/trip_longtext.cif", 36, "line 22 has 2048 characters, which is legal (paragraph 28)"),
];
const BYTES: &str = "the table has line 1 for bytes that are not UTF-8; ours is the line of the byte";
const CAUSE: &str = "the table has the line where reading failed, ours that of what is not closed, not filled or empty";

/// A count of the table that the file does not bear out: it holds the names `_a`, `_t` and `_b`, not two.
const ARGUED_COUNT: &str = "valid-1.1/h11_cr_only.cif";

/// A value of the table that the standard does not bear out: `_c 3` is a number by common semantic features, paragraph 19,
/// as are the other bare numbers of the table.
const ARGUED_VALUE: (&str, &str) = ("valid-1.1/h11_comment_after_value.cif", "_c");

pub fn rows(folder: &Path, table: &str) -> Vec<BTreeMap<String, String>> {
    let text = std::fs::read_to_string(folder.join(table)).unwrap();
    let mut lines = text.lines();
    let heads: Vec<&str> = lines.next().unwrap().split('\t').collect();
    lines.map(|line| heads.iter().map(|h| h.to_string()).zip(line.split('\t').map(str::to_owned)).collect()).collect()
}

fn folder() -> Option<std::path::PathBuf> {
    let folder = std::env::var_os("INTERSTICE_CIF_CONFORMANCE").map(Into::into);
    if folder.is_none() {
        println!("INTERSTICE_CIF_CONFORMANCE is not set: the conformance set is not read");
    }
    folder
}

#[test]
fn verdicts_are_those_of_the_standard() {
    let Some(folder) = folder() else { return };
    let (mut right, mut wrong, mut lines) = (0, Vec::new(), 0);
    for row in rows(&folder, "expected.tsv") {
        let file = &row["file"];
        let bytes = std::fs::read(folder.join(file)).unwrap();
        let faults = check_syntax(file, &bytes);
        let expected = row["verdict"] == "valid";
        let argued = ARGUED.iter().any(|(name, _)| name == file);
        match (faults.is_empty() == expected, argued) {
            (true, false) => right += 1,
            (false, true) => println!("{file}: argued"),
            (true, true) => wrong.push(format!("{file}: agrees, but is argued")),
            (false, false) => wrong.push(format!("{file}: {:?} {}", faults.first(), row["what_is_tested_or_defect"])),
        }
        if let (Some(first), Some((line, _))) = (faults.first(), row["first_error_line_col"].split_once(':')) {
            let other = OTHER_LINES.iter().find(|(name, ..)| name == file);
            match other {
                None if line == first.line.to_string() => lines += 1,
                Some((_, ours, _)) if *ours == first.line => {}
                _ => wrong.push(format!("{file}: line {line} in the table; {first}")),
            }
        }
        if expected && !argued && file != ARGUED_COUNT {
            let source = Source::decode(file, &bytes).unwrap();
            let document = parse(&source, Mode::Strict).unwrap();
            check_counts(&document, &row);
            check_rewriting(&document, file);
        }
    }
    println!("{right} verdicts of 309 agree; {lines} first lines agree, {} differ with reason", OTHER_LINES.len());
    assert!(wrong.is_empty(), "{} wrong:\n{}", wrong.len(), wrong.join("\n"));
}

/// What was read is written in a legal form that reads alike.
pub fn check_rewriting(document: &Document<'_>, file: &str) {
    let text = match Emitter::rewrite(document) {
        Ok(text) => text,
        Err(why) => {
            println!("{file}: {why}");
            return;
        }
    };
    assert_eq!(check_syntax("test", text.as_bytes()), [], "{file}\n{text}");
    let source = Source::decode(file, text.as_bytes()).unwrap();
    assert_eq!(content(&parse(&source, Mode::Strict).unwrap()), content(document), "{file}\n{text}");
}

pub fn check_counts(document: &Document<'_>, row: &BTreeMap<String, String>) {
    let frames = document.blocks.iter().map(|b| b.frames.len()).sum::<usize>();
    let loops_of = |b: &Block<'_>| b.loops.len() + b.frames.iter().map(|f| f.loops.len()).sum::<usize>();
    let loops = document.blocks.iter().map(loops_of).sum::<usize>();
    let names = document.blocks.iter().map(Block::n_names).sum::<usize>();
    let found = [document.blocks.len(), frames, loops, names].map(|n| n.to_string());
    let expected = ["blocks", "frames", "loops", "names"].map(|column| row[column].clone());
    assert_eq!(found, expected, "blocks, frames, loops, names of {}", row["file"]);
}

#[test]
fn values_are_those_of_the_table() {
    let Some(folder) = folder() else { return };
    let mut wrong = Vec::new();
    let table = rows(&folder, "values.tsv");
    for row in &table {
        let bytes = std::fs::read(folder.join(&row["file"])).unwrap();
        let source = Source::decode(&row["file"], &bytes).unwrap();
        let document = parse(&source, Mode::Strict).unwrap();
        let block = document.blocks.iter().find(|b| b.code() == row["block"]).unwrap();
        let block = if row["frame"].is_empty() {
            block
        } else {
            block.frames.iter().find(|f| f.code() == row["frame"]).unwrap()
        };
        let table = block.table(&[&row["name"]]).unwrap();
        let index = row["row"].parse::<usize>().unwrap_or(1) - 1;
        let value = table.value(index, table.column(&[&row["name"]]).unwrap());
        let number = value.number().filter(|_| matches!(value.datum(), Datum::Number(_)));
        let (kind, json) = said(&value.datum());
        let same_json = serde_json::from_str::<serde_json::Value>(&row["value_as_json"]).unwrap() == json;
        let mut words = row["kind"].split(' ');
        let same_kind = words.next() == Some(kind);
        let stated: Vec<f64> = row["kind"].split(' ').filter_map(|w| w.parse().ok()).collect();
        // `numb VALUE su SU`, `numb su SU`, `numb VALUE no su`.
        let same_number = number.is_none_or(|n| match (stated.as_slice(), row["kind"].contains(" su ")) {
            ([value, su], _) => n.value == *value && n.su.is_some_and(|s| (s - su).abs() < 1e-12 * su),
            ([su], true) => n.su.is_some_and(|s| (s - su).abs() < 1e-12 * su),
            ([value], false) => n.value == *value && n.su.is_none(),
            _ => n.su.is_none(),
        });
        let argued = ARGUED_VALUE == (&row["file"], &row["name"]);
        if (same_json && same_kind && same_number) == argued {
            wrong.push(format!(
                "{} {}: {kind} {json}, table {} {}",
                row["file"], row["name"], row["kind"], row["value_as_json"]
            ));
        }
    }
    println!("{} values of {} agree", table.len() - wrong.len() - 1, table.len());
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// Kind and JSON of a value as the tables of values have them.
pub fn said(datum: &Datum) -> (&'static str, serde_json::Value) {
    let kind = match datum {
        Datum::Unknown => "unknown",
        Datum::Inapplicable => "inapplicable",
        Datum::Number(_) => "numb",
        Datum::Text(_) => "str",
        Datum::List(_) => "list",
        Datum::Table(_) => "table",
    };
    (kind, json(datum))
}

fn json(datum: &Datum) -> serde_json::Value {
    match datum {
        Datum::Unknown => "?".into(),
        Datum::Inapplicable => ".".into(),
        Datum::Number(text) | Datum::Text(text) => text.as_str().into(),
        Datum::List(members) => members.iter().map(json).collect(),
        Datum::Table(entries) => entries.iter().map(|(key, value)| (key.clone(), json(value))).collect(),
    }
}
