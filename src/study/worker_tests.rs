//! The worker with a stand-in engine.

use super::stand_in::StandIn;
use super::test_design::channel_with_tube;
use super::{Case, Engine, Event, Failure, Message, Request, RunSettings, StopReason, Worker};
use std::sync::Arc;
use std::sync::atomic::{AtomicUsize, Ordering};
use std::time::Duration;

/// Longest wait for an event, so that a fault ends the test instead of hanging it; no promise of speed.
const PATIENCE: Duration = Duration::from_secs(60);

fn case() -> Case {
    Case {
        design: Arc::new(channel_with_tube()),
        run: RunSettings::default(),
    }
}

fn worker(engine: StandIn) -> Worker {
    Worker::new(move || Box::new(engine.clone()) as Box<dyn Engine>, || {})
}

fn until_end(worker: &Worker) -> Vec<Message> {
    let mut all = Vec::new();
    loop {
        let message = worker.wait(PATIENCE).expect("the run ends");
        let ended = message.event.is_end();
        all.push(message);
        if ended {
            return all;
        }
    }
}

fn steps_of(messages: &[Message]) -> Vec<usize> {
    messages
        .iter()
        .filter_map(|m| match &m.event {
            Event::Step(record) => Some(record.step),
            _ => None,
        })
        .collect()
}

fn end_of(messages: &[Message]) -> &Event {
    &messages.last().expect("messages").event
}

#[test]
fn a_solve_is_accepted_and_ends_once() {
    let worker = worker(StandIn::default());
    let run = worker.submit(Request::Solve { case: case() });
    let all = until_end(&worker);
    assert!(all.iter().all(|m| m.run == run));
    assert!(matches!(all[0].event, Event::Accepted));
    assert!(matches!(end_of(&all), Event::Solved(s) if s.case == case()));
    assert_eq!(all.iter().filter(|m| m.event.is_end()).count(), 1);
}

#[test]
fn a_thousand_records_arrive_in_order_through_a_queue_of_three() {
    let engine = StandIn {
        steps: Some(999),
        ..StandIn::default()
    };
    let worker = Worker::with_room(3, move || Box::new(engine.clone()) as _, || {});
    worker.submit(Request::Improve { case: case() });
    let all = until_end(&worker);
    assert_eq!(steps_of(&all), (0..1000).collect::<Vec<_>>());
    assert!(matches!(end_of(&all), Event::Finished(i) if i.history.len() == 1000));
}

#[test]
fn while_records_wait_only_the_newest_keeps_its_picture() {
    let engine = StandIn {
        steps: Some(9),
        ..StandIn::default()
    };
    let worker = worker(engine);
    worker.submit(Request::Improve { case: case() });
    while worker.is_busy() {
        std::thread::sleep(Duration::from_millis(1));
    }
    let all = until_end(&worker);
    let with_picture: Vec<usize> = all
        .iter()
        .filter_map(|m| match &m.event {
            Event::Step(r) if r.snapshot.is_some() => Some(r.step),
            _ => None,
        })
        .collect();
    assert_eq!(with_picture, [9]);
    assert!(
        matches!(end_of(&all), Event::Finished(i) if i.history.iter().all(|r| r.snapshot.is_some()))
    );
}

#[test]
fn each_report_calls_wake() {
    let calls = Arc::new(AtomicUsize::new(0));
    let counted = Arc::clone(&calls);
    let wake = move || {
        counted.fetch_add(1, Ordering::SeqCst);
    };
    let worker = Worker::new(|| Box::new(StandIn::default()) as _, wake);
    worker.submit(Request::Solve { case: case() });
    until_end(&worker);
    drop(worker);
    assert_eq!(calls.load(Ordering::SeqCst), 3, "accepted, stage, solved");
}

#[test]
fn a_stopped_improvement_keeps_its_best() {
    let engine = StandIn {
        steps: Some(usize::MAX),
        pause: Duration::from_millis(2),
        ..StandIn::default()
    };
    let worker = worker(engine);
    worker.submit(Request::Improve { case: case() });
    loop {
        let message = worker.wait(PATIENCE).expect("a record");
        if matches!(&message.event, Event::Step(r) if r.step == 3) {
            break;
        }
    }
    worker.stop();
    let all = until_end(&worker);
    let Event::Finished(improved) = end_of(&all) else {
        panic!("no result: {:?}", end_of(&all));
    };
    assert_eq!(improved.stop, StopReason::StoppedByUser);
    assert!(
        improved.best.report.inserts[0].perimeter_m > improved.start.report.inserts[0].perimeter_m
    );
}

#[test]
fn a_stopped_solve_says_so() {
    let worker = worker(StandIn {
        pause: PATIENCE,
        ..StandIn::default()
    });
    worker.submit(Request::Solve { case: case() });
    assert!(matches!(
        worker.wait(PATIENCE).map(|m| m.event),
        Some(Event::Accepted)
    ));
    worker.stop();
    assert!(matches!(
        end_of(&until_end(&worker)),
        Event::Failed(Failure::Stopped)
    ));
    assert!(worker.poll().is_empty());
}

#[test]
fn a_newer_solve_takes_the_place_of_the_older() {
    let worker = worker(StandIn {
        pause: Duration::from_millis(50),
        ..StandIn::default()
    });
    let runs: Vec<_> = (0..20)
        .map(|_| worker.submit(Request::Solve { case: case() }))
        .collect();
    let mut ends = Vec::new();
    while ends.len() < runs.len() {
        let message = worker.wait(PATIENCE).expect("ends");
        if message.event.is_end() {
            ends.push(message);
        }
    }
    let (last, others) = ends.split_last().expect("ends");
    assert_eq!(last.run, runs[19]);
    assert!(matches!(last.event, Event::Solved(_)));
    assert!(
        others
            .iter()
            .all(|m| matches!(m.event, Event::Failed(Failure::Stopped)))
    );
}

#[test]
fn a_queued_solve_lets_the_one_in_progress_finish_and_only_the_newest_waits() {
    let worker = worker(StandIn {
        pause: Duration::from_millis(30),
        ..StandIn::default()
    });
    let first = worker.queue(Request::Solve { case: case() });
    while !matches!(
        worker.wait(PATIENCE).expect("accepted").event,
        Event::Accepted
    ) {}
    let others: Vec<_> = (0..10)
        .map(|_| worker.queue(Request::Solve { case: case() }))
        .collect();
    let mut solved = Vec::new();
    let mut ends = 0;
    while ends < 11 {
        let message = worker.wait(PATIENCE).expect("ends");
        ends += usize::from(message.event.is_end());
        if matches!(message.event, Event::Solved(_)) {
            solved.push(message.run);
        }
    }
    // The twin with `submit` in place of `queue` loses the first: see the test above.
    assert_eq!(solved, [first, others[9]]);
}

#[test]
fn a_solve_asked_during_an_improvement_waits_for_its_best_shape() {
    let worker = worker(StandIn {
        steps: Some(usize::MAX),
        pause: Duration::from_millis(1),
        ..StandIn::default()
    });
    worker.submit(Request::Improve { case: case() });
    assert!(matches!(
        worker.wait(PATIENCE).map(|m| m.event),
        Some(Event::Accepted)
    ));
    worker.submit(Request::Solve { case: case() });
    assert!(matches!(end_of(&until_end(&worker)), Event::Finished(_)));
    assert!(matches!(end_of(&until_end(&worker)), Event::Solved(_)));
}

#[test]
fn a_paused_improvement_makes_no_step_and_goes_on() {
    let worker = worker(StandIn {
        steps: Some(50),
        ..StandIn::default()
    });
    worker.submit(Request::Improve { case: case() });
    worker.set_paused(true);
    let mut all = worker.poll();
    std::thread::sleep(Duration::from_millis(30));
    let while_paused = worker.poll();
    if !all.iter().any(|m| m.event.is_end()) {
        let in_flight = steps_of(&while_paused).len();
        assert!(in_flight <= 1, "{in_flight} iterations while paused");
        all.extend(while_paused);
        worker.set_paused(false);
        all.extend(until_end(&worker));
        assert_eq!(steps_of(&all), (0..=50).collect::<Vec<_>>());
    }
}

#[test]
fn a_paused_improvement_can_be_stopped() {
    let worker = worker(StandIn {
        steps: Some(usize::MAX),
        pause: Duration::from_millis(1),
        ..StandIn::default()
    });
    worker.submit(Request::Improve { case: case() });
    worker.set_paused(true);
    worker.stop();
    assert!(until_end(&worker).last().is_some());
    assert!(!worker.is_paused());
}

#[test]
fn a_panic_is_contained_and_the_worker_lives_on() {
    let made = Arc::new(AtomicUsize::new(0));
    let counter = Arc::clone(&made);
    let make = move || {
        let first = counter.fetch_add(1, Ordering::SeqCst) == 0;
        Box::new(StandIn {
            steps: Some(5),
            panic_at: first.then_some(2),
            ..StandIn::default()
        }) as Box<dyn Engine>
    };
    let worker = Worker::new(make, || {});
    worker.submit(Request::Improve { case: case() });
    let all = until_end(&worker);
    assert_eq!(steps_of(&all), [0, 1]);
    let Event::Failed(Failure::Internal { sentence }) = end_of(&all) else {
        panic!("{:?}", end_of(&all));
    };
    assert!(sentence.contains("told to panic"));
    worker.submit(Request::Improve { case: case() });
    assert_eq!(steps_of(&until_end(&worker)).len(), 6);
    assert_eq!(
        made.load(Ordering::SeqCst),
        2,
        "a fresh engine after the panic"
    );
}

#[test]
fn dropping_mid_run_joins_even_with_a_full_queue() {
    for room in [1, 1000] {
        let engine = StandIn {
            steps: Some(usize::MAX),
            ..StandIn::default()
        };
        let worker = Worker::with_room(room, move || Box::new(engine.clone()) as _, || {});
        worker.submit(Request::Improve { case: case() });
        std::thread::sleep(Duration::from_millis(10));
        drop(worker);
    }
}
