//! Vectors whose numbers do not lie in one slice: reductions number by number, and the greater of two magnitudes.

use crate::Real;

/// The greater of two magnitudes; NaN if either is.
pub(super) fn larger<T: Real>(a: T, b: T) -> T {
    if a.is_nan() || a > b { a } else { b }
}

/// The largest magnitude; 0 where there is none; NaN if any number is.
#[cfg(any(feature = "ndarray", feature = "argmin-math"))]
pub(super) fn max_abs<'x, T: Real>(x: impl Iterator<Item = &'x T>) -> T {
    x.fold(T::zero(), |most, x| larger(most, x.abs()))
}

/// The sum of products, first to last, up to the end of the shorter one.
#[cfg(any(feature = "ndarray", feature = "argmin-math"))]
pub(super) fn dot<'x, T: Real>(
    x: impl Iterator<Item = &'x T>,
    y: impl Iterator<Item = &'x T>,
) -> T {
    x.zip(y).fold(T::zero(), |sum, (&x, &y)| sum + x * y)
}
