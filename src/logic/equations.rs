//! The stage: all functions of a design, one after the other.

use crate::base::Effort;
use crate::codes::values::Coded;
use crate::logic::draft::{Draft, values};
use crate::logic::finish::finish;
use crate::logic::minimise::{Minimum, Problem};
use crate::logic::share::share;
use crate::logic::table::{Fault, Table};
use crate::logic::values::{Clash, Equations, Function, Phase, Target, mask};
use crate::logic::{essential, outputs, words};
use crate::merge::values::Reduced;
use crate::project::choices::{Form, LogicChoice, OutputStyle, Shape};
use crate::spec::values::Spec;

/// Hazard-free two-level equations for a reduced table and its codes.
///
/// Every function is a smallest one, or its [`bound`](Function::bound) says that `effort` ran out first; what cannot be done
/// is a [`Clash`], and its function is missing. One step of effort is about a microsecond; with no effort left the
/// result is still right and free of hazards, but not small. With products shared, the bound of each function tells of
/// all functions together. Inputs and state variables together: at most 32.
pub fn equations(
    spec: &Spec,
    reduced: &Reduced,
    coded: &Coded,
    choice: &LogicChoice,
    effort: &Effort<'_>,
) -> Equations {
    let table = Table::new(reduced, coded, late(spec, choice));
    let mut stage = Stage { spec, reduced, table: &table, choice, effort, clashes: Vec::new() };
    let functions = stage.functions();
    let clashes = stage.clashes;
    let (essential, burst_essential) = essential::essential(&reduced.table, spec.discipline);
    let implementation = essential::implementation(reduced, coded, &functions, choice.shape, spec.discipline);
    let notes = falls_with_rise(reduced, &table, &functions, choice.shape);
    let state = (0..coded.bits).map(|i| format!("y{}", i + 1));
    Equations {
        form: choice.form,
        shape: choice.shape,
        inputs: reduced.table.inputs,
        variables: spec.signals.inputs.iter().cloned().chain(state).collect(),
        functions,
        shared: choice.share,
        essential,
        burst_essential,
        implementation,
        clashes,
        notes,
    }
}

/// The outputs that change late, as a mask.
fn late(spec: &Spec, choice: &LogicChoice) -> u32 {
    let late = spec.signals.outputs.iter().enumerate().filter(|(_, name)| choice.late.contains(name));
    late.fold(0, |mask, (j, _)| mask | 1 << j)
}

struct Stage<'s, 'e> {
    spec: &'s Spec,
    reduced: &'s Reduced,
    table: &'s Table,
    choice: &'s LogicChoice,
    effort: &'s Effort<'e>,
    clashes: Vec<Clash>,
}

impl Stage<'_, '_> {
    fn functions(&mut self) -> Vec<Function> {
        let targets = self.targets();
        // Sharing comes last and needs something to work with.
        let reserve = if self.choice.share { self.effort.left() / 2 } else { 0 };
        let mut names = Vec::new();
        let mut drafts = Vec::new();
        let mut minima = Vec::new();
        for (n, &target) in targets.iter().enumerate() {
            // What is left is shared out, so that one hard function does not leave the others unproved.
            let left = self.effort.left();
            let keep = left - left.saturating_sub(reserve) / (targets.len() - n) as u64;
            let name = words::name(target, &self.spec.signals);
            if let Some((draft, minimum)) = self.function(target, &name, keep) {
                names.push(name);
                drafts.push(draft);
                minima.push(minimum);
            }
        }
        if self.choice.share && drafts.len() > 1 {
            let problems: Vec<&Problem> = drafts.iter().map(|d| &d.problem).collect();
            minima = share(&problems, &minima, self.effort);
        }
        let finished = drafts.into_iter().zip(names).zip(minima);
        finished
            .map(|((draft, name), m)| finish(draft, name, self.choice.shape, m.products, m.bound))
            .collect()
    }

    fn targets(&self) -> Vec<Target> {
        let excitations = (0..self.table.bits).flat_map(|i| match self.choice.form {
            Form::Feedback => vec![Target::Next(i)],
            Form::SetReset | Form::CElement => vec![Target::Set(i), Target::Reset(i)],
        });
        excitations.chain((0..self.reduced.table.outputs).map(Target::Output)).collect()
    }

    fn function(&mut self, target: Target, name: &str, keep: u64) -> Option<(Draft, Minimum)> {
        let draft = self.draft(target);
        let faults: Vec<&Fault> = self.table.faults.iter().filter(|f| same(f.target, target)).collect();
        let faults: Vec<Clash> = faults
            .into_iter()
            .chain(&draft.faults)
            .map(|fault| words::fault(fault, name, self.reduced))
            .collect();
        if !faults.is_empty() {
            for clash in faults {
                if !self.clashes.contains(&clash) {
                    self.clashes.push(clash);
                }
            }
            return None;
        }
        let solved = match target {
            Target::Output(j) if self.reduced.outputs == OutputStyle::PerCell => {
                let mask = draft.mask;
                outputs::settle(self.table, j, self.choice.shape, mask, draft, self.effort, keep)
            }
            _ => outputs::solve(draft, self.effort, keep),
        };
        match solved {
            Ok(solved) => Some(solved),
            Err((draft, unheld)) => {
                self.clashes.push(words::unheld(&draft, &unheld, name, self.reduced));
                None
            }
        }
    }

    fn draft(&self, target: Target) -> Draft {
        let per_row = matches!(target, Target::Output(_)) && self.reduced.outputs == OutputStyle::PerRow;
        let mask = if per_row { self.table.state_mask() } else { mask(self.table.variables()) };
        Draft::new(self.table, target, self.choice.shape, mask, values(self.table, target))
    }
}

/// Whether a fault found for one target hits another: a fault of an excitation hits both functions of its latch.
fn same(found: Target, target: Target) -> bool {
    match (found, target) {
        (Target::Next(a), Target::Next(b) | Target::Set(b) | Target::Reset(b)) => a == b,
        _ => found == target,
    }
}

/// Input changes in which one side of a latch falls while the other rises.
fn falls_with_rise(reduced: &Reduced, table: &Table, functions: &[Function], shape: Shape) -> Vec<String> {
    let find = |target| functions.iter().find(|f| f.target == target);
    let mut notes = Vec::new();
    for i in 0..table.bits {
        let (Some(set), Some(reset)) = (find(Target::Set(i)), find(Target::Reset(i))) else { continue };
        for span in table.spans.iter().filter(|s| s.state && s.phase == Phase::Input) {
            let (start, end) = (table.points[span.start], table.points[span.end]);
            for (falls, rises) in [(set, reset), (reset, set)] {
                if falls.value(shape, start) && !falls.value(shape, end) && rises.value(shape, end) {
                    notes.push(format!(
                        "{}: {} falls while {} rises; a fault only if both rails of the latch feed logic",
                        words::move_text(reduced, span.cause),
                        falls.name,
                        rises.name
                    ));
                }
            }
        }
    }
    notes
}
