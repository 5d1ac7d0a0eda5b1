//! Which state variables need feedback that is slower than the direct logic: essential hazards, found here anew.
//!
//! A stable total state (s, c0) whose inputs change to c1: s1 = N(s, c1). A part of the circuit that sees the new state
//! before the new inputs acts in s1 under old inputs c' (c0 for one bit; for a burst any column of its cube but c1): s2 = N(s1, c'), s3 =
//! N(s2, c1). If s3 is not s1 the outcome hangs on delays (S. H. Unger, Hazards and delays in asynchronous sequential
//! switching circuits, 1959). Where the table leaves s2 or s3 open, the finished functions are asked in its place.
//! Exact; all stable total states count, reached or not. The cost is that of the stable cells times their changes, with `2^k` columns
//! looked at for a burst of `k` bits.

use crate::base::{Code, Column, Row};
use crate::codes::values::Coded;
use crate::merge::values::Reduced;
use crate::project::choices::Discipline;
use crate::proof::circuit::Circuit;
use crate::proof::settle::{Settled, settle};
use crate::spec::values::FlowTable;

/// Numbers of the state variables that change in a move with an essential or an implementation hazard, ascending.
pub(super) fn slow(
    reduced: &Reduced,
    coded: &Coded,
    circuit: &Circuit,
    discipline: Discipline,
) -> Vec<usize> {
    let table = &reduced.table;
    let mut bits = 0u32;
    for row in table.rows() {
        for from in table.columns().filter(|&c| table.stable(row, c)) {
            for to in changes(table, discipline, row, from) {
                let Some(end) = table.next(row, to) else { continue };
                for &code in &coded.codes[row.at()] {
                    let changed = changed(circuit, to, code);
                    if changed & !bits != 0 && hazardous(reduced, coded, circuit, (from, to), end, code) {
                        bits |= changed;
                    }
                }
            }
        }
    }
    (0..circuit.bits).filter(|&i| bits >> i & 1 == 1).collect()
}

/// Columns to which the inputs may change: one bit, and with bursts several where the row stays or is open on the way.
fn changes(table: &FlowTable, discipline: Discipline, row: Row, from: Column) -> Vec<Column> {
    let mut columns: Vec<Column> = (0..table.inputs).map(|i| Column(from.0 ^ 1 << i)).collect();
    if discipline == Discipline::Burst {
        let leaves = |&to: &Column| table.next(row, to).is_some_and(|next| next != row);
        let clean = |&to: &Column| {
            from.between(to).all(|c| c == to || table.next(row, c).is_none_or(|next| next == row))
        };
        columns.extend(table.columns().filter(|&to| from.distance(to) > 1).filter(leaves).filter(clean));
    }
    columns
}

/// Bits that change on some way from a code under fixed inputs.
fn changed(circuit: &Circuit, column: Column, code: Code) -> u32 {
    settled(circuit, column, code.0).steps.iter().fold(0, |bits, &(a, b)| bits | (a ^ b))
}

fn settled(circuit: &Circuit, column: Column, code: u32) -> Settled {
    settle(code, |c| Some(circuit.next(circuit.point(u32::from(column.0), c))))
}

fn hazardous(
    reduced: &Reduced,
    coded: &Coded,
    circuit: &Circuit,
    (from, to): (Column, Column),
    s1: Row,
    code: Code,
) -> bool {
    let table = &reduced.table;
    from.between(to).filter(|&seen| seen != to).any(|seen| {
        match table.next(s1, seen).and_then(|s2| table.next(s2, to)) {
            Some(s3) => s3 != s1,
            None => in_functions(coded, circuit, (seen, to), s1, code),
        }
    })
}

/// The same test on the functions, from the codes that the move really ends in.
fn in_functions(coded: &Coded, circuit: &Circuit, (seen, to): (Column, Column), s1: Row, code: Code) -> bool {
    settled(circuit, to, code.0).ends.iter().any(|&end| {
        let back = settled(circuit, seen, end);
        !back.sound()
            || back.ends.iter().any(|&code| {
                let again = settled(circuit, to, code);
                !again.sound() || again.ends.iter().any(|&e| !coded.codes[s1.at()].contains(&Code(e)))
            })
    })
}
