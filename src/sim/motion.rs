//! Supply, circuit and detector moving together.
//!
//! Between two events everything is a straight line or an exponential, so time jumps from event to event: an edge of
//! the circuit or the detector passed, a delay that ends, an output that has arrived. Small steps are needed only
//! while the load's capacitor charges against the current limit and while noise can cross a moving threshold.

use super::Setup;
use super::board::State;
use super::circuit::{Circuit, Piece, Surroundings};
use super::contact::Contact;
use super::course::Course;
use super::detector::Detector;
use super::lockout::LoadState;
use super::output::{Output, STILL};
use super::passing::{crossing, nearest_passed};

/// How far the supply's voltage may move, V, while the load's capacitor is charged as if it stood still: a thousandth of
/// a charge.
const CHARGE_MOVE: f64 = 1e-3;

/// Where the limited current could lift the load to this multiple of the supply's voltage, all of it goes into the
/// capacitor.
const NO_LOAD: f64 = 1e6;

/// Parts of the detector's noise the voltage may move in one step while noise matters.
const NOISE_STEP: f64 = 0.5;

/// Integrals over time since the bench was switched on.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(super) struct Sums {
    /// Of the voltage at the board's terminals, V s.
    pub(super) terminals: f64,
    /// Of the current through the ammeter, A s.
    pub(super) current: f64,
    /// Of the voltage at the load, V s.
    pub(super) load: f64,
}

/// The present values of what [`Sums`] integrates.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Instant {
    /// Voltage at the board's terminals, V.
    pub(super) terminals: f64,
    /// Current through the ammeter, A.
    pub(super) current: f64,
    /// Voltage at the load, V.
    pub(super) load: f64,
}

/// Everything that moves.
#[derive(Clone, Debug)]
pub(super) struct Motion {
    now: f64,
    output: Output,
    detector: Detector,
    circuit: Circuit,
    surroundings: Surroundings,
    burden: f64,
    contact: Option<Contact>,
    load: LoadState,
    limit: f64,
    over_voltage: f64,
    over_voltage_tripped: bool,
    load_volts: f64,
    load_resistance: f64,
    charging: bool,
    was_limited: bool,
    sums: Sums,
}

impl Motion {
    /// A bench at rest with its output off.
    pub(super) fn new(setup: &Setup, burden: f64) -> Self {
        let load = LoadState::new(setup.wiring.lockout());
        let surroundings = Surroundings {
            state: State { on: false, load_runs: load.running() },
            series: setup.wiring.lead_resistance.0 + burden,
            voltmeter: setup.voltmeter.input_conductance().0,
            load_voltmeter: setup.load_voltmeter.input_conductance().0,
            limit: f64::INFINITY,
        };
        Self {
            now: 0.0,
            output: Output::new(&setup.supply, setup.board.input_capacitance.0),
            detector: Detector::new(&setup.board, setup.ripple, setup.seed),
            circuit: Circuit::solve(&setup.board, &setup.wiring, &surroundings),
            surroundings,
            burden,
            load,
            contact: setup.wiring.bad_contact.map(|bad| Contact::new(bad, setup.seed)),
            limit: setup.supply.max_current.0,
            over_voltage: f64::INFINITY,
            over_voltage_tripped: false,
            load_volts: 0.0,
            load_resistance: setup.board.load_resistance(&setup.wiring, surroundings.load_voltmeter),
            charging: false,
            was_limited: false,
            sums: Sums::default(),
        }
    }

    /// Lets time pass until `until`, in seconds.
    pub(super) fn advance_to(&mut self, setup: &Setup, until: f64) {
        while self.now < until {
            self.move_on(setup, until);
            self.react(setup);
        }
    }

    /// Sends the output to a true voltage.
    pub(super) fn head_for(&mut self, setup: &Setup, goal: f64) {
        self.output.head_for(goal);
        self.react(setup);
    }

    /// Switches the output; switching on forgets an over-voltage trip.
    pub(super) fn switch_output(&mut self, setup: &Setup, on: bool) {
        self.output.switch(on);
        self.over_voltage_tripped &= !on;
        self.solve(setup);
    }

    /// Sets the current limit.
    pub(super) fn limit_current(&mut self, setup: &Setup, limit: f64) {
        self.limit = limit;
        self.solve(setup);
    }

    /// Sets the over-voltage level.
    pub(super) fn protect(&mut self, setup: &Setup, level: f64) {
        self.over_voltage = level;
        self.react(setup);
    }

    /// Puts another ammeter resistance into the line.
    pub(super) fn put_in_line(&mut self, setup: &Setup, burden: f64) {
        self.burden = burden;
        self.measure_line(setup);
    }

    /// Lets output and detector stand as somebody has left them.
    pub(super) fn left_as(&mut self, setup: &Setup, board_on: bool) {
        self.output.arrive();
        self.detector.start_as(board_on);
        self.solve(setup);
    }

    /// Adds up what lies between supply and board, and solves the circuit anew.
    fn measure_line(&mut self, setup: &Setup) {
        let contact = self.contact.as_ref().map_or(0.0, Contact::resistance);
        self.surroundings.series = setup.wiring.lead_resistance.0 + self.burden + contact;
        self.solve(setup);
    }

    pub(super) fn output_on(&self) -> bool {
        self.output.on
    }

    pub(super) fn over_voltage_tripped(&self) -> bool {
        self.over_voltage_tripped
    }

    /// Whether the supply limits the current.
    pub(super) fn limited(&self) -> bool {
        self.charging || self.piece().limited
    }

    /// Whether it has done so since this was last asked.
    pub(super) fn take_was_limited(&mut self) -> bool {
        std::mem::take(&mut self.was_limited) || self.limited()
    }

    /// Whether the detector says that the board is on.
    pub(super) fn board_on(&self) -> bool {
        self.detector.on()
    }

    pub(super) fn sums(&self) -> Sums {
        self.sums
    }

    /// Resistance between the supply's terminals and the board's.
    pub(super) fn series_resistance(&self) -> f64 {
        self.surroundings.series
    }

    /// What there is at this moment.
    pub(super) fn instant(&self, setup: &Setup) -> Instant {
        let (piece, e) = (self.piece(), self.output.volts);
        if self.charging {
            let terminals = self.load_volts + self.limit * setup.board.on_resistance.0;
            return Instant { terminals, current: self.limit, load: self.load_volts };
        }
        Instant { terminals: piece.terminals.at(e), current: piece.current.at(e), load: self.load_volts }
    }

    fn piece(&self) -> &Piece {
        self.circuit.piece_at(self.output.volts).0
    }

    /// Solves the circuit for the present state.
    fn solve(&mut self, setup: &Setup) {
        self.surroundings.state = State { on: self.detector.on(), load_runs: self.load.running() };
        self.surroundings.limit = if self.output.on { self.limit } else { f64::INFINITY };
        self.circuit = Circuit::solve(&setup.board, &setup.wiring, &self.surroundings);
        self.charging = setup.board.closed(self.detector.on()) && self.charge_is_limited(setup);
        self.react(setup);
    }

    /// Whether an empty load capacitor would take more than the current limit.
    fn charge_is_limited(&self, setup: &Setup) -> bool {
        let resistance = self.surroundings.series + setup.board.on_resistance.0;
        let full = self.limit * self.load_resistance * (1.0 - 1e-6);
        let forward = setup.wiring.polarity == super::Polarity::Right;
        forward
            && self.output.on
            && self.load_volts < full
            && self.output.volts - self.load_volts > self.limit * resistance
    }

    /// Lets output and detector react to the present voltages.
    fn react(&mut self, setup: &Setup) {
        self.output.look();
        if self.output.on && self.output.volts > self.over_voltage && !self.limited() {
            self.over_voltage_tripped = true;
            self.output.switch(false);
            return self.solve(setup);
        }
        if self.detector.change_if_due(self.now) {
            return self.solve(setup);
        }
        if self.contact.as_mut().is_some_and(|contact| contact.change_if_due(self.now)) {
            return self.measure_line(setup);
        }
        if !self.charging && setup.board.closed(self.detector.on()) {
            self.load_volts = self.piece().load.at(self.output.volts);
        }
        if self.load.change_at(self.now, self.load_volts) {
            return self.solve(setup);
        }
        self.detector.look(self.now, self.instant(setup).terminals);
    }

    /// One stretch without events, at most until `until`.
    fn move_on(&mut self, setup: &Setup, until: f64) {
        let from = self.output.volts;
        let (piece, lower) = self.circuit.piece_at(from);
        let piece = *piece;
        self.was_limited |= self.charging || piece.limited;
        let (course, end) = self.output.course(&piece);
        let mut time = until - self.now;
        if let Some(due) = self.detector.due() {
            time = time.min((due - self.now).max(0.0));
        }
        if let Some(contact) = &self.contact {
            time = time.min((contact.due() - self.now).max(0.0));
        }
        if let Some(rested) = self.load.rested(self.now) {
            time = time.min(rested - self.now);
        }
        if self.charging {
            return self.charge(setup, course, time);
        }
        let crossings = self.detector.noise_crossings(piece.terminals.at(from));
        if crossings > 0.0 {
            let move_time = NOISE_STEP * setup.board.noise.0 / course.rate(from).abs();
            time = time.min(move_time).min(self.detector.time_to_crossing(crossings));
        }
        let mut to = course.after(from, time);
        let [near, far] = self.detector.edges().map(|volts| crossing(&piece.terminals, volts));
        let edges = [Some(piece.upto), Some(lower), end, near, far, Some(self.over_voltage)];
        let mut passed = nearest_passed(from, to, edges);
        if let Some(volts) = self.load.edge().filter(|_| setup.board.closed(self.detector.on())) {
            let load = crossing(&piece.load, volts);
            passed = nearest_passed(from, passed.unwrap_or(to), [load]).or(passed);
        }
        if let Some(beyond) = passed {
            time = time.min(course.time_between(from, beyond).max(0.0));
            to = beyond;
        }
        self.sum_up(setup, &piece, course, from, to, time);
        self.output.volts = to;
        self.now += time;
        self.detector.endure(self.now, crossings, time);
    }

    fn sum_up(&mut self, setup: &Setup, piece: &Piece, course: Course, from: f64, to: f64, time: f64) {
        let area = course.area(from, to, time);
        self.sums.terminals += piece.terminals.slope * area + piece.terminals.offset * time;
        self.sums.current += piece.current.slope * area + piece.current.offset * time;
        let settled_area = piece.load.slope * area + piece.load.offset * time;
        if setup.board.closed(self.detector.on()) {
            self.sums.load += settled_area;
            self.load_volts = piece.load.at(to);
            return;
        }
        let settled = piece.load.at(to);
        let excess = self.load_volts - settled;
        if excess.abs() < STILL {
            self.sums.load += settled_area;
            self.load_volts = settled;
        } else {
            let time_constant = self.load_resistance * setup.board.load_capacitance.0.max(1e-15);
            let left = excess * (-time / time_constant).exp();
            self.sums.load += settled_area + (excess - left) * time_constant;
            self.load_volts = settled + left;
        }
    }

    /// A stretch of charging the load's capacitor with the limited current: until it is charged as far as the supply's
    /// voltage allows, the terminals pass an edge of the detector, or the supply's voltage has moved on.
    fn charge(&mut self, setup: &Setup, supply: Course, most: f64) {
        let capacitance = setup.board.load_capacitance.0.max(1e-15);
        let level = self.limit * self.load_resistance;
        let course = if level > NO_LOAD * self.output.volts {
            Course::Line { rate: self.limit / capacitance }
        } else {
            Course::Towards { level, time_constant: self.load_resistance * capacitance }
        };
        let switch_drop = self.limit * setup.board.on_resistance.0;
        let mut time = most.min(CHARGE_MOVE / supply.rate(self.output.volts).abs());
        let from = self.load_volts;
        let mut to = course.after(from, time);
        let charged = self.output.volts - self.limit * self.surroundings.series - switch_drop;
        let [near, far] = self.detector.edges().map(|volts| Some(volts - switch_drop));
        if let Some(beyond) = nearest_passed(from, to, [Some(charged), near, far]) {
            time = time.min(course.time_between(from, beyond).max(0.0));
            to = beyond;
        }
        let area = course.area(from, to, time);
        self.sums.load += area;
        self.sums.terminals += area + switch_drop * time;
        self.sums.current += self.limit * time;
        self.load_volts = to;
        self.output.volts = supply.after(self.output.volts, time);
        self.now += time;
        self.charging = self.charge_is_limited(setup);
    }
}
