//! Studies in virtual time: estimates against what the simulated boards really are, interruptions, and what is shown.
#![expect(clippy::expect_used, reason = "a test fails by panicking")]

mod resumed;
mod safe;
mod shown;
mod truth;

use ebbmark::bench::{VirtualBench, drive, run_ready};
use ebbmark::procedure::{self, Procedure, Steps, Sweep};
use ebbmark::profile::Profile;
use ebbmark::sim::{Condition, Faults, Setup};
use ebbmark::study::{Cycle, Order, Plan, Question, read, window};
use ebbmark::trace::Trace;
use ebbmark::units::{Ohms, Volts};
use rand::{RngExt, SeedableRng};
use rand_chacha::ChaCha8Rng;
use rand_distr::StandardNormal;

const QUESTION: Question = Question { content: 0.99, confidence: 0.95 };

/// Boards drawn from a seed, each with a jitter of its own making: its thresholds are drawn anew for every cycle.
#[derive(Clone, Copy)]
struct Boards {
    seed: u64,
    jitter: Volts,
    change: fn(&mut Setup),
}

impl Boards {
    /// Without jitter and without noise.
    fn still(seed: u64) -> Self {
        Self { seed, jitter: Volts::ZERO, change: |_| {} }
    }

    /// The board of an order before its jitter.
    fn setup(&self, profile: &Profile, plan: &Plan, order: Order) -> Setup {
        let mut setup = Setup::new(profile, Condition::Good, self.seed + 1000 * order.board as u64);
        setup.board.noise = Volts::ZERO;
        (self.change)(&mut setup);
        match plan.temperatures[order.temperature] {
            Some(degrees) => setup.at(degrees),
            None => setup,
        }
    }

    /// One cycle, whatever was measured before; the same order gives the same cycle.
    fn cycle(
        &self,
        profile: &Profile,
        plan: &Plan,
        kept: &[Cycle],
        order: Order,
        faults: Faults,
    ) -> (Cycle, Trace, bool) {
        let mut setup = self.setup(profile, plan, order);
        let number = u64::from(order.cycle) * 64 + order.rate as u64 * 8 + order.temperature as u64;
        let mut draw = ChaCha8Rng::seed_from_u64(setup.seed.wrapping_mul(0x9e37_79b9).wrapping_add(number));
        let deviation: f64 = draw.sample(StandardNormal);
        setup.board.trip += self.jitter * deviation;
        setup.seed = draw.random();
        let (ability, claims) = (setup.ability(), setup.claims());
        let mut bench = VirtualBench::new(&setup, ability).with_faults(faults);
        let run = procedure::Plan::new(profile, bench.ability());
        let sweep = Sweep { window: window(kept, order.place()), rate: plan.rates[order.rate] };
        let (step, zero) = (Steps::of(&run, sweep.rate).height, run.on_uncertainty);
        let cycle = Procedure::cycle(run, sweep);
        let trace = run_ready(drive(cycle, &mut bench, claims, &mut (), std::future::pending()));
        let temperature = plan.temperatures[order.temperature];
        let read = read(&trace, order, temperature, plan.loads[order.load], step, zero);
        (read, trace, bench.output_is_on())
    }

    /// All cycles of a plan.
    fn study(&self, profile: &Profile, plan: &Plan) -> Vec<Cycle> {
        let mut kept = Vec::new();
        for order in plan.orders() {
            let (cycle, _, is_on) = self.cycle(profile, plan, &kept, order, Faults::none());
            assert!(!is_on, "seed {}: output on after {order:?}", self.seed);
            kept.push(cycle);
        }
        kept
    }
}

/// One board at rest, as it is.
fn plan(cycles: u32) -> Plan {
    Plan {
        boards: vec!["RN000001".to_owned()],
        temperatures: vec![None],
        loads: vec![Ohms(55.0)],
        rates: vec![None],
        cycles,
    }
}
