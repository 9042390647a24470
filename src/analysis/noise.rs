//! Noise at the detector: it moves the thresholds, it does not only blur them.
//!
//! The first crossing counts, so with noise a board trips before the voltage has come down to its threshold and comes back
//! before it has risen to it, the sooner the longer each step lasts. Averaging repeats gives a tight and wrong answer.
//! What a trace shows is a survival experiment: so long at this voltage without a change, then a change within that time.
//! At z standard deviations from the threshold noise crosses it with the rate r Q(z), Q the upper tail of the normal
//! distribution and r the number of independent values of the noise in a second; beyond the threshold the change comes at
//! once. A delay is made behind the comparator as often as before it, and one of the two directions mostly has none; so noise
//! faster than the shorter of the two delays is taken to be averaged out, and r is one in that time. Of the delays no more
//! is known than the longest that the design allows; half of that is taken.
//!
//! With that likelihood, nothing known of the threshold beforehand, and of the noise what the profile states or else what
//! detectors usually have, threshold and uncertainty are the mean and standard deviation of the posterior (JCGM 101:2008,
//! 6.2). The level of the noise is common to both thresholds and moves them apart together; what is left is each
//! threshold's own.
//!
//! One run alone cannot tell a quiet detector from one with half a millivolt of noise: what is known beforehand decides. Only
//! where a board changes at a voltage at which it had stayed before is there evidence. So one detector in five hundred is
//! taken to be unlike the others, and then its level is wide open.

use crate::profile::{DetectorNoise, Timing, noise_rate};
use crate::statistics::distribution::{Distribution, Normal};
use crate::units::Volts;
use std::time::Duration;

/// What a trace shows of one threshold, in volts at the terminals along its direction: larger is farther.
#[derive(Clone, Debug, Default)]
pub(super) struct Evidence {
    /// Independent values of the noise in a second.
    rate: f64,
    /// Seconds by which a change comes after its crossing.
    delay: f64,
    /// Seconds that the supply takes to arrive.
    settle: f64,
    /// Voltage, and the seconds it stood without a crossing.
    stays: Vec<(f64, f64)>,
    /// Voltage of a change, and the seconds within which it came.
    changes: Vec<(f64, f64)>,
}

/// A threshold in the light of noise, along its direction.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Located {
    /// Posterior mean, in volts.
    pub(super) along: f64,
    /// Standard uncertainty of its own.
    pub(super) own: f64,
    /// Standard uncertainty from the level of the noise; more noise, farther out.
    pub(super) level: f64,
}

/// The noise at the detector's input and where it leaves the thresholds.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Noise {
    /// Posterior mean of its standard deviation, in volts.
    pub(super) deviation: f64,
    /// A level that it exceeds with nine chances in ten, in volts; zero where no contradiction in the trace shows noise.
    pub(super) at_least: f64,
    /// The thresholds, in the order of the evidence.
    pub(super) located: Vec<Located>,
}

/// Levels looked at on either side of the known one, a standard deviation apart: for a sum over a normal distribution that
/// is as good as its integral.
const REACH_OF_LEVELS: i32 = 3;
/// Share of detectors that are unlike what is known of them, the standard deviation of their levels as a factor, and at how
/// many parts of that, how far below and above the known level, they are looked at.
const UNLIKE: Unlike = Unlike { share: 0.1, factor: 4.0, part: 0.3, from: -6, to: 12 };
/// Noise below this share of the voltage is none.
const LEAST_LEVEL: f64 = 1e-7;
/// Places looked at for the threshold at each level.
const PLACES: usize = 40;
/// Noise beyond this many standard deviations is not counted with: once in a billion values.
const REACH: f64 = 6.0;

struct Unlike {
    share: f64,
    factor: f64,
    part: f64,
    from: i32,
    to: i32,
}

impl Evidence {
    /// No evidence yet, about a board that takes up to `longest` to change and follows the design's `timing`, on a supply
    /// that takes `settle` to arrive.
    pub(super) fn new(timing: &Timing, longest: Duration, settle: Duration) -> Self {
        let shorter = timing.detect_delay.min(timing.release_delay);
        Self {
            rate: noise_rate(Timing::likely(shorter)),
            delay: Timing::likely(longest).as_secs_f64(),
            settle: settle.as_secs_f64(),
            stays: Vec::new(),
            changes: Vec::new(),
        }
    }

    /// The board stayed for `time` from the step to `along` on. On the way there noise reached it less, and what crossed in
    /// the end would not show yet.
    pub(super) fn stayed(&mut self, along: f64, time: Duration) {
        let known = time.as_secs_f64() - self.settle - self.delay;
        if known > 0.0 {
            self.stays.push((along, known));
        }
    }

    /// The board changed at `along` within `time` of a reading that saw it there before.
    pub(super) fn changed(&mut self, along: f64, time: Duration) {
        self.changes.push((along, time.as_secs_f64()));
    }

    /// The first reading after the step to `along`, `time` later, saw the board changed. Noise had as much less time for it
    /// as for a stay.
    pub(super) fn changed_at_once(&mut self, along: f64, time: Duration) {
        let known = time.as_secs_f64() - self.settle - self.delay;
        self.changes.push((along, known.max(AT_ONCE)));
    }

    /// Sorts the stays, farthest first, and adds up the times of equal voltages.
    pub(super) fn sort(&mut self) {
        self.stays.sort_by(|a, b| b.0.total_cmp(&a.0));
        self.stays.dedup_by(|next, kept| {
            let same = (kept.0 - next.0).abs() < SAME;
            kept.1 += if same { next.1 } else { 0.0 };
            same
        });
    }

    /// True where a board changed at a voltage at which, or beyond which, it had stayed: nothing but noise does that.
    fn is_contradictory(&self) -> bool {
        let farthest = self.stays.first().map_or(f64::NEG_INFINITY, |(volts, _)| *volts);
        self.changes.iter().any(|(volts, _)| *volts <= farthest + SAME)
    }

    /// How well noise of a known level explains what is seen, in volts of threshold: the likelihood over all places it may
    /// have. Without any noise, and nothing in contradiction, the width of the bracket.
    pub(super) fn explained_by(&self, known: DetectorNoise, volts: Volts) -> f64 {
        let levels = known_levels(known, volts);
        let all: f64 = levels.iter().map(|(weight, _)| weight).sum();
        let weight = |deviation: f64| self.under(deviation).map_or(0.0, |under| under.weight);
        levels.iter().map(|(share, deviation)| share * weight(*deviation)).sum::<f64>() / all
    }

    /// Likelihood of a threshold at `along` with noise of `deviation`.
    fn likelihood(&self, along: f64, deviation: f64) -> f64 {
        let crossings = |volts: f64| {
            let z = (along - volts) / deviation;
            match z {
                _ if z <= 0.0 => f64::INFINITY,
                _ if z < REACH => self.rate * Normal.upper(z),
                _ => 0.0,
            }
        };
        let near = self.stays.iter().take_while(|(volts, _)| (along - volts) < REACH * deviation);
        let hazard: f64 = near.map(|(volts, time)| crossings(*volts) * time).sum();
        let changed = self.changes.iter().map(|(volts, time)| -(-crossings(*volts) * time).exp_m1());
        (-hazard).exp() * changed.product::<f64>()
    }

    /// Likelihood of a level of noise, threshold anywhere; and mean and variance of the threshold under it.
    fn under(&self, deviation: f64) -> Option<Under> {
        let from = self.stays.first()?.0;
        let nearest = self.changes.iter().map(|(volts, _)| *volts).fold(f64::INFINITY, f64::min).max(from);
        let step = (nearest + REACH * deviation - from) / PLACES as f64;
        let (mut weight, mut first, mut second) = (0.0, 0.0, 0.0);
        for place in 0..PLACES {
            let offset = (place as f64 + 0.5) * step;
            let likelihood = self.likelihood(from + offset, deviation);
            weight += likelihood;
            first += likelihood * offset;
            second += likelihood * offset * offset;
        }
        let mean = first / weight;
        let variance = (second / weight - mean * mean).max(0.0);
        Some(Under { weight: weight * step, mean: from + mean, variance })
    }
}

/// Voltages closer than this are the same.
const SAME: f64 = 1e-9;
/// Time in which noise does nothing, s.
const AT_ONCE: f64 = 1e-6;

struct Under {
    weight: f64,
    mean: f64,
    variance: f64,
}

/// Levels about what is known, in volts, each after its weight.
fn known_levels(known: DetectorNoise, volts: Volts) -> Vec<(f64, f64)> {
    let least = volts.0.abs() * LEAST_LEVEL;
    let level = |deviations: f64| (density(deviations), known.above(deviations).0.max(least));
    (-REACH_OF_LEVELS..=REACH_OF_LEVELS).map(|deviations| level(f64::from(deviations))).collect()
}

/// Levels that a detector unlike the others may have, each after its weight.
fn unlike_levels(known: DetectorNoise, volts: Volts) -> impl Iterator<Item = (f64, f64)> {
    let usual = DetectorNoise::usual(volts).level.max(known.level);
    let wide = DetectorNoise { level: usual, factor: UNLIKE.factor };
    let weight = UNLIKE.part * UNLIKE.share / (1.0 - UNLIKE.share);
    (UNLIKE.from..=UNLIKE.to).map(move |step| {
        let deviations = f64::from(step) * UNLIKE.part;
        (weight * density(deviations), wide.above(deviations).0)
    })
}

/// Of the normal distribution, to a factor.
fn density(deviations: f64) -> f64 {
    (-deviations * deviations / 2.0).exp()
}

impl Noise {
    /// The noise of a board near `volts` of whose detector so much is `known`, from what is seen of its thresholds. `None`
    /// where no level of noise explains what is seen, or nothing is.
    pub(super) fn find(evidence: &[&Evidence], known: DetectorNoise, volts: Volts) -> Option<Self> {
        let evident = evidence.iter().any(|evidence| evidence.is_contradictory());
        let mut looked_at = known_levels(known, volts);
        if evident {
            // Without a contradiction a level far from the known one would hardly count.
            looked_at.extend(unlike_levels(known, volts));
            looked_at.sort_by(|a, b| a.1.total_cmp(&b.1));
        }
        let mut levels = Vec::with_capacity(looked_at.len());
        for (share, deviation) in looked_at {
            let under =
                evidence.iter().map(|evidence| evidence.under(deviation)).collect::<Option<Vec<_>>>()?;
            let weight = share * under.iter().map(|under| under.weight).product::<f64>();
            if weight > 0.0 {
                levels.push((weight, deviation, under));
            }
        }
        let all: f64 = levels.iter().map(|(weight, ..)| weight).sum();
        if !(all > 0.0 && all.is_finite()) {
            return None;
        }
        let mean = |of: &dyn Fn(f64, &[Under]) -> f64| {
            levels.iter().map(|(weight, deviation, under)| weight * of(*deviation, under)).sum::<f64>() / all
        };
        let located = (0..evidence.len()).map(|index| {
            let along = mean(&|_, under| under[index].mean);
            Located {
                along,
                own: mean(&|_, under| under[index].variance).sqrt(),
                level: mean(&|_, under| (under[index].mean - along).powi(2)).sqrt(),
            }
        });
        let located = located.collect();
        let at_least = if evident { exceeded(&levels, all) } else { 0.0 };
        Some(Self { deviation: mean(&|deviation, _| deviation), at_least, located })
    }
}

/// The level below which a tenth of `all` the weight lies.
fn exceeded(levels: &[(f64, f64, Vec<Under>)], all: f64) -> f64 {
    let mut below = 0.0;
    let level = levels.iter().find(|(weight, ..)| {
        below += weight;
        below > 0.1 * all
    });
    level.map_or(0.0, |(_, deviation, _)| *deviation)
}

#[cfg(test)]
mod tests {
    use super::*;

    const USUAL: DetectorNoise = DetectorNoise { level: Volts(60e-6), factor: 2.0 };

    fn steps(stays: &[(f64, f64)], changes: &[(f64, f64)]) -> Evidence {
        let mut evidence =
            Evidence { stays: stays.to_vec(), changes: changes.to_vec(), rate: 100.0, ..Evidence::default() };
        evidence.sort();
        evidence
    }

    /// Up in steps of 2 mV of 50 ms each, stayed at 6.000 V, came at 6.002 V, and held for a second at 6.000 V.
    fn quiet() -> Evidence {
        let ramp: Vec<(f64, f64)> = (0..20).map(|step| (6.0 - 0.002 * f64::from(step), 0.05)).collect();
        steps(&[&ramp[..], &[(6.0, 1.0)]].concat(), &[(6.002, 0.05)])
    }

    #[test]
    fn without_contradiction_the_threshold_lies_in_its_bracket_and_a_little_farther() {
        let noise = Noise::find(&[&quiet()], USUAL, Volts(6.0)).expect("explained");
        let found = noise.located[0];
        assert!(noise.at_least == 0.0 && noise.deviation < 150e-6, "{noise:?}");
        assert!(found.along > 6.001 && found.along < 6.0014, "{found:?}");
        // Half of 2 mV over the root of three.
        assert!((found.own / 0.577e-3 - 1.0).abs() < 0.15, "{found:?}");
    }

    #[test]
    fn a_change_where_the_board_had_stayed_is_noise_and_puts_the_threshold_beyond_both() {
        let mut noisy = quiet();
        noisy.changes.push((5.996, 0.05));
        let noise = Noise::find(&[&noisy], USUAL, Volts(6.0)).expect("explained");
        assert!(noise.at_least > 0.3e-3 && noise.deviation > 1e-3, "{noise:?}");
        assert!(noise.located[0].along > 6.003, "{noise:?}");
        assert!(noise.located[0].level > 1e-3, "{noise:?}");
    }

    /// Against the survival law itself: ten thousand ramps with known noise, played by drawing an independent value of it
    /// every hundredth of a second, against what the hazard of the likelihood says of the first crossing.
    #[test]
    fn the_hazard_is_that_of_independent_values_of_noise() {
        use rand::{RngExt, SeedableRng};
        let mut rng = rand_chacha::ChaCha8Rng::seed_from_u64(5);
        let (deviation, stay) = (1e-3, 0.05);
        let mut stayed = 0;
        for _ in 0..10_000 {
            let crossed = |_| rng.sample::<f64, _>(rand_distr::StandardNormal) * deviation > 0.002;
            stayed += u32::from(!(0..5).any(crossed));
        }
        let evidence = steps(&[(6.0, stay)], &[]);
        let expected = evidence.likelihood(6.002, deviation);
        // Ten thousand draws: one standard deviation is 0.3 %.
        assert!((f64::from(stayed) / 1e4 - expected).abs() < 0.012, "{stayed} against {expected}");
    }
}
