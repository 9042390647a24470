//! Whether supply, load, timing and ramp of a profile fit together. Limits have their own file.

use super::draft::{Draft, ModeWord};
use super::{Load, QuantityName};
use crate::document::{At, Table};
use crate::units::{Amps, Quantity, Volts, prefixed};
use std::time::Duration;

/// Highest voltage this program handles: half of the 60 V d.c. commonly taken as the bound of touch-safe voltage.
const SCOPE_VOLTAGE: Volts = Volts(30.0);

/// Highest current this program handles: what common test clips and jumper leads carry without getting hot.
const SCOPE_CURRENT: Amps = Amps(5.0);

/// How far the current limit must lie above the load's largest current, so that it never limits a good board.
const CURRENT_MARGIN: f64 = 1.1;

/// Largest tolerance of a load that still tells on from off.
const LARGEST_TOLERANCE: f64 = 0.2;

/// Longest delay a run waits for at every step.
const LONGEST_DELAY: Duration = Duration::from_secs(60);

/// Coarsest step, as a share of a window or hysteresis: four steps inside it.
const COARSEST_SHARE: f64 = 0.25;

/// Most steps of one ramp; more would take hours.
const MOST_STEPS: f64 = 10_000.0;

/// What binary fractions may add or take when decimal voltages are subtracted; far below any step.
pub(super) const DUST: Volts = Volts(1e-9);

/// Notes all that does not fit together.
pub(super) fn check(draft: &Draft, root: &Table<'_, '_>) {
    for text in [&draft.board, &draft.revision, &draft.title].into_iter().flatten() {
        if text.value.trim().is_empty() {
            root.problem(text, "empty; wanted a name");
        }
    }
    supply(draft, root);
    load(draft, root);
    timing(draft, root);
    ramp(draft, root);
}

fn supply(draft: &Draft, root: &Table<'_, '_>) {
    let supply = &draft.supply;
    above_zero(&supply.floor, root);
    above_zero(&supply.current_limit, root);
    below(&supply.floor, &supply.start, "the ramp goes down from start to floor", root);
    if let (Some(start), Some(maximum)) = (&supply.start, &supply.maximum)
        && start.value > maximum.value
    {
        root.problem(start, &format!("above {maximum}, which is never exceeded"));
    }
    in_scope(&supply.maximum, SCOPE_VOLTAGE, root);
    in_scope(&supply.current_limit, SCOPE_CURRENT, root);
}

fn load(draft: &Draft, root: &Table<'_, '_>) {
    above_zero(&draft.load.resistance, root);
    above_zero(&draft.load.rating, root);
    above_zero(&draft.load.capacitance, root);
    if let Some(tolerance) = &draft.load.tolerance
        && !(0.0..=LARGEST_TOLERANCE).contains(&tolerance.value)
    {
        root.problem(tolerance, "wanted 0 % to 20 %: on and off are told apart by the load's current");
        return;
    }
    let (Some(resistance), Some(tolerance), Some(rating), Some(maximum)) =
        (&draft.load.resistance, &draft.load.tolerance, &draft.load.rating, &draft.supply.maximum)
    else {
        return;
    };
    let load = Load {
        resistance: resistance.value,
        tolerance: tolerance.value,
        rating: rating.value,
        capacitance: None,
    };
    let most = load.most_current(maximum.value);
    let power = maximum.value * most;
    if power > rating.value {
        root.problem(
            rating,
            &format!("the load takes {power} at {maximum} with {resistance}; wanted that or more"),
        );
    }
    if let Some(limit) = &draft.supply.current_limit
        && limit.value < most * CURRENT_MARGIN
    {
        let wanted = most * CURRENT_MARGIN;
        root.problem(limit, &format!("the load draws up to {most} at {maximum}; wanted {wanted} or more"));
    }
}

fn timing(draft: &Draft, root: &Table<'_, '_>) {
    for delay in [&draft.timing.detect_delay, &draft.timing.release_delay].into_iter().flatten() {
        if delay.value > LONGEST_DELAY {
            root.problem(delay, "longer than 60 s, which would be waited for at every step");
        }
    }
}

fn ramp(draft: &Draft, root: &Table<'_, '_>) {
    let widths = widths(draft);
    for step in [&draft.ramp.step, &draft.ramp.resolution].into_iter().flatten() {
        if step.value <= Volts::ZERO {
            root.problem(step, "not above zero");
            continue;
        }
        for (width, what) in &widths {
            let coarsest = *width * COARSEST_SHARE;
            if *width > Volts::ZERO && step.value > coarsest + DUST {
                root.problem(step, &format!("wanted at most {coarsest}, a quarter of {what}, {width}"));
            }
        }
        if let (Some(start), Some(floor)) = (&draft.supply.start, &draft.supply.floor)
            && (start.value - floor.value) / step.value > MOST_STEPS
        {
            let finest = (start.value - floor.value) * (1.0 / MOST_STEPS);
            root.problem(step, &format!("wanted at least {finest}, 10 000 steps from {start} to {floor}"));
        }
    }
    if let Some(mode) = &draft.ramp.mode
        && mode.value == ModeWord::Search
    {
        if draft.is_latched() {
            let what = "a latched board trips once for every time its supply is gone, so it cannot be searched; wanted \"staircase\"";
            root.problem(mode, what);
            return;
        }
        for name in [QuantityName::Trip, QuantityName::ReEnable] {
            if !draft.limits.get(&name).is_some_and(|limit| limit.min.is_some() && limit.max.is_some()) {
                root.problem(
                    mode,
                    &format!("a search needs \"min\" and \"max\" of limits.{} to look between", name.key()),
                );
            }
        }
    }
}

/// What a step must be small against, with words for it.
fn widths(draft: &Draft) -> Vec<(Volts, &'static str)> {
    let window = |name| {
        Some(draft.volts(name, |limit| &limit.max)?.value - draft.volts(name, |limit| &limit.min)?.value)
    };
    [
        (window(QuantityName::Trip), "the width of limits.trip"),
        (window(QuantityName::ReEnable), "the width of limits.re_enable"),
        (
            draft.volts(QuantityName::Hysteresis, |limit| &limit.min).map(|at| at.value),
            "limits.hysteresis.min",
        ),
    ]
    .into_iter()
    .filter_map(|(width, what)| Some((width?, what)))
    .collect()
}

/// Notes a problem unless `low < high`; `why` says why it matters.
pub(super) fn below<Q: PartialOrd>(
    low: &Option<At<Q>>,
    high: &Option<At<Q>>,
    why: &str,
    root: &Table<'_, '_>,
) {
    if let (Some(low), Some(high)) = (low, high)
        && low.value >= high.value
    {
        root.problem(low, &format!("not below {high}; {why}"));
    }
}

fn above_zero<Q: Quantity>(at: &Option<At<Q>>, root: &Table<'_, '_>) {
    if let Some(at) = at
        && at.value.si() <= 0.0
    {
        root.problem(at, "not above zero");
    }
}

fn in_scope<Q: Quantity>(at: &Option<At<Q>>, scope: Q, root: &Table<'_, '_>) {
    if let Some(at) = at
        && at.value.si() > scope.si()
    {
        let end = prefixed(scope.si(), Q::UNIT);
        root.problem(at, &format!("outside the scope of this program, which ends at {end}"));
    }
}

#[cfg(test)]
mod tests {
    use crate::profile::sample::problems;
    use insta::assert_snapshot as says;

    #[test]
    fn supply_voltages_out_of_order_are_refused() {
        says!(problems(&[("start = \"7.60 V\"", "start = \"8.50 V\"")]),
            @r#"p.toml:15:9: supply.start = "8.50 V": above supply.maximum = "8.40 V", which is never exceeded"#);
        says!(problems(&[("floor = \"5.20 V\"", "floor = \"0 V\"")]),
            @r#"p.toml:16:9: supply.floor = "0 V": not above zero"#);
        says!(problems(&[("start = \"7.60 V\"", "start = \"5.10 V\"")]), @r#"
        p.toml:16:9: supply.floor = "5.20 V": not below supply.start = "5.10 V"; the ramp goes down from start to floor
        p.toml:39:39: limits.trip.max = "6.12 V": not below supply.start = "5.10 V"; the board must be on at the start
        p.toml:40:39: limits.re_enable.max = "6.56 V": not below supply.start = "5.10 V"; the ramp must pass the whole re-enable window
        "#);
    }

    #[test]
    fn voltage_and_current_beyond_the_scope_are_refused() {
        let changes = [("8.40 V\" ", "36 V\" "), ("\"3 W\"", "\"50 W\""), ("\"350 mA\"", "\"6 A\"")];
        says!(problems(&changes), @r#"
        p.toml:17:11: supply.maximum = "36 V": outside the scope of this program, which ends at 30.00 V
        p.toml:18:17: supply.current_limit = "6 A": outside the scope of this program, which ends at 5.000 A
        "#);
    }

    /// 8.40 V across 55 ohm less 1 %: 154.3 mA and 1.296 W, by Ohm's law.
    #[test]
    fn a_load_too_small_in_power_or_too_hungry_for_the_current_limit_is_refused() {
        says!(problems(&[("\"3 W\"", "\"1 W\"")]),
            @r#"p.toml:24:10: load.rating = "1 W": the load takes 1.296 W at supply.maximum = "8.40 V" with load.resistance = "55 ohm"; wanted that or more"#);
        says!(problems(&[("\"350 mA\"", "\"160 mA\"")]),
            @r#"p.toml:18:17: supply.current_limit = "160 mA": the load draws up to 154.3 mA at supply.maximum = "8.40 V"; wanted 169.7 mA or more"#);
        says!(problems(&[("\"1 %\"", "\"30 %\"")]),
            @r#"p.toml:23:13: load.tolerance = "30 %": wanted 0 % to 20 %: on and off are told apart by the load's current"#);
        says!(problems(&[("\"55 ohm\"", "\"-55 ohm\"")]),
            @r#"p.toml:22:14: load.resistance = "-55 ohm": not above zero"#);
    }

    #[test]
    fn a_delay_nobody_would_wait_for_is_refused() {
        says!(problems(&[("\"20 ms\"", "\"2000 s\"")]),
            @r#"p.toml:29:17: timing.release_delay = "2000 s": longer than 60 s, which would be waited for at every step"#);
    }

    #[test]
    fn a_step_is_held_against_every_window_and_the_whole_ramp() {
        says!(problems(&[("\"10 mV\"", "\"100 mV\"")]), @r#"
        p.toml:34:8: ramp.step = "100 mV": wanted at most 60.00 mV, a quarter of the width of limits.trip, 240.0 mV
        p.toml:34:8: ramp.step = "100 mV": wanted at most 80.00 mV, a quarter of the width of limits.re_enable, 320.0 mV
        p.toml:34:8: ramp.step = "100 mV": wanted at most 75.00 mV, a quarter of limits.hysteresis.min, 300.0 mV
        "#);
        says!(problems(&[("\"2 mV\"", "\"0 mV\"")]), @r#"p.toml:35:14: ramp.resolution = "0 mV": not above zero"#);
        says!(problems(&[("\"2 mV\"", "\"10 uV\"")]),
            @r#"p.toml:35:14: ramp.resolution = "10 uV": wanted at least 240.0 µV, 10 000 steps from supply.start = "7.60 V" to supply.floor = "5.20 V""#);
        assert_eq!(problems(&[("\"10 mV\"", "\"60 mV\"")]), "", "a quarter exactly is allowed");
    }

    #[test]
    fn a_search_needs_a_resolution_and_whole_windows() {
        says!(problems(&[("resolution = \"2 mV\"", "")]),
            @r#"p.toml:32:1: [ramp] has no key "resolution"; wanted a voltage such as "6.00 V""#);
        says!(problems(&[("min = \"5.88 V\", ", "")]),
            @r#"p.toml:33:8: ramp.mode = "search": a search needs "min" and "max" of limits.trip to look between"#);
        let staircase = [("resolution = \"2 mV\"", ""), ("mode = \"search\"", "mode = \"staircase\"")];
        assert_eq!(problems(&staircase), "", "a staircase needs no resolution");
        assert_eq!(problems(&[("step = \"10 mV\"", "")]), "", "a search needs no step");
        says!(problems(&[("step = \"10 mV\"", ""), ("mode = \"search\"", "mode = \"staircase\"")]),
            @r#"p.toml:32:1: [ramp] has no key "step"; wanted a voltage such as "6.00 V""#);
    }

    #[test]
    fn names_patterns_and_the_format_are_checked() {
        says!(problems(&[("schema = 1", "schema = 2"), ("\"RN-204\"", "\" \"")]), @r#"
        p.toml:7:10: schema = 2: wanted 1
        p.toml:8:9: board = " ": empty; wanted a name
        "#);
        says!(problems(&[("RN[0-9]{6}", "RN[0-9{6}")]),
            @r#"p.toml:11:17: serial_number = "RN[0-9{6}": not a regular expression: non-empty character class has no closing bracket; wanted one such as "RN[0-9]{6}""#);
        says!(problems(&[("RN[0-9]{6}", "a)|(b")]),
            @r#"p.toml:11:17: serial_number = "a)|(b": not a regular expression: found closing ')' without matching '('; wanted one such as "RN[0-9]{6}""#);
        says!(problems(&[("RN[0-9]{6}", "[0-9]*")]),
            @r#"p.toml:11:17: serial_number = "[0-9]*": matches a serial number without any character; wanted a pattern that asks for some"#);
    }

    #[test]
    fn missing_and_misspelt_keys_are_named() {
        says!(problems(&[("[supply]", "[suply]")]), @r#"
        p.toml:1:1: the file has no key "supply"; wanted a table
        p.toml:14:2: unknown key "suply" in the file; did you mean "supply"?
        "#);
        says!(problems(&[("\"search\"  ", "\"bisect\"  "), ("rating = \"3 W\"", "")]), @r#"
        p.toml:21:1: [load] has no key "rating"; wanted a power such as "3 W"
        p.toml:33:8: ramp.mode = "bisect": wanted "staircase" or "search"
        "#);
    }
}
