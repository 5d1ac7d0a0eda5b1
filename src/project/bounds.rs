//! The limits on a project in memory: what keeps them can be written and read back. Linear in the project.

use crate::project::limited::delay_fault;
use crate::project::{
    Choices, CodesChoice, CoverChoice, GatesChoice, Layout, LogicChoice, MergingChoice, Method, Project,
    limits, write,
};

/// Whether the project keeps every limit of the file, so that what is saved can be opened again.
///
/// # Errors
///
/// Names the limit that is broken and what to do.
pub fn fits(project: &Project) -> Result<(), String> {
    let Project { title, notes, inputs, outputs, discipline: _, initial, rows, scenarios, choices, layout } =
        project;
    let mut size = Size::default();
    size.text("the title", title, limits::TITLE)?;
    size.text("the notes", notes, limits::NOTES)?;
    size.names("inputs", inputs, limits::INPUTS)?;
    size.names("outputs", outputs, limits::OUTPUTS)?;
    if let Some((row, column)) = initial {
        size.short([row, column])?;
    }
    count("rows", rows.len(), limits::ROWS)?;
    for row in rows {
        size.short([&row.name])?;
        count("cells in one row", row.cells.len(), limits::CELLS)?;
        for (column, cell) in &row.cells {
            size.short([column, &cell.next, &cell.outputs])?;
        }
    }
    count("scenarios", scenarios.len(), limits::SCENARIOS)?;
    for scenario in scenarios {
        size.short([&scenario.name])?;
        count("steps in one scenario", scenario.steps.len(), limits::SCENARIOS)?;
        for step in &scenario.steps {
            size.short([&step.inputs, &step.outputs])?;
            size.short(&step.row)?;
        }
    }
    chosen(choices, &mut size)?;
    let Layout { station, gray: _, used_only: _ } = layout;
    size.short([station])?;
    size.check(project)
}

fn chosen(choices: &Choices, size: &mut Size) -> Result<(), String> {
    let Choices { merging, codes, logic, gates } = choices;
    let MergingChoice { outputs: _, cover, names } = merging;
    size.names("names of merged rows", names, limits::ROWS)?;
    if let CoverChoice::ByHand(sets) = cover {
        count("sets in the cover", sets.len(), limits::ROWS)?;
        for set in sets {
            size.names("rows in one set of the cover", set, limits::ROWS)?;
        }
    }
    let CodesChoice { method } = codes;
    if let Method::ByHand(codes) = method {
        count("merged rows with codes", codes.len(), limits::ROWS)?;
        for (row, codes) in codes {
            size.short([row])?;
            size.names("codes of one row", codes, limits::ROWS)?;
        }
    }
    let LogicChoice { form: _, shape: _, share: _, late } = logic;
    size.names("late outputs", late, limits::OUTPUTS)?;
    let GatesChoice { style: _, fan_in, delay, reset } = gates;
    if !(2..=limits::FAN_IN).contains(fan_in) {
        return Err(format!("a fan-in of {fan_in} cannot be built: choose 2 to {}", limits::FAN_IN));
    }
    if let Some(fault) = delay_fault(delay.0, delay.1) {
        return Err(fault);
    }
    size.short(reset)
}

fn count(what: &str, found: usize, most: usize) -> Result<(), String> {
    if found > most {
        return Err(format!("{found} {what} are too many: remove some, the limit is {most}"));
    }
    Ok(())
}

/// More bytes than the text can have: every string at its longest escape, and generous brackets and blanks around it.
#[derive(Default)]
struct Size {
    at_most: usize,
}

impl Size {
    fn text(&mut self, what: &str, text: &str, most: usize) -> Result<(), String> {
        // The longest that a byte becomes is a line break of the notes: escape, continuation, new line, margin.
        self.at_most += 12 * text.len() + 64;
        if text.len() > most {
            let found = text.chars().count();
            if found > most {
                return Err(format!("{what} has {found} characters: shorten it, the limit is {most}"));
            }
        }
        Ok(())
    }

    fn short<'a>(&mut self, texts: impl IntoIterator<Item = &'a String>) -> Result<(), String> {
        texts.into_iter().try_for_each(|text| self.text("a name", text, limits::NAME))
    }

    fn names(&mut self, what: &str, names: &[String], most: usize) -> Result<(), String> {
        count(what, names.len(), most)?;
        self.at_most += 64;
        self.short(names)
    }

    fn check(&self, project: &Project) -> Result<(), String> {
        // Only a huge project comes near the limit, and only then is the text made to see how long it is.
        if self.at_most > limits::FILE_BYTES {
            let bytes = write(project).len();
            if bytes > limits::FILE_BYTES {
                return Err(format!(
                    "the file would have {bytes} bytes: remove rows, scenarios or notes, the limit is {}",
                    limits::FILE_BYTES
                ));
            }
        }
        Ok(())
    }
}
