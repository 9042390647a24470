//! A device on a pseudo-terminal: a thread that reads lines as any serial instrument would, and answers in its own time.

mod conversation;
mod lines;
#[cfg(unix)]
mod pseudo_terminal;
#[cfg(not(unix))]
#[path = "terminal/unsupported.rs"]
mod pseudo_terminal;

pub use conversation::{Exchange, Pace};

use super::device::{Device, Kind};
use super::link_faults::LinkFaults;
use super::{SharedWorld, lock};
use conversation::{Conversation, Shared, Then};
use lines::Lines;
use pseudo_terminal::{PseudoTerminal, Waker};
use std::io;
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Arc, Mutex};
use std::thread::JoinHandle;

/// An instrument that answers on a port until it is dropped.
pub struct Terminal {
    kind: Kind,
    port: PathBuf,
    identity: String,
    world: SharedWorld,
    shared: Arc<Shared>,
    waker: Waker,
    thread: Option<JoinHandle<()>>,
}

impl Terminal {
    /// Starts `device` on a port with the name `port`.
    ///
    /// # Errors
    /// The system has no pseudo-terminals or none left, `port` exists, or no thread could be started.
    pub fn start(
        device: Device,
        port: &Path,
        world: &SharedWorld,
        pace: Pace,
        faults: Arc<Mutex<LinkFaults>>,
    ) -> io::Result<Self> {
        let pseudo_terminal = PseudoTerminal::open(port)?;
        let waker = pseudo_terminal.waker();
        let kind = device.kind();
        let identity = device.identity().to_owned();
        let shared = Arc::new(Shared {
            device: Mutex::new(device),
            faults,
            exchanges: Mutex::default(),
            stop: AtomicBool::new(false),
        });
        let conversation =
            Conversation { kind, world: world.clone(), pace, shared: shared.clone(), received: 0 };
        let thread = std::thread::Builder::new()
            .name(format!("simulated {}", port.display()))
            .spawn(move || serve(pseudo_terminal, conversation))?;
        Ok(Self {
            kind,
            port: port.to_owned(),
            identity,
            world: world.clone(),
            shared,
            waker,
            thread: Some(thread),
        })
    }

    /// What kind of instrument it is.
    pub fn kind(&self) -> Kind {
        self.kind
    }

    /// The name of its port.
    pub fn port(&self) -> &Path {
        &self.port
    }

    /// What it called itself when it was switched on.
    pub fn identity(&self) -> &str {
        &self.identity
    }

    /// Power fails and comes back at once.
    pub fn restart(&self) {
        lock(&self.shared.device).restart(&self.world);
    }

    /// Takes the messages it has dealt with since this was last asked, oldest first.
    pub fn take_exchanges(&self) -> Vec<Exchange> {
        lock(&self.shared.exchanges).drain(..).collect()
    }

    /// Pulls the plug: the port is gone when this returns.
    pub fn hang_up(&mut self) {
        let Some(thread) = self.thread.take() else { return };
        self.shared.stop.store(true, Ordering::Release);
        // Where the port is already gone, there is no reader left to wake.
        let _ = self.waker.wake();
        let _ = thread.join();
    }
}

impl Drop for Terminal {
    fn drop(&mut self) {
        self.hang_up();
    }
}

/// Reads until told to stop, or until the port is gone.
fn serve(mut port: PseudoTerminal, mut conversation: Conversation) {
    let mut lines = Lines::default();
    let mut buffer = [0; 256];
    while let Ok(count) = port.read(&mut buffer) {
        for byte in &buffer[..count] {
            if conversation.shared.stop.load(Ordering::Acquire) {
                return;
            }
            let Some(line) = lines.push(*byte) else { continue };
            match conversation.answer(&line, &mut port) {
                Ok(Then::GoOn) => {}
                Ok(Then::ForgetInput) => {
                    lines.clear();
                    if port.forget_input().is_err() {
                        return;
                    }
                    break;
                }
                Ok(Then::HangUp) | Err(_) => return,
            }
        }
    }
}
