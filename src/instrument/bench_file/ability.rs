//! What a bench can do and what its makers claim, put together from the definitions of its instruments.

use super::{BenchFile, BenchInstrument, VoltmeterPlace};
use crate::instrument::definition::{Definition, Range, Role, Voltmeter};
use crate::procedure::{Ability, Misfit, fits, swing};
use crate::profile::{Profile, Supply};
use crate::trace::{Burst, Claims, Times};
use crate::units::{Amps, Ohms, Volts};
use std::collections::BTreeSet;
use std::time::Duration;

/// Characters of a reply, line end included: sign, nine digits, point and exponent such as `+1.23456789E-06`.
const REPLY_CHARACTERS: usize = 17;

impl BenchFile {
    /// What a procedure must know of this bench to test a board of which no voltage exceeds `profile_maximum`.
    pub fn ability(&self, profile_maximum: Volts) -> Ability {
        let source = &self.parts.source;
        let sense_limit = self
            .sense_range(profile_maximum)
            .map_or(Volts::ZERO, |range| Volts(range.accuracy.limit(profile_maximum.0)));
        Ability {
            voltmeter: self.parts.voltmeter.is_some(),
            load_voltmeter: self.parts.load_voltmeter.is_some(),
            short_readings: self.player(Role::Voltmeter).and_then(burst_time),
            ranges: self.parts.ammeter.ranges.iter().map(|range| range.full_scale).collect(),
            range_settle: self
                .parts
                .ammeter
                .ranges
                .iter()
                .map(|range| range.settle)
                .max()
                .unwrap_or_default(),
            max_voltage: source.voltage.max,
            max_current: source.current.max,
            min_current: source.current.min,
            set_step: source.set_step,
            settle: source.settle,
            slew: source.slew,
            overshoot: source.overshoot,
            read_time: self.instruments.iter().map(read_time).max().unwrap_or_default(),
            arrival_tolerance: source.settled_within
                + Volts(source.programming.limit(profile_maximum.0))
                + sense_limit,
            zero_uncertainties: self
                .parts
                .ammeter
                .ranges
                .iter()
                .map(|range| Amps(range.accuracy.standard_uncertainty(0.0)))
                .collect(),
        }
    }

    /// What the makers claim about readings of this bench when it is driven as `supply` says, with the voltmeter on
    /// its smallest range that holds the maximum.
    pub fn claims(&self, supply: &Supply) -> Claims {
        Claims {
            set: Some(self.parts.source.programming),
            sense: self.sense_range(supply.maximum).map(|range| range.accuracy),
            load: range_of(self.parts.load_voltmeter.as_ref(), supply.maximum).map(|range| range.accuracy),
            current: self.parts.ammeter.claims(),
            lead_resistance: self.series_resistance(supply.current_limit),
            sense_resistance: self.sense_resistance(supply.maximum),
            times: Some(Times {
                integration: self.parts.ammeter.integration,
                settle: self.parts.source.settle,
            }),
            slew: self.parts.source.slew,
            room: self.room,
            ..Claims::default()
        }
    }

    /// Input resistance of a voltmeter behind the ammeter, on the range that holds `maximum`. `None` where the source
    /// or the ammeter reads the voltage itself: what that takes does not pass the ammeter.
    fn sense_resistance(&self, maximum: Volts) -> Option<Ohms> {
        let voltmeter = self.player(Role::Voltmeter)?;
        let apart = voltmeter.roles.is_disjoint(&BTreeSet::from([Role::Source, Role::Ammeter]));
        (apart && self.voltmeter_at_board()).then(|| self.sense_range(maximum))?.map(|range| range.resistance)
    }

    /// What the ammeter puts between supply and voltmeter on the range that holds `current`, as its definition states.
    pub fn burden(&self, current: Amps) -> Ohms {
        let behind = self.fixture.voltmeter == VoltmeterPlace::BehindAmmeter;
        let range = self.parts.ammeter.range_for(current).filter(|_| behind);
        range.map_or(Ohms::ZERO, |range| range.resistance)
    }

    fn voltmeter_at_board(&self) -> bool {
        self.parts.voltmeter.is_some() && self.fixture.voltmeter == VoltmeterPlace::BehindAmmeter
    }

    /// Leads and burden of the ammeter on the range that holds `current`: what drops the voltage between supply and
    /// board. `None` where it is not known, or where a voltmeter at the board makes it needless.
    fn series_resistance(&self, current: Amps) -> Option<Ohms> {
        if self.voltmeter_at_board() {
            return None;
        }
        self.source_resistance(current)
    }

    /// The same wherever the voltmeter sits; `None` where the bench file does not state the leads.
    fn source_resistance(&self, current: Amps) -> Option<Ohms> {
        Some(self.fixture.lead_resistance? + self.parts.ammeter.range_for(current)?.resistance)
    }

    /// All that `profile` asks for and this bench cannot do; empty when they fit.
    pub fn misfits(&self, profile: &Profile) -> Vec<Misfit> {
        let maximum = profile.supply.maximum;
        let mut misfits = fits(profile, &self.ability(maximum));
        let source = self.source_resistance(profile.supply.current_limit);
        misfits.extend(source.and_then(|source| swing(profile, source)));
        for (role, meter) in
            [(Role::Voltmeter, &self.parts.voltmeter), (Role::LoadVoltmeter, &self.parts.load_voltmeter)]
        {
            if let Some(meter) = meter
                && meter.range_for(maximum).is_none()
                && let Some(largest) = meter.ranges.last()
            {
                let (role, largest) = (role.key(), largest.full_scale);
                misfits.push(Misfit::Voltmeter { role, maximum, largest });
            }
        }
        let highest = self.parts.source.over_voltage.max;
        if highest <= maximum {
            misfits.push(Misfit::OverVoltage { maximum, highest });
        }
        misfits
    }

    /// The voltmeter's range for a run: the smallest that holds `maximum`, or its largest.
    fn sense_range(&self, maximum: Volts) -> Option<&Range<Volts>> {
        range_of(self.parts.voltmeter.as_ref(), maximum)
    }
}

/// A voltmeter's range for a run: the smallest that holds `maximum`, or its largest.
fn range_of(meter: Option<&Voltmeter>, maximum: Volts) -> Option<&Range<Volts>> {
    let meter = meter?;
    meter.range_for(maximum).or_else(|| meter.ranges.last())
}

/// Time a voltmeter takes for a burst of short readings, if it can take any: each a question of its own.
fn burst_time(instrument: &BenchInstrument) -> Option<Duration> {
    let definition = &instrument.definition;
    let meter = definition.voltmeter.as_ref()?;
    let short = meter.short.as_ref()?;
    Some(exchange(definition, meter.read.len(), short.integration) * Burst::LENGTH)
}

/// Time one instrument takes to read all its roles, one after the other, wire included.
fn read_time(instrument: &BenchInstrument) -> Duration {
    let definition = &instrument.definition;
    let questions = instrument.roles.iter().filter_map(|role| match role {
        Role::Source => {
            let limited = definition.source.as_ref()?.commands.ask_limited.as_ref()?;
            Some((limited.query.len(), Duration::ZERO))
        }
        Role::Ammeter => definition.ammeter.as_ref().map(|meter| (meter.read.len(), meter.integration)),
        Role::Voltmeter | Role::LoadVoltmeter => {
            definition.voltmeter.as_ref().map(|meter| (meter.read.len(), meter.integration))
        }
    });
    questions.map(|(question, integration)| exchange(definition, question, integration)).sum()
}

/// Time from a question of so many characters to the end of its answer, for which the instrument measures that long.
fn exchange(definition: &Definition, question: usize, integration: Duration) -> Duration {
    let terminator = definition.serial.terminator.text().len();
    let characters = u32::try_from(question + terminator + REPLY_CHARACTERS).unwrap_or(u32::MAX);
    definition.timing.response + integration + definition.serial.wire_time(characters)
}

#[cfg(test)]
mod tests {
    use super::super::sample::bench;
    use crate::profile::{Profile, Supply};
    use crate::units::{Amps, Ohms, Volts};
    use insta::assert_snapshot as says;
    use std::time::Duration;

    /// The voltmeter's block, without which the board's voltage is known from the set-point and the leads.
    const VOLTMETER: &str = "roles = [\"voltmeter\"]";

    fn profile(changes: &[(&str, &str)]) -> Profile {
        let mut text = include_str!("../../../profiles/river-node.toml").to_owned();
        for (from, to) in changes {
            assert!(text.contains(from), "the profile holds no {from}");
            text = text.replace(from, to);
        }
        Profile::read("p.toml", &text).unwrap_or_else(|problems| panic!("{problems}"))
    }

    fn supply() -> Supply {
        profile(&[]).supply
    }

    #[test]
    fn the_first_bench_fits_every_shipped_profile() {
        for text in [
            include_str!("../../../profiles/river-node.toml"),
            include_str!("../../../profiles/garden-probe.toml"),
            include_str!("../../../profiles/mast-beacon.toml"),
        ] {
            let profile = Profile::read("p.toml", text).expect("a good profile");
            assert_eq!(bench(&[]).misfits(&profile), [], "{}", profile.board);
        }
    }

    /// By hand from the definitions. Reading: 2 ms response, 20 ms integration, 23 characters of 10 bits at 115200
    /// baud, 1.997 ms. Arrival at 8.4 V: 2 mV + 0.05 % + 5 mV + 0.0035 % + 50 uV = 11.544 mV.
    /// Off current: (25 nA squared / 3 + 100 pA squared / 12) under the root = 14.43 nA.
    #[test]
    fn the_ability_of_the_first_bench_is_what_its_definitions_say() {
        let ability = bench(&[]).ability(Volts(8.4));
        assert!(ability.voltmeter && !ability.load_voltmeter);
        assert_eq!(ability.ranges.first(), Some(&Amps(1e-4)));
        assert_eq!(ability.range_settle, Duration::from_millis(60));
        assert_eq!((ability.max_voltage, ability.set_step), (Volts(32.0), Volts(0.001)));
        assert!((ability.read_time.as_secs_f64() - 0.023997).abs() < 1e-6, "{:?}", ability.read_time);
        // 40 times 2 ms response, 400 us, 23 characters as above.
        let burst = ability.short_readings.expect("the voltmeter can").as_secs_f64();
        assert!((burst - 40.0 * 0.004397).abs() < 4e-5, "{burst}");
        assert!((ability.arrival_tolerance.0 - 0.011544).abs() < 1e-9, "{}", ability.arrival_tolerance);
        assert!(
            (ability.off_current_uncertainty().0 - 14.43e-9).abs() < 1e-11,
            "{}",
            ability.off_current_uncertainty()
        );
    }

    #[test]
    fn the_voltmeter_is_claimed_on_its_smallest_range_that_holds_the_maximum() {
        let sense = |maximum| bench(&[]).claims(&Supply { maximum, ..supply() }).sense.expect("a voltmeter");
        assert!((sense(Volts(8.4)).absolute - 50e-6).abs() < 1e-12, "0.0005 % of 10 V");
        assert!((sense(Volts(14.7)).absolute - 600e-6).abs() < 1e-12, "0.0006 % of 100 V");
    }

    #[test]
    fn without_a_voltmeter_leads_and_burden_are_known_to_drop_voltage() {
        assert_eq!(bench(&[]).claims(&supply()).lead_resistance, None);
        let bare = bench(&[(VOLTMETER, "roles = [\"load_voltmeter\"]")]);
        let claims = bare.claims(&supply());
        let leads = claims.lead_resistance.expect("80 mohm of leads, 100 mohm of burden on 1 A");
        assert!((leads / Ohms(0.18) - 1.0).abs() < 1e-12, "{leads}");
        assert_eq!(claims.sense, None);
        assert!((claims.load.expect("a voltmeter at the load").absolute - 50e-6).abs() < 1e-12);
        assert!(bare.ability(Volts(8.4)).load_voltmeter);
    }

    #[test]
    fn a_voltmeter_of_its_own_behind_the_ammeter_draws_through_it() {
        let input = |changes: &[(&str, &str)]| bench(changes).claims(&supply()).sense_resistance;
        assert_eq!(input(&[]), Some(Ohms(10e6)), "of its 10 V range");
        assert_eq!(input(&[(VOLTMETER, "roles = [\"load_voltmeter\"]")]), None);
        let source_measure_unit = [
            ("definition = \"programmable-supply\"", "definition = \"source-measure-unit\""),
            ("roles = [\"source\"]", "roles = [\"source\", \"voltmeter\"]"),
            (VOLTMETER, "roles = [\"load_voltmeter\"]"),
        ];
        assert_eq!(input(&source_measure_unit), None);
    }

    #[test]
    fn before_the_ammeter_nothing_passes_it_and_leads_and_burden_drop_voltage() {
        let claims = bench(&[("\"behind_ammeter\"", "\"before_ammeter\"")]).claims(&supply());
        assert_eq!(claims.sense_resistance, None);
        let series = claims.lead_resistance.expect("80 mohm of leads, 100 mohm of burden on 1 A");
        assert!((series / Ohms(0.18) - 1.0).abs() < 1e-12, "{series}");
        assert!(claims.sense.is_some());
    }

    #[test]
    fn a_source_measure_unit_reads_its_roles_one_after_the_other() {
        let changes = [
            ("definition = \"programmable-supply\"", "definition = \"source-measure-unit\""),
            ("roles = [\"source\"]", "roles = [\"source\", \"ammeter\"]"),
            ("definition = \"bench-meter-current\"", "definition = \"bench-meter-voltage\""),
            ("roles = [\"ammeter\"]", "roles = [\"load_voltmeter\"]"),
        ];
        let one_role = bench(&[]).ability(Volts(8.4)).read_time;
        let read_time = bench(&changes).ability(Volts(8.4)).read_time;
        assert!(read_time > one_role, "flag and current share a port: {read_time:?}");
    }

    #[test]
    fn what_the_meters_and_the_protection_cannot_hold_is_a_misfit() {
        let high =
            profile(&[("\"8.40 V\"", "\"21 V\""), ("\"3 W\"", "\"10 W\""), ("\"350 mA\"", "\"450 mA\"")]);
        let changes = [
            ("definition = \"programmable-supply\"", "definition = \"source-measure-unit\""),
            ("roles = [\"source\"]", "roles = [\"source\", \"voltmeter\"]"),
            (VOLTMETER, "roles = [\"load_voltmeter\"]"),
        ];
        let told: Vec<_> = bench(&changes).misfits(&high).iter().map(ToString::to_string).collect();
        says!(told.join("\n"), @"
        the profile's maximum is 21.00 V, the supply goes to 20.00 V; take a supply of higher voltage
        the profile's maximum is 21.00 V, the largest range of the voltmeter 20.00 V; take another meter
        ");
        let higher =
            profile(&[("\"8.40 V\"", "\"22 V\""), ("\"3 W\"", "\"10 W\""), ("\"350 mA\"", "\"450 mA\"")]);
        let told = bench(&changes).misfits(&higher).last().map(ToString::to_string);
        says!(told.unwrap_or_default(),
            @"the profile's maximum is 22.00 V, the supply's over-voltage protection goes to 22.00 V; wanted more");
    }

    #[test]
    fn a_supply_that_reads_its_own_current_cannot_judge_microamperes() {
        let changes = [
            ("definition = \"programmable-supply\"", "definition = \"supply-with-low-current-range\""),
            ("roles = [\"source\"]", "roles = [\"source\", \"ammeter\"]"),
            ("definition = \"bench-meter-current\"", "definition = \"bench-meter-voltage\""),
            ("roles = [\"ammeter\"]", "roles = [\"load_voltmeter\"]"),
        ];
        let told: Vec<_> = bench(&changes).misfits(&profile(&[])).iter().map(ToString::to_string).collect();
        says!(told.join("\n"),
            @"an off current limited to 4.000 µA needs a standard uncertainty of 1.000 µA or less, the ammeter's is 46.19 µA on its smallest range; take a meter with a smaller range or remove limits.off_current");
    }
}
