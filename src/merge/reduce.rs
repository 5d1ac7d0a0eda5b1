//! The reduced table of a closed cover, and the moves that can happen in it.
//!
//! A merged row's cell is the union of its members' cells. Its next row is a chosen set that holds all their next rows and
//! is itself stable in the column: the set itself where it can stay, else the first that qualifies. One always does when the
//! primitive table is in normal mode, since following the receiver of the receiver collects ever more rows. (That one
//! member is stable does not make the merged row stable.)
//!
//! # Complexity
//!
//! O(k²·c·n/64) for the table of k sets, n rows and c columns; the walk visits each pair of a primitive total state and a
//! merged row at most once.
//!
//! # References
//!
//! - S. H. Unger, "Asynchronous Sequential Switching Circuits", 1969 (reduced tables in normal mode).

use std::collections::{BTreeSet, VecDeque};

use fixedbitset::FixedBitSet;

use crate::base::{Column, Outputs, Row, TotalState};
use crate::merge::values::{MergeChoice, Reduced, RowSet};
use crate::spec::values::{Cell, FlowTable, Move, Spec};

/// The reduced table of a closed cover. `row_outputs`: a word for each primitive row where outputs belong to rows.
pub(super) fn reduce(
    spec: &Spec,
    cover: &[RowSet],
    choice: &MergeChoice,
    row_outputs: Option<&[Outputs]>,
) -> Reduced {
    let members: Vec<Vec<Row>> = cover.iter().map(|set| set.ones().map(Row::new).collect()).collect();
    let mut table = FlowTable::new(spec.table.inputs, spec.table.outputs, names(&choice.names, cover.len()));
    for column in spec.table.columns() {
        let next: Vec<RowSet> = cover.iter().map(|set| next_rows(&spec.table, set, column)).collect();
        for (s, rows) in members.iter().enumerate() {
            *table.cell_mut(Row::new(s), column) = Cell {
                next: receiver(cover, &next, s).map(Row::new),
                outputs: match row_outputs {
                    Some(words) => union(rows.iter().map(|r| words[r.at()])),
                    None => union(rows.iter().map(|&r| spec.table.cell(r, column).outputs)),
                },
                inner: only_passed(&spec.table, rows, column),
            };
        }
    }
    let initial = initial(spec, cover, &table);
    let moves = walk(spec, &table, initial);
    Reduced { table, members, initial, moves, outputs: choice.outputs }
}

fn next_rows(table: &FlowTable, set: &RowSet, column: Column) -> RowSet {
    let mut next = FixedBitSet::with_capacity(table.len());
    set.ones().filter_map(|r| table.next(Row::new(r), column)).for_each(|r| next.insert(r.at()));
    next
}

/// The set that set `s` goes to, where set `t` has the next rows `next[t]`.
fn receiver(cover: &[RowSet], next: &[RowSet], s: usize) -> Option<usize> {
    if next[s].is_clear() {
        return None;
    }
    let holds = |t: usize, rows: &RowSet| rows.is_subset(&cover[t]);
    let stable = |t: usize| holds(t, &next[t]);
    if stable(s) {
        return Some(s);
    }
    let fitting = || (0..cover.len()).filter(|&t| holds(t, &next[s]));
    fitting().find(|&t| stable(t)).or_else(|| fitting().next())
}

fn union(words: impl Iterator<Item = Outputs>) -> Outputs {
    words.fold(Outputs::default(), Outputs::or)
}

/// Whether the merged row is only ever passed in this column, in the middle of a burst: one member says so, and none
/// can come to rest there or leave there.
fn only_passed(table: &FlowTable, members: &[Row], column: Column) -> bool {
    let cells = || members.iter().map(|&r| table.cell(r, column));
    cells().any(|cell| cell.inner) && cells().all(|cell| cell.inner || cell.next.is_none())
}

/// The merged row that is stable where the primitive table starts. Prefers one that holds the initial row.
fn initial(spec: &Spec, cover: &[RowSet], table: &FlowTable) -> TotalState {
    let TotalState { row, column } = spec.initial;
    let holds = |s: &usize| cover[*s].contains(row.at());
    let stable = |s: &usize| table.stable(Row::new(*s), column);
    let first = (0..cover.len()).find(|s| holds(s) && stable(s));
    let row = first.or_else(|| {
        let holder = (0..cover.len()).find(holds)?;
        table.next(Row::new(holder), column).map(Row::at)
    });
    TotalState { row: Row::new(row.unwrap_or(0)), column }
}

/// All moves of the reduced table on which it keeps step with the primitive one, breadth first.
fn walk(spec: &Spec, table: &FlowTable, initial: TotalState) -> Vec<Move> {
    let mut by_start: Vec<&Move> = spec.moves.iter().collect();
    // The sort is stable: the moves of one start stay in the order of the specification.
    by_start.sort_by_key(|m| m.from);
    let mut seen = BTreeSet::from([(spec.initial, initial.row)]);
    let mut queue = VecDeque::from([(spec.initial, initial.row)]);
    let (mut listed, mut moves) = (BTreeSet::new(), Vec::new());
    while let Some((primitive, merged)) = queue.pop_front() {
        let start = by_start.partition_point(|m| m.from < primitive);
        for step in by_start[start..].iter().take_while(|m| m.from == primitive) {
            let Some(to) = table.next(merged, step.column) else { continue };
            let from = TotalState { row: merged, column: primitive.column };
            let taken = Move { from, column: step.column, to };
            if listed.insert(taken) {
                moves.push(taken);
            }
            let reached = (TotalState { row: step.to, column: step.column }, to);
            if seen.insert(reached) {
                queue.push_back(reached);
            }
        }
    }
    moves
}

/// The user's names in order; the rest are named A, B, .., Z, AA, .. by their place, passing over names that are taken.
fn names(given: &[String], count: usize) -> Vec<String> {
    let mut taken = BTreeSet::new();
    let own: Vec<Option<String>> = (0..count)
        .map(|i| {
            let name = given.get(i).filter(|name| !name.is_empty())?;
            taken.insert(name.to_lowercase()).then(|| name.clone())
        })
        .collect();
    own.into_iter()
        .enumerate()
        .map(|(i, name)| {
            name.unwrap_or_else(|| {
                let fresh = (i..).map(letters).find(|name| taken.insert(name.to_lowercase()));
                fresh.expect("the letters never end")
            })
        })
        .collect()
}

/// 0 is A, 25 is Z, 26 is AA.
fn letters(mut i: usize) -> String {
    let mut reversed = Vec::new();
    loop {
        reversed.push(char::from(b'A' + (i % 26) as u8));
        if i < 26 {
            return reversed.into_iter().rev().collect();
        }
        i = i / 26 - 1;
    }
}
