//! Integration tests, a module per theme.

mod budgets;
mod cases;
mod circuit;
#[cfg(unix)]
mod cli;
mod conditions;
mod coverage;
mod deep_and_band;
#[cfg(unix)]
mod definitions_on_simulation;
mod delays;
mod everything;
mod known_resistor;
mod latched;
mod limits;
mod live_circuit;
mod log;
mod nine_volt;
mod off_state;
#[cfg(unix)]
mod outside_parser;
mod ramps;
mod relay;
mod report;
mod river;
mod run;
#[cfg(unix)]
mod run_over_serial;
mod run_sample;
mod runs;
#[cfg(unix)]
mod scripted;
mod search;
#[cfg(unix)]
mod serial_bench;
#[cfg(unix)]
mod session;
mod sim;
#[cfg(unix)]
mod simulated_bench;
mod slow_supply;
mod staircase;
mod study;
#[cfg(unix)]
mod switching_off;
mod virtual_run;
