//! Outputs that belong to rows: a value for each code, so that output functions depend on the state variables alone.
//!
//! The codes of a row have the row's outputs. A code between two rows may have either value as long as the output changes
//! at most once on every way that passes it: "once it has changed, it stays changed" is an implication between
//! neighbouring codes, and what the rows force is carried along these implications until nothing changes. What is then
//! still open may be all 0 or all 1, for implications among open codes alone hold either way. Polynomial, and complete:
//! a contradiction met here cannot be avoided.

use crate::base::Outputs;
use crate::codes::values::Coded;
use crate::logic::table::{Fault, Passage, Table};
use crate::logic::values::Target;
use crate::merge::values::Reduced;

/// Once the output has the value at one code, it has it at the next.
struct Edge {
    from: usize,
    to: usize,
    value: bool,
    cause: usize,
}

/// Gives every point the outputs of its code, and reports outputs that would have to change twice.
pub(crate) fn settle(table: &mut Table, reduced: &Reduced, coded: &Coded, runs: &[Passage]) {
    let mut codes: Vec<u32> = (0..table.points.len()).map(|i| table.code(i).0).collect();
    codes.sort_unstable();
    codes.dedup();
    let mut words = vec![Outputs::default(); codes.len()];
    for row in reduced.table.rows() {
        let word = reduced.table.row_cells(row).iter().fold(Outputs::default(), |w, c| w.or(c.outputs));
        for code in &coded.codes[row.at()] {
            if let Ok(at) = codes.binary_search(&code.0) {
                words[at] = word;
            }
        }
    }
    for output in 0..reduced.table.outputs {
        let mut values: Vec<Option<bool>> = words.iter().map(|w| w.get(output)).collect();
        settle_one(table, &codes, runs, output, &mut values);
        for (word, value) in words.iter_mut().zip(values) {
            *word = word.with(output, value);
        }
    }
    for i in 0..table.points.len() {
        if let Ok(at) = codes.binary_search(&table.code(i).0) {
            table.outputs[i] = words[at];
        }
    }
}

fn settle_one(
    table: &mut Table,
    codes: &[u32],
    runs: &[Passage],
    output: usize,
    values: &mut [Option<bool>],
) {
    let at = |table: &Table, point: usize| codes.binary_search(&table.code(point).0).unwrap_or(0);
    let mut edges = Vec::new();
    let mut ones = 0usize;
    let mut zeros = 0usize;
    for run in runs.iter().filter(|r| r.bound >> output & 1 == 1) {
        let (Some(&first), Some(&last)) = (run.path.first(), run.path.last()) else { continue };
        let (first, last) = (at(table, first), at(table, last));
        let (Some(old), Some(new)) = (values[first], values[last]) else { continue };
        if old == new {
            for &point in &run.passed {
                let code = at(table, point);
                if values[code] == Some(!old) {
                    refuse(table, output, run.cause);
                }
                values[code] = Some(old);
            }
            continue;
        }
        let open = run.passed.iter().filter(|&&p| values[at(table, p)].is_none()).count();
        if new {
            ones += open;
        } else {
            zeros += open;
        }
        let mut edge = |from: usize, to: usize| {
            edges.push(Edge { from, to, value: new, cause: run.cause });
        };
        if run.together {
            for &p in &run.passed {
                let p = at(table, p);
                let ahead = (codes[p] ^ codes[last]) & (codes[first] ^ codes[last]);
                for bit in (0..32).map(|b| 1 << b).filter(|bit| ahead & bit != 0) {
                    if let Ok(q) = codes.binary_search(&(codes[p] ^ bit)) {
                        edge(p, q);
                    }
                }
            }
        } else {
            run.path.windows(2).for_each(|w| edge(at(table, w[0]), at(table, w[1])));
        }
    }
    carry(table, output, &edges, values);
    for edge in &edges {
        for code in [edge.from, edge.to] {
            values[code] = values[code].or(Some(ones > zeros));
        }
    }
}

/// Carries what is known along the edges until nothing changes.
fn carry(table: &mut Table, output: usize, edges: &[Edge], values: &mut [Option<bool>]) {
    let mut broken = vec![false; edges.len()];
    let mut changed = true;
    while changed {
        changed = false;
        for (n, edge) in edges.iter().enumerate() {
            match (values[edge.from], values[edge.to]) {
                (Some(a), None) if a == edge.value => values[edge.to] = Some(a),
                (None, Some(b)) if b != edge.value => values[edge.from] = Some(b),
                (Some(a), Some(b)) if a == edge.value && b != a => {
                    if !std::mem::replace(&mut broken[n], true) {
                        refuse(table, output, edge.cause);
                    }
                    continue;
                }
                _ => continue,
            }
            changed = true;
        }
    }
}

fn refuse(table: &mut Table, output: usize, cause: usize) {
    table.faults.push(Fault {
        target: Target::Output(output),
        moves: vec![cause],
        text: "the output depends on the state alone and would change more than once on the way of this move, since \
               a code on it has another value for the sake of another way; outputs per cell, or codes by another \
               method, would help"
            .into(),
    });
}
