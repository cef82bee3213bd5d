//! The decision on seats against textbook coordination.
//!
//! Coordination as in A. F. Wells, Structural Inorganic Chemistry (Oxford), and, for the spinels, N. W. Grimes,
//! Phys. Technol. 6, 22 (1975), both recalled. The weights of the evidence were set by hand with some of these cases in
//! view, so the score is no prediction of success on others.

use interstice::build::decide;
use interstice::recipe::Recipe;

/// Formula, packing, and for each cation its kinds of interstice.
const CASES: [(&str, &str, &str); 47] = [
    ("MgAl2O4", "ccp", "Mg2+ tetrahedral, Al3+ octahedral"),
    ("Fe3O4", "ccp", "Fe2+ octahedral, Fe3+ tetrahedral, Fe3+ octahedral"),
    ("Mn3O4", "ccp", "Mn2+ tetrahedral, Mn3+ octahedral"),
    ("Co3O4", "ccp", "Co2+ tetrahedral, Co3+ octahedral"),
    ("LiMn2O4", "ccp", "Li1+ tetrahedral, Mn3+ octahedral, Mn4+ octahedral"),
    ("NiFe2O4", "ccp", "Ni2+ octahedral, Fe3+ tetrahedral, Fe3+ octahedral"),
    ("CoFe2O4", "ccp", "Co2+ octahedral, Fe3+ tetrahedral, Fe3+ octahedral"),
    ("MgFe2O4", "ccp", "Mg2+ octahedral, Fe3+ tetrahedral, Fe3+ octahedral"),
    ("ZnFe2O4", "ccp", "Zn2+ tetrahedral, Fe3+ octahedral"),
    ("ZnAl2O4", "ccp", "Zn2+ tetrahedral, Al3+ octahedral"),
    ("CoAl2O4", "ccp", "Co2+ tetrahedral, Al3+ octahedral"),
    ("FeCr2O4", "ccp", "Fe2+ tetrahedral, Cr3+ octahedral"),
    ("ZnCr2O4", "ccp", "Zn2+ tetrahedral, Cr3+ octahedral"),
    ("MgCr2O4", "ccp", "Mg2+ tetrahedral, Cr3+ octahedral"),
    ("NiAl2O4", "ccp", "Ni2+ octahedral, Al3+ tetrahedral, Al3+ octahedral"),
    ("CdFe2O4", "ccp", "Cd2+ tetrahedral, Fe3+ octahedral"),
    ("MnFe2O4", "ccp", "Mn2+ tetrahedral, Fe3+ octahedral"),
    ("LiCoO2", "ccp", "Li1+ octahedral, Co3+ octahedral"),
    ("Li2MnO3", "ccp", "Li1+ octahedral, Mn4+ octahedral"),
    ("NaFeO2", "ccp", "Na1+ octahedral, Fe3+ octahedral"),
    ("MgO", "ccp", "Mg2+ octahedral"),
    ("ZnO", "hcp", "Zn2+ tetrahedral"),
    ("ZnS", "ccp", "Zn2+ tetrahedral"),
    ("CdS", "hcp", "Cd2+ tetrahedral"),
    ("BeO", "hcp", "Be2+ tetrahedral"),
    ("AgCl", "ccp", "Ag1+ octahedral"),
    ("NaCl", "ccp", "Na1+ octahedral"),
    ("LiF", "ccp", "Li1+ octahedral"),
    ("TiO2", "hcp", "Ti4+ octahedral"),
    ("Al2O3", "hcp", "Al3+ octahedral"),
    ("CdI2", "hcp", "Cd2+ octahedral"),
    ("CrCl3", "ccp", "Cr3+ octahedral"),
    ("AlN", "hcp", "Al3+ tetrahedral"),
    ("SiO2", "hcp", "Si4+ tetrahedral"),
    ("MgS", "ccp", "Mg2+ octahedral"),
    ("Mg2SiO4", "hcp", "Mg2+ octahedral, Si4+ tetrahedral"),
    ("FeTiO3", "hcp", "Fe2+ octahedral, Ti4+ octahedral"),
    ("LiNbO3", "hcp", "Li1+ octahedral, Nb5+ octahedral"),
    ("ZrO2", "primitive-cubic", "Zr4+ cubic"),
    ("Li2O", "ccp", "Li1+ tetrahedral"),
    ("Na2O", "ccp", "Na1+ tetrahedral"),
    ("FeS", "hcp", "Fe2+ octahedral"),
    ("NiO", "ccp", "Ni2+ octahedral"),
    ("CuCl", "ccp", "Cu1+ tetrahedral"),
    ("GaN", "hcp", "Ga3+ tetrahedral"),
    ("BaO", "ccp", "Ba2+ octahedral"),
    ("MnS", "ccp", "Mn2+ octahedral"),
];

/// What the evidence gets wrong: two weakly inverse spinels, and three compounds whose tetrahedra are a matter of
/// covalency.
const MISSED: [&str; 5] = ["CoFe2O4", "MgFe2O4", "ZnO", "CdS", "AlN"];

#[test]
fn the_textbook_seats_are_taken_but_for_those_known_to_be_missed() {
    let mut missed = Vec::new();
    for (formula, packing, want) in CASES {
        let recipe = Recipe { packing: packing.into(), ..Recipe::new(formula) };
        let decision = decide(&recipe).unwrap_or_else(|e| panic!("{formula}: {e}"));
        let seats = &decision.seating.plans[0].seats;
        let got: Vec<String> =
            seats.iter().map(|s| format!("{} {}", s.ion, decision.seating.offers[s.offer].kind)).collect();
        if got.join(", ") != want {
            missed.push(formula);
        }
    }
    assert_eq!(missed, MISSED);
}

/// A ratio above √3 − 1 = 0.732 asks for a cube, which close packings lack: L. Pauling, J. Am. Chem. Soc. 51, 1010 (1929).
#[test]
fn a_host_without_the_kind_wanted_names_those_that_have_it() {
    let decision = decide(&Recipe::new("CsCl")).unwrap();
    let said = decision.cautions.iter().any(|c| c.contains("cubic") && c.contains("primitive-cubic"));
    assert!(said, "{:?}", decision.cautions);
}

/// Fills are exact: an eighth of the tetrahedra and half of the octahedra in spinel.
#[test]
fn fills_are_exact() {
    let decision = decide(&Recipe::new("MgAl2O4")).unwrap();
    let fills: Vec<String> = decision.seating.plans[0].fills.iter().map(ToString::to_string).collect();
    assert_eq!(fills, ["1/8", "1/2"]);
}
