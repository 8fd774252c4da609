//! The window's end of the worker: what was asked, what came back, what is stale.

use crate::study::{
    Case, Event, Failure, Improved, Message, Request, RunId, SolveReport, Solved, StepRecord,
    Worker, new_engine,
};
use std::sync::Arc;

/// Connection to the worker and everything that came through it.
pub struct Link {
    worker: Worker,
    solving: Option<(RunId, Case)>,
    improving: Option<RunId>,
    /// Case asked for last, so that it is not asked twice.
    asked: Option<Case>,
    /// Newest solved state.
    pub solved: Option<Arc<Solved>>,
    /// Stage in words and fraction done of the present run.
    pub stage: Option<(String, f64)>,
    /// Iterations of the present or last improvement.
    pub steps: Vec<StepRecord>,
    /// Result of the last improvement.
    pub improved: Option<Arc<Improved>>,
    /// Why the last run gave nothing.
    pub failure: Option<Failure>,
}

/// What the studio must do about a message.
pub enum News {
    /// Nothing but a repaint.
    Nothing,
    /// A state was solved.
    Solved(Arc<SolveReport>),
    /// A step came in.
    Step(usize),
    /// An improvement ended.
    Finished(Arc<Improved>),
    /// A run failed.
    Failed(String),
}

impl Link {
    /// Start a worker; `wake` asks the window for a frame.
    pub fn new(wake: impl Fn() + Send + Sync + 'static) -> Self {
        Self {
            worker: Worker::new(new_engine, wake),
            solving: None,
            improving: None,
            asked: None,
            solved: None,
            stage: None,
            steps: Vec::new(),
            improved: None,
            failure: None,
        }
    }

    /// Whether an improvement runs.
    pub fn is_improving(&self) -> bool {
        self.improving.is_some()
    }

    /// Whether anything runs.
    pub fn is_busy(&self) -> bool {
        self.improving.is_some() || self.solving.is_some()
    }

    /// Whether improvements are held.
    pub fn is_paused(&self) -> bool {
        self.worker.is_paused()
    }

    /// Whether the solved state belongs to another case than this.
    pub fn is_stale(&self, case: &Case) -> bool {
        self.solved.as_ref().is_none_or(|s| s.case != *case)
    }

    /// Ask for a state, unless it is known, asked for, or an improvement runs.
    pub fn want(&mut self, case: &Case) {
        if self.improving.is_some() || !self.is_stale(case) || self.asked.as_ref() == Some(case) {
            return;
        }
        self.asked = Some(case.clone());
        let run = self.worker.submit(Request::Solve { case: case.clone() });
        self.solving = Some((run, case.clone()));
    }

    /// Start an improvement.
    pub fn improve(&mut self, case: &Case) {
        self.steps.clear();
        self.improved = None;
        self.failure = None;
        self.solving = None;
        self.improving = Some(self.worker.submit(Request::Improve { case: case.clone() }));
    }

    /// Stop what runs.
    pub fn stop(&self) {
        self.worker.stop();
    }

    /// Hold or go on.
    pub fn set_paused(&self, paused: bool) {
        self.worker.set_paused(paused);
    }

    /// Take in all that happened since the last frame.
    pub fn drain(&mut self) -> Vec<News> {
        let messages = self.worker.poll();
        messages.into_iter().map(|m| self.take(m)).collect()
    }

    fn take(&mut self, Message { run, event }: Message) -> News {
        let mine_solving = self.solving.as_ref().is_some_and(|s| s.0 == run);
        let mine_improving = self.improving == Some(run);
        match event {
            Event::Accepted => News::Nothing,
            Event::Stage { text, fraction } => {
                if mine_solving || mine_improving {
                    self.stage = Some((text, fraction));
                }
                News::Nothing
            }
            Event::Step(step) => {
                if mine_improving {
                    self.steps.push(*step);
                    return News::Step(self.steps.len() - 1);
                }
                News::Nothing
            }
            Event::Solved(solved) => {
                if mine_solving {
                    self.solving = None;
                    self.stage = None;
                    self.failure = None;
                    let solved = Arc::new(*solved);
                    self.solved = Some(solved.clone());
                    return News::Solved(Arc::new(solved.report.clone()));
                }
                News::Nothing
            }
            Event::Finished(improved) => {
                if !mine_improving {
                    return News::Nothing;
                }
                self.improving = None;
                self.stage = None;
                let improved = Arc::new(*improved);
                self.steps.clone_from(&improved.history);
                self.solved = Some(Arc::new(improved.best.clone()));
                self.asked = Some(improved.best.case.clone());
                self.improved = Some(improved.clone());
                News::Finished(improved)
            }
            Event::Failed(failure) => {
                if mine_improving {
                    self.improving = None;
                    self.asked = None;
                }
                if mine_solving {
                    self.solving = None;
                }
                if (mine_improving || mine_solving) && failure != Failure::Stopped {
                    self.stage = None;
                    let sentence = failure.to_string();
                    self.failure = Some(failure);
                    return News::Failed(sentence);
                }
                News::Nothing
            }
        }
    }
}
