//! Any bytes give structures or reasons without a panic, and structures that were read can be written and read again.
#![no_main]

use interstice::format::cif::{Description, Mode, Source, parse, read_structures, write};
use libfuzzer_sys::fuzz_target;

/// Larger cells only take time.
const MAX_SITES: usize = 500;

fuzz_target!(|bytes: &[u8]| {
    let Ok(source) = Source::decode("fuzz", bytes) else { return };
    let Ok(document) = parse(&source, Mode::Lenient) else { return };
    for read in read_structures(&document).into_iter().flatten().filter(|r| r.structure.sites.len() <= MAX_SITES) {
        let description = Description { explicit: true, ..Description::default() };
        let Ok(text) = write(&read.structure, &description) else { continue };
        let again = Source::decode("again", text.as_bytes()).expect("text");
        let again = parse(&again, Mode::Strict).expect("what we write is valid");
        let again = read_structures(&again).remove(0);
        if let Ok(again) = again {
            assert_eq!(again.structure.sites.len(), read.structure.sites.len(), "{text}");
        }
    }
});
