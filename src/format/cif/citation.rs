//! The published source of a structure, as a CIF states it.

use super::write::push_value;

/// A published source; what is not known is empty or absent.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Citation {
    /// Authors as written, `Abrahams, S. C.`.
    pub authors: Vec<String>,
    /// Title of the paper.
    pub title: Option<String>,
    /// Journal, in full or abbreviated.
    pub journal: Option<String>,
    /// Volume.
    pub volume: Option<u32>,
    /// First page.
    pub page_first: Option<String>,
    /// Last page.
    pub page_last: Option<String>,
    /// Year.
    pub year: Option<u16>,
    /// Digital object identifier, `10.1063/1.1676569`.
    pub doi: Option<String>,
    /// What was taken from it, and what was changed.
    pub details: Option<String>,
}

impl Citation {
    /// Whether nothing is known.
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }
}

/// Appends the `citation` loop and its authors; nothing when there are none. Only columns that some source fills are
/// written.
pub(super) fn push(out: &mut String, citations: &[Citation]) {
    if citations.is_empty() {
        return;
    }
    type Field = fn(&Citation) -> Option<String>;
    const COLUMNS: [(&str, Field); 8] = [
        ("_citation_title", |c| c.title.clone()),
        ("_citation_journal_full", |c| c.journal.clone()),
        ("_citation_journal_volume", |c| c.volume.map(|v| v.to_string())),
        ("_citation_page_first", |c| c.page_first.clone()),
        ("_citation_page_last", |c| c.page_last.clone()),
        ("_citation_year", |c| c.year.map(|y| y.to_string())),
        ("_citation_DOI", |c| c.doi.clone()),
        ("_citation_special_details", |c| c.details.clone()),
    ];
    let columns: Vec<_> =
        COLUMNS.into_iter().filter(|(_, field)| citations.iter().any(|c| field(c).is_some())).collect();
    out.push_str("loop_\n_citation_id\n");
    for (name, _) in &columns {
        out.push_str(name);
        out.push('\n');
    }
    for (idx, citation) in citations.iter().enumerate() {
        out.push_str(&format!("{}\n", idx + 1));
        for (_, field) in &columns {
            push_value(out, field(citation).as_deref());
        }
    }
    let authors = citations.iter().enumerate().flat_map(|(id, c)| c.authors.iter().enumerate().map(move |a| (id, a)));
    let mut authors = authors.peekable();
    if authors.peek().is_some() {
        out.push_str("loop_\n_citation_author_citation_id\n_citation_author_ordinal\n_citation_author_name\n");
        for (id, (ordinal, name)) in authors {
            out.push_str(&format!("{} {}\n", id + 1, ordinal + 1));
            push_value(out, Some(name));
        }
    }
}
