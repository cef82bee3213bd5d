//! Text as CIF 1.1 can hold it: ASCII with the standard's markup, folded into short lines.
//!
//! Markup: CIF 1.1 common semantic features, paragraphs 30-37 (International Tables G, 2006, section 2.2.7.4):
//! Greek letters `\a`, accents `\'e`, and codes such as `\%a` for å (the codes are from memory of those paragraphs).

/// Longest line we write in a text field; the standard allows 2048.
const LINE: usize = 78;

/// Accents (combining code point, mark) of the standard.
const ACCENTS: [(&str, &str); 9] = [
    ("áéíóúýÁÉÍÓÚÝćńśźĆŃŚŹ", "\\'"),
    ("àèìòùÀÈÌÒÙ", "\\`"),
    ("âêîôûÂÊÎÔÛ", "\\^"),
    ("äëïöüÿÄËÏÖÜ", "\\\""),
    ("ãñõÃÑÕ", "\\~"),
    ("çşÇŞ", "\\,"),
    ("čďěňřšťžČĎĚŇŘŠŤŽ", "\\<"),
    ("őűŐŰ", "\\>"),
    ("ąęĄĘ", "\\;"),
];

/// The letters under the accents of [`ACCENTS`], in the same order.
const BASES: [&str; 9] = [
    "aeiouyAEIOUYcnszCNSZ",
    "aeiouAEIOU",
    "aeiouAEIOU",
    "aeiouyAEIOU",
    "anoANO",
    "csCS",
    "cdenrstzCDENRSTZ",
    "ouOU",
    "aeAE",
];

/// Greek letters of the standard and the Latin letters that stand for them.
const GREEK: (&str, &str) = ("αβχδεφγηικλμνοπθρστυωξψζ", "abcdefghiklmnopqrstuwxyz");

/// Other characters and what stands for them.
const OTHERS: [(char, &str); 16] = [
    ('å', "\\%a"),
    ('Å', "\\%A"),
    ('ø', "\\/o"),
    ('Ø', "\\/O"),
    ('ł', "\\/l"),
    ('Ł', "\\/L"),
    ('ß', "\\&s"),
    ('ı', "\\?i"),
    ('°', "\\%"),
    ('±', "+-"),
    ('×', "\\\\times"),
    ('–', "--"),
    ('—', "--"),
    ('−', "-"),
    ('□', "[]"),
    ('·', "."),
];

/// `text` in ASCII: the standard's markup where it has one, `?` for any other character; control characters, line
/// ends among them, become blanks.
pub(super) fn ascii(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            ' '..='~' => out.push(c),
            c if c.is_control() => out.push(' '),
            _ => push_markup(&mut out, c),
        }
    }
    out
}

fn push_markup(out: &mut String, c: char) {
    if let Some((_, code)) = OTHERS.iter().find(|(other, _)| *other == c) {
        out.push_str(code);
        return;
    }
    let greek = GREEK.0.chars().zip(GREEK.1.chars());
    let lower = c.to_lowercase().next().unwrap_or(c);
    if let Some((_, latin)) = greek.into_iter().find(|(letter, _)| *letter == lower) {
        out.push('\\');
        out.push(if lower == c { latin } else { latin.to_ascii_uppercase() });
        return;
    }
    for ((letters, mark), bases) in ACCENTS.iter().zip(BASES) {
        if let Some((_, base)) = letters.chars().zip(bases.chars()).find(|(letter, _)| *letter == c) {
            out.push_str(mark);
            out.push(base);
            return;
        }
    }
    out.push('?');
}

/// A text field of paragraphs, each folded at blanks into lines of at most [`LINE`] characters; the delimiters `;`
/// and a line end are included. No line of the content begins with `;`, so the field cannot end early.
pub(super) fn text_field(paragraphs: &[String]) -> String {
    let mut field = String::from(";\n");
    for paragraph in paragraphs {
        let mut line = String::new();
        let paragraph = ascii(paragraph);
        // A word longer than a line is cut, so that no line passes the standard's limit.
        let words = paragraph.split_ascii_whitespace().flat_map(|word| word.as_bytes().chunks(LINE - 1));
        for word in words.map(|bytes| std::str::from_utf8(bytes).unwrap_or("?")) {
            if !line.is_empty() && line.len() + 1 + word.len() > LINE {
                field.push_str(&line);
                field.push('\n');
                line.clear();
            }
            if !line.is_empty() || word.starts_with(';') {
                line.push(' ');
            }
            line.push_str(word);
        }
        field.push_str(&line);
        field.push('\n');
    }
    field.push_str(";\n");
    field
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn letters_become_markup() {
        assert_eq!(
            ascii("Kröger–Vink, 3 Å, α-Al2O3, Ω, Žižka"),
            "Kr\\\"oger--Vink, 3 \\%A, \\a-Al2O3, \\W, \\<Zi\\<zka"
        );
        assert_eq!(ascii("漢\n□"), "? []");
        for ((letters, _), bases) in ACCENTS.iter().zip(BASES) {
            assert_eq!(letters.chars().count(), bases.len(), "{letters}");
        }
        assert_eq!(GREEK.0.chars().count(), GREEK.1.len());
    }

    #[test]
    fn a_field_cannot_end_early() {
        let field = text_field(&[format!("{} ;;;; {}", "word ".repeat(40), "x".repeat(5000)), String::new()]);
        let lines: Vec<&str> = field.lines().collect();
        assert!(lines.iter().all(|line| line.len() <= LINE));
        let bounds: Vec<usize> = (0..lines.len()).filter(|&i| lines[i].starts_with(';')).collect();
        assert_eq!(bounds, [0, lines.len() - 1]);
    }
}
