//! The watch: how a long computation learns that it should stop, and tells how far it is.

use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

/// The user asked the computation to stop.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[error("stopped on request")]
pub struct Cancelled;

type Report = dyn Fn(&str, f64) + Send + Sync;

/// Shared handle: clones stop together.
#[derive(Clone, Default)]
pub struct Watch {
    stop: Arc<AtomicBool>,
    report: Option<Arc<Report>>,
}

impl Watch {
    /// A watch that nobody reads: never stops by itself, reports to nowhere.
    pub fn idle() -> Self {
        Self::default()
    }

    /// A watch whose progress (stage in plain words, fraction 0 to 1) goes to `report`.
    pub fn reporting(report: impl Fn(&str, f64) + Send + Sync + 'static) -> Self {
        Self {
            stop: Arc::default(),
            report: Some(Arc::new(report)),
        }
    }

    /// Ask every holder of a clone to stop at its next check.
    pub fn stop(&self) {
        self.stop.store(true, Ordering::Relaxed);
    }

    /// Whether a stop has been asked for.
    pub fn is_stopped(&self) -> bool {
        self.stop.load(Ordering::Relaxed)
    }

    /// To be called at each Newton step, factorisation, thousand elements or insertions.
    ///
    /// # Errors
    /// [`Cancelled`] once [`Watch::stop`] was called.
    pub fn check(&self) -> Result<(), Cancelled> {
        if self.is_stopped() {
            Err(Cancelled)
        } else {
            Ok(())
        }
    }

    /// Tell the stage and the fraction of it done.
    pub fn tell(&self, stage: &str, fraction: f64) {
        if let Some(report) = &self.report {
            report(stage, fraction);
        }
    }
}
