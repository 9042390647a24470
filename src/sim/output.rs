//! The supply's output in motion: where it is going, and how fast the capacitor across it lets it go there.

use super::SupplyModel;
use super::circuit::{Line, Piece};
use super::course::Course;

/// Closer to its goal than this the output stands still, V.
pub(super) const STILL: f64 = 1e-9;

/// How far an overshoot aims beyond its peak, as a multiple of the overshoot: it decides how fast the peak comes.
const OVERSHOOT_AIM: f64 = 1.5;

/// The output of a supply.
#[derive(Clone, Debug)]
pub(super) struct Output {
    time_constant: f64,
    slew: f64,
    overshoot: f64,
    sinks: bool,
    capacitance: f64,
    bleed: f64,
    off_conductance: f64,
    /// Voltage the output regulates to, before a current limit, V.
    pub(super) volts: f64,
    goal: f64,
    peak: Option<f64>,
    /// Whether the output is switched on.
    pub(super) on: bool,
}

impl Output {
    /// An output that is off and empty.
    pub(super) fn new(supply: &SupplyModel, input_capacitance: f64) -> Self {
        Self {
            time_constant: supply.time_constant.as_secs_f64().max(1e-9),
            slew: supply.slew,
            overshoot: supply.overshoot,
            sinks: supply.sinks,
            capacitance: (supply.output_capacitance.0 + input_capacitance).max(1e-9),
            bleed: supply.bleed.0,
            off_conductance: 1.0 / supply.off_resistance.0,
            volts: 0.0,
            goal: 0.0,
            peak: None,
            on: false,
        }
    }

    /// Sends it to another voltage.
    pub(super) fn head_for(&mut self, goal: f64) {
        self.goal = goal;
        let rise = goal - self.volts;
        self.peak = (self.on && self.overshoot > 0.0 && rise > STILL).then_some(goal + self.overshoot * rise);
    }

    /// Switches it.
    pub(super) fn switch(&mut self, on: bool) {
        self.on = on;
        self.head_for(self.goal);
    }

    /// Puts it where it is going, at once.
    pub(super) fn arrive(&mut self) {
        self.volts = self.goal;
        self.peak = None;
    }

    /// Notes what has been reached.
    pub(super) fn look(&mut self) {
        if self.peak.is_some_and(|peak| self.volts >= peak) {
            self.peak = None;
        }
        if self.on && self.peak.is_none() && (self.volts - self.goal).abs() <= STILL {
            self.volts = self.goal;
        }
        if self.volts < STILL && (!self.on || self.goal <= 0.0) {
            self.volts = 0.0;
        }
    }

    /// How it moves from here while the circuit answers with `piece`, and the voltage where that ends, if any.
    pub(super) fn course(&self, piece: &Piece) -> (Course, Option<f64>) {
        if !self.on {
            return self.discharge(piece.current, self.off_conductance, 0.0);
        }
        let (aim, end) = match self.peak {
            Some(peak) => (self.goal + (peak - self.goal) * OVERSHOOT_AIM, Some(peak)),
            None => (self.goal, None),
        };
        let way = aim - self.volts;
        if !self.sinks && piece.current.at(self.volts) + self.bleed < 0.0 {
            // Fed from elsewhere, such a supply is lifted.
            return self.discharge(piece.current, 0.0, f64::NEG_INFINITY);
        }
        if way.abs() <= STILL {
            return (Course::Still, None);
        }
        let regulated_rate = way.abs() / self.time_constant;
        if way < 0.0 && !self.sinks {
            let drain = piece.current.at(self.volts) + self.bleed;
            let regained = self.regulation_regained(piece.current, aim).max(aim);
            if drain / self.capacitance < regulated_rate.min(self.slew) && self.volts > regained {
                return self.discharge(piece.current, 0.0, regained);
            }
        }
        if regulated_rate > self.slew * (1.0 + 1e-9) {
            let braking = aim - way.signum() * self.slew * self.time_constant;
            let nearest = match end {
                Some(end) if way > 0.0 => braking.min(end),
                _ => braking,
            };
            return (Course::Line { rate: self.slew * way.signum() }, Some(nearest));
        }
        (Course::Towards { level: aim, time_constant: self.time_constant }, end)
    }

    /// The capacitor empties through the board, the bleed and `conductance`, down to `end`.
    fn discharge(&self, current: Line, conductance: f64, end: f64) -> (Course, Option<f64>) {
        let slope = current.slope + conductance;
        let drain = current.at(self.volts) + conductance * self.volts + self.bleed;
        if drain == 0.0 || drain > 0.0 && self.volts <= end {
            return (Course::Still, None);
        }
        // Another source at the board may charge it instead.
        let end = (drain > 0.0).then_some(end);
        if slope.abs() < 1e-10 {
            return (Course::Line { rate: -drain / self.capacitance }, end);
        }
        let level = self.volts - drain / slope;
        (Course::Towards { level, time_constant: self.capacitance / slope }, end)
    }

    /// The voltage at which a falling output is slow enough for the capacitor to follow again.
    fn regulation_regained(&self, current: Line, aim: f64) -> f64 {
        let slope = 1.0 / self.time_constant - current.slope / self.capacitance;
        let offset = aim / self.time_constant + (current.offset + self.bleed) / self.capacitance;
        if slope > 0.0 { offset / slope } else { aim }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::units::{Amps, Farads, Ohms};
    use std::time::Duration;

    #[test]
    fn a_falling_output_is_as_slow_as_the_slower_of_regulation_and_discharge() {
        let supply = SupplyModel {
            sinks: false,
            bleed: Amps(1e-3),
            output_capacitance: Farads(470e-6),
            time_constant: Duration::from_millis(3),
            off_resistance: Ohms(100.0),
            ..super::super::class::supply(1)
        };
        let siemens = 1e-3;
        let piece = Piece {
            upto: f64::INFINITY,
            terminals: Line { slope: 1.0, offset: 0.0 },
            current: Line { slope: siemens, offset: 0.0 },
            load: Line::default(),
            limited: false,
        };
        let mut output = Output::new(&supply, 0.0);
        (output.on, output.volts) = (true, 5.0);
        output.head_for(4.9);
        let (mut volts, mut left) = (5.0_f64, 15e-3_f64);
        while left > 0.0 {
            let (course, end) = output.course(&piece);
            let to_end = end.map_or(f64::INFINITY, |end| course.time_between(output.volts, end));
            let time = left.min(to_end + 1e-9);
            output.volts = course.after(output.volts, time);
            left -= time;
        }
        // The same in steps of 1 µs.
        for _ in 0..15_000 {
            volts -= 1e-6 * f64::min((volts - 4.9) / 3e-3, (volts * siemens + 1e-3) / 470e-6);
        }
        assert!((output.volts - volts).abs() < 5e-6, "{} V, {volts} V in small steps", output.volts);
        assert!(volts - 4.9 > 1e-3, "still on its way");
    }
}
