//! The proof of a whole design, in the order of the chain: tables, functions, hazards, power-up, feedback.
//!
//! Exact but for power-up of very large circuits (see `power_up`). Each part states its cost.

use crate::base::Row;
use crate::codes::values::Coded;
use crate::logic::values::Equations;
use crate::merge::values::Reduced;
use crate::proof::circuit::Circuit;
use crate::proof::conform::Conform;
use crate::proof::feedback::slow;
use crate::proof::hazards::{Naming, check};
use crate::proof::power_up::power_up;
use crate::proof::report::Report;
use crate::proof::values::Proof;
use crate::proof::walk::walk;
use crate::spec::values::{FlowTable, Spec};

/// Proves that the functions do what the specification as written says, without a glitch, or shows where they do not.
///
/// Nothing that a stage says of its own work is read: from `spec` the table as written, its initial total state and the
/// discipline; from `reduced` the table and the members of its rows; from `coded` codes and encoded table; from
/// `equations` products and shape.
pub fn prove(spec: &Spec, reduced: &Reduced, coded: &Coded, equations: &Equations) -> Proof {
    let mut report = Report::default();
    if !fits(spec, reduced, coded, &mut report) {
        return report.proof;
    }
    let moves = walk(spec, reduced, &mut report);
    let Some(circuit) = Circuit::new(reduced, coded, equations, &mut report) else {
        return report.proof;
    };
    let naming = Naming { variables: &equations.variables, rows: &reduced.table.names };
    let conform =
        Conform { reduced, coded, circuit: &circuit, output_names: &spec.signals.outputs, naming: &naming };
    for stretch in conform.check(&moves, &mut report) {
        check(&circuit, stretch, &naming, &mut report);
    }
    power_up(&circuit, coded, &mut report);
    report.proof.slow = slow(reduced, coded, &circuit, spec.discipline);
    report.proof
}

/// Whether tables and codes speak of the same rows, inputs and bits. If not, nothing else can be compared.
fn fits(spec: &Spec, reduced: &Reduced, coded: &Coded, report: &mut Report) -> bool {
    let (given, table) = (&spec.given, &reduced.table);
    let known = |row: &Row, rows: usize| row.at() < rows;
    let cells = |t: &FlowTable| {
        t.rows().flat_map(|r| t.row_cells(r)).filter_map(|c| c.next).all(|next| known(&next, t.len()))
    };
    let tables = given.inputs == table.inputs
        && given.outputs == table.outputs
        && spec.signals.outputs.len() == given.outputs
        && reduced.members.len() == table.len()
        && reduced.members.iter().flatten().all(|r| known(r, given.len()))
        && known(&spec.initial.row, given.len())
        && known(&reduced.initial.row, table.len())
        && cells(given)
        && cells(table);
    if !tables {
        report.mismatch("tables", || "primitive and reduced table do not have the same shape".to_string());
        return false;
    }
    let limit = 1u64 << coded.bits.min(31);
    let codes = coded.bits <= 31
        && coded.codes.len() == table.len()
        && coded.codes.iter().flatten().chain([&coded.initial]).all(|c| u64::from(c.0) < limit)
        && coded
            .encoded
            .entries
            .keys()
            .all(|&(code, column)| u64::from(code.0) < limit && column.at() < 1 << table.inputs)
        && coded.codes.iter().all(|codes| !codes.is_empty());
    if !codes {
        report.mismatch("functions", || "codes and reduced table do not have the same shape".to_string());
    }
    codes
}
