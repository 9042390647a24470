//! What is kept of every run, and the append-only log that keeps it.
//!
//! A run leaves two lines: its whole [`crate::trace::Trace`], and a short [`Run`] that says who, what, when and with
//! which outcome. A run that never ended leaves a mark that the next start finds. A look at the bench
//! itself leaves a [`BenchEntry`] beside the runs. Nothing here judges a board.

mod bench_entry;
mod identity;
mod log;
mod moment;
mod occasion;
mod run;
mod stamp;

pub use bench_entry::{BenchEntry, BenchFound, CheckFound, InstrumentFound};
pub use identity::{
    BenchUsed, BoardUnderTest, Identity, Instrument, ProfileUsed, RunId, Simulated, Software, Subject,
};
pub use log::{
    Finished, KeptStudy, Leftover, Log, LogError, LogFolder, Opened, Rescue, Runs, Study, StudyHeading, Torn,
    Unreadable,
};
pub use moment::Moment;
pub use occasion::Occasion;
pub use run::{Run, SCHEMA, TraceReference};
pub use stamp::now;
