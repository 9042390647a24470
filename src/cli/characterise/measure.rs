//! Cycle after cycle: place by place on a bench, each cycle a run of its own, kept before the next begins.

use super::Ordered;
use super::operator::{Answer, Measured, Operator, STOPPED};
use super::progress::Bar;
use crate::bench::serial::SerialBench;
use crate::cli::due::{self, BenchState};
use crate::cli::simulated::bench_file;
use crate::cli::station::Station;
use crate::cli::stop::listen;
use crate::cli::test::arrangement;
use crate::cli::{Exit, Failure, files, guard, who};
use crate::clock::Clock;
use crate::instrument::bench_file::BenchFile;
use crate::procedure::{self, Procedure, Steps, Sweep};
use crate::profile::{Measure, Pack, Profile};
use crate::record::{BenchUsed, KeptStudy, Occasion, ProfileUsed, Simulated, Study, Subject, now};
use crate::report::OUTPUT_MAY_BE_ON;
use crate::sim::bench::InFixture;
use crate::study::{Cycle, Order, Place, read, window};
use crate::trace::{OutputState, Stop, Trace};
use crate::units::Ohms;
use std::collections::BTreeSet;

/// Measures what is not kept yet. Returns all that is kept then, and `Exit::Pass` when nothing is missing.
pub(super) fn go_on(
    ordered: &Ordered<'_>,
    operator: &Operator<'_, '_>,
    mut kept: KeptStudy,
) -> Result<(KeptStudy, Exit), Failure> {
    let plan = kept.heading.plan.clone();
    let done: BTreeSet<Order> = kept.cycles.iter().map(|cycle| cycle.order).collect();
    let missing: Vec<Order> = plan.orders().filter(|order| !done.contains(order)).collect();
    for orders in missing.chunk_by(|a, b| a.place() == b.place()) {
        let Some(place) = orders.first().map(Order::place) else { continue };
        let Answer::Ready(measured) = operator.bring_about(place)? else { return Ok((kept, STOPPED)) };
        let exit = match &ordered.bench {
            Some(bench) => At { ordered, bench, clock: Clock::real(), simulated: None, place, measured }
                .measure(orders, &mut kept)?,
            None => on_simulation(ordered, place, measured, orders, &mut kept)?,
        };
        if exit != Exit::Pass {
            return Ok((kept, exit));
        }
    }
    Ok((kept, Exit::Pass))
}

/// A simulated board at the temperature and with the load of this place.
fn on_simulation(
    ordered: &Ordered<'_>,
    place: Place,
    measured: Measured,
    orders: &[Order],
    kept: &mut KeptStudy,
) -> Result<Exit, Failure> {
    let simulation = &ordered.arguments.simulation;
    let mut simulated = simulation.of_board(&kept.heading.plan.boards[place.board]);
    if simulation.seed.is_some() {
        // One seed for several boards: each is another one.
        simulated.seed = simulated.seed.wrapping_add(place.board as u64);
    }
    let mut setup = simulation.setup(&ordered.profile, &simulated);
    setup.board.load = setup.board.load * (measured.load / ordered.profile.load.resistance);
    if let Some(temperature) = measured.temperature {
        setup = setup.at(temperature);
    }
    let arrangement = arrangement(&ordered.arguments.bench).unwrap_or_default();
    let instruments = simulation.start_setup(setup, arrangement, InFixture::Board)?;
    let bench = bench_file(&instruments)?;
    let simulated = Some(simulated);
    At { ordered, bench: &bench, clock: simulation.clock(), simulated, place, measured }.measure(orders, kept)
}

/// The profile as far as a cycle needs it: thresholds only, with this load.
fn for_cycles(profile: &Profile, load: Ohms) -> Profile {
    let mut profile = profile.clone();
    profile.load.resistance = load;
    profile.limits.clear();
    profile.measure = Measure::default();
    profile.off_paths.clear();
    profile.off_line = None;
    profile.pack = Pack::default();
    profile
}

/// One board in the fixture, under one set of conditions.
struct At<'o, 'a> {
    ordered: &'o Ordered<'a>,
    bench: &'o BenchFile,
    clock: Clock,
    simulated: Option<Simulated>,
    place: Place,
    measured: Measured,
}

impl At<'_, '_> {
    fn measure(&self, orders: &[Order], kept: &mut KeptStudy) -> Result<Exit, Failure> {
        let ordered = self.ordered;
        let profile = for_cycles(&ordered.profile, self.measured.load);
        let maximum = profile.supply.maximum;
        let station =
            Station::open(self.bench, self.clock, &ordered.arguments.keeping.logs, &ordered.station)?;
        files::fit(&profile, self.bench)?;
        station.note_calibration();
        due::refuse_overdue_calibration(&profile, self.bench)?;
        let (study, torn) = station.log.open_study(&ordered.name, &kept.heading, &now())?;
        if let Some(torn) = torn {
            anstream::eprintln!("note: {torn}");
        }
        let bench = station.connect(maximum)?;
        let state = BenchState::of(&station, &who::instruments(self.bench, &bench))?;
        match self.simulated {
            Some(_) => state.note_exempt(&profile.bench),
            None => state.refuse_overdue(&profile)?,
        }
        let plan = kept.heading.plan.clone();
        let mut bar = Bar::new(&plan, &kept.cycles, self.clock.speed());
        let mut fixture = Fixture { at: self, profile, station, bench, study };
        for order in orders {
            bar.begins(&plan, *order);
            let sweep = Sweep { window: window(&kept.cycles, self.place), rate: plan.rates[order.rate] };
            match fixture.cycle(*order, sweep, &mut bar) {
                Ok(Ended::Kept(cycle)) => {
                    bar.ends(&cycle);
                    kept.cycles.push(*cycle);
                }
                Ok(Ended::Stopped(exit)) => {
                    bar.finish();
                    return Ok(exit);
                }
                Err(failure) => {
                    bar.finish();
                    return Err(failure);
                }
            }
        }
        bar.finish();
        Ok(Exit::Pass)
    }
}

/// The bench, connected, and the study that its cycles go into.
struct Fixture<'f, 'o, 'a> {
    at: &'f At<'o, 'a>,
    profile: Profile,
    station: Station<'f>,
    bench: SerialBench,
    study: Study,
}

/// What came of a cycle.
enum Ended {
    /// It is on disk.
    Kept(Box<Cycle>),
    /// It was cut short; nothing of it is kept. Why has been said.
    Stopped(Exit),
}

impl Fixture<'_, '_, '_> {
    /// One cycle, from the mark in the log to the kept line. However it ends, the output was commanded off; should this
    /// computer die meanwhile, the mark tells the next start which supply may be on.
    fn cycle(&mut self, order: Order, sweep: Sweep, bar: &mut Bar) -> Result<Ended, Failure> {
        let station = &mut self.station;
        let stop = listen(&station.runtime)?;
        station.runtime.block_on(self.bench.begin_run()).map_err(Failure::bench)?;
        let supply = self.profile.supply;
        let plan = procedure::Plan::new(&self.profile, &self.at.bench.ability(supply.maximum));
        let (step, zero) = (Steps::of(&plan, sweep.rate).height, plan.on_uncertainty);
        let claims = self.at.bench.claims(&supply);
        let used = BenchUsed {
            name: self.at.bench.name.clone(),
            instruments: who::instruments(self.at.bench, &self.bench),
            simulated: self.at.simulated.clone(),
        };
        station.log.start(self.at.subject(used)?, now())?;
        let cycle = Procedure::cycle(plan, sweep);
        let mut trace = guard::driven(cycle, &mut self.bench, claims, bar, stop, &station.runtime);
        if trace.ending.stop == Stop::Completed
            && let Err(fault) = station.runtime.block_on(self.bench.end_run())
        {
            trace.ending.stop = Stop::Fault(fault);
        }
        let output = trace.ending.output;
        station.log.end_work(output).map_err(|error| match output {
            OutputState::MayBeOn => Failure::output_may_be_on(error),
            OutputState::Off => error.into(),
        })?;
        if let Some(exit) = cut_short(&trace) {
            bar.finish();
            anstream::eprintln!("{}", self.at.told(&trace, &self.profile));
            return Ok(Ended::Stopped(exit));
        }
        let Measured { temperature, load } = self.at.measured;
        let cycle = read(&trace, order, temperature, load, step, zero);
        self.study.keep(&cycle, &trace)?;
        Ok(Ended::Kept(Box::new(cycle)))
    }
}

impl At<'_, '_> {
    fn subject(&self, bench: BenchUsed) -> Result<Subject, Failure> {
        let (ordered, keeping) = (self.ordered, &self.ordered.arguments.keeping);
        let board = keeping.board(&ordered.profile, &ordered.heading.plan.boards[self.place.board])?;
        Ok(Subject {
            board,
            profile: ProfileUsed {
                path: ordered.arguments.profile.display().to_string(),
                sha256: ordered.profile.hash.clone(),
                limits: ordered.profile.limits.clone(),
            },
            bench,
            operator: keeping.operator.clone(),
            occasion: Occasion::Production,
        })
    }

    /// Why a cycle was cut short: as a test of this board would say it.
    fn told(&self, trace: &Trace, profile: &Profile) -> String {
        if trace.ending.stop == Stop::Aborted {
            return "note: stopped on request".to_owned();
        }
        let board = &self.ordered.heading.plan.boards[self.place.board];
        let findings = guard::judged(trace, profile).findings;
        let why = findings.first().map_or("the cycle did not come to its end", |finding| &finding.text);
        format!("error: board {board}: {why}")
    }
}

/// The exit code of a cycle that did not come to its end, or left the output perhaps on.
fn cut_short(trace: &Trace) -> Option<Exit> {
    if trace.ending.output == OutputState::MayBeOn {
        anstream::eprintln!("{OUTPUT_MAY_BE_ON}");
        return Some(Exit::OutputMayBeOn);
    }
    match trace.ending.stop {
        Stop::Completed => None,
        Stop::Aborted => Some(Exit::Aborted),
        _ => Some(Exit::Invalid),
    }
}
