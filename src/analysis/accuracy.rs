//! What the stated accuracy of an instrument adds to the budget of a voltage or a current.
//!
//! A maker states `|error| <= p * |reading| + a`. It is taken as two influences that are independent of each other and stay
//! as they are for a whole run: a gain that is off by anything within p, and an offset anywhere within a, both as
//! rectangles (JCGM 100:2008, 4.3.7). The last digit is a third (F.2.2.1), new for every reading. Taken as one rectangle of
//! p * |reading| + a the uncertainty would be too wide, and a difference of two readings could not be known better than
//! either.

use super::cause::Cause;
use super::contribution::Contribution;
use super::plateau::Course;
use crate::trace::{Accuracy, Claims};
use crate::units::{Amps, Unit, Volts};

/// An instrument and the causes it adds.
struct Instrument {
    name: &'static str,
    unit: Unit,
    gain: Cause,
    offset: Cause,
}

/// The lines of a voltage at the board's terminals; none where no accuracy is stated.
pub(super) fn of_voltage(course: &Course<'_>, at: Volts) -> Vec<Contribution> {
    if course.has_voltmeter() {
        of_voltmeter(&course.trace.claims, at)
    } else {
        of_set_point(&course.trace.claims, at)
    }
}

/// The lines of a voltage read by the voltmeter at the terminals.
pub(super) fn of_voltmeter(claims: &Claims, at: Volts) -> Vec<Contribution> {
    let instrument = Instrument {
        name: "voltmeter",
        unit: Unit::Volt,
        gain: Cause::VoltmeterGain,
        offset: Cause::VoltmeterOffset,
    };
    claims.sense.map(|claim| instrument.lines(&claim, at.0)).unwrap_or_default()
}

/// The lines of a voltage read by the voltmeter at the load.
pub(super) fn of_load_voltmeter(claims: &Claims, at: Volts) -> Vec<Contribution> {
    let instrument = Instrument {
        name: "voltmeter at the load,",
        unit: Unit::Volt,
        gain: Cause::LoadVoltmeterGain,
        offset: Cause::LoadVoltmeterOffset,
    };
    claims.load.map(|claim| instrument.lines(&claim, at.0)).unwrap_or_default()
}

/// The lines of a voltage known from the supply's set-point alone.
pub(super) fn of_set_point(claims: &Claims, at: Volts) -> Vec<Contribution> {
    let instrument = Instrument {
        name: "set-point of the supply",
        unit: Unit::Volt,
        gain: Cause::SetPointGain,
        offset: Cause::SetPointOffset,
    };
    claims.set.map(|claim| instrument.lines(&claim, at.0)).unwrap_or_default()
}

/// The lines of a current read on `range`; none where no accuracy is stated.
pub(super) fn of_current(claims: &Claims, range: Option<Amps>, reading: Amps) -> Vec<Contribution> {
    let instrument = Instrument {
        name: "ammeter",
        unit: Unit::Ampere,
        gain: Cause::AmmeterGain(range),
        offset: Cause::AmmeterOffset(range),
    };
    let claim = claims.current_accuracy(range, reading);
    claim.map(|claim| instrument.lines(&claim, reading.0)).unwrap_or_default()
}

impl Instrument {
    fn lines(&self, claim: &Accuracy, reading: f64) -> Vec<Contribution> {
        let named = |what: &str| format!("{} {what}", self.name);
        let gain = Contribution::rectangular(&named("gain"), claim.relative)
            .through(reading, Unit::Percent)
            .due_to(self.gain);
        let offset = Contribution::rectangular(&named("offset"), claim.absolute)
            .through(1.0, self.unit)
            .due_to(self.offset);
        let digit =
            Contribution::rectangular(&named("resolution"), claim.resolution / 2.0).through(1.0, self.unit);
        [gain, offset, digit]
            .into_iter()
            .filter(|line| line.input_uncertainty() > 0.0)
            .map(|line| line.estimated(0.0))
            .collect()
    }
}

/// The claim that stands behind the voltages.
pub(super) fn voltage_claim<'c>(course: &'c Course<'_>) -> Option<&'c Accuracy> {
    let claims = &course.trace.claims;
    if course.has_voltmeter() { claims.sense.as_ref() } else { claims.set.as_ref() }
}
