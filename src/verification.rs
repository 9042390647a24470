//! Is the bench itself in order? From traces taken without a board, or of a board that is known, to what is kept. Pure.
//!
//! The daily verification of a bench: meters at rest, supply against voltmeter, leads, the zeros of an empty fixture,
//! and reference boards. Each look gives numbers and, in plain words, every problem with what to do about it.

mod comparison;
mod ending;
mod fuse;
mod leads;
mod mean;
mod reference;
mod rest;
mod small_range;
mod standard;
mod steps;
mod zeros;

pub use comparison::{Compared, ReferenceResult, compare};
pub use leads::{KnownLoad, Leads, LoadFound, leads};
pub use reference::{KnownValue, Must, Reference};
pub use rest::{AtRest, rest};
pub use standard::{StandardFound, StandardTask, standard};
pub use steps::{Step, steps};
pub use zeros::{FixtureZero, ZeroTask, zeros};
