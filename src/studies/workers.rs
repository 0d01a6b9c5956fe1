//! Work on several threads, with the results in the order of the input: one worker or eight, equal results.

use std::sync::Mutex;
use std::sync::atomic::{AtomicUsize, Ordering};
use std::sync::mpsc::{Sender, channel};
use std::thread::{available_parallelism, scope};

/// A worker's way to tell how far it has come with an item: any number that the caller knows to read.
pub struct Report<'a> {
    item: usize,
    to: &'a Sender<(usize, usize)>,
}

impl Report<'_> {
    /// Tells how far the item has come.
    pub fn tell(&self, done: usize) {
        // Nobody listens any more once the caller has gone; the work's result is then of no use either.
        let _ = self.to.send((self.item, done));
    }
}

/// How many workers make sense here.
pub fn at_hand() -> usize {
    available_parallelism().map_or(1, usize::from)
}

/// Works on items 0 to `count` - 1 with so many workers. What they report is handed to `told` on the caller's own
/// thread, with the item's number.
pub fn in_order<T: Send>(
    count: usize,
    workers: usize,
    work: impl Fn(usize, &Report<'_>) -> T + Sync,
    told: &mut dyn FnMut(usize, usize),
) -> Vec<T> {
    let next = AtomicUsize::new(0);
    let results: Mutex<Vec<Option<T>>> = Mutex::new((0..count).map(|_| None).collect());
    let (sender, receiver) = channel();
    scope(|scope| {
        for _ in 0..workers.clamp(1, count.max(1)) {
            let sender = sender.clone();
            let (next, results, work) = (&next, &results, &work);
            scope.spawn(move || {
                loop {
                    let item = next.fetch_add(1, Ordering::Relaxed);
                    if item >= count {
                        break;
                    }
                    let result = work(item, &Report { item, to: &sender });
                    let mut results = results
                        .lock()
                        .expect("nothing panics while it holds the results");
                    results[item] = Some(result);
                }
            });
        }
        drop(sender);
        for (item, done) in receiver {
            told(item, done);
        }
    });
    let results = results
        .into_inner()
        .expect("nothing panics while it holds the results");
    results
        .into_iter()
        .map(|result| result.expect("every item was taken by a worker that ended well"))
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn results_come_in_the_order_of_the_input_with_any_number_of_workers() {
        let squares: Vec<usize> = (0..50).map(|k| k * k).collect();
        for workers in [1, 2, 7, 90] {
            let mut told = vec![0; 50];
            let found = in_order(
                50,
                workers,
                |item, report| {
                    report.tell(item + 1);
                    item * item
                },
                &mut |item, done| told[item] += done,
            );
            assert_eq!(found, squares);
            assert_eq!(told, (1..=50).collect::<Vec<usize>>());
        }
    }

    #[test]
    fn nothing_to_do_is_done_at_once() {
        let none: Vec<u8> = in_order(0, 4, |_, _| 0, &mut |_, _| {});
        assert!(none.is_empty());
    }
}
