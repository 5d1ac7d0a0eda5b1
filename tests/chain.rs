//! The whole chain on thousands of tables that nobody drew: random ones, unrolled machines, and every small one.
//!
//! Whatever the table, method, form and shape: no panic; derived and proved, or refused with a reason; the cover closed,
//! the codes free of critical races, the functions right in a simulation that knows only the primitive table; the record
//! is JSON; saving and loading changes nothing. Seeds that ever failed are kept in tests/data/seeds and tried first.

mod common;

use std::sync::atomic::{AtomicUsize, Ordering};

use stillgate::base::{Level, Row};
use stillgate::design::Design;
use stillgate::project::{Discipline, Form, Method, Project, Shape};

use common::random::{UNROLLED, primitive, shape_of, unrolled};
use common::small::Size;
use common::{derive, naive, simulate, text, with};

/// How a derivation ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum End {
    /// Everything derived, and the proof holds.
    Proved,
    /// An error or a clash, with a reason.
    Refused,
}

/// Holds a design against its project.
fn sound(project: &Project, design: &Design) -> End {
    let what = format!(
        "{}: {:?} {:?} {:?}",
        project.title, project.choices.codes.method, project.choices.logic.form, project.choices.logic.shape
    );
    for finding in &design.findings {
        assert!(
            !finding.text.trim().is_empty() && !finding.code.is_empty(),
            "{what}: a finding says nothing"
        );
    }
    if let (Some(spec), Some(merged)) = (&design.spec, &design.merged) {
        let cover: Vec<Vec<Row>> =
            merged.cover.iter().map(|set| set.ones().map(Row::new).collect()).collect();
        let fault = naive::cover_fault(&spec.table, &naive::incompatible(&spec.table), &cover);
        assert_eq!(fault, None, "{what}");
        assert!(merged.lower_bound <= cover.len() && merged.clique.len() <= merged.lower_bound, "{what}");
    }
    if let Some(races) = &design.races {
        assert!(races.critical.is_empty(), "{what}: {:?}", races.critical);
    }
    if let Some(proof) = &design.proof {
        let clashes = design.equations.as_ref().is_some_and(|e| !e.clashes.is_empty());
        assert!(clashes || proof.holds(), "{what}: {:?} {:?}", proof.mismatches, proof.hazards);
    }
    if design.proved() {
        return End::Proved;
    }
    let errors = design.findings.iter().filter(|f| f.level == Level::Error).count();
    let clashes = design.equations.as_ref().map_or(&[][..], |e| &e.clashes);
    assert!(errors > 0 || !clashes.is_empty(), "{what}: refused, and nothing says why: {design:?}");
    for clash in clashes {
        assert!(!clash.text.is_empty() && !clash.transitions.is_empty(), "{what}: a clash says nothing");
        let single = project.discipline == Discipline::Single;
        let late = project.choices.codes.method == Method::SingleStep && !clash.function.starts_with('Y');
        assert!(!single || late, "{what}: single input changes never clash: {clash:?}");
    }
    End::Refused
}

/// The record is JSON of the agreed schema, and says the same of the proof as the design.
fn record_parses(project: &Project, design: &Design) {
    let record: serde_json::Value =
        serde_json::from_str(&stillgate::handoff::record(project, design)).expect("the record is JSON");
    assert_eq!(record["schema"], 1);
    assert_eq!(record["title"], project.title.as_str());
    assert_eq!(record["inputs"].as_array().map(Vec::len), Some(project.inputs.len()));
    for (stage, there) in [
        ("merging", design.merged.is_some()),
        ("codes", design.coded.is_some()),
        ("equations", design.equations.is_some()),
        ("proof", design.proof.is_some()),
    ] {
        assert_eq!(!record[stage].is_null(), there, "{stage}");
    }
    if let Some(proof) = &design.proof {
        assert_eq!(record["proof"]["conforms"], proof.conforms());
    }
}

/// Saving and loading is the identity, and so is saving again.
fn file_is_faithful(project: &Project) {
    let saved = stillgate::project::write(project);
    let loaded = stillgate::project::read(saved.as_bytes()).expect("what was written can be read");
    assert_eq!(&loaded, project);
    assert_eq!(stillgate::project::write(&loaded), saved);
}

/// Two runs on one input give one result.
fn same(one: &Design, two: &Design) {
    assert_eq!(one.findings, two.findings);
    assert_eq!(one.spec, two.spec);
    assert_eq!(one.merged, two.merged);
    assert_eq!(one.coded, two.coded);
    assert_eq!(one.races, two.races);
    assert_eq!(one.equations, two.equations);
    assert_eq!(one.cost, two.cost);
    assert_eq!(one.proof, two.proof);
}

#[test]
fn random_tables() {
    let proved = AtomicUsize::new(0);
    text::for_seeds("chain", 2400, |seed| {
        let project = primitive(seed, shape_of(seed));
        let method = &Method::ALL[seed as usize % 5];
        let project =
            with(&project, method, Form::ALL[seed as usize / 5 % 3], Shape::ALL[seed as usize / 15 % 2]);
        let design = derive(&project);
        let end = sound(&project, &design);
        record_parses(&project, &design);
        file_is_faithful(&project);
        if end == End::Proved {
            simulate::walk(&design, seed, 60);
            proved.fetch_add(1, Ordering::Relaxed);
        }
        if seed % 16 == 0 {
            same(&design, &derive(&project));
        }
    });
    let proved = proved.into_inner();
    assert!(proved > 1500, "only {proved} of 2400 tables were derived");
}

#[test]
fn all_methods_forms_and_shapes() {
    text::for_seeds("chain-all", 150, |seed| {
        let project = primitive(seed.wrapping_add(1 << 32), shape_of(seed));
        every_way(&project);
    });
}

#[test]
fn unrolled_machines() {
    text::for_seeds("chain-unrolled", 12, |seed| {
        let project = unrolled(seed, UNROLLED);
        for method in [Method::SharedRow, Method::SingleStep, Method::OneHot] {
            let project =
                with(&project, &method, Form::ALL[seed as usize % 3], Shape::ALL[seed as usize / 3 % 2]);
            let design = derive(&project);
            assert_eq!(sound(&project, &design), End::Proved, "{method:?}: {:?}", design.findings);
            simulate::walk(&design, seed, 200);
        }
        file_is_faithful(&project);
    });
}

/// Derives a project by every method, form and shape. Returns how many of the thirty were proved.
fn every_way(project: &Project) -> usize {
    let mut proved = 0;
    for method in &Method::ALL {
        for form in Form::ALL {
            for shape in Shape::ALL {
                let project = with(project, method, form, shape);
                let design = derive(&project);
                if sound(&project, &design) == End::Proved {
                    simulate::walk(&design, 1, 20);
                    proved += 1;
                } else if design.spec.is_some() && project.discipline == Discipline::Single {
                    // Only these may say that there is no solution.
                    assert!(
                        matches!(method, Method::Adjacency | Method::MultipleRow | Method::SingleStep),
                        "{method:?} refuses: {:?}",
                        design.findings
                    );
                }
            }
        }
    }
    proved
}

/// Every table of a size, or every `stride`-th where there are too many to try them all in a test. The stride is prime and
/// no divisor of the number of kinds of cells, so that every cell takes all its values.
fn every_small_table(size: Size, stride: usize, at_least: usize) {
    let (mut tables, mut proved) = (0, 0);
    for number in (0..size.count()).step_by(stride) {
        let Some(project) = size.table(number) else { continue };
        tables += 1;
        proved += usize::from(every_way(&project) > 0);
    }
    assert!(tables >= at_least, "only {tables} tables");
    assert!(proved * 2 > tables, "only {proved} of {tables} tables could be derived");
}

#[test]
fn every_table_of_two_rows_and_one_input() {
    every_small_table(Size { rows: 2, inputs: 1, discipline: Discipline::Single }, 1, 100);
}

#[test]
fn tables_of_three_rows_and_one_input() {
    every_small_table(Size { rows: 3, inputs: 1, discipline: Discipline::Single }, 13, 1000);
}

#[test]
fn tables_of_two_rows_and_two_inputs() {
    every_small_table(Size { rows: 2, inputs: 2, discipline: Discipline::Single }, 101, 1000);
}

#[test]
fn tables_of_two_rows_and_two_inputs_with_bursts() {
    every_small_table(Size { rows: 2, inputs: 2, discipline: Discipline::Burst }, 103, 1000);
}
