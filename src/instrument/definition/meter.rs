//! The part of a definition that describes a meter: its ranges with the maker's claims, and its commands.

use super::check::{above_zero, not_negative};
use super::command::{self, Template};
use super::validity::{PerDegree, Validity};
use crate::document::{At, Table};
use crate::trace::{Accuracy, RangeAccuracy};
use crate::units::{Amps, Ohms, Quantity, Unit, Volts};
use std::time::Duration;

/// A meter that reads current.
pub type Ammeter = Meter<Amps>;

/// A meter that reads voltage.
pub type Voltmeter = Meter<Volts>;

/// A meter with fixed ranges.
#[derive(Clone, Debug, PartialEq)]
pub struct Meter<Q> {
    /// Ranges, smallest first; never empty.
    pub ranges: Vec<Range<Q>>,
    /// Time over which one reading is averaged.
    pub integration: Duration,
    /// Commands sent once after [`super::Definition::setup`], in order.
    pub setup: Vec<String>,
    /// Asks for one reading.
    pub read: String,
    /// Changes the range; `None` only for a meter of one range.
    pub range: Option<RangeCommands>,
    /// How a voltmeter takes readings far shorter than a mains period; `None` when it cannot.
    pub short: Option<ShortReadings>,
    /// When the claims of its ranges hold.
    pub valid: Validity,
}

/// Readings that average over so little that hum of the mains shows in them.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ShortReadings {
    /// Time over which one is averaged.
    pub integration: Duration,
    /// Makes readings short.
    pub begin: String,
    /// Makes them as long again as they are otherwise.
    pub end: String,
}

impl ShortReadings {
    fn read(mut table: Table<'_, '_>) -> Option<Self> {
        let integration = table.duration("integration");
        if let Some(time) = &integration
            && (time.value.is_zero() || time.value > LONGEST_SHORT)
        {
            table.problem(time, "not short; wanted a fraction of a mains period, at most \"5 ms\"");
        }
        let begin = command::command(&mut table, "begin");
        let end = command::command(&mut table, "end");
        Some(Self { integration: integration?.value, begin: begin?, end: end? })
    }
}

/// A quarter of a period of 50 Hz: nine tenths of a hum are left of it.
const LONGEST_SHORT: Duration = Duration::from_millis(5);

/// One range of a meter.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Range<Q> {
    /// Largest magnitude it reads.
    pub full_scale: Q,
    /// The maker's claim.
    pub accuracy: Accuracy,
    /// What each degree outside adds to it.
    pub per_degree: PerDegree,
    /// Of an ammeter the burden in series, of a voltmeter the input resistance.
    pub resistance: Ohms,
    /// Time after changing to this range until readings are good.
    pub settle: Duration,
}

/// How a range is set and asked for.
#[derive(Clone, Debug, PartialEq)]
pub struct RangeCommands {
    /// Sets the range by its full scale.
    pub set: Template,
    /// Asks for the range's full scale.
    pub ask: String,
}

impl<Q: Quantity> Meter<Q> {
    /// `resistance` is the key of a range's resistance: a burden or an input resistance.
    pub(super) fn read(mut table: Table<'_, '_>, resistance: &str) -> Option<Self> {
        let integration = table.duration("integration");
        let setup = command::commands(&mut table, "setup");
        let ranges = read_ranges(&mut table, resistance);
        let valid = Validity::read(&mut table);
        if valid.temperature.is_none()
            && ranges.iter().flatten().any(|range: &Range<Q>| !range.per_degree.is_nothing())
        {
            table.problem_here("what a degree adds needs the temperatures it counts from; wanted a table \"valid\" with \"from\" and \"to\"".to_owned());
        }
        let short =
            if Q::UNIT == Unit::Volt { table.optional_table("short").map(ShortReadings::read) } else { None };
        let commands = table.table("commands");
        let several = ranges.as_ref().is_some_and(|ranges| ranges.len() > 1);
        let (read, range) = commands.and_then(|commands| read_commands(commands, several))?;
        Some(Self {
            ranges: ranges?,
            integration: integration?.value,
            setup: setup?,
            read,
            range,
            short: short.map_or(Some(None), |short| short.map(Some))?,
            valid,
        })
    }

    /// The smallest range that holds `value`, if any does.
    pub fn range_for(&self, value: Q) -> Option<&Range<Q>> {
        self.ranges.iter().find(|range| value.si().abs() <= range.full_scale.si())
    }
}

fn read_commands(mut table: Table<'_, '_>, several_ranges: bool) -> Option<(String, Option<RangeCommands>)> {
    let read = command::question(&mut table, "read");
    let ranged = several_ranges || table.has("set_range") || table.has("ask_range");
    if !ranged {
        table.optional_text("set_range");
        table.optional_text("ask_range");
        return Some((read?, None));
    }
    let set = command::template(&mut table, "set_range");
    let ask = command::question(&mut table, "ask_range");
    Some((read?, Some(RangeCommands { set: set?, ask: ask? })))
}

fn read_ranges<Q: Quantity>(table: &mut Table<'_, '_>, resistance: &str) -> Option<Vec<Range<Q>>> {
    // All are read before any is missed, so that every problem is noted.
    let read: Vec<_> = table.tables("range").into_iter().map(|range| read_range(range, resistance)).collect();
    let read: Vec<(At<Q>, Range<Q>)> = read.into_iter().collect::<Option<_>>()?;
    for pair in read.windows(2) {
        if let [(smaller, _), (larger, _)] = pair
            && smaller.value.si() >= larger.value.si()
        {
            table.problem(larger, &format!("not above {smaller}; wanted the smallest range first"));
        }
    }
    (!read.is_empty()).then(|| read.into_iter().map(|(_, range)| range).collect())
}

/// A range, and where its full scale stands.
fn read_range<Q: Quantity>(mut table: Table<'_, '_>, resistance: &str) -> Option<(At<Q>, Range<Q>)> {
    let full_scale = table.quantity::<Q>("full_scale");
    let of_reading = table.fraction("of_reading");
    let of_range = table.optional_fraction("of_range");
    let fixed = table.optional_quantity::<Q>("fixed");
    let counts = table.optional_integer("counts");
    let resolution = table.quantity::<Q>("resolution");
    let ohms = table.quantity::<Ohms>(resistance);
    let settle = table.duration("settle");
    let scale = full_scale.as_ref().map_or(0.0, |full_scale| full_scale.value.si());
    let per_degree = PerDegree::read::<Q>(&mut table, "of_reading", Some(scale));
    above_zero(&full_scale, &table);
    above_zero(&resolution, &table);
    for share in [&of_reading, &of_range] {
        not_negative(share, &table);
    }
    not_negative(&fixed.as_ref().map(|fixed| fixed.with(fixed.value.si())), &table);
    not_negative(&counts.as_ref().map(|counts| counts.with(counts.value as f64)), &table);
    not_negative(&ohms.as_ref().map(|ohms| ohms.with(ohms.value.0)), &table);
    let (full_scale, resolution) = (full_scale?, resolution?.value.si());
    let absolute = of_range.map_or(0.0, |share| share.value) * full_scale.value.si()
        + fixed.map_or(0.0, |fixed| fixed.value.si())
        + counts.map_or(0.0, |counts| counts.value as f64) * resolution;
    let range = Range {
        full_scale: full_scale.value,
        accuracy: Accuracy { relative: of_reading?.value, absolute, resolution },
        per_degree,
        resistance: ohms?.value,
        settle: settle?.value,
    };
    Some((full_scale, range))
}

impl Meter<Amps> {
    /// The claims, a line per range, smallest range first.
    pub fn claims(&self) -> Vec<RangeAccuracy> {
        let line =
            |range: &Range<Amps>| RangeAccuracy { full_scale: range.full_scale, accuracy: range.accuracy };
        self.ranges.iter().map(line).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::super::sample::{good, problems};
    use super::*;
    use insta::assert_snapshot as says;

    const AMMETER: &str = "bench-meter-current";

    /// Figures of the 6.5-digit class: 0.05 % of reading + 0.025 % of 100 uA = 25 nA; see the definition.
    #[test]
    fn the_smallest_range_that_holds_a_value_is_found_with_its_claim() {
        let meter = good(AMMETER).ammeter.expect("it is an ammeter");
        let smallest = meter.range_for(Amps(2.4e-6)).expect("100 uA holds it");
        assert_eq!(smallest.full_scale, Amps(1e-4));
        assert!((smallest.accuracy.relative - 0.0005).abs() < 1e-12, "{:?}", smallest.accuracy);
        assert!((smallest.accuracy.absolute - 25e-9).abs() < 1e-15, "{:?}", smallest.accuracy);
        assert_eq!(smallest.resistance, Ohms(100.0));
        assert_eq!(meter.range_for(Amps(-0.35)).map(|range| range.full_scale), Some(Amps(1.0)));
        assert_eq!(meter.range_for(Amps(3.1)), None);
        assert_eq!(meter.claims().len(), 6);
    }

    #[test]
    fn counts_times_resolution_and_fixed_parts_add_up() {
        let text = super::super::builtin(AMMETER).expect("built in");
        let text = text.replacen("of_range = \"0.025 %\"", "counts = 4\nfixed = \"5 nA\"", 1);
        let meter = super::super::Definition::read("d.toml", &text).ok().and_then(|read| read.ammeter);
        let claim = meter.expect("still good").ranges[0].accuracy;
        assert!((claim.absolute - 5.4e-9).abs() < 1e-18, "4 x 100 pA + 5 nA, read {}", claim.absolute);
    }

    #[test]
    fn a_meter_of_one_range_needs_no_range_commands_and_of_several_does() {
        let voltmeter = good("source-measure-unit").voltmeter.expect("it is a voltmeter");
        assert_eq!(voltmeter.range, None);
        says!(problems(AMMETER, &[("set_range = \"SENS:CURR:RANG {}\"", "")]),
            @r#"d.toml:96:1: [ammeter.commands] has no key "set_range"; wanted a command such as "VOLT {}""#);
    }

    #[test]
    fn ranges_that_cannot_be_are_refused() {
        says!(problems(AMMETER, &[("full_scale = \"1 mA\"", "full_scale = \"1 uA\"")]),
            @r#"d.toml:47:14: ammeter.range[2].full_scale = "1 uA": not above ammeter.range[1].full_scale = "100 uA"; wanted the smallest range first"#);
        says!(problems(AMMETER, &[("\"100 pA\"", "\"0 pA\""), ("\"0.05 %\"", "\"-1 %\""), ("\"100 ohm\"", "\"-1 ohm\"")]), @r#"
        d.toml:38:14: ammeter.range[1].of_reading = "-1 %": below zero
        d.toml:40:14: ammeter.range[1].resolution = "0 pA": not above zero
        d.toml:41:10: ammeter.range[1].burden = "-1 ohm": below zero
        "#);
        says!(problems("source-measure-unit", &[("[[voltmeter.range]]", "[voltmeter.rnge]")]), @r#"
        d.toml:94:1: [voltmeter] has no key "range"; wanted at least one [[voltmeter.range]]
        d.toml:98:12: unknown key "rnge" in [voltmeter]; did you mean "range"?
        "#);
    }
}
