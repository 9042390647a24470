//! What an engineer should know before using the limits: pairs that let through a board without hysteresis, present
//! limits that promise more or less than the parts, parts used where they are not specified.

use super::proposal::{Quantity, window_of};
use super::window::volts;
use crate::profile::{Parts, Profile, QuantityName};
use serde::Serialize;

/// Share of good boards outside the present limits from which it is said.
const WORTH_SAYING: f64 = 0.001;

/// Largest resistance in front of a detector that switches current in its supply pin, as data sheets of that class
/// commonly advise against oscillation (typical figure).
const LARGEST_TOP: f64 = 100e3;

/// Something to think about.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Warning {
    /// Which kind.
    pub code: WarningCode,
    /// In words, with the figures.
    pub text: String,
}

/// The kinds of warnings.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum WarningCode {
    /// Nothing is left between the test limits.
    NoTestWindow,
    /// Trip and re-enable windows overlap.
    Overlap,
    /// The lower limit of the hysteresis is no more than what the bench does not know.
    NoHysteresis,
    /// A present limit is wider than the test limit worked out.
    WiderThanTest,
    /// Good boards lie outside the present limits.
    GoodBoardsFail,
    /// The detector works below its minimum voltage.
    BelowMinimum,
    /// The divider may make the detector oscillate.
    MayOscillate,
}

pub(super) fn warnings(profile: &Profile, parts: &Parts, quantities: &[Quantity]) -> Vec<Warning> {
    let mut warnings: Vec<Warning> = quantities.iter().filter_map(no_test_window).collect();
    warnings.extend(overlap(quantities));
    warnings.extend(no_hysteresis(quantities));
    warnings.extend(quantities.iter().filter_map(wider_than_test));
    warnings.extend(quantities.iter().filter_map(good_boards_fail));
    warnings.extend(below_minimum(profile, parts));
    warnings.extend(may_oscillate(parts));
    warnings
}

fn no_test_window(quantity: &Quantity) -> Option<Warning> {
    let sets = &quantity.sets;
    if sets.test.is_some() {
        return None;
    }
    let text = format!(
        "{}: {} down and {} up between test and work, and a guard band of {} at either end, leave nothing of the \
         design limits, {}. Take better parts, test nearer the working temperature, or measure better.",
        quantity.name.title(),
        volts(sets.share_down),
        volts(sets.share_up),
        volts(sets.guard_band),
        sets.design,
    );
    Some(Warning { code: WarningCode::NoTestWindow, text })
}

fn find(quantities: &[Quantity], name: QuantityName) -> Option<&Quantity> {
    quantities.iter().find(|quantity| quantity.name == name)
}

fn overlap(quantities: &[Quantity]) -> Option<Warning> {
    let trip = find(quantities, QuantityName::Trip)?.sets.written()?;
    let back = find(quantities, QuantityName::ReEnable)?.sets.written()?;
    if trip.max < back.min {
        return None;
    }
    let remedy = match find(quantities, QuantityName::Hysteresis)?.sets.written() {
        Some(hysteresis) if hysteresis.min > 0.0 => format!(
            "What keeps it out is the limit on the hysteresis of the same board, at least {}: never test without it.",
            volts(hysteresis.min)
        ),
        _ => "No limit on the hysteresis keeps it out.".to_owned(),
    };
    let text = format!(
        "trip up to {} and re-enable from {} overlap by {}: a board whose two thresholds are the same passes both \
         limits. {remedy}",
        volts(trip.max),
        volts(back.min),
        volts(trip.max - back.min),
    );
    Some(Warning { code: WarningCode::Overlap, text })
}

fn no_hysteresis(quantities: &[Quantity]) -> Option<Warning> {
    let hysteresis = find(quantities, QuantityName::Hysteresis)?;
    let least = hysteresis.sets.written()?.min;
    if least > hysteresis.expanded_uncertainty {
        return None;
    }
    let text = format!(
        "the hysteresis may be as small as {}, no more than its uncertainty of {}: a board without any can pass.",
        volts(least),
        volts(hysteresis.expanded_uncertainty)
    );
    Some(Warning { code: WarningCode::NoHysteresis, text })
}

fn wider_than_test(quantity: &Quantity) -> Option<Warning> {
    let (present, test) = (window_of(quantity.present?), quantity.sets.written()?);
    let design = quantity.sets.design;
    let (below, above) = (test.min - present.min, present.max - test.max);
    let (end, limit, by, design_end) = if below >= above {
        ("lower", present.min, below, design.min)
    } else {
        ("upper", present.max, above, design.max)
    };
    if by <= 0.0 {
        return None;
    }
    let title = quantity.name.title();
    let text = if !limit.is_finite() {
        format!("{title}: the profile has no {end} limit.")
    } else if design.contains(limit) {
        format!(
            "{title}: the profile's {end} limit, {}, leaves {} to the design limit; temperature, age and guard band \
             want {}.",
            volts(limit),
            volts((limit - design_end).abs()),
            volts((limit - design_end).abs() + by),
        )
    } else {
        format!(
            "{title}: the profile's {end} limit, {}, lies outside the design limits, {}: it passes boards that good \
             parts cannot make.",
            volts(limit),
            design,
        )
    };
    Some(Warning { code: WarningCode::WiderThanTest, text })
}

fn good_boards_fail(quantity: &Quantity) -> Option<Warning> {
    let outside = quantity.outside_present.filter(|share| *share >= WORTH_SAYING)?;
    let text = format!(
        "{}: {:.1} % of the boards drawn from good parts lie outside the profile's present limits, {}, at the test.",
        quantity.name.title(),
        outside * 100.0,
        window_of(quantity.present?),
    );
    Some(Warning { code: WarningCode::GoodBoardsFail, text })
}

fn below_minimum(profile: &Profile, parts: &Parts) -> Option<Warning> {
    let least = parts.detector.minimum_voltage?;
    let floor = profile.supply.floor;
    let at_detector = floor / parts.divider.map_or(1.0, |divider| divider.ratio());
    if at_detector >= least {
        return None;
    }
    let text = format!(
        "at the floor of the ramp, {floor}, the detector has {at_detector}, less than its minimum of {least}: its \
         output is undefined there, and the board may conduct again."
    );
    Some(Warning { code: WarningCode::BelowMinimum, text })
}

fn may_oscillate(parts: &Parts) -> Option<Warning> {
    let divider = parts.divider?;
    let most = divider.switching_current.filter(|most| most.0 > 0.0)?;
    if divider.top.0 <= LARGEST_TOP {
        return None;
    }
    let text = format!(
        "the detector draws up to {most} through {} when it switches, which moves its own pin by up to {}: above \
         100 kΩ it may oscillate.",
        divider.top,
        most * divider.top,
    );
    Some(Warning { code: WarningCode::MayOscillate, text })
}
