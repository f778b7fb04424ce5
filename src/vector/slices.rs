//! `[T; N]` and `Vec<T>`: the kernels, forwarded.

use super::{Contiguous, Vector, kernels};
use crate::Real;

/// Forwards every method to the slice kernels, for a type that exposes its numbers as one slice.
macro_rules! forward_to_slice {
    ($shared:ident, $unique:ident) => {
        fn dim(&self) -> usize {
            self.len()
        }
        #[inline]
        fn dot(&self, other: &Self) -> T {
            kernels::dot(self.$shared(), other.$shared())
        }
        fn assign(&mut self, other: &Self) {
            kernels::assign(self.$unique(), other.$shared());
        }
        fn scale(&mut self, a: T) {
            kernels::scale(self.$unique(), a);
        }
        #[inline]
        fn add_scaled(&mut self, a: T, x: &Self) {
            kernels::add_scaled(self.$unique(), a, x.$shared());
        }
        fn max_abs(&self) -> T {
            kernels::max_abs(self.$shared())
        }
        fn step_from(&mut self, x: &Self, a: T, d: &Self) {
            kernels::step_from(self.$unique(), x.$shared(), a, d.$shared());
        }
        fn finite_step_from(&mut self, x: &Self, a: T, d: &Self) -> bool {
            kernels::finite_step_from(self.$unique(), x.$shared(), a, d.$shared())
        }
        fn scale_add(&mut self, a: T, b: T, x: &Self) {
            kernels::scale_add(self.$unique(), a, b, x.$shared());
        }
        fn subtract_from(&mut self, x: &Self) {
            kernels::subtract_from(self.$unique(), x.$shared());
        }
        fn dots(&self, others: &[Self], out: &mut [T]) {
            let n = out.len().min(others.len());
            kernels::dots(|i| others[i].$shared(), self.$shared(), &mut out[..n]);
        }
        fn survey(
            &self,
            old: &Self,
            d: &Self,
            others: &[Self],
            out: &mut [T],
        ) -> $crate::vector::Survey<T> {
            let n = out.len().min(others.len());
            let (g, old, d) = (self.$shared(), old.$shared(), d.$shared());
            kernels::survey(g, old, d, |i| others[i].$shared(), &mut out[..n])
        }
        fn combine(&mut self, a: T, x: &Self, coefficients: &[T], vectors: &[Self]) {
            let n = coefficients.len().min(vectors.len());
            let (x, coefficients) = (x.$shared(), &coefficients[..n]);
            kernels::combine(self.$unique(), a, x, coefficients, |i| vectors[i].$shared());
        }
    };
}
#[cfg(any(feature = "nalgebra", feature = "faer"))]
pub(super) use forward_to_slice;

impl<T: Real, const N: usize> Vector for [T; N] {
    type Scalar = T;
    forward_to_slice!(as_slice, as_mut_slice);
}

#[cfg(feature = "alloc")]
impl<T: Real> Vector for alloc::vec::Vec<T> {
    type Scalar = T;
    forward_to_slice!(as_slice, as_mut_slice);
}

/// [`Contiguous`], for a type that exposes its numbers as one slice.
macro_rules! contiguous {
    ($shared:ident, $unique:ident) => {
        fn numbers(&self) -> &[T] {
            self.$shared()
        }
        fn numbers_mut(&mut self) -> &mut [T] {
            self.$unique()
        }
    };
}
impl<T: Real, const N: usize> Contiguous for [T; N] {
    contiguous!(as_slice, as_mut_slice);
}

#[cfg(feature = "alloc")]
impl<T: Real> Contiguous for alloc::vec::Vec<T> {
    contiguous!(as_slice, as_mut_slice);
}
