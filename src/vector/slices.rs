//! `[T; N]` and `Vec<T>`: the kernels, forwarded.

use super::{Vector, kernels};
use crate::Real;

/// Forwards every method to the slice kernels, for a type that exposes its numbers as one slice.
macro_rules! forward_to_slice {
    ($shared:ident, $unique:ident) => {
        fn dim(&self) -> usize {
            self.len()
        }
        fn dot(&self, other: &Self) -> T {
            kernels::dot(self.$shared(), other.$shared())
        }
        fn assign(&mut self, other: &Self) {
            kernels::assign(self.$unique(), other.$shared());
        }
        fn scale(&mut self, a: T) {
            kernels::scale(self.$unique(), a);
        }
        fn add_scaled(&mut self, a: T, x: &Self) {
            kernels::add_scaled(self.$unique(), a, x.$shared());
        }
        fn max_abs(&self) -> T {
            kernels::max_abs(self.$shared())
        }
        fn step_from(&mut self, x: &Self, a: T, d: &Self) {
            kernels::step_from(self.$unique(), x.$shared(), a, d.$shared());
        }
    };
}
#[cfg(feature = "nalgebra")]
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
