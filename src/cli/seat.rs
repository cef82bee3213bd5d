//! `interstice seat`.

use super::host::resolve;
use super::{Outcome, Radii, json, print};
use interstice::build::decide;
use interstice::error::Error;
use interstice::recipe::Recipe;
use interstice::report;

#[derive(clap::Args)]
pub struct Arguments {
    /// Formula, for example `MgAl2O4` or `Fe(II)Fe(III)2O4`
    composition: String,
    /// The host, as `interstice holes` names it
    #[arg(long, value_name = "HOST", default_value = "ccp")]
    packing: String,
    /// Folder of further templates of hosts
    #[arg(long, value_name = "DIR")]
    templates: Option<String>,
    /// Where ions sit by your word: `Mg:tetrahedral,Al:octahedral`, `Sr:A` for a sphere of the packing
    #[arg(long, value_name = "LIST")]
    seats: Option<String>,
    /// Which of Shannon's sets
    #[arg(long, value_enum, default_value = "crystal")]
    radii: Radii,
    /// Print JSON
    #[arg(long)]
    json: bool,
}

pub fn run(arguments: &Arguments) -> Result<Outcome, Error> {
    let mut recipe = Recipe {
        packing: arguments.packing.clone(),
        seats: arguments.seats.clone(),
        radii: arguments.radii.into(),
        ..Recipe::new(&arguments.composition)
    };
    resolve(&mut recipe, arguments.templates.as_deref())?;
    let decision = decide(&recipe)?;
    let seats = report::seats::gather(&decision);
    print(&if arguments.json { json(&seats) } else { report::seats::text(&seats, &decision.size) });
    Ok(Outcome::Clean)
}
