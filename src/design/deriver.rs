//! Runs the chain and keeps what has not changed.
//!
//! Each stage is asked for its value with its own input as key: the project without its title for the check, the
//! specification for merging, the reduced table for the codes, and so on. An edit that leaves a stage's input as it
//! was leaves everything behind it as it was, whatever the edit touched; comparing costs far less than deriving.

use std::sync::Arc;

use crate::base::{Finding, Row};
use crate::codes::{self, Coded};
use crate::design::kept::Kept;
use crate::design::report;
use crate::design::settings::Settings;
use crate::design::values::Design;
use crate::gates;
use crate::logic::{self, Equations};
use crate::merge::{self, MergeChoice, Merged, Reduced};
use crate::project::choices::{CoverChoice, LogicChoice, Method};
use crate::project::{Layout, Project};
use crate::proof::{self, Proof, Races};
use crate::spec::{self, Spec};

/// Derives a project again and again, each time only from the first stage whose input has changed.
#[derive(Debug, Default)]
pub struct Deriver {
    checked: Kept<Project, Checked>,
    merged: Kept<(Arc<Spec>, MergeChoice, u64), Outcome<Merged>>,
    reduced: Kept<Reduced, Arc<Reduced>>,
    coded: Kept<(Arc<Reduced>, Method, u64), Outcome<Coded>>,
    races: Kept<(Arc<Reduced>, Arc<Coded>), Arc<Races>>,
    equations: Kept<(Machine, LogicChoice, u64), Arc<Equations>>,
    proof: Kept<(Machine, Arc<Equations>), Arc<Proof>>,
}

/// What the check gives: findings, and the table if none of them is an error.
type Checked = (Arc<Vec<Finding>>, Option<Arc<Spec>>);

/// What the equations are made from and held against.
type Machine = (Arc<Spec>, Arc<Reduced>, Arc<Coded>);

/// A stage's value, or why there is none.
type Outcome<T> = Result<Arc<T>, Vec<Finding>>;

impl Deriver {
    /// Derives the project. A stage that cannot run, and all stages after it, are `None` in the design.
    pub fn derive(&mut self, project: &Project, settings: &Settings<'_>) -> Design {
        let mut design = Design::default();
        self.run(project, settings, &mut design);
        report::notes(project, &mut design, settings.stop.raised());
        design
    }

    /// Fills the design from the first stage on, and returns at the first that cannot go on.
    fn run(&mut self, project: &Project, settings: &Settings<'_>, design: &mut Design) -> Option<()> {
        let spec = self.check(project, design)?;
        let merged = self.merge(project, &spec, settings, design)?;
        let reduced = self.reduced.get(merged.reduced.clone()?, |r| Arc::new(r.clone()), || true);
        let coded = self.code(project, &reduced, settings, design)?;
        self.race(&reduced, &coded, design)?;
        let equations = self.write(project, &spec, &reduced, &coded, settings, design)?;
        design.cost = Some(gates::cost(&equations, &project.choices.gates));
        let proof = self.proof.get(
            ((spec, reduced, coded), equations),
            |((s, r, c), e)| Arc::new(proof::prove(s, r, c, e)),
            || true,
        );
        report::proof_faults(&proof, &mut design.findings);
        design.proof = Some(proof);
        Some(())
    }

    fn check(&mut self, project: &Project, design: &mut Design) -> Option<Arc<Spec>> {
        let key = Project {
            title: String::new(),
            notes: String::new(),
            layout: Layout::default(),
            ..project.clone()
        };
        let make = |key: &Project| {
            let checked = spec::check(key);
            (Arc::new(checked.findings), checked.spec.map(Arc::new))
        };
        let (findings, spec) = self.checked.get(key, make, || true);
        design.findings.extend(findings.iter().cloned());
        design.spec.clone_from(&spec);
        spec
    }

    fn merge(
        &mut self,
        project: &Project,
        spec: &Arc<Spec>,
        settings: &Settings<'_>,
        design: &mut Design,
    ) -> Option<Arc<Merged>> {
        let choice = merge_choice(project, spec, settings.covers);
        let merged = self.merged.get(
            (spec.clone(), choice, settings.steps),
            |(spec, choice, _)| merge::merge(spec, choice, &settings.effort()).map(Arc::new),
            || !settings.stop.raised(),
        );
        let merged = taken(merged, design)?;
        report::cover_faults(&spec.table, &merged, &mut design.findings);
        design.merged = Some(merged.clone());
        Some(merged)
    }

    fn code(
        &mut self,
        project: &Project,
        reduced: &Arc<Reduced>,
        settings: &Settings<'_>,
        design: &mut Design,
    ) -> Option<Arc<Coded>> {
        let coded = self.coded.get(
            (reduced.clone(), project.choices.codes.method.clone(), settings.steps),
            |(reduced, method, _)| codes::assign(reduced, method, &settings.effort()).map(Arc::new),
            || !settings.stop.raised(),
        );
        let coded = taken(coded, design)?;
        design.coded = Some(coded.clone());
        Some(coded)
    }

    /// The race check; equations of codes with a critical race would prove nothing.
    fn race(&mut self, reduced: &Arc<Reduced>, coded: &Arc<Coded>, design: &mut Design) -> Option<()> {
        let races = self.races.get(
            (reduced.clone(), coded.clone()),
            |(reduced, coded)| Arc::new(proof::races(reduced, coded)),
            || true,
        );
        report::critical_races(reduced, coded, &races, &mut design.findings);
        let free = races.critical.is_empty();
        design.races = Some(races);
        free.then_some(())
    }

    /// The equations, if no function clashes.
    fn write(
        &mut self,
        project: &Project,
        spec: &Arc<Spec>,
        reduced: &Arc<Reduced>,
        coded: &Arc<Coded>,
        settings: &Settings<'_>,
        design: &mut Design,
    ) -> Option<Arc<Equations>> {
        let equations = self.equations.get(
            ((spec.clone(), reduced.clone(), coded.clone()), project.choices.logic.clone(), settings.steps),
            |((s, r, c), choice, _)| Arc::new(logic::equations(s, r, c, choice, &settings.effort())),
            || !settings.stop.raised(),
        );
        report::clashes(&equations, &mut design.findings);
        let whole = equations.clashes.is_empty();
        design.equations = Some(equations.clone());
        whole.then_some(equations)
    }
}

/// The value of a stage, or its findings added to the design's.
fn taken<T>(outcome: Outcome<T>, design: &mut Design) -> Option<Arc<T>> {
    outcome.map_err(|findings| design.findings.extend(findings)).ok()
}

/// The choices for merging, in rows. The check has refused names that no row has.
fn merge_choice(project: &Project, spec: &Spec, covers: usize) -> MergeChoice {
    let row = |name: &String| spec.table.names.iter().position(|n| n == name).map(Row::new);
    let choice = &project.choices.merging;
    MergeChoice {
        outputs: choice.outputs,
        by_hand: match &choice.cover {
            CoverChoice::Smallest => None,
            CoverChoice::ByHand(sets) => {
                Some(sets.iter().map(|set| set.iter().filter_map(row).collect()).collect())
            }
        },
        names: choice.names.clone(),
        covers,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::base::Level;
    use crate::project::{self, Form};

    fn latch() -> Project {
        let text = r#"(format: 1, title: "Latch", inputs: ["D", "G"], outputs: ["Q"], discipline: Single,
            initial: ("c", "00"), rows: [
            (name: "a", cells: {"01": ("a", "0"), "11": ("b", "-"), "00": ("c", "-")}),
            (name: "b", cells: {"11": ("b", "1"), "01": ("a", "-"), "10": ("e", "-")}),
            (name: "c", cells: {"00": ("c", "0"), "01": ("a", "-"), "10": ("d", "-")}),
            (name: "d", cells: {"10": ("d", "0"), "00": ("c", "-"), "11": ("b", "-")}),
            (name: "e", cells: {"10": ("e", "1"), "11": ("b", "-"), "00": ("f", "-")}),
            (name: "f", cells: {"00": ("f", "1"), "10": ("e", "-"), "01": ("a", "-")}),
        ])"#;
        project::read(text.as_bytes()).expect("a sound file")
    }

    fn same<T>(a: &Option<Arc<T>>, b: &Option<Arc<T>>) -> bool {
        matches!((a, b), (Some(a), Some(b)) if Arc::ptr_eq(a, b))
    }

    #[test]
    fn an_edit_runs_only_what_hangs_on_it() {
        let (mut deriver, settings) = (Deriver::default(), Settings::default());
        let mut project = latch();
        let first = deriver.derive(&project, &settings);
        assert!(first.proved(), "{:?}", first.findings);

        project.title.push('!');
        project.notes.push('!');
        let titled = deriver.derive(&project, &settings);
        assert!(same(&first.spec, &titled.spec) && same(&first.proof, &titled.proof));

        project.choices.logic.form = Form::SetReset;
        let formed = deriver.derive(&project, &settings);
        assert!(same(&first.merged, &formed.merged) && same(&first.coded, &formed.coded));
        assert!(!same(&first.equations, &formed.equations) && formed.proved());

        // An output that would have been held anyway: the table is another, what comes of it is the same.
        project.choices.logic.form = Form::Feedback;
        let back = deriver.derive(&project, &settings);
        if let Some(cell) = project.rows[0].cells.get_mut("00") {
            cell.outputs = "0".to_owned();
        }
        let given = deriver.derive(&project, &settings);
        assert!(!same(&back.spec, &given.spec));
        assert!(same(&back.merged, &given.merged) && same(&back.coded, &given.coded));
        assert_eq!(back.equations, given.equations);
    }

    #[test]
    fn a_value_that_was_cut_short_is_not_kept() {
        let mut deriver = Deriver::default();
        let project = latch();
        let stopped = Settings::default();
        stopped.stop.raise();
        deriver.derive(&project, &stopped);
        let design = deriver.derive(&project, &Settings::default());
        assert!(design.proved());
        assert!(design.merged.is_some_and(|m| m.bound.proved()));
        assert!(!design.findings.iter().any(|f| f.code == "not-proved"));
    }

    #[test]
    fn a_stop_with_grace_still_gives_a_whole_design() {
        let settings = Settings { grace: 100_000, ..Settings::default() };
        settings.stop.raise();
        let design = Deriver::default().derive(&latch(), &settings);
        assert!(design.proved(), "{:?}", design.findings);
    }

    #[test]
    fn a_cover_by_hand_that_is_not_closed_is_refused_with_the_reason() {
        let mut project = latch();
        let set = |names: &[&str]| names.iter().map(|n| (*n).to_owned()).collect::<Vec<_>>();
        project.choices.merging.cover = CoverChoice::ByHand(vec![set(&["a", "b", "e"]), set(&["c", "d"])]);
        let design = Deriver::default().derive(&project, &Settings::default());
        assert!(design.merged.is_some() && design.coded.is_none() && !design.proved());
        let errors: Vec<&str> =
            design.findings.iter().filter(|f| f.level == Level::Error).map(|f| f.code).collect();
        assert!(
            errors.contains(&"cover-leaves-row-out") && errors.contains(&"cover-incompatible"),
            "{errors:?}"
        );
    }
}
