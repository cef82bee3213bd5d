//! `interstice seat`.

use super::{Outcome, Radii, json, print};
use interstice::build::decide;
use interstice::error::Error;
use interstice::recipe::Recipe;
use interstice::report;

#[derive(clap::Args)]
pub struct Arguments {
    /// Formula, for example `MgAl2O4` or `Fe(II)Fe(III)2O4`
    composition: String,
    /// The host
    #[arg(long, value_name = "HOST", default_value = "ccp")]
    packing: String,
    /// Where ions sit by your word: `Mg:tetrahedral,Al:octahedral`
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
    let recipe = Recipe {
        packing: arguments.packing.clone(),
        seats: arguments.seats.clone(),
        radii: arguments.radii.into(),
        ..Recipe::new(&arguments.composition)
    };
    let decision = decide(&recipe)?;
    let seats = report::seats::gather(&decision);
    print(&if arguments.json { json(&seats) } else { report::seats::text(&seats, &decision.size) });
    Ok(Outcome::Clean)
}
