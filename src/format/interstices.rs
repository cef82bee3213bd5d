//! A host with its interstices as dummy sites, as CIF: to be looked at.
//!
//! `_atom_site_calc_flag dum` marks the dummies; readers that want atoms pass over them (this project's does). Their
//! labels are X1, X2, …, what each is stands in `_atom_sites_special_details`.

use super::cif::write::{Description, WriteError, write as write_cif};
use crate::crystal::{Site, Structure};
use crate::ion::Species;
use crate::packing::{Host, Interstice, Survey};

/// Why the file cannot be written.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum InterstitialError {
    /// Which ions a host's spheres are is not known.
    #[error("the ions of the spheres {roles} are not known; name them, for example `--spheres {example}`")]
    Unnamed {
        /// Roles without an ion.
        roles: String,
        /// How it could be said.
        example: String,
    },
    /// The host has no length.
    #[error("the packing has no size; name the ion of its first sphere, `--spheres {role}=O`")]
    NoSize {
        /// The first role.
        role: String,
    },
    /// No lattice or no structure.
    #[error(transparent)]
    Write(#[from] WriteError),
}

/// The host in P 1 with all interstices and saddles as dummies; `ions` says what each role is.
///
/// # Errors
/// [`InterstitialError`] when ions or size are unknown, or the structure cannot be written.
pub fn write(host: &Host, ions: &[Option<Species>], survey: &Survey) -> Result<String, InterstitialError> {
    let unnamed: Vec<&str> =
        host.roles.iter().zip(ions).filter(|(_, ion)| ion.is_none()).map(|(role, _)| role.name.as_str()).collect();
    if !unnamed.is_empty() {
        let example: Vec<String> =
            host.roles.iter().zip(["O", "Sr", "Ti"]).map(|(role, ion)| format!("{}={ion}", role.name)).collect();
        return Err(InterstitialError::Unnamed { roles: unnamed.join(", "), example: example.join(",") });
    }
    let scale = host.scale.ok_or_else(|| InterstitialError::NoSize { role: host.roles[0].name.clone() })?;
    let lattice = host.lattice.scaled(scale).map_err(WriteError::from)?;
    let sites = host
        .spheres
        .iter()
        .zip(&host.role)
        .filter_map(|(position, role)| Some(Site::full(*position, ions.get(*role).copied().flatten()?)))
        .collect();
    let places: Vec<&Interstice> = survey.interstices.iter().chain(&survey.saddles).collect();
    let mut notes = vec![format!(
        "Spheres of the host {} and, as dummy sites X1 to X{}, the interstices between them.",
        host.name,
        places.len()
    )];
    notes.extend(legend(host, scale, &places));
    let description = Description { block_code: host.name.clone(), notes, explicit: true, ..Description::default() };
    let mut cif = write_cif(&Structure { lattice, sites }, &description)?;
    // The site list stands last; its columns are label, type, coordinates, occupancy, flag.
    for (i, place) in places.iter().enumerate() {
        let [x, y, z]: [f64; 3] = place.position.0.into();
        cif += &format!("X{} . {x:.8} {y:.8} {z:.8} . dum\n", i + 1);
    }
    Ok(cif)
}

/// What the dummies are, orbit by orbit.
fn legend(host: &Host, scale: f64, places: &[&Interstice]) -> Vec<String> {
    let mut at = 1;
    places
        .chunk_by(|a, b| (a.class, a.orbit) == (b.class, b.orbit))
        .map(|members| {
            let (first, last) = (at, at + members.len() - 1);
            at = last + 1;
            let names = if first == last { format!("X{first}") } else { format!("X{first} to X{last}") };
            let p = members[0];
            let (formula, radius) = (p.formula(host), p.ratio * scale);
            format!("{names}: {} {formula}, radius {radius:.3} angstroms, ratio {:.4}.", p.kind, p.ratio)
        })
        .collect()
}
