//! The one thread on which every call into chemfiles is made.
//!
//! Two reasons. Some of chemfiles' readers keep state that is shared by all open files, so two files must not be read at
//! the same time, even by two threads with a file each. And its handles are raw pointers, which may not move between
//! threads, while a [`super::FrameSource`] must. So the handles live on a thread of their own, and everything that needs
//! one is sent there as a closure; calls are thereby one after the other. Reading is not slower for it: the round trip
//! costs some microseconds a frame.

use std::collections::BTreeMap;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::mpsc::{Sender, channel};
use std::sync::{Mutex, OnceLock, PoisonError};

use super::FrameError;

/// A trajectory that is open on the thread, with the frame it is read into.
pub(super) struct OpenFile {
    pub trajectory: chemfiles::Trajectory,
    pub frame: chemfiles::Frame,
}

/// The files open on the thread.
#[derive(Default)]
pub(super) struct OpenFiles {
    files: BTreeMap<u64, OpenFile>,
    next_key: u64,
}

impl OpenFiles {
    /// Keeps a file open and returns its key.
    pub fn insert(&mut self, file: OpenFile) -> u64 {
        let key = self.next_key;
        self.next_key += 1;
        self.files.insert(key, file);
        key
    }

    /// The file of a key.
    pub fn get(&mut self, key: u64) -> Option<&mut OpenFile> {
        self.files.get_mut(&key)
    }
}

type Job = Box<dyn FnOnce(&mut OpenFiles) + Send>;

static THREAD: OnceLock<Option<Sender<Job>>> = OnceLock::new();

/// chemfiles' warnings since they were last taken; without a callback it would print them.
static WARNINGS: Mutex<Vec<String>> = Mutex::new(Vec::new());

/// Runs `job` on the chemfiles thread and waits for its answer. A job must not call this function itself.
pub(super) fn on_chemfiles_thread<T: Send + 'static>(
    job: impl FnOnce(&mut OpenFiles) -> T + Send + 'static,
) -> Result<T, FrameError> {
    let sender = THREAD
        .get_or_init(start)
        .as_ref()
        .ok_or_else(|| failed("its thread could not be started"))?;
    let (answer, answered) = channel();
    let job: Job = Box::new(move |files| {
        let outcome = catch_unwind(AssertUnwindSafe(|| job(files)));
        // The receiver waits below, so the answer always arrives.
        let _ = answer.send(outcome);
    });
    sender.send(job).map_err(|_| failed("its thread has ended"))?;
    match answered.recv() {
        Ok(Ok(value)) => Ok(value),
        Ok(Err(panic)) => {
            let message = panic.downcast_ref::<String>().cloned();
            let message = message.or_else(|| panic.downcast_ref::<&str>().map(ToString::to_string));
            Err(failed(message.as_deref().unwrap_or("no message")))
        }
        Err(_) => Err(failed("its thread has ended")),
    }
}

/// Closes the file of a key, whenever the thread comes to it.
pub(super) fn close(key: u64) {
    if let Some(Some(sender)) = THREAD.get() {
        // At the end of the program the thread may be gone, and the file with it.
        let _ = sender.send(Box::new(move |files| {
            files.files.remove(&key);
        }));
    }
}

/// Takes the warnings that chemfiles gave since the last call; to be called on the chemfiles thread, so that they belong
/// to the job that asks.
pub(super) fn take_warnings() -> Vec<String> {
    std::mem::take(&mut *WARNINGS.lock().unwrap_or_else(PoisonError::into_inner))
}

fn start() -> Option<Sender<Job>> {
    let (sender, jobs) = channel::<Job>();
    let run = move || {
        chemfiles::set_warning_callback(|message: &str| {
            let mut warnings = WARNINGS.lock().unwrap_or_else(PoisonError::into_inner);
            // A reader that warns for each frame must not fill the memory.
            if warnings.len() < 100 {
                warnings.push(message.to_owned());
            }
        });
        let mut files = OpenFiles::default();
        for job in jobs {
            job(&mut files);
        }
    };
    std::thread::Builder::new()
        .name("chemfiles".to_owned())
        .spawn(run)
        .ok()?;
    Some(sender)
}

fn failed(reason: &str) -> FrameError {
    FrameError::ReaderFailed {
        reason: reason.to_owned(),
    }
}
