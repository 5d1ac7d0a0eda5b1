//! One controller with every method, form and shape.

use crate::design::deriver::Deriver;
use crate::design::settings::Settings;
use crate::design::values::Alternative;
use crate::project::Project;
use crate::project::choices::{Form, Method, Shape};

/// Derives the project with all methods, forms and shapes, in this order; codes by hand come first where the project
/// has them. What does not depend on a choice is derived once.
pub fn alternatives(project: &Project, settings: &Settings<'_>) -> Vec<Alternative> {
    let by_hand = Some(&project.choices.codes.method).filter(|m| matches!(m, Method::ByHand(_)));
    let mut deriver = Deriver::default();
    let mut project = project.clone();
    let methods: Vec<Method> = by_hand.into_iter().cloned().chain(Method::ALL).collect();
    let mut all = Vec::new();
    for method in methods {
        project.choices.codes.method = method.clone();
        for form in Form::ALL {
            project.choices.logic.form = form;
            for shape in Shape::ALL {
                project.choices.logic.shape = shape;
                let design = deriver.derive(&project, settings);
                all.push(Alternative { method: method.clone(), form, shape, design });
            }
        }
    }
    all
}
