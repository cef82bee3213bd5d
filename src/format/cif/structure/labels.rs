//! Labels of the sites of a cell, each listed label kept once and all of them in one piece of text.

use super::sites::Listed;

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
