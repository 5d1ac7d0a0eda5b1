//! Collects findings: keeps them few enough to read, and puts the heavy ones first.
//!
//! Texts are built only for findings that are kept, so that a table with a million mistakes costs neither the time nor
//! the memory of a million sentences. Cost: linear in the findings, plus a sort by level.

use std::collections::BTreeMap;

use crate::base::{Column, Finding, Level};
use crate::spec::names::shown;

/// Findings of one code that are listed; further ones are counted in a note.
const KEPT: usize = 10_000;

/// Where a finding stands, before it is known whether it is kept.
#[derive(Clone, Copy, Default)]
pub struct Spot<'a> {
    row: Option<&'a str>,
    column: Option<Bits<'a>>,
}

#[derive(Clone, Copy)]
enum Bits<'a> {
    Written(&'a str),
    Read(Column, usize),
}

impl<'a> Spot<'a> {
    /// No place in the table.
    pub const NOWHERE: Spot<'static> = Spot { row: None, column: None };

    /// A row.
    pub fn row(name: &'a str) -> Self {
        Spot { row: Some(name), column: None }
    }

    /// A cell whose column is a number.
    pub fn cell(name: &'a str, column: Column, inputs: usize) -> Self {
        Spot { row: Some(name), column: Some(Bits::Read(column, inputs)) }
    }

    /// A cell whose column is as the user wrote it.
    pub fn written(name: &'a str, column: &'a str) -> Self {
        Spot { row: Some(name), column: Some(Bits::Written(column)) }
    }
}

/// The findings so far.
#[derive(Default)]
pub struct Report {
    findings: Vec<Finding>,
    counts: BTreeMap<&'static str, usize>,
    errors: bool,
}

impl Report {
    /// Adds an error.
    pub fn error(&mut self, code: &'static str, spot: Spot<'_>, text: impl FnOnce() -> String) {
        self.errors = true;
        self.add(Level::Error, code, spot, text);
    }

    /// Adds a warning.
    pub fn warning(&mut self, code: &'static str, spot: Spot<'_>, text: impl FnOnce() -> String) {
        self.add(Level::Warning, code, spot, text);
    }

    /// Adds an open question.
    pub fn question(&mut self, code: &'static str, spot: Spot<'_>, text: impl FnOnce() -> String) {
        self.add(Level::Question, code, spot, text);
    }

    /// Whether an error was added.
    pub fn has_errors(&self) -> bool {
        self.errors
    }

    /// All findings, errors first, otherwise in the order in which they were added.
    pub fn finish(mut self) -> Vec<Finding> {
        for (&code, &count) in &self.counts {
            if count > KEPT {
                let text = format!("{} more findings of the kind {code} are not listed.", count - KEPT);
                self.findings.push(Finding::new(Level::Note, "findings-cut", text));
            }
        }
        self.findings.sort_by_key(|finding| finding.level);
        self.findings
    }

    fn add(&mut self, level: Level, code: &'static str, spot: Spot<'_>, text: impl FnOnce() -> String) {
        let count = self.counts.entry(code).or_insert(0);
        *count += 1;
        if *count > KEPT {
            return;
        }
        let mut finding = Finding::new(level, code, text());
        finding.at.row = spot.row.map(shown);
        finding.at.column = spot.column.map(|bits| match bits {
            Bits::Written(text) => shown(text),
            Bits::Read(column, inputs) => column.text(inputs),
        });
        self.findings.push(finding);
    }
}
