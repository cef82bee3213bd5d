//! Disorder groups: which listed sites are alternatives of each other.
//!
//! Core CIF dictionary 3.4.0, `_atom_site.disorder_assembly` and `_atom_site.disorder_group`: sites of one group of an
//! assembly are there together, sites of two groups never; a negative group is an alternative of its own images, about a
//! special position.

use super::report::Report;
use super::sites::SiteList;
use crate::format::cif::Loop;
use num_traits::One;
use std::borrow::Cow;
use std::collections::{BTreeMap, BTreeSet};

/// Most labels that a warning lists.
const MAX_LABELS: usize = 8;

/// What the groups of two sites say of them.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Relation {
    /// Nothing.
    Open,
    /// They are there together.
    Together,
    /// One is there where the other is not.
    Apart,
}

/// Groups of the list, each once; number 0 stands for none.
#[derive(Default)]
pub(super) struct Groups<'s> {
    /// Assembly and group.
    all: Vec<(Cow<'s, str>, Cow<'s, str>)>,
    index: BTreeMap<(Cow<'s, str>, Cow<'s, str>), u32>,
}

impl<'s> Groups<'s> {
    /// The number of the group of a row.
    pub fn of(&mut self, table: &Loop<'s>, row: usize, columns: [Option<usize>; 2]) -> u32 {
        let [assembly, group] = columns.map(|column| {
            let value = table.value(row, column?);
            (!value.is_unknown() && !value.is_inapplicable()).then(|| value.text())
        });
        let Some(group) = group else { return 0 };
        let key = (assembly.unwrap_or_default(), group);
        *self.index.entry(key).or_insert_with_key(|key| {
            self.all.push(key.clone());
            self.all.len() as u32
        })
    }

    fn key(&self, number: u32) -> Option<&(Cow<'s, str>, Cow<'s, str>)> {
        self.all.get(number.checked_sub(1)? as usize)
    }

    /// What the groups say of two images of rows with these groups; `same` when both are of one row.
    pub fn relation(&self, first: u32, second: u32, same: bool) -> Relation {
        let (Some((assembly, group)), Some((other_assembly, other))) = (self.key(first), self.key(second)) else {
            return Relation::Open;
        };
        match () {
            () if assembly != other_assembly => Relation::Open,
            () if group != other => Relation::Apart,
            () if group.starts_with('-') && same => Relation::Apart,
            () if same => Relation::Open,
            () => Relation::Together,
        }
    }
}

/// Warns of alternatives that are all fully occupied: their shares are missing.
pub(super) fn check(list: &SiteList<'_>, report: &mut Report<'_, '_>) {
    let mut groups_of: BTreeMap<&str, BTreeSet<&str>> = BTreeMap::new();
    for (assembly, group) in &list.groups.all {
        groups_of.entry(assembly).or_default().insert(group);
    }
    let is_alternative = |number: u32| {
        list.groups.key(number).is_some_and(|(assembly, _)| groups_of.get(&**assembly).is_some_and(|all| all.len() > 1))
    };
    let rows = || (0..list.sites.len()).filter(|&row| is_alternative(list.sites[row].group));
    let full: Vec<usize> = rows().filter(|&row| list.occupant(row).occupancy.is_one()).collect();
    if let Some(&first) = full.first() {
        let labels: Vec<String> =
            full.iter().take(MAX_LABELS).map(|&row| format!("`{}`", list.labels.get(row))).collect();
        let more = if full.len() > MAX_LABELS { " and others" } else { "" };
        let text = format!(
            "{}{more} are alternatives of other sites by their disorder groups, but have an occupancy of 1",
            labels.join(", ")
        );
        report.warn("cif::disorder", list.sites[first].place as usize, text);
    }
}
