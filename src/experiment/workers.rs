use std::num::NonZeroUsize;
use std::sync::atomic::{AtomicUsize, Ordering};
use std::sync::mpsc::channel;
use std::thread;

/// How many runs are under way at once.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum Workers {
    /// One after the other, on the thread of the caller. Seconds are then worth most.
    #[default]
    One,
    /// As many as the machine has cores.
    AllCores,
    /// So many.
    Exactly(NonZeroUsize),
}

impl Workers {
    fn count(self) -> usize {
        match self {
            Workers::One => 1,
            Workers::AllCores => thread::available_parallelism().map_or(1, NonZeroUsize::get),
            Workers::Exactly(count) => count.get(),
        }
    }

    /// Does these pieces of work and keeps the result of each as it comes, on the thread of the caller. The first that cannot be
    /// kept ends it, once those under way are done.
    pub(super) fn each<R: Send, E>(
        self,
        numbers: &[usize],
        work: impl Fn(usize) -> R + Sync,
        mut keep: impl FnMut(usize, R) -> Result<(), E>,
    ) -> Result<(), E> {
        let workers = self.count().min(numbers.len());
        if workers <= 1 {
            return numbers
                .iter()
                .try_for_each(|&number| keep(number, work(number)));
        }
        let next = AtomicUsize::new(0);
        thread::scope(|scope| {
            let (sender, receiver) = channel();
            for _ in 0..workers {
                let (sender, next, work) = (sender.clone(), &next, &work);
                scope.spawn(move || {
                    while let Some(&number) = numbers.get(next.fetch_add(1, Ordering::Relaxed)) {
                        if sender.send((number, work(number))).is_err() {
                            return; // nothing more is kept
                        }
                    }
                });
            }
            drop(sender);
            receiver
                .into_iter()
                .try_for_each(|(number, result)| keep(number, result))
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::vec::Vec;

    fn all() -> [Workers; 3] {
        let three = NonZeroUsize::new(3).unwrap();
        [Workers::One, Workers::AllCores, Workers::Exactly(three)]
    }

    #[test]
    fn each_piece_is_done_and_kept_once() {
        for workers in all() {
            let numbers: Vec<usize> = (0..500).collect();
            let mut kept = Vec::new();
            let work = |number: usize| 2 * number;
            let done = workers.each(&numbers, work, |number, result| -> Result<(), ()> {
                kept.push((number, result));
                Ok(())
            });
            assert_eq!(done, Ok(()));
            kept.sort_unstable();
            assert!(kept.iter().map(|kept| kept.0).eq(0..500));
            assert!(kept.iter().all(|kept| kept.1 == 2 * kept.0));
        }
    }

    #[test]
    fn what_cannot_be_kept_ends_the_work() {
        for workers in all() {
            let numbers: Vec<usize> = (0..100_000).collect();
            let begun = AtomicUsize::new(0);
            let work = |number| {
                begun.fetch_add(1, Ordering::Relaxed);
                thread::sleep(std::time::Duration::from_micros(50));
                number
            };
            let mut kept = 0;
            let full = workers.each(&numbers, work, |_, _| {
                kept += 1;
                if kept < 10 { Ok(()) } else { Err("full") }
            });
            assert_eq!((full, kept), (Err("full"), 10));
            assert!(begun.load(Ordering::Relaxed) < numbers.len());
        }
    }
}
