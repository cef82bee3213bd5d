//! What is written is read back: documents of any content, and every valid file of the conformance set.

use interstice::format::cif::{Block, Datum, Document, EmitError, Emitter, Mode, Source, Version, check_syntax, parse};
use proptest::collection::vec;
use proptest::prelude::*;

/// A block or frame: its code, its items one by one, its loops as names and values, its frames.
#[derive(Clone, Debug, PartialEq)]
pub struct Content {
    code: String,
    pairs: Vec<(String, Datum)>,
    loops: Vec<(Vec<String>, Vec<Datum>)>,
    frames: Vec<Content>,
}

pub fn content(document: &Document<'_>) -> Vec<Content> {
    document.blocks.iter().map(of_block).collect()
}

fn of_block(block: &Block<'_>) -> Content {
    let names = |names: &[interstice::format::cif::Name<'_>]| names.iter().map(|n| n.text.to_owned()).collect();
    let data = |table: &interstice::format::cif::Loop<'_>| -> Vec<Datum> {
        (0..table.n_rows()).flat_map(|row| table.row(row).map(|v| v.datum())).collect()
    };
    let all: Vec<String> = names(&block.pairs.names);
    Content {
        code: block.code().to_owned(),
        pairs: all.into_iter().zip(data(&block.pairs)).collect(),
        loops: block.loops.iter().map(|table| (names(&table.names), data(table))).collect(),
        frames: block.frames.iter().map(of_block).collect(),
    }
}

fn emitted(blocks: &[Content], version: Version) -> Result<String, EmitError> {
    let mut emitter = Emitter::new(version);
    for block in blocks {
        emitter.block(&block.code)?;
        emit_content(&mut emitter, block)?;
        for frame in &block.frames {
            emitter.frame(&frame.code)?;
            emit_content(&mut emitter, frame)?;
            emitter.end_frame();
        }
    }
    Ok(emitter.finish())
}

fn emit_content(emitter: &mut Emitter, content: &Content) -> Result<(), EmitError> {
    for (name, value) in &content.pairs {
        emitter.pair(name, value)?;
    }
    for (names, values) in &content.loops {
        let names: Vec<&str> = names.iter().map(String::as_str).collect();
        emitter.table(&names, values)?;
    }
    Ok(())
}

/// Written, valid by the letter, and read back the same.
fn check(blocks: &[Content], version: Version) -> Result<(), TestCaseError> {
    let text = emitted(blocks, version).map_err(|e| TestCaseError::fail(e.to_string()))?;
    let faults = check_syntax("test", text.as_bytes());
    prop_assert!(faults.is_empty(), "{faults:?}\n{text}");
    let source = Source::decode("written", text.as_bytes()).unwrap();
    let document = parse(&source, Mode::Strict).unwrap();
    prop_assert_eq!(document.version, version);
    prop_assert_eq!(content(&document), blocks, "{}", text);
    Ok(())
}

/// Text that is hard to write: quotes, semicolons and backslashes at the ends of lines, long lines, keywords.
fn text_of(version: Version) -> impl Strategy<Value = String> {
    let piece = prop_oneof![
        4 => "[ -~]{0,12}",
        2 => "[;'\"\\\\ \t\n_#\\[\\]{}:?.$-]{0,6}",
        1 => Just("data_x".to_owned()),
        1 => Just("loop_".to_owned()),
        1 => "[0-9]{1,3}(\\.[0-9]{0,3})?(\\([0-9]\\))?",
        1 => "[a-z;]{70,90}",
        1 => Just(" x".repeat(1100)),
        1 => Just("'\"".to_owned() + &";".repeat(2100)),
    ];
    let other = if version == Version::Cif20 { "[α-ω漢𝔄]{0,3}" } else { "" };
    vec((piece, other), 0..4).prop_map(|pieces| pieces.into_iter().map(|(a, b)| a + &b).collect())
}

fn number() -> impl Strategy<Value = String> {
    "[+-]?([0-9]{1,6}\\.?|[0-9]{0,3}\\.[0-9]{1,6})([eE][+-]?[0-9]{1,2})?(\\([0-9]{1,2}\\))?"
}

fn datum(version: Version) -> BoxedStrategy<Datum> {
    let leaf = prop_oneof![
        Just(Datum::Unknown),
        Just(Datum::Inapplicable),
        number().prop_map(Datum::Number),
        text_of(version).prop_map(Datum::Text),
    ];
    match version {
        Version::Cif11 => leaf.boxed(),
        Version::Cif20 => leaf
            .prop_recursive(4, 24, 4, |inner| {
                let key = "[ -&(-~α-ω\n]{0,9}";
                prop_oneof![
                    vec(inner.clone(), 0..4).prop_map(Datum::List),
                    vec((key, inner), 0..4).prop_map(Datum::Table),
                ]
            })
            .boxed(),
    }
}

/// Pairs and loops with names that differ.
fn items(version: Version) -> impl Strategy<Value = Content> {
    let table = (1_usize..4, 1_usize..4)
        .prop_flat_map(move |(columns, rows)| (Just(columns), vec(datum(version), columns * rows)));
    (vec(datum(version), 0..4), vec(table, 0..3)).prop_map(|(pairs, loops)| {
        let mut n = 0;
        let mut name = || {
            n += 1;
            format!("_Name.{n}[x]'\"")
        };
        let pairs = pairs.into_iter().map(|value| (name(), value)).collect();
        let loops = loops.into_iter().map(|(columns, v)| ((0..columns).map(|_| name()).collect(), v)).collect();
        Content { code: String::new(), pairs, loops, frames: Vec::new() }
    })
}

fn blocks(version: Version) -> impl Strategy<Value = Vec<Content>> {
    let coded = |contents: Vec<Content>| -> Vec<Content> {
        let numbered = contents.into_iter().enumerate();
        numbered.map(|(i, content)| Content { code: format!("{i}_{{'$;"), ..content }).collect()
    };
    let block = (items(version), vec(items(version), 0..2))
        .prop_map(move |(block, frames)| Content { frames: coded(frames), ..block });
    vec(block, 0..3).prop_map(coded)
}

/// Whether 1.1 can write a text: one with several or long lines must not have one that begins with `;`.
fn fits_version(datum: &Datum, version: Version) -> bool {
    let mut emitter = Emitter::new(version);
    emitter.block("x").unwrap();
    match emitter.pair("_x", datum) {
        Ok(()) => true,
        Err(EmitError::Value { .. }) => {
            let Datum::Text(text) = datum else { return false };
            assert!(version == Version::Cif11 && (text.contains(';')), "{text:?}");
            false
        }
        Err(other) => panic!("{other}: {datum:?}"),
    }
}

fn writable(content: &Content, version: Version) -> bool {
    let values = content.pairs.iter().map(|(_, v)| v).chain(content.loops.iter().flat_map(|(_, v)| v));
    values.into_iter().all(|v| fits_version(v, version)) && content.frames.iter().all(|f| writable(f, version))
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 1000, ..ProptestConfig::default() })]

    #[test]
    fn documents_of_1_1_survive(mut blocks in blocks(Version::Cif11)) {
        blocks.retain(|block| writable(block, Version::Cif11));
        check(&blocks, Version::Cif11)?;
    }

    #[test]
    fn documents_of_2_0_survive(blocks in blocks(Version::Cif20)) {
        check(&blocks, Version::Cif20)?;
    }

    /// Whatever the bytes are, reading ends, and what it gives can be written and read again.
    #[test]
    fn any_bytes_are_read_or_refused(bytes in vec(any::<u8>(), 0..200)) {
        survives(&bytes);
    }

    /// Pieces of syntax in any order.
    #[test]
    fn any_syntax_is_read_or_refused(
        pieces in vec(prop_oneof![
            Just("#\\#CIF_2.0\n"), Just("data_a "), Just("\n"), Just("\n;"), Just(" "), Just("loop_ "), Just("_n "),
            Just("_m "), Just("'"), Just("\""), Just("'''"), Just("["), Just("]"), Just("{"), Just("}"), Just(":"),
            Just("save_"), Just("save_f "), Just("x"), Just("\\"), Just("global_ "), Just("#"), Just("1.5(2) "),
            Just("?"), Just("\r"), Just("\u{FEFF}"), Just("é"), Just("\u{1A}"), Just("$"), Just(";"),
        ], 0..40)
    ) {
        survives(pieces.concat().as_bytes());
    }
}

/// Reads bytes both ways and looks at all that was read; what a strict reader takes must also survive being rewritten.
fn survives(bytes: &[u8]) {
    let faults = check_syntax("any", bytes);
    let Ok(source) = Source::decode("any", bytes) else {
        assert_eq!(faults.len(), 1);
        return;
    };
    let text = source.text();
    faults.iter().for_each(|fault| assert!(!fault.render("any", text).is_empty() && fault.line > 0));
    if let Ok(document) = parse(&source, Mode::Lenient) {
        let read = content(&document);
        document.warnings.iter().for_each(|warning| assert!(!warning.render("any", text).is_empty()));
        for structure in interstice::format::cif::read_structures(&document) {
            drop(structure);
        }
        if faults.is_empty() {
            let Ok(text) = Emitter::rewrite(&document) else { return };
            assert_eq!(check_syntax("test", text.as_bytes()), [], "{text}");
            let source = Source::decode("again", text.as_bytes()).unwrap();
            assert_eq!(content(&parse(&source, Mode::Strict).unwrap()), read, "{text}");
        }
    }
}

#[test]
fn what_cannot_be_written_is_refused() {
    let refuse = |version, name: &str, datum: Datum| {
        let mut emitter = Emitter::new(version);
        emitter.block("x").unwrap();
        emitter.pair(name, &datum).unwrap_err().to_string()
    };
    let text = |text: &str| Datum::Text(text.into());
    use Version::{Cif11, Cif20};
    assert_eq!(
        refuse(Cif11, "_", text("a")),
        "`_` is no data name: it must be an underscore and at least one character"
    );
    assert_eq!(refuse(Cif11, "_a b", text("a")), "`_a b` is no data name: it must hold no blank");
    assert_eq!(
        refuse(Cif11, &format!("_{}", "a".repeat(75)), text("a")),
        format!("`_{}` is no data name: it is too long", "a".repeat(75))
    );
    assert_eq!(refuse(Cif11, "_a", text("é")), "character U+00E9 cannot stand in CIF 1.1");
    assert_eq!(refuse(Cif20, "_a", text("a\rb")), "character U+000D cannot stand in CIF 2.0");
    assert_eq!(refuse(Cif11, "_a", Datum::List(vec![])), "CIF 1.1 has no way to write lists and tables");
    assert_eq!(refuse(Cif20, "_a", Datum::Number("1/3".into())), "CIF 2.0 has no way to write a number that is none");
    assert_eq!(
        refuse(Cif11, "_a", text("a\n;b")),
        "CIF 1.1 has no way to write a text of several or long lines where one begins with `;`"
    );
    let deep = (0..600).fold(Datum::Unknown, |inner, _| Datum::List(vec![inner]));
    assert_eq!(refuse(Cif20, "_a", deep), "CIF 2.0 has no way to write lists nested so deeply");
    let table = Emitter::new(Cif11).table(&["_a", "_b"], &[text("1")]).unwrap_err();
    assert_eq!(table.to_string(), "a loop of 2 names has 1 values; it needs a whole number of rows, and at least one");
}
