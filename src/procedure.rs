//! What to do next: one answer in, one action out. Pure: no clock, no port, no file.
//!
//! Every way out of a procedure passes through *switch the output off*.

mod ability;
mod action;

pub use ability::Ability;
pub use action::{Action, Event};
