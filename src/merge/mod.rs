//! Merging: implication table, compatible sets, the smallest closed cover, the reduced table.
//!
//! [`merge`] is told from the top: what may be merged ([`values::PairTable`]), the maximal compatible sets, the closed
//! cover (the smallest, or the user's, checked), and the table that it makes.

mod greedy;
mod model;
mod pairs;
mod problem;
mod reduce;
mod row_outputs;
mod search;
pub mod values;

use fixedbitset::FixedBitSet;

use crate::base::{Bound, Effort, Finding, Row};
use crate::project::choices::OutputStyle;
use crate::search::clique::{self, Graph};
use crate::spec::values::{FlowTable, Spec};

pub use values::{Conflict, CoverFault, MergeChoice, Merged, Pair, PairTable, Reduced, RowSet, Verdict};

/// Maximal compatibles are listed up to this number. They are for the eye: no search depends on them.
pub const MOST_MAXIMAL: usize = 5_000;

/// Merges the rows of a checked specification.
///
/// # Errors
///
/// Only where outputs belong to rows and the table asks for what no row can give: findings of level error, each naming the
/// row and its columns.
pub fn merge(spec: &Spec, choice: &MergeChoice, effort: &Effort) -> Result<Merged, Vec<Finding>> {
    let row_outputs = match choice.outputs {
        OutputStyle::PerCell => None,
        OutputStyle::PerRow => Some(row_outputs::row_outputs(spec)?),
    };
    let pairs = pairs::pair_table(&spec.table, row_outputs.as_deref());
    let diagram = pairs::merger_diagram(&pairs);
    let problem = problem::Problem::new(&spec.table, &diagram, effort);
    let clique: Vec<Row> = problem.clique.iter().map(|&r| Row::new(r)).collect();

    let mut merged = match &choice.by_hand {
        None => {
            let found = search::smallest(&problem, choice.covers, effort);
            Merged {
                cover: found.cover,
                further: found.further,
                lower_bound: found.lower,
                bound: found.bound,
                tie_proved: found.tie_proved,
                ..unmerged(pairs, clique)
            }
        }
        Some(sets) => by_hand(spec, sets, &problem, unmerged(pairs, clique), effort),
    };
    if merged.faults.is_empty() {
        merged.reduced = Some(reduce::reduce(spec, &merged.cover, choice, row_outputs.as_deref()));
    }
    list_maximal(&spec.table, &diagram, &mut merged, effort);
    Ok(merged)
}

fn unmerged(pairs: PairTable, clique: Vec<Row>) -> Merged {
    Merged {
        pairs,
        maximal: Vec::new(),
        maximal_complete: false,
        class_sets: Vec::new(),
        cover: Vec::new(),
        further: Vec::new(),
        faults: Vec::new(),
        lower_bound: clique.len(),
        clique,
        bound: Bound::Proved,
        tie_proved: true,
        reduced: None,
    }
}

/// Checks a cover by hand, and finds out whether it is smallest.
fn by_hand(
    spec: &Spec,
    sets: &[Vec<Row>],
    problem: &problem::Problem,
    blank: Merged,
    effort: &Effort,
) -> Merged {
    let cover: Vec<RowSet> = sets
        .iter()
        .map(|set| {
            let mut rows = FixedBitSet::with_capacity(problem.rows);
            set.iter().filter(|r| r.at() < problem.rows).for_each(|r| rows.insert(r.at()));
            rows
        })
        .collect();
    let lists: Vec<Vec<Row>> = cover.iter().map(|set| set.ones().map(Row::new).collect()).collect();
    let faults = problem::cover_faults(&spec.table, &blank.pairs, &lists);
    let lower_bound =
        if faults.is_empty() { search::lower_bound(problem, cover.len(), effort) } else { blank.lower_bound };
    let bound = if faults.is_empty() && lower_bound == cover.len() {
        Bound::Proved
    } else {
        Bound::Stopped { lower: lower_bound }
    };
    Merged { cover, faults, lower_bound, bound, ..blank }
}

/// Lists the maximal compatibles with their class sets, if they can be listed.
fn list_maximal(table: &FlowTable, diagram: &Graph, merged: &mut Merged, effort: &Effort) {
    let (maximal, complete) = clique::maximal(diagram, MOST_MAXIMAL, effort);
    if complete {
        merged.class_sets = maximal.iter().map(|set| class_sets(table, set)).collect();
        merged.maximal = maximal;
    }
    merged.maximal_complete = complete;
}

/// The sets of two or more next rows that closure asks to lie together, none inside `set` or inside another.
fn class_sets(table: &FlowTable, set: &RowSet) -> Vec<RowSet> {
    let mut asked: Vec<RowSet> = Vec::new();
    for column in table.columns() {
        let mut next = FixedBitSet::with_capacity(table.len());
        set.ones().filter_map(|r| table.next(Row::new(r), column)).for_each(|r| next.insert(r.at()));
        if next.count_ones(..) < 2 || next.is_subset(set) || asked.iter().any(|other| next.is_subset(other)) {
            continue;
        }
        asked.retain(|other| !other.is_subset(&next));
        asked.push(next);
    }
    asked.sort_by(clique::compare_as_lists);
    asked
}
