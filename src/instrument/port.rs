//! One thread per port: it owns the session, and jobs for it wait in a queue.
//!
//! A job (a command and the questions that belong to it) is indivisible. When whoever asked for it has gone, a job that
//! has not begun is skipped and one that has runs to its end, so the link stays in step. When the queue is closed, the
//! session ends, which switches off an output that is still on.

use super::error::{InstrumentError, Place};
use super::session::Session;
use std::sync::{Arc, mpsc};
use std::thread::JoinHandle;
use tokio::sync::oneshot;

type Job = Box<dyn FnOnce(&mut Session) + Send>;

/// An instrument, as the async side sees it: a queue of jobs for the thread that owns its session.
///
/// Dropping it waits until the thread has ended, and so until the output is off and the front panel given back.
pub struct Instrument {
    place: Arc<Place>,
    jobs: Option<mpsc::Sender<Job>>,
    thread: Option<JoinHandle<()>>,
}

impl Instrument {
    /// Gives the session a thread of its own.
    ///
    /// # Errors
    /// The system has no thread left.
    pub fn start(mut session: Session) -> Result<Self, InstrumentError> {
        let place = Arc::clone(session.place());
        let (jobs, queue) = mpsc::channel::<Job>();
        let work = move || {
            for job in queue {
                job(&mut session);
            }
        };
        let thread =
            std::thread::Builder::new().name(place.instrument.clone()).spawn(work).map_err(|error| {
                InstrumentError::NotOpened { place: Arc::clone(&place), cause: error.to_string() }
            })?;
        Ok(Self { place, jobs: Some(jobs), thread: Some(thread) })
    }

    /// Which instrument, at which port.
    pub fn place(&self) -> &Arc<Place> {
        &self.place
    }

    /// Queues a job at once; the answer can be awaited later. Dropping the answer before the job begins cancels it.
    pub fn ask<T: Send + 'static>(
        &self,
        job: impl FnOnce(&mut Session) -> Result<T, InstrumentError> + Send + 'static,
    ) -> Answer<T> {
        self.queue(false, job)
    }

    /// Queues a job that is done whether or not anybody waits for its answer.
    pub fn insist<T: Send + 'static>(
        &self,
        job: impl FnOnce(&mut Session) -> Result<T, InstrumentError> + Send + 'static,
    ) -> Answer<T> {
        self.queue(true, job)
    }

    fn queue<T: Send + 'static>(
        &self,
        always: bool,
        job: impl FnOnce(&mut Session) -> Result<T, InstrumentError> + Send + 'static,
    ) -> Answer<T> {
        let (sender, receiver) = oneshot::channel();
        let work: Job = Box::new(move |session| {
            if always || !sender.is_closed() {
                // Nobody waits any more: the result has no reader, the work is done all the same.
                let _ = sender.send(job(session));
            }
        });
        if let Some(jobs) = &self.jobs {
            // A thread that has ended drops the sender inside the job, and the answer says so.
            let _ = jobs.send(work);
        }
        Answer { place: Arc::clone(&self.place), receiver }
    }
}

impl Drop for Instrument {
    fn drop(&mut self) {
        self.jobs = None;
        if let Some(thread) = self.thread.take() {
            // A panic on that thread has been reported there, and its session has ended as always.
            let _ = thread.join();
        }
    }
}

/// The answer to a job, when it comes.
#[must_use = "a job whose answer is dropped is cancelled"]
pub struct Answer<T> {
    place: Arc<Place>,
    receiver: oneshot::Receiver<Result<T, InstrumentError>>,
}

impl<T> Answer<T> {
    /// Waits for it. Dropping this future leaves the link usable.
    ///
    /// # Errors
    /// What the job failed with, or its thread has ended.
    pub async fn wait(self) -> Result<T, InstrumentError> {
        self.receiver.await.unwrap_or_else(|_| {
            Err(InstrumentError::LinkLost {
                place: self.place,
                cause: "the thread of the port has ended".to_owned(),
            })
        })
    }
}
