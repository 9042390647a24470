//! The text of IEEE 488.2 and SCPI-1999, both ways. Pure: bytes and text in, typed values out; no port and no clock.

mod error_queue;
mod framing;
mod identity;
mod number;
mod status;

pub use error_queue::{DeviceError, ErrorClass};
pub use framing::{Framer, LineTooLong, MAX_LINE};
pub use identity::Identity;
pub use number::{NotNumeric, Number, write_number};
pub use status::EventStatus;
