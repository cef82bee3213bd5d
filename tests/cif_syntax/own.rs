//! Cases of our own: files of one rule each, with the verdict that the standard gives by the paragraph or production
//! named in the table (International Tables G, 2006, section 2.2.7; Bernstein et al., J. Appl. Cryst. 49, 277 (2016)).

use crate::conformance::{check_counts, check_rewriting, rows, said};
use interstice::format::cif::{Mode, Source, check_syntax, parse};
use std::path::{Path, PathBuf};

pub fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data/cif")
}

#[test]
fn every_verdict_is_right() {
    let table = rows(&folder(), "expected.tsv");
    for row in &table {
        let file = &row["file"];
        let bytes = std::fs::read(folder().join(file)).unwrap();
        let faults = check_syntax(file, &bytes);
        assert_eq!(faults.is_empty(), row["verdict"] == "valid", "{file}: {}: {faults:?}", row["reason"]);
        match faults.first() {
            Some(first) => {
                assert!(row["line"].is_empty() || row["line"] == first.line.to_string(), "{file}: {first}");
            }
            None => {
                let source = Source::decode(file, &bytes).unwrap();
                let document = parse(&source, Mode::Strict).unwrap();
                check_counts(&document, row);
                check_rewriting(&document, file);
                // A lenient reader takes what is legal as it is.
                assert!(parse(&source, Mode::Lenient).unwrap().warnings.is_empty(), "{file}");
            }
        }
    }
    let on_disk: usize = ["valid-1.1", "valid-2.0", "invalid"]
        .map(|part| std::fs::read_dir(folder().join(part)).unwrap().count())
        .iter()
        .sum();
    assert_eq!(table.len(), on_disk, "files and rows");
}

#[test]
fn every_value_is_right() {
    for row in rows(&folder(), "values.tsv") {
        let bytes = std::fs::read(folder().join(&row["file"])).unwrap();
        let source = Source::decode(&row["file"], &bytes).unwrap();
        let document = parse(&source, Mode::Strict).unwrap();
        let (block, frame) = row["block"].split_once('/').unwrap_or((&row["block"], ""));
        let block = document.blocks.iter().find(|b| b.code() == block).unwrap();
        let block = block.frames.iter().find(|f| f.code() == frame).unwrap_or(block);
        let table = block.table(&[&row["name"]]).unwrap();
        let value = table.value(row["row"].parse::<usize>().unwrap_or(1) - 1, table.column(&[&row["name"]]).unwrap());
        let expected = serde_json::from_str(&row["value"]).unwrap();
        assert_eq!(said(&value.datum()), (row["kind"].as_str(), expected), "{} {}", row["file"], row["name"]);
    }
}
