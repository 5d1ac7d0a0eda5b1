//! The functions as Boolean functions, by binary decision diagrams (crates.io `biodivine-lib-bdd`).

mod common;

use std::sync::atomic::{AtomicUsize, Ordering};

use biodivine_lib_bdd::{Bdd, BddPartialValuation, BddVariableSet};
use stillgate::logic::values::{Cube, Equations, Function, Target, point};
use stillgate::project::{Form, Method, Project, Shape};

use common::random::{primitive, shape_of};
use common::{derive, text, with};

/// Diagrams over the variables of some equations.
struct Diagrams {
    set: BddVariableSet,
    variables: usize,
}

impl Diagrams {
    fn over(equations: &Equations) -> Self {
        let variables = equations.variables.len();
        Diagrams { set: BddVariableSet::new_anonymous(variables as u16), variables }
    }

    fn valuation(&self, cube: Cube) -> BddPartialValuation {
        let names = self.set.variables();
        let fixed: Vec<_> = (0..self.variables)
            .filter(|i| cube.care >> i & 1 == 1)
            .map(|i| (names[i], cube.ones >> i & 1 == 1))
            .collect();
        BddPartialValuation::from_values(&fixed)
    }

    fn cubes(&self, cubes: &[Cube]) -> Bdd {
        let all: Vec<_> = cubes.iter().map(|&c| self.valuation(c)).collect();
        self.set.mk_dnf(&all)
    }

    /// The function as its gates compute it.
    fn function(&self, function: &Function, shape: Shape) -> Bdd {
        let terms: Vec<_> = function.products.iter().map(|p| self.valuation(p.cube)).collect();
        match shape {
            Shape::SumOfProducts => self.set.mk_dnf(&terms),
            Shape::ProductOfSums => self.set.mk_cnf(&terms),
        }
    }

    fn state(&self, equations: &Equations, bit: usize) -> Bdd {
        self.set.mk_var(self.set.variables()[equations.inputs + bit])
    }

    /// The next value of each state variable, whatever the form.
    fn next(&self, equations: &Equations) -> Vec<Option<Bdd>> {
        let find = |target: Target| {
            let found = equations.functions.iter().find(|f| f.target == target)?;
            Some(self.function(found, equations.shape))
        };
        (0..self.variables - equations.inputs)
            .map(|bit| match equations.form {
                Form::Feedback => find(Target::Next(bit)),
                Form::SetReset | Form::CElement => {
                    let (set, reset) = (find(Target::Set(bit))?, find(Target::Reset(bit))?);
                    Some(set.or(&self.state(equations, bit).and(&reset.not())))
                }
            })
            .collect()
    }
}

fn equations(project: &Project, method: &Method, form: Form, shape: Shape) -> Option<Equations> {
    let design = derive(&with(project, method, form, shape));
    design.equations.map(|e| (*e).clone())
}

#[test]
fn a_function_lies_between_its_on_set_and_its_off_set() {
    let met = AtomicUsize::new(0);
    text::for_seeds("functions", 300, |seed| {
        let project = primitive(seed, shape_of(seed));
        let method = &Method::ALL[seed as usize % Method::ALL.len()];
        for form in Form::ALL {
            for shape in Shape::ALL {
                let Some(equations) = equations(&project, method, form, shape) else { continue };
                let diagrams = Diagrams::over(&equations);
                for function in &equations.functions {
                    let made = diagrams.function(function, shape);
                    let on = diagrams.cubes(&function.on);
                    let off = diagrams.cubes(&function.off);
                    assert!(on.and(&off).is_false(), "{}: on-set and off-set meet", function.name);
                    assert!(on.imp(&made).is_true(), "{}: an on-set point is 0", function.name);
                    assert!(made.and(&off).is_false(), "{}: an off-set point is 1", function.name);
                    met.fetch_add(1, Ordering::Relaxed);
                    for point in 0..1u32 << diagrams.variables.min(6) {
                        let cube = diagrams.cubes(&[Cube::at(point, diagrams.variables)]);
                        let value = !cube.and(&made).is_false();
                        assert_eq!(function.value(shape, point), value, "{} at {point}", function.name);
                    }
                }
            }
        }
    });
    assert!(met.into_inner() > 3000);
}

#[test]
fn all_forms_and_shapes_have_one_next_state() {
    let met = AtomicUsize::new(0);
    text::for_seeds("functions-forms", 200, |seed| {
        let project = primitive(seed, shape_of(seed));
        for method in &Method::ALL {
            let Some(first) = equations(&project, method, Form::Feedback, Shape::SumOfProducts) else {
                continue;
            };
            let diagrams = Diagrams::over(&first);
            let next = diagrams.next(&first);
            for form in Form::ALL {
                for shape in Shape::ALL {
                    let Some(other) = equations(&project, method, form, shape) else { continue };
                    assert_eq!(other.variables, first.variables);
                    for (bit, (ours, theirs)) in next.iter().zip(diagrams.next(&other)).enumerate() {
                        // A function with a clash is missing.
                        let (Some(ours), Some(theirs)) = (ours, theirs) else { continue };
                        let function = first.functions.iter().find(|f| f.target == Target::Next(bit));
                        let function = function.expect("it has products");
                        let care = diagrams.cubes(&function.on).or(&diagrams.cubes(&function.off));
                        assert!(ours.xor(&theirs).and(&care).is_false(), "y{} differs", bit + 1);
                        met.fetch_add(1, Ordering::Relaxed);
                    }
                }
            }
        }
    });
    assert!(met.into_inner() > 3000);
}

#[test]
fn outputs_at_rest_are_those_of_the_table_in_every_form_and_shape() {
    // On the way from one stable cell to another the shapes may choose differently, early or late; at rest never.
    let met = AtomicUsize::new(0);
    text::for_seeds("functions-shapes", 300, |seed| {
        let project = primitive(seed, shape_of(seed));
        let method = &Method::ALL[seed as usize % Method::ALL.len()];
        for form in Form::ALL {
            for shape in Shape::ALL {
                let design = derive(&with(&project, method, form, shape));
                let (Some(merged), Some(coded), Some(equations)) =
                    (&design.merged, &design.coded, &design.equations)
                else {
                    continue;
                };
                let table = &merged.reduced.as_ref().expect("coded").table;
                let diagrams = Diagrams::over(equations);
                for function in &equations.functions {
                    let Target::Output(j) = function.target else { continue };
                    let made = diagrams.function(function, shape);
                    for (row, column) in table.rows().flat_map(|r| table.columns().map(move |c| (r, c))) {
                        let Some(value) = table.cell(row, column).outputs.get(j) else { continue };
                        if !table.stable(row, column) {
                            continue;
                        }
                        for &code in &coded.codes[row.at()] {
                            let at = Cube::at(point(column, code, equations.inputs), diagrams.variables);
                            let there = diagrams.cubes(&[at]).and(&made);
                            assert_eq!(!there.is_false(), value, "{} in {}", function.name, table.name(row));
                            met.fetch_add(1, Ordering::Relaxed);
                        }
                    }
                }
            }
        }
    });
    assert!(met.into_inner() > 5000);
}
