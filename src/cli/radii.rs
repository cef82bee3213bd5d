//! `interstice radii`.

use super::{Outcome, Radii, json, print};
use interstice::error::Error;
use interstice::ion::formula::{self, Named};
use interstice::ion::{Element, Ion, radius};
use interstice::report;

#[derive(clap::Args)]
pub struct Arguments {
    /// Ions, `Fe(III)`; an element alone stands for all its tabulated charges
    #[arg(required = true)]
    ions: Vec<String>,
    /// Anion for the ratios
    #[arg(long, value_name = "ION", default_value = "O")]
    with: String,
    /// Which set forms the ratios
    #[arg(long, value_enum, default_value = "crystal")]
    radii: Radii,
    /// Print JSON
    #[arg(long)]
    json: bool,
}

pub fn run(arguments: &Arguments) -> Result<Outcome, Error> {
    let set = arguments.radii.into();
    let anion = ions(&arguments.with)?.into_iter().find(|ion| ion.charge < 0).ok_or_else(|| Error::Option {
        option: "--with",
        given: arguments.with.clone(),
        reason: "no anion of it has a tabulated radius; write for example `O`, `F` or `Cl`".into(),
    })?;
    let mut all = Vec::new();
    for text in &arguments.ions {
        for ion in ions(text)? {
            let with = (ion.charge > 0).then_some(&anion);
            let rows = report::radii::gather(&ion, with, set)?;
            if !arguments.json {
                print(&(report::radii::text(&ion, &rows, with, set) + "\n"));
            }
            all.extend(rows);
        }
    }
    if arguments.json {
        print(&json(&all));
    }
    Ok(Outcome::Clean)
}

/// The ion named, or every tabulated charge of an element.
fn ions(text: &str) -> Result<Vec<Ion>, Error> {
    let formula = formula::parse(text)?;
    let mut ions = Vec::new();
    for part in formula.parts {
        let Named::Element { element, charge, spin } = part.what else { continue };
        match charge {
            Some(charge) => ions.push(Ion { element, charge, spin }),
            None => {
                let mut charges = tabulated(element);
                if charges.is_empty() {
                    // The lookup's own message says what the table has.
                    charges.push(element.dominant_states().first().copied().unwrap_or(0));
                }
                ions.extend(charges.into_iter().map(|charge| Ion::new(element, charge)));
            }
        }
    }
    Ok(ions)
}

fn tabulated(element: Element) -> Vec<i8> {
    let mut charges: Vec<i8> =
        radius::table().iter().filter(|row| row.symbol == element.symbol()).map(|row| row.charge).collect();
    charges.sort_unstable();
    charges.dedup();
    charges
}
