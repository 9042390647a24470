//! The instruments of a bench as they named themselves, for the record.

use crate::bench::serial::SerialBench;
use crate::instrument::bench_file::BenchFile;
use crate::record::Instrument;

pub(super) fn instruments(file: &BenchFile, bench: &SerialBench) -> Vec<Instrument> {
    let seats = file.instruments().iter().zip(bench.identities());
    seats
        .map(|(seat, identity)| Instrument {
            roles: seat.roles.iter().map(|role| role.key().to_owned()).collect(),
            maker: identity.maker.clone(),
            model: identity.model.clone(),
            serial_number: identity.serial.clone(),
            firmware: identity.firmware.clone(),
            port: seat.port.clone(),
            calibration_due: seat.calibration_due,
        })
        .collect()
}
