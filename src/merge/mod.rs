//! Merging: implication table, compatible sets, the smallest closed cover, the reduced table.
//!
//! [`merge`] is told from the top: what may be merged ([`values::PairTable`]), the maximal compatible sets, the closed
//! cover (the smallest, or the user's, checked), and the table that it makes.

mod compatibles;
mod greedy;
mod model;
mod pairs;
mod problem;
mod reduce;
mod row_outputs;
mod search;
pub mod values;

use fixedbitset::FixedBitSet;

use crate::base::{Bound, Effort, Finding, Outputs, Row};
use crate::project::choices::OutputStyle;
use crate::spec::values::Spec;

pub use compatibles::MOST_MAXIMAL;
pub use values::{Conflict, CoverFault, MergeChoice, Merged, Pair, PairTable, Reduced, RowSet, Verdict};

/// Merges the rows of a checked specification.
///
/// # Errors
///
/// Only where outputs belong to rows and the table asks for what no row can give: findings of level error, each naming the
/// row and its columns.
pub fn merge(spec: &Spec, choice: &MergeChoice, effort: &Effort) -> Result<Merged, Vec<Finding>> {
    let row_outputs = words_of_rows(spec, choice.outputs)?;
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
    compatibles::list(&diagram, &problem, &mut merged, effort);
    Ok(merged)
}

/// The implication table alone.
///
/// # Errors
///
/// As [`merge`].
pub fn implication_table(spec: &Spec, outputs: OutputStyle) -> Result<PairTable, Vec<Finding>> {
    let row_outputs = words_of_rows(spec, outputs)?;
    Ok(pairs::pair_table(&spec.table, row_outputs.as_deref()))
}

/// A word of outputs for each row, where outputs belong to rows.
fn words_of_rows(spec: &Spec, outputs: OutputStyle) -> Result<Option<Vec<Outputs>>, Vec<Finding>> {
    match outputs {
        OutputStyle::PerCell => Ok(None),
        OutputStyle::PerRow => row_outputs::row_outputs(spec).map(Some),
    }
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
