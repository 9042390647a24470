//! What a run measures beyond thresholds and off current: the optional table `[measure]`, and what limits ask for.
//!
//! A limit on a delay or on the deep current switches its measurement on by itself; the table is for those who want the
//! figure without a limit, and for what has no figure to limit.

use super::QuantityName::{self, DeepCurrent, DetectDelay, ReEnable, ReleaseDelay, Trip};
use super::draft::{Draft, LimitDraft};
use crate::document::{At, Table};
use crate::units::Volts;
use std::collections::BTreeMap;

/// What a run measures beyond thresholds and off current.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Measure {
    /// The time from crossing the trip to the open switch, by steps across it.
    pub detect_delay: bool,
    /// The time from crossing the re-enable voltage to the closed switch, by steps across it.
    pub release_delay: bool,
    /// Rates of the ramps from which the delays are read as well; `None` for steps alone.
    pub ramp_rates: Option<u32>,
    /// How far the deep sweep goes below the ramp's floor; `None` for no deep sweep.
    pub deep_floor: Option<Volts>,
    /// Switching on at a voltage between trip and re-enable.
    pub in_band: Option<InBand>,
}

/// Switching on at a voltage between trip and re-enable, where history decides the state.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct InBand {
    /// The voltage.
    pub at: Volts,
    /// How often.
    pub times: u32,
    /// The state the design wants; `None` when either is right.
    pub wanted: Option<WantedInBand>,
}

/// The state a design wants of a board that is switched on inside the band.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum WantedInBand {
    /// The switch closes.
    On,
    /// The switch stays open.
    Off,
}

/// A deep sweep ends here where the profile does not say: below the knee of any semiconductor, as in the pre-check.
const DEEP_FLOOR: Volts = Volts(0.3);
/// Lower than this a supply's own error counts.
const LOWEST_DEEP_FLOOR: Volts = Volts(0.1);
/// Rates a line may be drawn through and tested, and more than keep a board on the bench for long.
const RATES: std::ops::RangeInclusive<i64> = 3..=6;
/// How often a board is switched on inside the band where the profile does not say.
const TIMES: u32 = 3;
/// More would keep a board on the bench for minutes.
const MOST_TIMES: i64 = 100;

/// The table as written.
#[derive(Default)]
pub(super) struct MeasureDraft {
    delays: Option<At<bool>>,
    ramp_rates: Option<At<i64>>,
    deep_floor: Option<At<Volts>>,
    in_band: Option<At<Volts>>,
    in_band_times: Option<At<i64>>,
    wanted_in_band: Option<At<WantedInBand>>,
}

impl MeasureDraft {
    pub(super) fn read(mut table: Table<'_, '_>) -> Self {
        Self {
            delays: table.optional_boolean("delays"),
            ramp_rates: table.optional_integer("ramp_rates"),
            deep_floor: table.optional_quantity("deep_floor"),
            in_band: table.optional_quantity("in_band"),
            in_band_times: table.optional_integer("in_band_times"),
            wanted_in_band: table
                .optional_choice("wanted_in_band", &[("on", WantedInBand::On), ("off", WantedInBand::Off)]),
        }
    }

    /// What the table and the limits together ask for.
    pub(super) fn finish(&self, limits: &BTreeMap<QuantityName, LimitDraft>) -> Measure {
        let limited = |name| limits.contains_key(&name);
        let delays = self.delays.as_ref().is_some_and(|delays| delays.value);
        let deep_floor = self.deep_floor.as_ref().map(|floor| floor.value);
        let limited_delays = [DetectDelay, ReleaseDelay].map(limited);
        // Ramps alone ask for both.
        let delays = delays || self.ramp_rates.is_some() && limited_delays == [false; 2];
        Measure {
            detect_delay: delays || limited_delays[0],
            release_delay: delays || limited_delays[1],
            ramp_rates: self.ramp_rates.as_ref().map(|rates| rates.value as u32),
            deep_floor: deep_floor.or(limited(DeepCurrent).then_some(DEEP_FLOOR)),
            in_band: self.in_band.as_ref().map(|at| InBand {
                at: at.value,
                times: self.in_band_times.as_ref().map_or(TIMES, |times| times.value as u32),
                wanted: self.wanted_in_band.as_ref().map(|wanted| wanted.value),
            }),
        }
    }
}

/// Notes all of the table that does not fit the rest of the profile.
pub(super) fn check(draft: &Draft, root: &Table<'_, '_>) {
    let measure = &draft.measure;
    if let Some(deep) = &measure.deep_floor {
        if deep.value < LOWEST_DEEP_FLOOR {
            root.problem(deep, "below 100 mV, where a supply's own error counts; wanted that or more");
        }
        if let Some(floor) = &draft.supply.floor
            && deep.value >= floor.value
        {
            root.problem(deep, &format!("not below {floor}, where the ramp has ended already"));
        }
    }
    if let Some(rates) = &measure.ramp_rates
        && !RATES.contains(&rates.value)
    {
        root.problem(rates, "wanted 3 to 6");
    }
    in_band(draft, root);
}

fn in_band(draft: &Draft, root: &Table<'_, '_>) {
    let measure = &draft.measure;
    let Some(at) = &measure.in_band else {
        let what = "says nothing without measure.in_band; wanted that as well";
        if let Some(times) = &measure.in_band_times {
            root.problem(times, what);
        }
        if let Some(wanted) = &measure.wanted_in_band {
            root.problem(wanted, what);
        }
        return;
    };
    if let Some(times) = &measure.in_band_times
        && !(1..=MOST_TIMES).contains(&times.value)
    {
        root.problem(times, "wanted 1 to 100");
    }
    let trip =
        draft.volts(Trip, |limit| &limit.max).or(draft.supply.floor.as_ref().map(|at| at.with(at.value)));
    let back =
        draft.volts(ReEnable, |limit| &limit.min).or(draft.supply.start.as_ref().map(|at| at.with(at.value)));
    if let Some(trip) = trip
        && at.value <= trip.value
    {
        root.problem(at, &format!("not above {trip}, so not inside the band of every board"));
    }
    if let Some(back) = back
        && at.value >= back.value
    {
        root.problem(at, &format!("not below {back}, so not inside the band of every board"));
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::profile::Profile;
    use crate::profile::sample::{RIVER_NODE, problems};
    use insta::assert_snapshot as says;

    fn measure(more: &str) -> Measure {
        let text = RIVER_NODE.replace("[limits]", more);
        Profile::read("p.toml", &text).unwrap_or_else(|problems| panic!("{problems}")).measure
    }

    #[test]
    fn nothing_is_measured_unasked() {
        assert_eq!(measure("[limits]"), Measure::default());
    }

    #[test]
    fn a_limit_switches_its_measurement_on() {
        let asked = measure("[limits]\ndetect_delay = { max = \"5 ms\" }\ndeep_current = { max = \"1 mA\" }");
        let wanted = Measure { detect_delay: true, deep_floor: Some(Volts(0.3)), ..Measure::default() };
        assert_eq!(asked, wanted);
    }

    #[test]
    fn the_table_asks_without_a_limit() {
        let asked = measure(
            "[measure]\ndelays = true\ndeep_floor = \"0.5 V\"\nin_band = \"6.18 V\"\nwanted_in_band = \"off\"\n[limits]",
        );
        let in_band = InBand { at: Volts(6.18), times: 3, wanted: Some(WantedInBand::Off) };
        let wanted = Measure {
            detect_delay: true,
            release_delay: true,
            ramp_rates: None,
            deep_floor: Some(Volts(0.5)),
            in_band: Some(in_band),
        };
        assert_eq!(asked, wanted);
    }

    #[test]
    fn ramps_are_of_the_delays_asked_for_or_of_both() {
        let both = measure("[measure]\nramp_rates = 4\n[limits]");
        assert_eq!((both.detect_delay, both.release_delay, both.ramp_rates), (true, true, Some(4)));
        let one = measure("[measure]\nramp_rates = 3\n[limits]\ndetect_delay = { max = \"5 ms\" }");
        assert_eq!((one.detect_delay, one.release_delay, one.ramp_rates), (true, false, Some(3)));
    }

    #[test]
    fn what_cannot_be_measured_is_refused() {
        let told = |table: &str| problems(&[("[limits]", &format!("[measure]\n{table}\n[limits]"))]);
        says!(told("deep_floor = \"5.3 V\"\nin_band = \"6.30 V\""), @r#"
        p.toml:39:14: measure.deep_floor = "5.3 V": not below supply.floor = "5.20 V", where the ramp has ended already
        p.toml:40:11: measure.in_band = "6.30 V": not below limits.re_enable.min = "6.24 V", so not inside the band of every board
        "#);
        says!(told("deep_floor = \"50 mV\"\nin_band = \"6.10 V\""), @r#"
        p.toml:39:14: measure.deep_floor = "50 mV": below 100 mV, where a supply's own error counts; wanted that or more
        p.toml:40:11: measure.in_band = "6.10 V": not above limits.trip.max = "6.12 V", so not inside the band of every board
        "#);
        says!(told("delays = \"yes\"\nwanted_in_band = \"off\""), @r#"
        p.toml:39:10: measure.delays: read a string, wanted true or false, without quotes
        p.toml:40:18: measure.wanted_in_band = "off": says nothing without measure.in_band; wanted that as well
        "#);
        says!(told("in_band = \"6.2 V\"\nin_band_times = 0"), @"p.toml:40:17: measure.in_band_times = 0: wanted 1 to 100");
        says!(told("ramp_rates = 2"), @"p.toml:39:14: measure.ramp_rates = 2: wanted 3 to 6");
    }
}
