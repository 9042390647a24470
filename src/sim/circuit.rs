//! The circuit from the supply's output to the load, solved once for a state of the board.
//!
//! Every part is straight between a few knots, so the whole is: the voltage at the terminals, the current and the
//! voltage at the load are straight lines in the voltage the supply regulates to, piece by piece. That makes every
//! instant exact without small steps.

use super::board::State;
use super::{BoardModel, Feed, Lockout, Polarity, Switch, Wiring, gate};

/// Forward voltage of the body diode, V; 0.8 V to 0.9 V is common practice for a power transistor.
pub(super) const BODY_DIODE: f64 = 0.8;

/// The most knots a board and its wiring have.
const MOST_KNOTS: usize = 7 + Lockout::KNOTS;

/// The most pieces a circuit has: one up to each knot, the open end, and the current limit.
const MOST_PIECES: usize = MOST_KNOTS + 2;

/// All that a solution depends on besides the board and its wiring.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Surroundings {
    /// What the board and its load are doing.
    pub(super) state: State,
    /// Resistance of leads and ammeter, ohm.
    pub(super) series: f64,
    /// Conductance of the voltmeter at the terminals, S.
    pub(super) voltmeter: f64,
    /// Conductance of the voltmeter at the load, S.
    pub(super) load_voltmeter: f64,
    /// The current at which the supply gives way, A; infinite while its output is off.
    pub(super) limit: f64,
}

/// A straight line `slope * e + offset`.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(super) struct Line {
    pub(super) slope: f64,
    pub(super) offset: f64,
}

impl Line {
    pub(super) fn at(self, e: f64) -> f64 {
        self.slope * e + self.offset
    }

    fn through(from: (f64, f64), to: (f64, f64)) -> Self {
        let slope = (to.1 - from.1) / (to.0 - from.0);
        Self { slope, offset: from.1 - slope * from.0 }
    }

    fn level(offset: f64) -> Self {
        Self { slope: 0.0, offset }
    }
}

/// The circuit's answer to the regulated voltage `e` while `e` is at most `upto`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Piece {
    /// Upper end in `e`, V.
    pub(super) upto: f64,
    /// Voltage at the board's terminals, V.
    pub(super) terminals: Line,
    /// Current through the ammeter, A.
    pub(super) current: Line,
    /// Voltage at the load once its capacitor has settled, V.
    pub(super) load: Line,
    /// Whether the supply limits the current here.
    pub(super) limited: bool,
}

/// A solved circuit: pieces in rising order, the last without end.
#[derive(Clone, Debug)]
pub(super) struct Circuit {
    pieces: [Piece; MOST_PIECES],
    count: usize,
}

impl Circuit {
    /// Solves the circuit.
    pub(super) fn solve(board: &BoardModel, wiring: &Wiring, around: &Surroundings) -> Self {
        let knots = knots(board, wiring);
        let open_end = Piece {
            upto: f64::INFINITY,
            terminals: Line::default(),
            current: Line::default(),
            load: Line::default(),
            limited: false,
        };
        let mut circuit = Self { pieces: [open_end; MOST_PIECES], count: 0 };
        let point = |volts: f64| {
            let branches = board.branches(wiring, around.state, around.load_voltmeter, volts);
            let current = branches.beside + branches.load_current + volts * around.voltmeter;
            Point { volts, current, load: branches.load_volts, e: volts + current * around.series }
        };
        let mut from = point(0.0);
        let mut reached = from.e;
        for knot in knots.into_iter().take_while(|knot| knot.is_finite()).chain([f64::INFINITY]) {
            // The open end is as straight as its first volt.
            let to = point(if knot.is_finite() { knot } else { from.volts + 1.0 });
            if knot.is_finite() && to.e <= reached {
                // A falling characteristic behind a large resistance: the state in between cannot last, so that the
                // terminals jump to where the characteristic has risen as far again.
                from = to;
                continue;
            }
            let mut piece = Piece {
                upto: if knot.is_finite() { to.e } else { f64::INFINITY },
                terminals: Line::through((from.e, from.volts), (to.e, to.volts)),
                current: Line::through((from.e, from.current), (to.e, to.current)),
                load: Line::through((from.e, from.load), (to.e, to.load)),
                limited: false,
            };
            let gives_way = (around.limit - piece.current.offset) / piece.current.slope;
            let limited = piece.current.slope > 0.0 && gives_way < piece.upto;
            if limited {
                piece.upto = gives_way.max(reached);
            }
            circuit.push(piece);
            if limited {
                circuit.push(Piece {
                    upto: f64::INFINITY,
                    terminals: Line::level(piece.terminals.at(piece.upto)),
                    current: Line::level(around.limit),
                    load: Line::level(piece.load.at(piece.upto)),
                    limited: true,
                });
                break;
            }
            reached = to.e;
            from = to;
        }
        circuit
    }

    fn push(&mut self, piece: Piece) {
        if let Some(place) = self.pieces.get_mut(self.count) {
            *place = piece;
            self.count += 1;
        }
    }

    /// The piece at `e`, with its lower end.
    pub(super) fn piece_at(&self, e: f64) -> (&Piece, f64) {
        let last = self.count.saturating_sub(1);
        let index = self.pieces[..last].iter().position(|piece| e <= piece.upto).unwrap_or(last);
        let lower = if index == 0 { f64::NEG_INFINITY } else { self.pieces[index - 1].upto };
        (&self.pieces[index], lower)
    }
}

/// One point of the characteristic.
struct Point {
    volts: f64,
    current: f64,
    load: f64,
    e: f64,
}

/// Voltages at the terminals where a characteristic may bend, rising; infinite behind the last.
fn knots(board: &BoardModel, wiring: &Wiring) -> [f64; MOST_KNOTS] {
    let none = f64::INFINITY;
    let mut knots = [none; MOST_KNOTS];
    knots[0] = if wiring.polarity == Polarity::Reversed { BODY_DIODE } else { board.lowest_operating() };
    knots[1] = wiring.feed.map_or(none, Feed::open_voltage);
    if wiring.polarity == Polarity::Right {
        if let Some(deep) = board.deep_conduction {
            knots[2..5].copy_from_slice(&[deep.from.0, (deep.from.0 + deep.to.0) / 2.0, deep.to.0]);
        }
        if board.switch == Switch::GateTied {
            knots[5..7].copy_from_slice(&gate::TIED);
        }
        if let Some(lockout) = wiring.lockout() {
            knots[7..].copy_from_slice(&lockout.knots());
        }
    }
    // The usual board has one knot, and it stands first.
    if knots[1..].iter().any(|knot| *knot < none) {
        knots.sort_by(f64::total_cmp);
    }
    knots
}
