//! How long the chain takes. `cargo bench --bench chain` prints a table for DEVELOPERS.md; `-- --quick` tries each once.

#![allow(clippy::print_stdout)]

#[path = "../common/mod.rs"]
mod common;

use std::fs;
use std::path::PathBuf;
use std::time::Instant;

use stillgate::base::{Column, Outputs, Row, TotalState};
use stillgate::merge::implication_table;
use stillgate::project::{Discipline, Form, Method, OutputStyle, Shape, read};
use stillgate::spec::{FlowTable, Signals, Spec};

use common::random::{Rng, UNROLLED, unrolled};
use common::{derive, median, with};

fn main() {
    let quick = std::env::args().any(|a| a == "--quick");
    let (seeds, repeats) = if quick { (2, 1) } else { (50, 15) };
    println!("| case | median ms | largest ms | goal |");
    println!("| --- | ---: | ---: | --- |");
    samples(repeats);
    unrolled_machines(seeds);
    implication_tables(if quick { 1 } else { 5 }, if quick { 100 } else { 1000 });
}

fn line(case: &str, milliseconds: &mut [f64], goal: &str) {
    let middle = median(milliseconds);
    let most = milliseconds.last().copied().unwrap_or(0.0);
    println!("| {case} | {middle:.2} | {most:.2} | {goal} |");
}

/// Milliseconds that a piece of work takes.
fn clock<T>(work: impl FnOnce() -> T) -> f64 {
    let start = Instant::now();
    std::hint::black_box(work());
    start.elapsed().as_secs_f64() * 1e3
}

/// The whole chain, proof included, on each sample as it stands.
fn samples(repeats: usize) {
    let folder = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("projects");
    let mut files: Vec<PathBuf> =
        fs::read_dir(folder).expect("projects is there").map(|e| e.expect("readable").path()).collect();
    files.retain(|f| f.extension().is_some_and(|e| e == "ron"));
    files.sort();
    assert!(!files.is_empty(), "there are no samples");
    for file in files {
        let project = read(&fs::read(&file).expect("readable")).expect("a project");
        let mut times: Vec<f64> = (0..repeats).map(|_| clock(|| derive(&project))).collect();
        let name = file.file_stem().expect("a name").to_string_lossy().to_string();
        line(&format!("sample {name}"), &mut times, "< 5 ms");
    }
}

/// Tables of 40 to 60 rows over four inputs, by each method that always has a solution.
fn unrolled_machines(seeds: u64) {
    for method in [Method::SharedRow, Method::SingleStep, Method::OneHot] {
        let mut times = Vec::new();
        let mut proved = 0;
        for seed in 0..seeds {
            let project = with(&unrolled(seed, UNROLLED), &method, Form::Feedback, Shape::SumOfProducts);
            let mut design = None;
            times.push(clock(|| design = Some(derive(&project))));
            proved += usize::from(design.is_some_and(|d| d.proved()));
        }
        let case = format!(
            "{}-{} rows, 4 inputs, {}, {proved} of {seeds} proved",
            UNROLLED.rows.0,
            UNROLLED.rows.1,
            method.word().replace('_', "-")
        );
        line(&case, &mut times, "median < 16 ms, none > 200 ms");
    }
}

/// A primitive table in normal mode in which half of all cells are specified, whether or not they can be entered.
fn wide_table(seed: u64, rows: usize, inputs: usize) -> FlowTable {
    let rng = &mut Rng::new(seed);
    let columns = 1usize << inputs;
    let stable: Vec<usize> = (0..rows).map(|_| rng.below(columns)).collect();
    let mut table = FlowTable::new(inputs, 2, (0..rows).map(|r| format!("r{r}")).collect());
    let there: Vec<Vec<Row>> =
        (0..columns).map(|c| (0..rows).filter(|&r| stable[r] == c).map(Row::new).collect()).collect();
    for (row, &own) in stable.iter().enumerate() {
        for (c, there) in there.iter().enumerate() {
            let cell = table.cell_mut(Row::new(row), Column(c as u16));
            if own == c {
                cell.next = Some(Row::new(row));
                cell.outputs = Outputs { care: 3, ones: rng.below(4) as u32 };
            } else if !there.is_empty() && rng.chance(0.5) {
                cell.next = Some(*rng.pick(there));
            }
        }
    }
    table
}

/// A specification of a table and nothing else.
fn bare(table: FlowTable) -> Spec {
    Spec {
        signals: Signals {
            inputs: vec![String::new(); table.inputs],
            outputs: vec![String::new(); table.outputs],
        },
        discipline: Discipline::Single,
        given: table.clone(),
        initial: TotalState { row: Row(0), column: Column(0) },
        table,
        moves: Vec::new(),
        reachable: Vec::new(),
        questions: Vec::new(),
    }
}

/// The implication table alone, of 1,000 rows by 64 columns.
fn implication_tables(seeds: u64, rows: usize) {
    let mut times: Vec<f64> = (0..seeds)
        .map(|seed| {
            let table = wide_table(seed, rows, 6);
            let spec = bare(table);
            clock(|| implication_table(&spec, OutputStyle::PerCell))
        })
        .collect();
    line(&format!("implication table, {rows} rows, 64 columns"), &mut times, "< 100 ms");
}
