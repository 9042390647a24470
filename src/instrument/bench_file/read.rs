//! Reads a bench file and the definitions it names.

use super::{BenchFile, BenchInstrument, Fixture, Identity};
use crate::document::{At, Document, Problems, Table};
use crate::instrument::definition::{Definition, Role, read_roles};
use crate::instrument::library::FindError;
use crate::units::Celsius;
use std::collections::BTreeSet;

/// Finds the definition of a name in a bench file.
type Find<'f> = dyn Fn(&str) -> Result<Definition, FindError> + 'f;

impl BenchFile {
    /// Reads and checks the bench file in `text`, which came from the file called `name`; `find` fetches the
    /// definitions it names.
    ///
    /// # Errors
    /// Every problem of the file, those of its definitions included.
    pub fn read(name: &str, text: &str, find: &Find<'_>) -> Result<Self, Problems> {
        Document::new(name, text).read(|root| read(root, find))
    }
}

fn read(root: &mut Table<'_, '_>, find: &Find<'_>) -> Option<BenchFile> {
    root.integer_choice("schema", &[(1, ())]);
    let name = root.text("name");
    let title = root.text("title");
    let room = root.optional_table("room").and_then(|mut room| room.quantity::<Celsius>("temperature"));
    let fixture = root.optional_table("fixture").map(Fixture::read).unwrap_or_default();
    // All are read before any is missed, so that every problem is noted.
    let blocks: Vec<_> =
        root.tables("instrument").into_iter().map(|table| read_instrument(table, find)).collect();
    let blocks: Vec<Block> = blocks.into_iter().collect::<Option<_>>()?;
    if blocks.is_empty() {
        return None;
    }
    nothing_is_shared(&blocks, root);
    let instruments = blocks.into_iter().map(|block| block.instrument).collect();
    match BenchFile::new(&name?.value, &title?.value, fixture, instruments) {
        Ok(mut bench) => {
            if let Some(room) = room {
                bench.set_room(room.value);
            }
            Some(bench)
        }
        Err(missing) => {
            root.problem_here(missing.to_string());
            None
        }
    }
}

/// An instrument, and where what must be its alone stands.
struct Block {
    instrument: BenchInstrument,
    name: At<String>,
    port: At<String>,
    roles: At<BTreeSet<Role>>,
}

fn read_instrument(mut table: Table<'_, '_>, find: &Find<'_>) -> Option<Block> {
    let name = table.text("name");
    let definition = table.text("definition");
    let port = table.text_for("port", "the path of a serial port");
    let roles = table.texts("roles").and_then(|roles| read_roles(&roles, &table));
    let calibration_due = table.optional_date("calibration_due");
    let calibrated = table.optional_date("calibrated");
    let identity = table.optional_table("identity").map(read_identity).unwrap_or_default();
    for text in [&name, &port].into_iter().flatten() {
        if text.value.trim().is_empty() {
            table.problem(text, "empty");
        }
    }
    let definition = definition.and_then(|definition| match find(&definition.value) {
        Ok(found) => Some(found),
        Err(error) => {
            table.problem(&definition, &error.to_string());
            None
        }
    });
    let (name, definition, port, roles) = (name?, definition?, port?, roles?);
    roles_are_offered(&roles, &definition, &table);
    let instrument = BenchInstrument {
        name: name.value.clone(),
        definition,
        port: port.value.clone(),
        roles: roles.value.clone(),
        identity,
        calibration_due: calibration_due.map(|date| date.value),
        calibrated: calibrated.map(|date| date.value),
    };
    Some(Block { instrument, name, port, roles })
}

fn read_identity(mut table: Table<'_, '_>) -> Identity {
    let mut field = |key| table.optional_text(key).map(|text| text.value);
    Identity { maker: field("maker"), model: field("model"), serial: field("serial") }
}

fn roles_are_offered(roles: &At<BTreeSet<Role>>, definition: &Definition, table: &Table<'_, '_>) {
    for role in roles.value.difference(&definition.roles) {
        let offered: Vec<_> = definition.roles.iter().map(|role| role.key()).collect();
        let (name, offered) = (&definition.name, offered.join(", "));
        table.problem(roles, &format!("{name} cannot play {role}, only {offered}"));
    }
    if roles.value.contains(&Role::Voltmeter) && roles.value.contains(&Role::LoadVoltmeter) {
        table.problem(roles, "one meter cannot read at the terminals and at the load; wanted one of the two");
    }
}

fn nothing_is_shared(blocks: &[Block], root: &Table<'_, '_>) {
    for (index, block) in blocks.iter().enumerate() {
        for earlier in &blocks[..index] {
            if block.port.value == earlier.port.value {
                root.problem(
                    &block.port,
                    &format!("the same port as {}; one port, one instrument", earlier.port),
                );
            }
            if block.name.value == earlier.name.value {
                root.problem(&block.name, &format!("the same name as {}", earlier.name));
            }
            for role in block.roles.value.intersection(&earlier.roles.value) {
                root.problem(&block.roles, &format!("{role} is played by {} already", earlier.name.value));
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::sample::{FIRST_BENCH, bench, problems, read};
    use super::*;
    use crate::instrument::bench_file::VoltmeterPlace;
    use crate::units::Ohms;
    use insta::assert_snapshot as says;
    use jiff::civil::date;
    use proptest::prelude::*;

    const SUPPLY: &str = "definition = \"programmable-supply\"";
    const VOLTMETER: &str = "roles = [\"voltmeter\"]";

    #[test]
    fn the_shipped_bench_file_is_read_as_written() {
        let bench = bench(&[]);
        assert_eq!(bench.name, "first-bench");
        let fixture = Fixture { lead_resistance: Some(Ohms(0.08)), voltmeter: VoltmeterPlace::BehindAmmeter };
        assert_eq!(bench.fixture, fixture);
        let supply = bench.player(Role::Source).expect("it has one");
        assert_eq!(supply.name, "supply");
        assert_eq!(supply.definition.name, "programmable-supply");
        assert_eq!(supply.calibration_due, Some(date(2027, 3, 31)));
        assert_eq!(supply.identity.serial.as_deref(), Some("A1017"));
        assert_eq!(bench.player(Role::LoadVoltmeter), None);
        assert_eq!(bench.instruments().len(), 3);
    }

    #[test]
    fn a_definition_that_cannot_be_had_is_named() {
        says!(problems(&[(SUPPLY, "definition = \"programable-supply\"")]),
            @r#"b.toml:20:14: instrument[1].definition = "programable-supply": no definition "programable-supply" comes with the program; wanted "programmable-supply", "supply-with-low-current-range", "bench-meter-current", "bench-meter-voltage", "source-measure-unit" or the path of a file ending in .toml"#);
        let unreadable = problems(&[(SUPPLY, "definition = \"mine.toml\"")]);
        assert!(
            unreadable.starts_with("b.toml:20:14: instrument[1].definition = \"mine.toml\": cannot read "),
            "{unreadable}"
        );
    }

    #[test]
    fn every_role_is_offered_played_once_and_source_and_ammeter_are_there() {
        says!(problems(&[("roles = [\"source\"]", "roles = [\"ammeter\"]")]), @r#"
        b.toml:1:1: no instrument plays the role source; every bench needs a source and an ammeter
        b.toml:22:9: instrument[1].roles = ["ammeter"]: programmable-supply cannot play ammeter, only source
        b.toml:31:9: instrument[2].roles = ["ammeter"]: ammeter is played by supply already
        "#);
        says!(problems(&[(VOLTMETER, "roles = [\"voltmeter\", \"load_voltmeter\"]")]),
            @r#"b.toml:39:9: instrument[3].roles = ["voltmeter", "load_voltmeter"]: one meter cannot read at the terminals and at the load; wanted one of the two"#);
        says!(problems(&[("definition = \"bench-meter-current\"", "definition = \"bench-meter-voltage\""), ("roles = [\"ammeter\"]", "roles = [\"load_voltmeter\"]")]),
            @"b.toml:1:1: no instrument plays the role ammeter; every bench needs a source and an ammeter");
    }

    #[test]
    fn a_port_or_a_name_used_twice_is_refused() {
        says!(problems(&[("FM6_20431", "FM6_20418"), ("name = \"voltage meter\"", "name = \"current meter\"")]), @r#"
        b.toml:36:8: instrument[3].name = "current meter": the same name as instrument[2].name = "current meter"
        b.toml:38:8: instrument[3].port = "/dev/serial/by-id/usb-Fernhill_Meters_FM6_20418-if00-port0": the same port as instrument[2].port = "/dev/serial/by-id/usb-Fernhill_Meters_FM6_20418-if00-port0"; one port, one instrument
        "#);
    }

    #[test]
    fn the_voltmeter_is_on_one_side_of_the_ammeter_and_its_distance_known() {
        says!(problems(&[("\"behind_ammeter\"", "\"behind\"")]),
            @r#"b.toml:14:13: fixture.voltmeter = "behind": wanted "behind_ammeter" or "before_ammeter""#);
        let unknown =
            [("\"behind_ammeter\"", "\"before_ammeter\""), ("lead_resistance", "# lead_resistance")];
        says!(problems(&unknown),
            @r#"b.toml:14:13: fixture.voltmeter = "before_ammeter": the drop between it and the board must be known; wanted lead_resistance too"#);
    }

    #[test]
    fn dates_resistances_and_keys_are_checked() {
        let changes =
            [("\"80 mohm\"", "\"-80 mohm\""), ("2027-03-31", "\"31.3.2027\""), ("maker = ", "make = ")];
        says!(problems(&changes), @r#"
        b.toml:13:19: fixture.lead_resistance = "-80 mohm": below zero
        b.toml:23:19: instrument[1].calibration_due = "31.3.2027": wanted a date such as 2027-03-31
        b.toml:25:14: unknown key "make" in [instrument[1].identity]; did you mean "maker"?
        "#);
        says!(problems(&[("2027-03-31", "2027-02-30")]), @"b.toml:23:19: invalid date, expected day between 01 and 28");
        let empty =
            read("schema = 1\nname = \"b\"\ntitle = \"t\"\ninstrument = []\n").expect_err("no instruments");
        says!(empty.lines().collect::<Vec<_>>().join("\n"), @"b.toml:4:14: instrument = []: wanted at least one [[instrument]]");
    }

    proptest! {
        #[test]
        fn a_bench_file_with_any_damage_is_read_or_refused_without_panic(
            at in 0..FIRST_BENCH.len(),
            length in 0_usize..40,
            damage in "[\\PC\"\\[\\]{}=.0-9\n]{0,12}",
        ) {
            let mut text = FIRST_BENCH.to_owned();
            let end = (at + length).min(text.len());
            if text.is_char_boundary(at) && text.is_char_boundary(end) {
                text.replace_range(at..end, &damage);
            }
            if let Err(problems) = read(&text) {
                prop_assert!(problems.lines().count() > 0, "refused without a reason: {text}");
                prop_assert!(!problems.to_string().is_empty());
            }
        }
    }
}
