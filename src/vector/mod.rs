//! [`Vector`]: the little that a driver asks of the vectors it moves through. *How to bring your own* is here too.
//!
//! Ready, each over `f32` and `f64`; what holds for each, with an example, stands at its implementation
//! [below](trait@Vector#foreign-impls):
//!
//! | type | feature | iterates, beside those over `Vec` | allocates in an iteration |
//! |---|---|---|---|
//! | `[T; N]` | none | the same bits | no |
//! | `Vec<T>` | `alloc` | | no |
//! | tuples of two to four vectors | none | the same to rounding | no |
//! | `Blocks<V>`: a `Vec` of vectors | `alloc` | the same to rounding | no |
//! | nalgebra 0.35: `SVector<T, N>`, `DVector<T>`, any owned matrix | `nalgebra` | the same bits (columns one after the other) | no |
//! | ndarray 0.17: any owned array, any number of axes | `ndarray` | the same bits, rows first; other layouts to rounding | no |
//! | faer 0.24: `Col<T>` | `faer` | the same bits | no |
//! | `MathVec<V>`: any type with the arithmetic of argmin-math 0.5 | `argmin-math` | the same to rounding | yes |
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

#[cfg(feature = "argmin-math")]
mod argmin_math_backend;
mod components;
#[cfg(feature = "alloc")]
pub mod conformance;
#[cfg(feature = "faer")]
mod faer_backend;
pub mod kernels;
#[cfg(feature = "nalgebra")]
mod nalgebra_backend;
#[cfg(feature = "ndarray")]
mod ndarray_backend;
mod slices;
mod structured;
mod survey;

#[cfg(feature = "argmin-math")]
pub use argmin_math_backend::MathVec;
#[cfg(feature = "alloc")]
pub use structured::Blocks;
pub use survey::Survey;

use crate::Real;
use num_traits::{Float, One};

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

    /// [`step_from`](Vector::step_from), and whether every component of the result is finite. Default: two passes.
    fn finite_step_from(&mut self, x: &Self, a: Self::Scalar, d: &Self) -> bool {
        self.step_from(x, a, d);
        self.max_abs().is_finite()
    }

    /// Becomes `a self + b x`. Default: [`scale`](Vector::scale), then [`add_scaled`](Vector::add_scaled).
    fn scale_add(&mut self, a: Self::Scalar, b: Self::Scalar, x: &Self) {
        self.scale(a);
        self.add_scaled(b, x);
    }

    /// Becomes `x - self`. Default: [`scale_add`](Vector::scale_add).
    fn subtract_from(&mut self, x: &Self) {
        let one = Self::Scalar::one();
        self.scale_add(-one, one, x);
    }

    /// Inner products with several vectors at once; `out` has room for as many. Default: [`dot`](Vector::dot) by `dot`.
    fn dots(&self, others: &[Self], out: &mut [Self::Scalar]) {
        for (out, other) in out.iter_mut().zip(others) {
            *out = other.dot(self);
        }
    }

    /// What this gradient tells beside the one before, `old`, and the direction `d` of the move, and its inner products with
    /// `others`. Worth overriding where one pass over the memory, or one reduction over many machines, can do it all.
    ///
    /// Default: [`Survey::of`] and [`dots`](Vector::dots).
    fn survey(
        &self,
        old: &Self,
        d: &Self,
        others: &[Self],
        out: &mut [Self::Scalar],
    ) -> Survey<Self::Scalar> {
        self.dots(others, out);
        Survey::of(self, old, d)
    }

    /// Becomes `a x + c_0 v_0 + c_1 v_1 + ...` with the coefficients `c` and the vectors `v`, of which there are as many.
    /// Default: a pass for each.
    fn combine(
        &mut self,
        a: Self::Scalar,
        x: &Self,
        coefficients: &[Self::Scalar],
        vectors: &[Self],
    ) {
        self.assign(x);
        self.scale(a);
        for (&c, v) in coefficients.iter().zip(vectors) {
            self.add_scaled(c, v);
        }
    }
}

/// A vector whose numbers lie one after the other in memory.
pub trait Contiguous: Vector {
    /// The numbers.
    fn numbers(&self) -> &[Self::Scalar];
    /// The numbers, to be written.
    fn numbers_mut(&mut self) -> &mut [Self::Scalar];
}
