//! Space-group symbols against gemmi's list: the same symbol stands for the same operations.

use interstice::crystal::symmetry::{Operation, SpaceGroup};
use interstice::format::cif::symbols::{operations_of_hall, settings_of_hermann_mauguin, settings_of_number};
use std::collections::BTreeSet;

fn set(operations: &[Operation]) -> BTreeSet<String> {
    operations.iter().map(ToString::to_string).collect()
}

#[test]
fn symbols_mean_what_gemmi_says() {
    // The list has one setting under two symbols.
    let (mut settings, mut others) = (0, 0);
    for line in include_str!("../data/gemmi_symbols.tsv").lines().filter(|l| !l.starts_with('#')) {
        let [number, full, short, hall] = line.split('\t').collect::<Vec<_>>()[..] else { panic!("{line}") };
        let number: i32 = number.parse().unwrap();
        let operations = set(&operations_of_hall(hall).unwrap_or_else(|| panic!("Hall symbol {hall}")));
        let groups = |settings: Vec<i32>| settings.into_iter().filter_map(SpaceGroup::from_hall_number);
        let is_setting = groups(settings_of_number(number)).any(|g| set(&g.operations) == operations);
        let mut candidates = groups(settings_of_hermann_mauguin(full));
        if !is_setting {
            // Not one of the 530: no symbol of ours may claim these operations, nor stand for others.
            assert!(candidates.all(|g| g.number == number), "{line}");
            others += 1;
            continue;
        }
        settings += 1;
        assert!(candidates.any(|g| set(&g.operations) == operations), "{line}");
        // `H 3` for hexagonal axes of `R 3` is a habit of protein files; H is another centring in the Tables.
        if short.starts_with('H') {
            continue;
        }
        let short = full.split_once(':').map_or(short.to_owned(), |(_, choice)| format!("{short}:{choice}"));
        assert!(groups(settings_of_hermann_mauguin(&short)).any(|g| set(&g.operations) == operations), "{line}");
    }
    assert_eq!((settings, others), (531, 33));
}
