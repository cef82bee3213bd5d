//! `interstice vet`.

use super::{Outcome, Radii, print};
use interstice::crystal::symmetry::{MAX_SEARCHED, TOLERANCE, symmetrise};
use interstice::crystal::{Occupant, Structure};
use interstice::error::Error;
use interstice::format::cif::{self, Diagnostic, Mode, ReadStructure, Source, parse, read_structures};
use interstice::ion::formula::{Formula, Named, Part};
use interstice::ion::oxidation;
use interstice::report::vetting::{Vetted, labels, text};
use interstice::rules::{Limits, Severity, Shells, Terms, judge, worst};

#[derive(clap::Args)]
pub struct Arguments {
    /// CIFs, or folders of them
    #[arg(required = true)]
    files: Vec<String>,
    /// Which of Shannon's sets
    #[arg(long, value_enum, default_value = "crystal")]
    radii: Radii,
    /// Least cation-anion distance, share of the sum of radii
    #[arg(long, default_value_t = Limits::default().cation_anion)]
    cation_anion: f64,
    /// Least anion-anion distance, share of the sum of radii
    #[arg(long, default_value_t = Limits::default().anion_anion)]
    anion_anion: f64,
    /// Least cation-cation distance, share of the sum of radii
    #[arg(long, default_value_t = Limits::default().cation_cation)]
    cation_cation: f64,
    /// Print JSON Lines
    #[arg(long)]
    json: bool,
    /// Hold the files against the syntax of CIF 1.1 or 2.0 by the letter, and nothing else: a line a fault
    #[arg(long, conflicts_with = "json")]
    syntax: bool,
}

/// Faults of one file that are shown; `--syntax` lists all.
const MAX_SHOWN: usize = 10;

pub fn run(arguments: &Arguments) -> Result<Outcome, Error> {
    let (mut outcome, mut fault) = (Outcome::Clean, None);
    for path in &files(&arguments.files)? {
        let vetted = if arguments.syntax { vet_syntax(path) } else { vet(path, arguments) };
        match vetted {
            Ok(false) => {}
            Ok(true) => outcome = Outcome::Broken,
            // One bad file does not stop the others; all but the last fault are told as they come.
            Err(error) => {
                if let Some(earlier) = fault.replace(error) {
                    eprintln!("interstice: {}", super::report(&earlier));
                }
            }
        }
    }
    fault.map_or(Ok(outcome), Err)
}

/// The files named, and in place of a folder the CIFs that it holds, in order of their names.
fn files(named: &[String]) -> Result<Vec<String>, Error> {
    let mut files = Vec::new();
    for path in named {
        if !std::path::Path::new(path).is_dir() {
            files.push(path.clone());
            continue;
        }
        let cannot = |source| Error::File { action: "cannot read", path: path.clone(), source };
        let mut inside = Vec::new();
        for entry in std::fs::read_dir(path).map_err(cannot)? {
            let file = entry.map_err(cannot)?.path();
            if file.extension().is_some_and(|ending| ending.eq_ignore_ascii_case("cif")) {
                inside.push(file.to_string_lossy().into_owned());
            }
        }
        if inside.is_empty() {
            let reason = "the folder holds no file that ends in `.cif`".to_owned();
            return Err(Error::Option { option: "FILE", given: path.clone(), reason });
        }
        inside.sort();
        files.extend(inside);
    }
    Ok(files)
}

fn read(path: &str) -> Result<Vec<u8>, Error> {
    std::fs::read(path).map_err(|source| Error::File { action: "cannot read", path: path.into(), source })
}

/// Whether the file's syntax is at fault.
fn vet_syntax(path: &str) -> Result<bool, Error> {
    let faults = cif::check_syntax(path, &read(path)?);
    let lines: String = faults.iter().map(|fault| fault.one_line(path) + "\n").collect();
    print(&lines);
    Ok(!faults.is_empty())
}

/// The faults of a file, each with the line that it stands on; errors go before warnings where not all can be shown.
fn fail(path: &str, mut faults: Vec<Diagnostic>, text: &str) -> Error {
    faults.sort_by_key(|fault| (fault.severity != cif::Severity::Error, fault.offset));
    let more = faults.len().saturating_sub(MAX_SHOWN);
    let mut shown: Vec<&Diagnostic> = faults.iter().take(MAX_SHOWN).collect();
    shown.sort_by_key(|fault| fault.offset);
    let mut report = shown.iter().map(|fault| fault.render(path, text)).collect::<Vec<_>>().join("\n");
    if more > 0 {
        report += &format!("\nand {more} more");
    }
    Error::Cif { path: path.into(), faults, report }
}

/// Whether a rule is broken in any structure of the file.
fn vet(path: &str, arguments: &Arguments) -> Result<bool, Error> {
    let bytes = read(path)?;
    // There is no text yet to show a line of.
    let source = Source::decode(path, &bytes).map_err(|fault| {
        let report = fault.one_line(path);
        Error::Cif { path: path.into(), faults: vec![fault], report }
    })?;
    let document = parse(&source, Mode::Lenient).map_err(|faults| fail(path, faults, source.text()))?;
    let structures = read_structures(&document);
    let mut faults = Vec::new();
    if structures.is_empty() {
        let message = match document.blocks.len() {
            0 => "the file holds no data block".to_owned(),
            1 => "the one data block lists no atoms".to_owned(),
            n => format!("none of the {n} data blocks lists atoms"),
        };
        faults.push(document.fault(0, message));
    }
    let mut broken = false;
    for read in structures {
        match read {
            Ok(mut read) => {
                let vetted = judged(path, &mut read, arguments);
                broken |= worst(&vetted.findings) == Some(Severity::Broken);
                // One line a structure.
                let json = || serde_json::to_string(&vetted).unwrap_or_default() + "\n";
                print(&if arguments.json { json() } else { text(&vetted) });
            }
            Err(fault) => faults.push(fault),
        }
    }
    if faults.is_empty() {
        return Ok(broken);
    }
    // What was assumed on the way may be what went wrong.
    faults.extend(document.warnings.iter().cloned());
    Err(fail(path, faults, source.text()))
}

fn judged(path: &str, read: &mut ReadStructure, arguments: &Arguments) -> Vetted {
    let charges_assigned = assign_charges(&mut read.structure);
    let limits = Limits {
        cation_anion: arguments.cation_anion,
        anion_anion: arguments.anion_anion,
        cation_cation: arguments.cation_cation,
    };
    let terms = Terms { limits, radii: arguments.radii.into(), promised: &[] };
    let findings = judge(&read.structure, &terms);
    let positions = read.structure.positions();
    let searched = read.structure.sites.len() <= MAX_SEARCHED;
    Vetted {
        path: path.into(),
        block: read.block.clone(),
        sites: read.structure.sites.len(),
        space_group: searched.then(|| symmetrise(&read.structure, TOLERANCE).ok().map(|s| s.group.number)).flatten(),
        shortest: Shells::new(&read.structure, &positions).nearest.into_iter().flatten().min_by(f64::total_cmp),
        charges_assigned,
        warnings: read.warnings.clone(),
        labels: findings.iter().map(|f| labels(read, f)).collect(),
        findings,
    }
}

/// Gives common oxidation states to a structure that states none, if one state an element makes it neutral.
fn assign_charges(structure: &mut Structure) -> bool {
    let amounts = structure.amounts();
    if amounts.keys().all(|s| s.charge.is_some()) {
        return false;
    }
    let parts = amounts
        .iter()
        .map(|(s, amount)| Part {
            what: Named::Element { element: s.element, charge: s.charge, spin: None },
            amount: *amount,
        })
        .collect();
    let Ok(assignment) = oxidation::assign(&Formula { parts }) else { return false };
    let ions = assignment.best.ions;
    let charged = |occupant: &Occupant| {
        let mut charged = *occupant;
        let mut of_element = ions.iter().filter(|(ion, _)| ion.element == occupant.species.element);
        if let (Some((ion, _)), None) = (of_element.next(), of_element.next()) {
            charged.species.charge.get_or_insert(ion.charge);
        }
        charged
    };
    for site in &mut structure.sites {
        site.occupants = site.occupants.iter().map(charged).collect();
    }
    true
}
