//! Thresholds and hysteresis outside their limits: which part fits, as far as three numbers tell.

use super::finding::{About, Finding, FindingCode};
use super::quantity::Quantity;
use crate::profile::{Limit, Parts, Profile, QuantityName};
use crate::units::{Ohms, Volts};

/// Detectors come in steps of a tenth of a volt (common practice of their makers).
const OPTION_STEP: f64 = 0.1;

/// A measured voltage beyond one end of its limits.
struct Outside {
    name: QuantityName,
    value: Volts,
    end: Volts,
    /// How far outside, in widths of the window; in shares of the limit where it has only one end.
    widths: f64,
}

impl Outside {
    fn of(quantity: &Quantity, limit: &Limit) -> Option<Self> {
        let value = quantity.value;
        let end = limit.max.filter(|max| value > *max).or(limit.min.filter(|min| value < *min))?;
        let width = limit.min.zip(limit.max).map_or(end.abs(), |(min, max)| max - min);
        let widths = (value - end).abs() / width;
        Some(Self { name: quantity.name, value: Volts(value), end: Volts(end), widths })
    }

    fn is_high(&self) -> bool {
        self.value > self.end
    }
}

/// A finding for each threshold and the hysteresis outside its limits, the farthest first, and one for all of them
/// where another detector explains them.
pub(super) fn outside(quantities: &[Quantity], profile: &Profile) -> Vec<Finding> {
    let of = |name| {
        let quantity = quantities.iter().find(|quantity| quantity.name == name)?;
        Outside::of(quantity, profile.limits.get(&name)?)
    };
    let names = [QuantityName::Trip, QuantityName::ReEnable, QuantityName::Hysteresis];
    let mut all: Vec<Outside> = names.into_iter().filter_map(of).collect();
    all.sort_by(|a, b| b.widths.total_cmp(&a.widths));
    let scale = Scale::of(quantities, profile);
    let another = scale.as_ref().filter(|_| a_window_away(&all)).map(|scale| wrong_option(scale, profile));
    let each = all.iter().map(|outside| one(outside, scale.as_ref(), profile));
    another.into_iter().chain(each).collect()
}

/// Trip and re-enable voltage on the same side, the trip by more than a whole window: a part beyond its tolerance lies
/// near its limits, another part farther off.
fn a_window_away(all: &[Outside]) -> bool {
    let side = |name| all.iter().find(|outside| outside.name == name);
    match (side(QuantityName::Trip), side(QuantityName::ReEnable)) {
        (Some(trip), Some(back)) => trip.is_high() == back.is_high() && trip.widths > 1.0,
        _ => false,
    }
}

/// Both thresholds as multiples of what they should be, where the ratio between them is right.
struct Scale {
    trip: Volts,
    re_enable: Volts,
    /// What the trip should be.
    wanted: Volts,
    /// Trip over what it should be.
    factor: f64,
    /// Re-enable over the middle of its limits.
    back: f64,
}

impl Scale {
    fn of(quantities: &[Quantity], profile: &Profile) -> Option<Self> {
        let value = |name| Some(quantities.iter().find(|quantity| quantity.name == name)?.value);
        let middle = |name| {
            let limit: &Limit = profile.limits.get(&name)?;
            Some((limit.min? + limit.max?) / 2.0)
        };
        let (trip, re_enable) = (value(QuantityName::Trip)?, value(QuantityName::ReEnable)?);
        let wanted = profile.parts.as_ref().map(|parts| parts.nominal_trip().0);
        let wanted = wanted.or_else(|| middle(QuantityName::Trip))?;
        let share = re_enable / trip - 1.0;
        let intact = share_wanted(profile, wanted).is_some_and(|(min, max)| (min..=max).contains(&share));
        let back = re_enable / middle(QuantityName::ReEnable)?;
        let (trip, re_enable, wanted) = (Volts(trip), Volts(re_enable), Volts(wanted));
        intact.then_some(Self { trip, re_enable, wanted, factor: trip / wanted, back })
    }
}

/// Hysteresis as a share of the trip, least and most: of the detector, or else as the limits have it.
fn share_wanted(profile: &Profile, trip: f64) -> Option<(f64, f64)> {
    if let Some(parts) = &profile.parts {
        return Some((parts.detector.hysteresis.min, parts.detector.hysteresis.max));
    }
    let limit = profile.limits.get(&QuantityName::Hysteresis)?;
    Some((limit.min? / trip, limit.max? / trip))
}

fn wrong_option(scale: &Scale, profile: &Profile) -> Finding {
    let Scale { trip, re_enable, wanted, factor, back } = scale;
    let divider = profile.parts.as_ref().and_then(|parts| other_top(parts, *factor)).unwrap_or_default();
    let option = match nearest_option(scale, profile) {
        Some((option, instead)) => format!(", consistent with a detector of {option} instead of {instead}"),
        None => String::new(),
    };
    board(
        FindingCode::WrongDetectorOption,
        format!(
            "the board trips at {trip} and comes back at {re_enable}, {factor:.3} and {back:.3} times what \
             they should be: both are off by about the same factor, farther than tolerances go, and their \
             ratio is right{option}. The trip should be {wanted}. Look first at the marking of the \
             detector{divider}."
        ),
    )
}

/// The option of the detector that the factor fits within its accuracy, and the one that should be there.
fn nearest_option(scale: &Scale, profile: &Profile) -> Option<(Volts, Volts)> {
    let detector = profile.parts.as_ref().map(|parts| &parts.detector);
    let instead = detector.map_or(scale.wanted, |detector| detector.trip);
    let window = profile.limits.get(&QuantityName::Trip).and_then(|limit| limit.min.zip(limit.max));
    let accuracy = detector.map(|detector| detector.accuracy);
    let accuracy = accuracy.or(window.map(|(min, max)| (max - min) / (max + min)))?;
    let seen = instead * scale.factor;
    let option = Volts((seen.0 / OPTION_STEP).round() * OPTION_STEP);
    let fits = (seen - option).abs() <= option * accuracy && (option - instead).abs().0 > OPTION_STEP / 2.0;
    fits.then_some((option, instead))
}

/// A divider with another top resistor does the same.
fn other_top(parts: &Parts, factor: f64) -> Option<String> {
    let divider = parts.divider?;
    let top: Ohms = divider.bottom * (divider.ratio() * factor - 1.0);
    let told =
        || format!(", then at the divider: {top} in place of {} at its top would do the same", divider.top);
    (top > Ohms::ZERO).then(told)
}

fn one(outside: &Outside, scale: Option<&Scale>, profile: &Profile) -> Finding {
    let Outside { name, value, end, .. } = outside;
    let high = outside.is_high();
    let by = (*value - *end).abs();
    let side = if high { "above" } else { "below" };
    let (code, look) = match (name, high) {
        (QuantityName::Trip, _) => {
            let code = if high { FindingCode::TripHigh } else { FindingCode::TripLow };
            let look = match scale {
                Some(scale) => format!(
                    "The re-enable voltage of {} moved with it, {:.3} and {:.3} times what they should be, so \
                     the hysteresis is in order: look first at the detector's voltage option and {}",
                    scale.re_enable,
                    scale.factor,
                    scale.back,
                    if profile.parts.as_ref().is_some_and(|parts| parts.divider.is_some()) {
                        "the resistors of its divider."
                    } else {
                        "what lies between it and the terminals."
                    }
                ),
                None => "Look first at the detector's part number, then at what lies before it.".to_owned(),
            };
            (code, look)
        }
        (QuantityName::ReEnable, _) => {
            let code = if high { FindingCode::ReEnableHigh } else { FindingCode::ReEnableLow };
            (code, "Look first at the detector's hysteresis option and the parts that set it.".to_owned())
        }
        (_, true) => (
            FindingCode::HysteresisWide,
            "Look first at the detector's hysteresis option and the resistors that add to it.".to_owned(),
        ),
        (_, false) => (
            FindingCode::HysteresisNarrow,
            "It fits a detector of another hysteresis option, or a feedback resistor that is missing or too \
             large: look there first. A battery that recovers by more than that switches the board on again."
                .to_owned(),
        ),
    };
    board(code, format!("the {} of {value} is {by} {side} its limit of {end}. {look}", name.title()))
}

fn board(code: FindingCode, text: String) -> Finding {
    Finding { code, about: About::Board, text }
}

#[cfg(test)]
mod tests {
    use super::super::fixture::profile;
    use super::*;

    /// What is found of a board of these thresholds, ranking aside. The profile wants 5.88 V to 6.12 V, 6.24 V to
    /// 6.56 V and 300 mV to 500 mV, of a 3.0 V detector behind a divider of two.
    fn told(trip: f64, re_enable: f64, profile: &Profile) -> Vec<(FindingCode, String)> {
        let quantity = |name, value| Quantity::new(name, value, Vec::new());
        let quantities = [
            quantity(QuantityName::Trip, trip),
            quantity(QuantityName::ReEnable, re_enable),
            quantity(QuantityName::Hysteresis, re_enable - trip),
        ];
        outside(&quantities, profile).into_iter().map(|finding| (finding.code, finding.text)).collect()
    }

    fn codes(trip: f64, re_enable: f64) -> Vec<FindingCode> {
        told(trip, re_enable, &profile()).into_iter().map(|(code, _)| code).collect()
    }

    #[test]
    fn a_board_inside_its_limits_has_none() {
        assert_eq!(codes(6.0, 6.4), []);
    }

    #[test]
    fn each_figure_outside_is_named_the_farthest_first() {
        assert_eq!(codes(6.15, 6.5), [FindingCode::TripHigh]);
        assert_eq!(codes(5.85, 6.26), [FindingCode::TripLow]);
        assert_eq!(codes(6.0, 6.29), [FindingCode::HysteresisNarrow]);
        assert_eq!(codes(6.0, 6.1), [FindingCode::HysteresisNarrow, FindingCode::ReEnableLow]);
        assert_eq!(codes(6.02, 6.53), [FindingCode::HysteresisWide]);
    }

    /// 2.7 V behind two equal resistors: 5.40 V, and 6.7 % more on the way up. 1.76 Mohm over 2.2 Mohm divides by 1.8,
    /// and 3.0 V times 1.8 is 5.40 V as well.
    #[test]
    fn both_off_by_one_factor_is_another_detector_or_divider() {
        let told = told(5.4, 5.76, &profile());
        assert_eq!(told[0].0, FindingCode::WrongDetectorOption);
        for words in ["0.900 and 0.900 times", "2.700 V instead of 3.000 V", "1.760 MΩ in place of 2.200 MΩ"]
        {
            assert!(told[0].1.contains(words), "{words}: {}", told[0].1);
        }
    }

    #[test]
    fn without_parts_the_limits_tell_what_should_be_there() {
        let mut profile = profile();
        profile.parts = None;
        let told = told(5.4, 5.76, &profile);
        assert!(told[0].1.contains("5.400 V instead of 6.000 V"), "{}", told[0].1);
        assert!(!told[0].1.contains("divider"), "{}", told[0].1);
    }

    #[test]
    fn a_ratio_that_is_not_right_or_one_threshold_in_place_is_not_another_option() {
        let another = |trip, re_enable| codes(trip, re_enable).contains(&FindingCode::WrongDetectorOption);
        assert!(another(5.4, 5.76));
        assert!(!another(5.4, 6.3), "only the trip is off");
        assert!(!another(5.4, 5.5), "hysteresis of 2 %");
        assert!(!another(5.8, 6.19), "a third of a window outside");
    }

    #[test]
    fn a_factor_between_two_options_names_none() {
        // 3.0 V x 0.918 = 2.754 V; options of 2.7 V and 2.8 V reach 2.732 V and 2.766 V down at 1.2 %.
        let told = told(6.0 * 0.915, 6.4 * 0.915, &profile());
        assert_eq!(told[0].0, FindingCode::WrongDetectorOption);
        assert!(!told[0].1.contains("instead of"), "{}", told[0].1);
    }
}
