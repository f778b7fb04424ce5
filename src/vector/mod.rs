//! [`Vector`]: the little that a driver asks of the vectors it moves through. *How to bring your own* is here too.
//!
//! Ready: `Vec<T>` (feature `alloc`), `[T; N]`, and nalgebra's `DVector<T>` and `SVector<T, N>` (feature `nalgebra`),
//! each over `f32` and `f64`.
//!
//! # Bring your own
//!
//! Implement seven small methods for the type you have: a field on a grid, a handle to memory on many machines, a
//! struct of several blocks. A driver clones the first point a fixed number of times at its start and works in those
//! clones from then on, so the type owns its layout and its reductions.
//!
//! ```
//! use surefoot::{Vector, vector::conformance};
//!
//! /// A rod's deflection and its load, kept apart in memory.
//! #[derive(Clone, Debug)]
//! struct Rod { deflection: Vec<f64>, load: f64 }
//!
//! impl Vector for Rod {
//!     type Scalar = f64;
//!     fn dim(&self) -> usize { self.deflection.dim() + 1 }
//!     fn dot(&self, other: &Self) -> f64 { self.deflection.dot(&other.deflection) + self.load * other.load }
//!     fn assign(&mut self, other: &Self) { self.deflection.assign(&other.deflection); self.load = other.load; }
//!     fn scale(&mut self, a: f64) { self.deflection.scale(a); self.load *= a; }
//!     fn add_scaled(&mut self, a: f64, x: &Self) { self.deflection.add_scaled(a, &x.deflection); self.load += a * x.load; }
//!     fn max_abs(&self) -> f64 {
//!         let (a, b) = (self.deflection.max_abs(), self.load.abs());
//!         if a.is_nan() || a > b { a } else { b } // a NaN must survive wherever it stands
//!     }
//! }
//!
//! // The contract, tried on the type: `make` builds a vector from its components.
//! conformance::check(|v: &[f64]| Rod { deflection: v[1..].to_vec(), load: v[0] }, 5).unwrap();
//! ```
//!
//! What the contract asks, beyond the arithmetic:
//! - `max_abs` is NaN if any component is NaN, first, in the middle or last: a NaN gradient must never look converged.
//! - `dot` is NaN or infinite, never a panic, when a component is.
//! - `dim` tells the present length; a driver checks it after every reply, because a callback can swap a vector for
//!   another. The other methods are only called with equal lengths, and must not panic on others: they may work on the
//!   common part.

#[cfg(feature = "alloc")]
pub mod conformance;
pub mod kernels;
#[cfg(feature = "nalgebra")]
mod nalgebra_backend;
mod slices;

use crate::Real;

/// What points, directions and gradients are made of. See the [module page](self) for how to bring your own.
pub trait Vector: Clone {
    /// `f32` or `f64`.
    type Scalar: Real;

    /// Number of components.
    fn dim(&self) -> usize;

    /// Inner product with `other`, which has the same length.
    fn dot(&self, other: &Self) -> Self::Scalar;

    /// Copies the components of `other`.
    fn assign(&mut self, other: &Self);

    /// Multiplies each component by `a`.
    fn scale(&mut self, a: Self::Scalar);

    /// Adds `a x` component by component.
    fn add_scaled(&mut self, a: Self::Scalar, x: &Self);

    /// The largest magnitude of a component; 0 for an empty vector; NaN if any component is NaN, wherever it stands.
    fn max_abs(&self) -> Self::Scalar;

    /// Becomes `x + a d`. Default: [`assign`](Vector::assign), then [`add_scaled`](Vector::add_scaled); worth
    /// overriding where one pass over the memory can do both.
    fn step_from(&mut self, x: &Self, a: Self::Scalar, d: &Self) {
        self.assign(x);
        self.add_scaled(a, d);
    }
}
