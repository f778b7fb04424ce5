//! The same sums for short vectors, where it is not the memory but the way to the first addition that takes the time.

use super::lanes::{LANES, Stored, fold};
use crate::Real;

/// [`dot`](super::dot) of two vectors.
#[inline]
pub(super) fn dot<T: Real>(x: &[T], y: &[T]) -> T {
    let (x, x_rest) = x.as_chunks::<LANES>();
    let (y, y_rest) = y.as_chunks::<LANES>();
    let mut lanes = [T::zero(); LANES];
    for (x, y) in x.iter().zip(y) {
        for k in 0..LANES {
            lanes[k] = lanes[k] + x[k] * y[k];
        }
    }
    // Each length has its own straight code, so that the lanes stay in registers.
    match x_rest.len() {
        0 => {}
        1 => rest::<T, 1>(&mut lanes, x_rest, y_rest),
        2 => rest::<T, 2>(&mut lanes, x_rest, y_rest),
        3 => rest::<T, 3>(&mut lanes, x_rest, y_rest),
        4 => rest::<T, 4>(&mut lanes, x_rest, y_rest),
        5 => rest::<T, 5>(&mut lanes, x_rest, y_rest),
        6 => rest::<T, 6>(&mut lanes, x_rest, y_rest),
        _ => rest::<T, 7>(&mut lanes, x_rest, y_rest),
    }
    fold(lanes)
}

#[inline(always)]
fn rest<T: Real, const R: usize>(lanes: &mut [T; LANES], x: &[T], y: &[T]) {
    if let (Some(x), Some(y)) = (x.first_chunk::<R>(), y.first_chunk::<R>()) {
        for k in 0..R {
            lanes[k] = lanes[k] + x[k] * y[k];
        }
    }
}

/// [`add_scaled`](super::add_scaled), in the pieces in which [`dot`] reads them again: numbers that were stored one by one and
/// are loaded together keep the processor waiting.
#[inline]
pub(super) fn add_scaled<S: Stored<T>, T: Real>(y: &mut [T], a: T, x: &[S]) {
    let n = y.len().min(x.len());
    let (y, y_rest) = y[..n].as_chunks_mut::<LANES>();
    let (x, x_rest) = x[..n].as_chunks::<LANES>();
    for (y, x) in y.iter_mut().zip(x) {
        for k in 0..LANES {
            y[k] = y[k] + a * x[k].widen();
        }
    }
    match x_rest.len() {
        0 => {}
        1 => add_rest::<S, T, 1>(y_rest, a, x_rest),
        2 => add_rest::<S, T, 2>(y_rest, a, x_rest),
        3 => add_rest::<S, T, 3>(y_rest, a, x_rest),
        4 => add_rest::<S, T, 4>(y_rest, a, x_rest),
        5 => add_rest::<S, T, 5>(y_rest, a, x_rest),
        6 => add_rest::<S, T, 6>(y_rest, a, x_rest),
        _ => add_rest::<S, T, 7>(y_rest, a, x_rest),
    }
}

#[inline(always)]
fn add_rest<S: Stored<T>, T: Real, const R: usize>(y: &mut [T], a: T, x: &[S]) {
    if let (Some(y), Some(x)) = (y.first_chunk_mut::<R>(), x.first_chunk::<R>()) {
        for k in 0..R {
            y[k] = y[k] + a * x[k].widen();
        }
    }
}
