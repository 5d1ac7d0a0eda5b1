//! Findings: what went wrong, or needs an answer, as values.
//!
//! A stage never prints and never panics on what a user can cause: it returns findings. `code` is stable and meant
//! for scripts; `text` says what is the matter and what would mend it, in one or two plain sentences.

/// How much a finding weighs.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Level {
    /// Nothing further is derived.
    Error,
    /// Probably not what was meant; the derivation goes on.
    Warning,
    /// An open question: behaviour that the table leaves unspecified.
    Question,
    /// Worth knowing.
    Note,
}

impl Level {
    /// The word used in the record and in text.
    pub fn word(self) -> &'static str {
        match self {
            Level::Error => "error",
            Level::Warning => "warning",
            Level::Question => "question",
            Level::Note => "note",
        }
    }
}

/// Where a finding stands in the primitive flow table: names, so that it outlives the table.
#[derive(Debug, Clone, PartialEq, Eq, Hash, Default)]
pub struct Place {
    /// Name of the row, where one is meant.
    pub row: Option<String>,
    /// Column as a bit string in input order, where one is meant.
    pub column: Option<String>,
}

/// One thing that the user should know.
#[derive(Debug, Clone, PartialEq, Eq, Hash)]
pub struct Finding {
    /// How much it weighs.
    pub level: Level,
    /// Stable word for scripts, lower case with hyphens.
    pub code: &'static str,
    /// What is the matter and what to do, for a person.
    pub text: String,
    /// The cell or row it is about.
    pub at: Place,
}

impl Finding {
    /// A finding without a place.
    pub fn new(level: Level, code: &'static str, text: impl Into<String>) -> Self {
        Finding { level, code, text: text.into(), at: Place::default() }
    }

    /// The same finding, placed at a row.
    #[must_use]
    pub fn at_row(mut self, row: impl Into<String>) -> Self {
        self.at.row = Some(row.into());
        self
    }

    /// The same finding, placed in a column.
    #[must_use]
    pub fn at_column(mut self, column: impl Into<String>) -> Self {
        self.at.column = Some(column.into());
        self
    }
}
