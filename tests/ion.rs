//! From formula to charged ions with radii, against textbooks, printed tables and published bond lengths.

use interstice::ion::bond_valence::{ValenceSet, bond_valence, parameters};
use interstice::ion::composition::Composition;
use interstice::ion::formula::{self, MAX_AMOUNT};
use interstice::ion::oxidation::{OxidationError, assign, refuse_complex_ions};
use interstice::ion::radius::{RadiusSet, radius, table};
use interstice::ion::{Amount, Element, Ion};
use num_traits::Zero;
use proptest::prelude::*;

fn element(symbol: &str) -> Element {
    Element::from_symbol(symbol).expect("a symbol of the tables")
}

fn ion(symbol: &str, charge: i8) -> Ion {
    Ion::new(element(symbol), charge)
}

fn assigned(text: &str) -> String {
    let formula = formula::parse(text).unwrap_or_else(|e| panic!("{e}"));
    assign(&formula).unwrap_or_else(|e| panic!("{text}: {e}")).best.to_string()
}

/// Oxidation states as any textbook of inorganic chemistry gives them (common practice, no source).
#[test]
fn textbook_states_are_found() {
    for (text, want) in [
        ("Fe3O4", "Fe(II)Fe(III)2O(-II)4"),
        ("Mn3O4", "Mn(II)Mn(III)2O(-II)4"),
        ("Pb3O4", "Pb(II)2Pb(IV)O(-II)4"),
        ("LiMn2O4", "Li(I)Mn(III)Mn(IV)O(-II)4"),
        ("BaTiO3", "Ba(II)Ti(IV)O(-II)3"),
        ("Na3AlF6", "Na(I)3Al(III)F(-I)6"),
        ("CuFeO2", "Cu(I)Fe(III)O(-II)2"),
        ("FeTiO3", "Fe(II)Ti(IV)O(-II)3"),
        ("Ce0.9Gd0.1O1.95", "Ce(IV)0.9Gd(III)0.1O(-II)1.95"),
        ("KMnF3", "K(I)Mn(II)F(-I)3"),
        ("CsPbBr3", "Cs(I)Pb(II)Br(-I)3"),
        ("Li3YCl6", "Li(I)3Y(III)Cl(-I)6"),
        ("La2CuO4", "La(III)2Cu(II)O(-II)4"),
        ("ZrSiO4", "Zr(IV)Si(IV)O(-II)4"),
        ("Y3Al5O12", "Y(III)3Al(III)5O(-II)12"),
        ("LiCoO2", "Li(I)Co(III)O(-II)2"),
        ("CoFe2O4", "Co(II)Fe(III)2O(-II)4"),
        ("MnFe2O4", "Mn(II)Fe(III)2O(-II)4"),
        ("NiO", "Ni(II)O(-II)"),
        ("MoS2", "Mo(IV)S(-II)2"),
        ("SrFeO3", "Sr(II)Fe(IV)O(-II)3"),
        ("KNbO3", "K(I)Nb(V)O(-II)3"),
        ("PbTiO3", "Pb(II)Ti(IV)O(-II)3"),
        ("Cu2O", "Cu(I)2O(-II)"),
        ("CuO", "Cu(II)O(-II)"),
        ("V2O5", "V(V)2O(-II)5"),
        ("WO3", "W(VI)O(-II)3"),
        ("UO2", "U(IV)O(-II)2"),
        ("U3O8", "U(V)2U(VI)O(-II)8"),
        ("CaF2", "Ca(II)F(-I)2"),
        ("ZnS", "Zn(II)S(-II)"),
        ("SnO2", "Sn(IV)O(-II)2"),
        ("SnO", "Sn(II)O(-II)"),
        ("Eu2O3", "Eu(III)2O(-II)3"),
        ("EuO", "Eu(II)O(-II)"),
        ("LiFePO4", "Li(I)Fe(II)P(V)O(-II)4"),
        ("Na2FePO4F", "Na(I)2Fe(II)P(V)O(-II)4F(-I)"),
        ("Ag2S", "Ag(I)2S(-II)"),
        ("TlCl", "Tl(I)Cl(-I)"),
        ("BiFeO3", "Bi(III)Fe(III)O(-II)3"),
        ("Si3N4", "Si(IV)3N(-III)4"),
        ("Cu2ZnSnS4", "Cu(I)2Zn(II)Sn(IV)S(-II)4"),
        ("CuInSe2", "Cu(I)In(III)Se(-II)2"),
        ("Cs2AgBiBr6", "Cs(I)2Ag(I)Bi(III)Br(-I)6"),
        ("K2PtCl6", "K(I)2Pt(IV)Cl(-I)6"),
        ("CuCrO2", "Cu(I)Cr(III)O(-II)2"),
        ("Y0.08Zr0.92O1.96", "Y(III)0.08Zr(IV)0.92O(-II)1.96"),
    ] {
        assert_eq!(assigned(text), want, "{text}");
    }
}

/// States beside the common ones, mixed where that is likelier (textbooks of solid-state chemistry; common practice,
/// no source).
#[test]
fn rarer_states_and_mixed_valence_are_weighed_together() {
    for (text, want) in [
        ("YBa2Cu3O7", "Y(III)Ba(II)2Cu(II)2Cu(III)O(-II)7"),
        ("Li0.5CoO2", "Li(I)0.5Co(III)0.5Co(IV)0.5O(-II)2"),
        ("La0.7Sr0.3MnO3", "La(III)0.7Sr(II)0.3Mn(III)0.7Mn(IV)0.3O(-II)3"),
        ("La0.6Sr0.4Co0.2Fe0.8O3", "La(III)0.6Sr(II)0.4Co(III)0.2Fe(III)0.4Fe(IV)0.4O(-II)3"),
        ("SrFeO2.75", "Sr(II)Fe(III)0.5Fe(IV)0.5O(-II)2.75"),
        ("CrO2", "Cr(IV)O(-II)2"),
        ("ReO3", "Re(VI)O(-II)3"),
        ("K2NiF6", "K(I)2Ni(IV)F(-I)6"),
        ("Nd0.8Sr0.2NiO2", "Nd(III)0.8Sr(II)0.2Ni(I)0.8Ni(II)0.2O(-II)2"),
        ("Ti4O7", "Ti(III)2Ti(IV)2O(-II)7"),
        ("V6O13", "V(IV)4V(V)2O(-II)13"),
        ("Pr6O11", "Pr(III)2Pr(IV)4O(-II)11"),
        ("Fe0.95O", "Fe(II)0.85Fe(III)0.1O(-II)"),
        ("LiNi0.5Mn1.5O4", "Li(I)Ni(II)0.5Mn(IV)1.5O(-II)4"),
        ("LiCo1/3Mn1/3Ni1/3O2", "Li(I)Co(III)1/3Mn(IV)1/3Ni(II)1/3O(-II)2"),
    ] {
        assert_eq!(assigned(text), want, "{text}");
    }
}

/// Varma (1988): these elements skip the state between, so the mean is a mixture.
#[test]
fn skipped_valences_disproportionate() {
    for (text, want) in [
        ("BaBiO3", "Ba(II)Bi(III)0.5Bi(V)0.5O(-II)3"),
        ("Sb2O4", "Sb(III)Sb(V)O(-II)4"),
        ("CsAuCl3", "Cs(I)Au(I)0.5Au(III)0.5Cl(-I)3"),
        ("GaCl2", "Ga(I)0.5Ga(III)0.5Cl(-I)2"),
        ("Pb2O3", "Pb(II)Pb(IV)O(-II)3"),
    ] {
        assert_eq!(assigned(text), want, "{text}");
    }
}

/// Eu(II) in EuTiO3 and Sn(II) in SnWO4 are facts that the energies of the binary oxides miss; the doubt is told.
#[test]
fn what_the_energies_miss_is_told_as_a_near_tie() {
    for (text, truth) in [("EuTiO3", "Eu(II)Ti(IV)O(-II)3"), ("SnWO4", "Sn(II)W(VI)O(-II)4")] {
        let assignment = assign(&formula::parse(text).unwrap()).unwrap();
        let told = assignment.cautions.iter().any(|c| c.contains("near tie") && c.contains(truth));
        assert!(told || assignment.best.to_string() == truth, "{text}: {:?}", assignment.cautions);
    }
}

#[test]
fn stated_charges_are_kept() {
    assert_eq!(assigned("Fe(II)Fe(III)2O4"), "Fe(II)Fe(III)2O(-II)4");
    assert_eq!(assigned("FeO(-II)"), "Fe(II)O(-II)");
    let wrong = assign(&formula::parse("Fe(III)O(-II)").unwrap()).unwrap_err();
    assert!(matches!(wrong, OxidationError::StatedNotNeutral { ref charge, .. } if charge == "+1"), "{wrong}");
}

#[test]
fn what_is_not_neutral_is_shown_with_the_closest() {
    let error = assign(&formula::parse("NaCl2").unwrap()).unwrap_err();
    assert!(matches!(error, OxidationError::NotNeutral { ref charge, .. } if charge == "-1"), "{error}");
    for metallic in ["FeAl", "MoTe2", "Fe", "Mg2Si"] {
        let error = assign(&formula::parse(metallic).unwrap()).unwrap_err();
        assert!(matches!(error, OxidationError::NoAnion { .. }), "{error}");
    }
    // States known from molecules or metals only are no way out.
    for text in ["MgCl", "CaF", "Zn1.1O", "OF2", "Na2O2"] {
        let error = assign(&formula::parse(text).unwrap()).unwrap_err();
        assert!(matches!(error, OxidationError::NotNeutral { .. }), "{error}");
    }
    assert!(matches!(assign(&formula::parse("HeO").unwrap()), Err(OxidationError::NoStates { .. })));
}

#[test]
fn complex_ions_are_refused() {
    for text in ["(NH4)Cl", "Ca(OH)2", "CaCO3", "NaNO3", "NaBH4", "Hg2Cl2"] {
        let assignment = assign(&formula::parse(text).unwrap()).unwrap();
        let error = refuse_complex_ions(&assignment.best).unwrap_err();
        assert!(error.to_string().contains("complex ions are not modelled"), "{error}");
    }
    for text in ["LiH", "BaSO4", "LiFePO4"] {
        assert_eq!(refuse_complex_ions(&assign(&formula::parse(text).unwrap()).unwrap().best), Ok(()), "{text}");
    }
}

#[test]
fn doubts_are_spoken() {
    let assignment = assign(&formula::parse("SrFeO3").unwrap()).unwrap();
    assert!(
        assignment.cautions.iter().any(|c| c.contains("Fe(IV) is not a common state")),
        "{:?}",
        assignment.cautions
    );
}

#[test]
fn pyrite_is_doubted() {
    for (text, doubted) in [("FeS2", true), ("MnS2", true), ("MoS2", false), ("TiS2", false), ("FeS", false)] {
        let assignment = assign(&formula::parse(text).unwrap()).unwrap();
        assert_eq!(assignment.cautions.iter().any(|c| c.contains("pyrite")), doubted, "{text}");
    }
}

/// I. D. Brown, The Chemical Bond in Inorganic Chemistry (2002): sums of well-determined, unstrained structures meet the
/// oxidation state within 0.2 v.u. Lengths (Å) from memory of the refinements: MgO 6 x 2.106, Al2O3 3 x 1.855 + 3 x 1.972,
/// CaF2 8 x 2.365, TiO2 (rutile; Abrahams & Bernstein, J. Chem. Phys. 55, 3206 (1971)) 4 x 1.9485 + 2 x 1.9800, SiO2
/// (quartz) 4 x 1.609 (with the first-choice R0 = 1.624 Å; Brown & Altermatt's 1.640 Å misses by 0.35), NaCl 6 x 2.820, SrTiO3 Ti 6 x 1.9525.
#[test]
fn bond_valence_sums_of_published_structures_meet_the_charges() {
    // Number and length of the bonds.
    type Shell = &'static [(f64, f64)];
    let shells: [(&str, i8, &str, Shell); 7] = [
        ("Mg", 2, "O", &[(6.0, 2.106)]),
        ("Al", 3, "O", &[(3.0, 1.855), (3.0, 1.972)]),
        ("Ca", 2, "F", &[(8.0, 2.365)]),
        ("Ti", 4, "O", &[(4.0, 1.9485), (2.0, 1.98)]),
        ("Si", 4, "O", &[(4.0, 1.609)]),
        ("Na", 1, "Cl", &[(6.0, 2.82)]),
        ("Ti", 4, "O", &[(6.0, 1.9525)]),
    ];
    for (cation, charge, anion, bonds) in shells {
        let p = parameters(&ion(cation, charge), element(anion)).next().unwrap();
        assert_ne!(p.set, ValenceSet::Gagne2015, "B = 0.37 comes first");
        let sum: f64 = bonds.iter().map(|(n, length)| n * bond_valence(*length, &p)).sum();
        assert!((sum - f64::from(charge)).abs() < 0.2, "{cation}-{anion}: {sum:.3}");
    }
}

/// Sums of effective radii against half the lattice constants of rock-salt oxides and fluorides (Å, CRC Handbook, from
/// memory): MgO 4.212, CaO 4.811, SrO 5.160, MnO 4.445, NiO 4.177, NaF 4.634, KF 5.347, within 1.5 %; the radii were
/// derived from such distances (Shannon 1976). LiF is a known exception: 2.09 against 2.013 Å, 3.8 %.
#[test]
fn sums_of_radii_meet_rock_salt_distances() {
    for (cation, charge, anion, anion_charge, a) in [
        ("Mg", 2, "O", -2, 4.212),
        ("Ca", 2, "O", -2, 4.811),
        ("Sr", 2, "O", -2, 5.160),
        ("Mn", 2, "O", -2, 4.445),
        ("Ni", 2, "O", -2, 4.177),
        ("Na", 1, "F", -1, 4.634),
        ("K", 1, "F", -1, 5.347),
    ] {
        for set in [RadiusSet::Crystal, RadiusSet::Effective] {
            let of = |symbol, q| radius(&ion(symbol, q), 6, set).unwrap().angstrom;
            let sum = of(cation, charge) + of(anion, anion_charge);
            assert!((sum / (a / 2.0) - 1.0).abs() < 0.015, "{cation}{anion}: {sum}");
        }
    }
}

/// Every ion of the table has a finite radius at every coordination number, between the least and the greatest of its
/// rows, and the two sets differ by 0.14 Å (N5+ III, the paper's own exception, left out).
#[test]
fn every_tabulated_ion_has_a_radius_everywhere() {
    for row in table().iter().filter(|row| !matches!((row.symbol, row.charge), ("OH" | "D", _) | ("N", 5))) {
        let ion = ion(row.symbol, row.charge);
        for n in (0..=16).chain([u8::MAX]) {
            let effective = radius(&ion, n, RadiusSet::Effective).unwrap().angstrom;
            let crystal = radius(&ion, n, RadiusSet::Crystal).unwrap().angstrom;
            assert!((crystal - effective - 0.14 * f64::from(row.charge.signum())).abs() < 1e-9, "{ion} {n}");
            let known =
                || table().iter().filter(|r| (r.symbol, r.charge) == (row.symbol, row.charge)).map(|r| r.effective);
            let (least, most) = (known().fold(f64::INFINITY, f64::min), known().fold(f64::NEG_INFINITY, f64::max));
            assert!((least..=most).contains(&effective), "{ion} {n}");
        }
    }
}

/// Amounts of each element, whatever its charges.
fn amount_of(composition: &Composition, element: Element) -> Amount {
    composition.ions.iter().filter(|(ion, _)| ion.element == element).map(|(_, amount)| *amount).sum()
}

proptest! {
    /// Whatever is assigned is neutral, leaves the amounts alone, reads back from its own text, and does not depend on
    /// the order of the terms.
    #[test]
    fn assignments_keep_their_promises(
        cations in proptest::collection::btree_map(1_u8..=103, 1_i128..=12, 1..4),
        anion in prop_oneof![Just("O"), Just("F"), Just("S"), Just("Cl")],
        share in 1_i128..=24,
        denominator in 1_i128..=12,
    ) {
        let mut terms: Vec<String> = cations
            .iter()
            .map(|(z, n)| (Element::from_number(*z).unwrap(), n))
            .filter(|(e, _)| e.symbol() != anion)
            .map(|(e, n)| format!("{e}{n}/{denominator}"))
            .collect();
        terms.push(format!("{anion}{share}/{denominator}"));
        let forward = formula::parse(&terms.concat()).unwrap();
        terms.reverse();
        let backward = formula::parse(&terms.concat()).unwrap();
        if let Ok(assignment) = assign(&forward) {
            for composition in std::iter::once(&assignment.best).chain(assignment.rivals.iter().map(|r| &r.composition)) {
                prop_assert!(composition.charge().is_zero());
                for part in &forward.parts {
                    if let formula::Named::Element { element, .. } = part.what {
                        prop_assert_eq!(amount_of(composition, element), part.amount);
                    }
                }
            }
            let text = assignment.best.to_string();
            let again = assign(&formula::parse(&text).unwrap()).unwrap();
            prop_assert_eq!(&again.best.to_string(), &text);
            if !assignment.cautions.iter().any(|c| c.contains("near tie")) {
                let mut one = assignment.best.ions.clone();
                let mut other = assign(&backward).unwrap().best.ions;
                one.sort();
                other.sort();
                prop_assert_eq!(one, other);
            }
        } else {
            prop_assert!(assign(&backward).is_err());
        }
    }
}

/// Amounts with awkward denominators are refused while they are read, before anything is summed over them.
#[test]
fn amounts_without_a_workable_denominator_are_refused() {
    let primes = [999_983, 999_979, 999_961, 999_959, 999_953, 999_931, 999_917];
    for n in 3..=primes.len() {
        let terms = ["Fe", "O", "Mg", "Al", "Ti", "Ca", "Na"].iter().zip(primes).take(n);
        let text: String = terms.map(|(e, p)| format!("{e}1/{p}")).collect();
        let message = formula::parse(&text).unwrap_err().message;
        assert!(message.contains("common denominator") || message.contains("cannot be added exactly"), "{message}");
    }
    assert!(formula::parse(&format!("Fe{MAX_AMOUNT}O")).is_err());
}
