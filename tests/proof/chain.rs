//! The real stages, run on a project with one method, form and shape.

use stillgate::base::Effort;
use stillgate::codes::{Coded, assign};
use stillgate::logic::{Equations, equations};
use stillgate::merge::{MergeChoice, Reduced, merge};
use stillgate::project::Project;
use stillgate::project::choices::{Form, LogicChoice, Method, OutputStyle, Shape};
use stillgate::spec::{Spec, check};

/// Everything that the proof looks at.
#[derive(Clone)]
pub struct Chain {
    pub spec: Spec,
    pub reduced: Reduced,
    pub coded: Coded,
    pub equations: Equations,
}

/// The specification and its reduced table; `None` if the project has errors.
pub fn reduce(project: &Project, outputs: OutputStyle) -> Option<(Spec, Reduced)> {
    let spec = check(project).spec?;
    let choice = MergeChoice { outputs, covers: 1, ..MergeChoice::default() };
    let merged = merge(&spec, &choice, &Effort::of(2_000_000)).ok()?;
    Some((spec, merged.reduced?))
}

/// The codes; `None` if the method does not apply.
pub fn code(reduced: &Reduced, method: &Method) -> Option<Coded> {
    assign(reduced, method, &Effort::of(2_000_000)).ok()
}

/// The equations; `None` if they clash.
pub fn derive(spec: &Spec, reduced: &Reduced, coded: &Coded, form: Form, shape: Shape) -> Option<Chain> {
    let choice = LogicChoice { form, shape, share: false, late: Vec::new() };
    let equations = equations(spec, reduced, coded, &choice, &Effort::of(2_000_000));
    let whole = equations.clashes.is_empty();
    whole.then(|| Chain { spec: spec.clone(), reduced: reduced.clone(), coded: coded.clone(), equations })
}

/// Calls `f` with every design that the methods, forms and shapes make of a project.
pub fn every(project: &Project, mut f: impl FnMut(&str, &Chain)) {
    for outputs in [OutputStyle::PerCell, OutputStyle::PerRow] {
        let Some((spec, reduced)) = reduce(project, outputs) else { continue };
        for method in Method::ALL {
            // Several codes for each of nine rows and more are fifteen bits: the equations then take minutes.
            let Some(coded) = code(&reduced, &method).filter(|c| c.bits <= 9) else { continue };
            for form in Form::ALL {
                for shape in Shape::ALL {
                    if let Some(chain) = derive(&spec, &reduced, &coded, form, shape) {
                        let name = format!("{outputs:?} {} {} {}", method.word(), form.word(), shape.word());
                        f(&name, &chain);
                    }
                }
            }
        }
    }
}
