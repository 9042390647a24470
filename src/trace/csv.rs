//! A trace as CSV: what somebody else's instrument recorded, read in full with every problem at its place, and the
//! same columns written for export.
//!
//! Columns: `time_s`, `set_v`, `sense_v`, `current_a`, and if wanted `load_v`, `range_a`, `limit`, `was_limit`, in any
//! order. An empty
//! cell of an optional reading means it was not taken; `overload` in `current_a` means the meter was above its range.

mod problems;

pub use problems::{CsvFlaw, CsvProblem, CsvProblems};

use super::{Claims, Current, Ending, OutputState, Sample, Stop, Trace};
use crate::units::{Amps, Volts};
use ::csv::{ReaderBuilder, StringRecord, Trim};
use problems::FEWEST_ROWS;
use std::fmt::Write as _;
use std::time::Duration;

/// A column of a trace file.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Column {
    Time,
    Set,
    Sense,
    Current,
    Load,
    Range,
    Limit,
    WasLimit,
}

impl Column {
    const ALL: [Self; 8] = [
        Self::Time,
        Self::Set,
        Self::Sense,
        Self::Current,
        Self::Load,
        Self::Range,
        Self::Limit,
        Self::WasLimit,
    ];

    fn name(self) -> &'static str {
        match self {
            Self::Time => "time_s",
            Self::Set => "set_v",
            Self::Sense => "sense_v",
            Self::Current => "current_a",
            Self::Load => "load_v",
            Self::Range => "range_a",
            Self::Limit => "limit",
            Self::WasLimit => "was_limit",
        }
    }

    fn required(self) -> bool {
        matches!(self, Self::Time | Self::Set | Self::Sense | Self::Current)
    }
}

/// Reads the trace in `text`, which came from the file called `name`. The instruments' claims are not in such a file,
/// so the trace has none, and the run counts as completed.
///
/// # Errors
/// Every problem of the file, see [`CsvFlaw`].
pub fn read(name: &str, text: &str) -> Result<Trace, CsvProblems> {
    let mut problems = Vec::new();
    let samples = read_samples(text, &mut problems);
    if !problems.is_empty() {
        problems.sort_by_key(|problem| problem.line);
        return Err(CsvProblems { file: name.to_owned(), problems });
    }
    Ok(Trace {
        samples,
        settings: Vec::new(),
        claims: Claims::default(),
        ending: Ending { stop: Stop::Completed, output: OutputState::Off },
    })
}

fn read_samples(text: &str, problems: &mut Vec<CsvProblem>) -> Vec<Sample> {
    // Spreadsheets put a byte order mark before the header.
    let text = text.strip_prefix('\u{feff}').unwrap_or(text);
    let mut reader =
        ReaderBuilder::new().has_headers(false).flexible(true).trim(Trim::All).from_reader(text.as_bytes());
    let mut samples: Vec<Sample> = Vec::new();
    let mut rows = 0;
    let mut layout: Option<Vec<Option<Column>>> = None;
    let mut record = StringRecord::new();
    loop {
        match reader.read_record(&mut record) {
            Ok(true) => {}
            Ok(false) => break,
            Err(error) => {
                let line = error.position().map_or(1, ::csv::Position::line);
                problems.push(CsvProblem { line, what: CsvFlaw::Unreadable { reason: error.to_string() } });
                break;
            }
        }
        let line = record.position().map_or(1, ::csv::Position::line);
        let Some(layout) = &layout else {
            layout = Some(read_header(&record, line, problems));
            continue;
        };
        rows += 1;
        let mut row = Row { record: &record, layout, line, problems };
        if let Some(sample) = row.sample(samples.last().map(|sample| sample.at)) {
            samples.push(sample);
        }
    }
    let last_line = reader.position().line();
    if layout.is_none() && problems.is_empty() {
        problems.push(CsvProblem { line: 1, what: CsvFlaw::Empty });
    } else if layout.is_some() && rows < FEWEST_ROWS {
        problems.push(CsvProblem { line: last_line, what: CsvFlaw::TooFewRows { read: rows } });
    }
    samples
}

fn read_header(record: &StringRecord, line: u64, problems: &mut Vec<CsvProblem>) -> Vec<Option<Column>> {
    let mut layout = Vec::with_capacity(record.len());
    for name in record {
        let column = Column::ALL.into_iter().find(|column| column.name() == name);
        match column {
            None => {
                problems.push(CsvProblem { line, what: CsvFlaw::UnknownColumn { read: name.to_owned() } });
            }
            Some(known) if layout.contains(&column) => {
                let what = CsvFlaw::RepeatedColumn { column: known.name() };
                problems.push(CsvProblem { line, what });
            }
            Some(_) => {}
        }
        layout.push(column);
    }
    for column in Column::ALL.into_iter().filter(|column| column.required()) {
        if !layout.contains(&Some(column)) {
            problems.push(CsvProblem { line, what: CsvFlaw::MissingColumn { column: column.name() } });
        }
    }
    layout
}

/// One row on its way to becoming a sample.
struct Row<'r> {
    record: &'r StringRecord,
    layout: &'r [Option<Column>],
    line: u64,
    problems: &'r mut Vec<CsvProblem>,
}

impl Row<'_> {
    /// The sample, or `None` once a problem of this row is noted. All cells are read before the row is given up.
    fn sample(&mut self, before: Option<Duration>) -> Option<Sample> {
        if self.record.len() != self.layout.len() {
            let what = CsvFlaw::CellCount { read: self.record.len(), wanted: self.layout.len() };
            self.problems.push(CsvProblem { line: self.line, what });
            return None;
        }
        let at = self.time(before);
        let set = self.number(Column::Set).ok();
        let sense = self.reading(Column::Sense);
        let current = self.current();
        let load = self.reading(Column::Load);
        let range = self.reading(Column::Range);
        let limited = self.flag(Column::Limit);
        let was_limited = self.flag(Column::WasLimit);
        Some(Sample {
            at: at?,
            set: Volts(set?),
            sense: sense.ok()?.map(Volts),
            current: current?,
            load: load.ok()?.map(Volts),
            range: range.ok()?.map(Amps),
            limited: limited.ok()?,
            was_limited: was_limited.ok()?,
        })
    }

    fn time(&mut self, before: Option<Duration>) -> Option<Duration> {
        let seconds = self.number(Column::Time).ok()?;
        let Ok(at) = Duration::try_from_secs_f64(seconds) else {
            self.flaw(Column::Time, "a time in seconds, zero or more");
            return None;
        };
        if let Some(before) = before.filter(|before| at < *before) {
            let read = self.cell(Column::Time).unwrap_or_default().to_owned();
            let what = CsvFlaw::TimeBackwards { read, before: seconds_text(before) };
            self.problems.push(CsvProblem { line: self.line, what });
            return None;
        }
        Some(at)
    }

    fn current(&mut self) -> Option<Current> {
        if self.cell(Column::Current).is_some_and(|text| text.eq_ignore_ascii_case("overload")) {
            return Some(Current::OVERLOAD);
        }
        self.number(Column::Current).ok().map(|amps| Current::Value(Amps(amps)))
    }

    fn flag(&mut self, column: Column) -> Result<Option<bool>, Noted> {
        match self.cell(column) {
            None | Some("") => Ok(None),
            Some("0") => Ok(Some(false)),
            Some("1") => Ok(Some(true)),
            Some(_) => Err(self.flaw(column, "0 or 1")),
        }
    }

    /// A reading that need not be there: no column or an empty cell is `None`.
    fn reading(&mut self, column: Column) -> Result<Option<f64>, Noted> {
        if self.cell(column).is_none_or(str::is_empty) { Ok(None) } else { self.number(column).map(Some) }
    }

    fn number(&mut self, column: Column) -> Result<f64, Noted> {
        // A column that is missing as a whole was noted at the header.
        let text = self.cell(column).ok_or(Noted)?;
        match text.parse::<f64>() {
            Ok(number) if number.is_finite() => Ok(number),
            _ if column == Column::Current => Err(self.flaw(column, "a finite number or the word overload")),
            _ => Err(self.flaw(column, "a finite number")),
        }
    }

    fn cell(&self, column: Column) -> Option<&str> {
        let index = self.layout.iter().position(|place| *place == Some(column))?;
        self.record.get(index)
    }

    fn flaw(&mut self, column: Column, wanted: &'static str) -> Noted {
        let read = self.cell(column).unwrap_or_default().to_owned();
        let what = CsvFlaw::Cell { column: column.name(), read, wanted };
        self.problems.push(CsvProblem { line: self.line, what });
        Noted
    }
}

/// The problem has been noted; there is nothing more to say.
struct Noted;

/// Writes the samples of a trace as CSV with all columns. Numbers read back as the same numbers.
pub fn write(trace: &Trace) -> String {
    let mut text = Column::ALL.map(Column::name).join(",");
    text.push('\n');
    for sample in &trace.samples {
        let optional = |value: Option<f64>| value.map_or_else(String::new, |value| value.to_string());
        let current = sample.current.amps().map_or_else(|| "overload".to_owned(), |amps| amps.0.to_string());
        let flag = |flag: Option<bool>| match flag {
            None => "",
            Some(false) => "0",
            Some(true) => "1",
        };
        let (limit, was_limit) = (flag(sample.limited), flag(sample.was_limited));
        // Writing to a text cannot fail.
        let _ = writeln!(
            text,
            "{},{},{},{current},{},{},{limit},{was_limit}",
            seconds_text(sample.at),
            sample.set.0,
            optional(sample.sense.map(|volts| volts.0)),
            optional(sample.load.map(|volts| volts.0)),
            optional(sample.range.map(|amps| amps.0)),
        );
    }
    text
}

/// A time in seconds, exact to the nanosecond.
fn seconds_text(time: Duration) -> String {
    let text = format!("{}.{:09}", time.as_secs(), time.subsec_nanos());
    text.trim_end_matches('0').trim_end_matches('.').to_owned()
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    const HEADER: &str = "time_s,set_v,sense_v,current_a\n";

    fn problems(text: &str) -> Vec<String> {
        read("t.csv", text).expect_err("a bad file").to_string().lines().map(str::to_owned).collect()
    }

    #[test]
    fn a_trace_of_another_instrument_is_read() {
        let text = format!("{HEADER}0.5,7.6,7.595,0.138\n0.6,7.5,,overload\n");
        let trace = read("t.csv", &text).expect("a good file");
        assert_eq!(trace.samples.len(), 2);
        assert_eq!(trace.samples[0].sense, Some(Volts(7.595)));
        assert_eq!(trace.samples[1].sense, None);
        assert_eq!(trace.samples[1].current, Current::OVERLOAD);
        assert_eq!(trace.ending.stop, Stop::Completed);
    }

    #[test]
    fn columns_may_stand_in_any_order_after_a_byte_order_mark() {
        let text =
            "\u{feff}set_v, current_a ,sense_v,time_s,limit\r\n7.6,0.138,7.595,0.5,1\r\n7.5,0.1,7.4,0.6,\r\n";
        let trace = read("t.csv", text).expect("a good file");
        assert_eq!(trace.samples[0].set, Volts(7.6));
        assert_eq!(trace.samples[0].limited, Some(true));
        assert_eq!(trace.samples[1].limited, None);
    }

    #[test]
    fn every_problem_is_listed_with_its_line_and_column() {
        let text = "time_s,set_v,sens_v,current_a\n0.5,7.6,7.5,abc\n0.4,NaN,7.5,0.1\n0.3,7.6,7.5,0.1\n0.2,7.6,7.5,0.1\n1,2\n";
        assert_eq!(
            problems(text),
            [
                "t.csv:1: unknown column \"sens_v\"; did you mean \"sense_v\"?",
                "t.csv:1: the header has no column \"sense_v\"; wanted time_s, set_v, sense_v and current_a",
                "t.csv:2: current_a: read \"abc\", wanted a finite number or the word overload",
                "t.csv:3: set_v: read \"NaN\", wanted a finite number",
                "t.csv:5: time_s: read \"0.2\", wanted 0.3 or later as in the row above: time runs backwards",
                "t.csv:6: read 2 cells, wanted 4 as in the header",
            ]
        );
    }

    #[test]
    fn negative_time_infinity_and_a_bad_flag_are_refused() {
        let text = "time_s,set_v,sense_v,current_a,limit\n-1,7.6,inf,0.1,0\n1,7.6,7.5,0.1,yes\n";
        assert_eq!(
            problems(text),
            [
                "t.csv:2: time_s: read \"-1\", wanted a time in seconds, zero or more",
                "t.csv:2: sense_v: read \"inf\", wanted a finite number",
                "t.csv:3: limit: read \"yes\", wanted 0 or 1",
            ]
        );
    }

    #[test]
    fn an_empty_file_and_one_row_are_too_little() {
        let empty =
            "t.csv:1: the file is empty; wanted a header time_s,set_v,sense_v,current_a and rows of readings";
        assert_eq!(problems(""), [empty]);
        assert_eq!(
            problems(&format!("{HEADER}0.5,7.6,7.595,0.138\n")),
            ["t.csv:3: rows of readings: 1, wanted at least 2"]
        );
    }

    fn any_sample() -> impl Strategy<Value = Sample> {
        let number = -1e3..1e3_f64;
        let optional = || proptest::option::of(-1e3..1e3_f64);
        let current = proptest::option::weighted(0.9, -1.0..1.0_f64);
        let flag = || proptest::option::of(any::<bool>());
        (0..1_000_000_000_000_u64, number, optional(), current, optional(), optional(), (flag(), flag()))
            .prop_map(|(nanos, set, sense, current, load, range, (limited, was_limited))| Sample {
                at: Duration::from_nanos(nanos),
                set: Volts(set),
                sense: sense.map(Volts),
                current: current.map_or(Current::OVERLOAD, |amps| Current::Value(Amps(amps))),
                load: load.map(Volts),
                range: range.map(Amps),
                limited,
                was_limited,
            })
    }

    proptest! {
        #[test]
        fn what_was_written_is_read_back(mut samples in proptest::collection::vec(any_sample(), 2..20)) {
            samples.sort_by_key(|sample| sample.at);
            let ending = Ending { stop: Stop::Completed, output: OutputState::Off };
            let trace = Trace { samples, settings: Vec::new(), claims: Claims::default(), ending };
            prop_assert_eq!(read("t.csv", &write(&trace)), Ok(trace));
        }

        #[test]
        fn no_text_makes_the_reader_panic(text in "(time_s,set_v,sense_v,current_a\n)?[-0-9a-zN.,\n\"]{0,200}") {
            let _ = read("t.csv", &text);
        }
    }
}
