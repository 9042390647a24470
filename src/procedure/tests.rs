//! What must hold on any bench, whatever it answers.

use super::*;
use crate::profile::{InBand, Limit, Load, Measure, Pack, Profile, QuantityName, Ramp, Supply, Timing};
use crate::trace::{BenchFault, Current, FaultKind, OutputState, Sample, Stop};
use crate::units::{Amps, Ohms, Volts, Watts};
use proptest::prelude::*;
use std::collections::BTreeMap;

pub(super) fn plan(ramp: Ramp) -> Plan {
    let off = Limit { at: Some(Volts(5.8)), min: Some(1e-6), max: Some(4e-6) };
    let profile = Profile {
        board: "RN-204".into(),
        revision: "C".into(),
        title: "test".into(),
        serial_number: regex_lite::Regex::new(".*").expect("a pattern"),
        latched: false,
        supply: Supply {
            start: Volts(7.6),
            floor: Volts(5.2),
            maximum: Volts(8.4),
            current_limit: Amps(0.35),
        },
        load: Load { resistance: Ohms(55.0), tolerance: 0.01, rating: Watts(3.0), capacitance: None },
        timing: Timing { detect_delay: Duration::from_millis(5), release_delay: Duration::from_millis(20) },
        ramp,
        limits: BTreeMap::from([(QuantityName::OffCurrent, off)]),
        decision: crate::profile::DecisionRule::default(),
        measure: Measure::default(),
        parts: None,
        off_paths: Vec::new(),
        off_line: None,
        pack: Pack::default(),
        bench: Default::default(),
        hash: String::new(),
    };
    Plan::new(&profile, &ability())
}

/// A bench as the simulated one, without a voltmeter at the load.
pub(super) fn ability() -> Ability {
    Ability {
        voltmeter: true,
        load_voltmeter: false,
        short_readings: None,
        slew: crate::trace::Slew::default(),
        ranges: vec![Amps(1e-4), Amps(1e-3), Amps(1.0)],
        range_settle: Duration::from_millis(20),
        max_voltage: Volts(32.0),
        max_current: Amps(3.0),
        min_current: Amps(1e-3),
        set_step: Volts(1e-3),
        settle: Duration::from_millis(15),
        overshoot: 0.0,
        read_time: Duration::from_millis(22),
        arrival_tolerance: Volts(0.02),
        zero_uncertainties: vec![Amps(2e-8), Amps(1e-7), Amps(6e-5)],
    }
}

/// A bench made of random answers: some fitting, some not.
#[derive(Clone, Copy, Debug)]
enum Answer {
    Fitting { volts: f64, amps: f64 },
    Overload,
    Failed,
    Abort,
    Odd,
}

fn answer() -> impl Strategy<Value = Answer> {
    prop_oneof![
        12 => (0.0..8.0, prop_oneof![Just(0.0), Just(2.4e-6), 0.0..0.2, Just(-0.01)])
            .prop_map(|(volts, amps)| Answer::Fitting { volts, amps }),
        1 => Just(Answer::Overload),
        1 => Just(Answer::Failed),
        1 => Just(Answer::Abort),
        1 => Just(Answer::Odd),
    ]
}

fn event(answer: Answer, action: &Action, now: Duration, set: Volts) -> Event {
    let sample = |volts: f64, current| Sample {
        at: now,
        set,
        sense: Some(Volts(volts)),
        current,
        load: None,
        range: None,
        limited: Some(false),
        was_limited: None,
    };
    match (answer, action) {
        (Answer::Failed, _) => {
            Event::Failed(BenchFault { kind: FaultKind::NoReply, text: "no reply".into() })
        }
        (Answer::Abort, _) => Event::Abort,
        (Answer::Odd, Action::Read) => Event::Done,
        (Answer::Odd, _) => Event::Start,
        (Answer::Fitting { volts, amps }, Action::Read) => {
            Event::Reading(sample(volts, Current::Value(Amps(amps))))
        }
        (Answer::Overload, Action::Read) => Event::Reading(sample(1.0, Current::OVERLOAD)),
        _ => Event::Done,
    }
}

/// Runs a procedure against `answers`, then against a bench that only says `Done` or reads zero.
fn run(plan: Plan, answers: &[Answer]) -> Vec<(Action, Event)> {
    let maximum = plan.maximum;
    let mut procedure = Procedure::new(plan);
    let mut answers = answers.iter().copied();
    let mut seen = Vec::new();
    let (mut now, mut set) = (Duration::ZERO, Volts::ZERO);
    let mut last = Event::Start;
    for _ in 0..100_000 {
        let action = procedure.handle(now, last.clone());
        match &action {
            Action::SetVolts(volts) => {
                assert!(*volts <= maximum, "set-point {volts} above {maximum}");
                set = *volts;
            }
            Action::WaitUntil(until) => now = now.max(*until),
            Action::Finish(_) => {
                seen.push((action, last));
                return seen;
            }
            _ => {}
        }
        now += Duration::from_millis(2);
        last = event(answers.next().unwrap_or(Answer::Fitting { volts: 0.0, amps: 0.0 }), &action, now, set);
        seen.push((action, last.clone()));
    }
    panic!("the run never ended");
}

proptest! {
    #[test]
    fn every_run_ends_with_the_output_off_or_reported(answers in prop::collection::vec(answer(), 0..300)) {
        let ramp = Ramp::Search { resolution: Volts(0.002) };
        let seen = run(plan(ramp), &answers);
        let Some((Action::Finish(ending), _)) = seen.last() else { panic!("no finish") };
        let off: Vec<&Event> = seen.iter().filter(|(a, _)| *a == Action::OutputOff).map(|(_, e)| e).collect();
        prop_assert!(!off.is_empty());
        let after_on = seen.iter().rposition(|(a, _)| matches!(a, Action::OutputOn)).unwrap_or(0);
        let last_off = seen.iter().rposition(|(a, _)| *a == Action::OutputOff).unwrap_or(0);
        prop_assert!(last_off >= after_on, "the output went on after the last order to switch it off");
        match ending.output {
            OutputState::Off => prop_assert_eq!(off.last(), Some(&&Event::Done)),
            OutputState::MayBeOn => {
                prop_assert!(off.iter().rev().take(3).all(|event| **event != Event::Done));
            }
        }
    }

    #[test]
    fn nothing_is_set_once_switching_off_has_begun(answers in prop::collection::vec(answer(), 0..300)) {
        let seen = run(plan(Ramp::Staircase { step: Volts(0.01) }), &answers);
        let first_off = seen.iter().skip(1).position(|(a, _)| *a == Action::OutputOff).map_or(0, |at| at + 1);
        let later = &seen[first_off..];
        prop_assert!(later.iter().all(|(action, _)| !matches!(action, Action::SetVolts(_) | Action::OutputOn)));
    }
}

proptest! {
    #[test]
    fn a_run_that_measures_everything_ends_with_the_output_off(answers in prop::collection::vec(answer(), 0..600)) {
        let mut plan = plan(Ramp::Staircase { step: Volts(0.1) });
        let in_band = InBand { at: Volts(6.18), times: 2, wanted: None };
        plan.measure = Measure {
            detect_delay: true,
            release_delay: true,
            ramp_rates: Some(3),
            deep_floor: Some(Volts(0.3)),
            in_band: Some(in_band),
        };
        let seen = run(plan, &answers);
        let Some((Action::Finish(ending), _)) = seen.last() else { panic!("no finish") };
        let last = |wanted: fn(&Action) -> bool| seen.iter().rposition(|(action, _)| wanted(action)).unwrap_or(0);
        let last_off = last(|action| *action == Action::OutputOff);
        prop_assert!(last_off > last(|action| *action == Action::OutputOn));
        prop_assert!(last_off > last(|action| matches!(action, Action::SetVolts(_))));
        prop_assert_eq!(ending.output == OutputState::Off, seen[last_off].1 == Event::Done);
    }
}

#[test]
fn a_finished_run_stays_finished() {
    let mut procedure = Procedure::new(plan(Ramp::Staircase { step: Volts(0.01) }));
    procedure.handle(Duration::ZERO, Event::Start);
    for _ in 0..3 {
        procedure.handle(
            Duration::ZERO,
            Event::Failed(BenchFault { kind: FaultKind::LinkLost, text: "gone".into() }),
        );
    }
    let finish = procedure
        .handle(Duration::ZERO, Event::Failed(BenchFault { kind: FaultKind::LinkLost, text: "gone".into() }));
    assert!(matches!(&finish, Action::Finish(ending) if ending.output == OutputState::MayBeOn), "{finish:?}");
    assert_eq!(procedure.handle(Duration::ZERO, Event::Done), finish);
}

#[test]
fn the_operators_stop_is_carried_out_even_when_repeated() {
    let mut procedure = Procedure::new(plan(Ramp::Staircase { step: Volts(0.01) }));
    procedure.handle(Duration::ZERO, Event::Start);
    procedure.handle(Duration::ZERO, Event::Done);
    assert_eq!(procedure.handle(Duration::ZERO, Event::Abort), Action::OutputOff);
    assert_eq!(procedure.handle(Duration::ZERO, Event::Abort), Action::OutputOff);
    assert_eq!(procedure.handle(Duration::ZERO, Event::Done), Action::Read);
}

#[test]
fn a_set_point_above_the_maximum_switches_off() {
    let mut wrong = plan(Ramp::Staircase { step: Volts(0.01) });
    wrong.start = Volts(9.0);
    let seen = run(wrong, &[]);
    assert!(matches!(seen.last(), Some((Action::Finish(ending), _))
            if matches!(&ending.stop, Stop::Fault(fault) if fault.kind == FaultKind::Internal)));
}
