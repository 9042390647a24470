//! The parts of definitions that a bench puts to use, one for each role.

use super::BenchInstrument;
use crate::instrument::definition::{Ammeter, Role, Source, Voltmeter};

/// What plays each role.
#[derive(Clone, Debug)]
pub(super) struct Parts {
    pub(super) source: Source,
    pub(super) ammeter: Ammeter,
    pub(super) voltmeter: Option<Voltmeter>,
    pub(super) load_voltmeter: Option<Voltmeter>,
}

/// A bench without an instrument it cannot do without.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[error("no instrument plays the role {0}; every bench needs a source and an ammeter")]
pub struct RoleMissing(pub Role);

impl Parts {
    pub(super) fn of(instruments: &[BenchInstrument]) -> Result<Self, RoleMissing> {
        let player = |role| instruments.iter().find(|instrument| instrument.roles.contains(&role));
        let voltmeter = |role| player(role).and_then(|instrument| instrument.definition.voltmeter.clone());
        let source = player(Role::Source).and_then(|instrument| instrument.definition.source.clone());
        let ammeter = player(Role::Ammeter).and_then(|instrument| instrument.definition.ammeter.clone());
        Ok(Self {
            source: source.ok_or(RoleMissing(Role::Source))?,
            ammeter: ammeter.ok_or(RoleMissing(Role::Ammeter))?,
            voltmeter: voltmeter(Role::Voltmeter),
            load_voltmeter: voltmeter(Role::LoadVoltmeter),
        })
    }
}
