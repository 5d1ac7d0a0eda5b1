//! Counts gates, transistors and levels of the two-level logic that the equations describe.
//!
//! # The structure that is counted
//!
//! *Literals.* A variable that is needed complemented anywhere has one inverter, whatever the number of its uses. These
//! inverters are gates but, as is usual for two-level logic, no level.
//!
//! *Terms.* A product (or sum, in the other shape) of one literal is a wire; a wider one is a gate. With shared products
//! equal terms are one gate; otherwise each function has its own.
//!
//! *Functions.* The terms of a function meet in one gate; a function of one term is that term. A constant costs nothing.
//!
//! *Fan-in.* A gate with more inputs than allowed becomes a tree of gates of the same kind. This is the associative law
//! and nothing else, so no hazard can arise that the two-level form does not have (Unger 1969). `n` inputs at a fan-in of
//! `f` take `ceil((n - 1) / (f - 1))` gates in `ceil(log_f n)` levels.
//!
//! *Style.* `AndOr`: as it stands. `NandOnly` for sums of products and `NorOnly` for products of sums: both levels turn
//! into the inverting gate one to one (De Morgan); a term of one literal is then fed in complemented, and a function of one term
//! ends in an inverter. The two other combinations take complemented literals into the first level, and end the second
//! in an inverter. A tree of inverting gates has an inverter behind every gate but the last; those do count as levels.
//!
//! *Storage.* Set/reset: two cross-coupled two-input gates for each state variable; of NAND gates they take S and R
//! complemented, two inverters more. C-element: S and the complement of R (one inverter) drive a symmetric C-element:
//! one element of twelve transistors with `AndOr`, otherwise the majority function `ab + ay + by` in two levels of the
//! gate in question. Storage and what stands between S, R and it lies behind the excitations and is no level.
//! A reset input is not counted.
//!
//! Transistors: two for each gate input (static CMOS, one in the pull-up and one in the pull-down network).
//!
//! Linear in the number of literals.

use std::collections::BTreeSet;

use crate::gates::values::Cost;
use crate::logic::values::{Cube, Equations, Function, Target};
use crate::project::choices::{Form, GatesChoice, Shape, Style};

/// The cost of the equations in the gates of `choice`; a fan-in under 2 counts as 2.
pub fn cost(equations: &Equations, choice: &GatesChoice) -> Cost {
    let mut count = Count {
        fan_in: usize::from(choice.fan_in.max(2)),
        kind: Kind::of(choice.style, equations.shape),
        total: Cost::default(),
        complemented: 0,
        seen: BTreeSet::new(),
        shared: equations.shared,
    };
    for function in &equations.functions {
        count.function(function);
    }
    count.inverters(count.complemented.count_ones() as usize);
    for function in &equations.functions {
        if matches!(function.target, Target::Set(_)) {
            count.storage(equations.form, choice.style);
        }
    }
    count.total
}

/// How the two levels turn into gates.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Kind {
    /// AND and OR gates.
    Plain,
    /// Both levels invert, and the inversions between them cancel.
    Matching,
    /// Both levels invert; literals go in complemented, and an inverter ends each function.
    Crossed,
}

impl Kind {
    fn of(style: Style, shape: Shape) -> Kind {
        match (style, shape) {
            (Style::AndOr, _) => Kind::Plain,
            (Style::NandOnly, Shape::SumOfProducts) | (Style::NorOnly, Shape::ProductOfSums) => {
                Kind::Matching
            }
            (Style::NandOnly, Shape::ProductOfSums) | (Style::NorOnly, Shape::SumOfProducts) => Kind::Crossed,
        }
    }
}

struct Count {
    fan_in: usize,
    kind: Kind,
    total: Cost,
    /// Variables that are needed complemented, as a mask.
    complemented: u32,
    /// Terms that exist as a gate already.
    seen: BTreeSet<Cube>,
    shared: bool,
}

impl Count {
    fn function(&mut self, function: &Function) {
        let terms = &function.products;
        let constant = terms.iter().any(|t| t.cube.care == 0);
        if constant {
            return;
        }
        let deepest = terms.iter().map(|t| self.term(t.cube, terms.len() == 1)).max().unwrap_or(0);
        let levels = deepest + self.second_level(terms.len(), terms.first().map(|t| t.cube));
        self.total.levels = self.total.levels.max(levels);
    }

    /// Counts a term; returns its levels.
    fn term(&mut self, cube: Cube, only: bool) -> usize {
        let width = cube.literals() as usize;
        let inverted_literals = match self.kind {
            Kind::Plain => false,
            Kind::Matching => width == 1 && !only,
            Kind::Crossed => width > 1,
        };
        let positive = cube.ones;
        let negative = cube.care & !cube.ones;
        self.complemented |= if inverted_literals { positive } else { negative };
        if self.shared && self.seen.contains(&cube) {
            return self.tree_levels(width);
        }
        self.seen.insert(cube);
        self.total.literals += width;
        self.tree(width);
        self.tree_levels(width)
    }

    /// Counts the gate in which the terms of a function meet; returns its levels.
    fn second_level(&mut self, terms: usize, first: Option<Cube>) -> usize {
        let ends_inverted = match self.kind {
            Kind::Plain => false,
            // A lone gate gives the complement of its term; a lone literal is a wire.
            Kind::Matching => terms == 1 && first.is_some_and(|c| c.literals() > 1),
            Kind::Crossed => terms > 1,
        };
        self.tree(terms);
        self.inverters(usize::from(ends_inverted));
        self.tree_levels(terms) + usize::from(ends_inverted)
    }

    /// Counts a gate of `inputs` inputs, as a tree where it is too wide. One input is a wire.
    fn tree(&mut self, inputs: usize) {
        if inputs < 2 {
            return;
        }
        let gates = (inputs - 1).div_ceil(self.fan_in - 1);
        self.total.gates += gates;
        self.total.transistors += 2 * (inputs + gates - 1);
        if self.kind != Kind::Plain {
            self.inverters(gates - 1);
        }
    }

    fn tree_levels(&self, inputs: usize) -> usize {
        let mut levels = 0;
        let mut reach = 1;
        while reach < inputs {
            reach *= self.fan_in;
            levels += 1;
        }
        if self.kind == Kind::Plain || levels == 0 { levels } else { 2 * levels - 1 }
    }

    fn inverters(&mut self, number: usize) {
        self.total.gates += number;
        self.total.transistors += 2 * number;
    }

    /// Counts the storage element of one state variable.
    fn storage(&mut self, form: Form, style: Style) {
        match form {
            Form::Feedback => {}
            Form::SetReset => {
                self.total.gates += 2;
                self.total.transistors += 8;
                self.inverters(if style == Style::NandOnly { 2 } else { 0 });
            }
            Form::CElement => {
                self.inverters(1);
                if style == Style::AndOr {
                    self.total.gates += 1;
                    self.total.transistors += 12;
                } else {
                    (0..3).for_each(|_| self.tree(2));
                    self.tree(3);
                    // Where the gate does not match the shape, the two inversions still cancel: majority is self-dual.
                }
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::base::Bound;
    use crate::logic::values::Product;

    fn function(name: &str, target: Target, products: &[&str]) -> Function {
        let cube = |text: &str| {
            text.chars().enumerate().fold(Cube::default(), |c, (i, ch)| match ch {
                '1' => Cube { care: c.care | 1 << i, ones: c.ones | 1 << i },
                '0' => Cube { care: c.care | 1 << i, ones: c.ones },
                _ => c,
            })
        };
        Function {
            name: name.into(),
            target,
            on: vec![],
            off: vec![],
            transitions: vec![],
            required: vec![],
            privileged: vec![],
            products: products
                .iter()
                .map(|t| Product { cube: cube(t), alone: vec![], hazard_only: false })
                .collect(),
            bound: Bound::Proved,
        }
    }

    fn equations(form: Form, shape: Shape, shared: bool, functions: Vec<Function>) -> Equations {
        Equations {
            form,
            shape,
            inputs: 2,
            variables: vec!["D".into(), "G".into(), "y1".into()],
            functions,
            shared,
            essential: vec![],
            burst_essential: vec![],
            implementation: vec![],
            clashes: vec![],
            notes: vec![],
        }
    }

    fn with(style: Style, fan_in: u8) -> GatesChoice {
        GatesChoice { style, fan_in, ..GatesChoice::default() }
    }

    fn latch(shape: Shape, products: &[&str]) -> Equations {
        equations(Form::Feedback, shape, false, vec![function("Y1", Target::Next(0), products)])
    }

    /// Counted by hand: three AND of two, one OR of three, one inverter.
    #[test]
    fn the_gated_latch() {
        let eq = latch(Shape::SumOfProducts, &["11-", "1-1", "-01"]);
        let expect = Cost { literals: 6, gates: 5, transistors: 20, levels: 2 };
        assert_eq!(cost(&eq, &with(Style::AndOr, 4)), expect);
        assert_eq!(cost(&eq, &with(Style::NandOnly, 4)), expect);
        // NOR: G, D', y1', G', .. : D, G and y1 complemented; y1' and D' too; one inverter at the end.
        assert_eq!(
            cost(&eq, &with(Style::NorOnly, 4)),
            Cost { literals: 6, gates: 8, transistors: 26, levels: 3 }
        );
    }

    #[test]
    fn a_wide_gate_becomes_a_tree() {
        let eq = latch(Shape::SumOfProducts, &["11-", "1-1", "-01"]);
        // The OR of three becomes two gates of two.
        assert_eq!(
            cost(&eq, &with(Style::AndOr, 2)),
            Cost { literals: 6, gates: 6, transistors: 22, levels: 3 }
        );
        // NAND: the inner one has an inverter behind it.
        assert_eq!(
            cost(&eq, &with(Style::NandOnly, 2)),
            Cost { literals: 6, gates: 7, transistors: 24, levels: 4 }
        );
    }

    #[test]
    fn wires_inverters_and_constants() {
        let free = |products: &[&str]| cost(&latch(Shape::SumOfProducts, products), &with(Style::AndOr, 4));
        assert_eq!(free(&[]), Cost::default());
        assert_eq!(free(&["---"]), Cost::default());
        assert_eq!(free(&["1--"]), Cost { literals: 1, ..Cost::default() });
        assert_eq!(free(&["0--"]), Cost { literals: 1, gates: 1, transistors: 2, levels: 0 });
    }

    #[test]
    fn a_single_literal_goes_into_a_nand_complemented() {
        // D + G'y: NAND(D', NAND(G', y)).
        let eq = latch(Shape::SumOfProducts, &["1--", "-01"]);
        assert_eq!(
            cost(&eq, &with(Style::NandOnly, 4)),
            Cost { literals: 3, gates: 4, transistors: 12, levels: 2 }
        );
        // D' + G'y: NAND(D, NAND(G', y)).
        let eq = latch(Shape::SumOfProducts, &["0--", "-01"]);
        assert_eq!(
            cost(&eq, &with(Style::NandOnly, 4)),
            Cost { literals: 3, gates: 3, transistors: 10, levels: 2 }
        );
        // D·G alone: NAND and inverter.
        let eq = latch(Shape::SumOfProducts, &["11-"]);
        assert_eq!(
            cost(&eq, &with(Style::NandOnly, 4)),
            Cost { literals: 2, gates: 2, transistors: 6, levels: 2 }
        );
    }

    #[test]
    fn a_shared_product_counts_once() {
        let functions = vec![
            function("Y1", Target::Next(0), &["11-", "-01"]),
            function("Q", Target::Output(0), &["11-", "1-1"]),
        ];
        let apart = equations(Form::Feedback, Shape::SumOfProducts, false, functions.clone());
        let shared = equations(Form::Feedback, Shape::SumOfProducts, true, functions);
        let choice = with(Style::AndOr, 4);
        assert_eq!(cost(&apart, &choice), Cost { literals: 8, gates: 7, transistors: 26, levels: 2 });
        assert_eq!(cost(&shared, &choice), Cost { literals: 6, gates: 6, transistors: 22, levels: 2 });
    }

    #[test]
    fn storage_is_counted_for_each_state_variable() {
        let functions =
            vec![function("S1", Target::Set(0), &["11-"]), function("R1", Target::Reset(0), &["01-"])];
        let latch = equations(Form::SetReset, Shape::SumOfProducts, false, functions.clone());
        let element = equations(Form::CElement, Shape::SumOfProducts, false, functions);
        // Two AND, one inverter, two storage gates.
        assert_eq!(cost(&latch, &with(Style::AndOr, 4)).gates, 5);
        assert_eq!(cost(&latch, &with(Style::AndOr, 4)).transistors, 4 + 4 + 2 + 8);
        // One C-element and the inverter of R in their place.
        assert_eq!(cost(&element, &with(Style::AndOr, 4)).gates, 5);
        assert_eq!(cost(&element, &with(Style::AndOr, 4)).transistors, 4 + 4 + 2 + 2 + 12);
        // NAND: two NAND with inverters, D', and the storage: two inverters and two gates.
        assert_eq!(cost(&latch, &with(Style::NandOnly, 4)).gates, 4 + 1 + 4);
        assert_eq!(cost(&element, &with(Style::NandOnly, 4)).gates, 4 + 1 + 1 + 4);
    }
}
