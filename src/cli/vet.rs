//! `interstice vet`.

use super::{Outcome, Radii, print};
use interstice::crystal::Structure;
use interstice::crystal::symmetry::{TOLERANCE, symmetrise};
use interstice::error::Error;
use interstice::format::cif::{self, Diagnostic, Mode, ReadStructure, Source, parse, read_structures};
use interstice::ion::formula::{Formula, Named, Part};
use interstice::ion::oxidation;
use interstice::report::vetting::{Vetted, labels, text};
use interstice::rules::{Limits, Severity, Shells, Terms, judge, worst};

#[derive(clap::Args)]
pub struct Arguments {
    /// CIFs
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

/// Errors of one file that are shown; `--syntax` lists all.
const MAX_SHOWN: usize = 10;

pub fn run(arguments: &Arguments) -> Result<Outcome, Error> {
    let (mut outcome, mut fault) = (Outcome::Clean, None);
    for path in &arguments.files {
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

fn read(path: &str) -> Result<Vec<u8>, Error> {
    std::fs::read(path).map_err(|source| Error::File { action: "cannot read", path: path.into(), source })
}

/// Whether the file's syntax is at fault.
fn vet_syntax(path: &str) -> Result<bool, Error> {
    let faults = cif::check_syntax(&read(path)?);
    for fault in &faults {
        print(&(fault.one_line(path) + "\n"));
    }
    Ok(!faults.is_empty())
}

/// The errors among the faults of a file, each with the line that it stands on.
fn fail(path: &str, faults: Vec<Diagnostic>, text: &str) -> Error {
    let errors: Vec<&Diagnostic> = faults.iter().filter(|f| f.severity == cif::Severity::Error).collect();
    let shown = errors.iter().take(MAX_SHOWN).map(|fault| fault.render(path, text));
    let mut report = shown.collect::<Vec<_>>().join("\n");
    if errors.len() > MAX_SHOWN {
        report += &format!("\nand {} more errors; `--syntax` lists them", errors.len() - MAX_SHOWN);
    }
    Error::Cif { path: path.into(), faults, report }
}

/// Whether a rule is broken in any structure of the file.
fn vet(path: &str, arguments: &Arguments) -> Result<bool, Error> {
    let bytes = read(path)?;
    let source = Source::decode(path, &bytes).map_err(|fault| fail(path, vec![fault], ""))?;
    let document = parse(&source, Mode::Lenient).map_err(|faults| fail(path, faults, source.text()))?;
    let structures = read_structures(&document);
    if structures.is_empty() {
        let message = format!("{} data blocks, none of them lists atoms", document.blocks.len());
        return Err(fail(path, vec![document.fault(0, message)], source.text()));
    }
    let mut broken = false;
    for read in structures {
        let mut read = read.map_err(|fault| fail(path, vec![fault], source.text()))?;
        let vetted = judged(path, &mut read, arguments);
        broken |= worst(&vetted.findings) == Some(Severity::Broken);
        // One line a structure.
        print(&if arguments.json { serde_json::to_string(&vetted).unwrap_or_default() + "\n" } else { text(&vetted) });
    }
    Ok(broken)
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
    Vetted {
        path: path.into(),
        block: read.block.clone(),
        sites: read.structure.sites.len(),
        space_group: symmetrise(&read.structure, TOLERANCE).ok().map(|s| s.group.number),
        shortest: Shells::new(&read.structure)
            .contacts
            .iter()
            .filter_map(|near| near.first().map(|n| n.distance))
            .min_by(f64::total_cmp),
        charges_assigned,
        warnings: read.warnings.iter().map(ToString::to_string).collect(),
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
    for occupant in structure.sites.iter_mut().flat_map(|s| &mut s.occupants) {
        let mut of_element = ions.iter().filter(|(ion, _)| ion.element == occupant.species.element);
        if let (Some((ion, _)), None) = (of_element.next(), of_element.next()) {
            occupant.species.charge.get_or_insert(ion.charge);
        }
    }
    true
}
