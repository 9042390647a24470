//! What must be sent to make a setting, and how close the answer must come.

use super::Playing;
use crate::instrument::definition::{Meter, Range, Source, Span, Timing};
use crate::instrument::error::InstrumentError;
use crate::instrument::session::{Setting, SwitchOff};
use crate::units::{Amps, Quantity, Volts};
use std::sync::Arc;

/// A voltage read back may differ by rounding to the supply's step, half of one and a little for the printed digits;
/// a whole step would hide a set-point that was refused.
const SHARE_OF_STEP: f64 = 0.6;

/// A limit read back may differ by this share of itself and of the largest that can be set: limits are set more
/// coarsely than voltages.
const SHARE_OF_LIMIT: f64 = 0.01;
const SHARE_OF_LARGEST_LIMIT: f64 = 5e-4;

/// A range read back may differ by this share: ranges lie at least a factor of two apart.
const SHARE_OF_RANGE: f64 = 0.05;

/// The voltage of the output.
pub(super) fn voltage(source: &Playing<Source>, volts: Volts) -> Result<Setting, InstrumentError> {
    let commands = &source.part.commands;
    let tolerance = source.part.set_step.0 * SHARE_OF_STEP;
    source.allowed("a voltage", source.part.voltage, volts)?;
    Ok(source.setting(commands.set_voltage.with(volts.0), &commands.ask_voltage, volts.0, tolerance))
}

/// The current limit.
pub(super) fn current_limit(source: &Playing<Source>, limit: Amps) -> Result<Setting, InstrumentError> {
    let commands = &source.part.commands;
    let tolerance = limit_tolerance(limit.0, source.part.current.max.0);
    source.allowed("a current limit", source.part.current, limit)?;
    Ok(source.setting(commands.set_current.with(limit.0), &commands.ask_current, limit.0, tolerance))
}

/// The level of the over-voltage protection.
pub(super) fn over_voltage(source: &Playing<Source>, level: Volts) -> Result<Setting, InstrumentError> {
    let commands = &source.part.commands;
    let tolerance = limit_tolerance(level.0, source.part.over_voltage.max.0);
    source.allowed("an over-voltage protection", source.part.over_voltage, level)?;
    Ok(source.setting(
        commands.set_over_voltage.with(level.0),
        &commands.ask_over_voltage,
        level.0,
        tolerance,
    ))
}

fn limit_tolerance(limit: f64, largest: f64) -> f64 {
    limit.abs() * SHARE_OF_LIMIT + largest * SHARE_OF_LARGEST_LIMIT
}

/// The range of a meter; `None` for a meter that has only one.
pub(super) fn range<Q: Quantity>(meter: &Meter<Q>, range: &Range<Q>, timing: Timing) -> Option<Setting> {
    let commands = meter.range.as_ref()?;
    let full_scale = range.full_scale.si();
    Some(Setting {
        command: commands.set.with(full_scale),
        question: commands.ask.clone(),
        wanted: full_scale,
        tolerance: full_scale * SHARE_OF_RANGE,
        deadline: timing.range_deadline,
    })
}

/// Switches the output off: lowest voltage first, so that what the output's capacitors hold does not stay on the board.
pub(super) fn switch_off(source: &Source) -> SwitchOff {
    let commands = &source.commands;
    let lowest = source.voltage.min.max(Volts::ZERO);
    SwitchOff {
        commands: vec![commands.set_voltage.with(lowest.0), commands.output_off.clone()],
        question: commands.ask_output.clone(),
    }
}

impl Playing<Source> {
    /// What the supply cannot be set to is never sent to it.
    fn allowed<Q>(&self, what: &str, span: Span<Q>, value: Q) -> Result<(), InstrumentError>
    where
        Q: Copy + PartialOrd + std::fmt::Display,
    {
        if span.holds(value) {
            return Ok(());
        }
        Err(InstrumentError::CannotDo {
            place: Arc::clone(self.instrument.place()),
            what: format!("{what} of {value}; its definition allows {} to {}", span.min, span.max),
        })
    }

    fn setting(&self, command: String, question: &str, wanted: f64, tolerance: f64) -> Setting {
        Setting {
            command,
            question: question.to_owned(),
            wanted,
            tolerance,
            deadline: self.timing.reply_deadline,
        }
    }
}

impl<Q: Quantity + std::fmt::Display> Playing<Meter<Q>> {
    /// The smallest range that holds `value`.
    pub(super) fn range_for(&self, value: Q) -> Result<&Range<Q>, InstrumentError> {
        self.part.range_for(value).ok_or_else(|| InstrumentError::CannotDo {
            place: Arc::clone(self.instrument.place()),
            what: format!("it has no range that holds {value}"),
        })
    }
}
