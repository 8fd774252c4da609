//! The one thread that computes. Runs can be stopped, paused and superseded; a panic in the engine is contained.

use super::mailbox::{Mailbox, ROOM};
use super::protocol::{Event, Message, Request, RunId};
use super::{Engine, Failure};
use crate::base::Watch;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::{Arc, Condvar, Mutex, MutexGuard, PoisonError};
use std::thread::JoinHandle;
use std::time::Duration;

/// Stack of the worker, bytes: four times the usual main thread's, since factorisations recurse.
const STACK_BYTES: usize = 32 << 20;

/// What the owner asks for, guarded by one lock.
#[derive(Default)]
struct Orders {
    next: Option<(RunId, Request)>,
    current: Option<Current>,
    last_run: u64,
    paused: bool,
    closing: bool,
}

struct Current {
    watch: Watch,
    /// A solve whose result nobody wants any more.
    superseded: bool,
    improves: bool,
}

struct Shared {
    orders: Mutex<Orders>,
    ordered: Condvar,
    mailbox: Mailbox,
    wake: Box<dyn Fn() + Send + Sync>,
}

impl Shared {
    /// A poisoned lock only means that its holder panicked between plain assignments: the orders are whole.
    fn orders(&self) -> MutexGuard<'_, Orders> {
        self.orders.lock().unwrap_or_else(PoisonError::into_inner)
    }

    fn tell(&self, run: RunId, event: Event) {
        self.mailbox.post(run, event);
        (self.wake)();
    }

    /// Holds an improvement between two iterations while it is paused.
    fn hold_while_paused(&self, watch: &Watch) {
        let mut orders = self.orders();
        while orders.paused && !orders.closing && !watch.is_stopped() {
            orders = self
                .ordered
                .wait(orders)
                .unwrap_or_else(PoisonError::into_inner);
        }
    }
}

/// Owner's handle. Dropping it stops the run and joins the thread.
pub struct Worker {
    shared: Arc<Shared>,
    thread: Option<JoinHandle<()>>,
}

impl Worker {
    /// A worker with the engine that `make_engine` gives (asked again after a panic, so that no half-made
    /// state lives on). `wake` is called after each report, from the worker's thread: it should only ask the
    /// owner to look into [`Worker::poll`].
    pub fn new(
        make_engine: impl FnMut() -> Box<dyn Engine> + Send + 'static,
        wake: impl Fn() + Send + Sync + 'static,
    ) -> Self {
        Self::with_room(ROOM, make_engine, wake)
    }

    /// The same with a queue of `room` unread events.
    pub fn with_room(
        room: usize,
        make_engine: impl FnMut() -> Box<dyn Engine> + Send + 'static,
        wake: impl Fn() + Send + Sync + 'static,
    ) -> Self {
        let shared = Arc::new(Shared {
            orders: Mutex::default(),
            ordered: Condvar::new(),
            mailbox: Mailbox::new(room),
            wake: Box::new(wake),
        });
        let for_thread = Arc::clone(&shared);
        let thread = std::thread::Builder::new()
            .name("flumeloft worker".into())
            .stack_size(STACK_BYTES)
            .spawn(move || work(&for_thread, make_engine))
            .ok();
        Self { shared, thread }
    }

    /// Ask for a run. It takes the place of one that still waits; a running solve is stopped at once and its
    /// result dropped; a running improvement is stopped and still delivers its best shape.
    pub fn submit(&self, request: Request) -> RunId {
        self.ask(request, true)
    }

    /// Ask for a run behind the one in progress, which goes on to its end; it takes the place of one that still waits.
    pub fn queue(&self, request: Request) -> RunId {
        self.ask(request, false)
    }

    fn ask(&self, request: Request, at_once: bool) -> RunId {
        let (run, dropped) = {
            let mut orders = self.shared.orders();
            orders.last_run += 1;
            let run = RunId(orders.last_run);
            let dropped = orders.next.replace((run, request));
            if at_once {
                orders.paused = false;
                if let Some(current) = &mut orders.current {
                    current.superseded = !current.improves;
                    current.watch.stop();
                }
            }
            (run, dropped)
        };
        if let Some((old, _)) = dropped {
            self.shared
                .mailbox
                .post_now(old, Event::Failed(Failure::Stopped));
        }
        if self.thread.is_none() {
            let sentence = "the system gave no thread to compute on".into();
            let failure = Event::Failed(Failure::Internal { sentence });
            self.shared.mailbox.post_now(run, failure);
        }
        self.shared.ordered.notify_all();
        run
    }

    /// Stop the running and the waiting run; an improvement keeps its best shape.
    pub fn stop(&self) {
        let waiting = {
            let mut orders = self.shared.orders();
            if let Some(current) = &orders.current {
                current.watch.stop();
            }
            orders.paused = false;
            orders.next.take()
        };
        if let Some((run, _)) = waiting {
            self.shared
                .mailbox
                .post_now(run, Event::Failed(Failure::Stopped));
        }
        self.shared.ordered.notify_all();
    }

    /// Hold an improvement before its next iteration, or let it go on.
    pub fn set_paused(&self, paused: bool) {
        self.shared.orders().paused = paused;
        self.shared.ordered.notify_all();
    }

    /// Whether improvements are held.
    pub fn is_paused(&self) -> bool {
        self.shared.orders().paused
    }

    /// Whether a run is in progress or waits.
    pub fn is_busy(&self) -> bool {
        let orders = self.shared.orders();
        orders.current.is_some() || orders.next.is_some()
    }

    /// All that happened since the last call; never waits.
    pub fn poll(&self) -> Vec<Message> {
        self.shared.mailbox.take_all()
    }

    /// The next event, waiting at most `patience` for it.
    pub fn wait(&self, patience: Duration) -> Option<Message> {
        self.shared.mailbox.wait(patience)
    }
}

impl Drop for Worker {
    fn drop(&mut self) {
        {
            let mut orders = self.shared.orders();
            orders.closing = true;
            orders.next = None;
            if let Some(current) = &orders.current {
                current.watch.stop();
            }
        }
        self.shared.mailbox.close();
        self.shared.ordered.notify_all();
        if let Some(thread) = self.thread.take() {
            // The thread contains the engine's panics; one in `wake` has been reported by the panic hook.
            let _ = thread.join();
        }
    }
}

/// The thread's life: wait for a request, run it, tell its end.
fn work(shared: &Arc<Shared>, mut make_engine: impl FnMut() -> Box<dyn Engine>) {
    let mut engine: Option<Box<dyn Engine>> = None;
    while let Some((run, request, watch)) = next_run(shared) {
        shared.tell(run, Event::Accepted);
        let end = catch_unwind(AssertUnwindSafe(|| {
            let engine = engine.get_or_insert_with(&mut make_engine);
            compute(shared, run, &request, engine.as_mut(), &watch)
        }));
        let end = end.unwrap_or_else(|cause| {
            engine = None;
            Event::Failed(Failure::Internal {
                sentence: panic_sentence(cause.as_ref()),
            })
        });
        let superseded = {
            let mut orders = shared.orders();
            orders.current.take().is_some_and(|c| c.superseded)
        };
        let end = if superseded {
            Event::Failed(Failure::Stopped)
        } else {
            end
        };
        shared.tell(run, end);
    }
}

fn next_run(shared: &Arc<Shared>) -> Option<(RunId, Request, Watch)> {
    let mut orders = shared.orders();
    loop {
        if orders.closing {
            return None;
        }
        if let Some((run, request)) = orders.next.take() {
            let for_stage = Arc::clone(shared);
            let watch = Watch::reporting(move |text, fraction| {
                for_stage.mailbox.show(run, text, fraction);
                (for_stage.wake)();
            });
            orders.current = Some(Current {
                watch: watch.clone(),
                superseded: false,
                improves: matches!(request, Request::Improve { .. }),
            });
            return Some((run, request, watch));
        }
        orders = shared
            .ordered
            .wait(orders)
            .unwrap_or_else(PoisonError::into_inner);
    }
}

fn compute(
    shared: &Shared,
    run: RunId,
    request: &Request,
    engine: &mut dyn Engine,
    watch: &Watch,
) -> Event {
    match request {
        Request::Solve { case } => match engine.solve(case, watch) {
            Ok(solved) => Event::Solved(Box::new(solved)),
            Err(failure) => Event::Failed(failure),
        },
        Request::Improve { case } => {
            let mut progress = |record| {
                shared.tell(run, Event::Step(Box::new(record)));
                shared.hold_while_paused(watch);
            };
            match engine.improve(case, watch, &mut progress) {
                Ok(improved) => Event::Finished(Box::new(improved)),
                Err(failure) => Event::Failed(failure),
            }
        }
    }
}

fn panic_sentence(cause: &(dyn std::any::Any + Send)) -> String {
    cause
        .downcast_ref::<&str>()
        .map(|s| (*s).to_owned())
        .or_else(|| cause.downcast_ref::<String>().cloned())
        .unwrap_or_else(|| "no reason was given".into())
}
