//! The writer of the project file: canonical, made to be read and diffed.
//!
//! Every project that [fits](crate::project::fits) reads back equal, and a text that came from here is written again
//! byte for byte. Parts that hold their defaults are left out. Linear in the text.

use std::collections::BTreeMap;

use crate::project::pretty::{Doc, long_string, string};
use crate::project::{
    CellEntry, Choices, CodesChoice, CoverChoice, Discipline, FORMAT, Form, GatesChoice, Layout, LogicChoice,
    MergingChoice, Method, OutputStyle, Project, RowEntry, Scenario, Shape, Step, Style,
};

/// The project as the text of its file.
pub fn write(project: &Project) -> String {
    let Project { title, notes, inputs, outputs, discipline, initial, rows, scenarios, choices, layout } =
        project;
    let mut fields = vec![
        Doc::atom(FORMAT.to_string()).named("format"),
        Doc::atom(string(title)).named("title"),
        Doc::atom(long_string("notes", notes, 4)).named("notes"),
        strings(inputs).named("inputs"),
        strings(outputs).named("outputs"),
        Doc::atom(match discipline {
            Discipline::Single => "Single",
            Discipline::Burst => "Burst",
        })
        .named("discipline"),
    ];
    if let Some((row, column)) = initial {
        fields.push(tuple([row, column]).named("initial"));
    }
    fields.push(Doc::lines("[", rows.iter().map(row).collect(), "]").named("rows"));
    if !scenarios.is_empty() {
        fields.push(Doc::lines("[", scenarios.iter().map(scenario).collect(), "]").named("scenarios"));
    }
    let choices = chosen(choices);
    if !choices.is_empty() {
        fields.push(Doc::lines("(", choices, ")").named("choices"));
    }
    let layout = remembered(layout);
    if !layout.is_empty() {
        fields.push(Doc::fit("(", layout, ")").named("layout"));
    }
    let mut text = Doc::lines("(", fields, ")").render();
    text.push('\n');
    text
}

fn row(row: &RowEntry) -> Doc {
    let RowEntry { name, cells } = row;
    let cells = cells
        .iter()
        .map(|(column, CellEntry { next, outputs })| tuple([next, outputs]).named(&string(column)))
        .collect();
    Doc::hug("(", vec![Doc::atom(string(name)).named("name"), Doc::fit("{", cells, "}").named("cells")], ")")
}

fn scenario(scenario: &Scenario) -> Doc {
    let Scenario { name, loops, steps } = scenario;
    let steps = steps
        .iter()
        .map(|Step { inputs, outputs, row }| match row {
            Some(row) => tuple([inputs, outputs, row]),
            None => tuple([inputs, outputs]),
        })
        .collect();
    let mut fields = vec![Doc::atom(string(name)).named("name")];
    if *loops {
        fields.push(Doc::atom("true").named("loops"));
    }
    fields.push(Doc::fit("[", steps, "]").named("steps"));
    Doc::hug("(", fields, ")")
}

/// The stages that hold a choice other than the default.
fn chosen(choices: &Choices) -> Vec<Doc> {
    let Choices { merging: m, codes: c, logic: l, gates: g } = choices;
    [("merging", merging(m)), ("codes", codes(c)), ("logic", logic(l)), ("gates", gates(g))]
        .into_iter()
        .filter(|(_, fields)| !fields.is_empty())
        .map(|(name, fields)| Doc::fit("(", fields, ")").named(name))
        .collect()
}

fn merging(choice: &MergingChoice) -> Vec<Doc> {
    let MergingChoice { outputs, cover, names } = choice;
    let mut fields = Vec::new();
    match outputs {
        OutputStyle::PerCell => {}
        OutputStyle::PerRow => fields.push(Doc::atom("PerRow").named("outputs")),
    }
    match cover {
        CoverChoice::Smallest => {}
        CoverChoice::ByHand(sets) => {
            let sets = sets.iter().map(|set| strings(set)).collect();
            fields.push(Doc::fit("ByHand([", sets, "])").named("cover"));
        }
    }
    if !names.is_empty() {
        fields.push(strings(names).named("names"));
    }
    fields
}

fn codes(choice: &CodesChoice) -> Vec<Doc> {
    let CodesChoice { method } = choice;
    let method = match method {
        Method::Adjacency => return Vec::new(),
        Method::SharedRow => Doc::atom("SharedRow"),
        Method::SingleStep => Doc::atom("SingleStep"),
        Method::OneHot => Doc::atom("OneHot"),
        Method::MultipleRow => Doc::atom("MultipleRow"),
        Method::ByHand(codes) => by_hand(codes),
    };
    vec![method.named("method")]
}

fn by_hand(codes: &BTreeMap<String, Vec<String>>) -> Doc {
    let codes = codes.iter().map(|(row, codes)| strings(codes).named(&string(row))).collect();
    Doc::fit("ByHand({", codes, "})")
}

fn logic(choice: &LogicChoice) -> Vec<Doc> {
    let LogicChoice { form, shape, share, late } = choice;
    let mut fields = Vec::new();
    match form {
        Form::Feedback => {}
        Form::SetReset => fields.push(Doc::atom("SetReset").named("form")),
        Form::CElement => fields.push(Doc::atom("CElement").named("form")),
    }
    match shape {
        Shape::SumOfProducts => {}
        Shape::ProductOfSums => fields.push(Doc::atom("ProductOfSums").named("shape")),
    }
    if *share {
        fields.push(Doc::atom("true").named("share"));
    }
    if !late.is_empty() {
        fields.push(strings(late).named("late"));
    }
    fields
}

fn gates(choice: &GatesChoice) -> Vec<Doc> {
    let GatesChoice { style, fan_in, delay, reset } = choice;
    let default = GatesChoice::default();
    let mut fields = Vec::new();
    match style {
        Style::AndOr => {}
        Style::NandOnly => fields.push(Doc::atom("NandOnly").named("style")),
        Style::NorOnly => fields.push(Doc::atom("NorOnly").named("style")),
    }
    if *fan_in != default.fan_in {
        fields.push(Doc::atom(fan_in.to_string()).named("fan_in"));
    }
    if *delay != default.delay {
        // The debug form of a number is the shortest that reads back the same.
        fields.push(Doc::atom(format!("({:?}, {:?})", delay.0, delay.1)).named("delay"));
    }
    if let Some(name) = reset {
        fields.push(Doc::atom(format!("Some({})", string(name))).named("reset"));
    }
    fields
}

fn remembered(layout: &Layout) -> Vec<Doc> {
    let Layout { station, gray, used_only } = layout;
    let mut fields = Vec::new();
    if !station.is_empty() {
        fields.push(Doc::atom(string(station)).named("station"));
    }
    if *gray {
        fields.push(Doc::atom("true").named("gray"));
    }
    if *used_only {
        fields.push(Doc::atom("true").named("used_only"));
    }
    fields
}

fn strings(items: &[String]) -> Doc {
    Doc::fit("[", items.iter().map(|item| Doc::atom(string(item))).collect(), "]")
}

/// A bracket of strings that always stays on its line.
fn tuple<const N: usize>(items: [&String; N]) -> Doc {
    Doc::atom(format!("({})", items.map(|item| string(item)).join(", ")))
}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;
    use crate::project::arbitrary::wild_project;
    use crate::project::{fits, read};

    proptest! {
        #![proptest_config(ProptestConfig::with_cases(1000))]

        #[test]
        fn what_is_written_reads_back_and_is_written_the_same(project in wild_project()) {
            prop_assert!(fits(&project).is_ok());
            let text = write(&project);
            let again = read(text.as_bytes()).map_err(|error| TestCaseError::fail(format!("{error}\n{text}")))?;
            prop_assert_eq!(&again, &project);
            prop_assert_eq!(write(&again), text);
        }

        #[test]
        fn changed_line_endings_change_nothing(project in wild_project()) {
            let text = write(&project).replace('\n', "\r\n");
            prop_assert_eq!(read(text.as_bytes()).expect("line endings are blanks"), project);
        }

        #[test]
        fn a_text_cut_short_is_refused_at_its_end(project in wild_project(), at in any::<prop::sample::Index>()) {
            let text = write(&project);
            // Without the last bracket at least.
            let mut cut = at.index(text.len() - 1);
            while !text.is_char_boundary(cut) {
                cut -= 1;
            }
            let error = read(&text.as_bytes()[..cut]).expect_err("cut");
            let lines = 1 + text[..cut].matches('\n').count();
            prop_assert!((1..=lines).contains(&error.line), "{}", error);
        }

        #[test]
        fn a_damaged_text_never_panics(project in wild_project(), damage in prop::collection::vec(any::<(prop::sample::Index, u8)>(), 1..4)) {
            let mut bytes = write(&project).into_bytes();
            for (at, byte) in damage {
                let at = at.index(bytes.len());
                bytes[at] = byte;
            }
            // A project or an error, but in either case an answer; and what is read can be saved.
            match read(&bytes) {
                Ok(read_back) => prop_assert_eq!(&read(write(&read_back).as_bytes()).expect("own text"), &read_back),
                Err(error) => prop_assert!(error.line > 0 && error.column > 0 && !error.text.is_empty()),
            }
        }
    }
}
