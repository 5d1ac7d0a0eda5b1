//! The reader of the project file: RON text to a [`Project`].
//!
//! The types here are the file as it stands on the disk; each turns into its counterpart of the contract. What breaks a
//! limit or the notation is refused at its line and column. What is merely wrong (an unknown next row, a column of the
//! wrong length, a bad name) is read: the project must open so that it can be mended.
//!
//! Time and memory are linear in the file, and bounded by the limits for any file.

use std::fmt;

use serde::Deserialize;
use serde::de::{Deserializer, Error, Visitor};

use crate::project::limited::{
    Cells, Coded, Codes, Delay, FanIn, Inputs, Late, List, Map, Members, Merged, Notes, Outputs, Rows,
    Scenarios, Sets, Short, Steps, Text, Title, Total,
};
use crate::project::{
    CellEntry, Choices, CodesChoice, CoverChoice, Discipline, FORMAT, Form, GatesChoice, Layout, LogicChoice,
    MergingChoice, Method, OutputStyle, Project, ReadError, RowEntry, Scenario, Shape, Step, Style, limits,
};

/// Reads a project file.
///
/// # Errors
///
/// Says at which line and column (both from 1) the file breaks the notation or one of the [`limits`], and what to do.
pub fn read(bytes: &[u8]) -> Result<Project, ReadError> {
    if bytes.len() > limits::FILE_BYTES {
        let text = format!(
            "the file has {} bytes, and {} are the limit: remove rows, scenarios or notes, or split the controller",
            bytes.len(),
            limits::FILE_BYTES
        );
        return Err(ReadError { line: 1, column: 1, text });
    }
    let text = text(bytes)?;
    // Some editors put a byte order mark in front of a text; it says nothing about the project.
    let text = text.strip_prefix('\u{feff}').unwrap_or(text);
    ron::Options::default()
        .with_recursion_limit(limits::NESTING)
        .from_str::<ProjectFile>(text)
        .map(Project::from)
        .map_err(|error| ReadError::from_parser(&error, text))
}

fn text(bytes: &[u8]) -> Result<&str, ReadError> {
    str::from_utf8(bytes).map_err(|error| {
        let (valid, rest) = bytes.split_at(error.valid_up_to());
        let byte = rest.first().copied().unwrap_or_default();
        let valid = str::from_utf8(valid).unwrap_or_default();
        let text = format!("the byte 0x{byte:02x} is no text in UTF-8: remove it, or save the file as UTF-8");
        ReadError::after(valid, text)
    })
}

/// The number in front of everything else.
struct Format;

impl<'de> Deserialize<'de> for Format {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        struct Reader;
        impl Visitor<'_> for Reader {
            type Value = Format;
            fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
                write!(f, "{FORMAT}")
            }
            fn visit_u64<E: Error>(self, format: u64) -> Result<Format, E> {
                if format == u64::from(FORMAT) {
                    return Ok(Format);
                }
                Err(E::custom(if format > u64::from(FORMAT) {
                    format!(
                        "this file has format {format}, which is newer than this program: \
                         open it with a newer Stillgate, which reads more than format {FORMAT}"
                    )
                } else {
                    format!("there is no format {format}: write `format: {FORMAT}`")
                }))
            }
        }
        deserializer.deserialize_u64(Reader)
    }
}

#[derive(Deserialize)]
#[serde(rename = "Project", deny_unknown_fields)]
struct ProjectFile {
    // Its reader is the check: nothing is left to keep.
    #[serde(rename = "format")]
    _format: Format,
    #[serde(default)]
    title: Text<Title>,
    #[serde(default)]
    notes: Text<Notes>,
    inputs: List<Short, Inputs>,
    outputs: List<Short, Outputs>,
    #[serde(default)]
    discipline: Discipline,
    // Not an option in the file: it stands there or it does not.
    #[serde(default, deserialize_with = "present")]
    initial: Option<Total>,
    rows: List<RowFile, Rows>,
    #[serde(default)]
    scenarios: List<ScenarioFile, Scenarios>,
    #[serde(default)]
    choices: ChoicesFile,
    #[serde(default)]
    layout: LayoutFile,
}

fn present<'de, T: Deserialize<'de>, D: Deserializer<'de>>(deserializer: D) -> Result<Option<T>, D::Error> {
    T::deserialize(deserializer).map(Some)
}

impl From<ProjectFile> for Project {
    fn from(file: ProjectFile) -> Self {
        Project {
            title: file.title.0,
            notes: file.notes.0,
            inputs: file.inputs.strings(),
            outputs: file.outputs.strings(),
            discipline: file.discipline,
            initial: file.initial.map(|Total(row, column)| (row, column)),
            rows: file.rows.0.into_iter().map(RowEntry::from).collect(),
            scenarios: file.scenarios.0.into_iter().map(Scenario::from).collect(),
            choices: file.choices.into(),
            layout: file.layout.into(),
        }
    }
}

#[derive(Deserialize)]
#[serde(rename = "Row", deny_unknown_fields)]
struct RowFile {
    name: Short,
    #[serde(default)]
    cells: Map<CellEntry, Cells>,
}

impl From<RowFile> for RowEntry {
    fn from(file: RowFile) -> Self {
        RowEntry { name: file.name.0, cells: file.cells.0 }
    }
}

#[derive(Deserialize)]
#[serde(rename = "Scenario", deny_unknown_fields)]
struct ScenarioFile {
    name: Short,
    #[serde(default)]
    loops: bool,
    #[serde(default)]
    steps: List<Step, Steps>,
}

impl From<ScenarioFile> for Scenario {
    fn from(file: ScenarioFile) -> Self {
        Scenario { name: file.name.0, loops: file.loops, steps: file.steps.0 }
    }
}

#[derive(Deserialize, Default)]
#[serde(rename = "Choices", default, deny_unknown_fields)]
struct ChoicesFile {
    merging: MergingFile,
    codes: CodesFile,
    logic: LogicFile,
    gates: GatesFile,
}

impl From<ChoicesFile> for Choices {
    fn from(file: ChoicesFile) -> Self {
        Choices {
            merging: file.merging.into(),
            codes: file.codes.into(),
            logic: file.logic.into(),
            gates: file.gates.into(),
        }
    }
}

#[derive(Deserialize, Default)]
#[serde(rename = "Merging", default, deny_unknown_fields)]
struct MergingFile {
    outputs: OutputStyle,
    cover: CoverFile,
    names: List<Short, Merged>,
}

#[derive(Deserialize, Default)]
#[serde(rename = "Cover")]
enum CoverFile {
    #[default]
    Smallest,
    ByHand(List<List<Short, Members>, Sets>),
}

impl From<MergingFile> for MergingChoice {
    fn from(file: MergingFile) -> Self {
        let cover = match file.cover {
            CoverFile::Smallest => CoverChoice::Smallest,
            CoverFile::ByHand(sets) => CoverChoice::ByHand(sets.0.into_iter().map(List::strings).collect()),
        };
        MergingChoice { outputs: file.outputs, cover, names: file.names.strings() }
    }
}

#[derive(Deserialize, Default)]
#[serde(rename = "Codes", default, deny_unknown_fields)]
struct CodesFile {
    method: MethodFile,
}

#[derive(Deserialize, Default)]
#[serde(rename = "Method")]
enum MethodFile {
    #[default]
    Adjacency,
    SharedRow,
    SingleStep,
    OneHot,
    MultipleRow,
    ByHand(Map<List<Short, Codes>, Coded>),
}

impl From<CodesFile> for CodesChoice {
    fn from(file: CodesFile) -> Self {
        let method = match file.method {
            MethodFile::Adjacency => Method::Adjacency,
            MethodFile::SharedRow => Method::SharedRow,
            MethodFile::SingleStep => Method::SingleStep,
            MethodFile::OneHot => Method::OneHot,
            MethodFile::MultipleRow => Method::MultipleRow,
            MethodFile::ByHand(codes) => {
                Method::ByHand(codes.0.into_iter().map(|(row, codes)| (row, codes.strings())).collect())
            }
        };
        CodesChoice { method }
    }
}

#[derive(Deserialize, Default)]
#[serde(rename = "Logic", default, deny_unknown_fields)]
struct LogicFile {
    form: Form,
    shape: Shape,
    share: bool,
    late: List<Short, Late>,
}

impl From<LogicFile> for LogicChoice {
    fn from(file: LogicFile) -> Self {
        LogicChoice { form: file.form, shape: file.shape, share: file.share, late: file.late.strings() }
    }
}

#[derive(Deserialize, Default)]
#[serde(rename = "Gates", default, deny_unknown_fields)]
struct GatesFile {
    style: Style,
    #[serde(deserialize_with = "present")]
    fan_in: Option<FanIn>,
    #[serde(deserialize_with = "present")]
    delay: Option<Delay>,
    reset: Option<Short>,
}

impl From<GatesFile> for GatesChoice {
    fn from(file: GatesFile) -> Self {
        let default = GatesChoice::default();
        GatesChoice {
            style: file.style,
            fan_in: file.fan_in.map_or(default.fan_in, |fan_in| fan_in.0),
            delay: file.delay.map_or(default.delay, |delay| (delay.0, delay.1)),
            reset: file.reset.map(|name| name.0),
        }
    }
}

#[derive(Deserialize, Default)]
#[serde(rename = "Layout", default, deny_unknown_fields)]
struct LayoutFile {
    station: Short,
    gray: bool,
    used_only: bool,
}

impl From<LayoutFile> for Layout {
    fn from(file: LayoutFile) -> Self {
        Layout { station: file.station.0, gray: file.gray, used_only: file.used_only }
    }
}
