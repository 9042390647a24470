//! The part of a definition that describes a supply: its range, its claims and its commands.

use super::Template;
use crate::trace::Accuracy;
use crate::units::{Amps, Volts};
use std::time::Duration;

/// A supply that can be set in voltage and limited in current.
#[derive(Clone, Debug, PartialEq)]
pub struct Source {
    /// Voltages it can be set to.
    pub voltage: Span<Volts>,
    /// Smallest step of the voltage.
    pub set_step: Volts,
    /// Current limits it can be set to.
    pub current: Span<Amps>,
    /// Over-voltage protection levels it can be set to.
    pub over_voltage: Span<Volts>,
    /// Error limit of the set voltage at its terminals.
    pub programming: Accuracy,
    /// Time after a step until the output has settled, board on.
    pub settle: Duration,
    /// How close to its final value a voltage counts as settled.
    pub settled_within: Volts,
    /// Commands sent once after [`super::Definition::setup`], in order.
    pub setup: Vec<String>,
    /// What to send for each action.
    pub commands: SourceCommands,
}

/// Lowest and highest value of a setting, both allowed.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Span<Q> {
    /// Lowest.
    pub min: Q,
    /// Highest.
    pub max: Q,
}

impl<Q: Copy + PartialOrd> Span<Q> {
    /// True when `value` can be set. False for NaN.
    pub fn holds(&self, value: Q) -> bool {
        self.min <= value && value <= self.max
    }
}

/// What to send to a supply. Questions end in `?` and are answered by one line.
#[derive(Clone, Debug, PartialEq)]
pub struct SourceCommands {
    /// Sets the voltage.
    pub set_voltage: Template,
    /// Asks for the set voltage.
    pub ask_voltage: String,
    /// Sets the current limit.
    pub set_current: Template,
    /// Asks for the current limit.
    pub ask_current: String,
    /// Sets the over-voltage protection level.
    pub set_over_voltage: Template,
    /// Asks for the over-voltage protection level.
    pub ask_over_voltage: String,
    /// Switches the output on.
    pub output_on: String,
    /// Switches the output off.
    pub output_off: String,
    /// Asks whether the output is on: `1` or `0`.
    pub ask_output: String,
    /// Asks whether the current limit is active; `None` when the supply cannot tell.
    pub ask_limited: Option<LimitedQuery>,
}

/// How a supply is asked whether it limits the current.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LimitedQuery {
    /// The question; the reply is a whole number, a register.
    pub query: String,
    /// The current limit is active when any of these bits is set. Never zero.
    pub mask: u32,
}

impl LimitedQuery {
    /// Whether the register read says that the current limit is active.
    pub fn limited(&self, register: u32) -> bool {
        register & self.mask != 0
    }
}
