//! Early or late: outputs at the unstable cell between two ends, where either value will do.
//!
//! A point left to choice is not simply free. Turned on, one product must hold it together with each neighbour on the way
//! that is 1; turned off, the neighbours' changes end or begin there. The search first leaves all such points free, which
//! can only be cheaper; where the result breaks a condition it tries both values of one point. Exact as long as it
//! finishes: then no choice of early and late outputs is cheaper. It is bounded by a number of trials, and never returns
//! more than the minimum with early outputs, which is what `proved` claims.

use crate::base::Effort;
use crate::logic::draft::{Draft, Value, values as values_of};
use crate::logic::minimise::{Minimum, Unheld};
use crate::logic::table::Table;
use crate::logic::values::{Cube, Target};
use crate::project::choices::Shape;

/// Minimisations tried for one output, and steps spent on them.
const TRIALS: usize = 48;
const STEPS: u64 = 20_000;

/// The draft of an output with its choices settled, and its minimum.
pub(crate) fn settle(
    table: &Table,
    output: usize,
    shape: Shape,
    mask: u32,
    early: Draft,
    effort: &Effort<'_>,
    keep: u64,
) -> Result<(Draft, Minimum), (Box<Draft>, Unheld)> {
    let choices: Vec<usize> =
        (0..table.points.len()).filter(|&i| table.choice[i] >> output & 1 == 1).collect();
    if choices.is_empty() {
        return solve(early, effort, keep);
    }
    let mut open = early.values.clone();
    for &i in &choices {
        open[i] = Value::Free;
    }
    let mut search = Search {
        table,
        output,
        shape,
        mask,
        choices: &choices,
        effort,
        keep,
        until: effort.left().saturating_sub(STEPS),
        trials: 0,
        best: None,
    };
    search.node(open, Some(early));
    match search.best {
        Some((_, draft, minimum)) => Ok((draft, minimum)),
        // Only a search that was cut off before the early minimum was known.
        None => {
            let early = Draft::new(
                table,
                Target::Output(output),
                shape,
                mask,
                values_of(table, Target::Output(output)),
            );
            solve(early, effort, keep)
        }
    }
}

/// Minimises a draft.
pub(crate) fn solve(
    draft: Draft,
    effort: &Effort<'_>,
    keep: u64,
) -> Result<(Draft, Minimum), (Box<Draft>, Unheld)> {
    match draft.problem.minimum(effort, keep) {
        Ok(minimum) => Ok((draft, minimum)),
        Err(unheld) => Err((Box::new(draft), unheld)),
    }
}

/// Products, then literals.
type Price = (usize, u32);

fn price(minimum: &Minimum) -> Price {
    (minimum.products.len(), minimum.products.iter().map(|p| p.literals()).sum())
}

struct Search<'s, 'e> {
    table: &'s Table,
    output: usize,
    shape: Shape,
    mask: u32,
    choices: &'s [usize],
    effort: &'s Effort<'e>,
    keep: u64,
    until: u64,
    trials: usize,
    best: Option<(Price, Draft, Minimum)>,
}

impl Search<'_, '_> {
    /// Minimises with some choices open. `early` is the draft with all of them early, to be tried before any branching.
    fn node(&mut self, values: Vec<Value>, early: Option<Draft>) {
        if self.trials >= TRIALS || self.trials > 0 && self.effort.left() <= self.until {
            return;
        }
        self.trials += 1;
        let target = Target::Output(self.output);
        let draft = Draft::new(self.table, target, self.shape, self.mask, values.clone());
        let Ok(minimum) = draft.problem.minimum(self.effort, self.keep) else { return };
        if self.best.as_ref().is_some_and(|(best, ..)| price(&minimum) >= *best) {
            return;
        }
        let mut settled = values.clone();
        for &i in self.choices.iter().filter(|&&i| values[i] == Value::Free) {
            settled[i] = self.value(&minimum, i);
        }
        let Some(broken) = self.broken(&minimum, &values, &settled) else {
            let whole = Draft::new(self.table, target, self.shape, self.mask, settled);
            self.best = Some((price(&minimum), whole, minimum));
            return;
        };
        if let Some(early) = early
            && let Ok(minimum) = early.problem.minimum(self.effort, self.keep)
        {
            self.best = Some((price(&minimum), early, minimum));
        }
        let first = settled[broken];
        for value in [first, if first == Value::On { Value::Off } else { Value::On }] {
            let mut values = values.clone();
            values[broken] = value;
            self.node(values, None);
        }
    }

    /// The value that the products give to a point.
    fn value(&self, minimum: &Minimum, at: usize) -> Value {
        let held = minimum.products.iter().any(|p| p.holds(self.table.points[at]));
        if held == (self.shape == Shape::SumOfProducts) { Value::On } else { Value::Off }
    }

    /// A choice that was left open and that the products settled in a way that glitches.
    fn broken(&self, minimum: &Minimum, open: &[Value], settled: &[Value]) -> Option<usize> {
        let held = if self.shape == Shape::SumOfProducts { Value::On } else { Value::Off };
        self.table.spans.iter().filter(|s| s.outputs >> self.output & 1 == 1).find_map(|span| {
            let choice = [span.start, span.end]
                .into_iter()
                .find(|&i| open[i] == Value::Free && settled[i] != Value::Free)?;
            let both = settled[span.start] == held && settled[span.end] == held;
            let cube: Cube = self.table.cube(span.start, span.end);
            (both && !minimum.products.iter().any(|p| p.contains(cube))).then_some(choice)
        })
    }
}
