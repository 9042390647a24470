//! What a board may draw while it is off, path by path: the off-state budget.
//!
//! Topology decides: a pull-up to the gate of a low-side switch conducts while the board is off, one behind an inverter
//! while it is on. So every path says when it conducts.

use super::draft::{Draft, LimitDraft};
use super::{Profile, QuantityName};
use crate::document::{At, Table};
use crate::units::{Amps, Ohms, Siemens, Volts};

/// One path of current beside the load.
#[derive(Clone, Debug, PartialEq)]
pub struct OffPath {
    /// What people call it: `pull-up`.
    pub name: String,
    /// What flows through it.
    pub draws: Draws,
    /// How far a good part may be off, as a fraction of one.
    pub tolerance: f64,
    /// When it conducts.
    pub conducts: Conducts,
}

/// How the current of a path goes with the voltage.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Draws {
    /// In proportion, through a resistance.
    Resistance(Ohms),
    /// Always the same.
    Current(Amps),
}

/// The state of the board in which a path conducts.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Conducts {
    /// Switch open.
    Off,
    /// Switch closed.
    On,
    /// Both.
    Always,
}

/// All paths that conduct while the board is off, added up: `current + conductance * voltage`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct OffBudget {
    /// In proportion to voltage.
    pub conductance: Span<Siemens>,
    /// Whatever the voltage.
    pub current: Span<Amps>,
}

/// A nominal value and the worst its parts allow.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Span<Q> {
    /// Every part at its lowest.
    pub least: Q,
    /// Every part as named.
    pub nominal: Q,
    /// Every part at its highest.
    pub most: Q,
}

impl OffBudget {
    /// What a board with parts as named draws at `volts`.
    pub fn nominal_at(&self, volts: Volts) -> Amps {
        self.current.nominal + volts * self.conductance.nominal
    }

    fn of(paths: &[OffPath]) -> Option<Self> {
        let off = || paths.iter().filter(|path| path.conducts != Conducts::On);
        off().next()?;
        let conductance = |sign: f64| {
            Siemens(
                off()
                    .filter_map(|path| match path.draws {
                        Draws::Resistance(ohms) => Some(1.0 / (ohms.0 * (1.0 - sign * path.tolerance))),
                        Draws::Current(_) => None,
                    })
                    .sum(),
            )
        };
        let current = |sign: f64| {
            Amps(
                off()
                    .filter_map(|path| match path.draws {
                        Draws::Current(amps) => Some(amps.0 * (1.0 + sign * path.tolerance)),
                        Draws::Resistance(_) => None,
                    })
                    .sum(),
            )
        };
        Some(Self {
            conductance: Span { least: conductance(-1.0), nominal: conductance(0.0), most: conductance(1.0) },
            current: Span { least: current(-1.0), nominal: current(0.0), most: current(1.0) },
        })
    }
}

impl Profile {
    /// The off-state budget; `None` where the profile names no path that conducts while the board is off.
    pub fn off_budget(&self) -> Option<OffBudget> {
        OffBudget::of(&self.off_paths)
    }
}

/// Reads every `[[off_path]]`; `None` when something is wrong with one, which has been noted.
pub(super) fn read(root: &mut Table<'_, '_>) -> Option<Vec<OffPath>> {
    let paths: Vec<Option<OffPath>> = root.optional_tables("off_path").into_iter().map(read_one).collect();
    paths.into_iter().collect()
}

fn read_one(mut table: Table<'_, '_>) -> Option<OffPath> {
    let name = table.text("name");
    let resistance: Option<At<Ohms>> = table.optional_quantity("resistance");
    let current: Option<At<Amps>> = table.optional_quantity("current");
    let tolerance = table.fraction("tolerance");
    let words = [("off", Conducts::Off), ("on", Conducts::On), ("always", Conducts::Always)];
    let conducts = table.choice("conducts", &words);
    if table.has("resistance") == table.has("current") {
        table.problem_here("a path has either \"resistance\" or \"current\"".to_owned());
    }
    let dead_short = resistance.as_ref().filter(|ohms| ohms.value <= Ohms::ZERO);
    if let Some(ohms) = dead_short {
        table.problem(ohms, "not above zero");
        return None;
    }
    if let Some(amps) = &current
        && amps.value < Amps::ZERO
    {
        table.problem(amps, "below zero");
    }
    let most = if current.is_some() { 1.0 } else { LARGEST_OF_A_RESISTANCE };
    if let Some(share) = &tolerance
        && !(0.0..=most).contains(&share.value)
    {
        table.problem(share, &format!("wanted 0 % to {} %", most * 100.0));
    }
    let draws = match (resistance, current) {
        (Some(ohms), None) => Draws::Resistance(ohms.value),
        (None, Some(amps)) => Draws::Current(amps.value),
        _ => return None,
    };
    Some(OffPath { name: name?.value, draws, tolerance: tolerance?.value, conducts: conducts?.value })
}

/// Tolerance beyond which a resistance tells nothing any more.
const LARGEST_OF_A_RESISTANCE: f64 = 0.5;

/// Notes a budget that the limit of the off current contradicts, or that leaves the divider out.
pub(super) fn check(draft: &Draft, root: &Table<'_, '_>) {
    let Some(budget) = draft.off_paths.as_deref().and_then(OffBudget::of) else { return };
    divider_is_in(draft, root);
    let Some(LimitDraft { at: Some(at), min, max }) = draft.limits.get(&QuantityName::OffCurrent) else {
        return;
    };
    let nominal = budget.nominal_at(at.value);
    let what = format!("the paths of [[off_path]] draw {nominal} at {}", at.value);
    if let Some(max) = max.as_ref().filter(|max| nominal.0 > max.value) {
        root.problem(max, &format!("{what}, so that no board of this design passes"));
    }
    if let Some(min) = min.as_ref().filter(|min| nominal.0 < min.value) {
        root.problem(min, &format!("{what}, so that no board of this design passes"));
    }
}

/// Notes a divider in front of the detector that no path stands for: it draws while the board is off, or the board would
/// never come back. A path stands for it by its resistance, or by its name where several are put together.
fn divider_is_in(draft: &Draft, root: &Table<'_, '_>) {
    let (Some(paths), Some(parts)) = (&draft.off_paths, &draft.parts) else { return };
    let Some(divider) = parts.parts.divider else { return };
    let across = divider.across();
    if divider.top <= Ohms::ZERO || divider.bottom <= Ohms::ZERO {
        return;
    }
    let stands_for_it = |path: &OffPath| {
        let (named, least) = (path.name.to_lowercase().contains("divider"), 1.0 - divider.tolerance);
        match path.draws {
            Draws::Resistance(ohms) if named => ohms.0 * (1.0 - path.tolerance) <= across.0 / least,
            Draws::Resistance(ohms) => {
                (ohms.0 / across.0 - 1.0).abs() <= path.tolerance.max(divider.tolerance)
            }
            Draws::Current(_) => named,
        }
    };
    if !paths.iter().any(|path| path.conducts != Conducts::On && stands_for_it(path)) {
        root.problem(
            &parts.trip,
            &format!(
                "[divider] in front of it is {across} across the supply and draws while the board is off, but no [[off_path]] \
                 stands for it; wanted one with \"divider\" in its name and at most that resistance"
            ),
        );
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::profile::sample::{RIVER_NODE, problems};
    use insta::assert_snapshot as says;

    fn path(draws: Draws, tolerance: f64, conducts: Conducts) -> OffPath {
        OffPath { name: "part".into(), draws, tolerance, conducts }
    }

    /// Worked by hand: 1 Mohm 5 % beside 1 uA 20 %, and a resistor that conducts while the board is on.
    #[test]
    fn the_budget_adds_up_what_conducts_while_off() {
        let paths = [
            path(Draws::Resistance(Ohms(1e6)), 0.05, Conducts::Off),
            path(Draws::Current(Amps(1e-6)), 0.2, Conducts::Always),
            path(Draws::Resistance(Ohms(1e3)), 0.05, Conducts::On),
        ];
        let budget = OffBudget::of(&paths).expect("two paths");
        assert!((budget.conductance.nominal.0 - 1e-6).abs() < 1e-15);
        assert!((budget.conductance.most.0 - 1e-6 / 0.95).abs() < 1e-15);
        assert!((budget.conductance.least.0 - 1e-6 / 1.05).abs() < 1e-15);
        assert!((budget.current.least.0 - 0.8e-6).abs() < 1e-15);
        assert!((budget.nominal_at(Volts(2.8)).0 - 3.8e-6).abs() < 1e-15);
        assert_eq!(OffBudget::of(&paths[2..]), None);
    }

    #[test]
    fn the_shipped_budget_fits_the_shipped_limit() {
        let profile = Profile::read("p.toml", RIVER_NODE).expect("a good profile");
        let drawn = profile.off_budget().expect("paths").nominal_at(Volts(5.8));
        assert!((1.0e-6..=4.0e-6).contains(&drawn.0), "{drawn}");
    }

    #[test]
    fn a_path_is_a_resistance_or_a_current_and_says_when_it_conducts() {
        says!(problems(&[("resistance = \"6.8 Mohm\"", "resistance = \"6.8 Mohm\"\ncurrent = \"1 uA\"")]), @r#"p.toml:75:1: a path has either "resistance" or "current""#);
        says!(problems(&[("resistance = \"6.8 Mohm\"", "resistance = \"0 Mohm\"")]), @r#"p.toml:77:14: off_path[1].resistance = "0 Mohm": not above zero"#);
        says!(problems(&[("resistance = \"6.8 Mohm\"", "resistance = \"390 kohm\"")]), @r#"p.toml:42:54: limits.off_current.max = "4.0 uA": the paths of [[off_path]] draw 16.59 µA at 5.800 V, so that no board of this design passes"#);
        says!(problems(&[("conducts = \"off\"", "conducts = \"perhaps\"")]), @r#"p.toml:79:12: off_path[1].conducts = "perhaps": wanted "off" or "on" or "always""#);
    }

    /// 2 x 2.2 Mohm across the pack are 4.4 Mohm.
    #[test]
    fn a_divider_that_the_budget_leaves_out_is_told() {
        let named = "name = \"divider\"  ";
        let left_out = [(named, "name = \"indicator\""), ("\"4.4 Mohm\"", "\"10 Mohm\"")];
        says!(problems(&left_out), @r#"p.toml:46:8: detector.trip = "3.00 V": [divider] in front of it is 4.400 MΩ across the supply and draws while the board is off, but no [[off_path]] stands for it; wanted one with "divider" in its name and at most that resistance"#);
        assert!(problems(&left_out[1..]).contains("at most that resistance"), "its name alone does not");
        assert_eq!(problems(&[(named, "name = \"indicator\"")]), "", "its resistance tells");
        let together = [(named, "name = \"Divider and LED\""), ("\"4.4 Mohm\"", "\"4.0 Mohm\"")];
        assert_eq!(problems(&together), "", "its name tells");
        let as_current = [("resistance = \"4.4 Mohm\"", "current = \"1.3 uA\"")];
        assert_eq!(problems(&as_current), "", "its name tells");
    }
}
