//! Instruments: as data, and at work.
//!
//! As data: the role each plays, the definition that says what it can do and what to send it, and the bench file that
//! puts them together. What a definition says is the maker's claim; what is true, a bench measures. At work: the text
//! of SCPI, the serial port, and a session that keeps answers with their questions.

pub mod bench_file;
pub mod definition;
pub mod error;
pub mod library;
mod link;
pub mod port;
pub mod scpi;
pub mod serial_port;
pub mod session;
pub mod stream;
