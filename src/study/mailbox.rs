//! The way from the worker to its owner: a bounded queue that loses no record, and one place for the newest
//! stage.

use super::protocol::{Event, Message, RunId};
use std::collections::VecDeque;
use std::sync::{Condvar, Mutex, MutexGuard, PoisonError};
use std::time::Duration;

/// Unread events that may wait before the worker does: many steps more than an improvement makes, few enough
/// that a reader who never comes back costs little memory.
pub(super) const ROOM: usize = 256;

#[derive(Default)]
struct Content {
    queue: VecDeque<Message>,
    stage: Option<Message>,
    closed: bool,
}

/// Shared by worker and owner.
pub(super) struct Mailbox {
    room: usize,
    content: Mutex<Content>,
    changed: Condvar,
}

impl Mailbox {
    pub(super) fn new(room: usize) -> Self {
        Self {
            room: room.max(1),
            content: Mutex::default(),
            changed: Condvar::new(),
        }
    }

    /// A poisoned lock only means that a reader panicked between two plain moves: the content is whole.
    fn lock(&self) -> MutexGuard<'_, Content> {
        self.content.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// Put an event last; waits while the queue is full. After [`Mailbox::close`] it is dropped.
    pub(super) fn post(&self, run: RunId, event: Event) {
        let mut content = self.lock();
        while content.queue.len() >= self.room && !content.closed {
            content = self
                .changed
                .wait(content)
                .unwrap_or_else(PoisonError::into_inner);
        }
        if content.closed {
            return;
        }
        if event.is_end() {
            content.stage = None;
        }
        if let Event::Step(newest) = &event
            && newest.snapshot.is_some()
        {
            for waiting in &mut content.queue {
                if let Event::Step(record) = &mut waiting.event {
                    record.snapshot = None;
                }
            }
        }
        content.queue.push_back(Message { run, event });
        self.changed.notify_all();
    }

    /// Put an event last without waiting: for the owner's own thread, which is the one that empties the queue.
    pub(super) fn post_now(&self, run: RunId, event: Event) {
        self.lock().queue.push_back(Message { run, event });
        self.changed.notify_all();
    }

    /// Put the newest stage in its one place.
    pub(super) fn show(&self, run: RunId, text: &str, fraction: f64) {
        let event = Event::Stage {
            text: text.to_owned(),
            fraction,
        };
        self.lock().stage = Some(Message { run, event });
        self.changed.notify_all();
    }

    /// Everything that waits, in order; the stage last.
    pub(super) fn take_all(&self) -> Vec<Message> {
        let mut content = self.lock();
        let mut all: Vec<Message> = content.queue.drain(..).collect();
        all.extend(content.stage.take());
        self.changed.notify_all();
        all
    }

    /// The next event, or none after `patience`.
    pub(super) fn wait(&self, patience: Duration) -> Option<Message> {
        let content = self.lock();
        let (mut content, _) = self
            .changed
            .wait_timeout_while(content, patience, |c| {
                c.queue.is_empty() && c.stage.is_none()
            })
            .unwrap_or_else(PoisonError::into_inner);
        let next = content.queue.pop_front().or_else(|| content.stage.take());
        self.changed.notify_all();
        next
    }

    /// Nobody reads any more: waiting and later posts return at once.
    pub(super) fn close(&self) {
        self.lock().closed = true;
        self.changed.notify_all();
    }
}
