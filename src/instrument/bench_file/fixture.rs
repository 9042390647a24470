//! What holds the board, and where the voltmeter is connected.

use crate::document::Table;
use crate::units::Ohms;

/// How board and meters are connected.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Fixture {
    /// Resistance of both leads between supply and board together, where it is known.
    pub lead_resistance: Option<Ohms>,
    /// Where the voltmeter is connected.
    pub voltmeter: VoltmeterPlace,
}

/// On which side of the ammeter the voltmeter is connected.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum VoltmeterPlace {
    /// Across the board's terminals. The ammeter reads the voltmeter's current too, which is taken off.
    #[default]
    BehindAmmeter,
    /// On the supply's side. Its current does not pass the ammeter; leads and burden drop voltage between it and the
    /// board. The load's current counts there: 110 mA through 0.1 ohm of burden drop 11 mV, an off current of 2.5 µA
    /// through 100 ohm drops 0.25 mV.
    BeforeAmmeter,
}

impl Fixture {
    pub(super) fn read(mut table: Table<'_, '_>) -> Self {
        let leads = table.optional_quantity::<Ohms>("lead_resistance");
        let places = [
            ("behind_ammeter", VoltmeterPlace::BehindAmmeter),
            ("before_ammeter", VoltmeterPlace::BeforeAmmeter),
        ];
        let place = table.optional_choice("voltmeter", &places);
        if let Some(leads) = &leads
            && leads.value < Ohms::ZERO
        {
            table.problem(leads, "below zero");
        }
        if let Some(place) = &place
            && place.value == VoltmeterPlace::BeforeAmmeter
            && leads.is_none()
        {
            table.problem(
                place,
                "the drop between it and the board must be known; wanted lead_resistance too",
            );
        }
        Self {
            lead_resistance: leads.map(|leads| leads.value),
            voltmeter: place.map(|place| place.value).unwrap_or_default(),
        }
    }
}
