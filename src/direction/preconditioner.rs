//! Preconditioners: a metric for the steepest descent that a direction starts from.

use crate::Vector;
use crate::vector::Contiguous;

/// A symmetric positive definite approximation `P` of the inverse Hessian, to be applied to a vector.
///
/// A closure becomes one through [`preconditioner`], an inverse diagonal through [`Diagonal`].
pub trait Preconditioner<V: Vector> {
    /// Writes `P v` into `to`, at the point `x`.
    fn apply(&mut self, x: &V, v: &V, to: &mut V);

    /// Whether `P` is the identity, so that nobody need apply it. Default: no.
    fn is_identity(&self) -> bool {
        false
    }
}

/// The identity: no preconditioning.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Identity;

impl<V: Vector> Preconditioner<V> for Identity {
    fn apply(&mut self, _: &V, v: &V, to: &mut V) {
        to.assign(v);
    }
    fn is_identity(&self) -> bool {
        true
    }
}

/// A diagonal `P`, such as one over the second derivatives, or the squares of typical sizes of the variables.
///
/// Its components must be positive and finite, as many as there are variables; where they are not, directions do not descend and the run
/// says so ([`RunEnding::NotDescent`](crate::RunEnding::NotDescent)).
///
/// ```
/// use surefoot::{Descent, acceptance::WeakWolfe, direction::{Diagonal, Lbfgs}, finder::ThreePoint};
/// // f(x) = x_0^2 / 2 + 10^6 x_1^2 / 2
/// let direction = Lbfgs::new(5)?.with_preconditioner(Diagonal(vec![1.0, 1e-6]));
/// let report = Descent::new(direction, ThreePoint::new(), WeakWolfe::default()).minimize_fn(vec![3.0, -4.0], |x, g| {
///     (g[0], g[1]) = (x[0], 1e6 * x[1]);
///     0.5 * (x[0] * g[0] + x[1] * g[1])
/// })?;
/// assert!(report.converged() && report.iterations < 5);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Debug, PartialEq)]
pub struct Diagonal<V>(pub V);

impl<V: Contiguous> Preconditioner<V> for Diagonal<V> {
    fn apply(&mut self, _: &V, v: &V, to: &mut V) {
        let (diagonal, v) = (self.0.numbers(), v.numbers());
        for ((to, &v), &p) in to.numbers_mut().iter_mut().zip(v).zip(diagonal) {
            *to = p * v;
        }
    }
}

/// A preconditioner from a closure that takes the point `x`, a vector `v` and the place for `P v`.
#[derive(Clone, Copy, Debug)]
pub struct FromFn<F>(F);

/// A preconditioner from a closure `|x, v, to|` that writes `P v` into `to`, at the point `x`; `P` must be symmetric and positive
/// definite.
pub fn preconditioner<V: Vector, F: FnMut(&V, &V, &mut V)>(apply: F) -> FromFn<F> {
    FromFn(apply)
}

impl<V: Vector, F: FnMut(&V, &V, &mut V)> Preconditioner<V> for FromFn<F> {
    fn apply(&mut self, x: &V, v: &V, to: &mut V) {
        (self.0)(x, v, to);
    }
}
