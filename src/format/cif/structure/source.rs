//! Where a structure was published, from the citation or publication items of its block.

use crate::format::cif::citation::Citation;
use crate::format::cif::{Block, Value};

/// Most authors that are kept.
const MAX_AUTHORS: usize = 100;

/// The `_citation_*` rows, else the `_journal_*` and `_publ_*` items that databases write; empty when nothing is known.
pub(super) fn read(block: &Block<'_>) -> Vec<Citation> {
    let Some(table) = block.table(&["_citation_title", "_citation_journal_full", "_citation_DOI", "_citation_id"])
    else {
        return published(block).into_iter().filter(|c| !c.is_empty()).collect();
    };
    let id = table.column(&["_citation_id"]);
    let of = |row: usize, names: &[&str]| table.column(names).and_then(|c| text(table.value(row, c)));
    let rows = (0..table.n_rows()).map(|row| Citation {
        authors: authors(block, id.map(|c| table.value(row, c).text().into_owned()).as_deref()),
        title: of(row, &["_citation_title"]),
        journal: of(row, &["_citation_journal_full", "_citation_journal_abbrev"]),
        volume: of(row, &["_citation_journal_volume"]).and_then(|v| v.parse().ok()),
        page_first: of(row, &["_citation_page_first"]),
        page_last: of(row, &["_citation_page_last"]),
        year: of(row, &["_citation_year"]).and_then(|v| v.parse().ok()),
        doi: of(row, &["_citation_DOI"]),
        details: of(row, &["_citation_special_details"]),
    });
    rows.filter(|c| !c.is_empty()).collect()
}

/// Authors of the citation `id`.
fn authors(block: &Block<'_>, id: Option<&str>) -> Vec<String> {
    let names = ["_citation_author_name"];
    let Some(table) = block.table(&names) else { return Vec::new() };
    let Some(name) = table.column(&names) else { return Vec::new() };
    let of_id = table.column(&["_citation_author_citation_id"]);
    let rows =
        (0..table.n_rows()).filter(|row| of_id.is_none_or(|c| id.is_none_or(|id| table.value(*row, c).text() == id)));
    rows.filter_map(|row| text(table.value(row, name))).take(MAX_AUTHORS).collect()
}

/// The paper that the block itself is part of.
fn published(block: &Block<'_>) -> Option<Citation> {
    let of = |names: &[&str]| block.value(names).and_then(text);
    let authors = block.table(&["_publ_author_name"]).and_then(|table| {
        let column = table.column(&["_publ_author_name"])?;
        Some((0..table.n_rows()).filter_map(|row| text(table.value(row, column))).take(MAX_AUTHORS).collect())
    });
    Some(Citation {
        authors: authors.unwrap_or_default(),
        title: of(&["_publ_section_title"]),
        journal: of(&["_journal_name_full", "_journal.name_full"]),
        volume: of(&["_journal_volume"]).and_then(|v| v.parse().ok()),
        page_first: of(&["_journal_page_first"]),
        page_last: of(&["_journal_page_last"]),
        year: of(&["_journal_year"]).and_then(|v| v.parse().ok()),
        doi: of(&["_journal_paper_doi", "_journal_paper_DOI"]),
        details: None,
    })
}

/// Text with its lines joined; nothing for `?`, `.` and blanks.
fn text(value: Value<'_>) -> Option<String> {
    if value.is_unknown() || value.is_inapplicable() {
        return None;
    }
    let joined = value.text().split_whitespace().collect::<Vec<_>>().join(" ");
    (!joined.is_empty()).then_some(joined)
}
