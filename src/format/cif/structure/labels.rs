//! Labels of the sites of a cell, each listed label kept once and all of them in one piece of text.

use super::report::Report;
use super::sites::Listed;
use std::borrow::Cow;
use std::collections::{BTreeMap, HashSet};

/// For each site of the cell the label of the listed site that it came from; of a shared site, of the first.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Labels {
    /// Listed labels one behind the other.
    text: String,
    /// Where each ends.
    ends: Vec<usize>,
    /// For each site of the cell its row in the list.
    row: Vec<u32>,
}

impl Labels {
    pub(super) fn new(sites: &[Listed<'_>], row: Vec<u32>) -> Self {
        let mut text = String::with_capacity(sites.iter().map(|site| site.label.len()).sum());
        let mut ends = Vec::with_capacity(sites.len());
        for site in sites {
            text.push_str(&site.label);
            ends.push(text.len());
        }
        Self { text, ends, row }
    }

    /// The label of a site of the cell, counted from 0; `None` beyond the last.
    pub fn get(&self, site: usize) -> Option<&str> {
        let row = *self.row.get(site)? as usize;
        let start = row.checked_sub(1).map_or(0, |before| self.ends[before]);
        Some(&self.text[start..self.ends[row]])
    }

    /// All labels in the order of the sites.
    pub fn iter(&self) -> impl Iterator<Item = &str> {
        (0..self.row.len()).filter_map(|site| self.get(site))
    }
}

/// A label that occurs again gets a suffix.
pub(super) fn rename_duplicates(sites: &mut [Listed<'_>], report: &mut Report<'_, '_>) {
    if labels_ascend(sites) {
        return;
    }
    let mut seen: HashSet<Cow<'_, str>> = HashSet::with_capacity(sites.len());
    let mut next: BTreeMap<Cow<'_, str>, usize> = BTreeMap::new();
    for site in sites {
        if seen.insert(site.label.clone()) {
            continue;
        }
        let number = next.entry(site.label.clone()).or_insert(2);
        let mut renamed = format!("{}_{number}", site.label);
        while !seen.insert(Cow::Owned(renamed.clone())) {
            *number += 1;
            renamed = format!("{}_{number}", site.label);
        }
        *number += 1;
        report.warn(
            "cif::label",
            site.place as usize,
            format!("label `{}` stands twice; here it is called `{renamed}`", site.label),
        );
        site.label = Cow::Owned(renamed);
    }
}

/// Whether every label is letters and a number that grows with each use of the letters: then none stands twice, which
/// spares a large file the search.
fn labels_ascend(sites: &[Listed<'_>]) -> bool {
    let mut last: Vec<(&str, u64)> = Vec::new();
    sites.iter().all(|site| {
        let (letters, digits) = site.label.split_at(site.label.find(|c: char| c.is_ascii_digit()).unwrap_or(0));
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
