//! What can go wrong with an instrument: what happened, where, what was read, what was wanted, what to do next.

use super::scpi::DeviceError;
use crate::trace::{BenchFault, FaultKind};
use std::fmt;
use std::sync::Arc;
use std::time::Duration;

/// Which instrument, at which port.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Place {
    /// What the bench calls the instrument.
    pub instrument: String,
    /// Path or name of its port.
    pub port: String,
}

impl fmt::Display for Place {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} on {}", self.instrument, self.port)
    }
}

/// A failure of an instrument or of the link to it.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum InstrumentError {
    /// There is no such port.
    #[error("{place}: there is no such port; {}; check the cable, then name a port in the bench file", present(.ports))]
    UnknownPort {
        /// Where.
        place: Arc<Place>,
        /// The ports that are there.
        ports: Vec<String>,
    },
    /// Another program, or another run of this one, has the port.
    #[error("{place}: the port is taken by another program; close that program, or use another port")]
    PortTaken {
        /// Where.
        place: Arc<Place>,
    },
    /// The port cannot be opened or set up.
    #[error(
        "{place}: the port cannot be opened: {cause}; check that it is a serial port and that you may use it"
    )]
    NotOpened {
        /// Where.
        place: Arc<Place>,
        /// What the system says.
        cause: String,
    },
    /// Nothing came in time.
    #[error("{place} did not answer {command:?} within {} ms; check that it is on, its cable and its baud rate", .wait.as_millis())]
    NoReply {
        /// Where.
        place: Arc<Place>,
        /// What was sent.
        command: String,
        /// How long was waited.
        wait: Duration,
    },
    /// A line began and did not end in time. It is never used.
    #[error(
        "{place} answered {command:?} with {read:?} and no line end within {} ms; the reply is not used; \
         check the cable and the baud rate", .wait.as_millis()
    )]
    CutReply {
        /// Where.
        place: Arc<Place>,
        /// What was sent.
        command: String,
        /// What came of the line.
        read: String,
        /// How long was waited.
        wait: Duration,
    },
    /// A line came that is no answer to the question.
    #[error(
        "{place} answered {command:?} with {read:?}, wanted {wanted}; \
         check the baud rate and that the definition fits the instrument"
    )]
    BadReply {
        /// Where.
        place: Arc<Place>,
        /// What was sent.
        command: String,
        /// The line.
        read: String,
        /// What the answer must be.
        wanted: &'static str,
    },
    /// A reading was above the range where a number was needed.
    #[error("{place} answered {command:?} with an overload, wanted a number; check its range and the wiring")]
    Overload {
        /// Where.
        place: Arc<Place>,
        /// What was sent.
        command: String,
    },
    /// The instrument put errors in its queue.
    #[error("{place} reported {} after {command:?}; check the command in the definition and the value", list(.errors))]
    Reported {
        /// Where.
        place: Arc<Place>,
        /// What was sent last.
        command: String,
        /// The queue, oldest first; never empty.
        errors: Vec<DeviceError>,
    },
    /// A setting reads back as another value.
    #[error(
        "{place} did not take {command:?}: it reads back {read:?} (before: {before}); {}; \
         nothing else must be set at the instrument during a run", reported(.errors)
    )]
    NotTaken {
        /// Where.
        place: Arc<Place>,
        /// What was sent.
        command: String,
        /// The setting before, as last confirmed; `unknown` at first.
        before: String,
        /// What the instrument reads back.
        read: String,
        /// What it says about it.
        errors: Vec<DeviceError>,
    },
    /// The instrument was switched on again, so its settings are lost.
    #[error(
        "{place} has restarted ({evidence}); its settings are lost; check its mains lead, then test the board again"
    )]
    Restarted {
        /// Where.
        place: Arc<Place>,
        /// How it was noticed.
        evidence: String,
    },
    /// The link is gone, or cannot be brought in step again.
    #[error(
        "{place}: the link is lost: {cause}; check the cable and that the instrument is on, then start again"
    )]
    LinkLost {
        /// Where.
        place: Arc<Place>,
        /// What the system says, or what failed.
        cause: String,
    },
    /// Another instrument answers than the bench file names.
    #[error(
        "{place} is not the instrument named in the bench file: its {field} is {read:?}, wanted {wanted:?}; check which cable goes where"
    )]
    WrongInstrument {
        /// Where.
        place: Arc<Place>,
        /// Which field of the identity differs.
        field: &'static str,
        /// What the instrument says.
        read: String,
        /// What the bench file says.
        wanted: String,
    },
    /// This program asked for something that the instrument cannot do.
    #[error("{place} cannot do this: {what}")]
    CannotDo {
        /// Where.
        place: Arc<Place>,
        /// What was asked for.
        what: String,
    },
}

impl InstrumentError {
    /// The sort of failure, as records keep it.
    pub fn kind(&self) -> FaultKind {
        match self {
            Self::NoReply { .. } => FaultKind::NoReply,
            Self::CutReply { .. } | Self::BadReply { .. } => FaultKind::BadReply,
            Self::Overload { .. } => FaultKind::Overload,
            Self::Reported { .. } => FaultKind::InstrumentError,
            Self::NotTaken { .. } => FaultKind::NotTaken,
            Self::Restarted { .. } => FaultKind::Restarted,
            Self::WrongInstrument { .. } => FaultKind::WrongInstrument,
            Self::CannotDo { .. } => FaultKind::Internal,
            Self::UnknownPort { .. }
            | Self::PortTaken { .. }
            | Self::NotOpened { .. }
            | Self::LinkLost { .. } => FaultKind::LinkLost,
        }
    }
}

impl From<InstrumentError> for BenchFault {
    fn from(error: InstrumentError) -> Self {
        Self { kind: error.kind(), text: error.to_string() }
    }
}

fn present(ports: &[String]) -> String {
    match ports {
        [] => "no serial port is present".to_owned(),
        ports => format!("present are {}", ports.join(", ")),
    }
}

fn list(errors: &[DeviceError]) -> String {
    errors.iter().map(ToString::to_string).collect::<Vec<_>>().join(", ")
}

fn reported(errors: &[DeviceError]) -> String {
    match errors {
        [] => "it reports no error".to_owned(),
        errors => format!("it reports {}", list(errors)),
    }
}
