//! The design as text, to be read by a person and pasted into a review: one section for each station of the chain.
//!
//! Lines are about 110 characters wide; a name or an equation that has no blank to break at may be wider. A stage that
//! could not run says so in its section.

mod behaviour;
mod codes;
mod equations;
mod merging;
mod proof;

use crate::base::Level;
use crate::design::values::Design;
use crate::handoff::notation::Notation;
use crate::handoff::plain::{plain, wrap};
use crate::project::Project;

/// The whole design in words, tables and equations; ends with a newline.
pub fn review(project: &Project, design: &Design, notation: Notation) -> String {
    let mut page = Page::default();
    heading(&mut page, project);
    match &design.spec {
        Some(spec) => behaviour::write(&mut page, project, spec),
        None => missing(&mut page, "Behaviour", design),
    }
    match (&design.spec, &design.merged) {
        (Some(spec), Some(merged)) => merging::write(&mut page, spec, merged),
        _ => missing(&mut page, "Merging", design),
    }
    let reduced = design.merged.as_ref().and_then(|m| m.reduced.as_ref());
    match (reduced, &design.coded) {
        (Some(reduced), Some(coded)) => codes::write(&mut page, reduced, coded, design.races.as_deref()),
        _ => missing(&mut page, "Codes", design),
    }
    match (reduced, &design.coded, &design.equations) {
        (Some(reduced), Some(coded), Some(equations)) => {
            equations::write(&mut page, reduced, coded, equations, notation);
        }
        _ => missing(&mut page, "Equations", design),
    }
    match (reduced, &design.coded, &design.proof) {
        (Some(reduced), Some(coded), Some(proof)) => {
            proof::write(&mut page, project, design, reduced, coded, proof)
        }
        _ => missing(&mut page, "Proof", design),
    }
    page.finish()
}

fn heading(page: &mut Page, project: &Project) {
    let title = if project.title.trim().is_empty() {
        "Untitled controller".to_owned()
    } else {
        plain(&project.title)
    };
    page.line(&title);
    page.line("=".repeat(title.chars().count()));
    if !project.notes.trim().is_empty() {
        page.gap();
        for paragraph in project.notes.trim().lines() {
            page.lines(wrap("", "", &plain(paragraph)));
        }
    }
}

/// A section whose stage did not run. The first one says why.
fn missing(page: &mut Page, name: &str, design: &Design) {
    page.section(name);
    let error = design.findings.iter().find(|f| f.level == Level::Error);
    match error.filter(|_| !page.broken) {
        Some(error) => page.text(&format!("Not derived: {}", plain(&error.text))),
        None => page.line("Not derived."),
    }
    page.broken = true;
}

/// Text that grows line by line.
#[derive(Default)]
struct Page {
    text: String,
    /// Whether a section could not be written, so that the reason stands above.
    broken: bool,
}

impl Page {
    fn line(&mut self, text: impl AsRef<str>) {
        self.text.push_str(text.as_ref().trim_end());
        self.text.push('\n');
    }

    fn lines(&mut self, lines: impl IntoIterator<Item = String>) {
        lines.into_iter().for_each(|l| self.line(l));
    }

    /// A paragraph, broken at blanks.
    fn text(&mut self, text: &str) {
        self.lines(wrap("", "", text));
    }

    /// An empty line, never two of them.
    fn gap(&mut self) {
        if !self.text.ends_with("\n\n") {
            self.text.push('\n');
        }
    }

    fn section(&mut self, name: &str) {
        self.gap();
        self.line(name);
        self.line("-".repeat(name.chars().count()));
    }

    fn finish(self) -> String {
        format!("{}\n", self.text.trim_end())
    }
}
