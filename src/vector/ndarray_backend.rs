//! ndarray's owned arrays, of any number of axes and in any memory layout.

use super::{Survey, Vector, components, kernels};
use crate::Real;
use ndarray::{Array, Dimension};

/// ndarray 0.17 (feature `ndarray`): every owned array `Array<T, D>`, of any number of axes.
///
/// An array is the vector of its components. Where all arrays of an operation have one layout without gaps (rows first,
/// columns first, reversed axes), it runs on the slice kernels, in the order of memory; with rows first, iterates have
/// the same bits as those over a `Vec<T>`. Other layouts, and different ones in one operation, are worked on component
/// by component: the same to rounding, and several times slower. A driver's own arrays are clones of the first point and
/// have its layout, so only a gradient that the objective replaces, rather than fills, brings in another.
///
/// Arrays of different shape have no inner product: [`dot`](Vector::dot) is NaN, also where they have equally many
/// components, which [`dim`](Vector::dim) cannot tell. So a gradient of the wrong shape ends a run without a move.
///
/// ```
/// use ndarray::Array2;
/// use surefoot::{Descent, acceptance::StrongWolfe, direction::{ConjugateGradient, Update}, finder::ThreePoint};
/// // A plate of 6 x 8 cells at rest: its west edge is held at 1, its east edge at 0, the others let nothing through.
/// let rule = StrongWolfe::new(1e-4, 0.1)?;
/// let descent = Descent::new(ConjugateGradient::new(Update::HagerZhang), ThreePoint::new(), rule);
/// let report = descent.minimize_fn(Array2::zeros((6, 8)), |x: &Array2<f64>, g| {
///     let mut energy = 0.0;
///     g.fill(0.0);
///     for ((i, j), &here) in x.indexed_iter() {
///         for (k, l) in [(i + 1, j), (i, j + 1)] {
///             if let Some(&there) = x.get((k, l)) {
///                 energy += 0.5 * (there - here).powi(2);
///                 g[(i, j)] -= there - here;
///                 g[(k, l)] += there - here;
///             }
///         }
///     }
///     for i in 0..6 {
///         energy += (x[(i, 0)] - 1.0).powi(2) + x[(i, 7)].powi(2); // half a cell away: twice the conductance
///         g[(i, 0)] += 2.0 * (x[(i, 0)] - 1.0);
///         g[(i, 7)] += 2.0 * x[(i, 7)];
///     }
///     energy
/// })?;
/// assert!(report.converged());
/// // The heat flows straight across: cell j is at 1 - (j + 1/2) / 8.
/// assert!((report.point[(3, 2)] - 0.6875).abs() < 1e-4);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
impl<T: Real, D: Dimension> Vector for Array<T, D> {
    type Scalar = T;

    fn dim(&self) -> usize {
        self.len()
    }

    fn dot(&self, other: &Self) -> T {
        if self.shape() != other.shape() {
            T::nan()
        } else if packed(self, [other]) {
            kernels::dot(numbers(self), numbers(other))
        } else {
            components::dot(self.iter(), other.iter())
        }
    }

    fn assign(&mut self, other: &Self) {
        if packed(self, [other]) {
            kernels::assign(numbers_mut(self), numbers(other));
        } else {
            self.iter_mut().zip(other).for_each(|(to, &x)| *to = x);
        }
    }

    fn scale(&mut self, a: T) {
        if packed(self, []) {
            kernels::scale(numbers_mut(self), a);
        } else {
            self.iter_mut().for_each(|y| *y = *y * a);
        }
    }

    fn add_scaled(&mut self, a: T, x: &Self) {
        if packed(self, [x]) {
            kernels::add_scaled(numbers_mut(self), a, numbers(x));
        } else {
            self.iter_mut().zip(x).for_each(|(y, &x)| *y = *y + a * x);
        }
    }

    fn max_abs(&self) -> T {
        if packed(self, []) {
            kernels::max_abs(numbers(self))
        } else {
            components::max_abs(self.iter())
        }
    }

    fn step_from(&mut self, x: &Self, a: T, d: &Self) {
        if packed(self, [x, d]) {
            kernels::step_from(numbers_mut(self), numbers(x), a, numbers(d));
        } else {
            let to = self.iter_mut().zip(x).zip(d);
            to.for_each(|((to, &x), &d)| *to = x + a * d);
        }
    }

    fn finite_step_from(&mut self, x: &Self, a: T, d: &Self) -> bool {
        if packed(self, [x, d]) {
            kernels::finite_step_from(numbers_mut(self), numbers(x), a, numbers(d))
        } else {
            self.step_from(x, a, d);
            self.max_abs().is_finite()
        }
    }

    fn scale_add(&mut self, a: T, b: T, x: &Self) {
        if packed(self, [x]) {
            kernels::scale_add(numbers_mut(self), a, b, numbers(x));
        } else {
            let both = self.iter_mut().zip(x);
            both.for_each(|(y, &x)| *y = a * *y + b * x);
        }
    }

    fn subtract_from(&mut self, x: &Self) {
        if packed(self, [x]) {
            kernels::subtract_from(numbers_mut(self), numbers(x));
        } else {
            self.iter_mut().zip(x).for_each(|(y, &x)| *y = x - *y);
        }
    }

    fn dots(&self, others: &[Self], out: &mut [T]) {
        if packed(self, others) {
            let n = out.len().min(others.len());
            kernels::dots(|i| numbers(&others[i]), numbers(self), &mut out[..n]);
        } else {
            let each = out.iter_mut().zip(others);
            each.for_each(|(out, other)| *out = Vector::dot(other, self));
        }
    }

    fn survey(&self, old: &Self, d: &Self, others: &[Self], out: &mut [T]) -> Survey<T> {
        if packed(self, [old, d]) && packed(self, others) {
            let n = out.len().min(others.len());
            let (g, old, d) = (numbers(self), numbers(old), numbers(d));
            kernels::survey(g, old, d, |i| numbers(&others[i]), &mut out[..n])
        } else {
            self.dots(others, out);
            Survey::of(self, old, d)
        }
    }

    fn combine(&mut self, a: T, x: &Self, coefficients: &[T], vectors: &[Self]) {
        if packed(self, [x]) && packed(self, vectors) {
            let n = coefficients.len().min(vectors.len());
            let (x, coefficients) = (numbers(x), &coefficients[..n]);
            kernels::combine(numbers_mut(self), a, x, coefficients, |i| {
                numbers(&vectors[i])
            });
        } else {
            Vector::assign(self, x);
            self.scale(a);
            for (&c, v) in coefficients.iter().zip(vectors) {
                self.add_scaled(c, v);
            }
        }
    }
}

/// Whether the components of `x` fill a piece of memory, and those of `others` fill theirs in the same order.
fn packed<'x, T: 'x, D: Dimension + 'x>(
    x: &Array<T, D>,
    others: impl IntoIterator<Item = &'x Array<T, D>>,
) -> bool {
    // Strides differ without need along axes of length 1.
    let rows_first = x.is_standard_layout();
    x.as_slice_memory_order().is_some()
        && others.into_iter().all(|y| {
            let in_order = x.strides() == y.strides() || rows_first && y.is_standard_layout();
            x.shape() == y.shape() && in_order
        })
}

/// The components of a packed array, in the order of memory.
fn numbers<T, D: Dimension>(x: &Array<T, D>) -> &[T] {
    x.as_slice_memory_order().unwrap_or_default()
}

fn numbers_mut<T, D: Dimension>(x: &mut Array<T, D>) -> &mut [T] {
    x.as_slice_memory_order_mut().unwrap_or_default()
}
