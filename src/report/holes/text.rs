//! The tables of `holes`: what people read.
//!
//! Orbits that are alike (kind, shell, size, shape) stand in one row of the first tables; windows and sharing are told
//! between kinds of interstice, with ranges where the members differ.

use super::{Holes, NetworkRow, Orbit};
use crate::ion::Amount;
use crate::report::table::layout;

/// Ratios that differ by less than this are shown in one row.
const SAME_RATIO: f64 = 1e-6;

/// Shape measures that differ by less than this are.
const SAME_SHAPE: f64 = 5e-3;

/// Rows of a table of places, the largest ones where there are more.
const MAX_ROWS: usize = 200;

/// The tables.
pub fn text(holes: &Holes) -> String {
    let mut out = heading(holes);
    out += "\ninterstices\n";
    out += &places(holes, &holes.interstices, false);
    if !holes.saddles.is_empty() {
        out += "\nsaddles: enclosed in a plane (face) or on a line (edge) only\n";
        out += &places(holes, &holes.saddles, true);
    }
    if !holes.windows.is_empty() {
        out += "\nwindows\n";
        out += &windows(holes);
    }
    if !holes.shared.is_empty() {
        out += "\npolyhedra share\n";
        out += &sharing(holes);
    }
    out += "\n";
    out += &through(holes);
    for note in &holes.notes {
        out += &format!("note: {note}\n");
    }
    out
}

fn heading(holes: &Holes) -> String {
    let p = &holes.cell;
    let mut out = holes.host.clone();
    if let Some(layers) = &holes.stacking {
        out += &format!(", layers {} ({})", layers.letters, layers.symbols);
    }
    let roles: Vec<String> = holes
        .roles
        .iter()
        .enumerate()
        .map(|(i, r)| {
            let radius = if i == 0 { "1".into() } else { decimals(r.radius, 4) };
            format!("{} {} of radius {radius}", r.number, r.name)
        })
        .collect();
    out += &format!(
        "\ncell: {}; a {:.4}, b {:.4}, c {:.4}, alpha {:.2}, beta {:.2}, gamma {:.2}\n",
        roles.join(", "),
        p.a,
        p.b,
        p.c,
        p.alpha,
        p.beta,
        p.gamma
    );
    if let Some(scale) = holes.sphere_angstrom {
        out += &format!("the packing sphere's radius, the unit of length: {scale:.4} Å\n");
    }
    out
}

/// A number with at most so many decimals, without zeros at its end.
fn decimals(x: f64, most: usize) -> String {
    let text = format!("{x:.most$}");
    if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.').into() } else { text }
}

fn alike(a: &Orbit, b: &Orbit) -> bool {
    let shapes = match (a.shape, b.shape) {
        (Some(s), Some(t)) => (s - t).abs() < SAME_SHAPE,
        (s, t) => s == t,
    };
    (&a.kind, &a.shell, a.class) == (&b.kind, &b.shell, b.class) && (a.ratio - b.ratio).abs() < SAME_RATIO && shapes
}

fn places(holes: &Holes, orbits: &[Orbit], classes: bool) -> String {
    let mut groups: Vec<Vec<&Orbit>> = Vec::new();
    for orbit in orbits {
        // Orbits stand in order of ratio.
        let near = |g: &&mut Vec<&Orbit>| (g[0].ratio - orbit.ratio).abs() < SAME_RATIO;
        match groups.iter_mut().rev().take_while(near).find(|g| alike(g[0], orbit)) {
            Some(group) => group.push(orbit),
            None => groups.push(vec![orbit]),
        }
    }
    let in_angstrom = holes.sphere_angstrom.is_some();
    let more = groups.len().saturating_sub(MAX_ROWS);
    let rows: Vec<Vec<String>> = groups
        .iter()
        .rev()
        .take(MAX_ROWS)
        .rev()
        .map(|group| {
            let first = group[0];
            let joined = |each: &dyn Fn(&Orbit) -> String| group.iter().map(|o| each(o)).collect::<Vec<_>>().join("+");
            let number: usize = group.iter().map(|o| o.multiplicity).sum();
            let at = first.positions.first().copied().unwrap_or_default();
            let mut row = vec![first.kind.clone()];
            if classes {
                row.push(first.class.into());
            }
            row.extend([
                first.shell.clone(),
                first.coordination.to_string(),
                Amount::new(number as i128, holes.spheres.len() as i128).to_string(),
                format!("{:.6}", first.ratio),
            ]);
            row.extend(first.radius_angstrom.map(|r| format!("{r:.3}")));
            row.extend([
                first.shape.map_or("-".into(), |s| format!("{:.2}", s.max(0.0))),
                joined(&|o| o.site_symmetry.into()),
                joined(&|o| o.multiplicity.to_string()),
                format!("{:.4} {:.4} {:.4}", at[0], at[1], at[2]),
            ]);
            row
        })
        .collect();
    let mut columns = vec!["kind"];
    columns.extend(classes.then_some("on"));
    columns.extend(["shell", "CN", "per sphere", "ratio"]);
    columns.extend(in_angstrom.then_some("r / Å"));
    columns.extend(["shape", "site symmetry", "in cell", "first at"]);
    let table = layout(&columns, &rows);
    if more > 0 { format!("{table}and {more} smaller ones; `--json` lists all\n") } else { table }
}

/// Kind and shell of the interstices of an orbit.
fn named(holes: &Holes, orbit: usize) -> String {
    holes.interstices.get(orbit - 1).map_or_else(String::new, |o| format!("{} {}", o.kind, o.shell))
}

/// The least and largest of some values, once if they are alike.
fn range(values: impl Iterator<Item = f64>, digits: usize) -> String {
    let (low, high) = values.fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), x| (l.min(x), h.max(x)));
    let [low, high] = [low, high].map(|x| format!("{x:.digits$}"));
    if low == high { low } else { format!("{low} to {high}") }
}

fn windows(holes: &Holes) -> String {
    let mut groups: Vec<([String; 3], Vec<&super::WindowOrbit>)> = Vec::new();
    for window in &holes.windows {
        let mut ends = window.between.map(|orbit| named(holes, orbit));
        ends.sort();
        let [one, other] = ends;
        let key = [one, other, window.rim.clone()];
        match groups.iter_mut().find(|(k, _)| *k == key) {
            Some((_, group)) => group.push(window),
            None => groups.push((key, vec![window])),
        }
    }
    let rows: Vec<Vec<String>> = groups
        .into_iter()
        .map(|([one, other, rim], group)| {
            let number: usize = group.iter().map(|w| w.multiplicity).sum();
            let mut row = vec![one, other, rim, range(group.iter().map(|w| w.ratio), 4)];
            if holes.sphere_angstrom.is_some() {
                row.push(range(group.iter().filter_map(|w| w.radius_angstrom), 3));
            }
            row.push(number.to_string());
            row
        })
        .collect();
    let mut columns = vec!["from", "to", "through", "ratio"];
    columns.extend(holes.sphere_angstrom.map(|_| "r / Å"));
    columns.push("in cell");
    layout(&columns, &rows)
}

fn sharing(holes: &Holes) -> String {
    let scale = holes.sphere_angstrom.unwrap_or(1.0);
    let mut groups: Vec<([String; 3], Vec<&super::SharedRow>)> = Vec::new();
    for row in &holes.shared {
        let key = [named(holes, row.orbit), row.sharing.clone(), named(holes, row.with)];
        match groups.iter_mut().find(|(k, _)| *k == key) {
            Some((_, group)) => group.push(row),
            None => groups.push((key, vec![row])),
        }
    }
    // Faces before edges before corners, the nearest first.
    let rank = |sharing: &str| ["face", "edge", "corner"].iter().position(|s| *s == sharing);
    groups.sort_by(|(a, _), (b, _)| (&a[0], rank(&a[1]), &a[2]).cmp(&(&b[0], rank(&b[1]), &b[2])));
    let rows: Vec<Vec<String>> = groups
        .into_iter()
        .map(|([of, sharing, with], group)| {
            // Orbits of one kind may have different numbers of such neighbours.
            let mut numbers: Vec<(usize, usize)> = Vec::new();
            for row in &group {
                match numbers.iter_mut().find(|(orbit, _)| *orbit == row.orbit) {
                    Some((_, n)) => *n += row.number,
                    None => numbers.push((row.orbit, row.number)),
                }
            }
            let number = range(numbers.iter().map(|(_, n)| *n as f64), 0);
            vec![of, sharing, number, with, range(group.iter().map(|r| r.distance * scale), 4)]
        })
        .collect();
    let distance = if holes.sphere_angstrom.is_some() { "distance / Å" } else { "distance" };
    layout(&["each", "shares a", "with", "of", distance], &rows)
}

/// Through what the crystal can be crossed, and where a mobile ion gets.
fn through(holes: &Holes) -> String {
    let size = |ratio: f64| match holes.sphere_angstrom {
        Some(scale) => format!("{ratio:.4} ({:.3} Å)", ratio * scale),
        None => format!("{ratio:.4}"),
    };
    let [one, two, three] = holes.critical_ratios.map(|r| r.map_or("none".into(), size));
    let mut out = format!("largest ratio that gets through: in one dimension {one}, in two {two}, in three {three}\n");
    let Some(ways) = &holes.mobile else { return out };
    out += &format!("{}, ratio {:.4}: ", ways.ion, ways.ratio);
    let (endless, cages): (Vec<&NetworkRow>, Vec<&NetworkRow>) = ways.networks.iter().partition(|n| n.dimension > 0);
    if ways.networks.is_empty() {
        return out + "no interstice is large enough\n";
    }
    if endless.is_empty() {
        out += "no way through";
    }
    let kinds = |networks: &[&NetworkRow]| {
        let mut kinds: Vec<String> =
            networks.iter().flat_map(|n| n.orbits.iter().map(|orbit| named(holes, *orbit))).collect();
        kinds.sort();
        kinds.dedup();
        kinds.join(", ")
    };
    let told: Vec<String> = endless
        .iter()
        .map(|n| {
            let words = ["", "one dimension", "two dimensions", "three dimensions"];
            let along = if n.dimension < 3 {
                let direction = |d: &[i64; 3]| format!("[{} {} {}]", d[0], d[1], d[2]);
                format!(" along {}", n.directions.iter().map(direction).collect::<Vec<_>>().join(", "))
            } else {
                String::new()
            };
            format!("a way in {}{along} through {}", words[n.dimension.min(3)], kinds(&[n]))
        })
        .collect();
    out += &told.join("; ");
    if !cages.is_empty() {
        let number: usize = cages.iter().map(|n| n.interstices).sum();
        out += &format!("; {} closed in, {number} interstices: {}", cages.len(), kinds(&cages));
    }
    out + "\n"
}
