//! What many cycles of few boards say about a design: thresholds, jitter, drift, temperature, delays, limits. Pure.
//!
//! A [`Plan`] lists boards, temperatures, loads and rates, and gives one [`Order`] a cycle. A [`Cycle`] is read from the
//! trace of its run: between which voltages the board tripped and came back. [`Estimates`] is what all of them say.

mod chosen;
mod cycle;
mod delay;
mod drift;
mod estimates;
#[cfg(test)]
mod fixture;
mod here;
mod limits;
mod plan;
mod proposal;
mod tempco;
mod threshold;

pub use chosen::window;
pub use cycle::{Crossing, Cycle, Edge, read};
pub use delay::Delay;
pub use drift::Drift;
pub use estimates::{AtRest, Cell, Estimates, Limits, Line, Question};
pub use plan::{Order, Place, Plan};
pub use proposal::{Basis, Proposal};
pub use tempco::TemperatureCoefficient;
pub use threshold::{Jitter, Threshold};
