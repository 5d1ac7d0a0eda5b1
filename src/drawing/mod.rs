//! Pictures of the design as plain values: one description for the window and for SVG.
//!
//! A [`Picture`] is a list of [`Item`]s in points, origin at the top left, y downwards. Each item has an [`Ink`], which
//! says what it *means* (a painter chooses the colour, for light or dark paper), and may stand for something that can
//! be selected, a [`Pick`]: that is how a view in the window knows what was clicked and what to mark. A picture never
//! holds a meaning by colour alone: a shape or a word goes with it.

pub mod codes;
pub mod implication;
pub mod karnaugh;
pub mod merger;
pub mod svg;
pub mod values;

pub use values::{Anchor, Ink, Item, Pick, Picture, Point, Shape, elide};
