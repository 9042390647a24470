//! Reads a definition: the parts each by themselves, then whether roles and parts agree.

use super::command::commands;
use super::{Definition, Meter, Role, SerialSettings, Source, Timing};
use crate::document::{At, Document, Problems, Table};
use std::collections::BTreeSet;
use std::time::Duration;

impl Definition {
    /// Reads and checks the definition in `text`, which came from the file called `name`.
    ///
    /// # Errors
    /// Every problem of the file: what cannot be read, what is unknown, what a role needs and does not find.
    pub fn read(name: &str, text: &str) -> Result<Self, Problems> {
        Document::new(name, text).read(read)
    }
}

fn read(root: &mut Table<'_, '_>) -> Option<Definition> {
    root.integer_choice("schema", &[(1, ())]);
    let name = root.text("name");
    let title = root.text("title");
    let roles = root.texts("roles").and_then(|roles| read_roles(&roles, root));
    let cannot = root.optional_texts("cannot");
    let setup = commands(root, "setup");
    let local = commands(root, "local");
    let serial = root.table("serial").and_then(SerialSettings::read);
    let (reply, timing) = root.table("timing").map(read_timing).unwrap_or_default();
    let source = root.optional_table("source").map(Source::read);
    let ammeter = root.optional_table("ammeter").map(|table| Meter::read(table, "burden"));
    let voltmeter = root.optional_table("voltmeter").map(|table| Meter::read(table, "input_resistance"));
    let roles = roles?;
    parts_agree(&roles, root);
    let definition = Definition {
        name: name?.value,
        title: title?.value,
        roles: roles.value,
        cannot: cannot.map_or_else(Vec::new, |list| list.value.into_iter().map(|text| text.value).collect()),
        serial: serial?,
        timing: timing?,
        setup: setup?,
        local: local?,
        source: part(source)?,
        ammeter: part(ammeter)?,
        voltmeter: part(voltmeter)?,
    };
    readings_come_in_time(&definition, &reply?, root);
    Some(definition)
}

/// A part that is not there is fine; a part with problems is not.
fn part<T>(part: Option<Option<T>>) -> Option<Option<T>> {
    match part {
        Some(None) => None,
        Some(Some(part)) => Some(Some(part)),
        None => Some(None),
    }
}

/// The roles in a list of their names; each at most once, at least one.
pub(in crate::instrument) fn read_roles(
    list: &At<Vec<At<String>>>,
    table: &Table<'_, '_>,
) -> Option<At<BTreeSet<Role>>> {
    let mut roles = BTreeSet::new();
    for word in &list.value {
        let Some((_, role)) = Role::NAMES.iter().find(|(name, _)| *name == word.value) else {
            let names: Vec<_> = Role::NAMES.iter().map(|(name, _)| format!("\"{name}\"")).collect();
            table.problem(word, &format!("wanted {}", names.join(" or ")));
            continue;
        };
        if !roles.insert(*role) {
            table.problem(word, "named twice");
        }
    }
    if list.value.is_empty() {
        table.problem(list, "wanted at least one role");
    }
    (!roles.is_empty()).then(|| list.with(roles))
}

fn parts_agree(roles: &At<BTreeSet<Role>>, root: &Table<'_, '_>) {
    let meters = [Role::Voltmeter, Role::LoadVoltmeter];
    for (part, players) in
        [("source", &[Role::Source][..]), ("ammeter", &[Role::Ammeter]), ("voltmeter", &meters)]
    {
        let player = players.iter().find(|role| roles.value.contains(role));
        match player {
            Some(role) if !root.has(part) => {
                root.problem(roles, &format!("the role {role} needs a table [{part}]"));
            }
            None if root.has(part) => {
                root.problem(roles, &format!("the table [{part}] needs a role {}", players[0]));
            }
            _ => {}
        }
    }
}

/// The reply deadline with its place, and all of it.
fn read_timing(mut table: Table<'_, '_>) -> (Option<At<Duration>>, Option<Timing>) {
    let reply = table.duration("reply");
    let reset = table.duration("reset");
    let range_change = table.duration("range_change");
    let response = table.duration("response");
    for deadline in [&reply, &reset, &range_change].into_iter().flatten() {
        if deadline.value < Duration::from_millis(1) {
            table.problem(deadline, "wanted a deadline of 1 ms or more");
        }
    }
    let timing = || {
        Some(Timing {
            reply_deadline: reply.as_ref()?.value,
            reset_deadline: reset?.value,
            range_deadline: range_change?.value,
            response: response?.value,
        })
    };
    let timing = timing();
    (reply, timing)
}

fn readings_come_in_time(definition: &Definition, reply: &At<Duration>, root: &Table<'_, '_>) {
    let ammeter = definition.ammeter.as_ref().map(|meter| meter.integration);
    let voltmeter = definition.voltmeter.as_ref().map(|meter| meter.integration);
    let longest = ammeter.max(voltmeter).unwrap_or_default();
    let needed = longest.saturating_add(definition.timing.response);
    if needed >= reply.value {
        root.problem(reply, &format!("not above {needed:?}, the integration and response of one reading"));
    }
}

#[cfg(test)]
mod tests {
    use super::super::sample::{good, problems};
    use super::super::{builtin, builtin_names};
    use super::*;
    use insta::assert_snapshot as says;
    use proptest::prelude::*;

    const SUPPLY: &str = "programmable-supply";
    const AMMETER: &str = "bench-meter-current";

    #[test]
    fn every_built_in_definition_is_read_under_its_own_name_and_says_what_it_cannot_do() {
        for name in builtin_names() {
            let definition = good(name);
            assert_eq!(definition.name, name);
            assert!(!definition.cannot.is_empty(), "{name}");
        }
    }

    #[test]
    fn roles_and_parts_must_agree() {
        says!(problems(SUPPLY, &[("[\"source\"]", "[\"source\", \"ammeter\"]")]),
            @r#"d.toml:11:9: roles = ["source", "ammeter"]: the role ammeter needs a table [ammeter]"#);
        says!(problems("source-measure-unit", &[(", \"voltmeter\"]", "]")]),
            @r#"d.toml:7:9: roles = ["source", "ammeter"]: the table [voltmeter] needs a role voltmeter"#);
        says!(problems(SUPPLY, &[("[\"source\"]", "[\"sorce\", \"source\", \"source\"]")]), @r#"
        d.toml:11:10: roles = "sorce": wanted "source" or "ammeter" or "voltmeter" or "load_voltmeter"
        d.toml:11:29: roles = "source": named twice
        "#);
        says!(problems(SUPPLY, &[("[\"source\"]", "[]")]), @"d.toml:11:9: roles = []: wanted at least one role");
    }

    #[test]
    fn a_deadline_too_short_for_the_instrument_is_refused() {
        says!(problems(AMMETER, &[("reply = \"1 s\"", "reply = \"20 ms\""), ("reset = \"5 s\"", "reset = \"0 s\"")]), @r#"
        d.toml:26:9: timing.reply = "20 ms": not above 22ms, the integration and response of one reading
        d.toml:27:9: timing.reset = "0 s": wanted a deadline of 1 ms or more
        "#);
    }

    #[test]
    fn serial_settings_no_port_has_are_refused() {
        let changes =
            [("115200", "0"), ("data_bits = 8", "data_bits = 9"), ("parity = \"none\"", "parity = \"no\"")];
        says!(problems(SUPPLY, &changes), @r#"
        d.toml:21:8: serial.baud = 0: wanted 300 to 4000000
        d.toml:22:13: serial.data_bits = 9: wanted 8 or 7
        d.toml:23:10: serial.parity = "no": wanted "none" or "even" or "odd"
        "#);
    }

    proptest! {
        #[test]
        fn a_definition_with_any_damage_is_read_or_refused_without_panic(
            which in 0_usize..5,
            share in 0.0..1.0_f64,
            length in 0_usize..40,
            damage in "[\\PC\"\\[\\]{}=.0-9\n]{0,12}",
        ) {
            let mut text = builtin_names().nth(which).and_then(builtin).expect("five of them").to_owned();
            let at = (share * text.len() as f64) as usize;
            let end = (at + length).min(text.len());
            if text.is_char_boundary(at) && text.is_char_boundary(end) {
                text.replace_range(at..end, &damage);
            }
            if let Err(problems) = Definition::read("d.toml", &text) {
                prop_assert!(problems.lines().count() > 0, "refused without a reason: {text}");
                prop_assert!(!problems.to_string().is_empty());
            }
        }
    }
}
