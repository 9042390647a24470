//! Limits worked out of what a board is made of. Pure: no file, no clock, no randomness but a seed.
//!
//! Three sets are kept apart:
//!
//! - *data sheet*: what the detector's maker promises at one temperature, seen through the nominal divider;
//! - *design*: what a board of good parts does over its temperatures and its life;
//! - *test*: what a board must measure on the bench so that it keeps the design limits afterwards. Temperature over the
//!   range and ageing do not act during the test, so their share comes off, and a guard band for what the bench does
//!   not know. A test limit is never wider than the design limit.
//!
//! Design limits come from a tolerance stack, by three methods side by side: all parts at their worst ends
//! ([`worst_case`]), the root of the sum of squares ([`root_sum_square`]), and Monte Carlo ([`monte_carlo`], after
//! JCGM 101:2008). The methods know no boards, only inputs and a model; [`ThresholdStack`] is the board's.

pub mod input;
pub mod monte_carlo;
pub mod root_sum_square;
pub mod worst_case;

mod pairs;
mod proposal;
mod risks;
mod sets;
mod stack;
mod study;
mod window;

pub use pairs::{Warning, WarningCode};
pub use proposal::{Basis, Production, Proposal, Quantity, Question};
pub use risks::Risks;
pub use sets::LimitSets;
pub use stack::{Condition, ThresholdStack};
pub use study::{Contribution, Study};
pub use window::{Window, volts};
