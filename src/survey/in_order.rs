//! Work on many things at once, results in order.

use std::collections::BTreeMap;
use std::sync::atomic::{AtomicUsize, Ordering};
use std::sync::mpsc;

/// Does `work` on every item, on all threads of the pool, and gives the results to `sink` in the
/// order of the items, as soon as their turn comes.
///
/// Results wait in memory only while an earlier item is still in work. When `sink` fails, no
/// further item is begun.
///
/// # Errors
/// The first error of `sink`.
pub(super) fn in_order<T, R, E>(
    items: &[T],
    work: impl Fn(&T) -> R + Sync,
    mut sink: impl FnMut(R) -> Result<(), E>,
) -> Result<(), E>
where
    T: Sync,
    R: Send,
{
    let next = AtomicUsize::new(0);
    let (sender, receiver) = mpsc::channel();
    std::thread::scope(|scope| {
        let (next, work) = (&next, &work);
        scope.spawn(move || {
            // Every thread of the pool takes the next item until there is none, so items are
            // begun in their order and few wait for an earlier one.
            rayon::broadcast(|_| {
                loop {
                    let at = next.fetch_add(1, Ordering::Relaxed);
                    let Some(item) = items.get(at) else { break };
                    if sender.send((at, work(item))).is_err() {
                        break;
                    }
                }
            });
        });
        let mut waiting = BTreeMap::new();
        let mut turn = 0;
        for (at, result) in receiver {
            waiting.insert(at, result);
            while let Some(result) = waiting.remove(&turn) {
                turn += 1;
                if let Err(error) = sink(result) {
                    // Nothing is begun any more; what is in work finds the receiver gone.
                    next.store(items.len(), Ordering::Relaxed);
                    return Err(error);
                }
            }
        }
        Ok(())
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn results_come_in_the_order_of_the_items() {
        let items: Vec<u64> = (0..200).collect();
        let mut seen = Vec::new();
        let done: Result<(), ()> = in_order(
            &items,
            |&n| {
                // Early items take longest.
                std::thread::sleep(std::time::Duration::from_micros(200 - n));
                n * n
            },
            |square| {
                seen.push(square);
                Ok(())
            },
        );
        assert_eq!(done, Ok(()));
        assert_eq!(seen, items.iter().map(|n| n * n).collect::<Vec<_>>());
    }

    #[test]
    fn an_error_ends_the_work() {
        let items: Vec<usize> = (0..10_000).collect();
        let begun = AtomicUsize::new(0);
        let done = in_order(
            &items,
            |&n| {
                begun.fetch_add(1, Ordering::Relaxed);
                std::thread::sleep(std::time::Duration::from_micros(50));
                n
            },
            |n| if n == 3 { Err("full") } else { Ok(()) },
        );
        assert_eq!(done, Err("full"));
        assert!(begun.load(Ordering::Relaxed) < items.len());
    }
}
