//! Lists and tables of CIF 2.0: productions `list`, `table` and `table-entry`, on a stack of their own.

use super::diagnostic::Recovery;
use super::lexer::{Class, Lexer, Token};
use super::value::{Kind, Span};

/// Deepest nesting of lists and tables.
pub const MAX_NESTING: usize = 500;

/// A list or table that was read.
pub(super) struct Nested {
    /// From bracket to bracket.
    pub span: Span,
    /// Values one level inside; of a table keys and values in turn.
    pub members: Vec<Span>,
}

/// What comes next in a list or table.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Awaits {
    /// In a list.
    Member,
    /// In a table, or its end.
    Key,
    /// In a table after a key.
    Value,
}

/// A list or table that is open.
#[derive(Clone, Copy, Debug)]
struct Level {
    start: usize,
    kind: Kind,
    awaits: Awaits,
}

struct Reader<'l, 's> {
    lexer: &'l mut Lexer<'s>,
    stack: Vec<Level>,
    members: Vec<Span>,
}

impl Nested {
    /// Reads what the bracket `open`, just taken from the lexer, begins; faults go to the lexer, which is left after the
    /// closing bracket, or before what cannot stand inside.
    pub fn read(lexer: &mut Lexer<'_>, open: Token) -> Self {
        let mut reader = Reader { lexer, stack: Vec::new(), members: Vec::new() };
        reader.open(open);
        let kind = reader.stack.first().map_or(Kind::List, |level| level.kind);
        while let Some(&level) = reader.stack.last() {
            reader.lexer.depth = reader.stack.len();
            reader.lexer.expects_key = level.awaits == Awaits::Key;
            let token = reader.lexer.token();
            match token.class {
                Class::Close => reader.close(token, level),
                Class::Value(_) | Class::Odd | Class::Open if level.awaits == Awaits::Key => reader.key(token),
                Class::Open => reader.open(token),
                Class::Value(_) | Class::Odd => reader.member(token),
                Class::Loop | Class::Reserved | Class::SaveEnd | Class::DataHeading | Class::SaveHeading
                    if reader.is_before_bracket(token) =>
                {
                    reader.reserved(token);
                }
                _ => reader.unclosed(token),
            }
        }
        reader.lexer.depth = 0;
        reader.lexer.expects_key = false;
        Self { span: Span::new(kind, open.start, reader.lexer.at), members: reader.members }
    }
}

impl Reader<'_, '_> {
    fn shown(&self, token: Token) -> String {
        self.lexer.text[token.start..token.end].chars().take(40).collect()
    }

    fn refuse(&mut self, code: &'static str, token: Token, message: impl FnOnce() -> String) {
        self.lexer.faults.push(code, token.start..token.end, Recovery::Impossible, message);
    }

    /// A value of the outermost level; its table then awaits a key again.
    fn add(&mut self, span: Span) {
        if self.stack.len() == 1 {
            self.members.push(span);
        }
        if let Some(level) = self.stack.last_mut().filter(|level| level.awaits == Awaits::Value) {
            level.awaits = Awaits::Key;
        }
    }

    fn open(&mut self, token: Token) {
        if self.stack.len() == MAX_NESTING {
            self.refuse("cif::list", token, || format!("lists and tables are nested deeper than {MAX_NESTING} levels"));
        }
        let is_table = self.shown(token) == "{";
        let (kind, awaits) = if is_table { (Kind::Table, Awaits::Key) } else { (Kind::List, Awaits::Member) };
        self.stack.push(Level { start: token.start, kind, awaits });
    }

    fn close(&mut self, token: Token, level: Level) {
        let closing = self.shown(token);
        if (closing == "}") != (level.kind == Kind::Table) {
            self.refuse("cif::list", token, || {
                let (left, right) = if level.kind == Kind::Table { ('{', '}') } else { ('[', ']') };
                format!("`{closing}` cannot close what `{left}` opened; it must be `{right}`")
            });
        } else if level.awaits == Awaits::Value {
            self.refuse("cif::table", token, || "the last key of the table has no value".to_owned());
            self.add(Span::new(Kind::Missing, token.start, token.start));
        }
        self.stack.pop();
        if !self.stack.is_empty() {
            self.add(Span::new(level.kind, level.start, token.end));
        }
    }

    /// `table-entry`: the key and its colon.
    fn key(&mut self, token: Token) {
        let shown = self.shown(token);
        let Class::Value(kind @ (Kind::Quoted | Kind::Triple)) = token.class else {
            self.refuse("cif::table", token, || {
                format!("`{shown}` cannot be the key of a table; a key is a string in quotes, followed by a colon")
            });
            if token.class == Class::Open {
                // Passed over as a whole.
                self.open(token);
            }
            return;
        };
        if self.stack.len() == 1 {
            self.members.push(Span::new(kind, token.from, token.to));
        }
        if let Some(level) = self.stack.last_mut() {
            level.awaits = Awaits::Value;
        }
        let after_key = &self.lexer.text[self.lexer.at..];
        let after_blanks = after_key.trim_start_matches([' ', '\t', '\r', '\n']);
        if !after_blanks.starts_with(':') {
            self.refuse("cif::table", token, || format!("the key {shown} is not followed by a colon and a value"));
            return;
        }
        let blanks = after_key.len() - after_blanks.len();
        if blanks > 0 {
            self.lexer.faults.push("cif::table", token.start..token.end, Recovery::Assumed, || {
                format!("blanks stand between the key {shown} and its colon; they are passed over")
            });
        }
        self.lexer.at += blanks + 1;
    }

    fn member(&mut self, token: Token) {
        let mut kind = Kind::Bare;
        if let Class::Value(delimited) = token.class {
            kind = delimited;
        } else {
            let shown = self.shown(token);
            self.lexer.faults.push("cif::unquoted", token.start..token.end, Recovery::Assumed, || {
                format!("`{shown}` begins like a reference to a save frame and must be quoted; it is taken as text")
            });
        }
        self.add(Span::new(kind, token.from, token.to));
    }

    fn is_before_bracket(&self, token: Token) -> bool {
        matches!(self.lexer.text.as_bytes().get(token.end), Some(b'[' | b']' | b'{' | b'}'))
    }

    /// A keyword as a member, kept as a value.
    fn reserved(&mut self, token: Token) {
        let word = self.shown(token);
        self.refuse("cif::reserved", token, || {
            format!("`{word}` is a reserved word; as a member of a list or table it must be quoted")
        });
        self.add(Span::new(Kind::Bare, token.start, token.end));
    }

    /// A name, keyword or the end of the file where a bracket should be.
    fn unclosed(&mut self, token: Token) {
        if let Some(&Level { start, kind, .. }) = self.stack.first() {
            let open = Token { start, end: start + 1, ..token };
            let what = if kind == Kind::Table { "table" } else { "list" };
            let before = match token.class {
                Class::End => "the end of the file".to_owned(),
                _ => format!("`{}`", self.shown(token)),
            };
            self.refuse("cif::list", open, || format!("the {what} opened here is not closed before {before}"));
        }
        self.stack.clear();
        self.lexer.at = token.start;
    }
}
