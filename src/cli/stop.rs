//! The operator's stop: Ctrl-C, or a signal that ends a process.

use std::io;
use tokio::runtime::Runtime;

/// Listens from this moment on, and gives what becomes ready at the first signal. Later ones change nothing: switching
/// off is under way.
///
/// # Errors
/// The system does not let the program listen; then no output must go on, since nothing could stop it in order.
#[cfg(unix)]
pub(super) fn listen(runtime: &Runtime) -> io::Result<impl Future<Output = ()> + use<>> {
    use tokio::signal::unix::{SignalKind, signal};
    let _inside = runtime.enter();
    let mut interrupt = signal(SignalKind::interrupt())?;
    let mut terminate = signal(SignalKind::terminate())?;
    let mut hang_up = signal(SignalKind::hangup())?;
    let mut quit = signal(SignalKind::quit())?;
    Ok(async move {
        tokio::select! {
            _ = interrupt.recv() => {}
            _ = terminate.recv() => {}
            _ = hang_up.recv() => {}
            _ = quit.recv() => {}
        }
    })
}

/// Listens from this moment on, and gives what becomes ready at the first Ctrl-C.
///
/// # Errors
/// The system does not let the program listen; then no output must go on, since nothing could stop it in order.
#[cfg(windows)]
pub(super) fn listen(runtime: &Runtime) -> io::Result<impl Future<Output = ()> + use<>> {
    let _inside = runtime.enter();
    let mut interrupt = tokio::signal::windows::ctrl_c()?;
    Ok(async move {
        interrupt.recv().await;
    })
}
