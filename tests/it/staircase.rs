//! Thousands of boards through staircases: an exact small board model here, the analysis there.
//!
//! The model is a threshold with hysteresis behind a lead resistance, in lock step with its set-points; the readings carry
//! noise. It knows nothing of how the analysis works.

use crate::river;
use ebbmark::analysis::{FindingCode, analyse};
use ebbmark::profile::QuantityName;
use ebbmark::trace::{Accuracy, Claims, Current, Ending, OutputState, RangeAccuracy, Sample, Stop, Trace};
use ebbmark::units::{Amps, Ohms, Volts};
use ebbmark::verdict::{Decision, Outcome, Verdict, judge};
use proptest::prelude::*;
use rand::{RngExt, SeedableRng};
use rand_chacha::ChaCha8Rng;
use std::time::Duration;

const SEEDS: u64 = 1000;
const LOAD: f64 = 55.0;
/// Coverage the stated uncertainty promises at k = 2.
const PROMISED: f64 = 0.95;

/// A board and the bench it stands on.
struct Model {
    rng: ChaCha8Rng,
    trip: f64,
    re_enable: f64,
    lead: f64,
    noise: f64,
    gain: f64,
    off_amps: f64,
    off_gain: f64,
    on: bool,
    now: Duration,
    samples: Vec<Sample>,
}

impl Model {
    fn new(seed: u64) -> Self {
        let mut rng = ChaCha8Rng::seed_from_u64(seed);
        let trip = rng.random_range(5.84..6.3);
        let re_enable = trip + rng.random_range(0.25..0.55);
        let lead = rng.random_range(0.0..0.8);
        let noise = rng.random_range(0.0..0.0005);
        let gain = rng.random_range(-CLAIM.relative..CLAIM.relative);
        let off_amps = rng.random_range(0.8e-6..5e-6);
        let off_gain = rng.random_range(-0.004..0.004);
        Self {
            rng,
            trip,
            re_enable,
            lead,
            noise,
            gain,
            off_amps,
            off_gain,
            on: false,
            now: Duration::ZERO,
            samples: Vec::new(),
        }
    }

    /// Sets the supply, lets the board settle and reads.
    fn read(&mut self, set: f64, range: f64) {
        if !self.on && set >= self.re_enable {
            self.on = true;
        }
        let loaded = set * LOAD / (LOAD + self.lead);
        if self.on && loaded < self.trip {
            self.on = false;
        }
        let at_board = if self.on { loaded } else { set };
        let sum: f64 = (0..12).map(|_| self.rng.random_range(-0.5..0.5)).sum();
        let amps = if self.on {
            at_board / LOAD
        } else {
            self.off_amps * (0.3 + 0.7 * at_board / 5.8) * (1.0 + self.off_gain)
        };
        self.now += Duration::from_millis(60);
        self.samples.push(Sample {
            at: self.now,
            set: Volts(set),
            sense: Some(Volts(at_board * (1.0 + self.gain) + self.noise * sum)),
            current: if amps.abs() > range * 1.2 { Current::OVERLOAD } else { Current::Value(Amps(amps)) },
            load: None,
            range: Some(Amps(range)),
            limited: Some(false),
            was_limited: None,
        });
    }

    fn stairs(&mut self, from: f64, to: f64, step: f64) {
        let count = ((to - from).abs() / step).ceil() as u32;
        let signed = step.copysign(to - from);
        for index in 0..=count {
            self.read(from + signed * f64::from(index), HIGH);
        }
    }

    /// Pre-check, coarse down, off current, coarse up, then a fine pass each way with a hold, then off.
    fn whole_run(&mut self) {
        self.read(0.3, HIGH);
        self.read(1.0, HIGH);
        for _ in 0..3 {
            self.read(7.6, HIGH);
        }
        self.stairs(7.6, 5.2, COARSE);
        for set in [5.5, 5.8] {
            for _ in 0..4 {
                self.read(set, LOW);
            }
        }
        self.stairs(5.2, 7.6, COARSE);
        let loaded_trip = self.trip * (LOAD + self.lead) / LOAD;
        let above = loaded_trip + self.rng.random_range(0.02..0.04);
        self.stairs(above, above - 0.06, FINE);
        self.read(7.6, HIGH);
        self.read(5.2, HIGH);
        let below = self.re_enable - self.rng.random_range(0.02..0.04);
        self.stairs(below, below + 0.06, FINE);
        self.read(0.0, HIGH);
        self.read(0.0, HIGH);
    }

    fn trace(self) -> Trace {
        let line = |full_scale, accuracy| RangeAccuracy { full_scale: Amps(full_scale), accuracy };
        Trace {
            samples: self.samples,
            settings: Vec::new(),
            claims: Claims {
                sense: Some(CLAIM),
                current: vec![
                    line(LOW, Accuracy { relative: 0.004, absolute: 1e-9, resolution: 1e-10 }),
                    line(HIGH, Accuracy { relative: 0.002, absolute: 1e-4, resolution: 1e-6 }),
                ],
                ..Claims::default()
            },
            ending: Ending { stop: Stop::Completed, output: OutputState::Off },
        }
    }
}

const CLAIM: Accuracy = Accuracy { relative: 0.0003, absolute: 0.0, resolution: 1e-5 };
const LOW: f64 = 1e-4;
const HIGH: f64 = 1.0;
const COARSE: f64 = 0.02;
const FINE: f64 = 0.002;

#[test]
fn the_truth_lies_within_the_expanded_uncertainty_as_often_as_promised() {
    let profile = river::profile();
    let mut inside = [0_u64; 4];
    for seed in 0..SEEDS {
        let mut model = Model::new(seed);
        let truths = [
            (QuantityName::Trip, model.trip),
            (QuantityName::ReEnable, model.re_enable),
            (QuantityName::Hysteresis, model.re_enable - model.trip),
            (QuantityName::OffCurrent, model.off_amps),
        ];
        model.whole_run();
        let trace = model.trace();
        let analysis = analyse(&trace, &profile);
        assert_not_judged_wrongly(seed, truths[0].1, &judge(&analysis, &profile, &trace.ending));
        for ((name, truth), inside) in truths.iter().zip(&mut inside) {
            let found = analysis.quantities.iter().find(|quantity| quantity.name == *name);
            let Some(found) = found else { panic!("seed {seed}: no {name:?}: {analysis:#?}") };
            *inside += u64::from((found.value - truth).abs() <= 2.0 * found.standard_uncertainty);
        }
    }
    let least = (PROMISED * SEEDS as f64) as u64;
    assert!(inside.iter().all(|count| *count >= least), "inside of {SEEDS}: {inside:?}");
}

/// Pass and fail are promised to be right but for one in forty at the very border; no seed stands that near to it.
fn assert_not_judged_wrongly(seed: u64, trip: f64, verdict: &Verdict) {
    let good = (5.88..=6.12).contains(&trip);
    for judged in verdict.judged.iter().filter(|judged| judged.quantity.name == QuantityName::Trip) {
        let wrong = match judged.decision {
            Some(Decision::Pass) => !good,
            Some(Decision::Fail) => good,
            _ => false,
        };
        assert!(!wrong, "seed {seed}: trip {trip}, {judged:?}");
    }
}

#[test]
fn a_board_far_outside_its_limits_never_passes_whatever_the_noise() {
    let profile = river::profile();
    for seed in 0..SEEDS {
        let mut model = Model::new(seed);
        model.trip = if seed % 2 == 0 { 5.80 } else { 6.20 };
        model.re_enable = model.trip + 0.4;
        model.noise = 0.002;
        model.whole_run();
        let trace = model.trace();
        let verdict = judge(&analyse(&trace, &profile), &profile, &trace.ending);
        assert!(
            !matches!(verdict.outcome, Outcome::Pass | Outcome::ConditionalPass),
            "seed {seed}: {verdict:#?}"
        );
    }
}

#[test]
fn pre_check_jumps_and_discharge_leave_no_finding() {
    let mut profile = river::profile();
    // The thresholds of these boards lie anywhere.
    profile.limits.retain(|name, _| *name == QuantityName::OffCurrent);
    for seed in 0..100 {
        let mut model = Model::new(seed);
        model.off_amps = 2.5e-6;
        model.whole_run();
        let findings = analyse(&model.trace(), &profile).findings;
        assert!(findings.is_empty(), "seed {seed}: {findings:?}");
    }
}

#[test]
fn without_a_voltmeter_the_claimed_leads_are_taken_off_and_it_is_said() {
    let profile = river::profile();
    let mut inside = 0;
    let seeds = 200;
    for seed in 0..seeds {
        let mut model = Model::new(seed);
        let truth = model.trip;
        // Contacts are not quite what the bench file claims.
        let claimed = Ohms(model.lead * model.rng.random_range(0.85..1.15));
        model.whole_run();
        let mut trace = model.trace();
        for sample in &mut trace.samples {
            sample.sense = None;
        }
        trace.claims.set = Some(CLAIM);
        trace.claims.lead_resistance = Some(claimed);
        let analysis = analyse(&trace, &profile);
        assert!(
            analysis.findings.iter().any(|finding| finding.code == FindingCode::NoVoltmeter),
            "seed {seed}"
        );
        let trip = analysis.quantities.iter().find(|quantity| quantity.name == QuantityName::Trip);
        let trip = trip.unwrap_or_else(|| panic!("seed {seed}: no trip"));
        inside += u64::from((trip.value - truth).abs() <= 2.0 * trip.standard_uncertainty);
    }
    assert!(inside as f64 >= PROMISED * seeds as f64, "inside of {seeds}: {inside}");
}

fn any_sample() -> impl Strategy<Value = Sample> {
    let wild = || prop_oneof![8 => -0.1..9.0_f64, 1 => proptest::num::f64::ANY];
    let amps =
        prop_oneof![4 => Just(0.11), 4 => Just(2e-6), 2 => -0.2..0.4_f64, 1 => proptest::num::f64::ANY];
    let set = prop_oneof![4 => (50_u32..80).prop_map(|tenths| f64::from(tenths) / 10.0), 1 => wild()];
    (
        0_u64..10_000,
        set,
        proptest::option::of(wild()),
        proptest::option::of(amps),
        proptest::option::of(wild()),
        any::<bool>(),
    )
        .prop_map(|(milliseconds, set, sense, amps, range, limited)| Sample {
            at: Duration::from_millis(milliseconds),
            set: Volts(set),
            sense: sense.map(Volts),
            current: amps.map_or(Current::OVERLOAD, |amps| Current::Value(Amps(amps))),
            load: range.map(Volts),
            range: range.map(Amps),
            limited: Some(limited),
            was_limited: None,
        })
}

proptest! {
    #[test]
    fn no_samples_whatever_make_the_analysis_panic(samples in proptest::collection::vec(any_sample(), 0..60)) {
        let profile = river::profile();
        let ending = Ending { stop: Stop::Completed, output: OutputState::Off };
        let mut trace = Trace { samples, settings: Vec::new(), claims: Claims::default(), ending };
        let verdict = judge(&analyse(&trace, &profile), &profile, &trace.ending);
        for judged in &verdict.judged {
            prop_assert!(judged.quantity.value.is_finite());
        }
        ebbmark::analysis::from_rates(std::slice::from_ref(&trace), &profile);
        trace.claims.sense = Some(CLAIM);
        trace.claims.lead_resistance = Some(Ohms(0.3));
        analyse(&trace, &profile);
    }
}
