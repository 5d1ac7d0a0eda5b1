//! The proof must hold for designs that are right, and must catch every fault that is put into one.

#[path = "proof/hand.rs"]
mod hand;

use hand::{Built, Hand, primes};
use stillgate::base::{Code, Column, Row};
use stillgate::codes::{Coded, Role};
use stillgate::logic::values::Cube;
use stillgate::project::choices::{Discipline, Shape};
use stillgate::proof::{Proof, RaceKind, prove, races};

/// Gated D latch: six primitive rows merge into two; the output may change early or late.
fn latch() -> Built {
    Hand::new("D G", "Q", Discipline::Single)
        .row("a", "01:a/0 11:b/- 00:c/-")
        .row("b", "11:b/1 01:a/- 10:e/-")
        .row("c", "00:c/0 01:a/- 10:d/-")
        .row("d", "10:d/0 00:c/- 11:b/-")
        .row("e", "10:e/1 00:f/- 11:b/-")
        .row("f", "00:f/1 10:e/- 01:a/-")
        .start("c", "00")
        .merged("A", "a c d", "00:A/0 01:A/0 10:A/0 11:B/-")
        .merged("B", "b e f", "00:B/1 10:B/1 11:B/1 01:A/-")
        .codes("A=0 B=1")
        .way("A 11 B", "0 1")
        .way("B 01 A", "1 0")
        .build()
}

fn latch_feedback() -> Built {
    latch().function("Y1", "11- -01 1-1").function("Q", "11- -01 1-1")
}

/// Divide-by-two: one input, four rows in a ring.
fn divider() -> Built {
    Hand::new("x", "z", Discipline::Single)
        .row("a", "0:a/0 1:b/-")
        .row("b", "1:b/1 0:c/1")
        .row("c", "0:c/1 1:d/-")
        .row("d", "1:d/0 0:a/0")
        .start("a", "0")
        .same()
        .codes("a=00 b=01 c=11 d=10")
        .way("a 1 b", "00 01")
        .way("b 0 c", "01 11")
        .way("c 1 d", "11 10")
        .way("d 0 a", "10 00")
        .build()
        .function("Y1", "0-1 11- -11")
        .function("Y2", "0-1 10- -01")
        .function("z", "--1")
}

/// Muller C-element asked for both inputs at once.
fn rendezvous() -> Built {
    Hand::new("a b", "c", Discipline::Burst)
        .row("low", "00:low/0 11:high/-")
        .row("high", "11:high/1 00:low/-")
        .start("low", "00")
        .merged("A", "low", "00:A/0 10:A/0 01:A/0 11:B/-")
        .merged("B", "high", "11:B/1 10:B/1 01:B/1 00:A/-")
        .codes("A=0 B=1")
        .way("A 11 B", "0 1")
        .way("B 00 A", "1 0")
        .build()
}

/// Three rows with moves between every two of them: one needs the spare code.
fn triangle() -> Built {
    let mut built = Hand::new("x w", "z", Discipline::Single)
        .row("a", "00:a/0 10:a/0 01:b/-")
        .row("b", "01:b/1 11:c/- 00:a/-")
        .row("c", "11:c/0 10:a/0 01:b/-")
        .start("a", "00")
        .same()
        .codes("a=00 b=01 c=11")
        .spare("P1", "10")
        .way("a 01 b", "00 01")
        .way("b 11 c", "01 11")
        .way("b 00 a", "01 00")
        .way("c 10 a", "11 10 00")
        .way("c 01 b", "11 01")
        .build();
    for (name, bit) in [("Y1", 0), ("Y2", 1)] {
        let on: Vec<u32> = built
            .coded
            .encoded
            .entries
            .iter()
            .filter(|(_, e)| e.next.0 >> bit & 1 == 1)
            .map(|(&(code, column), _)| u32::from(column.0) | code.0 << 2)
            .collect();
        let products = primes(4, &on);
        built = built.function(name, &products);
    }
    // Late: 1 at code b until the state has changed.
    built.function("z", "--01")
}

fn proof(b: &Built) -> Proof {
    prove(&b.spec, &b.reduced, &b.coded, &b.equations)
}

#[track_caller]
fn holds(b: &Built) -> Proof {
    let lost = races(&b.reduced, &b.coded);
    assert_eq!(lost.critical, []);
    let p = proof(b);
    assert_eq!(p.mismatches, []);
    assert_eq!(p.hazards, []);
    p
}

/// Whether the race check or the proof objects.
fn caught(b: &Built) -> bool {
    !races(&b.reduced, &b.coded).critical.is_empty() || !proof(b).holds()
}

#[test]
fn the_gated_latch_is_proved_in_every_form_and_shape() {
    let p = holds(&latch_feedback());
    assert_eq!(p.moves_checked, 12);
    assert_eq!(p.slow, Vec::<usize>::new());
    assert_eq!(p.traps, []);
    assert_eq!(p.power_up_states, 8);
    holds(&latch().function("Y1", "11- -01 1-1").function("Q", "--1"));
    let sums = latch().shape(Shape::ProductOfSums);
    holds(&sums.clone().function("Y1", "10- -11 1-1").function("Q", "10- -11 1-1"));
    holds(&sums.function("S1", "1-- -1-").function("R1", "0-- -1-").function("Q", "--1"));
    holds(&latch().function("S1", "11-").function("R1", "01-").function("Q", "--1"));
}

#[test]
fn dropping_any_product_of_the_latch_is_caught() {
    let whole = latch_feedback();
    for f in 0..2 {
        // The first product of the output only makes it early: without it the output is late, and right.
        for k in f..3 {
            let mut broken = whole.clone();
            broken.equations.functions[f].products.remove(k);
            assert!(caught(&broken), "function {f}, product {k}");
        }
    }
}

#[test]
fn the_hazard_product_of_the_latch_is_missed_as_a_static_hazard() {
    // D·G + G'·y without D·y: the textbook glitch while G falls with D = 1.
    let p = proof(&latch().function("Y1", "11- -01").function("Q", "--1"));
    assert_eq!(p.mismatches, []);
    assert_eq!(p.hazards.len(), 2, "once for each direction of G");
    assert!(p.hazards.iter().all(|h| h.kind == "static-1" && h.function == "Y1"));
    assert!(
        p.hazards[0].text.contains("row B") && p.hazards[0].text.contains("G changes"),
        "{}",
        p.hazards[0].text
    );
    // The same for sums, without D + y: the glitch while G changes with D = 0.
    let p =
        proof(&latch().shape(Shape::ProductOfSums).function("Y1", "10- -11").function("Q", "10- -11 1-1"));
    assert_eq!(p.mismatches, []);
    assert!(!p.hazards.is_empty() && p.hazards.iter().all(|h| h.kind == "static-0"));
}

#[test]
fn latches_need_no_hold_terms_but_no_pulses_either() {
    // Set and reset overlap at D = 1, G = 1.
    let p = proof(&latch().function("S1", "11-").function("R1", "-1-").function("Q", "--1"));
    assert!(p.hazards.iter().any(|h| h.kind == "both-on"));
    // A sum more does no harm.
    let b = latch().shape(Shape::ProductOfSums).function("S1", "1-- 11- -1-").function("R1", "0-- -1-");
    assert!(proof(&b.function("Q", "--1")).holds());
    // S = G·(D + G') can pulse while G changes with D = 0: G + (D + G') has no sum that holds both ends.
    let b = latch().shape(Shape::ProductOfSums).function("S1", "-1- 10-").function("R1", "0-- -1-");
    let p = proof(&b.function("Q", "--1"));
    assert!(p.hazards.iter().any(|h| h.kind == "pulse" && h.function == "S1"), "{:?}", p.hazards);
}

#[test]
fn the_divider_has_an_essential_hazard_in_each_state() {
    let p = holds(&divider());
    assert_eq!(p.moves_checked, 4);
    assert_eq!(p.slow, [0, 1]);
    assert_eq!(p.traps, []);
}

#[test]
fn a_burst_waits_for_both_inputs() {
    let p = holds(&rendezvous().function("Y1", "11- 1-1 -11").function("c", "11- 1-1 -11"));
    assert_eq!(p.moves_checked, 2);
    assert_eq!(p.slow, Vec::<usize>::new());
    holds(&rendezvous().function("Y1", "11- 1-1 -11").function("c", "--1"));
    holds(&rendezvous().function("S1", "11-").function("R1", "00-").function("c", "--1"));
    // Leaving on the first input is caught.
    let p = proof(&rendezvous().function("Y1", "1-- -11").function("c", "--1"));
    assert!(p.mismatches.iter().any(|m| m.text.contains("inside this burst")), "{:?}", p.mismatches);
    // a·b + y·(a + b) with the fall of the output made of a product that starts in the middle: dynamic.
    let p = proof(&rendezvous().function("Y1", "11- 1-1 -11").function("c", "11- 101 -11"));
    assert!(p.hazards.iter().any(|h| h.kind == "dynamic" && h.function == "c"), "{:?}", p.hazards);
}

#[test]
fn dropping_any_product_of_the_burst_design_is_caught() {
    let whole = rendezvous().function("Y1", "11- 1-1 -11").function("c", "11- 1-1 -11");
    for f in 0..2 {
        // The first product of the output only makes it early: without it the output is late, and right.
        for k in f..3 {
            let mut broken = whole.clone();
            broken.equations.functions[f].products.remove(k);
            assert!(caught(&broken), "function {f}, product {k}");
        }
    }
}

#[test]
fn a_spare_code_makes_a_cycle_and_is_followed() {
    let b = triangle();
    let found = races(&b.reduced, &b.coded);
    assert_eq!(found.critical, []);
    assert_eq!((found.noncritical, found.longest), (0, 2));
    assert_eq!(found.cycles, [(Row(2), Column(1), 2)]);
    holds(&b);
}

#[test]
fn a_critical_race_shows_the_losing_way() {
    let mut b = triangle();
    // c goes to a in one step of two bits; in column 10 code 01 then belongs to nobody, or rests.
    let entry = |b: &mut Built, code: u32, column: u16, next: u32| {
        let key = (Code(code), Column(column));
        let mut e = b.coded.encoded.entries[&(Code(0), Column(1))];
        e.next = Code(next);
        e.role = Role::OnTheWay;
        b.coded.encoded.entries.insert(key, e);
    };
    entry(&mut b, 3, 1, 0);
    let found = races(&b.reduced, &b.coded);
    assert_eq!(found.critical.len(), 1);
    assert_eq!(found.critical[0].kind, RaceKind::Stray);
    assert_eq!(found.critical[0].path, [Code(3), Code(2)]);
    entry(&mut b, 2, 1, 2);
    let found = races(&b.reduced, &b.coded);
    assert_eq!(found.critical.len(), 1);
    assert_eq!(found.critical[0].kind, RaceKind::Critical);
    assert_eq!(found.critical[0].path, [Code(3), Code(2)]);
    entry(&mut b, 2, 1, 3);
    let found = races(&b.reduced, &b.coded);
    assert_eq!(found.critical[0].kind, RaceKind::Oscillation);
    assert_eq!(found.critical[0].path.first(), found.critical[0].path.last());
    entry(&mut b, 2, 1, 0);
    let found = races(&b.reduced, &b.coded);
    assert_eq!((found.critical.len(), found.noncritical), (0, 1));
    // A stable cell that moves.
    entry(&mut b, 0, 0, 1);
    let found = races(&b.reduced, &b.coded);
    assert!(found.critical.iter().any(|r| (r.from, r.to, r.column) == (Row(0), Row(0), Column(0))));
}

#[test]
fn swapping_two_codes_is_caught() {
    for b in [latch_feedback(), divider(), triangle()] {
        for i in 0..b.coded.codes.len() {
            for j in 0..i {
                let mut broken = b.clone();
                broken.coded.codes.swap(i, j);
                assert!(caught(&broken));
                assert!(!races(&broken.reduced, &broken.coded).critical.is_empty());
                // Even where nobody looks at the encoded table any more.
                broken.coded.encoded.entries.clear();
                assert!(!proof(&broken).holds());
            }
        }
    }
}

#[test]
fn changing_any_cell_of_the_reduced_table_is_caught() {
    for b in [
        latch_feedback(),
        divider(),
        triangle(),
        rendezvous().function("Y1", "11- 1-1 -11").function("c", "11- 1-1 -11"),
    ] {
        let table = b.reduced.table.clone();
        for row in table.rows() {
            for column in table.columns() {
                let cell = table.cell(row, column);
                let nexts = table.rows().map(Some).chain([None]).filter(|&n| n != cell.next);
                for next in nexts {
                    let mut broken = b.clone();
                    broken.reduced.table.cell_mut(row, column).next = next;
                    // A cell that was open and that nobody enters stays anybody's.
                    if cell.next.is_some() {
                        assert!(caught(&broken), "{row} {column:?} {next:?}");
                    }
                }
                if let Some(value) = cell.outputs.get(0) {
                    let mut broken = b.clone();
                    broken.reduced.table.cell_mut(row, column).outputs = cell.outputs.with(0, Some(!value));
                    assert!(caught(&broken), "{row} {column:?} output");
                }
            }
        }
    }
}

#[test]
fn a_mismatch_tells_the_way_there() {
    let mut b = divider();
    *b.reduced.table.cell_mut(Row(3), Column(0)) = b.reduced.table.cell(Row(2), Column(0));
    let p = proof(&b);
    let m = p.mismatches.iter().find(|m| m.text.contains("reached by")).expect("a sequence");
    assert_eq!(m.stage, "tables");
    assert!(m.text.contains("reached by 0 1 0 1 0"), "{}", m.text);
}

#[test]
fn merging_incompatible_rows_is_caught() {
    // Row b of the latch moved to the other set.
    let mut b = latch_feedback();
    b.reduced.members = vec![vec![Row(0), Row(1), Row(2), Row(3)], vec![Row(4), Row(5)]];
    assert!(proof(&b).mismatches.iter().any(|m| m.stage == "tables"));
    // The divider with a and b as one row.
    let b = Hand::new("x", "z", Discipline::Single)
        .row("a", "0:a/0 1:b/-")
        .row("b", "1:b/1 0:c/1")
        .row("c", "0:c/1 1:d/-")
        .row("d", "1:d/0 0:a/0")
        .start("a", "0")
        .merged("A", "a b", "0:A/0 1:A/1")
        .merged("B", "c d", "0:B/1 1:B/0")
        .codes("A=0 B=1")
        .build()
        .function("Y1", "-1")
        .function("z", "01 10");
    assert!(proof(&b).mismatches.iter().any(|m| m.stage == "tables"));
}

#[test]
fn power_up_names_codes_that_trap() {
    // Codes 10 and 11 are in nobody's use; the first rests, the second goes there.
    let b = Hand::new("x", "z", Discipline::Single)
        .row("a", "0:a/0 1:b/-")
        .row("b", "1:b/1 0:a/-")
        .start("a", "0")
        .same()
        .codes("a=00 b=01")
        .way("a 1 b", "00 01")
        .way("b 0 a", "01 00")
        .build()
        .function("Y1", "-1-")
        .function("Y2", "10-")
        .function("z", "--1");
    let p = holds(&b);
    let traps: Vec<(u32, u16, bool)> = p.traps.iter().map(|t| (t.code.0, t.column.0, t.oscillates)).collect();
    assert_eq!(traps, [(1, 0, false), (3, 0, false), (1, 1, false), (3, 1, false)]);
    assert!(p.traps.iter().all(|t| t.codes == [Code(1)]));
    // Y2 = y2' in the upper half goes round for ever.
    let mut round = b.clone();
    round.equations.functions[1] = b.clone().function("Y2", "10- -10").equations.functions[3].clone();
    let p = holds(&round);
    assert!(p.traps.len() == 4 && p.traps.iter().all(|t| t.oscillates && t.codes.len() == 2));
}

#[test]
fn every_widening_of_a_product_that_matters_is_caught() {
    for b in [latch_feedback(), divider(), triangle()] {
        let variables = b.equations.variables.len();
        for f in 0..b.equations.functions.len() {
            for k in 0..b.equations.functions[f].products.len() {
                for v in 0..variables {
                    let cube = b.equations.functions[f].products[k].cube;
                    if cube.care >> v & 1 == 0 {
                        continue;
                    }
                    let mut wide = b.clone();
                    let bit = 1 << v;
                    wide.equations.functions[f].products[k].cube =
                        Cube { care: cube.care & !bit, ones: cube.ones & !bit };
                    // Single discipline, one-bit ways: sums of products are right exactly if all values that can
                    // be seen are right and still no product was dropped.
                    assert_eq!(
                        caught(&wide),
                        hand::values_differ(&b, &wide),
                        "function {f} product {k} variable {v}"
                    );
                }
            }
        }
    }
}

#[test]
fn a_function_that_is_missing_is_a_mismatch() {
    let mut b = latch_feedback();
    b.equations.functions.remove(1);
    assert!(!proof(&b).conforms());
    b.equations.functions.clear();
    assert!(!proof(&b).conforms());
    let coded = Coded { codes: Vec::new(), ..latch().coded };
    b.coded = coded;
    assert!(!proof(&b).conforms());
}
