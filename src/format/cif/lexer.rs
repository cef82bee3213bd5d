//! Tokens of a CIF, one production one function, named as the grammar names them.
//!
//! International Tables G (2006), section 2.2.7.1, tables 2.2.7.1 (a) to (e). Line ends are LF here; the document turns CR
//! and CRLF into it beforehand. Relaxed against the letter of the standard: characters beyond ASCII are taken as text.

use nom::branch::alt;
use nom::bytes::complete::{tag_no_case, take_till, take_till1, take_while1};
use nom::character::complete::char;
use nom::combinator::{map, peek, recognize, rest, verify};
use nom::multi::many0_count;
use nom::sequence::{preceded, terminated};
use nom::{IResult, Parser};

/// What a token is; texts are without their delimiters.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Token<'s> {
    /// `data_` and the block's code.
    DataHeading(&'s str),
    /// `save_` and the frame's code; empty at the frame's end.
    SaveHeading(&'s str),
    /// `loop_`.
    Loop,
    /// A reserved word that CIF does not use: `global_` or `stop_`.
    Reserved(&'s str),
    /// A data name, underscore included.
    Name(&'s str),
    /// An unquoted value.
    Bare(&'s str),
    /// A value in quotes.
    Quoted(&'s str),
    /// A text field, from after the opening semicolon to before the closing line end.
    Text(&'s str),
}

/// A fault: the rest of the input where it lies, and the sentence.
pub struct Fault<'s> {
    /// Input from the fault on.
    pub at: &'s str,
    /// What is wrong.
    pub message: &'static str,
}

type Parsed<'s, T> = IResult<&'s str, T>;

/// The next token after white space and comments; `None` at the end. `line_start` says whether the input begins a line,
/// since a semicolon opens a text field only there.
///
/// # Errors
/// [`Fault`] for an unclosed quote or text field, or a character that begins no token.
pub fn token<'s>(input: &'s str, line_start: bool) -> Result<Option<(&'s str, Token<'s>, &'s str)>, Fault<'s>> {
    let (start, blank) = white_space(input).unwrap_or((input, ""));
    if start.is_empty() {
        return Ok(None);
    }
    let at_line_start = if blank.is_empty() { line_start } else { blank.ends_with('\n') };
    let parsed = match start.as_bytes()[0] {
        b';' if at_line_start => return text_field(start).map(Some),
        quote @ (b'\'' | b'"') => match quoted(start, char::from(quote)) {
            Ok((rest, text)) => Ok((rest, Token::Quoted(text))),
            Err(_) => return Err(Fault { at: start, message: "the quote is not closed on its line" }),
        },
        _ => alt((data_name, keyword, bare)).parse(start),
    };
    match parsed {
        Ok((rest, token)) => Ok(Some((rest, token, start))),
        Err(_) => Err(Fault { at: start, message: "this character begins no value; quote it" }),
    }
}

/// Blanks, line ends and comments.
fn white_space(input: &str) -> Parsed<'_, &str> {
    recognize(many0_count(alt((take_while1(is_blank), comment)))).parse(input)
}

fn comment(input: &str) -> Parsed<'_, &str> {
    recognize((char('#'), take_till(|c| c == '\n'))).parse(input)
}

fn is_blank(c: char) -> bool {
    matches!(c, ' ' | '\t' | '\n')
}

fn data_name(input: &str) -> Parsed<'_, Token<'_>> {
    map(recognize((char('_'), take_till1(is_blank))), Token::Name).parse(input)
}

/// Reserved words, in any case: table 2.2.7.1 (b).
fn keyword(input: &str) -> Parsed<'_, Token<'_>> {
    let code = |input| take_till(is_blank).parse(input);
    alt((
        map(preceded(tag_no_case("data_"), code), Token::DataHeading),
        map(preceded(tag_no_case("save_"), code), Token::SaveHeading),
        map(terminated(tag_no_case("loop_"), end_of_word), |_| Token::Loop),
        map(terminated(alt((tag_no_case("global_"), tag_no_case("stop_"))), end_of_word), Token::Reserved),
    ))
    .parse(input)
}

fn end_of_word(input: &str) -> Parsed<'_, &str> {
    peek(alt((take_while1(is_blank), verify(rest, |r: &str| r.is_empty())))).parse(input)
}

/// An unquoted value: table 2.2.7.1 (d). `[`, `]` and `$` cannot begin one.
fn bare(input: &str) -> Parsed<'_, Token<'_>> {
    let word = take_till1(is_blank);
    map(verify(word, |w: &str| !w.starts_with(['[', ']', '$', '#', '_'])), Token::Bare).parse(input)
}

/// A quoted value ends at its quote followed by a blank or the end of the line; a quote inside a word stays text.
fn quoted(input: &str, quote: char) -> Parsed<'_, &str> {
    let (body, _) = char(quote).parse(input)?;
    let line = body.split('\n').next().unwrap_or_default();
    let closing = line
        .char_indices()
        .filter(|(_, c)| *c == quote)
        .map(|(at, _)| at)
        .find(|at| line[at + 1..].chars().next().is_none_or(is_blank));
    match closing {
        Some(at) => Ok((&body[at + 1..], &body[..at])),
        None => Err(nom::Err::Error(nom::error::Error::new(input, nom::error::ErrorKind::Char))),
    }
}

/// `;` in column 1 to the next `;` in column 1: table 2.2.7.1 (e).
fn text_field(start: &str) -> Result<(&str, Token<'_>, &str), Fault<'_>> {
    let body = start.strip_prefix(';').unwrap_or(start);
    if let Some(rest) = body.strip_prefix("\n;") {
        return Ok((rest, Token::Text(""), start));
    }
    match body.find("\n;") {
        Some(at) => Ok((&body[at + 2..], Token::Text(&body[..at]), start)),
        None => {
            Err(Fault { at: start, message: "the text field opened here is not closed by `;` at the start of a line" })
        }
    }
}
