//! `interstice holes`.

use super::host::{Named, named, templates};
use super::{Outcome, Radii, json, output, print};
use interstice::error::Error;
use interstice::format::interstices;
use interstice::ion::formula::{self, Named as Term};
use interstice::ion::radius::{self, RadiusSet, radius};
use interstice::ion::{Element, Ion, Species};
use interstice::packing::{HostError, Role, Sign, Templates, polytypes, survey};
use interstice::report::holes::{Mobile, gather, text};
use interstice::report::hosts;
use std::path::Path;

#[derive(clap::Args)]
pub struct Arguments {
    /// A packing: `ccp`, `hcp`, `bcc`, `primitive-cubic`, layers as in `stack:ABAC`, `stack:hc`, `layers:AABB` or `ax3:hc`,
    /// a template's name, or the framework that elements form in a crystal, `FILE.cif#O,F`
    #[arg(required_unless_present_any = ["hosts", "stackings"])]
    host: Option<String>,
    /// The ion that is to move, with its radius in Å if you wish: `Li`, `Li:0.59`; or a ratio to the packing sphere, `0.15`
    #[arg(long, value_name = "ION|RATIO", allow_negative_numbers = true)]
    mobile: Option<String>,
    /// Which ions the spheres are: `O`, or `X=O,A=Sr`; lengths are then given in Å too
    #[arg(long, value_name = "IONS")]
    spheres: Option<String>,
    /// Folder of further templates
    #[arg(long, value_name = "DIR")]
    templates: Option<String>,
    /// Which of Shannon's sets
    #[arg(long, value_enum, default_value = "crystal")]
    radii: Radii,
    /// Write the host with its interstices as dummy sites to a CIF
    #[arg(long, value_name = "FILE.cif")]
    into: Option<String>,
    /// Overwrite that file
    #[arg(long, requires = "into")]
    replace: bool,
    /// List the packings known by name, and the templates
    #[arg(long, conflicts_with_all = ["host", "stackings"])]
    hosts: bool,
    /// List all distinct close-packed stackings of so many layers
    #[arg(long, value_name = "LAYERS", conflicts_with = "host")]
    stackings: Option<usize>,
    /// Print JSON
    #[arg(long)]
    json: bool,
}

pub fn run(arguments: &Arguments) -> Result<Outcome, Error> {
    let templates = templates(arguments.templates.as_deref())?;
    match (&arguments.host, arguments.stackings) {
        (None, Some(n)) => stackings(n, arguments.json),
        (None, None) => {
            let list = hosts::gather(&templates);
            print(&if arguments.json { json(&list) } else { hosts::text(&list) });
            Ok(Outcome::Clean)
        }
        (Some(name), _) => holes(name, &templates, arguments),
    }
}

fn stackings(n: usize, as_json: bool) -> Result<Outcome, Error> {
    let list: Vec<hosts::Stacked> = polytypes(n).map_err(HostError::from)?.map(|s| (&s).into()).collect();
    print(&if as_json { json(&list) } else { hosts::stackings(&list) });
    Ok(Outcome::Clean)
}

fn holes(name: &str, templates: &Templates, arguments: &Arguments) -> Result<Outcome, Error> {
    if let Some(path) = &arguments.into {
        output::check_file(Path::new(path), arguments.replace)?;
    }
    let set = arguments.radii.into();
    let Named { mut host, is_framework, notes } = named(name, templates, set)?;
    let ions: Vec<Option<Species>> = match (&arguments.spheres, is_framework) {
        (Some(given), true) => {
            let reason = "the crystal says which ions its spheres are; give their radii as in `FILE.cif#O:1.26`".into();
            return Err(Error::Option { option: "--spheres", given: given.clone(), reason });
        }
        (Some(given), false) => {
            let ions = sphere_ions(given, &host.roles)?;
            if let Some(first) = ions[0] {
                host.scale = Some(radius(&first, 6, set)?.angstrom);
            }
            ions.into_iter().map(|ion| ion.map(Species::from)).collect()
        }
        (None, true) => host.roles.iter().map(species_of_framework).collect(),
        (None, false) => vec![None; host.roles.len()],
    };
    let mobile = arguments.mobile.as_deref().map(|text| mobile(text, host.scale, set)).transpose()?;
    let found = survey(&host)?;
    if let Some(path) = &arguments.into {
        let cif = interstices::write(&host, &ions, &found)?;
        output::write_file(Path::new(path), &cif)?;
    }
    let holes = gather(&host, &found, mobile.as_ref(), notes);
    print(&if arguments.json { json(&holes) } else { text(&holes) });
    Ok(Outcome::Clean)
}

/// The roles of a framework are named by their elements.
fn species_of_framework(role: &Role) -> Option<Species> {
    Element::from_symbol(&role.name).map(|element| Species { element, charge: None, spin: None })
}

/// The ions of the roles, `O` or `X=O,A=Sr`.
fn sphere_ions(text: &str, roles: &[Role]) -> Result<Vec<Option<Ion>>, Error> {
    let fail = |reason: String| Error::Option { option: "--spheres", given: text.into(), reason };
    let mut ions = vec![None; roles.len()];
    for part in text.split(',').map(str::trim) {
        let (name, ion) = part.split_once('=').map_or((roles[0].name.as_str(), part), |(n, i)| (n.trim(), i.trim()));
        let index = roles.iter().position(|role| role.name == name).ok_or_else(|| {
            let known: Vec<String> = roles.iter().map(|r| format!("`{}`", r.name)).collect();
            fail(format!("there is no sphere `{name}`; the host has {}", known.join(", ")))
        })?;
        let found = ion_named(ion, Some(roles[index].ion))?
            .ok_or_else(|| fail(format!("`{ion}` is no ion; write for example `O` or `S(-II)`")))?;
        if ions[index].replace(found).is_some() {
            return Err(fail(format!("sphere `{name}` is named twice")));
        }
    }
    Ok(ions)
}

/// The ion that a formula of one element names; where it states no charge, the commonest of the wanted sign.
fn ion_named(text: &str, sign: Option<Sign>) -> Result<Option<Ion>, Error> {
    let formula = formula::parse(text)?;
    let [formula::Part { what: Term::Element { element, charge, spin }, .. }] = formula.parts[..] else {
        return Ok(None);
    };
    let wanted = |q: &i8| match sign {
        Some(Sign::Anion) => *q < 0,
        Some(Sign::Cation) => *q > 0,
        None => *q != 0,
    };
    let usual = || element.dominant_states().iter().chain(element.main_states()).copied().find(wanted);
    Ok(charge.or_else(usual).map(|charge| Ion { element, charge, spin }))
}

/// `Li`, `Li:0.59` or a ratio.
fn mobile(text: &str, scale: Option<f64>, set: RadiusSet) -> Result<Mobile, Error> {
    let fail = |reason: &str| Error::Option { option: "--mobile", given: text.into(), reason: reason.into() };
    let positive = |s: &str| s.trim().parse().ok().filter(|x: &f64| x.is_finite() && *x > 0.0);
    if text.starts_with(|c: char| c.is_ascii_digit() || "+-.".contains(c)) {
        let ratio = positive(text).ok_or_else(|| fail("a ratio is a number above 0"))?;
        return Ok(Mobile { name: "mobile ion".into(), ratio });
    }
    let scale = scale.ok_or_else(|| {
        fail("the packing has no size; say which ions its spheres are, for example `--spheres O`, or give a ratio")
    })?;
    let (name, given) = text.split_once(':').map_or((text, None), |(name, length)| (name, Some(length)));
    let ion = ion_named(name.trim(), None)?.ok_or_else(|| fail("write an ion, for example `Li` or `Cu(I)`"))?;
    let (length, source) = match given {
        Some(length) => (positive(length).ok_or_else(|| fail("a radius is a number of Å above 0"))?, "given".into()),
        None => {
            // The smallest that is tabulated: windows have few spheres.
            let least = radius::rows(ion.element, ion.charge).map(|row| row.coordination).min().unwrap_or(6);
            let found = radius(&ion, least, set)?;
            (found.angstrom, format!("Shannon (1976), coordination number {least}"))
        }
    };
    Ok(Mobile { name: format!("{ion} of {length:.3} Å ({source})"), ratio: length / scale })
}
