//! The atoms of a file: their kinds, types and rows.

use super::digits::{push_coordinate, push_number};
use super::formula::{AMOUNT_DECIMALS, FormulaUnit, rounded_shares, scaled_decimal};
use crate::crystal::Occupant;
use crate::ion::{Amount, Species, Spin};
use num_traits::{One, Zero};
use std::borrow::Cow;
use std::collections::BTreeMap;

/// Kinds that are compared one by one before the ordered index is asked: nearly every structure has fewer.
const FIRST_KINDS: usize = 8;

/// Most lines that describe vacancies; the occupancies say the rest.
const MAX_NOTES: usize = 20;

/// Sites with the same occupants in the same shares.
struct Kind<'a> {
    /// In order of species.
    occupants: Cow<'a, [Occupant]>,
    /// How many sites of the cell are of this kind.
    count: i128,
}

struct Row {
    /// In units of 1e-8.
    position: [u32; 3],
    kind: usize,
    /// Multiplicity and Wyckoff letter, where a space group is written.
    orbit: Option<(usize, char)>,
}

/// What identifies a kind.
type Key = Vec<(Species, Amount)>;

/// The sites to write.
#[derive(Default)]
pub(super) struct AtomList<'a> {
    kinds: Vec<Kind<'a>>,
    index: BTreeMap<Key, usize>,
    rows: Vec<Row>,
}

impl<'a> AtomList<'a> {
    /// Adds a site; `orbit` is its multiplicity and Wyckoff letter.
    pub fn push(&mut self, position: [u32; 3], occupants: &'a [Occupant], orbit: Option<(usize, char)>) {
        let kind = self.kind_of(occupants);
        self.kinds[kind].count += orbit.map_or(1, |(multiplicity, _)| multiplicity as i128);
        self.rows.push(Row { position, kind, orbit });
    }

    fn kind_of(&mut self, occupants: &'a [Occupant]) -> usize {
        let first = &self.kinds[..self.kinds.len().min(FIRST_KINDS)];
        // Sites of a kind mostly share their occupants.
        let same = |kind: &Kind<'_>| std::ptr::eq(&*kind.occupants, occupants) || *kind.occupants == *occupants;
        if let Some(kind) = first.iter().position(same) {
            return kind;
        }
        let mut sorted = Cow::Borrowed(occupants);
        if !occupants.is_sorted_by_key(|o| (o.species, o.occupancy)) {
            sorted.to_mut().sort_by_key(|o| (o.species, o.occupancy));
        }
        let key = sorted.iter().map(|o| (o.species, o.occupancy)).collect();
        *self.index.entry(key).or_insert_with(|| {
            self.kinds.push(Kind { occupants: sorted, count: 0 });
            self.kinds.len() - 1
        })
    }

    /// The formula unit of the cell.
    pub fn formula_unit(&self) -> FormulaUnit {
        let mut totals = BTreeMap::new();
        for kind in &self.kinds {
            for occupant in kind.occupants.iter() {
                *totals.entry(occupant.species).or_insert_with(Amount::zero) += occupant.occupancy * kind.count;
            }
        }
        FormulaUnit::new(totals, self.kinds.iter().map(|kind| kind.count))
    }

    /// What the rows cannot say: vacant shares of sites, spin states, charges that nobody stated.
    pub fn notes(&self) -> Vec<String> {
        let mut notes = Vec::new();
        for kind in &self.kinds {
            let vacant = Amount::one() - kind.occupants.iter().map(|o| o.occupancy).sum::<Amount>();
            if vacant > Amount::zero() {
                let held: Vec<String> =
                    kind.occupants.iter().map(|o| format!("{} {}", o.species, o.occupancy)).collect();
                let (sites, are) = if kind.count == 1 { ("site", "is") } else { ("sites", "are") };
                notes.push(format!(
                    "{} {sites} of the cell held by {} {are} vacant for the remaining {vacant}.",
                    kind.count,
                    held.join(" + "),
                ));
            }
        }
        if notes.len() > MAX_NOTES {
            let more = notes.len() - MAX_NOTES;
            notes.truncate(MAX_NOTES);
            notes.push(format!("{more} more kinds of sites are partly vacant; see the occupancies."));
        }
        let species: Vec<Species> = self.species();
        for s in species.iter().filter(|s| s.spin.is_some()) {
            let spin = if s.spin == Some(Spin::Low) { "low" } else { "high" };
            notes.push(format!("{} is meant in its {spin}-spin state.", type_symbol(s)));
        }
        let unknown: Vec<&str> = species.iter().filter(|s| s.charge.is_none()).map(|s| s.element.symbol()).collect();
        if !unknown.is_empty() {
            notes.push(format!("Oxidation numbers that are not known: {}.", unknown.join(", ")));
        }
        notes
    }

    /// Every species once, in order of element and charge.
    fn species(&self) -> Vec<Species> {
        let mut species: Vec<Species> = self.kinds.iter().flat_map(|k| k.occupants.iter().map(|o| o.species)).collect();
        species.sort_unstable();
        species.dedup();
        species
    }

    /// The `atom_type` loop.
    pub fn push_types(&self, out: &mut Vec<u8>) {
        let mut types: Vec<(String, Option<i8>)> = self.species().iter().map(|s| (type_symbol(s), s.charge)).collect();
        // Spin states are not part of the symbol.
        types.dedup();
        out.extend_from_slice(b"loop_\n_atom_type_symbol\n_atom_type_oxidation_number\n");
        for (symbol, charge) in types {
            let charge = charge.map_or("?".into(), |q| q.to_string());
            out.extend_from_slice(format!("{symbol} {charge}\n").as_bytes());
        }
    }

    /// The `atom_site` loop: one row for each occupant of each site.
    pub fn push_sites(&self, out: &mut Vec<u8>) {
        let shared = self.kinds.iter().any(|kind| kind.occupants.len() > 1);
        let symmetric = self.rows.iter().any(|row| row.orbit.is_some());
        out.extend_from_slice(
            b"loop_\n_atom_site_label\n_atom_site_type_symbol\n_atom_site_fract_x\n_atom_site_fract_y\n\
              _atom_site_fract_z\n_atom_site_occupancy\n",
        );
        if symmetric {
            out.extend_from_slice(b"_atom_site_site_symmetry_multiplicity\n_atom_site_Wyckoff_symbol\n");
        }
        out.extend_from_slice(b"_atom_site_calc_flag\n");
        if shared {
            out.extend_from_slice(b"_atom_site_disorder_assembly\n_atom_site_disorder_group\n");
        }
        let texts: Vec<Vec<OccupantText>> = self.kinds.iter().map(|kind| occupant_texts(&kind.occupants)).collect();
        out.reserve(self.rows.len() * 64);
        let mut labels = [0_usize; 256];
        let mut assemblies = 0;
        for row in &self.rows {
            let occupants = &texts[row.kind];
            assemblies += usize::from(occupants.len() > 1);
            for (group, text) in occupants.iter().enumerate() {
                let label = &mut labels[text.element];
                *label += 1;
                out.extend_from_slice(text.symbol);
                push_number(out, *label);
                out.extend_from_slice(&text.type_symbol);
                for x in row.position {
                    push_coordinate(out, x);
                    out.push(b' ');
                }
                out.extend_from_slice(&text.occupancy);
                if let Some((multiplicity, letter)) = row.orbit {
                    out.push(b' ');
                    push_number(out, multiplicity);
                    out.push(b' ');
                    out.extend_from_slice(wyckoff_symbol(letter).as_bytes());
                }
                out.extend_from_slice(b" calc");
                if occupants.len() > 1 {
                    out.extend_from_slice(b" S");
                    push_number(out, assemblies);
                    out.push(b' ');
                    push_number(out, group + 1);
                } else if shared {
                    out.extend_from_slice(b" . .");
                }
                out.push(b'\n');
            }
        }
    }
}

/// The parts of a row that are the same for every site of a kind.
struct OccupantText {
    element: usize,
    symbol: &'static [u8],
    /// With a blank on either side.
    type_symbol: Vec<u8>,
    occupancy: Vec<u8>,
}

fn occupant_texts(occupants: &[Occupant]) -> Vec<OccupantText> {
    let shares: Vec<Amount> = occupants.iter().map(|o| o.occupancy).collect();
    occupants
        .iter()
        .zip(rounded_shares(&shares))
        .map(|(occupant, share)| OccupantText {
            element: occupant.species.element.number().into(),
            symbol: occupant.species.element.symbol().as_bytes(),
            type_symbol: format!(" {} ", type_symbol(&occupant.species)).into_bytes(),
            occupancy: scaled_decimal(share, AMOUNT_DECIMALS).into_bytes(),
        })
        .collect()
}

/// Element and charge, digits before the sign (`Fe3+`); the element alone when its charge is not known.
fn type_symbol(species: &Species) -> String {
    let symbol = species.element.symbol();
    match species.charge {
        None => symbol.to_owned(),
        Some(q) => format!("{symbol}{}{}", q.unsigned_abs(), if q < 0 { '-' } else { '+' }),
    }
}

/// The letter, the 27th (general position of P m m m) as CIF 1.1 spells it.
fn wyckoff_symbol(letter: char) -> String {
    if letter.is_ascii_lowercase() { letter.to_string() } else { "\\a".into() }
}
