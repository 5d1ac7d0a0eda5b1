//! From the project to a checked flow table: signals, checks, inner cells, held outputs, open questions.
//!
//! [`check`] reads a [`Project`], which speaks in names and bit strings and may hold any mistake, and returns what is
//! wrong with it together with, if nothing is an error, a [`Spec`] whose table is in normal mode. All mistakes that can
//! be seen at once are reported at once; the later groups (walks, warnings, questions, scenarios) need a table without
//! errors and come only then.
//!
//! Sources: fundamental mode and the primitive flow table after Huffman (1954); normal mode and the input disciplines
//! after Unger (1969); several input changes at a time in the spirit of the generalised fundamental mode of Nowick and
//! Dill. Everything here is exact.
//!
//! Cost for `r` rows, `n` inputs and `s` stable cells: `O(r 2^n)` for the table and its chains, `O(s n)` for single
//! input changes, `O(s n 2^n / 64 + s 2^n)` for bursts, and linear in the number of moves and of findings.
//!
//! # What is asked and what is promised
//!
//! A cell that is left out of the file is *open*: if the walk from the initial total state can meet it, the engineer is
//! asked. A cell that is written down as `("-", "--")`, next row and all outputs open, is an *answer*: the environment
//! promises that this change never happens, and nobody asks again. A cell with next row `-` and some output given is
//! still asked about, because its outputs matter and its next row is not known.
//!
//! # Codes of the findings
//!
//! | code | level | meaning |
//! | --- | --- | --- |
//! | `no-inputs` | error | the controller has no input |
//! | `no-rows` | error | the flow table has no row |
//! | `limit-inputs`, `limit-outputs`, `limit-rows` | error | more than the program can hold |
//! | `limit-scenarios`, `limit-steps` | error | too many scenarios, or steps in one |
//! | `limit-moves` | error | too many possible input changes |
//! | `bad-signal-name` | error | an input or output name is not an identifier |
//! | `reserved-signal-name` | error | an input or output is named like a generated signal |
//! | `duplicate-signal-name` | error | two signals have one name, whatever the case |
//! | `bad-row-name`, `duplicate-row-name` | error | the same for rows |
//! | `bad-column` | error | a cell's column is not a bit string of the right length |
//! | `bad-outputs` | error | a cell's outputs are not one of 0, 1, - for each output |
//! | `unknown-next-row` | error | a cell leads to a row that does not exist |
//! | `no-initial`, `unknown-initial-row`, `bad-initial-column` | error | the total state after power-up is missing or wrong |
//! | `initial-not-stable` | error | the controller would not rest in the initial total state |
//! | `no-stable-cell` | error | a row has no cell to rest in |
//! | `oscillation` | error | unstable cells of one column form a cycle |
//! | `dead-end` | error | an unstable cell leads to a row that has no cell in that column |
//! | `ambiguous-burst` | error | a burst passes a cell where the row is left, or where an output cannot hold |
//! | `unknown-late-output`, `unknown-cover-row` | error | a choice names something that does not exist |
//! | `bad-merged-name` | error | a chosen name of a merged row is no identifier, or is used twice |
//! | `bad-reset-name`, `bad-gates` | error | the choices for gates make no sense |
//! | `scenario-malformed` | error | a scenario's step cannot be read or is no input change |
//! | `scenario-disagrees` | error | the table does something else than the scenario says |
//! | `no-outputs` | warning | the controller has no output |
//! | `unreachable-row` | warning | no sequence of input changes leads to the row |
//! | `cell-never-entered` | warning | the input discipline cannot bring the controller to the cell; it is kept |
//! | `open-stable-output` | warning | the controller can rest in a cell whose output is open |
//! | `chain-folded` | warning | an unstable cell leads to another; it now leads to the last row at once |
//! | `row-never-left` | warning | no input change leads out of the row |
//! | `pulse-asked-for` | warning | a given output changes twice in one move |
//! | `open-question` | question | the table does not say what an input change does |
//! | `findings-cut` | note | more findings of one kind than are listed |

mod columns;
mod names;
mod normal;
mod play;
mod read;
mod report;
pub mod values;
mod walk;
mod warn;
mod ways;

use crate::project::Project;
use crate::spec::report::Report;

pub use names::{identifier, shown};
pub use values::{Cell, Checked, FlowTable, Move, Question, Signals, Spec};

/// Checks a project and makes the table that every later stage works on.
///
/// Never fails: what is wrong comes back as findings, errors first, each kind in the order of the table.
/// [`Checked::spec`] is there exactly if no finding is an error.
pub fn check(project: &Project) -> Checked {
    let mut report = Report::default();
    names::check_signals(project, &mut report);
    names::check_choices(project, &mut report);
    let spec = checked_spec(project, &mut report);
    let spec = if report.has_errors() { None } else { spec };
    Checked { findings: report.finish(), spec }
}

/// The table behind the names. `None` as soon as an error leaves nothing sensible to go on with.
fn checked_spec(project: &Project, report: &mut Report) -> Option<Spec> {
    let drawn = read::table(project, report)?;
    if report.has_errors() {
        return None;
    }
    let mut table = drawn.given.clone();
    normal::rests(&table, report);
    normal::fold_chains(&mut table, report);
    let initial = read::initial(project, &drawn, report);
    let ways = ways::ways(&mut table, project, report)?;
    if report.has_errors() {
        return None;
    }
    let initial = initial?;
    ways::hold_outputs(&mut table, &ways);
    let walk = walk::walk(&table, &ways, initial);
    let questions =
        walk::questions(&table, &drawn.given, &drawn.answered, project.discipline, &walk.reachable);
    let spec = Spec {
        signals: Signals { inputs: project.inputs.clone(), outputs: project.outputs.clone() },
        discipline: project.discipline,
        given: drawn.given,
        table,
        initial,
        moves: walk.moves,
        reachable: walk.reachable,
        questions,
    };
    warn::warnings(&spec, &ways, report);
    warn::ask(&spec, report);
    play::scenarios(project, &spec, &ways, report);
    Some(spec)
}
