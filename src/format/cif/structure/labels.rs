//! Labels of sites, all of them in one piece of text: a list may have a million.

use super::report::Report;
use std::collections::{BTreeMap, HashSet};

/// Labels of the listed sites, one behind the other.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub(super) struct ListedLabels {
    text: String,
    /// Where each ends; the text is shorter than the file and its new suffixes, which fit.
    ends: Vec<u32>,
}

impl ListedLabels {
    pub fn push(&mut self, label: &str) {
        self.text.push_str(label);
        self.ends.push(self.text.len() as u32);
    }

    /// The label of a row in range.
    pub fn get(&self, row: usize) -> &str {
        let start = row.checked_sub(1).map_or(0, |before| self.ends[before]);
        &self.text[start as usize..self.ends[row] as usize]
    }

    fn iter(&self) -> impl Iterator<Item = &str> {
        (0..self.ends.len()).map(|row| self.get(row))
    }

    /// A label that occurs again gets a suffix. `place` tells where a row stands.
    pub fn rename_duplicates(&mut self, place: impl Fn(usize) -> usize, report: &mut Report<'_, '_>) {
        if self.ascend() {
            return;
        }
        let mut renamed = Self::default();
        let mut seen: HashSet<String> = HashSet::with_capacity(self.ends.len());
        let mut next: BTreeMap<&str, usize> = BTreeMap::new();
        for (row, label) in self.iter().enumerate() {
            if seen.insert(label.to_owned()) {
                renamed.push(label);
                continue;
            }
            let number = next.entry(label).or_insert(2);
            let mut other = format!("{label}_{number}");
            while !seen.insert(other.clone()) {
                *number += 1;
                other = format!("{label}_{number}");
            }
            *number += 1;
            let text = format!("label `{label}` stands twice; here it is called `{other}`");
            report.warn("cif::label", place(row), text);
            renamed.push(&other);
        }
        *self = renamed;
    }

    /// Whether every label is letters and a number that grows with each use of the letters: then none stands twice,
    /// which spares a large file the search.
    fn ascend(&self) -> bool {
        let mut last: Vec<(&str, u64)> = Vec::new();
        self.iter().all(|label| {
            let (letters, digits) = label.split_at(label.find(|c: char| c.is_ascii_digit()).unwrap_or(0));
            let number = digits.parse::<u64>().ok().filter(|_| !digits.starts_with('0') && digits.len() < 19);
            let Some(number) = number.filter(|_| last.len() < 100) else { return false };
            match last.iter_mut().find(|(seen, _)| *seen == letters) {
                Some((_, before)) => number > std::mem::replace(before, number),
                None => {
                    last.push((letters, number));
                    true
                }
            }
        })
    }
}

/// For each site of the cell the label of the listed site that it came from; of a shared site, of the first.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Labels {
    listed: ListedLabels,
    /// For each site of the cell its row in the list.
    row: Vec<u32>,
}

impl Labels {
    pub(super) fn new(listed: ListedLabels, row: Vec<u32>) -> Self {
        Self { listed, row }
    }

    /// The label of a site of the cell, counted from 0; `None` beyond the last.
    pub fn get(&self, site: usize) -> Option<&str> {
        self.row.get(site).map(|row| self.listed.get(*row as usize))
    }

    /// All labels in the order of the sites.
    pub fn iter(&self) -> impl Iterator<Item = &str> {
        self.row.iter().map(|row| self.listed.get(*row as usize))
    }
}
