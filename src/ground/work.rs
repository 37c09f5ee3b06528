//! Running work seen from outside: which phase, how far, and a way to stop it.

use std::sync::atomic::{AtomicBool, AtomicU64, Ordering};
use std::sync::{Arc, Mutex};

/// Handed to every long kernel as an ordinary parameter; clones share one state.
#[derive(Clone, Debug, Default)]
pub struct Work {
    stop: Arc<AtomicBool>,
    shared: Arc<Shared>,
}

#[derive(Debug, Default)]
struct Shared {
    done: AtomicU64,
    total: AtomicU64,
    phase: Mutex<String>,
}

/// The user asked the work to stop; whatever was half done is dropped.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[error("stopped")]
pub struct Stopped;

/// How far the work is.
#[derive(Clone, Debug, PartialEq)]
pub struct Progress {
    pub phase: String,
    pub done: u64,
    /// 0 while the amount is not known.
    pub total: u64,
}

impl Work {
    /// Work nobody watches or stops.
    pub fn quiet() -> Self {
        Self::default()
    }

    /// A part of this work: it stops with it, but its phases and steps are its own, so that many parts at once
    /// do not talk over each other.
    pub fn part(&self) -> Self {
        Self { stop: Arc::clone(&self.stop), shared: Arc::default() }
    }

    /// Begins a phase of `total` steps (0 = unknown).
    pub fn phase(&self, name: &str, total: u64) {
        let mut phase = self.shared.phase.lock().unwrap_or_else(|poisoned| poisoned.into_inner());
        name.clone_into(&mut phase);
        self.shared.done.store(0, Ordering::Relaxed);
        self.shared.total.store(total, Ordering::Relaxed);
    }

    /// Counts `steps` as done. Call it at least every few milliseconds of work.
    ///
    /// # Errors
    /// [`Stopped`] when the user asked for it.
    pub fn advance(&self, steps: u64) -> Result<(), Stopped> {
        self.shared.done.fetch_add(steps, Ordering::Relaxed);
        if self.is_stopped() { Err(Stopped) } else { Ok(()) }
    }

    /// Asks the work to stop.
    pub fn stop(&self) {
        self.stop.store(true, Ordering::Relaxed);
    }

    pub fn is_stopped(&self) -> bool {
        self.stop.load(Ordering::Relaxed)
    }

    pub fn progress(&self) -> Progress {
        let phase = self.shared.phase.lock().unwrap_or_else(|poisoned| poisoned.into_inner());
        Progress {
            phase: phase.clone(),
            done: self.shared.done.load(Ordering::Relaxed),
            total: self.shared.total.load(Ordering::Relaxed),
        }
    }
}
