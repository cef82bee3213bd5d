//! Every sample recipe runs, breaks no rule, and gives the space group that its kind is known for.

use interstice::build::build;
use interstice::crystal::symmetry::{TOLERANCE, symmetrise};
use interstice::ordering::Progress;
use interstice::recipe::Recipe;

/// Number of cells, and the space group of the first where the literature fixes it: spinel Fd-3m; the average of doped
/// ceria is fluorite's Fm-3m; of the ordered inverse spinels Imma (74) is the one of smallest cell.
const SAMPLES: [(&str, usize, Option<i32>); 6] = [
    ("window", 1, Some(227)),
    ("oxygen-probe", 4, None),
    ("probe-average", 1, Some(225)),
    ("electrode", 6, None),
    ("separator", 3, None),
    ("core-magnet", 2, Some(74)),
];

#[test]
fn samples_run_and_break_no_rule() {
    for (name, cells, group) in SAMPLES {
        let path = format!("{}/samples/{name}.json", env!("CARGO_MANIFEST_DIR"));
        let recipe = Recipe::from_json(&std::fs::read_to_string(&path).unwrap(), name).unwrap();
        let built = build(&recipe, &Progress::default()).unwrap();
        assert_eq!(built.cells.len(), cells, "{name}");
        assert!(built.cells.iter().all(|c| c.findings.is_empty()), "{name}");
        if let Some(number) = group {
            let found = symmetrise(&built.cells[0].structure, TOLERANCE).unwrap();
            assert_eq!(found.group.number, number, "{name}");
        }
    }
}

#[test]
fn every_recipe_is_listed() {
    let folder = std::fs::read_dir(format!("{}/samples", env!("CARGO_MANIFEST_DIR"))).unwrap();
    let recipes = folder.filter(|e| e.as_ref().unwrap().path().extension().is_some_and(|x| x == "json")).count();
    assert_eq!(recipes, SAMPLES.len());
}
