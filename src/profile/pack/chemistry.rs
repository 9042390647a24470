//! Whether supply and trip suit the cells the profile names. The figures are common practice for the chemistry, with room.

use super::PackDraft;
use crate::document::Table;
use crate::profile::QuantityName;
use crate::profile::draft::Draft;
use crate::units::Volts;

/// The chemistry of a cell, as far as its voltages go.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Chemistry {
    /// Lithium-ion with cobalt, manganese or nickel.
    LiIon,
    /// Lithium iron phosphate.
    LiFePo4,
    /// Nickel-metal hydride.
    NiMh,
    /// Nickel-cadmium.
    NiCd,
    /// Lead-acid.
    LeadAcid,
    /// Alkaline, not charged.
    Alkaline,
}

impl Chemistry {
    /// The words of a profile.
    pub(super) const WORDS: [(&'static str, Self); 6] = [
        ("li-ion", Self::LiIon),
        ("lifepo4", Self::LiFePo4),
        ("nimh", Self::NiMh),
        ("nicd", Self::NiCd),
        ("lead-acid", Self::LeadAcid),
        ("alkaline", Self::Alkaline),
    ];

    /// Volts of a cell: the lowest that does it no harm at any rate, and the highest of a charge.
    fn span(self) -> (f64, f64) {
        match self {
            Self::LiIon => (2.5, 4.4),
            Self::LiFePo4 => (2.0, 3.7),
            Self::NiMh | Self::NiCd => (0.8, 1.6),
            Self::LeadAcid => (1.6, 2.5),
            Self::Alkaline => (0.7, 1.7),
        }
    }
}

/// Notes a maximum no such pack reaches, and a trip that comes too late for it.
pub(super) fn check(pack: &PackDraft, draft: &Draft, root: &Table<'_, '_>) {
    let (Some(chemistry), Some(cells)) = (&pack.chemistry, &pack.cells) else { return };
    let (lowest, highest) = chemistry.value.span();
    let (lowest, highest) = (Volts(lowest * cells.value as f64), Volts(highest * cells.value as f64));
    if let Some(maximum) = draft.supply.maximum.as_ref().filter(|maximum| maximum.value > highest) {
        root.problem(maximum, &format!("{cells} of {chemistry} reach {highest} at most"));
    }
    let trip = draft.volts(QuantityName::Trip, |limit| &limit.min);
    if let Some(trip) = trip.filter(|trip| trip.value < lowest) {
        root.problem(&trip, &format!("{cells} of {chemistry} are harmed below {lowest}"));
    }
}
