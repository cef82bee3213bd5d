//! The symmetry of a data block: listed operations before the Hall symbol before the Hermann–Mauguin symbol before the
//! number.

use super::StatedGroup;
use super::operations::{Group, METRIC_TOLERANCE, close, metric_change, parse};
use super::report::Report;
use crate::crystal::Lattice;
use crate::crystal::symmetry::{Operation, SpaceGroup};
use crate::format::cif::symbols;
use crate::format::cif::{Block, Diagnostic, Value};
use std::collections::BTreeSet;

const OPERATIONS: [&str; 2] = ["_space_group_symop_operation_xyz", "_symmetry_equiv_pos_as_xyz"];
const HALL: [&str; 2] = ["_space_group_name_Hall", "_symmetry_space_group_name_Hall"];
const HERMANN_MAUGUIN: [&str; 3] =
    ["_space_group_name_H-M_alt", "_symmetry_space_group_name_H-M", "_space_group_name_H-M_full"];
const NUMBER: [&str; 2] = ["_space_group_IT_number", "_symmetry_Int_Tables_number"];

/// A group that the block can mean, and what is to be said if it is taken.
pub(super) struct Candidate {
    pub operations: Vec<Operation>,
    pub assumed: Option<(usize, String)>,
}

/// The groups that the block can mean, the likeliest first; more than one only when a symbol leaves it open.
pub(super) fn candidates(
    block: &Block<'_>,
    lattice: &Lattice,
    report: &mut Report<'_, '_>,
) -> Result<(Vec<Candidate>, Option<StatedGroup>), Diagnostic> {
    let known = |names: &[&str]| {
        block.value(names).filter(|v| !v.is_unknown() && !v.is_inapplicable() && !v.text().trim().is_empty())
    };
    let (hall, symbol, number) = (known(&HALL), known(&HERMANN_MAUGUIN), known(&NUMBER));
    let stated = StatedGroup {
        hermann_mauguin: symbol.map(|v| v.text().trim().to_owned()),
        hall: hall.map(|v| v.text().trim().to_owned()),
        number: number.and_then(|v| v.text().trim().parse().ok()),
    };
    let listed = listed(block, report)?;
    let found = match listed {
        Some((operations, place)) => {
            keeps_metric(&operations, lattice, place, report)?;
            check_against_symbols(&operations, hall, symbol, &stated, report);
            vec![Candidate { operations, assumed: None }]
        }
        None => from_symbols(lattice, hall, symbol, number, report)?,
    };
    let named = stated.hermann_mauguin.is_some() || stated.hall.is_some() || stated.number.is_some();
    Ok((found, named.then_some(stated)))
}

/// The listed operations, completed to a group, and where they begin; `None` when the block lists none.
fn listed(block: &Block<'_>, report: &mut Report<'_, '_>) -> Result<Option<(Vec<Operation>, usize)>, Diagnostic> {
    let Some((table, column)) = block.table(&OPERATIONS).and_then(|t| Some((t, t.column(&OPERATIONS)?))) else {
        return Ok(None);
    };
    let mut given = Vec::with_capacity(table.n_rows());
    let mut corrected = None;
    for row in 0..table.n_rows() {
        let value = table.value(row, column);
        if value.is_unknown() || value.is_inapplicable() {
            continue;
        }
        let triplet = parse(&value.text()).map_err(|why| {
            report.error("cif::operation", value.place(), format!("operation `{}` {why}", value.text()))
        })?;
        if triplet.corrected {
            corrected.get_or_insert((value.place(), value.text().into_owned()));
        }
        given.push(triplet.operation);
    }
    if given.is_empty() {
        return Ok(None);
    }
    let place = table.value(0, column).place();
    if let Some((place, text)) = corrected {
        let text = format!("decimals in `{text}` are taken for the fractions that they abbreviate");
        report.warn("cif::operation", place, text);
    }
    let Group::Finite(group) = close(&given) else {
        let text = "the listed operations generate more than any space group holds; they are no group".into();
        return Err(report.error("cif::operation", place, text));
    };
    let distinct = set(&given).len();
    if distinct < given.len() {
        let text = format!("{} of the {} listed operations stand there twice", given.len() - distinct, given.len());
        report.warn("cif::operation", place, text);
    }
    if group.len() > distinct {
        let text =
            format!("the {distinct} listed operations are no whole group; {} more are added", group.len() - distinct);
        report.warn("cif::operation", place, text);
    }
    Ok(Some((group, place)))
}

fn set(operations: &[Operation]) -> BTreeSet<String> {
    operations.iter().map(ToString::to_string).collect()
}

fn keeps_metric(
    operations: &[Operation],
    lattice: &Lattice,
    place: usize,
    report: &Report<'_, '_>,
) -> Result<(), Diagnostic> {
    let worst = operations.iter().map(|o| (o, metric_change(o, lattice))).max_by(|a, b| a.1.total_cmp(&b.1));
    match worst {
        Some((operation, change)) if change > METRIC_TOLERANCE => {
            let p = lattice.parameters();
            let text = format!(
                "the cell a = {:.4}, b = {:.4}, c = {:.4} Å, α = {:.3}, β = {:.3}, γ = {:.3}° does not have the symmetry \
                 `{operation}`; check the cell, and whether its axes are those of the operations (hexagonal or \
                 rhombohedral, unique axis)",
                p.a, p.b, p.c, p.alpha, p.beta, p.gamma
            );
            Err(report.error("cif::metric", place, text))
        }
        _ => Ok(()),
    }
}

/// Warns when the listed operations are not those of the symbols.
fn check_against_symbols(
    operations: &[Operation],
    hall: Option<Value<'_>>,
    symbol: Option<Value<'_>>,
    stated: &StatedGroup,
    report: &mut Report<'_, '_>,
) {
    let ours = set(operations);
    let n = operations.len();
    if let Some(value) = hall
        && let Some(of_hall) = operations_of_hall(&value.text())
        && set(&of_hall) != ours
    {
        let text = format!(
            "the Hall symbol `{}` has {} operations that are not the {n} listed; the list is used",
            value.text(),
            of_hall.len()
        );
        report.warn("cif::symmetry", value.place(), text);
    }
    if let Some(value) = symbol {
        let settings = symbols::settings_of_hermann_mauguin(&value.text());
        if settings.is_empty() {
            let text = format!(
                "the symbol `{}` is no space group of the tables; the listed operations are used",
                value.text()
            );
            report.warn("cif::symmetry", value.place(), text);
        }
        let of_setting = |s: &i32| SpaceGroup::from_hall_number(*s).map(|g| set(&g.operations));
        if !settings.is_empty() && settings.iter().filter_map(of_setting).all(|s| s != ours) {
            let text =
                format!("the symbol `{}` does not stand for the {n} operations listed; the list is used", value.text());
            report.warn("cif::symmetry", value.place(), text);
        }
        if let Some(number) = stated.number.filter(|n| !settings.is_empty() && !agrees(*n, &settings)) {
            let text = format!(
                "`{}` is not in group {number} of International Tables A, as stated; the listed operations are used",
                value.text()
            );
            report.warn("cif::symmetry", value.place(), text);
        }
    }
}

fn agrees(number: i32, settings: &[i32]) -> bool {
    settings.iter().any(|s| SpaceGroup::from_hall_number(*s).is_some_and(|g| g.number == number))
}

fn operations_of_hall(symbol: &str) -> Option<Vec<Operation>> {
    match symbols::setting_of_hall(symbol) {
        Some(setting) => SpaceGroup::from_hall_number(setting).map(|g| g.operations),
        None => symbols::operations_of_hall(symbol),
    }
}

fn from_symbols(
    lattice: &Lattice,
    hall: Option<Value<'_>>,
    symbol: Option<Value<'_>>,
    number: Option<Value<'_>>,
    report: &mut Report<'_, '_>,
) -> Result<Vec<Candidate>, Diagnostic> {
    if let Some(value) = hall {
        if let Some(operations) = operations_of_hall(&value.text()) {
            keeps_metric(&operations, lattice, value.place(), report)?;
            let assumed = (
                value.place(),
                format!("no operations are listed; those of the Hall symbol `{}` are used", value.text()),
            );
            return Ok(vec![Candidate { operations, assumed: Some(assumed) }]);
        }
        let text = format!("the Hall symbol `{}` cannot be read and is passed over", value.text());
        report.warn("cif::symmetry", value.place(), text);
    }
    let (value, settings) = match (symbol, number) {
        (Some(value), _) if !symbols::settings_of_hermann_mauguin(&value.text()).is_empty() => {
            (value, symbols::settings_of_hermann_mauguin(&value.text()))
        }
        (symbol, Some(value)) => {
            if let Some(symbol) = symbol {
                let text = format!(
                    "the symbol `{}` is not one of the 530 settings in the tables; the number is used",
                    symbol.text()
                );
                report.warn("cif::symmetry", symbol.place(), text);
            }
            (value, value.text().trim().parse().map(symbols::settings_of_number).unwrap_or_default())
        }
        (Some(value), None) => (value, Vec::new()),
        (None, None) => {
            let text =
                "neither operations nor a space group are stated; list the operations, or `x,y,z` alone for P 1".into();
            return Err(report.error("cif::symmetry", report.block_place(), text));
        }
    };
    let groups: Vec<SpaceGroup> = settings.into_iter().filter_map(SpaceGroup::from_hall_number).collect();
    let Some(first) = groups.first() else {
        let text = format!(
            "no operations are listed, and `{}` is no space group of the tables; list the operations",
            value.text()
        );
        return Err(report.error("cif::symmetry", value.place(), text));
    };
    let fits = |g: &&SpaceGroup| g.operations.iter().all(|o| metric_change(o, lattice) <= METRIC_TOLERANCE);
    let fitting: Vec<&SpaceGroup> = groups.iter().filter(fits).collect();
    if fitting.is_empty() {
        keeps_metric(&first.operations, lattice, value.place(), report)?;
    }
    let candidates = fitting.iter().map(|group| {
        let text = format!(
            "no operations are listed; `{}` is taken in the setting `{}` (Hall symbol `{}`){}",
            value.text(),
            group.hermann_mauguin,
            group.hall,
            if fitting.len() > 1 { format!(", one of {} that it can mean", fitting.len()) } else { String::new() }
        );
        Candidate { operations: group.operations.clone(), assumed: Some((value.place(), text)) }
    });
    Ok(candidates.collect())
}
