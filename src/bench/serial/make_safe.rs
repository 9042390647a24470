//! Switches a bench's output off when nothing else about the bench is known to work.

use super::connect::{ConnectError, greeted, open};
use crate::clock::Clock;
use crate::instrument::bench_file::{BenchFile, RoleMissing};
use crate::instrument::definition::Role;
use crate::instrument::scpi::Identity;
use crate::units::Volts;

/// Commands the output off and reads it back. Opens the port of the supply alone, so that a meter that does not
/// answer cannot keep the output on. Returns who the supply says it is.
///
/// # Errors
/// The supply does not answer, is another one than the bench file names, or its output does not read back as off.
pub async fn make_safe(bench: &BenchFile, clock: Clock) -> Result<Identity, ConnectError> {
    let supply = bench.player(Role::Source).ok_or(RoleMissing(Role::Source))?;
    // Its voltmeter, if it has one, goes to its lowest range: no run follows on this connection.
    match greeted(open(supply, Volts::ZERO, clock)).await {
        Ok((_, greeting)) => Ok(greeting.identity),
        Err(error) => Err(ConnectError::Instruments { errors: vec![error] }),
    }
}
