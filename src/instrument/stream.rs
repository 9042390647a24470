//! A stream of bytes to an instrument: a serial port here, any other transport later.

use std::io;
use std::time::Duration;

/// What a session needs of a transport. A stream blocks, on a thread of its own.
pub trait ByteStream: Send {
    /// Reads what has come, waiting at most `wait` for the first byte.
    ///
    /// # Errors
    /// `TimedOut` when nothing came, `Interrupted` when a signal came first; with any other error, as with `Ok(0)`,
    /// the stream is lost.
    fn read(&mut self, buffer: &mut [u8], wait: Duration) -> io::Result<usize>;

    /// Writes some of `bytes`, waiting at most `wait` until there is room.
    ///
    /// # Errors
    /// As for [`ByteStream::read`].
    fn write(&mut self, bytes: &[u8], wait: Duration) -> io::Result<usize>;

    /// Drops all that has come and was not read.
    ///
    /// # Errors
    /// The stream is lost.
    fn clear_input(&mut self) -> io::Result<()>;

    /// The transport's settings as it reports them itself, for people; `None` where there are none.
    fn settings(&self) -> Option<String>;
}
