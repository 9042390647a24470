//! `characterise`: many cycles of few boards, and what they say about the design.

mod conditions;
mod measure;
mod operator;
mod progress;

use super::limits::Layout;
use super::show::print;
use super::simulated::Simulation;
use super::station::Station;
use super::test::{Keeping, arrangement};
use super::{Exit, Failure, files};
use crate::clock::Clock;
use crate::instrument::bench_file::BenchFile;
use crate::profile::Profile;
use crate::record::{KeptStudy, LogFolder, StudyHeading, now};
use crate::report::{self, CAUTIONS, StudySheet};
use crate::study::{Estimates, Plan, Question};
use crate::units::{Celsius, Ohms, Volts, parse_fraction};
use clap::Args;
use conditions::Conditions;
use operator::Operator;
use sha2::{Digest, Sha256};
use std::io::IsTerminal;
use std::path::PathBuf;

#[derive(Debug, Args)]
#[command(after_help = "\
Each cycle is a safe run of its own: pre-check, down through the trip, up through the re-enable, output
off. Every finished cycle is on disk before the next begins, in logs/<station>/studies/<name>.jsonl. The
same command goes on where it was interrupted; once all cycles are there, it shows the result again.

Between boards, temperatures and loads the program waits for you and asks what was measured; with
--conditions it reads that from a file:
  schema = 1
  [[temperature]]
  nominal = \"-20 degC\"
  measured = \"-19.7 degC\"        # as nominal, if left out
  [[load]]
  nominal = \"55 ohm\"
  measured = \"54.93 ohm\"

Example:
  ebbmark characterise profiles/river-node.toml --bench sim --serial-number RN000001 --cycles 5")]
pub(super) struct Arguments {
    /// Profile of the boards.
    profile: PathBuf,
    /// Bench file, or `sim` for a simulated bench, or `sim-smu` for one with a source-measure unit.
    #[arg(long, value_name = "FILE|sim|sim-smu")]
    bench: PathBuf,
    /// Serial number of a board; once for each.
    #[arg(long, value_name = "NUMBER", required = true)]
    serial_number: Vec<String>,
    /// Cycles of each board at each temperature, load and rate.
    #[arg(long, value_name = "COUNT", default_value_t = 20, value_parser = clap::value_parser!(u32).range(2..=10_000))]
    cycles: u32,
    /// Rate of the ramp, such as "0.05 V/s", or `rest` for the pace of the profile; once for each. Two or more give the
    /// board's delays.
    #[arg(long, value_name = "RATE", value_parser = rate, default_value = "rest")]
    rate: Vec<Rate>,
    /// Temperature of the board, such as "-20 degC"; once for each.
    #[arg(long, value_name = "TEMPERATURE", value_parser = temperature, allow_hyphen_values = true)]
    temperature: Vec<Celsius>,
    /// Load behind the switch, such as "55 ohm"; once for each. That of the profile when left out.
    #[arg(long, value_name = "RESISTANCE", value_parser = load)]
    load: Vec<Ohms>,
    /// File of temperatures and loads as measured, in place of --temperature and --load.
    #[arg(long, value_name = "FILE", conflicts_with_all = ["temperature", "load"])]
    conditions: Option<PathBuf>,
    /// Part of all boards that the proposed limits are to hold, such as "99%".
    #[arg(long, value_name = "SHARE", default_value = "99%", value_parser = share)]
    coverage: f64,
    /// Confidence of that, and of the intervals for jitter and drift.
    #[arg(long, value_name = "SHARE", default_value = "95%", value_parser = share)]
    confidence: f64,
    /// Name of the study; made from what is ordered when left out. Another name begins anew.
    #[arg(long, value_name = "NAME")]
    name: Option<String>,
    /// Ask nothing: every board, temperature and load is in place when its turn comes, and as ordered.
    #[arg(long)]
    yes: bool,
    /// How the result is written to standard output.
    #[arg(long, value_enum, default_value_t)]
    format: Layout,
    #[command(flatten)]
    keeping: Keeping,
    #[command(flatten)]
    simulation: Simulation,
}

/// A rate in V/s, or the pace of the profile.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Rate(Option<f64>);

/// A study about to go on: everything that does not change from cycle to cycle.
pub(super) struct Ordered<'a> {
    arguments: &'a Arguments,
    profile: Profile,
    /// The real bench; `None` for simulated ones.
    bench: Option<BenchFile>,
    station: String,
    conditions: Conditions,
    name: String,
    heading: StudyHeading,
}

impl Arguments {
    pub(super) fn run(self) -> Result<Exit, Failure> {
        let ordered = self.ordered()?;
        let folder = LogFolder::new(&self.keeping.logs, &ordered.station)?;
        let kept = ordered.kept(&folder)?;
        let operator = Operator::new(&ordered, self.yes);
        operator.refuse_if_nobody_answers(&kept.cycles)?;
        if self.format == Layout::Text && ordered.bench.is_some() && std::io::stderr().is_terminal() {
            anstream::eprintln!("{CAUTIONS}");
        }
        let (kept, exit) = measure::go_on(&ordered, &operator, kept)?;
        if exit != Exit::Pass {
            let (done, all) = (kept.cycles.len(), kept.heading.plan.total());
            anstream::eprintln!(
                "note: {done} of {all} cycles are kept in {}; the same command goes on from there",
                folder.study_file(&ordered.name)?.display()
            );
            return Ok(exit);
        }
        self.print(&ordered, &kept)?;
        Ok(Exit::Pass)
    }

    fn ordered(&self) -> Result<Ordered<'_>, Failure> {
        let bench = match arrangement(&self.bench) {
            Some(_) => None,
            None => {
                self.simulation.refuse_on_real_bench()?;
                Some(files::bench(&self.bench)?)
            }
        };
        let station = match (&self.keeping.station, &bench) {
            (Some(name), _) => name.clone(),
            (None, Some(bench)) => bench.name.clone(),
            (None, None) => "simulated".to_owned(),
        };
        if let Some(bench) = &bench {
            // What an earlier run left on goes off before anybody is asked to put a board into the fixture.
            drop(Station::open(bench, Clock::real(), &self.keeping.logs, &station)?);
        }
        let profile = files::profile(&self.profile)?;
        for serial_number in &self.serial_number {
            self.keeping.board(&profile, serial_number)?;
        }
        let conditions = match &self.conditions {
            Some(path) => Conditions::read(&path.display().to_string(), &files::text(path)?, &profile)?,
            None => Conditions::as_ordered(&self.temperature, &self.load, &profile),
        };
        conditions.refuse_unfit_loads(&profile)?;
        let plan = Plan {
            boards: distinct(&self.serial_number),
            temperatures: conditions.temperatures(),
            loads: conditions.loads(),
            rates: distinct(&self.rate).iter().map(|rate| rate.0).collect(),
            cycles: self.cycles,
        };
        let simulated = bench.is_none().then(|| {
            let conditions: Vec<&str> = self.simulation.condition.iter().map(|it| it.key()).collect();
            let seed = self.simulation.seed.map_or(String::new(), |seed| format!(", seed {seed}"));
            format!("condition {}{seed}", conditions.join("+"))
        });
        let heading =
            StudyHeading::new(&profile.board, &profile.revision, &profile.hash, simulated, plan, now());
        let name = match &self.name {
            Some(name) => name.clone(),
            None => default_name(&heading)?,
        };
        Ok(Ordered { arguments: self, profile, bench, station, conditions, name, heading })
    }

    fn print(&self, ordered: &Ordered<'_>, kept: &KeptStudy) -> Result<(), Failure> {
        let question = Question { content: self.coverage, confidence: self.confidence };
        let estimates = Estimates::of(&kept.heading.plan, &kept.cycles, question);
        let sheet = StudySheet { name: &ordered.name, heading: &kept.heading, estimates: &estimates };
        print(&match self.format {
            Layout::Text => report::study_text(&sheet),
            Layout::Json => report::study_json(&sheet)? + "\n",
            Layout::Csv => {
                let mut bytes = Vec::new();
                report::study_csv(&sheet, &mut bytes)?;
                String::from_utf8(bytes)?
            }
        })
    }
}

impl Ordered<'_> {
    /// What is kept already; nothing for a new study. A study of the same name must have ordered the same.
    fn kept(&self, folder: &LogFolder) -> Result<KeptStudy, Failure> {
        let Some(kept) = folder.study(&self.name)? else {
            return Ok(KeptStudy { heading: self.heading.clone(), cycles: Vec::new() });
        };
        if kept.heading.orders_the_same(&self.heading) {
            return Ok(kept);
        }
        let what = if kept.heading.profile_sha256 == self.heading.profile_sha256 {
            "ordered other boards, conditions or cycles"
        } else {
            "was begun with another text of the profile"
        };
        Err(anyhow::anyhow!(
            "the study \"{}\" in {} {what}: cycles of the two do not belong together; give another --name, or order \
             the same as then",
            self.name,
            folder.study_file(&self.name)?.display()
        )
        .into())
    }
}

/// A name that the same order gives again, so that the same command goes on.
fn default_name(heading: &StudyHeading) -> Result<String, Failure> {
    let ordered = serde_json::to_string(&(&heading.profile_sha256, &heading.simulated, &heading.plan))?;
    let hash: String = Sha256::digest(ordered).iter().take(4).map(|byte| format!("{byte:02x}")).collect();
    let board: String = heading.board.chars().filter(|it| it.is_ascii_alphanumeric() || *it == '-').collect();
    Ok(format!("study-{board}-{hash}"))
}

/// The values in their order, each once.
fn distinct<T: PartialEq + Clone>(values: &[T]) -> Vec<T> {
    let mut distinct: Vec<T> = Vec::new();
    for value in values {
        if !distinct.contains(value) {
            distinct.push(value.clone());
        }
    }
    distinct
}

/// Slower ramps take hours, faster ones step across both thresholds.
const RATES: (f64, f64) = (1e-4, 10.0);

fn rate(text: &str) -> Result<Rate, String> {
    if text.trim() == "rest" {
        return Ok(Rate(None));
    }
    let wanted = "wanted a rate such as \"0.05 V/s\", or rest";
    let volts = text.trim().strip_suffix("/s").ok_or(wanted)?;
    let rate = Volts::parse(volts).map_err(|_| wanted)?.0;
    if (RATES.0..=RATES.1).contains(&rate) {
        return Ok(Rate(Some(rate)));
    }
    Err("wanted a rate from 0.1 mV/s to 10 V/s".to_owned())
}

/// What electronics may see: anything else is a slip of the keys.
const TEMPERATURES: (Celsius, Celsius) = (Celsius(-100.0), Celsius(250.0));

fn temperature(text: &str) -> Result<Celsius, String> {
    let temperature = Celsius::parse(text).map_err(|error| error.to_string())?;
    if TEMPERATURES.0 <= temperature && temperature <= TEMPERATURES.1 {
        return Ok(temperature);
    }
    Err(format!("wanted the temperature of a board, {} to {}", TEMPERATURES.0, TEMPERATURES.1))
}

fn load(text: &str) -> Result<Ohms, String> {
    let load = Ohms::parse(text).map_err(|error| error.to_string())?;
    if load > Ohms::ZERO { Ok(load) } else { Err("wanted more than nothing".to_owned()) }
}

fn share(text: &str) -> Result<f64, String> {
    let share = parse_fraction(text).map_err(|error| error.to_string())?;
    if (0.5..1.0).contains(&share) {
        Ok(share)
    } else {
        Err("wanted 50 % or more, and less than 100 %".to_owned())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_rate_has_a_unit() {
        assert_eq!(rate("0.05 V/s"), Ok(Rate(Some(0.05))));
        assert_eq!(rate("50 mV/s"), Ok(Rate(Some(0.05))));
        assert_eq!(rate("rest"), Ok(Rate(None)));
        for wrong in ["0.05", "0.05 V", "V/s", "0 V/s", "-1 V/s", "20 V/s", "1 A/s"] {
            assert!(rate(wrong).is_err(), "{wrong}");
        }
    }

    #[test]
    fn shares_and_temperatures_have_ends() {
        assert_eq!(share("99%"), Ok(0.99));
        assert!(share("100%").is_err() && share("0.99").is_err() && share("1%").is_err());
        assert_eq!(temperature("-20 degC"), Ok(Celsius(-20.0)));
        assert!(temperature("-300 degC").is_err() && temperature("--load").is_err());
    }
}
