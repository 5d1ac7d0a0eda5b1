//! Transitions and clashes in words.

use crate::logic::draft::Draft;
use crate::logic::expand::Rules;
use crate::logic::minimise::Unheld;
use crate::logic::table::Fault;
use crate::logic::values::{Clash, Target};
use crate::merge::values::Reduced;
use crate::spec::values::Signals;

/// `Y1`, `S1`, `R1`, or the output's own name.
pub(crate) fn name(target: Target, signals: &Signals) -> String {
    match target {
        Target::Next(i) => format!("Y{}", i + 1),
        Target::Set(i) => format!("S{}", i + 1),
        Target::Reset(i) => format!("R{}", i + 1),
        Target::Output(j) => signals.outputs.get(j).cloned().unwrap_or_default(),
    }
}

/// A move of the reduced table: `row B, 01 -> 11`.
pub(crate) fn move_text(reduced: &Reduced, cause: usize) -> String {
    reduced.moves.get(cause).map_or_else(String::new, |mv| {
        let column = |c| reduced.table.column_text(c);
        format!(
            "row {}, {} -> {}",
            reduced.table.name(mv.from.row),
            column(mv.from.column),
            column(mv.column)
        )
    })
}

/// A contradiction in the table as a clash.
pub(crate) fn fault(fault: &Fault, function: &str, reduced: &Reduced) -> Clash {
    let mut transitions: Vec<String> = fault.moves.iter().map(|&m| move_text(reduced, m)).collect();
    transitions.dedup();
    Clash { function: function.to_owned(), transitions, text: fault.text.clone() }
}

/// Why no product can hold a required cube: which transitions drag it into the points that it must miss.
pub(crate) fn unheld(draft: &Draft, unheld: &Unheld, function: &str, reduced: &Reduced) -> Clash {
    let problem = &draft.problem;
    let required = &problem.required[unheld.required];
    let mut causes: Vec<usize> = required.why.iter().map(|&t| draft.transitions[t].cause).collect();
    causes.truncate(1);
    // A fence matters if the cube could be held without it.
    for (n, fence) in problem.fences.iter().enumerate() {
        let others: Vec<_> =
            problem.fences.iter().enumerate().filter(|&(m, _)| m != n).map(|(_, f)| f.cube).collect();
        let freed = Rules { off: &problem.off, privileged: &others }.closure(required.cube, problem.mask);
        let meets = problem.fences.len() == 1 || required.cube.meets(fence.cube.cube);
        if (freed.is_ok() || meets)
            && let Some(t) = fence.why
        {
            causes.push(draft.transitions[t].cause);
        }
    }
    causes.dedup();
    let transitions: Vec<String> = causes.iter().map(|&m| move_text(reduced, m)).collect();
    let help = match draft.target {
        Target::Next(_) => {
            "A latch form (set and reset), another code method or one more state bit would help"
        }
        Target::Output(_) => {
            "An early output, another code method, or splitting a row of the cover would help"
        }
        _ => "Another code method or one more state bit would help",
    };
    let text = format!(
        "{function} must hold its value through one of these transitions without a glitch, and any product that does \
         so can pulse in another of them, or is wrong at a point where {function} is specified. {help}."
    );
    Clash { function: function.to_owned(), transitions, text }
}
