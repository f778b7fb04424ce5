//! Long vectors block by block, in one order, whoever works on which block.

use core::ops::Range;

/// Numbers in a block. Long enough that the prefetcher sees few, long streams, short enough that a block of the vector that is
/// used again and again stays in the second cache (`benches/direction.rs`).
pub(super) const BLOCK: usize = 16_384;

/// Threads share the work from this many numbers on; below, handing it out costs more than it saves.
#[cfg(feature = "rayon")]
const SHARED_FROM: usize = 1 << 18;
/// So many blocks are handed out at a time: their results wait on the stack until they are merged in order.
#[cfg(feature = "rayon")]
const WAVE: usize = 64;

/// The block with this number, of `n` numbers.
fn block(number: usize, n: usize) -> Range<usize> {
    number * BLOCK..((number + 1) * BLOCK).min(n)
}

#[cfg(feature = "rayon")]
fn shared(n: usize) -> bool {
    n >= SHARED_FROM && rayon::current_num_threads() > 1
}

/// The results of all blocks, merged from the first to the last: the same bits for any number of threads.
#[inline]
pub(super) fn merged<P: Copy + Send>(
    n: usize,
    of: impl Fn(Range<usize>) -> P + Sync,
    merge: impl Fn(P, P) -> P,
) -> P {
    if n <= BLOCK {
        return of(0..n);
    }
    let blocks = n.div_ceil(BLOCK);
    #[cfg(feature = "rayon")]
    if shared(n) {
        use rayon::prelude::*;
        let mut total = None;
        for first in (0..blocks).step_by(WAVE) {
            let mut wave = [None; WAVE];
            let wave = &mut wave[..WAVE.min(blocks - first)];
            wave.par_iter_mut()
                .enumerate()
                .for_each(|(i, result)| *result = Some(of(block(first + i, n))));
            for &mut result in wave {
                total = match (total, result) {
                    (Some(total), Some(result)) => Some(merge(total, result)),
                    (total, result) => total.or(result),
                };
            }
        }
        if let Some(total) = total {
            return total;
        }
    }
    (1..blocks).fold(of(block(0, n)), |total, i| merge(total, of(block(i, n))))
}

/// Works on `to` block by block; `on` is given where the block begins.
#[inline]
pub(super) fn each<T: Send>(to: &mut [T], on: impl Fn(usize, &mut [T]) + Sync) {
    if to.len() <= BLOCK {
        return on(0, to);
    }
    #[cfg(feature = "rayon")]
    if shared(to.len()) {
        use rayon::prelude::*;
        to.par_chunks_mut(BLOCK)
            .enumerate()
            .for_each(|(i, to)| on(i * BLOCK, to));
        return;
    }
    for (i, to) in to.chunks_mut(BLOCK).enumerate() {
        on(i * BLOCK, to);
    }
}
