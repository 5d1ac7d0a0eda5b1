//! Why: the reason for any item of a design, in one or two plain sentences with links to what causes it.
//!
//! Each derived value keeps the ids that it came from, so an explanation is a look-up, not a computation: the cost is that of
//! the sentences. The window's why pane shows them; nothing here knows of a screen.

mod behaviour;
mod codes;
mod equations;
pub mod figures;
pub mod links;
mod merging;

use crate::base::Finding;
use crate::design::values::{Design, Pick};

/// A piece of a sentence.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Piece {
    /// Plain text.
    Text(String),
    /// Text that selects something.
    Link(String, Pick),
}

/// A sentence.
pub type Sentence = Vec<Piece>;

/// An explanation.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Why {
    /// What is explained.
    pub title: String,
    /// The reasons, in order.
    pub sentences: Vec<Sentence>,
}

impl Why {
    fn titled(title: impl Into<String>) -> Self {
        Why { title: title.into(), sentences: Vec::new() }
    }

    /// All sentences as plain text, for tests and screen readers.
    pub fn plain(&self) -> String {
        let piece = |p: &Piece| match p {
            Piece::Text(text) | Piece::Link(text, _) => text.clone(),
        };
        self.sentences.iter().map(|s| s.iter().map(piece).collect::<String>()).collect::<Vec<_>>().join(" ")
    }
}

/// Explains `pick` in `design`. `None` where the stage that it belongs to has no result, or the item is gone.
pub fn why(design: &Design, pick: Pick) -> Option<Why> {
    match pick {
        Pick::Row(row) => behaviour::row(design, row),
        Pick::Cell(row, column) => behaviour::cell(design, row, column),
        Pick::Pair(a, b) => merging::pair(design, a, b),
        Pick::Compatible(i) => merging::compatible(design, i),
        Pick::Merged(row) => merging::merged_row(design, row),
        Pick::MergedCell(row, column) => merging::merged_cell(design, row, column),
        Pick::Code(code) => codes::code(design, code),
        Pick::Entry(code, column) => codes::entry(design, code, column),
        Pick::Move(index) => codes::moved(design, index),
        Pick::Function(i) => equations::function(design, i),
        Pick::Product(f, p) => equations::product(design, f, p),
        Pick::Point(f, point) => equations::point(design, f, point),
    }
}

/// Findings that stand at a row or cell of the primitive table.
pub fn findings_at<'a>(
    design: &'a Design,
    row: &str,
    column: Option<&str>,
) -> impl Iterator<Item = &'a Finding> {
    let (row, column) = (row.to_owned(), column.map(str::to_owned));
    design.findings.iter().filter(move |f| {
        f.at.row.as_deref() == Some(row.as_str()) && (column.is_none() || f.at.column == column)
    })
}

fn text(words: impl Into<String>) -> Piece {
    Piece::Text(words.into())
}

fn link(words: impl Into<String>, pick: Pick) -> Piece {
    Piece::Link(words.into(), pick)
}

/// `a`, `a and b`, `a, b and c`, as pieces.
fn listed(items: Vec<Piece>) -> Vec<Piece> {
    let n = items.len();
    let mut out = Vec::with_capacity(2 * n);
    for (i, item) in items.into_iter().enumerate() {
        if i > 0 {
            out.push(text(if i + 1 == n { " and " } else { ", " }));
        }
        out.push(item);
    }
    out
}
