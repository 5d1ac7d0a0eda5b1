//! What can happen: a breadth-first walk from the initial total state, and the questions that it raises.
//!
//! Exact. Cost: linear in the moves; the questions take `O(n)` for each reachable state with single input changes and
//! `O(n 2^n / 64 + 2^n)` with bursts, for `n` inputs.

use std::collections::VecDeque;

use crate::base::{Column, TotalState};
use crate::project::choices::Discipline;
use crate::spec::columns::ColumnSet;
use crate::spec::values::{FlowTable, Move, Question};
use crate::spec::ways::Ways;

/// The result of the walk.
pub struct Walk {
    /// Moves in the order in which they are met.
    pub moves: Vec<Move>,
    /// Stable total states with their distance, in the order in which they are met.
    pub reachable: Vec<(TotalState, usize)>,
}

/// Follows every allowed and specified input change from `initial`. The table is in normal mode.
pub fn walk(table: &FlowTable, ways: &Ways, initial: TotalState) -> Walk {
    let place = |at: TotalState| (at.row.at() << table.inputs) + at.column.at();
    let mut seen = vec![false; table.len() << table.inputs];
    let mut walk = Walk { moves: Vec::new(), reachable: vec![(initial, 0)] };
    let mut queue = VecDeque::from([(initial, 0)]);
    seen[place(initial)] = true;
    while let Some((from, distance)) = queue.pop_front() {
        let Some(start) = ways.start(from) else { continue };
        for &column in ways.targets(start) {
            let Some(to) = table.next(from.row, column) else { continue };
            walk.moves.push(Move { from, column, to });
            let next = TotalState { row: to, column };
            if !std::mem::replace(&mut seen[place(next)], true) {
                walk.reachable.push((next, distance + 1));
                queue.push_back((next, distance + 1));
            }
        }
    }
    walk
}

/// The cells that a reachable state can be brought to and that say nothing, nearest to the initial state first. A cell
/// that several states can be brought to is asked about once, from the nearest of them. With bursts, cells on the way to
/// a specified cell and cells beyond one are not asked about.
pub fn questions(
    table: &FlowTable,
    given: &FlowTable,
    answered: &[bool],
    discipline: Discipline,
    reachable: &[(TotalState, usize)],
) -> Vec<Question> {
    let mut asked = answered.to_vec();
    let mut questions = Vec::new();
    for &(from, distance) in reachable {
        let first = questions.len();
        let mut ask = |column: Column| {
            let place = (from.row.at() << table.inputs) + column.at();
            if table.next(from.row, column).is_none() && !std::mem::replace(&mut asked[place], true) {
                questions.push(Question { from, column, distance });
            }
        };
        match discipline {
            Discipline::Single => (0..table.inputs).for_each(|i| ask(Column(from.column.0 ^ 1 << i))),
            Discipline::Burst => {
                let beyond = beyond(given, from);
                table.columns().filter(|column| !beyond.contains(*column)).for_each(&mut ask);
            }
        }
        questions[first..].sort_by_key(|question| question.column.distance(from.column));
    }
    questions
}

/// The columns that cannot be reached from a state without passing a cell of its row that was given.
fn beyond(given: &FlowTable, from: TotalState) -> ColumnSet {
    let mut specified = ColumnSet::new(given.inputs);
    for (column, cell) in given.columns().zip(given.row_cells(from.row)) {
        if column != from.column && cell.next.is_some() {
            specified.insert(column);
        }
    }
    specified.seen_from(from.column).strictly_above().seen_from(from.column)
}
