//! A board's physics on a bench, in simulated time and deterministic from a seed.
//!
//! [`Setup`] holds plain parameters: a board, a supply, meters and the wiring between them, drawn from a seed around
//! what a profile describes and a named [`Condition`]. [`World`] plays them: it knows voltages, currents and time,
//! and neither text nor procedures. Time moves only when told to.

pub mod bench;
mod board;
mod circuit;
mod class;
mod condition;
mod contact;
mod course;
mod detector;
pub mod device;
mod draw;
mod faults;
mod feed;
mod gate;
mod good_board;
pub mod link_faults;
mod lockout;
mod meter;
mod motion;
mod output;
mod passing;
mod ripple;
mod setup;
mod shared_world;
mod source_measure_unit;
mod supply;
mod temperature;
pub mod terminal;
mod truth;
mod wiring;
mod world;

pub use board::{BoardModel, DeepConduction, PullUp, Switch};
pub use condition::{Condition, UnknownCondition};
pub use faults::{Faults, Mishap};
pub use feed::Feed;
pub use lockout::Lockout;
pub use meter::{AmmeterModel, AmmeterRange, MeterRange, VoltmeterModel};
pub use ripple::Ripple;
pub use setup::{LeftOn, Setup, ShortReadings};
pub use shared_world::{JumpingClock, SharedWorld, SimulationClock};
pub use supply::SupplyModel;
pub use truth::Truth;
pub use wiring::{LoadWiring, Polarity, Wiring};
pub use world::{Mark, World};

use shared_world::lock;
