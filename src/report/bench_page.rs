//! What a look at a bench found: as a page for the technician, and as JSON for programs.

use super::columns::{aligned, wrapped};
use super::words::in_files;
use crate::record::{BenchEntry, BenchFound, CheckFound, InstrumentFound};
use crate::units::{Amps, Ohms, Unit, Volts, prefixed, with_decimals_of};
use crate::verdict::COVERAGE_FACTOR;
use crate::verification::{FixtureZero, ReferenceResult, StandardFound};
use serde_json::json;

/// One look as text, ending with a newline.
pub fn bench_text(entry: &BenchEntry) -> String {
    let mut page = match &entry.found {
        BenchFound::Check(check) => check_page(check),
        BenchFound::Zero { zeros } => zero_page(zeros),
        BenchFound::Reference { result, .. } => reference_page(result),
    };
    for problem in &entry.problems {
        page.push_str("PROBLEM\n");
        page.push_str(&wrapped(problem, "  "));
    }
    page.push_str(last_line(entry));
    page.push('\n');
    page
}

/// Looks as one JSON object: whether all is in order, and each look under its kind.
pub fn bench_json(entries: &[&BenchEntry]) -> String {
    let mut object = json!({
        "schema": crate::record::SCHEMA,
        "ready": entries.iter().all(|entry| entry.is_good()),
    });
    for entry in entries {
        // The readings are in the log; here they would only be in the way.
        let entry = BenchEntry { traces: Vec::new(), ..(*entry).clone() };
        let kind = match entry.found {
            BenchFound::Check(_) => "check",
            BenchFound::Zero { .. } => "zero",
            BenchFound::Reference { .. } => "reference",
        };
        object[kind] = json!(entry);
    }
    object.to_string()
}

fn last_line(entry: &BenchEntry) -> &'static str {
    match (&entry.found, entry.is_good()) {
        (BenchFound::Check(_), true) => "The bench is ready.",
        (BenchFound::Check(_), false) => "The bench is not ready.",
        (BenchFound::Zero { .. }, true) => "The zeros are kept; tests take them off.",
        (BenchFound::Zero { .. }, false) => "The zeros are not used.",
        (BenchFound::Reference { .. }, true) => "The bench finds this board as it is known to be.",
        (BenchFound::Reference { .. }, false) => "The bench does not find this board as it is known to be.",
    }
}

fn check_page(check: &CheckFound) -> String {
    let mut page: String = check.instruments.iter().map(instrument).collect();
    let mut rows: Vec<Vec<String>> = Vec::new();
    for rest in &check.rest {
        let unit = if rest.unit == "V" { Unit::Volt } else { Unit::Ampere };
        let range = rest.range_a.map_or_else(String::new, |range| format!(", range {}", Amps(range)));
        rows.push(vec![
            format!("  {}{range}", rest.role),
            prefixed(rest.mean, unit),
            format!("noise {}", prefixed(rest.noise, unit)),
            format!("{} readings", rest.readings),
        ]);
    }
    page.push_str(&titled("at rest, output off", &rows));
    let rows: Vec<Vec<String>> = check
        .steps
        .iter()
        .map(|step| {
            vec![
                format!("  set {}", Volts(step.set_v)),
                format!("voltmeter {:.5} V", step.sense_v),
                format!("apart {}", Volts(step.set_v - step.sense_v)),
                format!("at {}", Amps(step.current_a)),
                format!("claims allow {} besides the leads", Volts(step.allowed_v)),
            ]
        })
        .collect();
    page.push_str(&titled("output on", &rows));
    let mut rows = Vec::new();
    if let Some(leads) = &check.leads {
        let expanded = COVERAGE_FACTOR * leads.standard_uncertainty_ohm;
        rows.push(vec!["  leads".to_owned(), shown(leads.leads_ohm, expanded, Unit::Ohm)]);
        rows.push(vec!["  ammeter, as stated".to_owned(), Ohms(leads.burden_ohm).to_string()]);
    }
    if let Some(load) = &check.load {
        let stated = format!("stated {} ± {}", Ohms(load.stated_ohm), Ohms(load.allowed_ohm));
        rows.push(vec!["  load".to_owned(), format!("{}, {stated}", Ohms(load.found_ohm))]);
    }
    page.push_str(&titled("between supply and board (k = 2)", &rows));
    page.push_str(&standard(&check.standard));
    page
}

fn standard(found: &[StandardFound]) -> String {
    let Some(first) = found.first() else { return String::new() };
    let rows: Vec<Vec<String>> = found
        .iter()
        .map(|found| {
            vec![
                format!("  range {}", Amps(found.full_scale_a)),
                format!("measured {}", shown(found.measured_a, found.expanded_uncertainty_a, Unit::Ampere)),
                format!(
                    "expected {}",
                    shown(found.expected_a, found.expected_expanded_uncertainty_a, Unit::Ampere)
                ),
                format!("E_n {:.2}", found.normalised_error),
            ]
        })
        .collect();
    let (resistance, percent, at) = (Ohms(first.stated_ohm), first.tolerance * 100.0, Volts(first.at_v));
    titled(&format!("ammeter through {resistance} ± {percent} % at {at} (k = 2)"), &rows)
}

fn instrument(found: &InstrumentFound) -> String {
    let mut rows = Vec::new();
    let mut fact = |name: &str, value: String| rows.push(vec![format!("  {name}"), value]);
    if let Some(told) = &found.not_ready {
        fact("NOT READY", told.clone());
    }
    if let Some(identity) = &found.identity {
        fact("identity", identity.clone());
    }
    if let Some((usual, slowest)) = found.response_s.zip(found.slowest_response_s) {
        fact("response", format!("{:.1} ms, the slowest {:.1} ms", usual * 1e3, slowest * 1e3));
    }
    for error in &found.left_in_queue {
        fact("left in queue", error.clone());
    }
    if let Some(settings) = &found.port_settings {
        fact("port", settings.clone());
    }
    if let Some((due, days)) = found.calibration_due.zip(found.calibration_days_left) {
        let left = if days < 0 { "OVERDUE".to_owned() } else { format!("{days} days left") };
        fact("calibration", format!("due {due}, {left}"));
    }
    titled(&format!("{} ({}) on {}", found.name, found.roles.join(", "), found.port), &rows)
}

fn zero_page(zeros: &[FixtureZero]) -> String {
    let rows: Vec<Vec<String>> = zeros
        .iter()
        .map(|zero| {
            vec![
                format!("  range {}", Amps(zero.full_scale_a)),
                format!("at {}", Volts(zero.at_v)),
                shown(zero.current_a, COVERAGE_FACTOR * zero.standard_uncertainty_a, Unit::Ampere),
                format!("noise {}", Amps(zero.noise_a)),
                format!("{} readings", zero.readings),
            ]
        })
        .collect();
    titled("ammeter with an empty fixture (k = 2), less what the voltmeter draws", &rows)
}

fn reference_page(result: &ReferenceResult) -> String {
    let mut rows = Vec::new();
    for found in &result.compared {
        let unit = found.name.unit();
        rows.push(vec![
            format!("  {}", found.name.title()),
            format!("measured {}", shown(found.measured, found.expanded_uncertainty, unit)),
            format!("known {}", shown(found.known, found.known_expanded_uncertainty, unit)),
            format!("E_n {:.2}", found.normalised_error),
        ]);
    }
    let title = format!(
        "reference board {}, which must {}, came out as {} (k = 2)",
        result.serial_number,
        in_files(&result.must),
        result.outcome
    );
    titled(&title, &rows)
}

fn shown(value: f64, expanded: f64, unit: Unit) -> String {
    let (value, expanded, unit) = with_decimals_of(value, expanded, unit);
    format!("{value} ± {expanded} {unit}")
}

/// A title with rows under it; nothing where there are none.
fn titled(title: &str, rows: &[Vec<String>]) -> String {
    if rows.is_empty() {
        return String::new();
    }
    format!("{title}\n{}\n", aligned(rows).join("\n"))
}
