//! Results from the literature, on whole projects. All are quoted from memory and worked out again here.

mod common;

use stillgate::base::Column;
use stillgate::design::Design;
use stillgate::logic::values::Target;
use stillgate::merge::Verdict;
use stillgate::project::{CoverChoice, Discipline, Form, Method, Project, Shape};

use common::optimum::{PRODUCT, fewest_products};
use common::text::table;
use common::{derive, naive, ones_of, with};

/// The products of a function as text, sorted.
fn products(design: &Design, target: Target) -> Vec<String> {
    let equations = design.equations.as_ref().expect("equations");
    let function = equations.functions.iter().find(|f| f.target == target).expect("the function");
    let mut texts: Vec<String> =
        function.products.iter().map(|p| p.cube.text(equations.variables.len())).collect();
    texts.sort();
    texts
}

fn proved(project: &Project) -> Design {
    let design = derive(project);
    assert!(design.proved(), "{:?}", design.findings);
    design
}

/// Source: digital design textbooks. Data D and gate G; six primitive rows merge into two; the next state is
/// D.G + G'.y, and only D.y keeps it from a glitch.
#[test]
fn gated_d_latch() {
    let latch = table(
        &["D", "G"],
        &["Q"],
        Discipline::Single,
        &[
            "idle_low 00>idle_low/0 10>low_d/- 01>pass_low/-",
            "low_d 10>low_d/0 00>idle_low/- 11>pass_high/-",
            "pass_low 01>pass_low/0 00>idle_low/- 11>pass_high/-",
            "pass_high 11>pass_high/1 01>pass_low/- 10>high_d/-",
            "high_d 10>high_d/1 11>pass_high/- 00>idle_high/-",
            "idle_high 00>idle_high/1 10>high_d/- 01>pass_low/-",
        ],
    );
    let design = proved(&latch);
    let merged = design.merged.as_ref().expect("merged");
    assert_eq!(merged.cover.len(), 2);
    assert!(merged.bound.proved());
    assert_eq!(design.coded.as_ref().expect("coded").bits, 1);
    let next = products(&design, Target::Next(0));
    // Over D, G, y1; with the complemented state the same law reads D'.G + G'.y + D'.y.
    assert!(next == ["-01", "1-1", "11-"] || next == ["-01", "0-1", "01-"], "{next:?}");
    let equations = design.equations.as_ref().expect("equations");
    let extra: Vec<String> =
        equations.functions[0].products.iter().filter(|p| p.hazard_only).map(|p| p.cube.text(3)).collect();
    assert!(extra == ["1-1"] || extra == ["0-1"], "{extra:?}");
}

/// Source: Muller & Bartky 1959. Next state a.b + y.(a + b); with n inputs: all up, or y and any up.
#[test]
fn c_element() {
    let two =
        table(&["a", "b"], &["c"], Discipline::Burst, &["low 00>low/0 11>high/-", "high 11>high/1 00>low/-"]);
    assert_eq!(products(&proved(&two), Target::Next(0)), ["-11", "1-1", "11-"]);
    let three = table(
        &["a", "b", "d"],
        &["c"],
        Discipline::Burst,
        &["low 000>low/0 111>high/-", "high 111>high/1 000>low/-"],
    );
    assert_eq!(products(&proved(&three), Target::Next(0)), ["--11", "-1-1", "1--1", "111-"]);
    // Written with one input change at a time it is the same element.
    let singly = table(
        &["a", "b"],
        &["c"],
        Discipline::Single,
        &[
            "low 00>low/0 10>low_a/- 01>low_b/-",
            "low_a 10>low_a/0 00>low/- 11>high/-",
            "low_b 01>low_b/0 00>low/- 11>high/-",
            "high 11>high/1 10>high_a/- 01>high_b/-",
            "high_a 10>high_a/1 11>high/- 00>low/-",
            "high_b 01>high_b/1 11>high/- 00>low/-",
        ],
    );
    assert_eq!(products(&proved(&singly), Target::Next(0)), ["-11", "1-1", "11-"]);
}

/// A machine of one row whose output is a function of the inputs.
fn combinational(inputs: &[&str], discipline: Discipline, value: impl Fn(u32) -> bool) -> Project {
    let cells: Vec<String> = (0..1u32 << inputs.len())
        .map(|c| format!("{}>s/{}", common::random::bits(c, inputs.len()), u32::from(value(c))))
        .collect();
    table(inputs, &["f"], discipline, &[&format!("s {}", cells.join(" "))])
}

/// Source: Huffman 1957. f = a.b + a'.c has a static-1 hazard when b = c = 1, and b.c mends it.
#[test]
fn static_hazard() {
    let f = |p: u32| if p & 1 == 1 { p & 2 != 0 } else { p & 4 != 0 };
    let design = proved(&combinational(&["a", "b", "c"], Discipline::Single, f));
    assert_eq!(products(&design, Target::Output(0)), ["-11", "0-1", "11-"]);
}

/// Three rows with a move between every two of them, and no cell left open.
fn triangle() -> Project {
    table(
        &["p", "q"],
        &["u", "v"],
        Discipline::Single,
        &[
            "a 00>a/00 10>a/00 11>a/00 01>b/--",
            "b 00>b/01 10>b/01 11>c/-- 01>b/01",
            "c 00>c/10 10>a/-- 11>c/10 01>c/10",
        ],
    )
}

/// Source: graph theory. A cube has no odd cycle, so three rows with moves between every two of them need a spare row.
#[test]
fn odd_cycle() {
    let project = with(&triangle(), &Method::Adjacency, Form::Feedback, Shape::SumOfProducts);
    let design = derive(&project);
    assert!(design.coded.is_none() && design.has_error(), "{:?}", design.findings);
    let shared = proved(&with(&project, &Method::SharedRow, Form::Feedback, Shape::SumOfProducts));
    let coded = shared.coded.as_ref().expect("coded");
    assert_eq!((coded.bits, coded.spare.len(), coded.longest_path), (2, 1, 2));
    // Each column tells one row from the other two [Tracey 1966]: three bits for single-step codes.
    let single = proved(&with(&project, &Method::SingleStep, Form::Feedback, Shape::SumOfProducts));
    assert_eq!(single.coded.as_ref().expect("coded").bits, 3);
}

/// Source: Moon & Moser 1965. The complement of n/3 triangles has 3^(n/3) maximal cliques, and no graph has more.
#[test]
fn most_maximal_compatibles() {
    let groups = 5;
    let outputs: Vec<String> = (0..2 * groups).map(|j| format!("z{j}")).collect();
    let outputs: Vec<&str> = outputs.iter().map(String::as_str).collect();
    let lines: Vec<String> = (0..3 * groups)
        .map(|r| {
            let mut word = vec!["--"; groups];
            word[r / 3] = ["00", "01", "10"][r % 3];
            format!("r{r} 0>r{r}/{}", word.concat())
        })
        .collect();
    let lines: Vec<&str> = lines.iter().map(String::as_str).collect();
    let design = derive(&table(&["x"], &outputs, Discipline::Single, &lines));
    let merged = design.merged.as_ref().expect("merged");
    assert!(merged.maximal_complete);
    assert_eq!(merged.maximal.len(), 3usize.pow(groups as u32));
    assert_eq!(merged.cover.len(), 3);
}

/// Source: Huffman 1954, and textbooks as the multiple-row method. Four rows in three bits, two complementary codes each:
/// every row is next to every other.
#[test]
fn four_rows_in_three_bits() {
    let cells = |row: &str, word: &str, rest: &str| format!("{row} 00>{row}/{word} {rest}");
    let lines = [
        cells("a", "00", "10>a/00 01>b/-- 11>c/--"),
        cells("b", "01", "10>c/-- 01>b/01 11>d/--"),
        cells("c", "10", "10>c/10 01>d/-- 11>c/10"),
        cells("d", "11", "10>a/-- 01>d/11 11>d/11"),
    ];
    let lines: Vec<&str> = lines.iter().map(String::as_str).collect();
    let project = table(&["p", "q"], &["u", "v"], Discipline::Single, &lines);
    let design = proved(&with(&project, &Method::MultipleRow, Form::Feedback, Shape::SumOfProducts));
    let coded = design.coded.as_ref().expect("coded");
    assert_eq!((coded.bits, coded.codes.len()), (3, 4));
    for (i, codes) in coded.codes.iter().enumerate() {
        assert_eq!(codes.len(), 2);
        assert_eq!(codes[0].distance(codes[1]), 3, "codes of row {i}");
        for others in coded.codes.iter().filter(|&c| c != codes) {
            for code in codes {
                assert!(others.iter().any(|o| o.distance(*code) == 1));
            }
        }
    }
}

/// Source: Unger 1959. A divide-by-two of one input has an essential hazard in each of its stable total states.
#[test]
fn divide_by_two() {
    let ring = table(
        &["x"],
        &["q"],
        Discipline::Single,
        &["a 0>a/0 1>b/-", "b 1>b/1 0>c/-", "c 0>c/1 1>d/-", "d 1>d/0 0>a/-"],
    );
    let design = proved(&ring);
    assert_eq!(design.merged.as_ref().expect("merged").cover.len(), 4);
    let essential = &design.equations.as_ref().expect("equations").essential;
    let mut places: Vec<_> = essential.iter().map(|e| (e.row, e.column, e.to)).collect();
    places.sort();
    places.dedup();
    assert_eq!(places.len(), 4);
    assert!(places.iter().all(|&(_, from, to)| from != to && from <= Column(1)));
    let slow = &design.proof.as_ref().expect("proof").slow;
    assert!(!slow.is_empty(), "some feedback must be slower than the input");
}

/// Source: digital design textbooks. Six compatible pairs of five rows, where the cover that looks best is not closed.
fn closed_cover_example() -> Project {
    table(
        &["p", "q", "r"],
        &["u", "v"],
        Discipline::Single,
        &[
            // (a,b) needs (b,c) in 100, (a,d) needs (b,c) in 010, (b,c) needs (d,e) in 001; c, d, e together need (a,d) in 110
            // and (b,c) in 101. Outputs part a from c and e, and b from d and e.
            "a 000>a/0- 100>c/-- 010>b/-- 110>a/--",
            "b 000>b/-0 100>b/-- 010>b/-- 001>d/-- 101>b/--",
            "c 000>c/1- 100>c/-- 010>c/-- 001>e/-- 110>a/-- 101>c/--",
            "d 000>d/-1 010>c/-- 001>d/-- 110>d/-- 101>c/--",
            "e 000>e/11 001>e/-- 101>b/--",
        ],
    )
}

#[test]
fn closed_cover() {
    let project = closed_cover_example();
    let design = derive(&project);
    let merged = design.merged.as_ref().expect("merged");
    let names = |a: usize, b: usize| format!("{}{}", project.rows[a].name, project.rows[b].name);
    let compatible: Vec<String> = merged
        .pairs
        .iter()
        .filter(|p| p.verdict == Verdict::Compatible)
        .map(|p| names(p.a.at(), p.b.at()))
        .collect();
    let mut compatible = compatible;
    compatible.sort();
    assert_eq!(compatible, ["ab", "ad", "bc", "cd", "ce", "de"]);
    assert_eq!(merged.cover.len(), 3);
    assert!(merged.bound.proved());
    let by_hand = |sets: &[&[&str]]| {
        let mut project = project.clone();
        let sets = sets.iter().map(|s| s.iter().map(|r| r.to_string()).collect()).collect();
        project.choices.merging.cover = CoverChoice::ByHand(sets);
        derive(&project)
    };
    let closed = by_hand(&[&["a", "d"], &["b", "c"], &["c", "d", "e"]]);
    assert_eq!(closed.merged.as_ref().expect("merged").faults, []);
    let open = by_hand(&[&["a", "b"], &["c", "d", "e"]]);
    assert!(!open.merged.as_ref().expect("merged").faults.is_empty());
    assert!(open.has_error());
}

/// Whether a column is in the on-set 0, 1, 2, 5, 6, 7.
fn ring(column: u32) -> bool {
    [0, 1, 2, 5, 6, 7].contains(&column)
}

/// Source: Quine-McCluskey examples of the textbooks. The six primes of the on-set 0, 1, 2, 5, 6, 7 form a ring; two covers of
/// three are smallest, and only all six are free of static hazards.
#[test]
fn ring_of_six_primes() {
    let inputs = ["a", "b", "c"];
    let moving = proved(&combinational(&inputs, Discipline::Single, ring));
    assert_eq!(products(&moving, Target::Output(0)), ["-00", "-11", "0-0", "01-", "1-1", "10-"]);
    // A row that nothing enters binds the values and asks for no transition.
    let mut resting = combinational(&inputs, Discipline::Single, ring);
    let still = table(&inputs, &["f"], Discipline::Single, &["still 000>still/1"]);
    resting.rows.insert(0, still.rows[0].clone());
    resting.initial = still.initial;
    let design = derive(&resting);
    let chosen = products(&design, Target::Output(0));
    assert_eq!(chosen.len(), 3, "{chosen:?}");
}

/// Source: Dunham & Fridshal 1959. Of the symmetric functions of six variables the one of weights 2 to 4 has the most primes,
/// 6!/(2! 2! 2!) = 90.
#[test]
fn many_primes() {
    let inputs = ["a", "b", "c", "d", "e", "g"];
    let middle = |c: u32| (2..=4).contains(&c.count_ones());
    let points: Vec<u32> = (0..64).filter(|&c| middle(c)).collect();
    let primes = naive::primes(&points, 6);
    assert_eq!(primes.len(), 90);
    let design = proved(&combinational(&inputs, Discipline::Single, middle));
    let equations = design.equations.as_ref().expect("equations");
    let function = &equations.functions[0];
    for product in &function.products {
        assert!(primes.contains(&ones_of(product.cube, equations.shape)), "{product:?}");
    }
    let best = fewest_products(function, equations, 120.0).optimum();
    assert_eq!(PRODUCT * function.products.len() as u64 + function.literals() as u64, best);
}
