//! The tolerance stack and the limit sets as tables.

use super::LimitsSheet;
use crate::limits::{Basis, Quantity, Window, volts};
use crate::profile::{Divider, Parts, Temperatures};
use crate::report::columns::{aligned, wrapped};
use crate::units::{Unit, prefixed};

/// What was asked, the methods side by side for each quantity, the limit sets, risks and warnings.
pub fn limits_text(sheet: &LimitsSheet<'_>) -> String {
    let mut text = head(sheet);
    for quantity in &sheet.proposal.quantities {
        text.push('\n');
        text += &methods(quantity);
        text.push('\n');
        text += &contributions(quantity);
    }
    text.push('\n');
    text += &sets(sheet);
    text.push('\n');
    text += &risks(sheet);
    for warning in &sheet.proposal.warnings {
        text.push('\n');
        text += &wrapped(&format!("warning: {}", warning.text), "");
    }
    text
}

fn head(sheet: &LimitsSheet<'_>) -> String {
    let profile = sheet.profile;
    let mut text = format!("{} revision {}: limits from its parts\n\n", profile.board, profile.revision);
    let mut rows = vec![vec!["detector".to_owned(), detector(sheet.parts)]];
    if let Some(divider) = &sheet.parts.divider {
        rows.push(vec!["divider".to_owned(), self::divider(divider)]);
    }
    let environment = &sheet.parts.environment;
    rows.push(vec![
        "temperature".to_owned(),
        format!(
            "{} at work, {} at the test, data sheets at {}",
            temperatures(environment.temperature),
            temperatures(environment.test),
            whole(environment.reference.0),
        ),
    ]);
    text += &lines(&aligned(&rows), "");
    text
}

fn detector(parts: &Parts) -> String {
    let detector = &parts.detector;
    let typical =
        detector.hysteresis.typical.map_or(String::new(), |share| format!(", typically {}", percent(share)));
    let mut text = format!(
        "{} ± {}, hysteresis {} to {}{typical}",
        detector.trip,
        percent(detector.accuracy),
        percent(detector.hysteresis.min),
        percent(detector.hysteresis.max),
    );
    text += &drifts(detector.tempco.0, detector.ageing);
    text
}

fn divider(divider: &Divider) -> String {
    let mut text = format!(
        "{} above {}, ± {} each{}",
        divider.top,
        divider.bottom,
        percent(divider.tolerance),
        drifts(divider.tempco.0, divider.ageing),
    );
    if let Some(current) = divider.sense_current {
        text += &format!(", sense current {} to {}", current.min, current.max);
    }
    if let Some(current) = divider.switching_current {
        text += &format!(", switching current up to {current}");
    }
    text
}

fn drifts(tempco: f64, ageing: f64) -> String {
    let mut text = String::new();
    if tempco > 0.0 {
        text += &format!(", {} ppm/K", plain(tempco * 1e6));
    }
    if ageing > 0.0 {
        text += &format!(", ageing {}", percent(ageing));
    }
    text
}

fn methods(quantity: &Quantity) -> String {
    let study = &quantity.study;
    let row = |name: &str, window: Option<Window>| {
        let (ends, about) = match window {
            Some(window) => {
                (window.to_string(), deviations(window.min - study.nominal, window.max - study.nominal))
            }
            None => ("too few boards drawn".to_owned(), String::new()),
        };
        vec![name.to_owned(), ends, about]
    };
    let rows = [
        ["method", quantity.name.title(), "from nominal"].map(str::to_owned).to_vec(),
        row("worst case: every part at its worst end", Some(study.worst_case)),
        row("root sum square of the full tolerances", Some(study.root_sum_square)),
        row("mean and 3 standard deviations by root sum square", Some(study.three_sigma)),
        row("Monte Carlo: 99.73 % of the boards drawn", study.practically_all),
        row("Monte Carlo: 95 % of the boards drawn", study.nineteen_of_twenty),
    ];
    format!("{}, nominal {}\n", quantity.name.title(), volts(study.nominal)) + &lines(&aligned(&rows), "  ")
}

fn contributions(quantity: &Quantity) -> String {
    let heading = ["part", "alone, worst case", "variance, first order", "variance, boards drawn"];
    let mut rows = vec![heading.map(str::to_owned).to_vec()];
    rows.extend(quantity.study.contributions.iter().map(|part| {
        vec![
            part.cause.to_owned(),
            deviations(part.down, part.up),
            format!("{:.1} %", part.variance_share * 100.0),
            format!("{:.1} %", part.drawn_share * 100.0),
        ]
    }));
    lines(&aligned(&rows), "  ")
}

/// The three limit sets, and what lies between the last two.
fn sets(sheet: &LimitsSheet<'_>) -> String {
    let heading = ["limits", "data sheet", "design", "moves after test", "guard band", "test", "profile now"];
    let mut rows = vec![heading.map(str::to_owned).to_vec()];
    rows.extend(sheet.proposal.quantities.iter().map(|quantity| {
        let sets = &quantity.sets;
        let present = quantity.present.map(|limit| Window {
            min: limit.min.unwrap_or(f64::NEG_INFINITY),
            max: limit.max.unwrap_or(f64::INFINITY),
        });
        vec![
            quantity.name.title().to_owned(),
            sets.data_sheet.to_string(),
            sets.design.to_string(),
            deviations(-sets.share_down, sets.share_up),
            volts(sets.guard_band),
            sets.written().map_or_else(|| "none left".to_owned(), |window| window.to_string()),
            present.map_or_else(|| "-".to_owned(), |window| window.to_string()),
        ]
    }));
    let question = sheet.question;
    let basis = match question.basis {
        Basis::WorstCase => "the worst case",
        Basis::RootSumSquare => "the root sum square of the full tolerances",
        Basis::MonteCarlo => "99.73 % of the boards drawn",
    };
    let notes = format!(
        "Design limits are {basis}. A board that passes the test limits keeps the design limits at any working \
         temperature and age. The guard band is {} x U; U = {} for a threshold (k = 2) is {}, and for the hysteresis \
         it is taken root 2 times as large. {} boards drawn, seed {}.",
        plain(question.guard_band),
        prefixed(question.uncertainty.0, Unit::Volt),
        sheet.uncertainty_from,
        question.samples,
        question.seed,
    );
    lines(&aligned(&rows), "") + "\n" + &wrapped(&notes, "")
}

/// How often the test is wrong over a production.
fn risks(sheet: &LimitsSheet<'_>) -> String {
    let heading = [
        "risks over a production",
        "mean",
        "standard deviation",
        "does not conform",
        "consumer's",
        "producer's",
        "both without guard band",
    ];
    let mut rows = vec![heading.map(str::to_owned).to_vec()];
    rows.extend(sheet.proposal.quantities.iter().filter_map(|quantity| {
        let risks = quantity.risks?;
        Some(vec![
            quantity.name.title().to_owned(),
            volts(quantity.process.mean),
            volts(quantity.process.standard_deviation),
            probability(risks.guarded.nonconforming),
            probability(risks.guarded.consumer),
            probability(risks.guarded.producer),
            format!("{}, {}", probability(risks.simple.consumer), probability(risks.simple.producer)),
        ])
    }));
    let notes = "A board conforms when its true value at the test lies inside the design limits less what it may move \
                 afterwards. Consumer's risk: it does not, and passes. Producer's risk: it does, and fails. Production \
                 and measurement are taken as normal (JCGM 106:2012, 9.5); mean and standard deviation come from the \
                 parts at the test unless given. Parts have ends and a normal distribution has none, so risks \
                 worked out from parts are on the large side.";
    lines(&aligned(&rows), "") + "\n" + &wrapped(notes, "")
}

/// `7.90 %`, `12.3 ppm`; what is smaller is not worth digits.
fn probability(value: f64) -> String {
    if value >= 1e-3 {
        format!("{:.2} %", value * 1e2)
    } else if value >= 1e-7 {
        format!("{:.1} ppm", value * 1e6)
    } else {
        "< 0.1 ppm".to_owned()
    }
}

/// `-180.1 +181.9 mV`
fn deviations(down: f64, up: f64) -> String {
    // Minus zero is no deviation.
    format!("{:+.1} {:+.1} mV", down * 1e3 + 0.0, up * 1e3 + 0.0)
}

fn temperatures(range: Temperatures) -> String {
    format!("{} to {}", whole(range.min.0), whole(range.max.0))
}

fn whole(celsius: f64) -> String {
    format!("{} {}", plain(celsius), Unit::Celsius.symbol())
}

fn percent(share: f64) -> String {
    format!("{} %", plain(share * 100.0))
}

/// No more digits than were written; nine decimals hide the dust of binary fractions.
fn plain(number: f64) -> String {
    let text = format!("{number:.9}");
    text.trim_end_matches('0').trim_end_matches('.').to_owned()
}

fn lines(lines: &[String], indent: &str) -> String {
    lines.iter().map(|line| format!("{indent}{line}\n")).collect()
}
