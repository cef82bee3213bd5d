//! The framework that some elements form in a crystal: their ions as packing spheres, everything else stripped.
//!
//! The cell stays as it is in the crystal, so that what is found there has the crystal's coordinates. Radii are in Å;
//! by default Shannon's for six-fold coordination, so that an interstice of radius ρ just holds a cation of the crystal
//! radius ρ.

use super::host::{Host, HostError, Role, Sign};
use crate::crystal::neighbours::NeighbourList;
use crate::crystal::{Fractional, Site, Structure};
use crate::ion::radius::{RadiusSet, radius};
use crate::ion::{Element, Ion, Spin};

/// Spheres nearer to each other than this share of the sum of their radii are split positions of one ion.
const SPLIT: f64 = 0.4;

/// Radii accepted for a framework ion, Å.
const RADIUS: (f64, f64) = (0.1, 4.0);

/// An element of the framework, and its radius in Å if the user gave one.
pub type FrameworkElement = (Element, Option<f64>);

/// Reads `O`, `O,F` or `O:1.26,F`.
///
/// # Errors
/// [`HostError::Framework`] for an unknown element, one named twice, or a radius out of range.
pub fn parse_elements(name: &str, text: &str) -> Result<Vec<FrameworkElement>, HostError> {
    let mut elements: Vec<FrameworkElement> = Vec::new();
    for part in text.split(',').map(str::trim) {
        let (symbol, length) = part.split_once(':').map_or((part, None), |(s, r)| (s.trim(), Some(r.trim())));
        let element = Element::from_symbol(symbol).ok_or_else(|| {
            fail(name, format!("`{symbol}` is no element; write for example `#O,F`, or `#O:1.26,F` with a radius in Å"))
        })?;
        if elements.iter().any(|(e, _)| *e == element) {
            return Err(fail(name, format!("{element} is named twice")));
        }
        let radius = length
            .map(|r| {
                let value = r.parse().ok().filter(|r| (RADIUS.0..=RADIUS.1).contains(r));
                let range = format!("{} to {} Å are accepted", RADIUS.0, RADIUS.1);
                value.ok_or_else(|| fail(name, format!("`{r}` is no radius of {element}; {range}")))
            })
            .transpose()?;
        elements.push((element, radius));
    }
    Ok(elements)
}

/// The framework of these elements in a crystal; radii that are not given are Shannon's.
///
/// A site counts in full if it holds any of the elements, whatever its occupancy, and takes the role of the one that
/// holds most of it.
///
/// # Errors
/// [`HostError::Framework`] when no site holds them, a radius is in no table, or positions are split.
pub fn framework(
    name: &str,
    structure: &Structure,
    elements: &[FrameworkElement],
    set: RadiusSet,
) -> Result<Host, HostError> {
    let (mut spheres, mut role, mut number): (Vec<Fractional>, Vec<usize>, Vec<usize>) = Default::default();
    for (idx, site) in structure.sites.iter().enumerate() {
        if let Some(r) = role_of(site, elements) {
            spheres.push(site.position);
            role.push(r);
            number.push(idx);
        }
    }
    if let Some((element, _)) = elements.iter().enumerate().find(|(r, _)| !role.contains(r)).map(|(_, e)| e) {
        let held: Vec<String> = structure.amounts().keys().map(ToString::to_string).collect();
        return Err(fail(name, format!("no site is held mainly by {element}; the crystal holds {}", held.join(", "))));
    }
    let mut roles: Vec<Role> = Vec::new();
    for (element, given) in elements {
        let charge = charge_of(structure, *element);
        let length = match given {
            Some(r) => *r,
            None => shannon(name, structure, *element, charge, set)?,
        };
        let ion = if charge > 0 { Sign::Cation } else { Sign::Anion };
        roles.push(Role { name: element.symbol().into(), ion, radius: length });
    }
    let Some(unit) = roles.first().map(|r| r.radius) else {
        return Err(fail(name, "no element is named; write for example `#O`".into()));
    };
    refuse_split(name, structure, &spheres, &number, |i| roles[role[i]].radius)?;
    roles.iter_mut().for_each(|r| r.radius /= unit);
    let lattice = structure.lattice.scaled(unit.recip()).map_err(|e| fail(name, e.to_string()))?;
    Ok(Host { name: name.into(), lattice, spheres, role, roles, stacking: None, scale: Some(unit) })
}

fn fail(name: &str, reason: String) -> HostError {
    HostError::Framework { name: name.into(), reason }
}

/// Which of the elements holds most of a site, if any does.
fn role_of(site: &Site, elements: &[FrameworkElement]) -> Option<usize> {
    let mut best: Option<(usize, crate::ion::Amount)> = None;
    for occupant in site.occupants.iter() {
        let Some(r) = elements.iter().position(|(e, _)| *e == occupant.species.element) else { continue };
        if best.is_none_or(|(_, most)| occupant.occupancy > most) {
            best = Some((r, occupant.occupancy));
        }
    }
    best.map(|(r, _)| r)
}

/// The charge that the crystal states, else the commonest negative one, else the commonest.
fn charge_of(structure: &Structure, element: Element) -> i8 {
    let stated = structure.amounts().into_keys().find(|s| s.element == element).and_then(|s| s.charge);
    let states = || element.dominant_states().iter().chain(element.main_states());
    let usual = || states().find(|q| **q < 0).or(states().next()).copied();
    stated.or_else(usual).unwrap_or(0)
}

fn shannon(name: &str, structure: &Structure, element: Element, charge: i8, set: RadiusSet) -> Result<f64, HostError> {
    let stated: Option<Spin> =
        structure.amounts().into_keys().find(|s| s.element == element && s.spin.is_some()).and_then(|s| s.spin);
    let ion = Ion { element, charge, spin: stated };
    radius(&ion, 6, set)
        .map(|r| r.angstrom)
        .ok()
        .filter(|r| *r >= RADIUS.0)
        .ok_or_else(|| fail(name, format!("no usable radius of {ion} is tabulated; give one in Å, `#{element}:1.80`")))
}

fn refuse_split(
    name: &str,
    structure: &Structure,
    spheres: &[Fractional],
    number: &[usize],
    radius: impl Fn(usize) -> f64,
) -> Result<(), HostError> {
    let largest = (0..spheres.len()).map(&radius).fold(0.0, f64::max);
    let list = NeighbourList::new(&structure.lattice, spheres, 2.0 * SPLIT * largest);
    for i in 0..spheres.len() {
        for n in list.of(i, 2.0 * SPLIT * largest) {
            if n.distance < SPLIT * (radius(i) + radius(n.index)) {
                let (a, b) = (number[i] + 1, number[n.index] + 1);
                let reason =
                    format!("sites {a} and {b} are {:.3} Å apart, split positions of one ion; keep one", n.distance);
                return Err(fail(name, reason));
            }
        }
    }
    Ok(())
}
