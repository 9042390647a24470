//! `limits`: what limits follow from a board's parts.

mod uncertainty;
mod write;

use super::show::print;
use super::{Exit, Failure, files};
use crate::limits::{self, Production, Proposal, Question};
use crate::profile::{Profile, QuantityName};
use crate::report::{self, LimitsSheet};
use crate::units::{Quantity as _, Volts};
use clap::{Args, ValueEnum};
use std::collections::BTreeMap;
use std::path::PathBuf;

#[derive(Debug, Args)]
#[command(after_help = "\
The profile says what its thresholds are made of: [detector], [divider] and [environment] of
profiles/river-node.toml explain the keys. Worst case, root sum square and Monte Carlo stand side by
side, with what each part contributes. Test limits are the design limits less what temperature and
ageing may add after the test, less a guard band. --write puts the test limits into the profile and
leaves everything else in it as it is.

Example:
  ebbmark limits profiles/river-node.toml --uncertainty \"1.6 mV\"")]
pub(super) struct Arguments {
    /// Profile of the board.
    profile: PathBuf,
    /// Write the test limits of trip, re-enable and hysteresis into the profile.
    #[arg(long)]
    write: bool,
    /// Which method gives the design limits.
    #[arg(long, value_enum, default_value_t)]
    basis: Basis,
    /// Boards to draw; the usual 200000 are ten thousand outside a 95 % interval (JCGM 101:2008, 7.2.1).
    #[arg(long, value_name = "COUNT", default_value_t = 200_000, value_parser = samples)]
    samples: usize,
    /// Seed of the draw.
    #[arg(long, value_name = "NUMBER", default_value_t = 1)]
    seed: u64,
    /// Expanded uncertainty (k = 2) of a threshold on your bench, such as "1.6 mV".
    #[arg(long, value_name = "VOLTAGE", value_parser = voltage, conflicts_with = "bench")]
    uncertainty: Option<Volts>,
    /// Bench file, for the uncertainty of its voltmeter.
    #[arg(long, value_name = "FILE")]
    bench: Option<PathBuf>,
    /// Guard band as a multiple of the expanded uncertainty.
    #[arg(long, value_name = "FACTOR", default_value_t = 1.0, value_parser = factor)]
    guard_band: f64,
    /// Mean of the real production, such as trip="6.01 V"; otherwise drawn from the parts.
    #[arg(long, value_name = "QUANTITY=VOLTAGE", value_parser = named)]
    process_mean: Vec<(QuantityName, Volts)>,
    /// Standard deviation of the real production, such as trip="12 mV"; otherwise drawn from the parts.
    #[arg(long, value_name = "QUANTITY=VOLTAGE", value_parser = named)]
    process_sd: Vec<(QuantityName, Volts)>,
    /// How the result is written to standard output.
    #[arg(long, value_enum, default_value_t)]
    format: Layout,
}

/// Which method gives the design limits.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
enum Basis {
    /// Every part at its worst end: no board of good parts lies outside.
    #[default]
    WorstCase,
    /// Root sum square of the full tolerances.
    RootSumSquare,
    /// 99.73 % of the boards drawn.
    MonteCarlo,
}

/// How limits are written.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub(super) enum Layout {
    /// For people.
    #[default]
    Text,
    /// For programs: one JSON object.
    Json,
    /// For spreadsheets: a line per quantity and kind of limits.
    Csv,
}

impl Arguments {
    pub(super) fn run(self) -> Result<Exit, Failure> {
        let name = self.profile.display().to_string();
        let text = files::text(&self.profile)?;
        let profile = Profile::read(&name, &text)?;
        let parts = profile.parts.ok_or_else(|| no_parts(&name))?;
        let (uncertainty, uncertainty_from) =
            uncertainty::of_a_threshold(&profile, &parts, self.uncertainty, self.bench.as_deref())?;
        let question = self.question(uncertainty);
        let proposal = Proposal::new(&profile, &parts, &question);
        let sheet = LimitsSheet {
            profile: &profile,
            parts: &parts,
            question: &question,
            uncertainty_from: &uncertainty_from,
            proposal: &proposal,
        };
        print(&self.formatted(&sheet)?)?;
        if self.write {
            write::into_profile(&self.profile, &text, &proposal, &profile.decision, self.guard_band)?;
        }
        Ok(Exit::Pass)
    }

    fn question(&self, uncertainty: Volts) -> Question {
        let mut production: BTreeMap<QuantityName, Production> = BTreeMap::new();
        for (name, mean) in &self.process_mean {
            production.entry(*name).or_default().mean = Some(mean.si());
        }
        for (name, deviation) in &self.process_sd {
            production.entry(*name).or_default().standard_deviation = Some(deviation.si());
        }
        Question {
            basis: match self.basis {
                Basis::WorstCase => limits::Basis::WorstCase,
                Basis::RootSumSquare => limits::Basis::RootSumSquare,
                Basis::MonteCarlo => limits::Basis::MonteCarlo,
            },
            samples: self.samples,
            seed: self.seed,
            uncertainty,
            guard_band: self.guard_band,
            production,
        }
    }

    fn formatted(&self, sheet: &LimitsSheet<'_>) -> Result<String, Failure> {
        Ok(match self.format {
            Layout::Text => report::limits_text(sheet),
            Layout::Json => report::limits_json(sheet) + "\n",
            Layout::Csv => {
                let mut bytes = Vec::new();
                report::limits_csv(sheet, &mut bytes)?;
                String::from_utf8(bytes)?
            }
        })
    }
}

fn no_parts(name: &str) -> anyhow::Error {
    anyhow::anyhow!(
        "{name} does not say what its thresholds are made of; wanted a table [detector], and [divider] where there is \
         one. profiles/river-node.toml shows them"
    )
}

/// Two boards make a spread; a hundred million fit no usual memory.
fn samples(text: &str) -> Result<usize, String> {
    match text.parse() {
        Ok(count @ 2..=20_000_000) => Ok(count),
        _ => Err("wanted a whole number from 2 to 20000000".to_owned()),
    }
}

fn factor(text: &str) -> Result<f64, String> {
    match text.parse() {
        Ok(factor) if (0.0..=10.0).contains(&factor) => Ok(factor),
        _ => Err("wanted a number from 0 to 10".to_owned()),
    }
}

/// A voltage of zero or more.
fn voltage(text: &str) -> Result<Volts, String> {
    let volts = Volts::parse(text).map_err(|error| error.to_string())?;
    if volts < Volts::ZERO { Err(format!("read \"{text}\", wanted zero or more")) } else { Ok(volts) }
}

fn named(text: &str) -> Result<(QuantityName, Volts), String> {
    const NAMES: [QuantityName; 3] = [QuantityName::Trip, QuantityName::ReEnable, QuantityName::Hysteresis];
    let known = NAMES.iter().find_map(|name| {
        let volts = text.strip_prefix(name.key())?.strip_prefix('=')?;
        Some((*name, volts))
    });
    let (name, volts) =
        known.ok_or("wanted trip=, re_enable= or hysteresis= and a voltage, such as trip=\"12 mV\"")?;
    Ok((name, voltage(volts)?))
}
