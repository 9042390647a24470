//! The program as its users meet it: a command in, standard output, standard error and an exit code out.
#![expect(clippy::expect_used, reason = "a test fails by panicking")]

mod again;
mod bad_files;
mod bad_traces;
mod beforehand;
mod bench_check;
mod bench_not_ready;
mod bench_zero;
mod characterise;
mod decision;
mod disk_full;
mod fault_mid_run;
mod leftover;
mod limits;
mod output;
mod panics;
mod prior;
mod second_program;
mod stopped;
mod terminal;
mod truth;
mod workplace;

use std::process::Output;
use std::time::Duration;

/// No command takes this long; one that does hangs.
const HANGS: Duration = Duration::from_secs(60);

/// What a finished command said.
struct Said {
    code: i32,
    out: String,
    err: String,
}

/// Runs the program in `folder` with `arguments`.
fn ebbmark(folder: &std::path::Path, arguments: &[&str]) -> Said {
    let program = env!("CARGO_BIN_EXE_ebbmark");
    let output =
        assert_cmd::Command::new(program).current_dir(folder).args(arguments).timeout(HANGS).output();
    Said::of(&output.expect("the program starts"))
}

impl Said {
    fn of(output: &Output) -> Self {
        let text = |bytes: &[u8]| String::from_utf8(bytes.to_vec()).expect("UTF-8");
        let code = output.status.code().unwrap_or_else(|| panic!("ended by a signal: {output:?}"));
        Self { code, out: text(&output.stdout), err: text(&output.stderr) }
    }

    /// Requires an exit code and these phrases on standard error.
    #[track_caller]
    fn refuses(&self, code: i32, phrases: &[&str]) {
        self.ended(code);
        self.warns(phrases);
    }

    #[track_caller]
    fn ended(&self, code: i32) {
        assert_eq!(self.code, code, "{self}");
    }

    #[track_caller]
    fn warns(&self, phrases: &[&str]) {
        for phrase in phrases {
            assert!(self.err.contains(phrase), "no {phrase:?} in:\n{self}");
        }
    }

    /// Standard output as one JSON object.
    #[track_caller]
    fn json(&self) -> serde_json::Value {
        serde_json::from_str(&self.out).unwrap_or_else(|error| panic!("{error}\n{self}"))
    }
}

impl std::fmt::Display for Said {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(
            f,
            "exit code {}\n--- standard output\n{}--- standard error\n{}",
            self.code, self.out, self.err
        )
    }
}
