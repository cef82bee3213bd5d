//! From tokens to a document: one production one function, named as the grammars name them (see [`super::lexer`]).
//!
//! After a fault the parser goes on in the way that loses least, so that a strict reader hears of all faults and a lenient
//! one gets a document. Nothing recurses: lists and tables keep their own stack.

use super::characters::{check_characters, check_lines};
use super::diagnostic::{Diagnostic, Mode, Recovery, place};
use super::document::{Block, Document, Loop, Name};
use super::lexer::{Class, Lexer, Token, is_line_end, rest_of_heading};
use super::names::folded;
use super::nested::Nested;
use super::number::Number;
use super::source::{Source, Version};
use super::value::{Ground, Kind, Span, Value};
use crate::error::counted;
use std::borrow::Cow;
use std::collections::{HashMap, HashSet};

/// Longest data name of CIF 1.1, characters (file syntax, paragraph 29); 2.0 has no such limit.
pub const MAX_NAME: usize = 75;

/// Longest block or frame code of CIF 1.1, characters (file syntax, paragraph 30); 2.0 has no such limit.
pub const MAX_CODE: usize = 75;

/// Parses a whole file. Time is linear in its length.
///
/// # Errors
/// All faults in order of place. In [`Mode::Lenient`] those that can be understood in one way only are warnings of the
/// document instead; if any other is among them, the list holds both.
pub fn parse<'s>(source: &'s Source<'_>, mode: Mode) -> Result<Document<'s>, Vec<Diagnostic>> {
    let text = source.body();
    let mut parser = Parser::new(source);
    source.check(&mut parser.lexer.faults);
    check_characters(source, &mut parser.lexer.faults);
    check_lines(text, &mut parser.lexer.faults);
    parser.cif_file();
    let Parser { lexer, blocks, .. } = parser;
    let warnings = lexer.faults.finish(source.text(), mode)?;
    Ok(Document { source: source.text(), version: source.version(), blocks, warnings })
}

/// Where a name was used before.
struct Seen {
    offset: usize,
    /// Its index among the items outside loops, if it is one.
    pair: Option<usize>,
}

/// A data block or save frame that is being filled.
struct Container<'s> {
    block: Block<'s>,
    names: HashMap<Cow<'s, str>, Seen>,
    frame_codes: HashSet<String>,
}

impl<'s> Container<'s> {
    fn new(code: String, start: usize, ground: Ground<'s>) -> Self {
        Self { block: Block::new(code, start, ground), names: HashMap::new(), frame_codes: HashSet::new() }
    }
}

struct Parser<'s> {
    lexer: Lexer<'s>,
    /// The token to be looked at next.
    ahead: Token,
    /// Where the value last read ended.
    value_end: usize,
    stem: String,
    blocks: Vec<Block<'s>>,
    codes: HashSet<String>,
    /// For a code that was taken, the number to try next.
    next_number: HashMap<String, usize>,
    block: Option<Container<'s>>,
    frame: Option<Container<'s>>,
    /// Names and codes over their limits: the first, its kind and length, and how many.
    too_long: Option<(Token, &'static str, usize, usize)>,
    /// Before this offset no list of CIF 2.0 is looked for in a file of 1.1.
    no_list_before: usize,
}

impl<'s> Parser<'s> {
    fn new(source: &'s Source<'_>) -> Self {
        let mut lexer = Lexer::new(source.body(), source.version());
        let ahead = lexer.token();
        Self {
            lexer,
            ahead,
            value_end: 0,
            stem: source.stem(),
            blocks: Vec::new(),
            codes: HashSet::new(),
            next_number: HashMap::new(),
            block: None,
            frame: None,
            too_long: None,
            no_list_before: 0,
        }
    }

    fn ground(&self) -> Ground<'s> {
        Ground { text: self.lexer.text, version: self.lexer.version }
    }

    fn advance(&mut self) {
        self.ahead = self.lexer.token();
    }

    fn warn(&mut self, code: &'static str, token: Token, message: impl FnOnce() -> String) {
        self.lexer.faults.push(code, token.start..token.end, Recovery::Assumed, message);
    }

    fn refuse(&mut self, code: &'static str, token: Token, message: impl FnOnce() -> String) {
        self.lexer.faults.push(code, token.start..token.end, Recovery::Impossible, message);
    }

    /// A token as it stands, cut to what fits into a message.
    fn shown(&self, token: Token) -> String {
        let text: String = self.lexer.text[token.start..token.end].chars().take(40).collect();
        let line = text.split(['\n', '\r']).next().unwrap_or_default();
        if line.len() < token.end - token.start { format!("{line}...") } else { line.to_owned() }
    }

    fn line_of(&self, offset: usize) -> usize {
        place(self.lexer.text, offset).0
    }

    fn is_on_one_line(&self, from: usize, to: usize) -> bool {
        !self.lexer.text.as_bytes()[from..to].iter().any(|b| is_line_end(*b))
    }

    /// `CIF2-file`, and `CIF` of table 2.2.7.1 (a).
    fn cif_file(&mut self) {
        self.file_heading();
        while self.ahead.class != Class::End {
            match self.ahead.class {
                Class::DataHeading => self.data_heading(),
                Class::SaveHeading => self.save_heading(),
                Class::SaveEnd => self.save_end(),
                Class::Name => self.data_item(),
                Class::Loop => self.data_loop(),
                Class::Reserved => self.reserved(),
                _ => self.stray_values(),
            }
        }
        let end = self.lexer.text.len();
        self.end_of_block(end);
        if let Some((token, what, length, count)) = self.too_long {
            let limit = if what == "data name" { MAX_NAME } else { MAX_CODE };
            self.warn("cif::name-length", token, || {
                let more = if count > 1 { format!(" ({count} names and codes are too long)") } else { String::new() };
                format!("the {what} has {length} characters; CIF 1.1 allows {limit}{more}")
            });
        }
    }

    /// `file-heading`: nothing but blanks may follow the magic code on its line.
    fn file_heading(&mut self) {
        let text = self.lexer.text;
        if let Ok((rest, extra)) = rest_of_heading(text)
            && !extra.is_empty()
        {
            let end = text.len() - rest.len();
            self.lexer.faults.push("cif::magic-code", 0..end, Recovery::Assumed, || {
                "nothing but blanks may follow `#\\#CIF_2.0` on its line; the rest is taken as a comment".to_owned()
            });
        }
    }

    /// `data-heading`.
    fn data_heading(&mut self) {
        let token = self.ahead;
        self.end_of_block(token.start);
        let mut code = self.lexer.text[token.from..token.to].to_owned();
        if code.is_empty() {
            code = self.unused_code(&format!("block{}", self.blocks.len() + 1));
            self.warn("cif::block-code", token, || {
                format!("`data_` has no block code; the block is called `{code}` here")
            });
        }
        self.check_length(token, "block code", MAX_CODE);
        if !self.codes.insert(folded(&code).into_owned()) {
            let renamed = self.unused_code(&code);
            self.codes.insert(folded(&renamed).into_owned());
            self.warn("cif::block-code", token, || {
                format!(
                    "a block `{code}` stands before; codes must differ, case aside, and it is called `{renamed}` here"
                )
            });
            code = renamed;
        }
        self.block = Some(Container::new(code, token.start, self.ground()));
        self.advance();
    }

    /// `wanted`, with a number behind it if a block bears that code already.
    fn unused_code(&mut self, wanted: &str) -> String {
        if !self.codes.contains(folded(wanted).as_ref()) {
            return wanted.to_owned();
        }
        let number = self.next_number.entry(folded(wanted).into_owned()).or_insert(2);
        loop {
            let code = format!("{wanted}_{number}");
            *number += 1;
            if !self.codes.contains(folded(&code).as_ref()) {
                return code;
            }
        }
    }

    fn end_of_block(&mut self, end: usize) {
        if let Some(frame) = &self.frame {
            let (code, start) = (frame.block.code().to_owned(), frame.block.place());
            self.lexer.faults.push("cif::save-frame", start..start + 5, Recovery::Impossible, || {
                format!("the save frame `{code}` opened here is not closed by `save_`")
            });
            self.close_frame(end);
        }
        if let Some(mut container) = self.block.take() {
            container.block.close(end);
            self.blocks.push(container.block);
        }
    }

    /// The block or frame that the next item belongs to. A file that begins without `data_` gets a block of its name.
    fn container(&mut self, token: Token) -> &mut Container<'s> {
        if self.block.is_none() {
            let code = if self.stem.is_empty() { "block1".to_owned() } else { self.stem.clone() };
            self.warn("cif::no-block", token, || {
                format!("`data_` and a block code are missing before the first item; the block is called `{code}` here")
            });
            self.codes.insert(folded(&code).into_owned());
            self.block = Some(Container::new(code, token.start, self.ground()));
        }
        let (stem, ground) = (&self.stem, Ground { text: self.lexer.text, version: self.lexer.version });
        let block = self.block.get_or_insert_with(|| Container::new(stem.clone(), token.start, ground));
        self.frame.as_mut().unwrap_or(block)
    }

    /// `save-heading`.
    fn save_heading(&mut self) {
        let token = self.ahead;
        let code = self.lexer.text[token.from..token.to].to_owned();
        if let Some(open) = &self.frame {
            let open = open.block.code().to_owned();
            self.refuse("cif::save-frame", token, || {
                format!("save frame `{code}` begins inside save frame `{open}`; frames do not nest")
            });
            self.close_frame(token.start);
        }
        self.check_length(token, "frame code", MAX_CODE);
        let parent = self.container(token);
        if !parent.frame_codes.insert(folded(&code).into_owned()) {
            self.refuse("cif::save-frame", token, || {
                format!("a save frame `{code}` stands before in this block; codes must differ, case aside")
            });
        }
        self.frame = Some(Container::new(code, token.start, self.ground()));
        self.advance();
    }

    /// `save-token` at the end of a `save-frame`.
    fn save_end(&mut self) {
        let token = self.ahead;
        if self.frame.is_some() {
            self.close_frame(token.end);
        } else {
            self.refuse("cif::save-frame", token, || "`save_` ends a save frame, but none is open".to_owned());
        }
        self.advance();
    }

    fn close_frame(&mut self, end: usize) {
        if let (Some(mut frame), Some(parent)) = (self.frame.take(), &mut self.block) {
            frame.block.close(end);
            parent.block.frames.push(frame.block);
        }
    }

    /// `global-token` and `stop-token`.
    fn reserved(&mut self) {
        let token = self.ahead;
        let word = self.shown(token);
        self.refuse("cif::reserved", token, || {
            format!("`{word}` belongs to STAR files and is reserved in CIF; as a value it must be quoted")
        });
        self.advance();
    }

    /// `data`, its first alternative: a name and its value.
    fn data_item(&mut self) {
        let token = self.ahead;
        let name = Name { text: &self.lexer.text[token.start..token.end], place: token.start };
        self.check_length(token, "data name", MAX_NAME);
        self.container(token);
        self.advance();
        let value = if self.ahead.class.is_value() {
            let first = self.ahead;
            let span = self.value();
            if self.ahead.class.is_value() { self.rest_of_line(first, span) } else { span }
        } else {
            self.missing_value(token)
        };
        self.add_pair(name, token, value);
    }

    fn add_pair(&mut self, name: Name<'s>, token: Token, value: Span) {
        let ground = self.ground();
        let container = self.container(token);
        let pair = Some(container.block.pairs.names.len());
        match container.names.get(folded(name.text).as_ref()) {
            None => {
                container.names.insert(folded(name.text), Seen { offset: name.place, pair });
                container.block.pairs.names.push(name);
                container.block.pairs.values.push(value);
            }
            Some(&Seen { offset, pair }) => {
                let earlier = pair.map(|index| Value::new(ground, container.block.pairs.values[index]));
                let is_equal = earlier.is_some_and(|e| e.datum() == Value::new(ground, value).datum());
                let line = self.line_of(offset);
                let name = self.shown(token);
                if is_equal {
                    self.warn("cif::duplicate-name", token, || {
                        format!("`{name}` stands on line {line} already, with the same value; it is taken once")
                    });
                } else {
                    self.refuse("cif::duplicate-name", token, || {
                        format!("`{name}` stands on line {line} already, with another value; a block has a name once")
                    });
                }
            }
        }
    }

    /// A name that no value follows.
    fn missing_value(&mut self, name: Token) -> Span {
        let next = self.ahead;
        let shown = self.shown(name);
        let is_word = matches!(next.class, Class::DataHeading | Class::SaveHeading | Class::SaveEnd | Class::Loop);
        if (is_word || next.class == Class::Reserved) && self.is_on_one_line(name.end, next.start) {
            let word = self.shown(next);
            self.refuse("cif::reserved", next, || {
                format!("`{word}` is a reserved word; as the value of `{shown}` it must be quoted")
            });
            self.advance();
            return Span::new(Kind::Bare, next.start, next.end);
        }
        self.warn("cif::no-value", name, || format!("`{shown}` has no value; it is taken as `?`, not known"));
        Span::new(Kind::Missing, name.end, name.end)
    }

    /// Further values on the line of an item: a text with blanks that was not quoted, if the line ends with it.
    fn rest_of_line(&mut self, first: Token, span: Span) -> Span {
        let (text, second) = (self.lexer.text, self.ahead);
        let is_bare = Value::new(self.ground(), span).kind() == Kind::Bare;
        if !is_bare || !self.is_on_one_line(self.value_end, second.start) {
            return span;
        }
        let is_number = |from: usize, to: usize| Number::parse(&text[from..to]).is_some();
        let mut all_numbers = is_number(first.start, first.end);
        while self.ahead.class.is_value() && self.is_on_one_line(self.value_end, self.ahead.start) {
            let start = self.ahead.start;
            self.value();
            all_numbers &= is_number(start, self.value_end);
        }
        let end = self.value_end;
        let is_over = self.ahead.class == Class::End
            || !self.ahead.class.is_value() && !self.is_on_one_line(end, self.ahead.start);
        if all_numbers || !is_over {
            self.report_stray(Token { end, ..second });
            return span;
        }
        let whole = Token { end, ..first };
        let shown = self.shown(whole);
        self.warn("cif::unquoted", whole, || {
            format!("a value with blanks must be quoted; the rest of the line is taken as one value, `{shown}`")
        });
        Span::new(Kind::Bare, first.start, end)
    }

    /// Values without a name.
    fn stray_values(&mut self) {
        let first = self.ahead;
        while self.ahead.class.is_value() {
            self.value();
        }
        if self.ahead.start == first.start {
            // No value either: a bracket that closes nothing cannot stand here, but the parser must not either.
            self.advance();
        }
        self.report_stray(Token { end: self.value_end.max(first.end), ..first });
    }

    fn report_stray(&mut self, token: Token) {
        let shown = self.shown(token);
        self.refuse("cif::stray-value", token, || {
            format!("`{shown}` belongs to no data name; a text with blanks must be quoted")
        });
    }

    /// `data-loop`, or `LoopHeader` and `LoopBody` of table 2.2.7.1 (a).
    fn data_loop(&mut self) {
        let token = self.ahead;
        self.container(token);
        self.advance();
        let mut found = Loop::new(self.ground(), token.start);
        while self.ahead.class == Class::Name {
            self.name_of_column(&mut found);
        }
        while self.ahead.class.is_value() {
            let span = self.value_ahead();
            found.values.push(span);
            self.lexer.plain_words(|from, to| found.values.push(Span::new(Kind::Bare, from, to)));
            self.advance();
        }
        self.check_loop(token, &mut found);
        if !found.names.is_empty() {
            self.container(token).block.loops.push(found);
        }
    }

    fn name_of_column(&mut self, found: &mut Loop<'s>) {
        let token = self.ahead;
        let name = Name { text: &self.lexer.text[token.start..token.end], place: token.start };
        self.check_length(token, "data name", MAX_NAME);
        let container = self.container(token);
        let seen = Seen { offset: name.place, pair: None };
        if let Some(Seen { offset, .. }) = container.names.insert(folded(name.text), seen) {
            let line = self.line_of(offset);
            self.refuse("cif::duplicate-name", token, || {
                format!("`{}` stands on line {line} already; a block has a name once, in or out of a loop", name.text)
            });
        }
        found.names.push(name);
        self.advance();
    }

    /// The numbers of names and values; a loop that has none or too few is cut to its whole rows.
    fn check_loop(&mut self, token: Token, found: &mut Loop<'s>) {
        let (names, values) = (found.names.len(), found.values.len());
        if names == 0 {
            let what = match self.ahead.class {
                Class::Loop if values == 0 => "another `loop_`; nested loops belong to STAR files",
                _ if values > 0 => "values; the names of the columns must come first",
                _ => "nothing that belongs to it",
            };
            self.refuse("cif::loop", token, || format!("`loop_` is followed by {what}"));
            found.values.clear();
        } else if values == 0 && self.ahead.class == Class::Loop {
            self.refuse("cif::loop", token, || {
                "another `loop_` follows the names of this loop before any value; nested loops belong to STAR files, \
                 and a loop without values must be left out"
                    .to_owned()
            });
        } else if values == 0 {
            self.warn("cif::loop", token, || {
                format!(
                    "this loop has {} and no values, which must be left out; it is taken as no rows",
                    counted(names, "name")
                )
            });
        } else if values % names != 0 {
            self.refuse_ragged(token, found);
            found.values.truncate(values - values % names);
        }
    }

    fn refuse_ragged(&mut self, token: Token, found: &Loop<'s>) {
        let (names, values) = (found.names.len(), found.values.len());
        let (rows, over) = (values / names, values % names);
        let odd = self.first_odd_row(found).unwrap_or(rows);
        let place = Value::new(self.ground(), found.values[odd * names]).place();
        let line = self.line_of(token.start);
        let at_end = if self.ahead.class == Class::End { "; the file ends inside the loop" } else { "" };
        let token = Token { start: place, end: place + 1, ..token };
        self.refuse("cif::loop", token, || {
            format!(
                "the loop on line {line} has {} and {}: {} and {over} over; row {} does not come out{at_end}",
                counted(names, "name"),
                counted(values, "value"),
                counted(rows, "whole row"),
                odd + 1
            )
        });
    }

    /// Where each row has a line of its own, the first row that does not fill its line.
    fn first_odd_row(&self, found: &Loop<'s>) -> Option<usize> {
        let names = found.names.len();
        let place = |index: usize| found.values.get(index).map(|span| Value::new(self.ground(), *span).place());
        let fills_its_line = |row: usize| {
            let (first, next) = (row * names, (row + 1) * names);
            let Some((from, to)) = place(first).zip(place(next - 1)) else { return false };
            self.is_on_one_line(from, to) && place(next).is_none_or(|next| !self.is_on_one_line(to, next))
        };
        let rows = found.values.len().div_ceil(names);
        if !fills_its_line(0) {
            return None;
        }
        (1..rows).find(|row| !fills_its_line(*row))
    }

    /// `data-value`, whatever stands before it. Call it only where a value begins.
    fn value(&mut self) -> Span {
        let span = self.value_ahead();
        self.advance();
        span
    }

    /// The value that begins with the token ahead, which stays ahead.
    fn value_ahead(&mut self) -> Span {
        let token = self.ahead;
        let span = match token.class {
            Class::Value(kind) => Span::new(kind, token.from, token.to),
            Class::Open => Nested::read(&mut self.lexer, token).span,
            _ => self.odd_value(token),
        };
        self.value_end = self.lexer.at;
        span
    }

    /// An unquoted word with a character that it may not have, or a list of CIF 2.0 in a file of 1.1.
    fn odd_value(&mut self, token: Token) -> Span {
        let shown = self.shown(token);
        if let Some(end) = self.list_of_cif_2(token) {
            let list = Token { end, ..token };
            self.warn("cif::list", list, || {
                "lists in brackets belong to CIF 2.0, and the file does not begin with `#\\#CIF_2.0`; it is read as a \
                 list"
                    .to_owned()
            });
            self.lexer.at = end;
            return Span::new(Kind::List, token.start, end);
        }
        let rule = match self.lexer.version {
            Version::Cif11 => "an unquoted value cannot begin with `[`, `]` or `$`",
            Version::Cif20 => "an unquoted value of CIF 2.0 cannot begin with `$` nor hold a bracket or brace",
        };
        self.warn("cif::unquoted", token, || format!("`{shown}` must be quoted: {rule}; it is taken as text"));
        Span::new(Kind::Bare, token.start, token.end)
    }

    /// In a file of 1.1, the end of what reads as a list of 2.0 with a blank in it, all on one line.
    fn list_of_cif_2(&mut self, token: Token) -> Option<usize> {
        let text = self.lexer.text;
        let is_bracket = text[token.start..].starts_with('[');
        if self.lexer.version == Version::Cif20 || !is_bracket || token.start < self.no_list_before {
            return None;
        }
        let line = text[token.start..].bytes().position(is_line_end);
        let line_end = line.map_or(text.len(), |length| token.start + length);
        let mut lexer = Lexer::new(&text[..line_end], Version::Cif20);
        lexer.at = token.start;
        let open = lexer.token();
        Nested::read(&mut lexer, open);
        if lexer.faults.is_empty() {
            return Some(lexer.at).filter(|end| *end > token.end);
        }
        self.no_list_before = line_end;
        None
    }

    /// The limit of 75 characters, which 1.1 alone has; reported once at the end.
    fn check_length(&mut self, token: Token, what: &'static str, limit: usize) {
        if token.to - token.from <= limit || self.lexer.version == Version::Cif20 {
            return;
        }
        let length = self.lexer.text[token.from..token.to].chars().count();
        if length > limit {
            let count = self.too_long.map_or(0, |(.., count)| count) + 1;
            let (first, what, length, _) = self.too_long.unwrap_or((token, what, length, 0));
            self.too_long = Some((first, what, length, count));
        }
    }
}
