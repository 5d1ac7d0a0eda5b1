//! The exact searches side by side with a general integer-programming solver (HiGHS) on the same cases in one run.
//!
//! `cargo bench --bench general` prints a table for DEVELOPERS.md; `-- --quick` tries each once. The solver is charged only
//! for the time inside it, not for building its model; the program is charged for the whole stage, from plain values to plain
//! values. Both must agree on every case. Where the solver reaches its limit its time counts as the limit, which flatters it.

#![allow(clippy::print_stdout)]

#[path = "../common/mod.rs"]
mod common;

use std::time::Instant;

use stillgate::base::Effort;
use stillgate::codes::assign;
use stillgate::design::Design;
use stillgate::logic::equations;
use stillgate::merge::{MergeChoice, merge};
use stillgate::project::{Form, Method, Project, Shape};

use common::optimum::{Answer, Found, PRODUCT, fewest_products, one_bit_steps, single_step, smallest_cover};
use common::random::{CROWDED, UNROLLED, Unrolled, unrolled};
use common::{derive, median, with};

/// Seconds that the solver gets for a case.
const LIMIT: f64 = 60.0;

/// Steps that the program gets for a case: more than any of them needs.
const STEPS: u64 = 100_000_000;

fn main() {
    let quick = std::env::args().any(|a| a == "--quick");
    let cases = if quick { 3 } else { 50 };
    println!("| search | cases | ours, median ms | solver, median ms | ratio, median | ratio, worst |");
    println!("| --- | ---: | ---: | ---: | ---: | ---: |");
    covers(cases, quick);
    codes(cases, Method::Adjacency);
    codes(cases, Method::SharedRow);
    codes(cases, Method::SingleStep);
    for shape in Shape::ALL {
        products(cases, shape);
    }
}

/// Times of one search on its cases, in seconds: ours and the solver's.
#[derive(Default)]
struct Race {
    times: Vec<(f64, f64)>,
    timeouts: usize,
}

impl Race {
    fn add(&mut self, ours: f64, solver: &[Answer]) {
        self.timeouts += solver.iter().filter(|a| a.found == Found::TimedOut).count();
        self.times.push((ours, solver.iter().map(|a| a.seconds).sum()));
    }

    fn print(&self, search: &str) {
        let mut ours: Vec<f64> = self.times.iter().map(|t| t.0 * 1e3).collect();
        let mut solver: Vec<f64> = self.times.iter().map(|t| t.1 * 1e3).collect();
        let mut ratios: Vec<f64> = self.times.iter().map(|t| t.1 / t.0).collect();
        let (ours, solver, ratio) = (median(&mut ours), median(&mut solver), median(&mut ratios));
        let late =
            if self.timeouts > 0 { format!(" ({} at the limit)", self.timeouts) } else { String::new() };
        println!(
            "| {search} | {} | {ours:.3} | {solver:.2}{late} | {ratio:.0} | {:.1} |",
            self.times.len(),
            ratios[0]
        );
    }
}

/// The fastest of three runs: what the work costs when nothing else disturbs it.
fn clock<T>(work: impl Fn() -> T) -> (f64, T) {
    let mut best: Option<(f64, T)> = None;
    for _ in 0..3 {
        let start = Instant::now();
        let value = std::hint::black_box(work());
        let seconds = start.elapsed().as_secs_f64();
        if best.as_ref().is_none_or(|(least, _)| seconds < *least) {
            best = Some((seconds, value));
        }
    }
    best.expect("ran")
}

/// Smallest closed cover of primitive tables. The solver is told how many sets are enough.
fn covers(cases: u64, quick: bool) {
    let small = Unrolled { states: (3, 5), inputs: 3, rows: (12, 24), ..UNROLLED };
    for (name, of) in [("12-24 rows, 3 inputs", small), ("40-60 rows, 4 inputs", UNROLLED)] {
        if quick && of.inputs > 3 {
            continue;
        }
        let mut race = Race::default();
        for seed in 0..cases {
            let project = unrolled(seed, of);
            let spec = stillgate::spec::check(&project).spec.expect("a table in normal mode");
            let choice = MergeChoice { covers: 1, ..MergeChoice::default() };
            let (ours, merged) = clock(|| merge(&spec, &choice, &Effort::of(STEPS)));
            let merged = merged.expect("outputs belong to cells");
            let sets = merged.cover.len();
            let answer = smallest_cover(&spec.table, sets, LIMIT);
            assert!(answer.found == Found::TimedOut || answer.optimum() as usize == sets, "seed {seed}");
            race.add(ours, &[answer]);
        }
        race.print(&format!("smallest closed cover, {name}"));
    }
}

/// Reduced tables with at least three rows, of unrolled machines.
fn reduced_tables(cases: u64) -> Vec<Design> {
    (0u64..)
        .map(|seed| derive(&unrolled(seed, CROWDED)))
        .filter(|d| {
            let reduced = d.merged.as_ref().and_then(|m| m.reduced.as_ref());
            reduced.is_some_and(|r| (3..=6).contains(&r.table.len()))
        })
        .take(cases as usize)
        .collect()
}

/// Fewest bits of a method. The solver answers whether there are codes of as many bits and whether there are with one less.
fn codes(cases: u64, method: Method) {
    let mut race = Race::default();
    for design in reduced_tables(cases) {
        let reduced = design.merged.as_ref().and_then(|m| m.reduced.as_ref()).expect("filtered");
        let (ours, coded) = clock(|| assign(reduced, &method, &Effort::of(STEPS)));
        let rows = reduced.table.len();
        let least = rows.next_power_of_two().trailing_zeros() as usize;
        let ask = |bits: usize| match method {
            Method::SingleStep => single_step(&reduced.table, bits, LIMIT),
            _ => one_bit_steps(&reduced.table, bits, method == Method::SharedRow, LIMIT),
        };
        let answers: Vec<Answer> = match &coded {
            Ok(coded) => {
                let mut answers = vec![ask(coded.bits)];
                assert_ne!(answers[0].found, Found::Nothing);
                if coded.bits > least {
                    answers.push(ask(coded.bits - 1));
                    assert!(!matches!(answers[1].found, Found::Optimum(_)));
                }
                answers
            }
            Err(_) => {
                let answer = ask(rows - 1);
                assert!(!matches!(answer.found, Found::Optimum(_)));
                vec![answer]
            }
        };
        race.add(ours, &answers);
    }
    race.print(&format!("fewest bits, {}, 3-6 rows", method.word().replace('_', "-")));
}

/// Fewest products of all functions of a design.
fn products(cases: u64, shape: Shape) {
    let mut race = Race::default();
    let projects = (0u64..).map(|seed| -> Project {
        let of = Unrolled { states: (3, 6), inputs: 3, rows: (8, 24), ..UNROLLED };
        with(&unrolled(seed, of), &Method::SingleStep, Form::Feedback, shape)
    });
    for project in projects.take(cases as usize) {
        let design = derive(&project);
        let (Some(spec), Some(merged), Some(coded)) = (&design.spec, &design.merged, &design.coded) else {
            continue;
        };
        let reduced = merged.reduced.as_ref().expect("coded");
        let choice = &project.choices.logic;
        let (ours, made) = clock(|| equations(spec, reduced, coded, choice, &Effort::of(STEPS)));
        if made.variables.len() > 7 {
            continue; // the oracle tries all cubes
        }
        let answers: Vec<Answer> = made
            .functions
            .iter()
            .map(|function| {
                let answer = fewest_products(function, &made, LIMIT);
                let mine = PRODUCT * function.products.len() as u64 + function.literals() as u64;
                // An output may do better than the values that it states; see tests/outside_products.rs.
                assert!(answer.found == Found::TimedOut || mine <= answer.optimum(), "{}", function.name);
                answer
            })
            .collect();
        race.add(ours, &answers);
    }
    race.print(&format!("fewest products, {}", shape.word().replace('_', "-")));
}
