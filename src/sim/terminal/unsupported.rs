//! Stands in where the system has no pseudo-terminals: none can be opened.

use std::io::{self, ErrorKind, Write};
use std::path::Path;

/// A pseudo-terminal, of which there are none.
pub(super) struct PseudoTerminal;

/// Wakes nobody.
pub(super) struct Waker;

impl PseudoTerminal {
    pub(super) fn open(_: &Path) -> io::Result<Self> {
        Err(unsupported())
    }

    pub(super) fn waker(&self) -> Waker {
        Waker
    }

    pub(super) fn read(&mut self, _: &mut [u8]) -> io::Result<usize> {
        Err(unsupported())
    }

    pub(super) fn forget_input(&mut self) -> io::Result<()> {
        Err(unsupported())
    }
}

impl Write for PseudoTerminal {
    fn write(&mut self, _: &[u8]) -> io::Result<usize> {
        Err(unsupported())
    }

    fn flush(&mut self) -> io::Result<()> {
        Ok(())
    }
}

impl Waker {
    pub(super) fn wake(&self) -> io::Result<()> {
        Err(unsupported())
    }
}

fn unsupported() -> io::Error {
    let text = "this system has no pseudo-terminals, which the simulated bench needs; use Linux or macOS";
    io::Error::new(ErrorKind::Unsupported, text)
}
