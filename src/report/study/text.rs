//! A study as tables.

use super::{StudySheet, rate_text};
use crate::profile::QuantityName;
use crate::report::columns::{aligned, wrapped};
use crate::study::{AtRest, Basis, Cell, Drift, Estimates, Jitter, Limits, Line, Proposal};
use crate::units::{Unit, prefixed, under_prefix_of, with_decimals_of};

/// What was ordered, every threshold under every condition, what the boards are at rest, how that goes with temperature,
/// the limits that follow, and what the figures rest on.
pub fn study_text(sheet: &StudySheet<'_>) -> String {
    let estimates = sheet.estimates;
    let mut text = head(sheet);
    let confidence = percent(estimates.question.confidence);
    let mut section = |title: &str, rows: Vec<Vec<String>>| {
        if rows.len() > 1 {
            text += &format!("\n{title}\n");
            text += &aligned(&rows).iter().map(|line| format!("  {line}\n")).collect::<String>();
        }
    };
    section("each threshold under each condition", cells(estimates, &confidence));
    section("at rest", at_rest(estimates));
    section("over temperature", temperature(&estimates.temperature));
    section("limits that follow", limits(&estimates.limits));
    for note in notes(estimates) {
        text.push('\n');
        text += &wrapped(&note, "");
    }
    text
}

fn head(sheet: &StudySheet<'_>) -> String {
    let (heading, estimates) = (sheet.heading, sheet.estimates);
    let plan = &heading.plan;
    let mut text =
        format!("{} revision {}: characterised, study {}\n", heading.board, heading.revision, sheet.name);
    if let Some(simulated) = &heading.simulated {
        text += &format!("SIMULATED: no real board was measured ({simulated})\n");
    }
    let counted = |count: usize, what: &str| format!("{count} {what}{}", if count == 1 { "" } else { "s" });
    text += &format!(
        "{}, {}, {}, {}, {} cycles each: {} of {} cycles\n",
        counted(plan.boards.len(), "board"),
        counted(plan.temperatures.len(), "temperature"),
        counted(plan.loads.len(), "load"),
        counted(plan.rates.len(), "rate"),
        plan.cycles,
        estimates.cycles,
        estimates.ordered,
    );
    text
}

fn row<const N: usize>(cells: [&str; N]) -> Vec<String> {
    cells.map(str::to_owned).to_vec()
}

fn cells(estimates: &Estimates, confidence: &str) -> Vec<Vec<String>> {
    let jitter = format!("jitter, {confidence} interval");
    let mut rows = vec![row([
        "board",
        "temperature",
        "load",
        "rate",
        "quantity",
        "cycles",
        "measured ± U",
        &jitter,
        "first to last",
    ])];
    rows.extend(estimates.cells.iter().map(|cell| {
        let threshold = &cell.threshold;
        vec![
            cell.board.clone(),
            degrees(cell.temperature_c),
            prefixed(cell.load_ohm, Unit::Ohm),
            rate_text(cell.rate_v_per_s),
            cell.quantity.title().to_owned(),
            counts(cell),
            with_uncertainty(threshold.mean_v, 2.0 * threshold.standard_uncertainty_v(), Unit::Volt),
            self::jitter(&threshold.jitter),
            cell.drift.map_or("-".to_owned(), drift),
        ]
    }));
    rows
}

fn counts(cell: &Cell) -> String {
    let threshold = &cell.threshold;
    match threshold.missing {
        0 => threshold.count.to_string(),
        missing => format!("{}, not in {missing}", threshold.count),
    }
}

fn jitter(jitter: &Jitter) -> String {
    let volts = |value: f64| prefixed(value, Unit::Volt);
    match jitter {
        Jitter::Found { standard_deviation_v, low_v: Some(low), high_v: Some(high) } => {
            format!("{} ({} to {})", volts(*standard_deviation_v), volts(*low), volts(*high))
        }
        Jitter::Found { standard_deviation_v, .. } => volts(*standard_deviation_v),
        Jitter::NoneSeen { at_most_v: Some(most) } => format!("none seen, at most {}", volts(*most)),
        Jitter::NoneSeen { at_most_v: None } => "none seen".to_owned(),
    }
}

fn drift(drift: Drift) -> String {
    let text = with_uncertainty(drift.first_to_last_v, drift.expanded_uncertainty_v, Unit::Volt);
    if drift.significant { format!("{text}, DRIFTS") } else { text }
}

/// Whether a threshold has no delay although there were ramps of several rates.
fn lacks_delay(estimates: &Estimates, board: &AtRest) -> bool {
    let first = estimates.cells.first().map(|cell| cell.rate_v_per_s);
    let several = estimates.cells.iter().any(|cell| Some(cell.rate_v_per_s) != first);
    several && board.delay.is_none() && board.quantity != QuantityName::Hysteresis
}

fn at_rest(estimates: &Estimates) -> Vec<Vec<String>> {
    let mut rows = vec![row(["board", "temperature", "load", "quantity", "value ± U", "delay ± U"])];
    rows.extend(estimates.at_rest.iter().map(|board| {
        let uncertainty = 2.0 * board.statistical_v.hypot(board.instrument_v.unwrap_or(0.0));
        let value = with_uncertainty(board.value_v, uncertainty, Unit::Volt);
        vec![
            board.board.clone(),
            degrees(board.temperature_c),
            prefixed(board.load_ohm, Unit::Ohm),
            board.quantity.title().to_owned(),
            if board.delay_included { format!("{value}, delay included") } else { value },
            board.delay.map_or_else(
                || if lacks_delay(estimates, board) { "not told" } else { "" }.to_owned(),
                |delay| with_uncertainty(delay.delay_s, delay.expanded_uncertainty_s, Unit::Second),
            ),
        ]
    }));
    rows
}

fn temperature(lines: &[Line]) -> Vec<Vec<String>> {
    let mut rows = vec![row(["board", "load", "quantity", "coefficient ± U"])];
    rows.extend(lines.iter().map(|line| {
        let found = &line.coefficient;
        let text = with_uncertainty(found.relative_per_k, found.expanded_uncertainty_per_k, Unit::PerKelvin);
        let bent = found.line_probability.is_some_and(|probability| probability < 0.01);
        vec![
            line.board.clone(),
            prefixed(line.load_ohm, Unit::Ohm),
            line.quantity.title().to_owned(),
            if bent { format!("{text}, not a straight line") } else { text },
        ]
    }));
    rows
}

fn limits(limits: &[Limits]) -> Vec<Vec<String>> {
    let mut rows = vec![row([
        "temperature",
        "load",
        "quantity",
        "limits",
        "n",
        "content",
        "confidence",
        "factor",
        "s",
        "U",
    ])];
    rows.extend(limits.iter().map(|line| {
        let mut cells = vec![
            degrees(line.temperature_c),
            prefixed(line.load_ohm, Unit::Ohm),
            line.quantity.title().to_owned(),
        ];
        match &line.proposal {
            Some(proposal) => cells.extend(proposed(proposal)),
            None => cells.push("too little to tell".to_owned()),
        }
        cells
    }));
    rows
}

fn proposed(proposal: &Proposal) -> [String; 7] {
    let of = match proposal.basis {
        Basis::Boards => "boards",
        Basis::Cycles => "cycles of one board",
    };
    [
        format!("{} to {}", prefixed(proposal.min_v, Unit::Volt), prefixed(proposal.max_v, Unit::Volt)),
        format!("{} {of}", proposal.count),
        percent(proposal.content),
        percent(proposal.confidence),
        format!("{:.3}", proposal.factor),
        prefixed(proposal.standard_deviation_v, Unit::Volt),
        prefixed(proposal.expanded_uncertainty_v, Unit::Volt),
    ]
}

/// What the figures rest on, and what would make them better.
fn notes(estimates: &Estimates) -> Vec<String> {
    let mut notes = vec![
        "U is the expanded uncertainty, coverage factor k = 2; of the first-to-last change it is Student's t at the stated \
         confidence. Each cycle only brackets a threshold: mean and jitter are the maximum likelihood of the brackets. \
         Limits: mean plus and minus factor x s, a two-sided normal tolerance interval (ISO 16269-6), widened by U of the \
         instrument at either end."
            .to_owned(),
    ];
    if estimates.cells.iter().any(|cell| cell.threshold.instrument_v.is_none()) {
        notes.push(
            "note: nothing is claimed of the instrument that read the voltages; U leaves it out.".to_owned(),
        );
    }
    if estimates.at_rest.iter().any(|board| lacks_delay(estimates, board)) {
        notes.push(
            "A delay needs ramps at two rates at least (--rate), which the bench must be fast enough to tell apart."
                .to_owned(),
        );
    }
    if estimates.at_rest.iter().any(|board| board.delay.is_some()) {
        notes.push(
            "A staircase shows a delay to about one of its steps in time; how long those are bounds U of the delay."
                .to_owned(),
        );
    }
    notes.extend(more_boards(estimates));
    notes
}

fn more_boards(estimates: &Estimates) -> Option<String> {
    let proposal = estimates.limits.iter().find_map(|limits| limits.proposal)?;
    let wanted = proposal.boards_wanted?;
    let any = proposal.boards_of_any_distribution;
    let any = any.map_or(String::new(), |any| {
        format!(" With {any} boards their extremes would do, whatever the distribution.")
    });
    match proposal.basis {
        Basis::Cycles => Some(format!(
            "note: limits over the cycles of one board say nothing about other boards: measure {wanted} or more.{any}"
        )),
        Basis::Boards if proposal.count < wanted => Some(format!(
            "note: {} boards are few: with {wanted} the factor is at most twice that of the whole population.{any}",
            proposal.count
        )),
        Basis::Boards => None,
    }
}

fn degrees(celsius: Option<f64>) -> String {
    celsius.map_or("as it was".to_owned(), |celsius| format!("{celsius:.1} °C"))
}

fn percent(share: f64) -> String {
    let text = format!("{:.2}", share * 100.0);
    format!("{} %", text.trim_end_matches('0').trim_end_matches('.'))
}

/// Both under one prefix: that of the larger, so that a change smaller than its uncertainty reads well.
fn with_uncertainty(value: f64, uncertainty: f64, unit: Unit) -> String {
    let reference = if value.abs() >= uncertainty { value } else { uncertainty };
    let (_, spread, symbol) = with_decimals_of(reference, uncertainty, unit);
    let decimals = spread.split('.').nth(1).map_or(0, str::len);
    let number = format!("{:.decimals$}", under_prefix_of(value, reference, unit));
    let is_nothing = !number.contains(|letter: char| ('1'..='9').contains(&letter));
    let number = if is_nothing { number.trim_start_matches('-') } else { &number };
    format!("{number} ± {spread} {symbol}")
}
