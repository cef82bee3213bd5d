//! Numbers of a template written as arithmetic: `3/8`, `4/sqrt(3)`, `1/4+u`.
//!
//! expression = term {(`+` | `-`) term}; term = factor {(`*` | `/`) factor};
//! factor = [`-`] (number | name | `sqrt(` expression `)` | `(` expression `)`).

use std::collections::BTreeMap;

/// Deepest nesting of parentheses.
const MAX_DEPTH: usize = 16;

/// The value of an expression over named numbers.
///
/// # Errors
/// A sentence that says which character cannot be read and what was expected, or that the value is no number.
pub fn value(text: &str, names: &BTreeMap<String, f64>) -> Result<f64, String> {
    let mut reader = Reader { text, at: 0, names };
    let value = reader.sum(0)?;
    reader.blanks();
    if reader.at < text.len() {
        return Err(reader.unexpected("`+`, `-`, `*`, `/` or the end"));
    }
    if value.is_finite() { Ok(value) } else { Err(format!("`{text}` is no finite number")) }
}

struct Reader<'a> {
    text: &'a str,
    at: usize,
    names: &'a BTreeMap<String, f64>,
}

impl<'a> Reader<'a> {
    fn sum(&mut self, depth: usize) -> Result<f64, String> {
        let mut value = self.product(depth)?;
        loop {
            if self.takes('+') {
                value += self.product(depth)?;
            } else if self.takes('-') {
                value -= self.product(depth)?;
            } else {
                return Ok(value);
            }
        }
    }

    fn product(&mut self, depth: usize) -> Result<f64, String> {
        let mut value = self.factor(depth)?;
        loop {
            if self.takes('*') {
                value *= self.factor(depth)?;
            } else if self.takes('/') {
                value /= self.factor(depth)?;
            } else {
                return Ok(value);
            }
        }
    }

    fn factor(&mut self, depth: usize) -> Result<f64, String> {
        if depth > MAX_DEPTH {
            return Err(format!("`{}` nests deeper than {MAX_DEPTH} parentheses", self.text));
        }
        if self.takes('-') {
            return self.factor(depth + 1).map(|v| -v);
        }
        if self.takes('(') {
            return self.closed(depth);
        }
        let start = self.at;
        let word = self.run(|c| c.is_ascii_digit() || c == '.');
        if !word.is_empty() {
            return word.parse().map_err(|_| format!("`{word}` in `{}` is no number", self.text));
        }
        let word = self.run(|c| c.is_ascii_alphanumeric() || c == '_');
        if word == "sqrt" && self.takes('(') {
            return self.closed(depth).map(f64::sqrt);
        }
        if let Some(value) = self.names.get(word) {
            return Ok(*value);
        }
        self.at = start;
        let known: Vec<&str> = self.names.keys().map(String::as_str).collect();
        let parameters = if known.is_empty() { String::new() } else { format!(", a parameter ({})", known.join(", ")) };
        Err(self.unexpected(&format!("a number{parameters}, `sqrt(` or `(`")))
    }

    fn closed(&mut self, depth: usize) -> Result<f64, String> {
        let value = self.sum(depth + 1)?;
        if self.takes(')') { Ok(value) } else { Err(self.unexpected("`)`")) }
    }

    fn blanks(&mut self) {
        self.run(|c| c == ' ');
    }

    /// Takes the characters from here on that fulfil a condition.
    fn run(&mut self, keep: impl Fn(char) -> bool) -> &'a str {
        let rest = &self.text[self.at..];
        let taken = &rest[..rest.find(|c| !keep(c)).unwrap_or(rest.len())];
        self.at += taken.len();
        taken
    }

    fn takes(&mut self, sign: char) -> bool {
        self.blanks();
        let here = self.text[self.at..].starts_with(sign);
        if here {
            self.at += sign.len_utf8();
            self.blanks();
        }
        here
    }

    fn unexpected(&self, expected: &str) -> String {
        let found = self.text[self.at..].chars().next().map_or("the end".into(), |c| format!("`{c}`"));
        let column = self.text[..self.at].chars().count() + 1;
        format!("`{}`, character {column}: expected {expected}, found {found}", self.text)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn arithmetic_is_read() {
        let names = BTreeMap::from([("u".to_string(), 0.25)]);
        for (text, want) in [
            ("3/8", 0.375),
            ("4/sqrt(3)", 4.0 / 3.0_f64.sqrt()),
            ("1/4 + u*2", 0.75),
            ("-(u - 1)/3", 0.25),
            ("u", 0.25),
        ] {
            assert!((value(text, &names).unwrap() - want).abs() < 1e-15, "{text}");
        }
    }

    #[test]
    fn what_is_no_number_is_told() {
        let names = BTreeMap::from([("u".to_string(), 0.25)]);
        for (text, part) in [
            ("1/0", "no finite number"),
            ("sqrt(-1)", "no finite number"),
            ("1+", "character 3: expected a number, a parameter (u), `sqrt(` or `(`, found the end"),
            ("2x", "character 2: expected `+`, `-`, `*`, `/` or the end, found `x`"),
            ("v", "character 1"),
            ("(1", "expected `)`"),
            ("1..2", "`1..2` in `1..2` is no number"),
            ("é", "found `é`"),
            ("", "found the end"),
        ] {
            let error = value(text, &names).unwrap_err();
            assert!(error.contains(part), "{text}: {error}");
        }
        assert!(value(&"(".repeat(1000), &names).unwrap_err().contains("nests deeper"));
        assert!(value(&"-".repeat(100_000), &names).unwrap_err().contains("nests deeper"));
    }
}
