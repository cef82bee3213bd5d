//! A value where it stands in the text, and what it says.

use super::lexer::Lexer;
use super::nested::{MAX_NESTING, Nested};
use super::number::Number;
use super::protocol::{decoded, line_ends_as_lf};
use super::source::Version;
use std::borrow::Cow;

/// How a value is delimited.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kind {
    /// By white space.
    Bare,
    /// By `'` or `"`.
    Quoted,
    /// By three of them (2.0).
    Triple,
    /// By `;` in the first column.
    Text,
    /// By `[` and `]` (2.0).
    List,
    /// By `{` and `}` (2.0).
    Table,
    /// There is none: an item without value, read as `?`.
    Missing,
}

/// Where a value's content stands and how it is delimited, in 8 bytes: long loops hold millions of them.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Span {
    from: u32,
    /// Length, and the kind in the last three bits. Sources are shorter than 2^29 bytes.
    packed: u32,
}

impl Span {
    pub fn new(kind: Kind, from: usize, to: usize) -> Self {
        Self { from: from as u32, packed: ((to - from) as u32) << 3 | kind as u32 }
    }

    fn kind(self) -> Kind {
        match self.packed & 7 {
            0 => Kind::Bare,
            1 => Kind::Quoted,
            2 => Kind::Triple,
            3 => Kind::Text,
            4 => Kind::List,
            5 => Kind::Table,
            _ => Kind::Missing,
        }
    }

    fn range(self) -> std::ops::Range<usize> {
        let from = self.from as usize;
        from..from + (self.packed >> 3) as usize
    }
}

/// The text that values refer to, and its version.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Ground<'s> {
    pub text: &'s str,
    pub version: Version,
}

/// A value.
#[derive(Clone, Copy, Debug)]
pub struct Value<'s> {
    ground: Ground<'s>,
    span: Span,
}

/// What a value says, apart from how it is delimited.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Datum {
    /// A bare `?`: not known.
    Unknown,
    /// A bare `.`: does not apply.
    Inapplicable,
    /// A number, as written.
    Number(String),
    /// A text; a number in quotes is one.
    Text(String),
    /// A list (2.0).
    List(Vec<Datum>),
    /// A table of keys and values (2.0), in order.
    Table(Vec<(String, Datum)>),
}

impl<'s> Value<'s> {
    pub(super) fn new(ground: Ground<'s>, span: Span) -> Self {
        Self { ground, span }
    }

    /// How it is delimited.
    pub fn kind(&self) -> Kind {
        self.span.kind()
    }

    /// What stands between the delimiters.
    pub fn raw(&self) -> &'s str {
        &self.ground.text[self.span.range()]
    }

    /// The text that the value stands for: without delimiters, unfolded, without prefixes, line ends as LF. Of a list or
    /// table, the source.
    pub fn text(&self) -> Cow<'s, str> {
        match self.kind() {
            Kind::Text => decoded(self.raw(), self.ground.version),
            Kind::Triple => line_ends_as_lf(self.raw()),
            Kind::Missing => Cow::Borrowed("?"),
            _ => Cow::Borrowed(self.raw()),
        }
    }

    /// Byte offset of its first character, delimiters included.
    pub fn place(&self) -> usize {
        let delimiter = match self.kind() {
            Kind::Quoted | Kind::Text => 1,
            Kind::Triple => 3,
            _ => 0,
        };
        self.span.range().start - delimiter
    }

    /// A bare `?`: not known. So is the value of an item that has none.
    pub fn is_unknown(&self) -> bool {
        self.kind() == Kind::Missing || self.kind() == Kind::Bare && self.raw() == "?"
    }

    /// A bare `.`: does not apply.
    pub fn is_inapplicable(&self) -> bool {
        self.kind() == Kind::Bare && self.raw() == "."
    }

    /// The number that the value writes. One in quotes counts, since only a dictionary can tell whether it is one
    /// (common semantic features, paragraphs 15 and 17); [`Value::datum`] takes it for text.
    pub fn number(&self) -> Option<Number<'s>> {
        match self.kind() {
            Kind::Bare | Kind::Quoted | Kind::Triple => Number::parse(self.raw()),
            _ => None,
        }
    }

    /// The members of a list.
    pub fn list(&self) -> Option<Vec<Self>> {
        (self.kind() == Kind::List).then(|| self.members())
    }

    /// Keys and values of a table, in order.
    pub fn table(&self) -> Option<Vec<(Self, Self)>> {
        (self.kind() == Kind::Table).then(|| self.members().chunks_exact(2).map(|pair| (pair[0], pair[1])).collect())
    }

    /// What the value says. Members deeper than [`MAX_NESTING`] are left out.
    pub fn datum(&self) -> Datum {
        self.datum_within(MAX_NESTING)
    }

    fn datum_within(&self, depth: usize) -> Datum {
        let inner = |value: &Self| value.datum_within(depth - 1);
        match self.kind() {
            Kind::Missing => Datum::Unknown,
            Kind::Bare if self.is_unknown() => Datum::Unknown,
            Kind::Bare if self.is_inapplicable() => Datum::Inapplicable,
            Kind::Bare if self.number().is_some() => Datum::Number(self.raw().to_owned()),
            Kind::List | Kind::Table if depth == 0 => Datum::List(Vec::new()),
            Kind::List => Datum::List(self.members().iter().map(inner).collect()),
            Kind::Table => {
                let pairs = self.table().unwrap_or_default();
                Datum::Table(pairs.iter().map(|(key, value)| (key.text().into_owned(), inner(value))).collect())
            }
            _ => Datum::Text(self.text().into_owned()),
        }
    }

    /// Values one level inside the brackets; of a table keys and values in turn.
    fn members(&self) -> Vec<Self> {
        let range = self.span.range();
        let mut lexer = Lexer::new(&self.ground.text[..range.end], Version::Cif20);
        lexer.at = range.start;
        let open = lexer.token();
        let members = Nested::read(&mut lexer, open).members;
        members.into_iter().map(|span| Self::new(self.ground, span)).collect()
    }
}
