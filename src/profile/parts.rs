//! The parts that make a board's thresholds: detector, divider, and the temperatures they live at.
//!
//! ```toml
//! [detector]                          # figures of its data sheet, at its own pin
//! trip = "3.00 V"
//! accuracy = "1 %"                    # either side, rectangular
//! hysteresis = { min = "5.0 %", typical = "6.7 %", max = "8.3 %" }    # of its trip; triangular
//! tempco = "100 ppm/K"                # either sign; needs [environment]
//! ageing = "0.1 %"                    # over the board's life, either sign
//! minimum_voltage = "0.95 V"          # below it the output is undefined
//! noise = "0.1 mV"                    # at the board's terminals, rms; what is usual when left out
//!
//! [divider]                           # in front of the detector; left out where there is none
//! top = "100 kohm"
//! bottom = "100 kohm"
//! tolerance = "1 %"                   # of each resistor, as tempco and ageing
//! tempco = "50 ppm/K"
//! ageing = "0.1 %"
//! sense_current = { min = "0.3 uA", max = "1.0 uA" }    # into the detector's pin, through the top resistor
//! switching_current = "0.2 uA"        # most that flows there besides at the moment of release; widens hysteresis
//!
//! [environment]
//! temperature = { min = "-25 degC", max = "75 degC" }
//! test = { min = "18 degC", max = "28 degC" }           # where boards are tested; 23 degC +- 5 K when left out
//! reference = "25 degC"                                 # of the data sheets; 25 degC when left out
//! ```

mod check;
mod read;

pub(super) use check::fits_the_ramp;
pub(super) use read::{PartsDraft, read};

use crate::units::{Amps, Celsius, Ohms, PerKelvin, Volts};

/// What sets the thresholds of a board.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Parts {
    /// The voltage detector.
    pub detector: Detector,
    /// The resistors in front of it, where there are any.
    pub divider: Option<Divider>,
    /// The temperatures they live at.
    pub environment: Environment,
}

impl Parts {
    /// Trip voltage of a board on which every part is as it is called.
    pub fn nominal_trip(&self) -> Volts {
        self.divider.map_or(self.detector.trip, |divider| {
            let drop = divider.sense_current.map_or(Volts::ZERO, |current| current.centre() * divider.top);
            self.detector.trip * divider.ratio() + drop
        })
    }
}

/// A voltage detector with hysteresis, as its data sheet has it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Detector {
    /// Nominal trip voltage at its own pin.
    pub trip: Volts,
    /// Largest deviation of the trip voltage, as a fraction of one.
    pub accuracy: f64,
    /// Release less trip, as a share of the trip.
    pub hysteresis: Spread<f64>,
    /// Largest temperature coefficient of its trip voltage, either sign.
    pub tempco: PerKelvin,
    /// Largest change over the board's life, as a fraction of one.
    pub ageing: f64,
    /// Lowest supply of the detector at which its output is defined.
    pub minimum_voltage: Option<Volts>,
    /// Noise at the board's terminals, rms, in the bandwidth that the detector follows.
    pub noise: Option<Volts>,
}

/// Two resistors that divide the battery's voltage for the detector.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Divider {
    /// From the battery to the detector's pin.
    pub top: Ohms,
    /// From the detector's pin to ground.
    pub bottom: Ohms,
    /// Largest deviation of each, as a fraction of one.
    pub tolerance: f64,
    /// Largest temperature coefficient of each, either sign, the two independent.
    pub tempco: PerKelvin,
    /// Largest change of each over the board's life, as a fraction of one.
    pub ageing: f64,
    /// Current into the detector's pin.
    pub sense_current: Option<Spread<Amps>>,
    /// Most current that flows into the pin besides at the moment of release.
    pub switching_current: Option<Amps>,
}

impl Divider {
    /// Battery voltage over the detector's, with nominal resistors and no current into the pin.
    pub fn ratio(&self) -> f64 {
        1.0 + self.top / self.bottom
    }

    /// Resistance across the battery, with nominal resistors.
    pub fn across(&self) -> Ohms {
        self.top + self.bottom
    }
}

/// Ends of what a data sheet allows, with the typical value where it gives one.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Spread<T> {
    /// Smallest.
    pub min: T,
    /// Typical; its spread is then taken as triangular, else as rectangular.
    pub typical: Option<T>,
    /// Largest.
    pub max: T,
}

impl<T> Spread<T> {
    /// The same ends in another form.
    pub fn map<U>(self, form: impl Fn(T) -> U) -> Spread<U> {
        Spread { min: form(self.min), typical: self.typical.map(&form), max: form(self.max) }
    }
}

impl<T> Spread<T>
where
    T: Copy + std::ops::Add<Output = T> + std::ops::Div<f64, Output = T>,
{
    /// The typical value, or the middle where none is given.
    pub fn centre(&self) -> T {
        self.typical.unwrap_or((self.min + self.max) / 2.0)
    }
}

/// A range of temperatures, ends included.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Temperatures {
    /// Coldest.
    pub min: Celsius,
    /// Hottest.
    pub max: Celsius,
}

impl Temperatures {
    /// Kelvins from `reference` to the farther end.
    pub fn farthest_from(&self, reference: Celsius) -> f64 {
        (self.max - reference).abs().0.max((self.min - reference).abs().0)
    }
}

/// Where boards live and where they are tested.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Environment {
    /// Where they work.
    pub temperature: Temperatures,
    /// Where they are tested.
    pub test: Temperatures,
    /// For which the data sheets state their figures.
    pub reference: Celsius,
}

impl Default for Environment {
    /// The room of a laboratory, 23 degC +- 5 K, and data sheets at 25 degC; both are common practice.
    fn default() -> Self {
        let room = Temperatures { min: Celsius(18.0), max: Celsius(28.0) };
        Self { temperature: room, test: room, reference: Celsius(25.0) }
    }
}

impl Environment {
    /// Most kelvins between the test of a board and its work.
    pub fn from_test_to_work(&self) -> f64 {
        self.temperature.farthest_from(self.test.min).max(self.temperature.farthest_from(self.test.max))
    }
}
