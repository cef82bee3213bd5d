//! Columns of text, each as wide as its widest entry.

/// Lays out rows under a heading; columns are parted by two blanks, numbers (entries that begin with a digit or sign and
/// hold no letters) set to the right.
pub fn layout(heading: &[&str], rows: &[Vec<String>]) -> String {
    let width = |c: usize| {
        let cells = rows.iter().filter_map(|r| r.get(c)).map(|s| s.chars().count());
        cells.chain(std::iter::once(heading[c].chars().count())).max().unwrap_or(0)
    };
    let numeric = |c: usize| {
        let number = |s: &String| s.is_empty() || s.starts_with(|x: char| x.is_ascii_digit() || "+-–".contains(x));
        rows.iter().filter_map(|r| r.get(c)).all(number)
    };
    let columns: Vec<(usize, bool)> = (0..heading.len()).map(|c| (width(c), numeric(c))).collect();
    let line = |cells: &mut dyn Iterator<Item = &str>| {
        let mut text = String::new();
        for ((width, right), cell) in columns.iter().zip(cells) {
            let pad = " ".repeat(width.saturating_sub(cell.chars().count()));
            text += &if *right { format!("{pad}{cell}  ") } else { format!("{cell}{pad}  ") };
        }
        text.trim_end().to_string() + "\n"
    };
    let mut out = line(&mut heading.iter().copied());
    for row in rows {
        out += &line(&mut row.iter().map(String::as_str));
    }
    out
}

#[cfg(test)]
mod tests {
    #[test]
    fn numbers_are_set_to_the_right() {
        let rows = vec![vec!["Mg2+".to_string(), "0.5".into()], vec!["O2-".into(), "12.25".into()]];
        assert_eq!(super::layout(&["ion", "r"], &rows), "ion       r\nMg2+    0.5\nO2-   12.25\n");
    }
}
