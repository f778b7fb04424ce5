//! [`MathVec`]: any type with the vector arithmetic of argmin-math.

use super::{Vector, components};
use crate::Real;
use argmin_math::{ArgminDot, ArgminMul, ArgminScaledAdd};

/// Any type with the vector arithmetic of argmin-math 0.5 (feature `argmin-math`), wrapped.
///
/// Asked of the type `V` over `f32` or `f64`: `ArgminDot<V, T>`, `ArgminMul<T, V>` and `ArgminScaledAdd<V, T, V>` (which
/// argmin-math derives from `ArgminMul` and `ArgminAdd`); and, because none of its traits tells the length or the largest
/// component, `&V` must iterate over its numbers, `IntoIterator<Item = &T>` of known length. `Vec<T>`, and the vectors of the
/// versions of nalgebra and ndarray that argmin-math knows, have it all; switch its features for them on in your own
/// manifest, this crate switches none on. A type of your own needs the three traits and the iterator.
///
/// - **It allocates.** Each call of that arithmetic returns a fresh value: adding a scaled vector makes two. Where this crate
///   knows the type itself (`Vec`, nalgebra 0.35, ndarray 0.17), its own backend is faster and allocates nothing.
/// - Sums are taken in the type's own order: iterates are those over a `Vec<T>` to rounding, not to the bit.
/// - Its arithmetic panics on empty vectors and on unequal lengths, so lengths are checked first: the inner product is
///   then 0 for empty vectors and NaN for unequal ones, and the other methods change nothing. Shapes cannot be checked: a
///   matrix swapped for one of another shape with as many components panics as its arithmetic does.
///
/// ```
/// use surefoot::{Descent, acceptance::WeakWolfe, direction::Lbfgs, finder::ThreePoint, vector::MathVec};
/// // Two wells pull on a drop: the nearer, deeper one gets it.
/// let descent = Descent::new(Lbfgs::new(5)?, ThreePoint::new(), WeakWolfe::default());
/// let report = descent.minimize_fn(MathVec(vec![0.5, 1.0]), |x, g| {
///     let (x, y): (f64, f64) = (x.0[0], x.0[1]);
///     g.0[0] = 4.0 * x * (x * x - 1.0) + 0.3;
///     g.0[1] = 2.0 * y;
///     (x * x - 1.0).powi(2) + 0.3 * x + y * y
/// })?;
/// assert!(report.converged());
/// assert!(report.gradient_max.is_some_and(|g| g < 1e-4));
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct MathVec<V>(pub V);

impl<V, T> Vector for MathVec<V>
where
    T: Real,
    V: Clone + ArgminDot<V, T> + ArgminMul<T, V> + ArgminScaledAdd<V, T, V>,
    for<'a> &'a V: IntoIterator<Item = &'a T, IntoIter: ExactSizeIterator>,
{
    type Scalar = T;

    fn dim(&self) -> usize {
        self.0.into_iter().len()
    }

    fn dot(&self, other: &Self) -> T {
        match (self.dim(), other.dim()) {
            (0, 0) => T::zero(),
            (n, m) if n == m => self.0.dot(&other.0),
            _ => T::nan(),
        }
    }

    fn assign(&mut self, other: &Self) {
        if self.dim() == other.dim() {
            self.0.clone_from(&other.0);
        }
    }

    fn scale(&mut self, a: T) {
        if self.dim() > 0 {
            self.0 = self.0.mul(&a);
        }
    }

    fn add_scaled(&mut self, a: T, x: &Self) {
        if self.dim() > 0 && self.dim() == x.dim() {
            self.0 = self.0.scaled_add(&a, &x.0);
        }
    }

    fn max_abs(&self) -> T {
        components::max_abs(self.0.into_iter())
    }

    fn step_from(&mut self, x: &Self, a: T, d: &Self) {
        let n = self.dim();
        if n > 0 && n == x.dim() && n == d.dim() {
            self.0 = x.0.scaled_add(&a, &d.0);
        }
    }
}
