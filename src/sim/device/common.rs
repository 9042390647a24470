//! The common commands of IEEE 488.2, 10.

use super::datum::{Bounds, Datum};
use super::message::Unit;
use super::reply::Replies;
use super::{Device, ScpiError, SharedWorld};
use crate::sim::World;

/// Contents of an eight-bit enable register.
const REGISTER: Bounds = Bounds { least: 0.0, most: 255.0, default: 0.0 };

impl Device {
    pub(super) fn common(
        &mut self,
        name: &str,
        unit: &Unit<'_>,
        replies: &mut Replies,
        world: &SharedWorld,
    ) -> Result<(), ScpiError> {
        let name = name.to_ascii_uppercase();
        if !matches!((name.as_str(), unit.query), ("ESE" | "SRE", false)) && !unit.data.is_empty() {
            return Err(ScpiError::PARAMETER_NOT_ALLOWED);
        }
        match (name.as_str(), unit.query) {
            ("IDN", true) => replies.add_indefinite(self.identity.clone()),
            ("ESR", true) => replies.add(self.status.take_events().to_string()),
            ("ESE", true) => replies.add(self.status.event_enable.to_string()),
            ("SRE", true) => replies.add(self.status.service_enable.to_string()),
            ("STB", true) => replies.add(self.status.byte(!replies.is_empty()).to_string()),
            // Every command is carried out before the next one is read, so nothing is ever pending.
            ("OPC", true) => replies.add("1".to_owned()),
            ("OPC", false) => self.status.complete_operation(),
            ("WAI", false) => {}
            ("TST", true) => replies.add("0".to_owned()),
            ("ESE", false) => self.status.event_enable = register(&unit.data)?,
            ("SRE", false) => self.status.service_enable = register(&unit.data)? & !(1 << 6),
            ("CLS", false) => self.status.clear(),
            ("RST", false) => self.reset(world),
            _ => return Err(ScpiError::UNDEFINED_HEADER),
        }
        Ok(())
    }

    /// Settings as the standard wants them after `*RST`; errors, events and what is enabled stay (10.32).
    fn reset(&mut self, world: &SharedWorld) {
        self.reset_meters();
        if self.kind.is_source() {
            world.with(World::restart_supply);
        }
    }
}

/// The one parameter as a register; fractions are rounded (10.10).
fn register(data: &[Datum<'_>]) -> Result<u8, ScpiError> {
    let value = only(data)?.number(REGISTER)?;
    Ok(value.round() as u8)
}

/// The parameter of a command that wants exactly one.
pub(super) fn only<'d, 't>(data: &'d [Datum<'t>]) -> Result<&'d Datum<'t>, ScpiError> {
    match data {
        [] => Err(ScpiError::MISSING_PARAMETER),
        [datum] => Ok(datum),
        _ => Err(ScpiError::PARAMETER_NOT_ALLOWED),
    }
}
