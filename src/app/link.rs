//! The window's end of the worker: what was asked, what came back, what is stale.

use crate::study::{
    Case, Event, Failure, Improved, Message, Request, RunId, SolveReport, Solved, StepRecord,
    Worker, new_engine,
};
use std::sync::Arc;
use std::time::{Duration, Instant};

/// While something is dragged, a solve in progress goes on to its end where the last one took no longer than this: its
/// figures follow the hand. Longer ones are given up for the newer shape, or none would ever be current.
const SHORT_SOLVE: Duration = Duration::from_secs(2);

/// Connection to the worker and everything that came through it.
pub struct Link {
    worker: Worker,
    /// Newest solve asked for, until it ends.
    solving: Option<(RunId, Case)>,
    improving: Option<RunId>,
    /// Solve of a kept variant, while nothing else is to do.
    aside: Option<(RunId, String)>,
    /// Case asked for last, so that it is not asked twice.
    asked: Option<Case>,
    /// Results of runs up to this one belong to a project that was closed, or are older than what is shown.
    past: u64,
    /// When the run in progress was taken up, and how long the last solve took.
    since: Option<Instant>,
    took: Duration,
    /// Newest solved state.
    pub solved: Option<Arc<Solved>>,
    /// Stage in words and fraction done of the present run.
    pub stage: Option<(String, f64)>,
    /// What the present or last improvement started from: its aim, its limits, its inserts by name.
    pub run_case: Option<Case>,
    /// Iterations of the present or last improvement.
    pub steps: Vec<StepRecord>,
    /// Result of the last improvement.
    pub improved: Option<Arc<Improved>>,
    failure: Option<(Case, Failure)>,
}

/// What the studio must do about a message.
pub enum News {
    /// Nothing but a repaint.
    Nothing,
    /// A state was solved.
    Solved(Arc<SolveReport>),
    /// A kept variant was solved, or could not be.
    Aside(String, Option<Arc<SolveReport>>),
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
            aside: None,
            asked: None,
            past: 0,
            since: None,
            took: Duration::ZERO,
            solved: None,
            stage: None,
            run_case: None,
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
        self.improving.is_some() || self.solving.is_some() || self.aside.is_some()
    }

    /// Whether improvements are held.
    pub fn is_paused(&self) -> bool {
        self.worker.is_paused()
    }

    /// Whether the solved state belongs to another case than this.
    pub fn is_stale(&self, case: &Case) -> bool {
        self.solved.as_ref().is_none_or(|s| s.case != *case)
    }

    /// Why this very case gave nothing, if so.
    pub fn failure_of(&self, case: &Case) -> Option<&Failure> {
        self.failure.as_ref().filter(|f| f.0 == *case).map(|f| &f.1)
    }

    /// Ask for a state, unless it is known, asked for, or an improvement runs. While something is `dragged` a short
    /// solve in progress is let finish.
    pub fn want(&mut self, case: &Case, dragged: bool) {
        if self.improving.is_some() || !self.is_stale(case) || self.asked.as_ref() == Some(case) {
            return;
        }
        self.asked = Some(case.clone());
        let request = Request::Solve { case: case.clone() };
        let running = self.since.map_or(Duration::ZERO, |s| s.elapsed());
        let follows = dragged && self.aside.is_none() && self.took.max(running) <= SHORT_SOLVE;
        let run = if follows {
            self.worker.queue(request)
        } else {
            self.worker.submit(request)
        };
        self.solving = Some((run, case.clone()));
    }

    /// Solve a kept variant if nothing else is to do.
    pub fn want_aside(&mut self, name: &str, case: Case) {
        if !self.is_busy() {
            let run = self.worker.queue(Request::Solve { case });
            self.aside = Some((run, name.into()));
        }
    }

    /// Start an improvement.
    pub fn improve(&mut self, case: &Case) {
        self.steps.clear();
        self.improved = None;
        self.failure = None;
        self.solving = None;
        self.run_case = Some(case.clone());
        self.improving = Some(self.worker.submit(Request::Improve { case: case.clone() }));
    }

    /// Forget everything: another project is opened. What still comes of earlier runs is dropped.
    pub fn forget(&mut self) {
        self.worker.stop();
        let newest = [
            self.solving.as_ref().map(|s| s.0),
            self.improving,
            self.aside.as_ref().map(|a| a.0),
        ];
        self.past = newest
            .into_iter()
            .flatten()
            .map(|r| r.0)
            .fold(self.past, u64::max);
        self.solving = None;
        self.improving = None;
        self.aside = None;
        self.asked = None;
        self.solved = None;
        self.stage = None;
        self.run_case = None;
        self.steps.clear();
        self.improved = None;
        self.failure = None;
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
        if event.is_end() {
            self.took = self.since.take().map_or(self.took, |s| s.elapsed());
        }
        if run.0 <= self.past {
            return News::Nothing;
        }
        if self.aside.as_ref().is_some_and(|a| a.0 == run) {
            return self.take_aside(event);
        }
        let mine_solving = self.solving.as_ref().is_some_and(|s| s.0 == run);
        let mine_improving = self.improving == Some(run);
        match event {
            Event::Accepted => {
                self.since = Some(Instant::now());
                News::Nothing
            }
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
                // An older shape of the drag in progress is news too, until a newer one is there.
                if self.improving.is_some() {
                    return News::Nothing;
                }
                self.past = run.0;
                if mine_solving {
                    self.solving = None;
                    self.stage = None;
                    self.failure = None;
                }
                let solved = Arc::new(*solved);
                self.solved = Some(solved.clone());
                News::Solved(Arc::new(solved.report.clone()))
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
            Event::Failed(failure) => self.take_failure(failure, mine_solving, mine_improving),
        }
    }

    fn take_failure(&mut self, failure: Failure, solving: bool, improving: bool) -> News {
        let case = if improving {
            self.improving = None;
            self.asked = None;
            self.run_case.clone()
        } else if solving {
            self.solving.take().map(|s| s.1)
        } else {
            None
        };
        let Some(case) = case.filter(|_| failure != Failure::Stopped) else {
            return News::Nothing;
        };
        self.stage = None;
        let sentence = failure.to_string();
        self.failure = Some((case, failure));
        News::Failed(sentence)
    }

    fn take_aside(&mut self, event: Event) -> News {
        if !event.is_end() {
            return News::Nothing;
        }
        let Some((_, name)) = self.aside.take() else {
            return News::Nothing;
        };
        match event {
            Event::Solved(solved) => News::Aside(name, Some(Arc::new(solved.report))),
            // Superseded by the drawing: it is asked for again when there is time.
            Event::Failed(Failure::Stopped) => News::Nothing,
            _ => News::Aside(name, None),
        }
    }
}
