//! The data names that we write, held against facts of the core CIF dictionary 3.4.0 (`../data/cif_names.tsv`).

use std::collections::BTreeSet;

struct Definition {
    name: &'static str,
    contents: &'static str,
    range: Option<(f64, f64)>,
    enumeration: Vec<&'static str>,
    /// Names of the category's key, empty for a category with one row.
    key: Vec<&'static str>,
}

fn definitions() -> Vec<Definition> {
    let bound = |text: &str, open: f64| if text.is_empty() { open } else { text.parse().unwrap() };
    include_str!("../data/cif_names.tsv")
        .lines()
        .filter(|line| !line.starts_with('#'))
        .map(|line| {
            let f: Vec<&str> = line.split('\t').collect();
            let range = f[3].split_once(':').map(|(a, b)| (bound(a, f64::NEG_INFINITY), bound(b, f64::INFINITY)));
            let list = |text: &'static str, by| text.split(by).filter(|s| !s.is_empty()).collect();
            Definition { name: f[0], contents: f[2], range, enumeration: list(f[4], '|'), key: list(f[5], ' ') }
        })
        .collect()
}

/// Splits the files that we write into tokens: enough of CIF for them, and independent of the reader.
fn tokens(text: &str) -> Vec<(String, bool)> {
    let mut out = Vec::new();
    let mut lines = text.lines();
    while let Some(line) = lines.next() {
        if line.starts_with(';') {
            let rest: Vec<&str> = lines.by_ref().take_while(|l| *l != ";").collect();
            out.push((rest.join("\n"), true));
            continue;
        }
        let mut rest = line.trim_start();
        while !rest.is_empty() && !rest.starts_with('#') {
            let quote = rest.chars().next().filter(|c| "'\"".contains(*c));
            let (token, after) = match quote {
                Some(q) => rest[1..].split_once(q).expect("closing quote"),
                None => rest.split_once(' ').unwrap_or((rest, "")),
            };
            out.push((token.to_owned(), quote.is_some()));
            rest = after.trim_start();
        }
    }
    out
}

/// Fails unless every name of the file is known, every value has the type, range or enumeration of its name, loops
/// hold one category with its key, and keys are unique.
#[track_caller]
pub fn check(text: &str) {
    assert!(text.starts_with("#\\#CIF_1.1\ndata_"), "magic code");
    assert!(text.is_ascii() && !text.contains('\r') && text.ends_with('\n'));
    assert!(text.lines().all(|line| line.len() <= 80), "a long line");
    let definitions = definitions();
    let find = |name: &str| {
        definitions.iter().find(|d| d.name == name).unwrap_or_else(|| panic!("`{name}` is not a name that we write"))
    };
    let tokens = tokens(text);
    let mut seen = BTreeSet::new();
    let mut at = 1;
    let mut types = BTreeSet::new();
    while at < tokens.len() {
        let mut columns = Vec::new();
        let looped = tokens[at].0 == "loop_" && !tokens[at].1;
        at += usize::from(looped);
        while at < tokens.len() && tokens[at].0.starts_with('_') && !tokens[at].1 && (looped || columns.is_empty()) {
            columns.push(find(&tokens[at].0));
            assert!(seen.insert(tokens[at].0.clone()), "`{}` stands twice", tokens[at].0);
            at += 1;
        }
        assert!(!columns.is_empty(), "`{}` has no name", tokens[at].0);
        assert_eq!(looped, !columns[0].key.is_empty(), "`{}`: loop or not", columns[0].name);
        assert!(columns.iter().all(|c| c.key == columns[0].key), "one loop, one category");
        assert!(columns[0].key.iter().all(|key| columns.iter().any(|c| c.name == *key)), "a loop without its key");
        let mut keys = BTreeSet::new();
        loop {
            let row = &tokens[at..at + columns.len()];
            for (column, (value, quoted)) in columns.iter().zip(row) {
                check_value(column, value, *quoted);
            }
            let of = |name: &str| columns.iter().position(|c| c.name == name).map(|i| row[i].0.clone());
            let key: Vec<_> = columns[0].key.iter().map(|name| of(name)).collect();
            assert!(!looped || keys.insert(key.clone()), "key {key:?} stands twice");
            types.extend(of("_atom_type_symbol"));
            if let Some(symbol) = of("_atom_site_type_symbol") {
                assert!(types.contains(&symbol), "`{symbol}` is not in the atom_type loop");
            }
            at += columns.len();
            let more = looped
                && at < tokens.len()
                && (tokens[at].1 || !(tokens[at].0.starts_with('_') || tokens[at].0 == "loop_"));
            if !more {
                break;
            }
        }
    }
}

#[track_caller]
fn check_value(definition: &Definition, value: &str, quoted: bool) {
    let name = definition.name;
    if !quoted && (value == "?" || value == ".") {
        return;
    }
    if matches!(definition.contents, "Real" | "Integer") {
        assert!(!quoted, "{name}: a number in quotes");
        let number: f64 = value.parse().unwrap_or_else(|_| panic!("{name}: `{value}` is no number"));
        assert!(definition.contents == "Real" || number.fract() == 0.0, "{name}: `{value}` is not whole");
        let (low, high) = definition.range.unwrap_or((f64::NEG_INFINITY, f64::INFINITY));
        assert!((low..=high).contains(&number), "{name}: {value} is out of range");
    }
    if definition.contents == "Word" {
        assert!(!value.contains([' ', '\n']), "{name}: `{value}` is not one word");
    }
    if !definition.enumeration.is_empty() {
        assert!(definition.enumeration.contains(&value), "{name}: `{value}` is not in the list");
    }
}
