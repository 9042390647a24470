//! Whether the limits of a profile can be met, and whether they are consistent with each other and with the ramp.

use super::QuantityName::{self, Hysteresis, OffCurrent, OnCurrent, ReEnable, Trip};
use super::check::{DUST, below};
use super::draft::{Draft, LimitDraft};
use crate::document::{At, Table};
use crate::units::{Amps, Volts, prefixed};

/// Share of the load's current below which a board is surely off; see the on/off rule of the analysis.
const OFF_SHARE: f64 = 0.01;

/// Notes all that is wrong with the limits.
pub(super) fn check(draft: &Draft, root: &Table<'_, '_>) {
    for limit in draft.limits.values() {
        if let (Some(min), Some(max)) = (&limit.min, &limit.max)
            && min.value > max.value
        {
            root.problem(min, &format!("above {max}"));
        }
    }
    windows_lie_on_the_ramp(draft, root);
    re_enable_lies_above_trip(draft, root);
    hysteresis_can_be_met(draft, root);
    off_current_is_measured_while_off(draft, root);
    on_current_can_flow(draft, root);
    delays_are_waited_for(draft, root);
    what_latches_does_not_come_back(draft, root);
}

fn min(limit: &LimitDraft) -> &Option<At<f64>> {
    &limit.min
}

fn max(limit: &LimitDraft) -> &Option<At<f64>> {
    &limit.max
}

fn windows_lie_on_the_ramp(draft: &Draft, root: &Table<'_, '_>) {
    let (start, floor) = (&draft.supply.start, &draft.supply.floor);
    below(floor, &draft.volts(Trip, min), "the ramp must pass the whole trip window", root);
    below(&draft.volts(Trip, max), start, "the board must be on at the start", root);
    below(&draft.volts(ReEnable, max), start, "the ramp must pass the whole re-enable window", root);
}

fn re_enable_lies_above_trip(draft: &Draft, root: &Table<'_, '_>) {
    let (trip_min, trip_max) = (draft.volts(Trip, min), draft.volts(Trip, max));
    let (back_min, back_max) = (draft.volts(ReEnable, min), draft.volts(ReEnable, max));
    if let (Some(back), Some(trip)) = (&back_max, &trip_min)
        && back.value <= trip.value
    {
        root.problem(
            back,
            &format!("not above {trip}; re-enable comes above trip on every board with hysteresis"),
        );
        return;
    }
    below(&trip_min, &back_min, "re-enable comes above trip", root);
    below(&trip_max, &back_max, "re-enable comes above trip", root);
    let hysteresis_limited = draft.volts(Hysteresis, min).is_some_and(|at| at.value > Volts::ZERO);
    if let (Some(trip), Some(back)) = (&trip_max, &back_min)
        && trip.value >= back.value
        && !hysteresis_limited
    {
        let what =
            format!("the windows overlap with {back}; limit hysteresis with a min above zero, or part them");
        root.problem(trip, &what);
    }
}

fn hysteresis_can_be_met(draft: &Draft, root: &Table<'_, '_>) {
    if let (Some(back), Some(trip), Some(wanted)) =
        (draft.volts(ReEnable, max), draft.volts(Trip, min), draft.volts(Hysteresis, min))
        && wanted.value > back.value - trip.value + DUST
    {
        let most = back.value - trip.value;
        root.problem(&wanted, &format!("no board can have it: {back} less {trip} is {most}"));
    }
    if let (Some(back), Some(trip), Some(wanted)) =
        (draft.volts(ReEnable, min), draft.volts(Trip, max), draft.volts(Hysteresis, max))
        && wanted.value + DUST < back.value - trip.value
    {
        let least = back.value - trip.value;
        root.problem(&wanted, &format!("no board can have it: {back} less {trip} is {least}"));
    }
}

fn off_current_is_measured_while_off(draft: &Draft, root: &Table<'_, '_>) {
    let Some(limit) = draft.limits.get(&OffCurrent) else { return };
    below(&limit.at, &draft.volts(Trip, min), "it is measured below the trip, switch open", root);
    if let (Some(at), Some(floor)) = (&limit.at, &draft.supply.floor)
        && at.value < floor.value
    {
        root.problem(at, &format!("below {floor}, where the ramp ends"));
    }
    let (Some(at), Some(most), Some(resistance)) = (&limit.at, &limit.max, &draft.load.resistance) else {
        return;
    };
    let on = at.value / resistance.value;
    if on > Amps::ZERO && most.value > OFF_SHARE * on.0 {
        let what =
            format!("more than 1 % of the {on} that flow through {resistance} at {at}; that is not off");
        root.problem(most, &what);
    }
}

fn on_current_can_flow(draft: &Draft, root: &Table<'_, '_>) {
    let Some(least) = draft.limits.get(&OnCurrent).and_then(|limit| limit.min.as_ref()) else { return };
    below(&Some(least.with(Amps(least.value))), &draft.supply.current_limit, "it could never flow", root);
}

fn delays_are_waited_for(draft: &Draft, root: &Table<'_, '_>) {
    let pairs = [
        (QuantityName::DetectDelay, &draft.timing.detect_delay),
        (QuantityName::ReleaseDelay, &draft.timing.release_delay),
    ];
    for (name, waited) in pairs {
        if let (Some(limit), Some(waited)) =
            (draft.limits.get(&name).and_then(|limit| limit.max.as_ref()), waited)
            && limit.value > waited.value.as_secs_f64()
        {
            let allowed = prefixed(limit.value, name.unit());
            root.problem(
                waited,
                &format!("shorter than {limit}; wanted {allowed} or more, the slowest that may pass"),
            );
        }
    }
}

fn what_latches_does_not_come_back(draft: &Draft, root: &Table<'_, '_>) {
    let Some(latched) = draft.latched.as_ref().filter(|latched| latched.value) else { return };
    for name in [ReEnable, Hysteresis, QuantityName::ReleaseDelay, QuantityName::ReboundMargin] {
        if draft.limits.contains_key(&name) {
            let key = name.key();
            root.problem(latched, &format!("such a board has no {}; take limits.{key} out", name.title()));
        }
    }
}

#[cfg(test)]
mod tests {
    use crate::profile::sample::problems;
    use insta::assert_snapshot as says;

    const RE_ENABLE: &str = "{ min = \"6.24 V\", max = \"6.56 V\" }";
    const HYSTERESIS: &str = "{ min = \"300 mV\", max = \"500 mV\" }";

    #[test]
    fn crossed_limits_are_refused() {
        says!(problems(&[("\"5.88 V\"", "\"6.20 V\"")]),
            @r#"p.toml:39:23: limits.trip.min = "6.20 V": above limits.trip.max = "6.12 V""#);
    }

    #[test]
    fn a_window_beside_the_ramp_is_refused() {
        says!(problems(&[("\"5.88 V\"", "\"5.00 V\"")]), @r#"
        p.toml:16:9: supply.floor = "5.20 V": not below limits.trip.min = "5.00 V"; the ramp must pass the whole trip window
        p.toml:42:22: limits.off_current.at = "5.80 V": not below limits.trip.min = "5.00 V"; it is measured below the trip, switch open
        p.toml:71:6: off_line.to = "5.80 V": not below limits.trip.min = "5.00 V"; it is measured below the trip, switch open
        "#);
        says!(problems(&[("\"6.12 V\"", "\"7.70 V\"")]), @r#"
        p.toml:39:39: limits.trip.max = "7.70 V": not below supply.start = "7.60 V"; the board must be on at the start
        p.toml:39:39: limits.trip.max = "7.70 V": not below limits.re_enable.max = "6.56 V"; re-enable comes above trip
        "#);
        says!(problems(&[("\"6.56 V\"", "\"7.60 V\"")]),
            @r#"p.toml:40:39: limits.re_enable.max = "7.60 V": not below supply.start = "7.60 V"; the ramp must pass the whole re-enable window"#);
    }

    #[test]
    fn re_enable_at_or_below_trip_is_refused() {
        says!(problems(&[(RE_ENABLE, "{ min = \"5.70 V\", max = \"5.88 V\" }"), (HYSTERESIS, "{ max = \"1 V\" }")]),
            @r#"p.toml:40:39: limits.re_enable.max = "5.88 V": not above limits.trip.min = "5.88 V"; re-enable comes above trip on every board with hysteresis"#);
        says!(problems(&[(RE_ENABLE, "{ min = \"5.80 V\", max = \"6.10 V\" }"), (HYSTERESIS, "{ min = \"100 mV\" }")]), @r#"
        p.toml:39:23: limits.trip.min = "5.88 V": not below limits.re_enable.min = "5.80 V"; re-enable comes above trip
        p.toml:39:39: limits.trip.max = "6.12 V": not below limits.re_enable.max = "6.10 V"; re-enable comes above trip
        "#);
    }

    #[test]
    fn windows_may_overlap_only_where_the_hysteresis_is_limited() {
        assert_eq!(problems(&[("\"6.24 V\"", "\"6.10 V\"")]), "");
        says!(problems(&[("\"6.24 V\"", "\"6.10 V\""), ("min = \"300 mV\", ", "")]),
            @r#"p.toml:39:39: limits.trip.max = "6.12 V": the windows overlap with limits.re_enable.min = "6.10 V"; limit hysteresis with a min above zero, or part them"#);
    }

    /// 6.56 V - 5.88 V = 680 mV is the most, 6.24 V - 6.12 V = 120 mV the least a board inside both windows can have.
    #[test]
    fn a_hysteresis_no_board_can_have_is_refused() {
        says!(problems(&[(HYSTERESIS, "{ min = \"700 mV\" }")]),
            @r#"p.toml:41:23: limits.hysteresis.min = "700 mV": no board can have it: limits.re_enable.max = "6.56 V" less limits.trip.min = "5.88 V" is 680.0 mV"#);
        says!(problems(&[(HYSTERESIS, "{ max = \"100 mV\" }")]),
            @r#"p.toml:41:23: limits.hysteresis.max = "100 mV": no board can have it: limits.re_enable.min = "6.24 V" less limits.trip.max = "6.12 V" is 120.0 mV"#);
        assert_eq!(problems(&[(HYSTERESIS, "{ min = \"680 mV\" }")]), "");
        assert_eq!(problems(&[(HYSTERESIS, "{ max = \"120 mV\" }")]), "");
    }

    #[test]
    fn an_off_current_is_measured_while_off_and_can_be_told_from_on() {
        says!(problems(&[("at = \"5.80 V\"", "at = \"5.90 V\"")]),
            @r#"p.toml:42:22: limits.off_current.at = "5.90 V": not below limits.trip.min = "5.88 V"; it is measured below the trip, switch open"#);
        says!(problems(&[("at = \"5.80 V\"", "at = \"5.10 V\"")]),
            @r#"p.toml:42:22: limits.off_current.at = "5.10 V": below supply.floor = "5.20 V", where the ramp ends"#);
        says!(problems(&[("at = \"5.80 V\", ", "")]),
            @r#"p.toml:42:15: [limits.off_current] has no key "at"; wanted a voltage such as "6.00 V""#);
        says!(problems(&[("\"4.0 uA\"", "\"4.0 mA\"")]),
            @r#"p.toml:42:54: limits.off_current.max = "4.0 mA": more than 1 % of the 105.5 mA that flow through load.resistance = "55 ohm" at limits.off_current.at = "5.80 V"; that is not off"#);
    }

    #[test]
    fn an_on_current_above_the_current_limit_is_refused() {
        says!(problems(&[("[limits]", "[limits]\non_current = { min = \"400 mA\" }")]),
            @r#"p.toml:39:22: limits.on_current.min = "400 mA": not below supply.current_limit = "350 mA"; it could never flow"#);
    }

    #[test]
    fn a_delay_that_may_pass_must_be_waited_for() {
        says!(problems(&[("[limits]", "[limits]\ndetect_delay = { max = \"6 ms\" }")]),
            @r#"p.toml:28:16: timing.detect_delay = "5 ms": shorter than limits.detect_delay.max = "6 ms"; wanted 6.000 ms or more, the slowest that may pass"#);
    }

    #[test]
    fn a_latched_board_has_no_way_back_to_limit_and_is_not_searched() {
        let board = ("board = \"RN-204\"", "latched = true\nboard = \"RN-204\"");
        says!(problems(&[board]), @r#"
        p.toml:8:11: latched = true: such a board has no re-enable voltage; take limits.re_enable out
        p.toml:8:11: latched = true: such a board has no hysteresis; take limits.hysteresis out
        p.toml:34:8: ramp.mode = "search": a latched board trips once for every time its supply is gone, so it cannot be searched; wanted "staircase"
        "#);
        let staircase = ("mode = \"search\"", "mode = \"staircase\"");
        let gone = [board, staircase, ("re_enable   = ", "# "), ("hysteresis  = ", "# ")];
        assert_eq!(problems(&gone), "");
    }

    #[test]
    fn wrong_names_keys_and_units_of_limits_are_refused() {
        says!(problems(&[("hysteresis ", "hysteresys ")]),
            @r#"p.toml:41:1: unknown key "hysteresys" in [limits]; did you mean "hysteresis"?"#);
        says!(problems(&[("[limits]", "[limits]\non_current = { }")]),
            @r#"p.toml:39:14: limits.on_current limits nothing; wanted "min", "max" or both"#);
        says!(problems(&[("\"4.0 uA\"", "\"4.0 V\"")]),
            @r#"p.toml:42:54: limits.off_current.max: read "4.0 V", which is a voltage, wanted a current such as "350 mA""#);
        says!(problems(&[("min = \"300 mV\"", "at = \"1 V\", min = \"300 mV\"")]),
            @r#"p.toml:41:17: unknown key "at" in [limits.hysteresis]; known keys: max, min"#);
    }

    #[test]
    fn every_quantity_can_be_limited_in_its_own_unit() {
        let limits = "[limits]\non_current = { max = \"300 mA\" }\noff_conductance = { max = \"1 uS\" }\n\
            off_constant_current = { max = \"2 uA\" }\ndetect_delay = { max = \"5 ms\" }\n\
            release_delay = { max = \"20 ms\" }\ndeep_current = { max = \"10 uA\" }\nrebound_margin = { min = \"0 V\" }\n\
            on_resistance = { max = \"100 mohm\" }\nstorage_time = { min = \"31.5 Ms\" }\n";
        assert_eq!(problems(&[("[limits]", limits)]), "");
    }
}
