//! Hosts as the command line names them: by name, by template, or as the framework of a CIF.

use interstice::error::Error;
use interstice::format::cif::{Mode, ReadStructure, Source, parse, read_structures};
use interstice::ion::radius::RadiusSet;
use interstice::packing::framework::{framework, parse_elements};
use interstice::packing::template::document;
use interstice::packing::{Host, HostError, Templates};
use interstice::recipe::Recipe;

/// A host, and whether its spheres are ions of a real crystal.
pub struct Named {
    /// The host.
    pub host: Host,
    /// Whether its roles are elements.
    pub is_framework: bool,
    /// What was assumed in reading it.
    pub notes: Vec<String>,
}

/// The host of this name: `FILE.cif#O,F` is a framework, everything else a packing.
pub fn named(text: &str, templates: &Templates, set: RadiusSet) -> Result<Named, Error> {
    let Some((path, elements)) = text.rsplit_once('#') else {
        if std::path::Path::new(text).is_file() {
            let reason = format!("say which elements form the framework, for example `{text}#O`");
            return Err(HostError::Framework { name: text.into(), reason }.into());
        }
        return Ok(Named { host: Host::parse_with(text, templates)?, is_framework: false, notes: Vec::new() });
    };
    let elements = parse_elements(text, elements)?;
    let read = structure(path)?;
    let host = framework(text, &read.structure, &elements, set)?;
    let notes = read.warnings.iter().map(|w| w.one_line(path)).collect();
    Ok(Named { host, is_framework: true, notes })
}

/// The one structure of a CIF.
fn structure(path: &str) -> Result<ReadStructure, Error> {
    let bytes =
        std::fs::read(path).map_err(|source| Error::File { action: "cannot read", path: path.into(), source })?;
    let fail = |faults: Vec<interstice::format::cif::Diagnostic>, text: &str| {
        let report = faults.iter().take(1).map(|fault| fault.render(path, text)).collect();
        Error::Cif { path: path.into(), faults, report }
    };
    let source = Source::decode(path, &bytes).map_err(|fault| fail(vec![fault], ""))?;
    let document = parse(&source, Mode::Lenient).map_err(|faults| fail(faults, source.text()))?;
    let mut structures = read_structures(&document);
    match structures.len() {
        1 => structures.remove(0).map_err(|fault| fail(vec![fault], source.text())),
        n => {
            let reason = format!("the file holds {n} structures; a file with one is wanted");
            Err(HostError::Framework { name: path.into(), reason }.into())
        }
    }
}

/// Gives a recipe the template that its host needs: a framework's, or one of the user's folder.
pub fn resolve(recipe: &mut Recipe, folder: Option<&str>) -> Result<(), Error> {
    let templates = templates(folder)?;
    if recipe.packing.contains('#') {
        let host = named(&recipe.packing, &templates, recipe.radii)?.host;
        recipe.template = Some(document(FRAMEWORK, &host));
        recipe.packing = FRAMEWORK.into();
        return Ok(());
    }
    let name = recipe.packing.split(':').next().unwrap_or_default();
    if let (Some(template), Some(_)) = (templates.get(name), folder) {
        recipe.template = Some(template.document().clone());
    }
    Ok(())
}

/// What a recipe calls the framework of a CIF.
const FRAMEWORK: &str = "framework";

/// The embedded templates and those of a folder.
pub fn templates(folder: Option<&str>) -> Result<Templates, Error> {
    let mut templates = Templates::embedded().clone();
    let Some(folder) = folder else { return Ok(templates) };
    let cannot = |source| Error::File { action: "cannot read", path: folder.into(), source };
    let mut files = Vec::new();
    for entry in std::fs::read_dir(folder).map_err(cannot)? {
        let file = entry.map_err(cannot)?.path();
        if file.extension().is_some_and(|ending| ending.eq_ignore_ascii_case("json")) {
            files.push(file);
        }
    }
    if files.is_empty() {
        let reason = "the folder holds no file that ends in `.json`".to_owned();
        return Err(Error::Option { option: "--templates", given: folder.into(), reason });
    }
    files.sort();
    for file in files {
        let path = file.to_string_lossy().into_owned();
        let text = std::fs::read_to_string(&file).map_err(|source| Error::File {
            action: "cannot read",
            path: path.clone(),
            source,
        })?;
        templates.add(&path, &text).map_err(HostError::from)?;
    }
    Ok(templates)
}
