//! Carries out what a header means: sets numbers and states, answers questions, follows orders.

use super::command::{Meaning, Number, Order, Probe, Question, Switch};
use super::common::only;
use super::datum::{Bounds, Datum};
use super::message::Unit;
use super::ratings::bounds_of;
use super::reply::{nr1, nr3};
use super::{Device, ScpiError, SharedWorld};
use crate::units::{Amps, Volts};

/// Contents of a register of SCPI, whose highest bit is never used.
const REGISTER: Bounds = Bounds { least: 0.0, most: 65_535.0, default: 0.0 };

impl Device {
    /// The reply, if the unit asked for one.
    pub(super) fn carry_out(
        &mut self,
        meaning: Meaning,
        unit: &Unit<'_>,
        world: &SharedWorld,
    ) -> Result<Option<String>, ScpiError> {
        let data = unit.data.as_slice();
        match (meaning, unit.query) {
            (Meaning::Number(number), false) => {
                let value = only(data)?.number(self.bounds(number))?;
                self.set_number(number, value, world);
                Ok(None)
            }
            (Meaning::Number(number), true) => self.number(number, data, world).map(Some),
            (Meaning::Switch(switch), false) => {
                let state = only(data)?.boolean()?;
                self.set_switch(switch, state, world);
                Ok(None)
            }
            (Meaning::Switch(switch), true) => {
                none(data)?;
                Ok(Some(nr1(self.switch(switch, world))))
            }
            (Meaning::Question(question), true) => self.answer(question, data, world).map(Some),
            (Meaning::Order(order), false) => self.follow(order, data, world).map(|()| None),
            (Meaning::Question(_), false) | (Meaning::Order(_), true) => Err(ScpiError::UNDEFINED_HEADER),
        }
    }

    fn bounds(&self, number: Number) -> Bounds {
        match number {
            Number::Volts => self.ratings.volts,
            Number::CurrentLimit => self.ratings.current_limit,
            Number::OverVoltage => self.ratings.over_voltage,
            Number::Range(Probe::Current) => bounds_of(&self.ratings.current_ranges),
            Number::Range(_) => bounds_of(&self.ratings.voltage_ranges),
            Number::LineCycles(_) => self.ratings.line_cycles,
            Number::QuestionableEnable | Number::OperationEnable => REGISTER,
        }
    }

    fn set_number(&mut self, number: Number, value: f64, world: &SharedWorld) {
        match number {
            Number::Volts => world.with(|world| world.set_volts(Volts(value))),
            Number::CurrentLimit => world.with(|world| world.set_current_limit(Amps(value))),
            Number::OverVoltage => world.with(|world| world.set_over_voltage(Volts(value))),
            Number::Range(probe) => self.fix_range(probe, value, world),
            Number::LineCycles(probe) => self.settings(probe).line_cycles = value,
            Number::QuestionableEnable => self.status.questionable.enable = value.round() as u16,
            Number::OperationEnable => self.status.operation.enable = value.round() as u16,
        }
    }

    /// The number as it stands, or with MIN, MAX or DEF what it can be.
    fn number(
        &mut self,
        number: Number,
        data: &[Datum<'_>],
        world: &SharedWorld,
    ) -> Result<String, ScpiError> {
        match data {
            [] => {}
            [Datum::Word(word)] => {
                let value = self.bounds(number).named(word).ok_or(ScpiError::CHARACTER_DATA)?;
                return if value.is_finite() { Ok(nr3(value)) } else { Err(ScpiError::ILLEGAL_VALUE) };
            }
            _ => return Err(ScpiError::PARAMETER_NOT_ALLOWED),
        }
        let value = match number {
            Number::Volts => world.with(|world| world.volts()).0,
            Number::CurrentLimit => world.with(|world| world.current_limit()).0,
            Number::OverVoltage => world.with(|world| world.over_voltage()).0,
            Number::Range(probe) => self.range(probe, world),
            Number::LineCycles(probe) => self.settings(probe).line_cycles,
            Number::QuestionableEnable => return Ok(self.status.questionable.enable.to_string()),
            Number::OperationEnable => return Ok(self.status.operation.enable.to_string()),
        };
        Ok(nr3(value))
    }

    fn set_switch(&mut self, switch: Switch, state: bool, world: &SharedWorld) {
        match switch {
            Switch::Output => world.with(|world| world.set_output(state)),
            Switch::AutoRange(probe) => self.settings(probe).auto_range = state,
        }
    }

    fn switch(&mut self, switch: Switch, world: &SharedWorld) -> bool {
        match switch {
            Switch::Output => world.with(|world| world.output()),
            Switch::AutoRange(probe) => self.settings(probe).auto_range,
        }
    }

    fn answer(
        &mut self,
        question: Question,
        data: &[Datum<'_>],
        world: &SharedWorld,
    ) -> Result<String, ScpiError> {
        if !matches!(question, Question::Measure(_)) {
            none(data)?;
        }
        Ok(match question {
            Question::Measure(probe) => {
                let full_scale = self.configuration(probe, data)?;
                self.configure(probe, full_scale, world);
                nr3(self.measure(probe, world))
            }
            Question::Sample(probe) => nr3(self.measure(probe, world)),
            Question::Read => nr3(self.read(world)?),
            Question::Fetch => nr3(self.last_reading.ok_or(ScpiError::STALE)?),
            Question::Error => self
                .status
                .errors
                .pop()
                .map_or_else(|| "0,\"No error\"".to_owned(), |error| error.to_string()),
            Question::Version => "1999.0".to_owned(),
            Question::QuestionableCondition => self.status.questionable.condition().to_string(),
            Question::QuestionableEvent => self.status.questionable.take_event().to_string(),
            Question::OperationCondition => self.status.operation.condition().to_string(),
            Question::OperationEvent => self.status.operation.take_event().to_string(),
        })
    }

    fn follow(&mut self, order: Order, data: &[Datum<'_>], world: &SharedWorld) -> Result<(), ScpiError> {
        if !matches!(order, Order::Configure(_)) {
            none(data)?;
        }
        match order {
            Order::Configure(probe) => {
                let full_scale = self.configuration(probe, data)?;
                self.configure(probe, full_scale, world);
            }
            Order::Initiate => {
                self.read(world)?;
            }
            Order::PresetStatus => {
                self.status.questionable.enable = 0;
                self.status.operation.enable = 0;
            }
            Order::Abort | Order::FrontPanel => {}
        }
        Ok(())
    }

    fn read(&mut self, world: &SharedWorld) -> Result<f64, ScpiError> {
        let probe = self.function.ok_or(ScpiError::SETTINGS_CONFLICT)?;
        Ok(self.measure(probe, world))
    }

    /// The optional parameters of CONFigure and MEASure: the value expected, and a resolution that is not used.
    fn configuration(&self, probe: Probe, data: &[Datum<'_>]) -> Result<Option<f64>, ScpiError> {
        let bounds = self.bounds(Number::Range(probe));
        let (expected, resolution) = match data {
            [] => return Ok(None),
            [expected] => (expected, None),
            [expected, resolution] => (expected, Some(resolution)),
            _ => return Err(ScpiError::PARAMETER_NOT_ALLOWED),
        };
        if let Some(resolution) = resolution {
            resolution.number(Bounds {
                least: f64::MIN_POSITIVE,
                most: bounds.most,
                default: bounds.most,
            })?;
        }
        if expected.is_default() { Ok(None) } else { expected.number(bounds).map(Some) }
    }
}

fn none(data: &[Datum<'_>]) -> Result<(), ScpiError> {
    if data.is_empty() { Ok(()) } else { Err(ScpiError::PARAMETER_NOT_ALLOWED) }
}
