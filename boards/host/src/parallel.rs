//! Independent work on all processors, its results in order.

use std::num::NonZero;
use std::sync::atomic::{AtomicUsize, Ordering};
use std::thread::{available_parallelism, scope};

/// `work` on 0 to `count` - 1, as many at a time as there are processors; the result does not depend on how many.
///
/// ```
/// assert_eq!(evenbore_bench::parallel::each(4, |i| i * i), [0, 1, 4, 9]);
/// ```
pub fn each<T: Send>(count: usize, work: impl Fn(usize) -> T + Sync) -> Vec<T> {
    let workers = available_parallelism().map_or(1, NonZero::get).min(count).max(1);
    let next = AtomicUsize::new(0);
    let run = || {
        let mut done = Vec::new();
        loop {
            let i = next.fetch_add(1, Ordering::Relaxed);
            if i >= count {
                return done;
            }
            done.push((i, work(i)));
        }
    };
    let mut all: Vec<(usize, T)> = scope(|scope| {
        let running: Vec<_> = (0..workers).map(|_| scope.spawn(run)).collect();
        running
            .into_iter()
            .flat_map(|worker| worker.join().unwrap_or_else(|why| std::panic::resume_unwind(why)))
            .collect()
    });
    all.sort_by_key(|(i, _)| *i);
    all.into_iter().map(|(_, result)| result).collect()
}
