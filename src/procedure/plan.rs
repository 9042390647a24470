//! The numbers of one run, worked out once from the profile and the bench's abilities.

use super::rebound::{self, Trial};
use super::search::{Belief, Costs, Grid, SearchPlan};
use super::{Ability, Prior, off_line};
use crate::profile::{Load, Measure, Profile, QuantityName, Ramp};
use crate::trace::Slew;
use crate::units::{Amps, Volts};
use std::time::Duration;

/// Everything a procedure needs to know. One that exists keeps to the profile's maximum.
#[derive(Clone, Debug, PartialEq)]
pub struct Plan {
    /// No set-point is ever higher.
    pub maximum: Volts,
    /// Over-voltage protection set in the supply.
    pub over_voltage: Volts,
    /// Current limit set in the supply once the pre-check is passed.
    pub current_limit: Amps,
    /// Lowest current the supply can be limited to.
    pub min_current: Amps,
    /// Board certainly on.
    pub start: Volts,
    /// End of the downward ramp.
    pub floor: Volts,
    /// The load behind the switch.
    pub load: Load,
    /// Smallest step of the supply's voltage.
    pub set_step: Volts,
    /// A board that has tripped stays off until its supply has gone.
    pub latched: bool,
    /// Step of the ramp over the whole range.
    pub survey_step: Volts,
    /// Step of the second ramp through the bracket of the first; `None` when the first is the only one.
    pub fine_step: Option<Volts>,
    /// Pace while the voltage falls.
    pub down: Pace,
    /// Pace while the voltage rises.
    pub up: Pace,
    /// Settling time of the supply after a small step.
    pub settle: Duration,
    /// How much longer it takes the farther a step goes.
    pub slew: Slew,
    /// Time one reading takes.
    pub read_time: Duration,
    /// Settling time after a change of the ammeter's range.
    pub range_settle: Duration,
    /// How far the terminals may lie from the set-point, lead drop aside.
    pub arrival_tolerance: Volts,
    /// Whether arrival can be measured.
    pub voltmeter: bool,
    /// Time of one burst of readings far shorter than a mains period; `None` where the bench takes none.
    pub short_readings: Option<Duration>,
    /// Voltages at which the off current is read, lowest first, all below the lowest trip.
    pub off_points: Vec<Volts>,
    /// How far the off current may still move once it counts as settled.
    pub off_drift: Amps,
    /// The rebound to try out, if any.
    pub rebound: Option<Trial>,
    /// Ammeter range while the board may conduct.
    pub on_range: Amps,
    /// Standard uncertainty of a reading near zero on that range.
    pub on_uncertainty: Amps,
    /// Ammeter ranges for the off current, most sensitive first.
    pub off_ranges: Vec<Amps>,
    /// What is measured beyond thresholds and off current.
    pub measure: Measure,
    /// Limit of the deep current, if any.
    pub deep_limit: Option<Amps>,
    /// How both thresholds are looked for together; `None` for a staircase.
    pub(super) search: Option<SearchPlan>,
}

/// Waiting times in one direction.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Pace {
    /// From the settled voltage to the reading: longer than the slowest delay the design allows.
    pub dwell: Duration,
    /// How long a voltage beside the threshold is held to see that nothing moves.
    pub hold: Duration,
}

impl Plan {
    /// Works out a run. Profile and bench have been checked against each other before.
    pub fn new(profile: &Profile, ability: &Ability) -> Self {
        let supply = profile.supply;
        let (survey_step, fine_step) = steps(profile, ability.set_step);
        let on_range = smallest_holding(&ability.ranges, supply.current_limit);
        let off_limit = profile.limits.get(&QuantityName::OffCurrent);
        let expected_off =
            off_limit.and_then(|limit| limit.max).map_or(OFF_CURRENT_GUESS, |max| Amps(2.0 * max));
        let first_off = smallest_holding(&ability.ranges, expected_off);
        let off_ranges =
            ability.ranges.iter().copied().filter(|r| *r >= first_off && *r <= on_range).collect();
        let (down, up) = (Pace::new(profile.timing.detect_delay), Pace::new(profile.timing.release_delay));
        Self {
            maximum: supply.maximum,
            over_voltage: (supply.maximum * OVER_VOLTAGE).min(ability.max_voltage),
            current_limit: supply.current_limit,
            min_current: ability.min_current,
            start: supply.start,
            floor: supply.floor,
            load: profile.load,
            set_step: ability.set_step,
            latched: profile.latched,
            survey_step,
            fine_step,
            down,
            up,
            settle: ability.settle,
            slew: ability.slew,
            read_time: ability.read_time,
            range_settle: ability.range_settle,
            arrival_tolerance: ability.arrival_tolerance,
            voltmeter: ability.voltmeter,
            short_readings: ability.short_readings,
            off_points: off_line::points(profile),
            off_drift: profile.off_drift().max(zero_uncertainty(ability, first_off)),
            rebound: rebound::trial(profile.pack.rebound).filter(|_| ability.voltmeter),
            on_range,
            on_uncertainty: zero_uncertainty(ability, on_range),
            off_ranges,
            measure: profile.measure,
            deep_limit: profile.limits.get(&QuantityName::DeepCurrent).and_then(|limit| limit.max).map(Amps),
            search: search(profile, ability, down, up),
        }
    }

    /// The same run for a board of which earlier ones are known: its thresholds are looked for first where theirs were.
    /// A board that is not like them costs some set-points more.
    #[must_use]
    pub fn with_prior(mut self, prior: Prior) -> Self {
        if let Some(search) = &mut self.search {
            (search.trip.earlier, search.re_enable.earlier) = (prior.trip, prior.re_enable);
        }
        self
    }

    /// Current limit during the pre-check at `volts`: twice what the load draws there.
    pub(super) fn pre_check_limit(&self, volts: Volts) -> Amps {
        (volts / self.load.resistance * 2.0).max(PRE_CHECK_CURRENT).max(self.min_current)
    }

    /// Current that a reading of zero on the large range may show: five standard uncertainties.
    pub(super) fn on_zero(&self) -> Amps {
        self.on_uncertainty * ZERO_UNCERTAINTIES
    }
}

/// The same for any range of a bench.
pub(super) fn on_zero(ability: &Ability, range: Amps) -> Amps {
    zero_uncertainty(ability, range) * ZERO_UNCERTAINTIES
}

impl Pace {
    fn new(delay: Duration) -> Self {
        Self { dwell: delay.mul_f64(1.25) + Duration::from_millis(1), hold: (delay * 10).max(SHORTEST_HOLD) }
    }

    /// The pace for a board that proved slower than its design allows: it took up to `seen` to change.
    pub(super) fn slower(self, seen: Duration) -> Self {
        Self { dwell: seen.mul_f64(1.25).max(self.dwell * 2), hold: (seen * 2).max(self.hold) }
    }
}

/// First pre-check voltage: below the knee of any semiconductor.
pub(super) const PRE_CHECK_LOW: Volts = Volts(0.3);
/// Second pre-check voltage: above the knee of a diode, below what a detector works at.
pub(super) const PRE_CHECK_HIGH: Volts = Volts(1.0);
/// Least current limit of the pre-check.
const PRE_CHECK_CURRENT: Amps = Amps(5e-3);
/// Over-voltage protection above the profile's maximum, so that an error of the set-point does not trigger it.
const OVER_VOLTAGE: f64 = 1.05;
/// A guess at the off current where the profile sets no limit.
const OFF_CURRENT_GUESS: Amps = Amps(10e-6);
/// A slow board shows itself within this time beside its threshold.
const SHORTEST_HOLD: Duration = Duration::from_millis(250);

/// Survey and fine step of a staircase, and of a search that had to give up. Two passes with n and m steps over a span cost n + m and resolve n x m, so the geometric
/// mean of span and resolution is the cheapest survey step.
fn steps(profile: &Profile, set_step: Volts) -> (Volts, Option<Volts>) {
    match profile.ramp {
        Ramp::Staircase { step } => (step, None),
        Ramp::Search { resolution } => {
            let fine = resolution.max(set_step);
            let span = profile.supply.start - profile.supply.floor;
            let cells = (span / fine).sqrt().round().max(1.0);
            (fine * cells, (cells > 1.0).then_some(fine))
        }
    }
}

/// The search of a profile that asks for one: cells, costs, and where the limits lead one to expect the thresholds.
fn search(profile: &Profile, ability: &Ability, down: Pace, up: Pace) -> Option<SearchPlan> {
    let Ramp::Search { resolution } = profile.ramp else { return None };
    let supply = &profile.supply;
    let settles_up = if ability.overshoot > 0.0 { 2.0 } else { 1.0 };
    let cost = |settles: f64, pace: Pace| {
        (ability.settle.mul_f64(settles) + pace.dwell + ability.read_time).as_secs_f64()
    };
    let window = |name| {
        let limit = profile.limits.get(&name)?;
        Some((Volts(limit.min.unwrap_or(supply.floor.0)), Volts(limit.max.unwrap_or(supply.start.0))))
    };
    let belief = |window| Belief { window, earlier: None };
    let trip = window(QuantityName::Trip);
    let by_hysteresis = || {
        let limit = profile.limits.get(&QuantityName::Hysteresis)?;
        let (low, high) = trip?;
        Some((low + Volts(limit.min.unwrap_or(0.0)), high + Volts(limit.max?)))
    };
    Some(SearchPlan {
        grid: Grid::new(supply.floor, supply.start, resolution, ability.set_step),
        table: SearchPlan::table(Costs { down: cost(1.0, down), up: cost(settles_up, up) }),
        trip: belief(trip),
        re_enable: belief(window(QuantityName::ReEnable).or_else(by_hysteresis)),
        tolerance: ability.arrival_tolerance,
        overshoot: ability.overshoot,
    })
}

/// Standard uncertainties within which nearly every reading of zero lies, whatever its distribution: for a rectangular
/// one all beyond the square root of three.
const ZERO_UNCERTAINTIES: f64 = 5.0;

fn zero_uncertainty(ability: &Ability, range: Amps) -> Amps {
    let ranges = ability.ranges.iter().zip(&ability.zero_uncertainties);
    ranges.filter(|(full_scale, _)| **full_scale == range).map(|(_, zero)| *zero).next().unwrap_or(Amps::ZERO)
}

/// The smallest of `ranges` (smallest first) that holds `current`, or the largest there is.
fn smallest_holding(ranges: &[Amps], current: Amps) -> Amps {
    ranges.iter().copied().find(|range| *range >= current).or(ranges.last().copied()).unwrap_or(current)
}
