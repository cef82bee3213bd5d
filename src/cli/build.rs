//! `interstice build`.

use super::host::resolve;
use super::{Outcome, Radii, json, output, print, progress};
use clap::ValueEnum;
use interstice::build::{Built, build};
use interstice::error::Error;
use interstice::format::{cif, xyz};
use interstice::metric::Sizing;
use interstice::recipe::{CellChoice, Order, Pattern, Recipe};
use interstice::report::cells;
use interstice::rules::{Severity, worst};
use std::path::PathBuf;

#[derive(clap::Args)]
pub struct Arguments {
    /// Formula, or a recipe `NAME.json`
    composition: String,
    /// Folder for the cells; it must not exist
    #[arg(long, value_name = "DIR")]
    into: PathBuf,
    /// The host, as `interstice holes` names it [default: ccp]
    #[arg(long, value_name = "HOST")]
    packing: Option<String>,
    /// Folder of further templates of hosts
    #[arg(long, value_name = "DIR")]
    templates: Option<String>,
    /// Where ions sit by your word: `Mg:tetrahedral,Al:octahedral`, `Sr:A` for a sphere of the packing
    #[arg(long, value_name = "LIST")]
    seats: Option<String>,
    /// Supercell of the primitive cell, `2a,2b,2c`
    #[arg(long, value_name = "P", group = "extent")]
    cell: Option<String>,
    /// The largest cell of at most so many atoms
    #[arg(long, value_name = "N", group = "extent")]
    atoms: Option<usize>,
    /// The smallest cell whose images are so far apart
    #[arg(long, value_name = "Å", group = "extent", allow_negative_numbers = true)]
    span: Option<f64>,
    /// All distinct supercells of index 1 to N
    #[arg(long, value_name = "N", group = "extent")]
    up_to: Option<usize>,
    /// Accept the nearest neutral composition that the cell can hold
    #[arg(long)]
    nearest: bool,
    /// Who sits in the filled interstices [default: lowest]
    #[arg(long, value_enum)]
    order: Option<OrderArgument>,
    /// Which interstices are filled [default: joint, for random and average lowest]
    #[arg(long, value_enum)]
    pattern: Option<PatternArgument>,
    /// How many cells to keep [default: 1, for every all]
    #[arg(long, value_name = "N")]
    keep: Option<usize>,
    /// Seed of all random draws [default: 0]
    #[arg(long, value_name = "N")]
    seed: Option<u64>,
    /// Keep pairs apart, `Gd-Gd:3.6` (Å); may be repeated
    #[arg(long, value_name = "PAIR:Å")]
    apart: Vec<String>,
    /// Which of Shannon's sets [default: crystal]
    #[arg(long, value_enum)]
    radii: Option<Radii>,
    /// Which contacts set the size [default: mean]
    #[arg(long, value_enum)]
    size: Option<SizeArgument>,
    /// Formats [default: cif,xyz]
    #[arg(long = "as", value_name = "LIST", value_delimiter = ',')]
    formats: Option<Vec<String>>,
    /// Write CIFs in P1
    #[arg(long)]
    p1: bool,
    /// Replace the folder of an earlier run
    #[arg(long)]
    replace: bool,
    /// Print the summary as JSON
    #[arg(long)]
    json: bool,
    /// Print nothing but faults
    #[arg(long)]
    quiet: bool,
    /// Threads [default: one a core]; results do not depend on it
    #[arg(long, value_name = "N")]
    threads: Option<usize>,
}

#[derive(Clone, Copy, ValueEnum)]
enum OrderArgument {
    Lowest,
    Every,
    Random,
    Average,
}

#[derive(Clone, Copy, ValueEnum)]
enum PatternArgument {
    Lowest,
    Every,
    Random,
    Joint,
}

#[derive(Clone, Copy, ValueEnum)]
enum SizeArgument {
    Mean,
    Tightest,
}

pub fn run(arguments: &Arguments) -> Result<Outcome, Error> {
    let recipe = recipe(arguments)?;
    output::check(&arguments.into, arguments.replace)?;
    if let Some(n) = arguments.threads {
        set_threads(n)?;
    }
    let built = progress::shown(arguments.quiet, |progress| build(&recipe, progress))?;
    let summary = cells::gather(&built);
    let mut files =
        vec![("recipe.json".to_string(), json(&built.recipe)), ("summary.json".to_string(), json(&summary))];
    files.extend(cell_files(&built)?);
    output::write(&arguments.into, &files, arguments.replace)?;
    match (arguments.json, arguments.quiet) {
        (true, _) => print(&json(&summary)),
        (false, false) => print(&cells::text(&summary)),
        (false, true) => {}
    }
    let broken = built.cells.iter().any(|c| worst(&c.findings) == Some(Severity::Broken));
    Ok(if broken { Outcome::Broken } else { Outcome::Clean })
}

fn set_threads(n: usize) -> Result<(), Error> {
    const MAX_THREADS: usize = 1024;
    if n == 0 || n > MAX_THREADS {
        return Err(Error::Limit {
            what: "a number of threads",
            asked: n.to_string(),
            limit: format!("1 to {MAX_THREADS}"),
        });
    }
    // Fails only if the pool runs already; then it keeps its threads, and results are the same.
    let _ = rayon::ThreadPoolBuilder::new().num_threads(n).build_global();
    Ok(())
}

/// The recipe file, if one is named, with every option given laid over it.
fn recipe(a: &Arguments) -> Result<Recipe, Error> {
    let mut recipe = if a.composition.ends_with(".json") {
        let text = std::fs::read_to_string(&a.composition).map_err(|source| Error::File {
            action: "cannot read",
            path: a.composition.clone(),
            source,
        })?;
        Recipe::from_json(&text, &a.composition)?
    } else {
        Recipe::new(&a.composition)
    };
    if let Some(packing) = &a.packing {
        recipe.packing.clone_from(packing);
        recipe.template = None;
    }
    if a.seats.is_some() {
        recipe.seats.clone_from(&a.seats);
    }
    let cell = a.cell.clone().map(CellChoice::Transformation);
    let cell =
        cell.or(a.atoms.map(CellChoice::Atoms)).or(a.span.map(CellChoice::Span)).or(a.up_to.map(CellChoice::UpTo));
    recipe.cell = cell.unwrap_or(recipe.cell);
    recipe.nearest |= a.nearest;
    recipe.order = a.order.map_or(recipe.order, |o| match o {
        OrderArgument::Lowest => Order::Lowest,
        OrderArgument::Every => Order::Every,
        OrderArgument::Random => Order::Random,
        OrderArgument::Average => Order::Average,
    });
    recipe.pattern = a.pattern.map_or(recipe.pattern, |p| {
        Some(match p {
            PatternArgument::Lowest => Pattern::Lowest,
            PatternArgument::Every => Pattern::Every,
            PatternArgument::Random => Pattern::Random,
            PatternArgument::Joint => Pattern::Joint,
        })
    });
    recipe.keep = a.keep.or(recipe.keep);
    recipe.seed = a.seed.unwrap_or(recipe.seed);
    if !a.apart.is_empty() {
        recipe.apart.clone_from(&a.apart);
    }
    recipe.radii = a.radii.map_or(recipe.radii, Into::into);
    recipe.size = a.size.map_or(recipe.size, |s| match s {
        SizeArgument::Mean => Sizing::Mean,
        SizeArgument::Tightest => Sizing::Tightest,
    });
    if let Some(formats) = &a.formats {
        recipe.formats.clone_from(formats);
    }
    recipe.p1 |= a.p1;
    resolve(&mut recipe, a.templates.as_deref())?;
    // A resolved recipe of another version is run by this one.
    recipe.version = None;
    Ok(recipe)
}

fn cell_files(built: &Built) -> Result<Vec<(String, String)>, Error> {
    let mut files = Vec::new();
    for (idx, cell) in built.cells.iter().enumerate() {
        let name = format!("{:04}", idx + 1);
        let formula = built.decision.composition.formula_text();
        for format in &built.recipe.formats {
            let text = match format.as_str() {
                "xyz" if built.recipe.order == Order::Average => continue,
                "xyz" => {
                    let c = cell.structure.lattice.basis();
                    let vectors: Vec<String> = c.iter().map(|x| format!("{:.6}", x + 0.0)).collect();
                    xyz::write(
                        &cell.structure,
                        &format!("{formula} cell {name}; a b c / Angstrom: {}", vectors.join(" ")),
                    )?
                }
                _ => cif::write(
                    &cell.structure,
                    &cif::Description {
                        block_code: format!("{formula}-{name}"),
                        method: format!(
                            "interstice {}, seed {} (chacha8/rand-0.10)",
                            env!("CARGO_PKG_VERSION"),
                            built.recipe.seed
                        ),
                        notes: cells::notes(built, cell),
                        explicit: built.recipe.p1,
                        // No file holds the time of the run, so that bytes repeat.
                        source_date: std::env::var("SOURCE_DATE_EPOCH").ok(),
                        ..cif::Description::default()
                    },
                )?,
            };
            files.push((format!("{name}.{format}"), text));
        }
    }
    Ok(files)
}
