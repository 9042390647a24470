//! A pseudo-terminal whose far end looks like a serial port under a name of our choice.

use rustix::fs::{Mode, OFlags};
use rustix::pty::{OpenptFlags, grantpt, openpt, ptsname, unlockpt};
use rustix::termios::{OptionalActions, QueueSelector, tcflush, tcgetattr, tcsetattr};
use std::ffi::OsStr;
use std::fs::File;
use std::io::{self, ErrorKind, Read, Write};
use std::os::fd::OwnedFd;
use std::os::unix::ffi::OsStrExt;
use std::os::unix::fs::symlink;
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::time::Duration;

/// Unread bytes beyond which a reply is held back, well below what the kernel takes before a write blocks.
const UNREAD: u64 = 2048;

/// Longest wait for a client to fetch what was sent before the port closes.
const DRAIN: Duration = Duration::from_millis(200);

/// The instrument's end.
pub(super) struct PseudoTerminal {
    master: File,
    /// Kept open, so that the instrument's end outlives its clients, which come and go.
    far_end: Arc<OwnedFd>,
    name: PathBuf,
}

/// Wakes the thread that reads a pseudo-terminal.
pub(super) struct Waker(Arc<OwnedFd>);

impl PseudoTerminal {
    /// Opens a pair and publishes the far end as the symbolic link `name`.
    pub(super) fn open(name: &Path) -> io::Result<Self> {
        let master = openpt(OpenptFlags::RDWR | OpenptFlags::NOCTTY | OpenptFlags::CLOEXEC)?;
        grantpt(&master)?;
        unlockpt(&master)?;
        let path = ptsname(&master, Vec::new())?;
        let path = Path::new(OsStr::from_bytes(path.as_bytes()));
        let far_end = rustix::fs::open(path, OFlags::RDWR | OFlags::NOCTTY | OFlags::CLOEXEC, Mode::empty())?;
        let mut settings = tcgetattr(&far_end)?;
        settings.make_raw();
        tcsetattr(&far_end, OptionalActions::Now, &settings)?;
        // What a bench that was killed left behind leads nowhere.
        if name.is_symlink() && !name.exists() {
            std::fs::remove_file(name)?;
        }
        symlink(path, name)?;
        Ok(Self { master: File::from(master), far_end: Arc::new(far_end), name: name.to_owned() })
    }

    pub(super) fn waker(&self) -> Waker {
        Waker(self.far_end.clone())
    }

    pub(super) fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
        loop {
            match self.master.read(buffer) {
                Err(error) if error.kind() == ErrorKind::Interrupted => {}
                result => return result,
            }
        }
    }

    /// Throws away what clients sent and nobody has read yet.
    pub(super) fn forget_input(&mut self) -> io::Result<()> {
        Ok(tcflush(&self.master, QueueSelector::IFlush)?)
    }

    fn unread(&self) -> io::Result<u64> {
        Ok(rustix::io::ioctl_fionread(&*self.far_end)?)
    }

    /// Waits until a client has fetched what was sent: the kernel throws the rest away when the port closes.
    fn drain(&self) {
        let step = DRAIN / 200;
        for _ in 0..200 {
            // The kernel moves bytes to the far end a moment after they were written.
            std::thread::sleep(step);
            if !self.unread().is_ok_and(|unread| unread > 0) {
                return;
            }
        }
    }
}

impl Write for PseudoTerminal {
    fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
        if self.unread()? > UNREAD { Err(ErrorKind::WouldBlock.into()) } else { self.master.write(bytes) }
    }

    fn flush(&mut self) -> io::Result<()> {
        Ok(())
    }
}

impl Drop for PseudoTerminal {
    fn drop(&mut self) {
        // The name first, so that nobody opens a port about to close. Failing to remove it harms nobody.
        let _ = std::fs::remove_file(&self.name);
        self.drain();
    }
}

impl Waker {
    /// Makes the reader's blocked read return with an empty line.
    pub(super) fn wake(&self) -> io::Result<()> {
        rustix::io::write(&*self.0, b"\n")?;
        Ok(())
    }
}
