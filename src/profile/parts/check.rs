//! What is wrong with a single value of a part, or with two that belong together.

use super::super::draft::Draft;
use crate::document::{At, Table};
use crate::units::{Quantity, Volts};

/// Largest tolerance of a part that still makes a threshold.
const LARGEST_TOLERANCE: f64 = 0.2;

/// Notes a trip voltage of the parts that the ramp cannot reach: the parts and the limits are of different boards.
pub(in crate::profile) fn fits_the_ramp(draft: &Draft, root: &Table<'_, '_>) {
    let (Some(read), Some(floor), Some(start)) = (&draft.parts, &draft.supply.floor, &draft.supply.start)
    else {
        return;
    };
    let nominal = read.parts.nominal_trip();
    let reached = floor.value < nominal && nominal < start.value;
    if floor.value < start.value && nominal.is_finite() && !reached {
        let divided = if read.parts.divider.is_some() { " with its divider" } else { "" };
        let what = format!("gives a trip of {nominal}{divided}, which is not between {floor} and {start}");
        root.problem(&read.trip, &what);
    }
}

pub(super) fn above_zero<Q: Quantity>(at: &Option<At<Q>>, table: &Table<'_, '_>) {
    if let Some(at) = at
        && at.value.si() <= 0.0
    {
        table.problem(at, "not above zero");
    }
}

/// Noise of more than a hundredth of the trip is none that a threshold could be told through.
pub(super) fn noise(noise: &Option<At<Volts>>, trip: &Option<At<Volts>>, table: &Table<'_, '_>) {
    const LARGEST_NOISE: f64 = 0.01;
    not_below(Volts::ZERO, noise, table);
    if let (Some(noise), Some(trip)) = (noise, trip)
        && noise.value > trip.value * LARGEST_NOISE
    {
        table.problem(noise, &format!("more than a hundredth of {trip}"));
    }
}

pub(super) fn not_below<T: PartialOrd + Copy>(least: T, at: &Option<At<T>>, table: &Table<'_, '_>) {
    if let Some(at) = at
        && at.value < least
    {
        table.problem(at, "lower than can be");
    }
}

pub(super) fn tolerance(at: &Option<At<f64>>, table: &Table<'_, '_>) {
    if let Some(at) = at
        && !(0.0..=LARGEST_TOLERANCE).contains(&at.value)
    {
        table.problem(at, "wanted 0 % to 20 %, to either side");
    }
}

/// Notes a problem when both are there and the first is the larger.
pub(super) fn order<T: PartialOrd>(low: &Option<At<T>>, high: &Option<At<T>>, table: &Table<'_, '_>) {
    if let (Some(low), Some(high)) = (low, high)
        && low.value > high.value
    {
        table.problem(low, &format!("above {high}"));
    }
}

#[cfg(test)]
mod tests {
    use crate::profile::sample::problems;
    use insta::assert_snapshot as says;

    #[test]
    fn parts_of_another_board_are_refused() {
        says!(problems(&[("trip = \"3.00 V\"", "trip = \"2.00 V\"")]),
            @r#"p.toml:46:8: detector.trip = "2.00 V": gives a trip of 4.000 V with its divider, which is not between supply.floor = "5.20 V" and supply.start = "7.60 V""#);
        says!(problems(&[("top = \"2.2 Mohm\"", "top = \"220 kohm\"")]),
            @r#"
        p.toml:46:8: detector.trip = "3.00 V": gives a trip of 3.300 V with its divider, which is not between supply.floor = "5.20 V" and supply.start = "7.60 V"
        p.toml:46:8: detector.trip = "3.00 V": [divider] in front of it is 2.420 MΩ across the supply and draws while the board is off, but no [[off_path]] stands for it; wanted one with "divider" in its name and at most that resistance
        "#);
    }

    #[test]
    fn figures_no_part_can_have_are_refused() {
        says!(problems(&[("accuracy = \"1.2 %\"", "accuracy = \"100 %\"")]),
            @r#"p.toml:47:12: detector.accuracy = "100 %": wanted 0 % to 20 %, to either side"#);
        says!(problems(&[("min = \"5.0 %\", typical = \"6.7 %\"", "min = \"7 %\", typical = \"6 %\"")]),
            @r#"p.toml:48:22: detector.hysteresis.min = "7 %": above detector.hysteresis.typical = "6 %""#);
        says!(problems(&[("tempco = \"100 ppm/K\"                #", "noise = \"-1 mV\" #")]),
            @r#"p.toml:49:9: detector.noise = "-1 mV": lower than can be"#);
        says!(problems(&[("tempco = \"100 ppm/K\"                #", "noise = \"50 mV\" #")]),
            @r#"p.toml:49:9: detector.noise = "50 mV": more than a hundredth of detector.trip = "3.00 V""#);
        says!(problems(&[("min = \"5.0 %\", ", "")]),
            @r#"p.toml:48:14: one end is missing; wanted "min" and "max", and "typical" where known"#);
        says!(problems(&[("min = \"5.0 %\"", "min = \"-5.0 %\"")]),
            @r#"p.toml:48:22: detector.hysteresis.min = "-5.0 %": lower than can be"#);
        says!(problems(&[("\"100 ppm/K\"", "\"100 ppm\"")]), @r#"
        p.toml:49:10: detector.tempco: read "100 ppm", which is a share in per cent, wanted a temperature coefficient such as "100 ppm/K"
        p.toml:57:10: divider.tempco: read "100 ppm", which is a share in per cent, wanted a temperature coefficient such as "100 ppm/K"
        "#);
        says!(problems(&[("\"100 ppm/K\"", "\"-100 ppm/K\"")]), @r#"
        p.toml:49:10: detector.tempco = "-100 ppm/K": lower than can be
        p.toml:57:10: divider.tempco = "-100 ppm/K": lower than can be
        "#);
        says!(problems(&[("bottom = \"2.2 Mohm\"", "bottom = \"0 ohm\"")]),
            @r#"p.toml:55:10: divider.bottom = "0 ohm": not above zero"#);
        says!(problems(&[("{ min = \"-20 degC\"", "{ min = \"-300 degC\"")]),
            @r#"p.toml:62:23: environment.temperature.min = "-300 degC": lower than can be"#);
        says!(problems(&[("{ min = \"18 degC\"", "{ min = \"38 degC\"")]),
            @r#"p.toml:63:16: environment.test.min = "38 degC": above environment.test.max = "28 degC""#);
    }

    #[test]
    fn a_divider_or_a_drift_alone_says_what_is_missing() {
        says!(problems(&[("[detector]", "[detectr]")]), @r#"
        p.toml:45:2: unknown key "detectr" in the file; did you mean "detector"?
        p.toml:53:1: [divider] stands alone; wanted a [detector] behind it
        "#);
        says!(problems(&[("[environment]", "[enviroment]")]), @r#"
        p.toml:49:10: detector.tempco = "100 ppm/K": means nothing without temperatures; wanted [environment] with temperature
        p.toml:57:10: divider.tempco = "100 ppm/K": means nothing without temperatures; wanted [environment] with temperature
        p.toml:61:2: unknown key "enviroment" in the file; did you mean "environment"?
        "#);
        says!(problems(&[("tolerance = \"1 %\"                   # of each", "# of each")]),
            @r#"p.toml:53:1: [divider] has no key "tolerance"; wanted a share in per cent such as "1 %""#);
    }
}
