//! A burst of short readings: the voltmeter is told to average over less, read, and put back.

use super::SerialBench;
use crate::instrument::definition::ShortReadings;
use crate::instrument::error::InstrumentError;
use crate::instrument::session::Session;
use crate::trace::Burst;
use crate::units::Volts;
use std::sync::Arc;
use std::time::Duration;

impl SerialBench {
    /// Reads the voltage at the board in quick succession, each time over the short time of the voltmeter's definition.
    pub(super) async fn burst(&mut self) -> Result<Burst, InstrumentError> {
        let voltmeter = self.voltmeter.as_ref();
        let Some((voltmeter, short)) = voltmeter.and_then(|it| Some((it, it.part.short.clone()?))) else {
            // The procedure asks only a bench that said it can.
            let place = self.source.instrument.place();
            return Err(InstrumentError::BadReply {
                place: Arc::clone(place),
                command: "a burst of short readings".to_owned(),
                read: "no voltmeter with [voltmeter.short]".to_owned(),
                wanted: "one at the board's terminals",
            });
        };
        let (read, deadline) = (voltmeter.part.read.clone(), voltmeter.timing.reply_deadline);
        let aperture = short.integration;
        let readings =
            voltmeter.instrument.ask(move |session| take(session, &short, &read, deadline)).wait().await?;
        Burst::of(aperture, &readings).ok_or_else(|| InstrumentError::BadReply {
            place: Arc::clone(voltmeter.instrument.place()),
            command: voltmeter.part.read.clone(),
            read: format!("{} voltages", readings.len()),
            wanted: "a burst of voltages",
        })
    }
}

/// Whatever the readings are, the voltmeter averages over its own time again afterwards.
fn take(
    session: &mut Session,
    short: &ShortReadings,
    read: &str,
    deadline: Duration,
) -> Result<Vec<Volts>, InstrumentError> {
    session.command(&short.begin)?;
    let readings: Result<Vec<Volts>, InstrumentError> = (0..Burst::LENGTH)
        .map(|_| {
            let number = session.query_number_within(read, deadline)?;
            number.value().map(Volts).ok_or_else(|| InstrumentError::Overload {
                place: Arc::clone(session.place()),
                command: read.to_owned(),
            })
        })
        .collect();
    session.command(&short.end)?;
    session.refuse_errors("the short readings")?;
    readings
}
