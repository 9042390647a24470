//! Before a run: whether it can tell good boards from bad ones at all.

use super::Failure;
use crate::instrument::bench_file::BenchFile;
use crate::profile::{Profile, WhenBelow};
use crate::verdict::doubts;

/// Says which limits are too narrow for what `bench` will know of a board, or refuses the run, as the profile has it.
pub(super) fn check(profile: &Profile, bench: &BenchFile) -> Result<(), Failure> {
    let reading = bench.ability(profile.supply.maximum).read_time;
    let doubts = doubts(profile, &bench.claims(&profile.supply), reading);
    if doubts.is_empty() {
        return Ok(());
    }
    match profile.decision.when_below {
        WhenBelow::Warn => {
            for doubt in doubts {
                anstream::eprintln!("note: {doubt}");
            }
            Ok(())
        }
        WhenBelow::Refuse => {
            let lines: Vec<String> = doubts.iter().map(|doubt| format!("\n  {doubt}")).collect();
            Err(anyhow::anyhow!(
                "board {} is not tested on bench {}, as decision.when_below asks for:{}",
                profile.board,
                bench.name,
                lines.concat()
            )
            .into())
        }
    }
}
