//! Bench test logger and pass/fail verifier for boards with an undervoltage cut-off.
//!
//! The rooms, in the order of a run:
//!
//! - [`profile`]: what a board must do, read from a file and checked
//! - [`limits`]: what limits follow from what a board is made of (pure)
//! - [`procedure`]: what to do next; one answer in, one action out (pure)
//! - [`instrument`]: roles, definitions and bench files; what the instruments can do and what to send them
//! - [`mod@bench`]: carries the actions out, over serial ports or in virtual time
//! - [`trace`]: what was measured
//! - [`analysis`]: from a trace to quantities with uncertainty, and findings (pure)
//! - [`verdict`]: quantities and limits to decisions and one outcome (pure)
//! - [`verification`]: is the bench itself in order? rest, zeros, leads, reference boards (pure)
//! - [`sim`]: a board's physics on a bench, in simulated time
//! - [`statistics`]: published methods on plain numbers (pure)
//! - [`study`]: what many cycles of few boards say about a design (pure)
//! - [`record`]: what is kept of a run, and the append-only log that keeps it
//! - [`report`]: what a run says, for people and for programs
//! - [`cli`]: the commands
//!
//! [`units`], [`document`] and [`clock`] serve them all: quantities with units, files read with every problem at its
//! place, and the one place where the time of a run is asked for.

pub mod analysis;
pub mod bench;
pub mod cli;
pub mod clock;
pub mod document;
pub mod instrument;
pub mod limits;
pub mod procedure;
pub mod profile;
pub mod record;
pub mod report;
pub mod sim;
pub mod statistics;
pub mod study;
pub mod trace;
pub mod units;
pub mod verdict;
pub mod verification;
