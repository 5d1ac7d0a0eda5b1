//! The fewest state variables against HiGHS (crates.io `highs`): no codes with one bit less, and codes with as many.

mod common;

use std::sync::atomic::{AtomicUsize, Ordering};

use stillgate::base::{Bound, Row};
use stillgate::project::{Form, Method, Project, Shape};
use stillgate::spec::FlowTable;

use common::optimum::{Found, one_bit_steps, single_step};
use common::random::{CROWDED, primitive, shape_of, unrolled};
use common::{derive, text, with};

/// Seconds that the solver may take for one question.
const SECONDS: f64 = 120.0;

/// Most rows of a table whose steps of one bit are asked about: beyond, the solver needs minutes to say no.
const LARGEST: usize = 5;

/// How often a smaller number of bits, or of spare codes, must have been denied, for a test to mean something.
const LEAST: usize = 5;

/// The reduced table and the bits of a method, `None` for the bits where there are no such codes.
fn bits(project: &Project, method: Method) -> Option<(FlowTable, Option<usize>, usize)> {
    let design = derive(&with(project, &method, Form::Feedback, Shape::SumOfProducts));
    let merged = design.merged.as_ref()?;
    let reduced = merged.reduced.as_ref()?;
    let Some(coded) = &design.coded else {
        assert!(design.has_error(), "no codes, and nothing says why");
        return Some((reduced.table.clone(), None, 0));
    };
    assert_eq!(coded.bound, Bound::Proved, "{}", project.title);
    Some((reduced.table.clone(), Some(coded.bits), coded.spare.len()))
}

/// Every second table is crowded.
fn case(seed: u64) -> Project {
    if seed.is_multiple_of(2) { primitive(seed, shape_of(seed)) } else { unrolled(seed, CROWDED) }
}

/// Bits below which there are not enough codes for the rows.
fn fewest(rows: usize) -> usize {
    rows.next_power_of_two().trailing_zeros() as usize
}

#[test]
fn adjacency() {
    let denied = AtomicUsize::new(0);
    text::for_seeds("codes-adjacency", 60, |seed| {
        let project = case(seed);
        let Some((table, bits, _)) = bits(&project, Method::Adjacency) else { return };
        let rows = table.len();
        if rows > LARGEST || rows == LARGEST && bits.is_none() {
            return;
        }
        let Some(bits) = bits else {
            // If there are such codes at all, there are some with a bit less than rows.
            let most = rows - 1;
            assert!(
                !one_bit_steps(&table, most, false, SECONDS).feasible(),
                "there are codes of {most} bits"
            );
            denied.fetch_add(1, Ordering::Relaxed);
            return;
        };
        assert!(one_bit_steps(&table, bits, false, SECONDS).feasible(), "no codes of {bits} bits");
        if bits > fewest(rows) {
            let fewer = one_bit_steps(&table, bits - 1, false, SECONDS);
            assert_eq!(fewer.found, Found::Nothing, "{} bits are enough", bits - 1);
            denied.fetch_add(1, Ordering::Relaxed);
        }
    });
    assert!(denied.into_inner() > LEAST, "few of the cases had something to deny");
}

#[test]
fn shared_row() {
    let denied = AtomicUsize::new(0);
    text::for_seeds("codes-shared-row", 60, |seed| {
        let project = case(seed);
        let Some((table, bits, spare)) = bits(&project, Method::SharedRow) else { return };
        let rows = table.len();
        if rows > LARGEST {
            return;
        }
        let bits = bits.expect("spare codes always help");
        let best = one_bit_steps(&table, bits, true, SECONDS);
        assert_eq!(best.optimum() as usize, spare, "spare codes in {bits} bits");
        denied.fetch_add(usize::from(spare > 0), Ordering::Relaxed);
        if bits > fewest(rows) {
            let fewer = one_bit_steps(&table, bits - 1, true, SECONDS);
            assert_eq!(fewer.found, Found::Nothing, "{} bits are enough", bits - 1);
            denied.fetch_add(1, Ordering::Relaxed);
        }
    });
    assert!(denied.into_inner() > LEAST, "few of the cases had something to deny");
}

#[test]
fn single_steps() {
    let denied = AtomicUsize::new(0);
    text::for_seeds("codes-single-step", 60, |seed| {
        let project = case(seed);
        let Some((table, bits, _)) = bits(&project, Method::SingleStep) else { return };
        let bits = bits.expect("single-step codes always exist");
        assert!(single_step(&table, bits, SECONDS).feasible(), "no codes of {bits} bits");
        if bits > fewest(table.len()) {
            let fewer = single_step(&table, bits - 1, SECONDS);
            assert_eq!(fewer.found, Found::Nothing, "{} bits are enough", bits - 1);
            denied.fetch_add(1, Ordering::Relaxed);
        }
    });
    assert!(denied.into_inner() > LEAST, "few of the cases had something to deny");
}

/// The integer programs themselves, on three rows with moves between every two: a cube has no odd cycle.
#[test]
fn the_solver_knows_the_triangle() {
    let mut table = FlowTable::new(2, 1, vec!["A".into(), "B".into(), "C".into()]);
    for column in table.columns() {
        for row in table.rows() {
            // In columns 1, 2, 3 one row moves on to the next one round; in column 0 all rest.
            let moves = column.at() == row.at() + 1;
            let next = if moves { Row::new((row.at() + 1) % 3) } else { row };
            table.cell_mut(row, column).next = Some(next);
        }
    }
    assert!(!one_bit_steps(&table, 2, false, SECONDS).feasible());
    assert!(!one_bit_steps(&table, 3, false, SECONDS).feasible());
    assert_eq!(one_bit_steps(&table, 2, true, SECONDS).optimum(), 1);
    assert!(!single_step(&table, 2, SECONDS).feasible());
    assert!(single_step(&table, 3, SECONDS).feasible());
}
