//! What is wrong with a file, where, and what would mend it: the parser's errors in words for the user.

use std::fmt;

use ron::Error;
use ron::error::{Position, SpannedError};

use crate::project::limits;

/// Why a file was refused.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct ReadError {
    /// Line, counted from 1.
    pub line: usize,
    /// Character in the line, counted from 1.
    pub column: usize,
    /// What is the matter and what to do, in one sentence.
    pub text: String,
}

impl fmt::Display for ReadError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "line {}, column {}: {}", self.line, self.column, self.text)
    }
}

impl std::error::Error for ReadError {}

impl ReadError {
    /// The error that the parser met in `text`.
    pub(super) fn from_parser(error: &SpannedError, text: &str) -> Self {
        let Position { line, col } = place(error);
        let end = place_of_end(text);
        let words = if error.span.end == end && ends_early(&error.code) {
            "the file ends here, but it is not complete: close what is still open, or take a whole copy of it"
                .into()
        } else {
            words(&error.code)
        };
        ReadError { line, column: col, text: words }
    }

    /// An error right after the text that stands before it.
    pub(super) fn after(valid: &str, text: String) -> Self {
        let Position { line, col } = place_of_end(valid);
        ReadError { line, column: col, text }
    }
}

fn place_of_end(text: &str) -> Position {
    let line = 1 + text.bytes().filter(|&byte| byte == b'\n').count();
    let col = 1 + text.chars().rev().take_while(|&c| c != '\n').count();
    Position { line, col }
}

/// The parser gives the cursor before and after its last step. What is wrong with a token that was read lies before it;
/// what is missing, or not yet read, after it.
fn place(error: &SpannedError) -> Position {
    match error.code {
        Error::Message(_)
        | Error::InvalidValueForType { .. }
        | Error::NoSuchEnumVariant { .. }
        | Error::NoSuchStructField { .. }
        | Error::DuplicateStructField { .. }
        | Error::IntegerOutOfBounds
        | Error::NoSuchExtension(_) => error.span.start,
        _ => error.span.end,
    }
}

/// Whether this error, met at the end of the text, only means that the text is cut off.
fn ends_early(code: &Error) -> bool {
    !matches!(
        code,
        Error::Message(_)
            | Error::InvalidValueForType { .. }
            | Error::NoSuchEnumVariant { .. }
            | Error::NoSuchStructField { .. }
            | Error::DuplicateStructField { .. }
            | Error::IntegerOutOfBounds
    )
}

fn words(code: &Error) -> String {
    match code {
        Error::Message(text) => text.clone(),
        Error::ExpectedDifferentLength { expected, .. } => expected.clone(),
        Error::InvalidValueForType { expected, found } => format!("{expected} belongs here in place of {found}"),
        Error::NoSuchStructField { expected, found, .. } => {
            format!("there is no field {}: remove it, or write {}", quoted(found), one_of(expected))
        }
        Error::NoSuchEnumVariant { expected, found, .. } => {
            format!("{} cannot be chosen here: write {}", quoted(found), one_of(expected))
        }
        Error::MissingStructField { field: "format", .. } => {
            "the field `format` is missing: begin the project with `format: 1,`".into()
        }
        Error::MissingStructField { field, .. } => {
            format!("the field `{field}` is missing: add it before this bracket closes")
        }
        Error::DuplicateStructField { field, .. } => {
            format!("the field `{field}` stands here a second time: keep one of the two")
        }
        Error::ExpectedString => "a string belongs here: put the text in double quotes".into(),
        Error::ExpectedStringEnd => "this string has no end: close it with a double quote".into(),
        Error::InvalidEscape(_) => {
            "this is no escape: write \\\\ for a backslash, \\\" for a quote, \\n for a new line, \\u{..} for others".into()
        }
        Error::ExpectedArray => "a list belongs here: open it with `[`".into(),
        Error::ExpectedArrayEnd => "the list ends here: close it with `]`".into(),
        Error::ExpectedMap => "a map belongs here: open it with `{`, as in {\"01\": (\"row\", \"0\")}".into(),
        Error::ExpectedMapColon => "a colon is missing here: write one between the name and its value".into(),
        Error::ExpectedMapEnd => "the map ends here: close it with `}`".into(),
        Error::ExpectedStructLike | Error::ExpectedNamedStructLike(_) => {
            "a bracket belongs here: open it with `(`".into()
        }
        Error::ExpectedStructLikeEnd => {
            "the bracket should close here: write `)`, and remove values that are too many".into()
        }
        Error::ExpectedDifferentStructName { found, .. } => {
            format!("{} does not belong here: remove it and leave the bracket after it", quoted(found))
        }
        Error::ExpectedComma => "a comma or a closing bracket belongs here: write one, or remove what stands in its place".into(),
        Error::ExpectedInteger | Error::InvalidIntegerDigit { .. } => {
            "a whole number belongs here: write digits alone".into()
        }
        Error::IntegerOutOfBounds => "this number is too large: write a smaller one".into(),
        Error::ExpectedFloat | Error::FloatUnderscore | Error::UnderscoreAtBeginning => {
            "a number belongs here: write it as in 1.5".into()
        }
        Error::ExpectedBoolean => "write `true` or `false` here".into(),
        Error::ExpectedOption | Error::ExpectedOptionEnd => "write `None` or `Some(\"name\")` here".into(),
        Error::ExpectedIdentifier | Error::InvalidIdentifier(_) | Error::SuggestRawIdentifier(_) => {
            "a bare word belongs here: write it with letters, digits and underscores, without quotes".into()
        }
        Error::UnclosedBlockComment => "this comment has no end: close it with `*/`".into(),
        Error::UnexpectedChar(c) => format!("{} does not belong here: remove it", quoted(&c.to_string())),
        Error::TrailingCharacters => {
            "the project has ended before this: remove what follows, or the bracket that closes too early".into()
        }
        Error::ExceededRecursionLimit => {
            format!("brackets stand more than {} deep: remove the inner ones", limits::NESTING)
        }
        Error::NoSuchExtension(name) => format!("the extension {} is not known: remove it", quoted(name)),
        other => format!("this is not well-formed ({other}): mend it as RON"),
    }
}

/// A word of the file, short enough to show.
fn quoted(word: &str) -> String {
    const SHOWN: usize = 40;
    let mut shown: String = word.chars().take(SHOWN).flat_map(char::escape_debug).collect();
    if word.chars().nth(SHOWN).is_some() {
        shown.push_str("..");
    }
    format!("`{shown}`")
}

fn one_of(words: &[&str]) -> String {
    match words {
        [] => "nothing".into(),
        [word] => format!("`{word}`"),
        [words @ .., last] => {
            let words: Vec<String> = words.iter().map(|word| format!("`{word}`")).collect();
            format!("{} or `{last}`", words.join(", "))
        }
    }
}
