//! The relay node's board, part by part, on a bench drawn from a seed: a profile and a board for tests only.

use ebbmark::profile::Profile;
use ebbmark::sim::{BoardModel, PullUp, Setup, Switch, Wiring};
use ebbmark::units::{Amps, Farads, Ohms, Siemens, Volts};
use std::time::Duration;

const PROFILE: &str = include_str!("../data/profiles/relay-node.toml");

/// Trip at 3.00 V and re-enable at 3.15 V; 3.85 µA at 2.80 V while off.
pub(crate) const BOARD: BoardModel = BoardModel {
    trip: Volts(3.0),
    hysteresis: Volts(0.15),
    detect_delay: Duration::from_micros(300),
    release_delay: Duration::from_millis(100),
    noise: Volts(0.5e-3),
    noise_rate: 1000.0,
    minimum_operating: Volts(0.95),
    pull_up: Ohms(1e6),
    pull_up_conducts: PullUp::WhenOff,
    divider: Siemens(0.0),
    detector_current: Amps(1.0e-6),
    leakage: Amps(0.05e-6),
    leakage_conductance: Siemens(0.0),
    input_capacitance: Farads(10e-6),
    load: Ohms(10.0),
    load_capacitance: Farads(47e-6),
    gate_capacitance: Farads(0.0),
    latches: false,
    switch: Switch::Working,
    on_resistance: Ohms(0.06),
    deep_conduction: None,
};

/// Leads and contacts. With the 0.1 ohm of the ammeter's range they move the terminals by 36 mV when the board
/// switches; half of the least hysteresis is 45 mV.
const LEADS: Ohms = Ohms(0.02);

/// The board in order.
pub(crate) fn in_order(seed: u64) -> Setup {
    Setup::of(BOARD, Wiring::plain(LEADS), seed)
}

/// The relay node's profile with `limits` instead of its own of the same name, or besides them; an empty text takes one
/// away. `latched` among them is the profile's key of that name.
pub(crate) fn profile(limits: &[(&str, &str)]) -> Profile {
    let (head, own) = PROFILE.split_once("[limits]\n").unwrap_or((PROFILE, ""));
    let (keys, limits): (Vec<_>, Vec<_>) = limits.iter().partition(|(name, _)| *name == "latched");
    let keys: String = keys.iter().map(|(name, value)| format!("{name} = {value}\n")).collect();
    let replaced = |line: &&str| limits.iter().any(|(name, _)| line.starts_with(name));
    let mut lines: Vec<String> = own.lines().filter(|line| !replaced(line)).map(str::to_owned).collect();
    let others = limits.iter().filter(|(_, limit)| !limit.is_empty());
    lines.extend(others.map(|(name, limit)| format!("{name} = {limit}")));
    // A search needs both windows to look between.
    let searches = lines.iter().any(|line| line.starts_with("re_enable"));
    let head = if searches { head.to_owned() } else { head.replace("\"search\"", "\"staircase\"") };
    let text = format!("{keys}{head}[limits]\n{}\n", lines.join("\n"));
    Profile::read("relay-node.toml", &text).unwrap_or_else(|problems| panic!("{problems}"))
}
