//! Space-group symbols as files spell them, resolved to the settings of International Tables.
//!
//! The settings are the 530 of moyo's table (International Tables A, as numbered by spglib). Old and careless
//! spellings are taken: no blanks, underscores, `P2(1)/c`, `F m 3 m` for `F m -3 m` (before the editions of the 1990s
//! the bar was left out; the date is from memory), `C m c a` for `C m c e` (the double glide `e` came in 1992: de Wolff
//! et al., Acta Cryst. A48, 727; from memory), suffixes `:1 :2 :H :R`, and `S`/`Z` or `H`/`R` at the end (common practice, no source).

use super::structure::operations::{Group, close};
use crate::crystal::symmetry::Operation;
use moyo::data::{HallSymbol, HallSymbolEntry, hall_symbol_entry};
use std::collections::BTreeMap;
use std::sync::LazyLock;

/// Number of settings in the table.
const N_SETTINGS: i32 = 530;

/// Longest symbol that is looked at, in characters.
const MAX_SYMBOL: usize = 80;

/// Rank, then serial number of a setting.
type Candidate = (u8, i32);

static BY_HERMANN_MAUGUIN: LazyLock<BTreeMap<String, Vec<Candidate>>> = LazyLock::new(|| {
    let mut table: BTreeMap<String, Vec<Candidate>> = BTreeMap::new();
    for entry in entries() {
        for (rank, spelling) in spellings(&entry) {
            let candidates = table.entry(squeezed(&spelling)).or_default();
            if candidates.iter().all(|(_, hall_number)| *hall_number != entry.hall_number) {
                candidates.push((rank, entry.hall_number));
            }
        }
    }
    table.values_mut().for_each(|candidates| candidates.sort_unstable());
    table
});

fn entries() -> impl Iterator<Item = HallSymbolEntry> {
    (1..=N_SETTINGS).filter_map(hall_symbol_entry)
}

/// Settings that a Hermann–Mauguin symbol can mean, the standard one first: origin choice 2 before 1, hexagonal before
/// rhombohedral axes, unique axis b before c before a. Empty for a symbol that is not in the table.
pub fn settings_of_hermann_mauguin(symbol: &str) -> Vec<i32> {
    if symbol.chars().count() > MAX_SYMBOL {
        return Vec::new();
    }
    let (name, suffix) = symbol.split_once(':').unwrap_or((symbol, ""));
    let name = squeezed(name);
    let suffix = suffix.trim().to_ascii_lowercase();
    if let Some(found) = BY_HERMANN_MAUGUIN.get(&name) {
        let all: Vec<i32> = found.iter().map(|(_, hall_number)| *hall_number).collect();
        return with_suffix(all, &suffix);
    }
    // `R-3mH`, `Fd-3mS`, `Fd-3mZ`: the choice glued to the symbol.
    let glued = [("h", "h"), ("r", "r"), ("s", "1"), ("z", "2")];
    for (end, choice) in glued {
        if let Some(found) = name.strip_suffix(end).and_then(|rest| BY_HERMANN_MAUGUIN.get(rest)) {
            let chosen = with_suffix(found.iter().map(|(_, hall_number)| *hall_number).collect(), choice);
            if !chosen.is_empty() {
                return chosen;
            }
        }
    }
    Vec::new()
}

/// Those of `settings` whose code in the table begins with `suffix` (`1`, `2`, `h`, `r`, `b1`, ...).
fn with_suffix(settings: Vec<i32>, suffix: &str) -> Vec<i32> {
    let fits = |n: &i32| hall_symbol_entry(*n).is_some_and(|e| e.setting.to_ascii_lowercase().starts_with(suffix));
    settings.into_iter().filter(fits).collect()
}

/// Settings of a number of International Tables A (1 to 230), the standard one first.
pub fn settings_of_number(number: i32) -> Vec<i32> {
    let mut found: Vec<Candidate> =
        entries().filter(|e| e.number == number).map(|e| (origin_rank(&e), e.hall_number)).collect();
    found.sort_unstable();
    found.into_iter().map(|(_, hall_number)| hall_number).collect()
}

/// The setting of the table that has this Hall symbol.
pub fn setting_of_hall(symbol: &str) -> Option<i32> {
    let wanted = normal_hall(symbol)?;
    entries().find(|e| e.hall_symbol == wanted).map(|e| e.hall_number)
}

/// Operations of a Hall symbol that need not be in the table (Hall, Acta Cryst. A37, 517, 1981; International Tables B,
/// 2010, section A1.4.2.3), with an origin shift `(x y z)` in twelfths but no change of axes. `None` when it cannot be
/// read or generates no finite group.
pub fn operations_of_hall(symbol: &str) -> Option<Vec<Operation>> {
    let normal = normal_hall(symbol)?;
    // The library panics on symbols outside its grammar: they must not reach it.
    if !obeys_hall_grammar(&normal) {
        return None;
    }
    let hall = HallSymbol::new(&normal)?;
    let mut generators: Vec<Operation> = hall.generators.iter().map(Operation::from).collect();
    for translation in &hall.centering_translations {
        generators.push(Operation { translation: *translation, ..Operation::identity() });
    }
    match close(&generators) {
        Group::Finite(operations) => Some(operations),
        Group::TooLarge => None,
    }
}

/// `-P 2ybc` from `-p_2YBC`: one blank between parts, the lattice letter large, axes and translations small, primes as
/// the table writes them (`^` and `=`).
fn normal_hall(symbol: &str) -> Option<String> {
    if symbol.chars().count() > MAX_SYMBOL || !symbol.is_ascii() {
        return None;
    }
    let symbol = symbol.replace('_', " ").replace('\'', "^").replace('"', "=").replace('(', " (").to_ascii_lowercase();
    let mut parts = symbol.split_ascii_whitespace().map(str::to_owned).collect::<Vec<_>>();
    let lattice = parts.first_mut()?;
    *lattice = lattice.to_ascii_uppercase();
    Some(parts.join(" "))
}

/// Hall's grammar: lattice letter; one to four rotations with axis and translation; origin shift. A screw's digit is
/// taken along c only, as the library does.
fn obeys_hall_grammar(symbol: &str) -> bool {
    let mut parts = symbol.split(' ');
    let lattice = parts.next().map(|p| p.strip_prefix('-').unwrap_or(p));
    if !lattice.is_some_and(|l| matches!(l, "P" | "A" | "B" | "C" | "I" | "R" | "F")) {
        return false;
    }
    let parts: Vec<&str> = parts.collect();
    let (rotations, shift) = match parts.iter().position(|p| p.starts_with('(')) {
        Some(at) => (&parts[..at], &parts[at..]),
        None => (&parts[..], &parts[..0]),
    };
    let rotation = |part: &&str| {
        let part = part.strip_prefix('-').unwrap_or(part);
        let Some(rest) = part.strip_prefix(['1', '2', '3', '4', '6']) else { return false };
        let axis_end = rest.find(|c| !"xyz*^=".contains(c)).unwrap_or(rest.len());
        let (axis, translation) = rest.split_at(axis_end);
        let screw = translation.chars().any(|c| c.is_ascii_digit());
        axis.len() <= 2
            && translation.len() <= 4
            && translation.chars().all(|c| "abcnuvwd12345".contains(c))
            && !(screw && (axis.contains(['x', 'y', '*', '^', '=']) || translation.len() > 1))
    };
    let shift = shift.join(" ");
    let whole = |n: &str| n.parse::<i32>().is_ok_and(|n| n.abs() < 12);
    let shift_is_fine = shift.is_empty()
        || shift.strip_prefix('(').and_then(|s| s.strip_suffix(')')).is_some_and(|s| {
            let numbers: Vec<&str> = s.split(' ').collect();
            numbers.len() == 3 && numbers.iter().all(|n| whole(n))
        });
    !rotations.is_empty() && rotations.len() <= 4 && rotations.iter().all(rotation) && shift_is_fine
}

/// Lower case without blanks, underscores and parentheses.
fn squeezed(symbol: &str) -> String {
    symbol.chars().filter(|c| !c.is_whitespace() && !"_()'\"".contains(*c)).flat_map(char::to_lowercase).collect()
}

/// 0 for the standard choice of origin and axes, 1 for the other.
fn origin_rank(entry: &HallSymbolEntry) -> u8 {
    u8::from(entry.setting.starts_with('1') || entry.setting == "R")
}

/// Every spelling of a setting, with its rank among the settings that share it.
fn spellings(entry: &HallSymbolEntry) -> Vec<(u8, String)> {
    let rank = origin_rank(entry);
    if (3..=15).contains(&entry.number) {
        // `P 1 21/c 1` is also written `P 21/c`; without the 1s the unique axis is b unless the cell says otherwise.
        let parts: Vec<&str> = entry.hm_full.split(' ').collect();
        let short: Vec<&str> = parts.iter().copied().filter(|p| *p != "1").collect();
        let axis_rank = parts.iter().skip(1).position(|p| *p != "1").map_or(0, |axis| [2, 0, 1][axis.min(2)]);
        return vec![(0, entry.hm_full.to_owned()), (axis_rank, short.join(" "))];
    }
    let mut all = vec![entry.hm_short.to_owned(), entry.hm_full.to_owned()];
    all.extend(before_double_glide(entry));
    if entry.number >= 195 {
        let without_bar: Vec<String> = all.iter().map(|s| s.replace("-3", "3")).collect();
        all.extend(without_bar);
    }
    all.into_iter().map(|spelling| (rank, spelling)).collect()
}

/// The symbols of the five groups with a double glide plane before it had a letter of its own.
fn before_double_glide(entry: &HallSymbolEntry) -> Vec<String> {
    // In these two groups the settings of a pair differ by that letter alone.
    const PAIRED: [(i32, &str); 18] = [
        (316, "C m m a"),
        (317, "C m m b"),
        (318, "A b m m"),
        (319, "A c m m"),
        (320, "B m c m"),
        (321, "B m a m"),
        (322, "C c c a"),
        (323, "C c c a"),
        (324, "C c c b"),
        (325, "C c c b"),
        (326, "A b a a"),
        (327, "A b a a"),
        (328, "A c a a"),
        (329, "A c a a"),
        (330, "B b c b"),
        (331, "B b c b"),
        (332, "B b a b"),
        (333, "B b a b"),
    ];
    match entry.number {
        39 | 41 | 64 => ["a", "b", "c"].iter().map(|glide| entry.hm_short.replace('e', glide)).collect(),
        67 | 68 => PAIRED.iter().filter(|(n, _)| *n == entry.hall_number).map(|(_, s)| (*s).to_owned()).collect(),
        _ => Vec::new(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::crystal::symmetry::SpaceGroup;

    fn hall_of(symbol: &str) -> Vec<&'static str> {
        settings_of_hermann_mauguin(symbol).into_iter().filter_map(hall_symbol_entry).map(|e| e.hall_symbol).collect()
    }

    /// Hall symbols: International Tables B (2010), table A1.4.2.7 (from memory, and as gemmi 0.7.5 lists them).
    #[test]
    fn old_spellings_are_understood() {
        for (symbol, hall) in [
            ("F m -3 m", "-F 4 2 3"),
            ("Fm3m", "-F 4 2 3"),
            ("F_m_-3_m", "-F 4 2 3"),
            ("P 21/c", "-P 2ybc"),
            ("P2(1)/c", "-P 2ybc"),
            ("P 2_1/c", "-P 2ybc"),
            ("P 1 21/c 1", "-P 2ybc"),
            ("p21/N", "-P 2yn"),
            ("P 1 1 21/b", "-P 2bc"),
            ("P 21/b", "-P 2bc"),
            ("B 2/b", "-B 2b"),
            ("I 2/a", "-I 2ya"),
            ("R-3mh", "-R 3 2="),
            ("R -3 m :R", "-P 3* 2"),
            ("R -3 m", "-R 3 2="),
            ("F d -3 m :1", "F 4d 2 3 -1d"),
            ("F d 3 m S", "F 4d 2 3 -1d"),
            ("F d -3 m Z", "-F 4vw 2vw 3"),
            ("F d -3 m", "-F 4vw 2vw 3"),
            ("C m c a", "-C 2ac 2"),
            ("C m c b", "-C 2ac 2"),
            ("C m m b", "-C 2a 2a"),
            ("A b m 2", "A 2 -2b"),
            ("P a 3", "-P 2ac 2ab 3"),
            ("P 4/n m m :1", "P 4ab 2ab -1ab"),
            ("P b n m", "-P 2c 2ab"),
        ] {
            assert_eq!(hall_of(symbol).first(), Some(&hall), "{symbol}");
        }
        assert_eq!(hall_of("F d -3 m"), ["-F 4vw 2vw 3", "F 4d 2 3 -1d"]);
        for bad in ["", "Q 1", "F m -3 n n", ":1", "P 7", &"P".repeat(1000)] {
            assert!(hall_of(bad).is_empty(), "{bad}");
        }
    }

    #[test]
    fn the_standard_setting_of_every_number_comes_first() {
        for number in 1..=230 {
            let first = settings_of_number(number)[0];
            let entry = hall_symbol_entry(first).unwrap();
            assert!(
                ["", "b", "b1", "2", "H"].contains(&entry.setting) || entry.setting == "2abc",
                "{number} {entry:?}"
            );
        }
        assert!(settings_of_number(0).is_empty() && settings_of_number(231).is_empty());
    }

    #[test]
    fn hall_symbols_give_the_operations_of_the_table() {
        for entry in entries() {
            let mut ours = operations_of_hall(entry.hall_symbol).unwrap_or_else(|| panic!("{}", entry.hall_symbol));
            let mut table = SpaceGroup::from_hall_number(entry.hall_number).unwrap().operations;
            let key = |o: &Operation| o.to_string();
            ours.sort_by_key(key);
            table.sort_by_key(key);
            let text = |list: &[Operation]| list.iter().map(key).collect::<Vec<_>>();
            assert_eq!(text(&ours), text(&table), "{}", entry.hall_symbol);
        }
        assert_eq!(setting_of_hall("-f_4VW 2vw 3"), Some(526));
        assert_eq!(setting_of_hall("-R 3 2\""), Some(458));
        // An origin shift by 1/4 along each axis: P -1 with its centre at 1/4 1/4 1/4, so -x+1/2.
        let shifted = operations_of_hall("-P 1 (3 3 3)").unwrap();
        assert_eq!(shifted[1].to_string(), "-x+1/2,-y+1/2,-z+1/2");
    }

    #[test]
    fn nonsense_never_reaches_the_library() {
        for bad in
            ["", " ", "-", "P", "P 2é", "P 7", "P 3* 6z 4x", "X 2", "P 2 (1 2", "P 2 (a b c)", "P 2 (99 0 0)", "P 2xq"]
        {
            assert_eq!(operations_of_hall(bad), None, "{bad}");
        }
    }
}
