//! Deep sweep and switching on inside the band, on virtual benches and over pseudo-terminals.

use crate::river;
use crate::virtual_run::{Run, assert_safe, run_setup};
use ebbmark::analysis::FindingCode;
use ebbmark::profile::{InBand, Limit, Profile, QuantityName, WantedInBand};
use ebbmark::sim::{Condition, DeepConduction, Setup};
use ebbmark::trace::OutputState;
use ebbmark::units::{Amps, Ohms, Volts};
use ebbmark::verdict::{Decision, Outcome};

/// Inside the band of every good river logger.
const IN_BAND: Volts = Volts(6.18);

fn profile(wanted: Option<WantedInBand>) -> Profile {
    let mut profile = river::profile();
    profile.measure.deep_floor = Some(Volts(0.3));
    profile.measure.in_band = Some(InBand { at: IN_BAND, times: 3, wanted });
    profile
}

fn limited(most: f64) -> Profile {
    let mut profile = profile(None);
    let limit = Limit { at: None, min: None, max: Some(most) };
    profile.limits.insert(QuantityName::DeepCurrent, limit);
    profile
}

/// What was found; one board in a hundred is held so near its threshold that its noise looks slow, which is of no concern
/// here.
fn codes(run: &Run) -> Vec<FindingCode> {
    let codes = run.verdict.findings.iter().map(|finding| finding.code);
    codes.filter(|code| *code != FindingCode::SlowerThanDesign).collect()
}

fn deep_decision(run: &Run) -> Option<Decision> {
    run.verdict.judged.iter().find(|judged| judged.quantity.name == QuantityName::DeepCurrent)?.decision
}

/// Case by hand: below the floor of 5.2 V an open switch draws the most at the highest voltage, and no more than at
/// the floor itself.
#[test]
fn an_open_switch_draws_microamperes_down_to_the_deep_floor() {
    let coarse = limited(1e-3);
    let fine = limited(6e-6);
    for seed in 0..50 {
        let setup = Setup::new(&coarse, Condition::Good, seed);
        for (profile, widest) in [(&coarse, 1.5e-4), (&fine, 1e-7)] {
            let run = run_setup(profile, &setup);
            let what = format!("seed {seed}");
            assert_safe(&run, profile, &what);
            assert_eq!(codes(&run), [FindingCode::InBand], "{what}");
            let (value, expanded) = run.measured(QuantityName::DeepCurrent).expect("a deep current");
            let at_floor = run.truth.off_current(profile.supply.floor).0;
            // All claims of the ammeter at their worst are hardly more than what covers 95 %.
            let most = 1.2 * expanded;
            assert!(value - most <= at_floor && value + most >= 0.9 * at_floor, "{what}: {value} A");
            assert!(expanded < widest, "{what}: {expanded} A");
            assert_eq!(deep_decision(&run), Some(Decision::Pass), "{what}: {value} +- {expanded} A");
        }
    }
}

/// A window between 0.55 V and 0.85 V with 20 mA in its middle: the floating output of a detector below its minimum.
#[test]
fn a_switch_that_conducts_when_deep_fails_with_its_place_and_current() {
    let profile = limited(1e-3);
    for seed in 0..50 {
        let mut setup = Setup::new(&profile, Condition::Good, seed);
        let window = DeepConduction { from: Volts(0.55), to: Volts(0.85), peak: Amps(20e-3) };
        setup.board.deep_conduction = Some(window);
        let run = run_setup(&profile, &setup);
        let what = format!("seed {seed}");
        assert_safe(&run, &profile, &what);
        assert_eq!(run.verdict.outcome, Outcome::Fail, "{what}");
        assert_eq!(codes(&run)[0], FindingCode::ConductsWhenDeep, "{what}: {:?}", run.verdict.findings);
        let (value, expanded) = run.measured(QuantityName::DeepCurrent).expect("a deep current");
        // Steps of 50 mV meet a triangle of 150 mV half-width at 5/6 of its peak or above, less what the supply errs by.
        assert!(value + expanded > 0.8 * 20e-3 && value - expanded <= 20e-3, "{what}: {value} A");
        assert!(run.measured(QuantityName::Trip).is_some(), "{what}");
    }
}

/// 470 uF drained by 0.1 mA fall by 0.22 V/s: the sweep takes its time, or gives up and says how far it got.
#[test]
fn a_supply_that_cannot_sink_gets_down_in_bounded_time_or_says_how_far() {
    let mut profile = profile(None);
    profile.measure.in_band = None;
    for seed in 0..20 {
        let mut setup = Setup::new(&profile, Condition::NoSink, seed);
        let run = run_setup(&profile, &setup);
        assert_safe(&run, &profile, &format!("seed {seed}"));
        assert!(run.measured(QuantityName::DeepCurrent).is_some(), "seed {seed}: {:?}", run.verdict.findings);
        setup.supply.bleed = Amps(10e-6);
        let run = run_setup(&profile, &setup);
        assert_safe(&run, &profile, &format!("seed {seed}"));
        assert_eq!(codes(&run)[0], FindingCode::DeepFloorNotReached, "seed {seed}");
        assert!(run.measured(QuantityName::DeepCurrent).is_none(), "seed {seed}");
    }
}

#[test]
fn a_board_switched_on_inside_the_band_is_recorded_and_judged_only_when_asked() {
    for seed in 0..30 {
        // The simulated detector forgets while it is dead and wakes up off.
        for (wanted, outcome, code) in [
            (None, Outcome::Pass, FindingCode::InBand),
            (Some(WantedInBand::Off), Outcome::Pass, FindingCode::InBand),
            (Some(WantedInBand::On), Outcome::Fail, FindingCode::UnwantedInBand),
        ] {
            let profile = profile(wanted);
            let run = run_setup(&profile, &Setup::new(&profile, Condition::Good, seed));
            assert_safe(&run, &profile, &format!("seed {seed}"));
            assert_eq!((run.verdict.outcome, codes(&run)), (outcome, vec![code]), "seed {seed} {wanted:?}");
            let found = run.verdict.findings.iter().find(|finding| finding.code == code);
            let text = &found.expect("as just seen").text;
            assert!(text.contains("on 0 times of 3 and stayed off 3 times"), "{text}");
        }
    }
}

#[test]
fn terminals_that_do_not_drain_are_named() {
    let profile = profile(None);
    let mut setup = Setup::new(&profile, Condition::NoSink, 1);
    (setup.supply.off_resistance, setup.supply.bleed) = (Ohms(1e6), Amps(10e-6));
    let run = run_setup(&profile, &setup);
    assert_eq!(run.trace.ending.output, OutputState::Off);
    assert!(codes(&run).contains(&FindingCode::InBandNotTried), "{:?}", run.verdict.findings);
}
