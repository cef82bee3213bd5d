//! Tokens of a CIF, one production one function, named as the grammars name them.
//!
//! CIF 1.1: International Tables for Crystallography G (2006), section 2.2.7.1, tables 2.2.7.1 (a) to (e). CIF 2.0: the
//! EBNF published with Bernstein et al., J. Appl. Cryst. 49, 277 (2016), doi:10.1107/S1600576715021871. A production that
//! both have under different names bears that of 2.0. Line ends are LF, CR or CRLF as they stand; VT and FF, which no
//! version allows, count as blanks (FF as a line end too), as CIF 1.0 had them.

use super::diagnostic::{Faults, Recovery};
use super::source::Version;
use super::value::Kind;
use crate::error::counted;
use nom::branch::alt;
use nom::bytes::complete::{tag, tag_no_case, take_till, take_till1};
use nom::character::complete::char;
use nom::combinator::{map, peek, recognize, rest, verify};
use nom::sequence::{preceded, terminated};
use nom::{IResult, Parser};

type Parsed<'s, T> = IResult<&'s str, T>;

/// What a token is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Class {
    /// `data_` and a code, which may be missing.
    DataHeading,
    /// `save_` and a code.
    SaveHeading,
    /// `save_` alone.
    SaveEnd,
    /// `loop_`.
    Loop,
    /// `global_` or `stop_`: reserved for STAR.
    Reserved,
    /// A data name, underscore included.
    Name,
    /// A value that is complete.
    Value(Kind),
    /// An unquoted word that begins, or in 2.0 contains, a character that no unquoted value may.
    Odd,
    /// `[` or `{` of CIF 2.0.
    Open,
    /// `]` or `}` inside a list or table of CIF 2.0.
    Close,
    /// The end of the text.
    End,
}

impl Class {
    /// Whether a value begins here.
    pub fn is_value(self) -> bool {
        matches!(self, Self::Value(_) | Self::Odd | Self::Open)
    }
}

/// A token: byte offsets of the whole, and of its text without delimiters.
#[derive(Clone, Copy, Debug)]
pub(super) struct Token {
    pub class: Class,
    pub start: usize,
    pub end: usize,
    pub from: usize,
    pub to: usize,
}

// ---- Characters -----------------------------------------------------------------------------------------------------

/// Whether a byte separates tokens.
pub(super) fn is_blank(b: u8) -> bool {
    matches!(b, b' ' | b'\t' | b'\n' | b'\r' | 0x0B | 0x0C)
}

/// Production `line-term`, byte by byte.
pub(super) fn is_line_end(b: u8) -> bool {
    matches!(b, b'\n' | b'\r' | 0x0C)
}

fn is_blank_char(c: char) -> bool {
    u8::try_from(c).is_ok_and(is_blank)
}

fn is_line_end_char(c: char) -> bool {
    u8::try_from(c).is_ok_and(is_line_end)
}

fn is_bracket(b: u8) -> bool {
    matches!(b, b'[' | b']' | b'{' | b'}')
}

// ---- Productions ----------------------------------------------------------------------------------------------------

/// `magic-code = '#\#CIF_2.0'`, followed by white space or the end (the byte order mark is gone already).
pub(super) fn magic_code(input: &str) -> Parsed<'_, &str> {
    terminated(tag("#\\#CIF_2.0"), end_of_word).parse(input)
}

/// `{ inline-wspace }` up to the line's end: all that may follow the magic code.
pub(super) fn rest_of_heading(input: &str) -> Parsed<'_, &str> {
    let line = |input| take_till(is_line_end_char).parse(input);
    map((magic_code, line), |(_, line): (_, &str)| line.trim_matches([' ', '\t'])).parse(input)
}

/// `wspace-any`: blanks, line ends and comments.
fn wspace_any(input: &str) -> Parsed<'_, &str> {
    let bytes = input.as_bytes();
    let mut at = 0;
    while let Some(&b) = bytes.get(at) {
        if is_blank(b) {
            at += 1;
        } else if b == b'#' {
            at += comment(&input[at..])?.1.len();
        } else {
            break;
        }
    }
    Ok((&input[at..], &input[..at]))
}

/// `comment = '#', { char }`.
fn comment(input: &str) -> Parsed<'_, &str> {
    recognize(preceded(char('#'), take_till(is_line_end_char))).parse(input)
}

/// `data-name = '_', non-blank-char, { non-blank-char }`; the second character is left to the caller to miss.
fn data_name(input: &str) -> Parsed<'_, &str> {
    recognize(preceded(char('_'), take_till(is_blank_char))).parse(input)
}

/// `data-heading = data-token, container-code`; the code is left to the caller to miss.
fn data_heading(input: &str) -> Parsed<'_, &str> {
    preceded(tag_no_case("data_"), container_code).parse(input)
}

/// `save-heading = save-token, container-code`; without a code it is the `save-token` that ends a frame.
fn save_heading(input: &str) -> Parsed<'_, &str> {
    preceded(tag_no_case("save_"), container_code).parse(input)
}

/// `container-code = non-blank-char, { non-blank-char }`.
fn container_code(input: &str) -> Parsed<'_, &str> {
    take_till(is_blank_char).parse(input)
}

/// `loop-token`.
fn loop_token(input: &str) -> Parsed<'_, &str> {
    terminated(tag_no_case("loop_"), end_of_word).parse(input)
}

/// `global-token` and `stop-token`.
fn reserved_token(input: &str) -> Parsed<'_, &str> {
    terminated(alt((tag_no_case("global_"), tag_no_case("stop_"))), end_of_word).parse(input)
}

fn end_of_word(input: &str) -> Parsed<'_, &str> {
    peek(alt((take_till1(|c| !is_blank_char(c)), verify(rest, |r: &str| r.is_empty())))).parse(input)
}

/// The words of table 2.2.7.1 (b), in any case, and what follows them without a blank.
fn keyword(input: &str) -> Parsed<'_, (Class, &str)> {
    let save = |code: &str| if code.is_empty() { Class::SaveEnd } else { Class::SaveHeading };
    alt((
        map(data_heading, |code| (Class::DataHeading, code)),
        map(save_heading, |code| (save(code), code)),
        map(loop_token, |word| (Class::Loop, word)),
        map(reserved_token, |word| (Class::Reserved, word)),
    ))
    .parse(input)
}

/// Length of an unquoted string: in 1.1, and in 2.0 outside lists and tables, it ends before a blank; inside them before
/// a bracket too (`wsdelim-string`).
fn length_of_word(bytes: &[u8], nested: bool) -> usize {
    let ends = |b: u8| is_blank(b) || (nested && is_bracket(b));
    bytes.iter().position(|b| ends(*b)).unwrap_or(bytes.len())
}

/// Bytes that neither end an unquoted word nor, being brackets, make it odd in 2.0.
const IS_PLAIN: [bool; 256] = {
    let mut plain = [true; 256];
    let ends = b" \t\n\r\x0B\x0C[]{}";
    let mut i = 0;
    while i < ends.len() {
        plain[ends[i] as usize] = false;
        i += 1;
    }
    plain
};

/// Bytes with which nothing but an unquoted value begins: no quote, name, comment, text field, and no keyword.
const LEADS_PLAIN_WORD: [bool; 256] = {
    let mut leads = IS_PLAIN;
    let others = b"_#$;'\"dDsSlLgG";
    let mut i = 0;
    while i < others.len() {
        leads[others[i] as usize] = false;
        i += 1;
    }
    leads
};

/// Characters of a word that a message shows.
const SHOWN: usize = 40;

/// First letters of the keywords: spares nearly all values the attempt to read one.
fn may_lead_keyword(b: u8) -> bool {
    matches!(b.to_ascii_lowercase(), b'd' | b's' | b'l' | b'g')
}

/// `line-term, ';'`: the content before it, and what follows; `None` if the field is not closed. `input` begins after
/// the opening semicolon.
fn text_content(input: &str) -> Option<(&str, &str)> {
    let bytes = input.as_bytes();
    let mut at = 0;
    loop {
        at += bytes[at..].iter().position(|b| *b == b';')?;
        if let Some(end) = at.checked_sub(1).filter(|i| is_line_end(bytes[*i])) {
            let crlf = bytes[end] == b'\n' && end > 0 && bytes[end - 1] == b'\r';
            return Some((&input[..end - usize::from(crlf)], &input[at + 1..]));
        }
        at += 1;
    }
}

/// Where a string in quotes closes, both counted from its opening quote.
enum Closing {
    /// The closing quote, by the rule of the version.
    At(usize),
    /// 2.0 alone: the string holds its own delimiter before this closing quote, as 1.1 allowed.
    Embedded(usize),
    /// The end of the line.
    Missing(usize),
}

/// `quoted-string`. In 1.1 (table 2.2.7.1 (d), paragraph 15) it ends at its delimiter followed by white space, in 2.0 at
/// its delimiter. `may_end` tells whether a string may end at an offset; `is_hopeless`, that none on this line may.
fn quoted_string(bytes: &[u8], mut may_end: impl FnMut(usize) -> bool, version: Version, is_hopeless: bool) -> Closing {
    let mut first = None;
    let mut at = 1;
    while let Some(&b) = bytes.get(at).filter(|b| !is_line_end(**b)) {
        if b == bytes[0] {
            match (may_end(at + 1), first) {
                (true, None) => return Closing::At(at),
                (true, Some(_)) if version == Version::Cif20 => return Closing::Embedded(at),
                (true, Some(_)) => return Closing::At(at),
                (false, _) if is_hopeless && version == Version::Cif20 => return Closing::At(at),
                (false, _) => first = first.or(Some(at)),
            }
        }
        at += 1;
    }
    match first {
        // No later delimiter is better: the string ends here, and something is glued to it.
        Some(first) if version == Version::Cif20 => Closing::At(first),
        _ => Closing::Missing(at),
    }
}

/// `triple-quoted-string`: length of its content; `None` if it is not closed.
fn triple_quoted_content(input: &str) -> Option<usize> {
    let delimiter = input.get(..3)?;
    input[3..].find(delimiter)
}

/// Whether three equal quotes open here.
fn opens_triple(bytes: &[u8]) -> bool {
    matches!(bytes, [a @ (b'\'' | b'"'), b, c, ..] if a == b && b == c)
}

// ---- The lexer ------------------------------------------------------------------------------------------------------

/// Gives the tokens of a text one after the other and collects what is wrong with them.
pub(super) struct Lexer<'s> {
    pub text: &'s str,
    /// Where the next token is looked for.
    pub at: usize,
    pub version: Version,
    /// How many lists and tables are open.
    pub depth: usize,
    /// Whether the next token is to be the key of a table.
    pub expects_key: bool,
    /// Where the line that was last asked for ends, and whether a text field begins after it: a line may hold many
    /// strings.
    line_end: Option<(usize, bool)>,
    /// By quote and surroundings: up to where no string can end by the rules, so that a long line is searched once.
    hopeless_before: [usize; 8],
    pub faults: Faults,
}

impl<'s> Lexer<'s> {
    pub fn new(text: &'s str, version: Version) -> Self {
        Self {
            text,
            at: 0,
            version,
            depth: 0,
            expects_key: false,
            line_end: None,
            hopeless_before: [0; 8],
            faults: Faults::default(),
        }
    }

    /// The next token.
    pub fn token(&mut self) -> Token {
        let before = self.at;
        if let Ok((rest, _)) = wspace_any(&self.text[before..]) {
            self.at = self.text.len() - rest.len();
        }
        let start = self.at;
        let bytes = self.text.as_bytes();
        let Some(&lead) = bytes.get(start) else {
            return Token { class: Class::End, start, end: start, from: start, to: start };
        };
        match lead {
            b'_' => self.name(start),
            b';' if start == 0 || is_line_end(bytes[start - 1]) => self.text_field(start),
            b'\'' | b'"' if self.version == Version::Cif20 && opens_triple(&bytes[start..]) => {
                self.triple_quoted(start)
            }
            b'\'' | b'"' => self.quoted(start),
            b'[' | b'{' if self.version == Version::Cif20 => self.bracket(Class::Open, start),
            b']' | b'}' if self.depth > 0 => self.bracket(Class::Close, start),
            _ => self.unquoted(start, lead),
        }
    }

    /// Unquoted words that can be nothing but values, one after the other, with their places: most of a long loop. Stops
    /// before any other token, which [`Self::token`] then takes. Outside lists and tables only.
    pub fn plain_words(&mut self, mut take: impl FnMut(usize, usize)) {
        let bytes = self.text.as_bytes();
        loop {
            let mut start = self.at;
            while bytes.get(start).is_some_and(|b| is_blank(*b)) {
                start += 1;
            }
            self.at = start;
            if !bytes.get(start).is_some_and(|b| LEADS_PLAIN_WORD[*b as usize]) {
                return;
            }
            let mut end = start + 1;
            while bytes.get(end).is_some_and(|b| IS_PLAIN[*b as usize]) {
                end += 1;
            }
            // A bracket is odd in 2.0: the word is left to the general way.
            if bytes.get(end).is_some_and(|b| !is_blank(*b)) {
                return;
            }
            take(start, end);
            self.at = end;
        }
    }

    fn finish(&mut self, class: Class, start: usize, end: usize, content: (usize, usize)) -> Token {
        self.at = end;
        Token { class, start, end, from: content.0, to: content.1 }
    }

    fn name(&mut self, start: usize) -> Token {
        let length = data_name(&self.text[start..]).map_or(1, |(_, name)| name.len());
        let end = start + length;
        if length == 1 {
            self.faults.push("cif::name", start..end, Recovery::Impossible, || {
                "`_` alone is no data name; at least one character must follow the underscore".to_owned()
            });
        }
        self.finish(Class::Name, start, end, (start, end))
    }

    fn bracket(&mut self, class: Class, start: usize) -> Token {
        if class == Class::Close {
            let (depth, expects_key) = (self.depth, self.expects_key);
            (self.depth, self.expects_key) = (depth - 1, false);
            self.check_glue(start + 1);
            (self.depth, self.expects_key) = (depth, expects_key);
        }
        self.finish(class, start, start + 1, (start, start + 1))
    }

    /// A keyword, or an unquoted value.
    fn unquoted(&mut self, start: usize, lead: u8) -> Token {
        // Outside lists brackets end no word: the word holds them and is odd.
        let nested = self.depth > 0;
        let length = length_of_word(&self.text.as_bytes()[start..], nested).max(1);
        let end = start + length;
        let word = &self.text[start..end];
        if may_lead_keyword(lead)
            && let Ok((_, (class, code))) = keyword(word)
        {
            return self.finish(class, start, end, (end - code.len(), end));
        }
        let is_odd = match self.version {
            Version::Cif11 => matches!(lead, b'[' | b']' | b'$'),
            Version::Cif20 => lead == b'$' || word.bytes().any(is_bracket),
        };
        if nested {
            self.check_glue(end);
        }
        self.finish(if is_odd { Class::Odd } else { Class::Value(Kind::Bare) }, start, end, (start, end))
    }

    fn quoted(&mut self, start: usize) -> Token {
        let bytes = &self.text.as_bytes()[start..];
        let class = Class::Value(Kind::Quoted);
        // What decides where a string may end.
        let rule = usize::from(bytes[0] == b'"') + 2 * usize::from(self.depth > 0) + 4 * usize::from(self.expects_key);
        let is_hopeless = self.hopeless_before[rule] > start;
        let version = self.version;
        match quoted_string(bytes, |at| self.may_follow(start + at), version, is_hopeless) {
            Closing::At(at) => {
                let end = start + at + 1;
                if version == Version::Cif20 && !is_hopeless && !self.may_follow(end) {
                    let line = bytes.iter().position(|b| is_line_end(*b));
                    self.hopeless_before[rule] = start + line.unwrap_or(bytes.len());
                }
                self.check_glue(end);
                self.finish(class, start, end, (start + 1, start + at))
            }
            Closing::Embedded(at) => {
                let end = start + at + 1;
                self.faults.push("cif::quote", start..end, Recovery::Assumed, || {
                    let quote = char::from(bytes[0]);
                    format!(
                        "a string in {quote} cannot hold {quote} in CIF 2.0; it is read as CIF 1.1 would, up to the \
                         {quote} before a blank"
                    )
                });
                self.finish(class, start, end, (start + 1, start + at))
            }
            Closing::Missing(at) => {
                let content = self.text[start + 1..start + at].trim_end();
                let to = start + 1 + content.len();
                self.faults.push("cif::quote", start..to, Recovery::Assumed, || {
                    let quote = char::from(bytes[0]);
                    format!("the {quote} is not closed on its line; the value is taken to end with the line")
                });
                self.finish(class, start, start + at, (start + 1, to))
            }
        }
    }

    fn triple_quoted(&mut self, start: usize) -> Token {
        let class = Class::Value(Kind::Triple);
        let from = start + 3;
        match triple_quoted_content(&self.text[start..]) {
            Some(length) => {
                let to = from + length;
                self.check_glue(to + 3);
                self.finish(class, start, to + 3, (from, to))
            }
            None => {
                let delimiter = &self.text[start..from];
                self.faults.push("cif::quote", start..from, Recovery::Impossible, || {
                    format!("the string opened here by {delimiter} is never closed; the rest of the file is inside it")
                });
                let end = self.text.len();
                self.finish(class, start, end, (from, end))
            }
        }
    }

    fn text_field(&mut self, start: usize) -> Token {
        let class = Class::Value(Kind::Text);
        let (text, from) = (self.text, start + 1);
        match text_content(&text[from..]) {
            Some((content, rest)) => {
                let end = text.len() - rest.len();
                self.check_glue(end);
                self.finish(class, start, end, (from, from + content.len()))
            }
            None => {
                self.faults.push("cif::text-field", start..from, Recovery::Impossible, || {
                    let mut message =
                        "the text field opened here is never closed by `;` in the first column; the rest \
                                       of the file is inside it"
                            .to_owned();
                    let indented = text[from..].lines().skip(1).position(|line| line.trim() == ";");
                    if let Some(lines) = indented {
                        message += &format!("; the `;` {} below is indented", counted(lines + 1, "line"));
                    }
                    message
                });
                let end = text.len();
                self.finish(class, start, end, (from, end))
            }
        }
    }

    /// Whether a value may end here: before white space; inside a list or table before a closing bracket, and after a
    /// key before its colon; in 2.0 before a comment too if a text field comes next (`wspace-data-value`).
    fn may_follow(&mut self, end: usize) -> bool {
        let rest = &self.text[end..];
        match rest.as_bytes().first() {
            None => true,
            Some(b) if is_blank(*b) => true,
            Some(b']' | b'}') => self.depth > 0,
            Some(b':') => self.expects_key,
            Some(b'#') => self.version == Version::Cif20 && self.comment_before_text_field(end),
            Some(_) => false,
        }
    }

    /// `[ comment ], text-field`, with a comment at an offset.
    fn comment_before_text_field(&mut self, at: usize) -> bool {
        if let Some((end, is_field)) = self.line_end.filter(|(end, _)| at <= *end) {
            return is_field && at < end;
        }
        let bytes = self.text.as_bytes();
        let end = bytes[at..].iter().position(|b| is_line_end(*b)).map_or(bytes.len(), |length| at + length);
        let after = bytes[end..].iter().position(|b| !is_line_end(*b));
        let is_field = after.is_some_and(|blank| blank > 0 && bytes[end + blank] == b';');
        self.line_end = Some((end, is_field));
        is_field
    }

    fn check_glue(&mut self, end: usize) {
        if !self.may_follow(end) {
            let rest = &self.text[end..];
            self.faults.push("cif::blank", end..end + 1, Recovery::Assumed, || {
                let word = &rest[..length_of_word(rest.as_bytes(), false)];
                let shown: String = word.chars().take(SHOWN).collect();
                let dots = if shown.len() < word.len() { "..." } else { "" };
                format!("a blank is missing before `{shown}{dots}`; a new value or name is taken to begin here")
            });
        }
    }
}
