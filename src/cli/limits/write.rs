//! Puts new limits into the profile's file: whole or not at all.

use crate::cli::Failure;
use crate::limits::Proposal;
use crate::profile::{Acceptance, DecisionRule, NewLimit, with_limits};
use crate::units::Volts;
use anyhow::Context;
use std::io::Write;
use std::path::Path;

/// Writes the test limits of `proposal` into the profile at `path`, which holds `text`, and says what changed.
///
/// `guard_band`, in expanded uncertainties, is asked for in all: what the profile's `rule` keeps from the limits at every run
/// is not taken off a second time here.
pub(super) fn into_profile(
    path: &Path,
    text: &str,
    proposal: &Proposal,
    rule: &DecisionRule,
    guard_band: f64,
) -> Result<(), Failure> {
    let name = path.display().to_string();
    let kept_at_run = kept_at_run(rule, guard_band);
    let new = with_limits(&name, text, &limits(proposal, guard_band - kept_at_run)?)?;
    if kept_at_run > 0.0 {
        anstream::eprintln!(
            "note: the decision rule of {name} keeps {kept_at_run} x U from the limits at every run, so the limits are written \
             without that; with rule = \"simple\" in [decision] they would hold it themselves"
        );
    }
    if new == text {
        anstream::eprintln!("{name} has these limits already");
        return Ok(());
    }
    replace(path, &new).with_context(|| format!("cannot write {name}; it is as it was"))?;
    anstream::eprintln!("wrote {name}:\n{}", changes(text, &new));
    Ok(())
}

/// What of a guard band of `asked` expanded uncertainties the rule keeps by itself. A bound on the risk of a wrong acceptance
/// is a guard band of its own width, with nothing left to add.
fn kept_at_run(rule: &DecisionRule, asked: f64) -> f64 {
    match rule.acceptance {
        Acceptance::Simple => 0.0,
        Acceptance::GuardBand { of_expanded } => of_expanded.min(asked),
        Acceptance::WrongAcceptance { .. } => asked,
    }
}

/// The limits with a guard band of so many expanded uncertainties.
fn limits(proposal: &Proposal, guard_band: f64) -> Result<Vec<NewLimit>, Failure> {
    let of = |quantity: &crate::limits::Quantity| {
        let name = quantity.name;
        let window =
            quantity.sets.written_with(guard_band * quantity.expanded_uncertainty).ok_or_else(|| {
                anyhow::anyhow!(
                    "nothing is left between the test limits of the {}; nothing was written",
                    name.title()
                )
            })?;
        Ok(NewLimit { name, min: Volts(window.min), max: Volts(window.max) })
    };
    proposal.quantities.iter().map(of).collect()
}

/// A new file takes the place of the old one in one step, so that a power cut leaves one or the other. A link stays a
/// link: the file it points at is replaced.
fn replace(path: &Path, text: &str) -> std::io::Result<()> {
    let path = path.canonicalize()?;
    let folder = path.parent().unwrap_or(Path::new("."));
    let mut file = tempfile::NamedTempFile::new_in(folder)?;
    file.write_all(text.as_bytes())?;
    file.as_file().set_permissions(path.metadata()?.permissions())?;
    file.as_file().sync_all()?;
    file.persist(&path)?;
    Ok(())
}

/// The lines that differ, the old ones marked `-` and the new ones `+`. Between the first and the last change a file
/// of as many lines is compared line by line; one with lines put in is shown whole there.
fn changes(old: &str, new: &str) -> String {
    let (old, new): (Vec<&str>, Vec<&str>) = (old.lines().collect(), new.lines().collect());
    let before = old.iter().zip(&new).take_while(|(old, new)| old == new).count();
    let after =
        old[before..].iter().rev().zip(new[before..].iter().rev()).take_while(|(o, n)| o == n).count();
    let (old, new) = (&old[before..old.len() - after], &new[before..new.len() - after]);
    let mut shown = String::new();
    if old.len() == new.len() {
        for (old, new) in old.iter().zip(new).filter(|(old, new)| old != new) {
            shown += &format!("-{old}\n+{new}\n");
        }
    } else {
        shown.extend(old.iter().map(|line| format!("-{line}\n")));
        shown.extend(new.iter().map(|line| format!("+{line}\n")));
    }
    shown
}

#[cfg(test)]
mod tests {
    use super::changes;

    #[test]
    fn only_the_lines_that_differ_are_shown() {
        assert_eq!(changes("a\nb\nc\nd\ne\n", "a\nB\nc\nD\ne\n"), "-b\n+B\n-d\n+D\n");
        assert_eq!(changes("a\nb\n", "a\nx\nb\n"), "+x\n");
        assert_eq!(changes("a\na\n", "a\na\na\n"), "+a\n");
        assert_eq!(changes("a\n", "a\n"), "");
    }
}
