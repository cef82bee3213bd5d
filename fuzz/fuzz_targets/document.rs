//! Any bytes are read by the letter and leniently without a panic; what is valid survives being rewritten.
#![no_main]

use interstice::format::cif::{Block, Datum, Document, Emitter, Mode, Source, parse};
use libfuzzer_sys::fuzz_target;

/// Every code, name and value in order.
fn content(document: &Document<'_>) -> Vec<(String, Datum)> {
    document.blocks.iter().flat_map(|block| of_block(block).chain(block.frames.iter().flat_map(of_block))).collect()
}

fn of_block<'b>(block: &'b Block<'_>) -> impl Iterator<Item = (String, Datum)> + 'b {
    std::iter::once(&block.pairs).chain(&block.loops).flat_map(move |table| {
        (0..table.n_rows()).flat_map(move |row| {
            let name = move |column: usize| format!("{} {}", block.code(), table.names[column].text);
            table.row(row).enumerate().map(move |(column, value)| (name(column), value.datum()))
        })
    })
}

fuzz_target!(|bytes: &[u8]| {
    let Ok(source) = Source::decode("fuzz", bytes) else { return };
    if let Ok(document) = parse(&source, Mode::Lenient) {
        content(&document);
        document.warnings.iter().for_each(|warning| assert!(!warning.render("fuzz", source.text()).is_empty()));
    }
    match parse(&source, Mode::Strict) {
        Ok(document) => {
            let Ok(text) = Emitter::rewrite(&document) else { return };
            let again = Source::decode("again", text.as_bytes()).expect("text");
            assert_eq!(content(&parse(&again, Mode::Strict).expect("a valid file")), content(&document), "{text}");
        }
        Err(faults) => faults.iter().for_each(|fault| assert!(!fault.render("fuzz", source.text()).is_empty())),
    }
});
