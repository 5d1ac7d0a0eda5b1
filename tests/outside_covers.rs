//! The smallest closed cover against the optimum of HiGHS (crates.io `highs`), on primitive tables of both disciplines.

mod common;

use std::sync::atomic::{AtomicUsize, Ordering};

use stillgate::project::Project;

use common::optimum::smallest_cover;
use common::random::{UNROLLED, Unrolled, primitive, shape_of, unrolled};
use common::{derive, text};

/// Seconds that the solver may take for one table.
const SECONDS: f64 = 120.0;

fn check(project: &Project) -> bool {
    let design = derive(project);
    let (Some(spec), Some(merged)) = (&design.spec, &design.merged) else {
        assert!(design.has_error(), "a stage is missing and nothing says why");
        return false;
    };
    assert!(merged.bound.proved(), "a table of {} rows is not proved", spec.table.len());
    assert_eq!(merged.lower_bound, merged.cover.len());
    let best = smallest_cover(&spec.table, merged.cover.len(), SECONDS);
    assert_eq!(best.optimum() as usize, merged.cover.len(), "{}", project.title);
    true
}

#[test]
fn small_tables() {
    let met = AtomicUsize::new(0);
    text::for_seeds("covers", 400, |seed| {
        met.fetch_add(usize::from(check(&primitive(seed, shape_of(seed)))), Ordering::Relaxed);
    });
    assert!(met.into_inner() > 200);
}

#[test]
fn unrolled_machines() {
    // Half the size of the benchmark's tables: unoptimised, the solver needs seconds for those.
    let of = Unrolled { states: (3, 5), inputs: 3, rows: (12, 24), ..UNROLLED };
    text::for_seeds("covers-unrolled", 25, |seed| assert!(check(&unrolled(seed, of))));
}
