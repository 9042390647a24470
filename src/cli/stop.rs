//! The operator's stop: Ctrl-C, or a signal that ends a process.

use std::future::pending;

/// Becomes ready at the first signal. Later ones change nothing: switching off is under way.
#[cfg(unix)]
pub(super) async fn asked_to_stop() {
    use tokio::signal::unix::{SignalKind, signal};
    let listen = |kind| signal(kind).ok();
    let (Some(mut interrupt), Some(mut terminate), Some(mut hang_up)) =
        (listen(SignalKind::interrupt()), listen(SignalKind::terminate()), listen(SignalKind::hangup()))
    else {
        return pending().await;
    };
    tokio::select! {
        _ = interrupt.recv() => {}
        _ = terminate.recv() => {}
        _ = hang_up.recv() => {}
    }
}

/// Becomes ready at the first Ctrl-C.
#[cfg(not(unix))]
pub(super) async fn asked_to_stop() {
    if tokio::signal::ctrl_c().await.is_err() {
        pending::<()>().await;
    }
}
