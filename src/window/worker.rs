//! Worker threads: what is computed beside the window's thread, so that an edit never waits.
//!
//! A worker has one thread and one job at a time. A newer project stops the job that runs, and its result is thrown away. The Stop
//! button stops the job too, but then the result is kept: the best so far, marked as not proved.

use std::sync::mpsc::{Receiver, Sender, channel};
use std::sync::{Arc, Mutex};

use eframe::egui;

use crate::base::{Progress, Stop};
use crate::design::Settings;
use crate::project::Project;

/// A finished job.
pub struct Done<T> {
    /// The revision of the project that it was done for.
    pub revision: u64,
    /// What came out.
    pub value: T,
    /// How long it took, in milliseconds of wall time.
    pub took_ms: f64,
}

struct Job {
    revision: u64,
    project: Arc<Project>,
    stop: Stop,
}

/// Handle of a worker thread; the thread ends when this is dropped.
pub struct Worker<T> {
    jobs: Option<Sender<Job>>,
    done: Receiver<Done<T>>,
    progress: Arc<Mutex<Option<Progress>>>,
    running: Option<(u64, Stop)>,
    thread: Option<std::thread::JoinHandle<()>>,
}

/// Steps that each stage still gets after the Stop button: enough for a whole design from the best so far.
const GRACE: u64 = 200_000;
/// Smallest covers listed.
const COVERS: usize = 6;

impl<T: Send + 'static> Worker<T> {
    /// Starts the thread; `work` is called there, one project after the other. It asks `ctx` for a repaint whenever there
    /// is something new.
    ///
    /// # Errors
    /// The operating system's, if it has no thread to give.
    pub fn start(
        ctx: &egui::Context,
        name: &str,
        mut work: impl FnMut(&Project, &Settings<'_>) -> T + Send + 'static,
    ) -> std::io::Result<Worker<T>> {
        let (jobs, inbox) = channel::<Job>();
        let (outbox, done) = channel();
        let progress = Arc::new(Mutex::new(None));
        let (shared, ctx) = (Arc::clone(&progress), ctx.clone());
        let thread = std::thread::Builder::new().name(name.into()).spawn(move || {
            while let Ok(mut job) = inbox.recv() {
                while let Ok(newer) = inbox.try_recv() {
                    job = newer;
                }
                let listener = |p: &Progress| {
                    if let Ok(mut slot) = shared.lock() {
                        *slot = Some(p.clone());
                    }
                    ctx.request_repaint_after(std::time::Duration::from_millis(100));
                };
                let start = std::time::Instant::now();
                let settings = Settings {
                    stop: job.stop.clone(),
                    listener: &listener,
                    covers: COVERS,
                    grace: GRACE,
                    ..Settings::default()
                };
                let value = work(&job.project, &settings);
                let took_ms = start.elapsed().as_secs_f64() * 1e3;
                if let Ok(mut slot) = shared.lock() {
                    *slot = None;
                }
                if outbox.send(Done { revision: job.revision, value, took_ms }).is_err() {
                    return;
                }
                ctx.request_repaint();
            }
        })?;
        Ok(Worker { jobs: Some(jobs), done, progress, running: None, thread: Some(thread) })
    }

    /// Works on a project; whatever is running for an older one is stopped.
    pub fn send(&mut self, revision: u64, project: Arc<Project>) {
        self.stop();
        let stop = Stop::default();
        self.running = Some((revision, stop.clone()));
        if let Some(jobs) = &self.jobs {
            // The thread only ends when `jobs` is dropped.
            let _ = jobs.send(Job { revision, project, stop });
        }
    }

    /// The result of the newest revision, once it is there. Older results are dropped.
    pub fn poll(&mut self) -> Option<Done<T>> {
        let newest = self.running.as_ref()?.0;
        let done = self.done.try_iter().filter(|d| d.revision == newest).last()?;
        self.running = None;
        Some(done)
    }

    /// Whether a job is under way.
    pub fn busy(&self) -> bool {
        self.running.is_some()
    }

    /// Ends the running job with the best it has.
    pub fn stop(&self) {
        if let Some((_, stop)) = &self.running {
            stop.raise();
        }
    }

    /// What the running job reported last.
    pub fn progress(&self) -> Option<Progress> {
        self.progress.lock().ok()?.clone()
    }
}

impl<T> Drop for Worker<T> {
    fn drop(&mut self) {
        if let Some((_, stop)) = &self.running {
            stop.raise();
        }
        self.jobs = None;
        if let Some(thread) = self.thread.take() {
            // A worker that panicked has nothing to clean up.
            let _ = thread.join();
        }
    }
}
