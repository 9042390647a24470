//! The result of one run as a technician reads it: the outcome large, the table, what to look at, what to do next.

use super::banner::banner;
use super::columns::wrapped;
use super::next::{OUTPUT_MAY_BE_ON, next_action};
use super::paint::{self, Paint};
use super::{Sheet, quantities, words};
use crate::analysis::{About, Finding};
use crate::trace::OutputState;

/// The whole result, ending with a newline, at most 100 letters wide.
pub fn text(sheet: &Sheet<'_>, paint: Paint) -> String {
    let is_dangerous = sheet.output == Some(OutputState::MayBeOn);
    let mut page = String::new();
    let mut part = |text: &str| {
        if !page.is_empty() {
            page.push('\n');
        }
        page.push_str(text);
    };
    if is_dangerous {
        part(&danger(paint));
    }
    part(&heading(sheet, paint));
    if !sheet.quantities.is_empty() {
        part(&table(sheet, paint));
    }
    if !sheet.findings.is_empty() {
        part(&findings(sheet.findings));
    }
    if let Some(place) = place(sheet) {
        part(&place);
    }
    if is_dangerous {
        part(&danger(paint));
    } else if sheet.run.is_some() {
        part(&wrapped(&next_action(sheet), ""));
    }
    page
}

/// What nobody must overlook.
fn danger(paint: Paint) -> String {
    wrapped(OUTPUT_MAY_BE_ON, "").lines().map(|line| paint.on(paint::of_danger(), line) + "\n").collect()
}

fn heading(sheet: &Sheet<'_>, paint: Paint) -> String {
    let word = sheet.outcome.word();
    let style = paint::of_outcome(sheet.outcome);
    let mut lines: Vec<String> = banner(word).iter().map(|row| paint.on(style, row)).collect();
    lines.push(String::new());
    let mut facts = vec![paint.on(style, word), format!("{} revision {}", sheet.board, sheet.revision)];
    facts.extend(sheet.serial_number.map(|number| format!("serial number {number}")));
    facts.extend(
        sheet
            .run
            .filter(|run| run.identity.attempt > 1)
            .map(|run| format!("attempt {}", run.identity.attempt)),
    );
    facts.extend(sheet.run.and_then(|run| words::occasion(&run.identity.occasion)));
    lines.push(facts.join("   "));
    if let Some(simulated) = sheet.run.and_then(|run| run.identity.bench.simulated.as_ref()) {
        lines.push(format!(
            "SIMULATED: no real board was measured (condition {}, seed {})",
            simulated.condition, simulated.seed
        ));
    }
    lines.join("\n") + "\n"
}

fn table(sheet: &Sheet<'_>, paint: Paint) -> String {
    let mut lines = quantities::table(sheet.quantities, paint);
    lines
        .push(wrapped(&quantities::what_u_means(sheet.quantities, sheet.findings), "").trim_end().to_owned());
    lines.join("\n") + "\n"
}

/// The findings about the board first, then those about the bench; each in its given order.
fn findings(findings: &[Finding]) -> String {
    let about = |about: About| findings.iter().filter(move |finding| finding.about == about);
    let one = |finding: &Finding| {
        let whom = match finding.about {
            About::Board => "board",
            About::Bench => "bench",
        };
        format!("{whom}: {}\n{}", words::spoken(&words::code(finding.code)), wrapped(&finding.text, "    "))
    };
    about(About::Board).chain(about(About::Bench)).map(one).collect()
}

/// Where the record is.
fn place(sheet: &Sheet<'_>) -> Option<String> {
    let (run, folder) = (sheet.run?, sheet.folder?);
    Some(format!("Recorded as {} in {}\n", run.identity.run, folder.display()))
}
