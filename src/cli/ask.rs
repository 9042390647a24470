//! A question to whoever sits at the terminal.

use super::Failure;
use super::stop::listen;
use std::io::Write;
use tokio::runtime::Runtime;

/// A line from the terminal; `None` at its end, and when the operator asks to stop. Reading cannot be called off, so a
/// thread of its own does it; after a stop the program ends, and the thread with it.
pub(super) fn line(runtime: &Runtime, question: &str) -> Result<Option<String>, Failure> {
    let stop = listen(runtime)?;
    let mut err = anstream::stderr();
    write!(err, "{question}").and_then(|()| err.flush())?;
    let (sender, receiver) = tokio::sync::oneshot::channel();
    std::thread::spawn(move || {
        let mut text = String::new();
        let read = std::io::stdin().read_line(&mut text);
        // Nobody waits for the answer any more once the operator has asked to stop.
        let _ = sender.send(read.map(|count| (count > 0).then_some(text)));
    });
    runtime.block_on(async move {
        tokio::select! {
            biased;
            () = stop => Ok(None),
            answer = receiver => Ok(answer.ok().transpose()?.flatten()),
        }
    })
}
