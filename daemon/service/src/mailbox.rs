//! A worker's mailbox: first in, first out, bounded in bytes.
//!
//! A letter that carries a payload is refused when it would pass the bound, and the sender counts it; words
//! of control always go in and take no room, so a link that fell or an order to stop is never lost behind blocks.
//! Checked here: `a_full_box_refuses_payloads_and_still_takes_control`.

use std::collections::VecDeque;
use std::sync::{Condvar, Mutex, MutexGuard, PoisonError};

/// A queue between one sender and one receiver.
#[derive(Debug)]
pub struct Mailbox<T> {
    inside: Mutex<Inside<T>>,
    arrived: Condvar,
    capacity: usize,
}

#[derive(Debug)]
struct Inside<T> {
    letters: VecDeque<(T, usize)>,
    bytes: usize,
}

impl<T> Mailbox<T> {
    /// An empty box that holds payloads of `capacity` bytes together.
    pub fn new(capacity: usize) -> Self {
        Self {
            inside: Mutex::new(Inside {
                letters: VecDeque::new(),
                bytes: 0,
            }),
            arrived: Condvar::new(),
            capacity,
        }
    }

    /// Puts in a letter with a payload of `bytes`; gives it back when there is no room.
    ///
    /// One letter always fits an empty box, however large.
    ///
    /// # Errors
    /// The letter itself: the box is full.
    pub fn post(&self, letter: T, bytes: usize) -> Result<(), T> {
        let mut inside = self.lock();
        if inside.bytes > 0 && inside.bytes.saturating_add(bytes) > self.capacity {
            return Err(letter);
        }
        inside.bytes = inside.bytes.saturating_add(bytes);
        inside.letters.push_back((letter, bytes));
        drop(inside);
        self.arrived.notify_one();
        Ok(())
    }

    /// Puts in a word of control, which needs no room. `replaces` tells whether the letter before it says
    /// the same in an older form; that one is then overwritten, so waking words do not pile up.
    pub fn control(&self, letter: T, replaces: impl Fn(&T) -> bool) {
        let mut inside = self.lock();
        match inside.letters.back_mut() {
            Some((last, 0)) if replaces(last) => *last = letter,
            Some(_) | None => inside.letters.push_back((letter, 0)),
        }
        drop(inside);
        self.arrived.notify_one();
    }

    /// Takes the oldest letter, waiting for one.
    pub fn take(&self) -> T {
        let mut inside = self.lock();
        loop {
            if let Some((letter, bytes)) = inside.letters.pop_front() {
                inside.bytes -= bytes;
                return letter;
            }
            inside = self
                .arrived
                .wait(inside)
                .unwrap_or_else(PoisonError::into_inner);
        }
    }

    /// Whether a payload of `bytes` would go in now.
    pub fn has_room(&self, bytes: usize) -> bool {
        let inside = self.lock();
        inside.bytes == 0 || inside.bytes.saturating_add(bytes) <= self.capacity
    }

    /// Whether at most half the room is taken.
    pub fn is_half_empty(&self) -> bool {
        self.lock().bytes <= self.capacity / 2
    }

    /// Bytes of payload waiting.
    pub fn waiting(&self) -> usize {
        self.lock().bytes
    }

    fn lock(&self) -> MutexGuard<'_, Inside<T>> {
        // Every change below a lock is whole before anything can unwind.
        self.inside.lock().unwrap_or_else(PoisonError::into_inner)
    }
}

#[cfg(test)]
mod tests {
    use std::sync::Arc;

    use super::Mailbox;

    #[test]
    fn a_full_box_refuses_payloads_and_still_takes_control() {
        let mailbox = Mailbox::new(100);
        assert_eq!(mailbox.post("a", 60), Ok(()));
        assert_eq!(mailbox.post("b", 41), Err("b"));
        assert_eq!(mailbox.post("c", 40), Ok(()));
        mailbox.control("stop", |_| false);
        assert_eq!(mailbox.waiting(), 100);
        assert_eq!(
            [mailbox.take(), mailbox.take(), mailbox.take()],
            ["a", "c", "stop"]
        );
        assert_eq!(mailbox.waiting(), 0);
    }

    #[test]
    fn a_letter_larger_than_the_box_passes_when_the_box_is_empty() {
        let mailbox = Mailbox::new(10);
        assert_eq!(mailbox.post(1, 1000), Ok(()));
        assert_eq!(mailbox.post(2, 1), Err(2));
        assert_eq!(mailbox.take(), 1);
        assert_eq!(mailbox.post(2, 1), Ok(()));
    }

    #[test]
    fn waking_words_overwrite_their_like_only_when_nothing_came_between() {
        let mailbox = Mailbox::new(10);
        let tick = |letter: &i32| *letter < 0;
        mailbox.control(-1, tick);
        mailbox.control(-2, tick);
        assert_eq!(mailbox.post(7, 1), Ok(()));
        mailbox.control(-3, tick);
        mailbox.control(-4, tick);
        assert_eq!(
            [mailbox.take(), mailbox.take(), mailbox.take()],
            [-2, 7, -4]
        );
    }

    #[test]
    fn a_waiting_receiver_is_woken_by_a_letter_from_another_thread() {
        let mailbox = Arc::new(Mailbox::new(10));
        let sender = Arc::clone(&mailbox);
        let thread = std::thread::spawn(move || sender.post(5, 1));
        assert_eq!(mailbox.take(), 5);
        assert_eq!(thread.join().expect("the sender ends"), Ok(()));
    }
}
