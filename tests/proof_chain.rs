//! The proof on designs that the stages made: it holds for all of them, and it catches every fault put into one.

#[path = "proof/chain.rs"]
mod chain;
#[path = "proof/oracle.rs"]
mod oracle;
#[path = "proof/random.rs"]
mod random;

use std::collections::BTreeSet;

use chain::Chain;
use stillgate::base::{Column, Row};
use stillgate::logic::values::{Cube, Target};
use stillgate::project::choices::{Discipline, OutputStyle};
use stillgate::project::read;
use stillgate::proof::{prove, races};

fn caught(c: &Chain) -> bool {
    !prove(&c.spec, &c.reduced, &c.coded, &c.equations).holds()
}

fn both_disciplines(seeds: std::ops::Range<u64>, mut f: impl FnMut(String, &Chain)) {
    for seed in seeds {
        for discipline in [Discipline::Single, Discipline::Burst] {
            let project = random::controller(seed, discipline);
            chain::every(&project, |name, c| f(format!("seed {seed} {discipline:?} {name}"), c));
        }
    }
}

#[test]
fn every_derived_design_is_proved() {
    let mut proved = 0;
    both_disciplines(0..150, |name, c| {
        let lost = races(&c.reduced, &c.coded);
        assert_eq!(lost.critical, [], "{name}");
        let p = prove(&c.spec, &c.reduced, &c.coded, &c.equations);
        assert_eq!(p.mismatches, [], "{name}\n{:#?}", c.reduced.table);
        assert_eq!(p.hazards, [], "{name}");
        proved += 1;
    });
    assert!(proved > 1_000, "{proved}");
}

/// Whether function number `f` of the faulty design still does all that it must.
fn still_right(right: &Chain, faulty: &Chain, f: usize) -> bool {
    let shape = right.equations.shape;
    let variables = right.equations.variables.len();
    let (old, new) = (&right.equations.functions[f], &faulty.equations.functions[f]);
    match new.target {
        Target::Output(_) => oracle::output_is_right(&right.reduced, &right.coded, shape, new),
        _ => oracle::keeps_promises(shape, old, new, variables),
    }
}

#[test]
fn a_product_dropped_or_widened_is_caught_exactly_if_it_matters() {
    let (mut faults, mut harmless) = (0, 0);
    both_disciplines(1_000..1_030, |name, c| {
        for f in 0..c.equations.functions.len() {
            for k in 0..c.equations.functions[f].products.len() {
                let cube = c.equations.functions[f].products[k].cube;
                let mut broken: Vec<Chain> = Vec::new();
                let mut dropped = c.clone();
                dropped.equations.functions[f].products.remove(k);
                broken.push(dropped);
                for v in (0..c.equations.variables.len()).filter(|v| cube.care >> v & 1 == 1) {
                    let mut wide = c.clone();
                    wide.equations.functions[f].products[k].cube =
                        Cube { care: cube.care & !(1 << v), ones: cube.ones & !(1 << v) };
                    broken.push(wide);
                }
                for b in &broken {
                    let right = still_right(c, b, f);
                    assert_eq!(
                        caught(b),
                        !right,
                        "{name}\n{}",
                        oracle::compare(&c.equations, &b.equations, f)
                    );
                    if right { harmless += 1 } else { faults += 1 }
                }
            }
        }
    });
    assert!(faults > 3_000 && harmless > 50, "{faults} {harmless}");
}

#[test]
fn swapping_codes_is_caught() {
    let mut faults = 0;
    both_disciplines(2_000..2_030, |name, c| {
        for i in 0..c.coded.codes.len() {
            for j in 0..i {
                let mut broken = c.clone();
                broken.coded.codes.swap(i, j);
                assert!(caught(&broken), "{name} {i} {j}");
                faults += 1;
            }
        }
    });
    assert!(faults > 1_000, "{faults}");
}

#[test]
fn changing_a_cell_of_the_reduced_table_is_caught() {
    let mut faults = 0;
    both_disciplines(3_000..3_030, |name, c| {
        let table = &c.reduced.table;
        for row in table.rows() {
            for column in table.columns() {
                let cell = table.cell(row, column);
                for next in table.rows().map(Some).chain([None]) {
                    if next == cell.next || cell.next.is_none() || (next.is_none() && !bound(c, row, column))
                    {
                        continue;
                    }
                    let mut broken = c.clone();
                    broken.reduced.table.cell_mut(row, column).next = next;
                    let lost = !races(&broken.reduced, &broken.coded).critical.is_empty();
                    assert!(lost || caught(&broken), "{name} {row} {column:?} -> {next:?}");
                    faults += 1;
                }
                for j in 0..table.outputs {
                    let Some(value) = cell.outputs.get(j) else { continue };
                    let mut broken = c.clone();
                    broken.reduced.table.cell_mut(row, column).outputs = cell.outputs.with(j, Some(!value));
                    assert!(caught(&broken), "{name} {row} {column:?} output {j}");
                    faults += 1;
                }
            }
        }
    });
    assert!(faults > 1_000, "{faults}");
}

/// Whether a cell must be specified: a member's is, or a move that can happen ends or passes there.
fn bound(c: &Chain, row: Row, column: Column) -> bool {
    c.reduced.members[row.at()].iter().any(|&p| c.spec.given.next(p, column).is_some())
        || c.reduced
            .moves
            .iter()
            .any(|m| m.from.row == row && m.from.column.between(m.column).any(|inner| inner == column))
}

/// Pairs of rows of the table as written that can never be in one set: by striking until nothing changes.
fn incompatible(c: &Chain) -> BTreeSet<(Row, Row)> {
    let given = &c.spec.given;
    let end = |mut row: Row, column: Column| {
        while let Some(next) = given.next(row, column).filter(|&next| next != row) {
            row = next;
        }
        row
    };
    let mut struck = BTreeSet::new();
    loop {
        let before = struck.len();
        for a in given.rows() {
            for b in given.rows().filter(|&b| b != a) {
                let clash = given.columns().any(|column| {
                    let (x, y) = (given.cell(a, column), given.cell(b, column));
                    x.outputs.conflicts(y.outputs) != 0
                        || (x.next.is_some()
                            && y.next.is_some()
                            && struck.contains(&(end(a, column), end(b, column))))
                });
                if clash {
                    struck.insert((a, b));
                }
            }
        }
        if struck.len() == before {
            return struck;
        }
    }
}

#[test]
fn merging_incompatible_rows_is_caught() {
    let mut faults = 0;
    both_disciplines(4_000..4_030, |name, c| {
        if c.reduced.outputs == OutputStyle::PerRow {
            return;
        }
        let apart = incompatible(c);
        for row in c.spec.given.rows() {
            for set in 0..c.reduced.members.len() {
                if c.reduced.members[set].iter().any(|&other| apart.contains(&(row, other))) {
                    let mut broken = c.clone();
                    broken.reduced.members[set].push(row);
                    assert!(caught(&broken), "{name} {row} into set {set}");
                    faults += 1;
                }
            }
        }
    });
    assert!(faults > 500, "{faults}");
}

/// The sample controllers.
fn samples(mut f: impl FnMut(String, &Chain)) {
    let folder = concat!(env!("CARGO_MANIFEST_DIR"), "/projects");
    let mut paths: Vec<_> =
        std::fs::read_dir(folder).expect("projects").map(|e| e.expect("entry").path()).collect();
    paths.sort();
    for path in paths {
        let project = read(&std::fs::read(&path).expect("readable")).expect("a project");
        let stem = path.file_stem().expect("name").to_string_lossy().to_string();
        chain::every(&project, |name, c| f(format!("{stem} {name}"), c));
    }
}

#[test]
fn every_sample_is_proved() {
    let mut proved = 0;
    samples(|name, c| {
        assert_eq!(races(&c.reduced, &c.coded).critical, [], "{name}");
        let p = prove(&c.spec, &c.reduced, &c.coded, &c.equations);
        assert_eq!(p.mismatches, [], "{name}");
        assert_eq!(p.hazards, [], "{name}");
        assert!(p.power_up_exact, "{name}");
        proved += 1;
    });
    assert!(proved > 300, "{proved}");
}

/// Products dropped from one design at most, spread evenly: some designs have hundreds, and each drop is a whole proof.
const DROPPED: usize = 24;

#[test]
fn a_product_dropped_from_a_sample_is_caught_exactly_if_it_matters() {
    let mut faults = 0;
    samples(|name, c| {
        let all: usize = c.equations.functions.iter().map(|f| f.products.len()).sum();
        let stride = all.div_ceil(DROPPED).max(1);
        let mut number = 0;
        for f in 0..c.equations.functions.len() {
            for k in 0..c.equations.functions[f].products.len() {
                number += 1;
                if number % stride != 0 {
                    continue;
                }
                let mut broken = c.clone();
                broken.equations.functions[f].products.remove(k);
                let right = still_right(c, &broken, f);
                assert_eq!(
                    caught(&broken),
                    !right,
                    "{name}\n{}",
                    oracle::compare(&c.equations, &broken.equations, f)
                );
                faults += usize::from(!right);
            }
        }
    });
    assert!(faults > 1_500, "{faults}");
}
