//! Opens a serial port for one instrument.

use super::definition::{DataBits, FlowControl, Parity, SerialSettings, StopBits};
use super::error::{InstrumentError, Place};
use super::stream::ByteStream;
use serialport::{ClearBuffer, ErrorKind, SerialPort};
use std::io::{self, Read, Write};
use std::sync::Arc;
use std::time::Duration;

/// Opens the port named in `place` for this program alone, and drops what had come before.
///
/// # Errors
/// No such port (with the ports that are there), taken by another program, or not to be opened.
pub fn open(place: &Arc<Place>, settings: &SerialSettings) -> Result<Box<dyn ByteStream>, InstrumentError> {
    let opened = serialport::new(&place.port, settings.baud)
        .data_bits(match settings.data_bits {
            DataBits::Seven => serialport::DataBits::Seven,
            DataBits::Eight => serialport::DataBits::Eight,
        })
        .parity(match settings.parity {
            Parity::None => serialport::Parity::None,
            Parity::Even => serialport::Parity::Even,
            Parity::Odd => serialport::Parity::Odd,
        })
        .stop_bits(match settings.stop_bits {
            StopBits::One => serialport::StopBits::One,
            StopBits::Two => serialport::StopBits::Two,
        })
        .flow_control(match settings.flow {
            FlowControl::None => serialport::FlowControl::None,
            FlowControl::XonXoff => serialport::FlowControl::Software,
            FlowControl::RtsCts => serialport::FlowControl::Hardware,
        })
        .open();
    let port = opened.map_err(|error| not_opened(place, &error))?;
    let mut stream = SerialStream(port);
    stream
        .clear_input()
        .map_err(|error| InstrumentError::NotOpened { place: Arc::clone(place), cause: error.to_string() })?;
    Ok(Box::new(stream))
}

fn not_opened(place: &Arc<Place>, error: &serialport::Error) -> InstrumentError {
    let place = Arc::clone(place);
    match error.kind {
        ErrorKind::Io(io::ErrorKind::NotFound) => {
            InstrumentError::UnknownPort { place, ports: ports_present() }
        }
        ErrorKind::NoDevice => InstrumentError::PortTaken { place },
        ErrorKind::InvalidInput | ErrorKind::Unknown | ErrorKind::Io(_) => {
            InstrumentError::NotOpened { place, cause: error.description.clone() }
        }
    }
}

/// The serial ports that are there: first the names that stay the same when a cable is plugged in again.
pub fn ports_present() -> Vec<String> {
    let stable = std::fs::read_dir("/dev/serial/by-id").into_iter().flatten().flatten();
    let mut names: Vec<String> = stable.map(|entry| entry.path().display().to_string()).collect();
    names.sort();
    let mut others: Vec<String> =
        serialport::available_ports().unwrap_or_default().into_iter().map(|port| port.port_name).collect();
    others.sort();
    names.extend(others);
    names
}

struct SerialStream(Box<dyn SerialPort>);

impl ByteStream for SerialStream {
    fn read(&mut self, buffer: &mut [u8], wait: Duration) -> io::Result<usize> {
        self.0.set_timeout(wait)?;
        self.0.read(buffer)
    }

    fn write(&mut self, bytes: &[u8], wait: Duration) -> io::Result<usize> {
        self.0.set_timeout(wait)?;
        self.0.write(bytes)
    }

    fn clear_input(&mut self) -> io::Result<()> {
        Ok(self.0.clear(ClearBuffer::Input)?)
    }

    fn settings(&self) -> Option<String> {
        let baud = self.0.baud_rate().ok()?;
        let data = u8::from(self.0.data_bits().ok()?);
        let parity = match self.0.parity().ok()? {
            serialport::Parity::None => 'N',
            serialport::Parity::Even => 'E',
            serialport::Parity::Odd => 'O',
        };
        let stop = u8::from(self.0.stop_bits().ok()?);
        let flow = match self.0.flow_control().ok()? {
            serialport::FlowControl::None => "no handshake",
            serialport::FlowControl::Software => "XON/XOFF",
            serialport::FlowControl::Hardware => "RTS/CTS",
        };
        Some(format!("{baud} baud {data}{parity}{stop}, {flow}"))
    }
}
