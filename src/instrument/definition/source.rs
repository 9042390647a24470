//! The part of a definition that describes a supply: its range, its claims and its commands.

use super::check::{above_zero, not_negative};
use super::command::{self, Template};
use super::validity::{PerDegree, Validity};
use crate::document::{At, Table};
use crate::trace::{Accuracy, Slew};
use crate::units::{Amps, Quantity, Volts};
use std::time::Duration;

/// A supply that can be set in voltage and limited in current.
#[derive(Clone, Debug, PartialEq)]
pub struct Source {
    /// Voltages it can be set to.
    pub voltage: Span<Volts>,
    /// Smallest step of the voltage.
    pub set_step: Volts,
    /// Current limits it can be set to.
    pub current: Span<Amps>,
    /// Over-voltage protection levels it can be set to.
    pub over_voltage: Span<Volts>,
    /// Error limit of the set voltage at its terminals.
    pub programming: Accuracy,
    /// What each degree outside adds to it.
    pub per_degree: PerDegree,
    /// When it holds.
    pub valid: Validity,
    /// Time after a small step until the output has settled, board on.
    pub settle: Duration,
    /// How much longer a step takes the farther it goes.
    pub slew: Slew,
    /// How close to its final value a voltage counts as settled.
    pub settled_within: Volts,
    /// Share of an upward step by which the output may overshoot; 0 where nothing is said.
    pub overshoot: f64,
    /// Commands sent once after [`super::Definition::setup`], in order.
    pub setup: Vec<String>,
    /// What to send for each action.
    pub commands: SourceCommands,
}

impl Source {
    pub(super) fn read(mut table: Table<'_, '_>) -> Option<Self> {
        let voltage = table.table("voltage").and_then(|mut voltage| {
            let step = voltage.quantity::<Volts>("step");
            above_zero(&step, &voltage);
            Some((Span::read(&mut voltage)?, step?.value))
        });
        let current = table.table("current").and_then(|mut current| Span::read(&mut current));
        let over_voltage = table.table("over_voltage").and_then(|mut level| Span::read(&mut level));
        let accuracy = table.table("accuracy").and_then(read_accuracy);
        let valid = Validity::read(&mut table);
        if valid.temperature.is_none() && accuracy.is_some_and(|(.., per_degree)| !per_degree.is_nothing()) {
            table.problem_here("what a degree adds needs [source.valid] with \"from\" and \"to\"".to_owned());
        }
        let settle = table.duration("settle");
        let up = table.optional_duration("settle_per_volt_up");
        let down = table.optional_duration("settle_per_volt_down");
        let settled_within = table.quantity("settled_within");
        above_zero(&settled_within, &table);
        let overshoot = table.optional_fraction("overshoot");
        not_negative(&overshoot, &table);
        let setup = command::commands(&mut table, "setup");
        let commands = table.table("commands").and_then(SourceCommands::read);
        let (voltage, set_step) = voltage?;
        let (relative, absolute, per_degree) = accuracy?;
        Some(Self {
            voltage,
            set_step,
            current: current?,
            over_voltage: over_voltage?,
            programming: Accuracy { relative, absolute: absolute.0, resolution: set_step.0 },
            per_degree,
            valid,
            settle: settle?.value,
            slew: Slew {
                up: up.map(|up| up.value).unwrap_or_default(),
                down: down.map(|down| down.value).unwrap_or_default(),
            },
            settled_within: settled_within?.value,
            overshoot: overshoot.map_or(0.0, |share| share.value),
            setup: setup?,
            commands: commands?,
        })
    }
}

/// Share of the setting, the fixed part, and what a degree adds to both.
fn read_accuracy(mut table: Table<'_, '_>) -> Option<(f64, Volts, PerDegree)> {
    let of_setting = table.fraction("of_setting");
    let fixed = table.quantity::<Volts>("fixed");
    not_negative(&of_setting, &table);
    not_negative(&fixed.as_ref().map(|fixed| fixed.with(fixed.value.0)), &table);
    let per_degree = PerDegree::read::<Volts>(&mut table, "of_setting", None);
    Some((of_setting?.value, fixed?.value, per_degree))
}

/// Lowest and highest value of a setting, both allowed.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Span<Q> {
    /// Lowest.
    pub min: Q,
    /// Highest.
    pub max: Q,
}

impl<Q: Copy + PartialOrd> Span<Q> {
    /// True when `value` can be set. False for NaN.
    pub fn holds(&self, value: Q) -> bool {
        self.min <= value && value <= self.max
    }
}

impl<Q: Quantity> Span<Q> {
    fn read(table: &mut Table<'_, '_>) -> Option<Self> {
        let (min, max): (Option<At<Q>>, Option<At<Q>>) = (table.quantity("min"), table.quantity("max"));
        let (min, max) = (min?, max?);
        if min.value.si() < 0.0 {
            table.problem(&min, "below zero; boards are supplied with positive voltage and current only");
        }
        if min.value.si() >= max.value.si() {
            table.problem(&min, &format!("not below {max}"));
        }
        Some(Self { min: min.value, max: max.value })
    }
}

/// What to send to a supply. Questions end in `?` and are answered by one line.
#[derive(Clone, Debug, PartialEq)]
pub struct SourceCommands {
    /// Sets the voltage.
    pub set_voltage: Template,
    /// Asks for the set voltage.
    pub ask_voltage: String,
    /// Sets the current limit.
    pub set_current: Template,
    /// Asks for the current limit.
    pub ask_current: String,
    /// Sets the over-voltage protection level.
    pub set_over_voltage: Template,
    /// Asks for the over-voltage protection level.
    pub ask_over_voltage: String,
    /// Switches the output on.
    pub output_on: String,
    /// Switches the output off.
    pub output_off: String,
    /// Asks whether the output is on: `1` or `0`.
    pub ask_output: String,
    /// Asks whether the current limit is active; `None` when the supply cannot tell.
    pub ask_limited: Option<LimitedQuery>,
}

impl SourceCommands {
    fn read(mut table: Table<'_, '_>) -> Option<Self> {
        let set_voltage = command::template(&mut table, "set_voltage");
        let ask_voltage = command::question(&mut table, "ask_voltage");
        let set_current = command::template(&mut table, "set_current");
        let ask_current = command::question(&mut table, "ask_current");
        let set_over_voltage = command::template(&mut table, "set_over_voltage");
        let ask_over_voltage = command::question(&mut table, "ask_over_voltage");
        let output_on = command::command(&mut table, "output_on");
        let output_off = command::command(&mut table, "output_off");
        let ask_output = command::question(&mut table, "ask_output");
        let ask_limited = LimitedQuery::read(&mut table);
        Some(Self {
            set_voltage: set_voltage?,
            ask_voltage: ask_voltage?,
            set_current: set_current?,
            ask_current: ask_current?,
            set_over_voltage: set_over_voltage?,
            ask_over_voltage: ask_over_voltage?,
            output_on: output_on?,
            output_off: output_off?,
            ask_output: ask_output?,
            ask_limited: ask_limited?,
        })
    }
}

/// How a supply is asked whether it limits the current.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LimitedQuery {
    /// The question; the reply is a whole number, a register.
    pub query: String,
    /// The current limit is active when any of these bits is set. Never zero.
    pub mask: u32,
    /// Asks for the register that keeps the same bits from the moment they are set until it is read; `None` when the
    /// supply has none.
    pub since: Option<String>,
}

impl LimitedQuery {
    /// `Some(None)` when the supply cannot tell, `None` when a problem was noted.
    fn read(table: &mut Table<'_, '_>) -> Option<Option<Self>> {
        let keys = ["ask_limited", "limited_mask", "ask_was_limited"];
        if !keys.iter().any(|key| table.has(key)) {
            table.optional_text("ask_limited");
            table.optional_integer("limited_mask");
            table.optional_text("ask_was_limited");
            return Some(None);
        }
        let query = command::question(table, "ask_limited");
        let since = if table.has("ask_was_limited") {
            Some(command::question(table, "ask_was_limited"))
        } else {
            table.optional_text("ask_was_limited");
            None
        };
        let mask = table.integer("limited_mask")?;
        let bits = u32::try_from(mask.value).ok().filter(|bits| (1..=0x7FFF).contains(bits));
        if bits.is_none() {
            table.problem(&mask, "wanted the bits of a status register, 1 to 32767");
        }
        let since = since.map_or(Some(None), |since| since.map(Some));
        Some(Some(Self { query: query?, mask: bits?, since: since? }))
    }

    /// Whether the register read says that the current limit is active.
    pub fn limited(&self, register: u32) -> bool {
        register & self.mask != 0
    }
}

#[cfg(test)]
mod tests {
    use super::super::sample::{good, problems};
    use super::super::{Definition, builtin};
    use super::*;
    use insta::assert_snapshot as says;

    const SUPPLY: &str = "programmable-supply";

    #[test]
    fn the_supply_is_read_as_written() {
        let source = good(SUPPLY).source.expect("it is a source");
        assert_eq!(source.voltage, Span { min: Volts(0.0), max: Volts(32.0) });
        assert_eq!(source.programming, Accuracy { relative: 0.0005, absolute: 0.005, resolution: 0.001 });
        assert_eq!(source.commands.set_voltage.with(7.6), "VOLT 7.6");
        let limited = source.commands.ask_limited.expect("it can tell");
        assert!(limited.limited(0b1001) && !limited.limited(0b1000));
    }

    #[test]
    fn a_slew_is_read_where_it_is_stated() {
        assert!(good(SUPPLY).source.expect("it is a source").slew.is_none());
        let text = builtin(SUPPLY)
            .expect("it comes with the program")
            .replace("# settle_per_volt", "settle_per_volt");
        let definition = Definition::read("d.toml", &text).unwrap_or_else(|problems| panic!("{problems}"));
        let slew = definition.source.expect("it is a source").slew;
        assert_eq!(slew, Slew { up: Duration::from_millis(5), down: Duration::from_millis(20) });
    }

    #[test]
    fn a_command_that_is_missing_or_of_the_wrong_sort_is_named() {
        says!(problems(SUPPLY, &[("set_over_voltage = \"VOLT:PROT {}\"\n", ""), ("ask_output = \"OUTP?\"", "")]), @r#"
        d.toml:47:1: [source.commands] has no key "set_over_voltage"; wanted a command such as "VOLT {}"
        d.toml:47:1: [source.commands] has no key "ask_output"; wanted a question such as "VOLT?"
        "#);
        let changes = [
            ("\"*CLS\"", "\"*CLS;*RST\""),
            ("\"VOLT {}\"", "\"VOLT\""),
            ("\"VOLT?\"", "\"VOLT\""),
            ("\"OUTP OFF\"", "\"OUTP?\""),
        ];
        says!(problems(SUPPLY, &changes), @r#"
        d.toml:16:18: setup = "*CLS;*RST": wanted one command in printable ASCII, without ";" and without line end
        d.toml:48:15: source.commands.set_voltage = "VOLT": wanted a command with one "{}" where the number goes, such as "VOLT {}"
        d.toml:49:15: source.commands.ask_voltage = "VOLT": not a question; wanted one with "?", such as "VOLT?"
        d.toml:55:14: source.commands.output_off = "OUTP?": a question, whose reply nobody would read; wanted a command without "?"
        "#);
    }

    #[test]
    fn a_mask_without_bits_or_without_question_is_refused() {
        says!(problems(SUPPLY, &[("limited_mask = 1", "limited_mask = 0")]),
            @"d.toml:58:16: source.commands.limited_mask = 0: wanted the bits of a status register, 1 to 32767");
        says!(problems(SUPPLY, &[("limited_mask = 1", "")]),
            @r#"d.toml:47:1: [source.commands] has no key "limited_mask"; wanted a whole number"#);
    }

    #[test]
    fn ranges_and_claims_that_cannot_be_are_refused() {
        says!(problems(SUPPLY, &[("\"0 V\", max", "\"40 V\", max"), ("\"1 mV\"", "\"0 mV\""), ("\"1 mA\"", "\"-1 mA\"")]), @r#"
        d.toml:38:19: source.voltage.min = "40 V": not below source.voltage.max = "32 V"
        d.toml:38:48: source.voltage.step = "0 mV": not above zero
        d.toml:39:19: source.current.min = "-1 mA": below zero; boards are supplied with positive voltage and current only
        "#);
        says!(problems(SUPPLY, &[("\"0.05 %\"", "\"-0.05 %\""), ("\"5 mV\"", "\"-5 mV\"")]), @r#"
        d.toml:41:27: source.accuracy.of_setting = "-0.05 %": below zero
        d.toml:41:46: source.accuracy.fixed = "-5 mV": below zero
        "#);
    }
}
