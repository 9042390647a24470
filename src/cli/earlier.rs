//! What earlier boards of the same kind showed at this station, for the search of the next one.

use crate::procedure::{Prior, Spread};
use crate::profile::QuantityName;
use crate::record::{LogFolder, ProfileUsed, Run};
use crate::units::Volts;

/// Boards that are looked at: enough for a spread, few enough to follow a drift.
const NEWEST: usize = 50;

/// The prior from the newest passes of `profile`; nothing is known where the log holds none or cannot be read: a search
/// then takes its windows from the limits alone. Real boards are not told from simulated ones.
pub(super) fn prior(folder: &LogFolder, profile: &ProfileUsed, simulated: bool) -> Prior {
    let mut runs = folder.earlier_passes(profile, NEWEST).unwrap_or_default();
    runs.retain(|run| run.is_simulated() == simulated);
    Prior { trip: spread(&runs, QuantityName::Trip), re_enable: spread(&runs, QuantityName::ReEnable) }
}

fn spread(runs: &[Run], name: QuantityName) -> Option<Spread> {
    let values = runs.iter().filter_map(|run| {
        let judged = run.quantities.iter().find(|judged| judged.quantity.name == name)?;
        Some(Volts(judged.quantity.value))
    });
    Spread::of(&values.collect::<Vec<_>>())
}
