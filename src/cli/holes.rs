//! `interstice holes`.

use super::{Outcome, json, print};
use interstice::error::Error;
use interstice::packing::{Host, interstices};
use interstice::report;

#[derive(clap::Args)]
pub struct Arguments {
    /// `ccp`, `hcp`, `bcc`, `primitive-cubic`, or layers as in `stack:ABAC`
    host: String,
    /// Print JSON
    #[arg(long)]
    json: bool,
}

pub fn run(arguments: &Arguments) -> Result<Outcome, Error> {
    let host = Host::parse(&arguments.host)?;
    let holes = report::holes::gather(&host, &interstices(&host)?);
    print(&if arguments.json { json(&holes) } else { report::holes::text(&holes) });
    Ok(Outcome::Clean)
}
