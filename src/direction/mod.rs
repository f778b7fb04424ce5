//! Descent directions: what a driver steps along.
//!
//! | direction | vectors it owns | first trial |
//! |---|---|---|
//! | [`SteepestDescent`] | 0 | from the last decrease |
//! | [`ConjugateGradient`] | 0 | from the last decrease |
//! | [`Lbfgs`] (feature `alloc`) | 2 per pair | 1, once there is a pair |

mod conjugate_gradient;
#[cfg(feature = "alloc")]
mod lbfgs;
mod steepest_descent;

pub use conjugate_gradient::{ConjugateGradient, Update};
#[cfg(feature = "alloc")]
pub use lbfgs::{Lbfgs, LbfgsError};
pub use steepest_descent::SteepestDescent;

use crate::Vector;

/// A move that a run made.
#[derive(Debug)]
#[non_exhaustive]
pub struct Moved<'a, V: Vector> {
    /// The accepted step `a`.
    pub step: V::Scalar,
    /// The direction `d` it was made along.
    pub direction: &'a V,
    /// The point before.
    pub x_old: &'a V,
    /// The point after: `x_old + a d`.
    pub x_new: &'a V,
    /// The gradient before. Nobody reads it afterwards: it may be overwritten, as scratch.
    pub g_old: &'a mut V,
    /// The gradient after, finite.
    pub g_new: &'a V,
}

impl<'a, V: Vector> Moved<'a, V> {
    /// A move from `x_old` to `x_new = x_old + step direction`, for a loop of your own around a [`Direction`].
    pub fn new(
        step: V::Scalar,
        direction: &'a V,
        (x_old, x_new): (&'a V, &'a V),
        (g_old, g_new): (&'a mut V, &'a V),
    ) -> Self {
        Moved {
            step,
            direction,
            x_old,
            x_new,
            g_old,
            g_new,
        }
    }
}

/// A source of descent directions.
///
/// ```
/// use surefoot::{Direction, Vector, direction::Moved};
/// /// Steepest descent in the metric of a diagonal matrix.
/// struct Scaled { inverse_diagonal: Vec<f64> }
/// impl Direction<Vec<f64>> for Scaled {
///     fn direction(&mut self, _: &Vec<f64>, g: &Vec<f64>, d: &mut Vec<f64>) -> Option<f64> {
///         for ((d, g), h) in d.iter_mut().zip(g).zip(&self.inverse_diagonal) { *d = -h * g; }
///         None
///     }
///     fn moved(&mut self, _: Moved<'_, Vec<f64>>) {}
///     fn reset(&mut self) {}
/// }
/// ```
pub trait Direction<V: Vector> {
    /// Called once at the start of a run with the first point: the place to allocate, and to forget any earlier run.
    /// Default: [`reset`](Direction::reset).
    fn begin(&mut self, x: &V) {
        let _ = x;
        self.reset();
    }

    /// Writes the direction at `x` with gradient `g` into `d`, which still holds the direction before (arbitrary
    /// numbers at the start of a run and after a reset). Returns `g . d` where it is known without another pass.
    fn direction(&mut self, x: &V, g: &V, d: &mut V) -> Option<V::Scalar>;

    /// Learns from a move.
    fn moved(&mut self, moved: Moved<'_, V>);

    /// Forgets everything learnt: the next direction is that of steepest descent, in whatever metric is its own.
    fn reset(&mut self);

    /// Whether a step of 1 is the natural first trial along the next direction, as with quasi-Newton directions that
    /// know some curvature. Default: no.
    fn unit_step(&self) -> bool {
        false
    }
}

macro_rules! forward_direction {
    () => {
        fn begin(&mut self, x: &V) {
            (**self).begin(x);
        }
        fn direction(&mut self, x: &V, g: &V, d: &mut V) -> Option<V::Scalar> {
            (**self).direction(x, g, d)
        }
        fn moved(&mut self, moved: Moved<'_, V>) {
            (**self).moved(moved);
        }
        fn reset(&mut self) {
            (**self).reset();
        }
        fn unit_step(&self) -> bool {
            (**self).unit_step()
        }
    };
}

impl<V: Vector, D: Direction<V> + ?Sized> Direction<V> for &mut D {
    forward_direction!();
}

#[cfg(feature = "alloc")]
impl<V: Vector, D: Direction<V> + ?Sized> Direction<V> for alloc::boxed::Box<D> {
    forward_direction!();
}

/// A direction chosen at run time.
#[cfg(feature = "alloc")]
pub type BoxedDirection<V> = alloc::boxed::Box<dyn Direction<V> + Send>;

/// `d = -g`.
fn negative<V: Vector>(g: &V, d: &mut V) {
    d.assign(g);
    d.scale(-num_traits::one::<V::Scalar>());
}
