//! Many alike tasks on all processors, with their outcomes in the order of the tasks.

use std::collections::BTreeMap;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::atomic::{AtomicUsize, Ordering};
use std::sync::mpsc;
use std::thread;

/// Tasks in one chunk: outcomes wait for their turn within a chunk only, so memory does not grow with the tasks.
const CHUNK: usize = 32;
/// As much as a main thread has, so that a task behaves as it does there.
const STACK_BYTES: usize = 16 << 20;

/// A task ended in a bug of ours; the others went on.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Panicked;

/// Number of processors that this process may use; one if the system does not say.
pub fn processors() -> usize {
    thread::available_parallelism().map_or(1, usize::from)
}

/// Runs `work` over `items` on `n_workers` threads and hands each outcome to `sink` in the order of the items.
pub fn in_order<T: Sync, R: Send>(
    items: &[T],
    n_workers: usize,
    work: impl Fn(&T) -> R + Sync,
    mut sink: impl FnMut(Result<R, Panicked>),
) {
    for chunk in items.chunks(CHUNK) {
        let next = AtomicUsize::new(0);
        let (sender, receiver) = mpsc::channel();
        let until_done = |sender: mpsc::Sender<_>| {
            while let Some((index, item)) = take(chunk, &next) {
                let outcome = catch_unwind(AssertUnwindSafe(|| work(item))).map_err(|_| Panicked);
                if sender.send((index, outcome)).is_err() {
                    return;
                }
            }
        };
        thread::scope(|scope| {
            let started = (0..n_workers.clamp(1, chunk.len())).filter(|_| {
                let (sender, until_done) = (sender.clone(), &until_done);
                let builder = thread::Builder::new().stack_size(STACK_BYTES);
                builder
                    .spawn_scoped(scope, move || until_done(sender))
                    .is_ok()
            });
            if started.count() == 0 {
                // The system gives no thread: slower, but not less.
                until_done(sender.clone());
            }
            drop(sender);
            let mut early = BTreeMap::new();
            let mut turn = 0;
            for (index, outcome) in receiver {
                early.insert(index, outcome);
                while let Some(outcome) = early.remove(&turn) {
                    sink(outcome);
                    turn += 1;
                }
            }
        });
    }
}

fn take<'a, T>(items: &'a [T], next: &AtomicUsize) -> Option<(usize, &'a T)> {
    let index = next.fetch_add(1, Ordering::Relaxed);
    Some((index, items.get(index)?))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn prop_outcomes_come_in_order_whatever_takes_longest() {
        let items: Vec<u64> = (0..200).collect();
        for n_workers in [1, 2, 7] {
            let mut found = Vec::new();
            let work = |item: &u64| {
                let spin = (0..(item * 7919) % 5000).fold(0_u64, |sum, k| sum.wrapping_add(k * k));
                std::hint::black_box(spin);
                item * 2
            };
            in_order(&items, n_workers, work, |outcome| {
                found.push(outcome.unwrap())
            });
            assert_eq!(found, items.iter().map(|item| item * 2).collect::<Vec<_>>());
        }
    }

    #[test]
    fn prop_a_bug_in_one_task_stops_no_other() {
        let mut found = Vec::new();
        let work = |item: &u32| {
            assert_ne!(*item, 3, "meant: this task ends in a panic");
            *item
        };
        in_order(&[1, 2, 3, 4], 2, work, |outcome| found.push(outcome));
        assert_eq!(found, [Ok(1), Ok(2), Err(Panicked), Ok(4)]);
    }

    #[test]
    fn hand_nothing_to_do() {
        in_order(&[], 2, |item: &u32| *item, |_| panic!("no outcome"));
    }
}
