//! Descent directions: what a driver steps along.
//!
//! | direction | vectors it owns | first trial |
//! |---|---|---|
//! | [`SteepestDescent`] | 0 | from the last decrease |
//! | [`ConjugateGradient`] | 0 | from the last decrease |
//! | [`PreconditionedDescent`], [`PreconditionedGradient`] | 0, 1 | from the last decrease |
//! | [`Lbfgs`] (feature `alloc`) | 2 per pair (half of that with [`SinglePairs`]) | 1, once there is a pair |

mod conjugate_gradient;
#[cfg(feature = "alloc")]
mod lbfgs;
mod preconditioned;
mod preconditioner;
mod steepest_descent;

pub use conjugate_gradient::{ConjugateGradient, Update};
#[cfg(feature = "alloc")]
pub use lbfgs::{Form, History, InitialScale, Lbfgs, LbfgsError, Pairs, SinglePairs};
pub use preconditioned::{PreconditionedDescent, PreconditionedGradient};
pub use preconditioner::{Diagonal, FromFn, Identity, Preconditioner, preconditioner};
pub use steepest_descent::SteepestDescent;

use crate::Vector;
use crate::vector::Survey;

/// A move that a run made.
#[derive(Debug)]
#[non_exhaustive]
pub struct Moved<'a, V: Vector> {
    /// The accepted step `a`.
    pub step: V::Scalar,
    /// The direction `d` it was made along. What is left here is what [`Direction::direction`] finds in its place: a history may
    /// keep the buffer and leave another of the same length.
    pub direction: &'a mut V,
    /// The point before.
    pub x_old: &'a V,
    /// The point after: `x_old + a d`.
    pub x_new: &'a V,
    /// The gradient before. Nobody reads it afterwards: it may be overwritten, as scratch, or kept and another buffer left.
    pub g_old: &'a mut V,
    /// The gradient after, finite.
    pub g_new: &'a V,
    /// What [`Direction::survey`] returned for `g_new`.
    pub survey: Survey<V::Scalar>,
}

impl<'a, V: Vector> Moved<'a, V> {
    /// A move from `x_old` to `x_new = x_old + step direction`, for a loop of your own around a [`Direction`]; `survey` is what
    /// the direction told about `g_new`.
    pub fn new(
        step: V::Scalar,
        direction: &'a mut V,
        (x_old, x_new): (&'a V, &'a V),
        (g_old, g_new): (&'a mut V, &'a V),
        survey: Survey<V::Scalar>,
    ) -> Self {
        Moved {
            step,
            direction,
            x_old,
            x_new,
            g_old,
            g_new,
            survey,
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

    /// Writes the direction at `x` with gradient `g` into `d`, which still holds what [`moved`](Direction::moved) left there (arbitrary
    /// numbers at the start of a run and after a reset). Returns `g . d` where it is known without another pass.
    fn direction(&mut self, x: &V, g: &V, d: &mut V) -> Option<V::Scalar>;

    /// Looks at the gradient `g` at a trial point, where `old` is the gradient at the point before and `d` the direction between
    /// the two: its slope, its largest component, and what the direction will want to know of it if the trial is accepted. The
    /// gradient of a move is always the one surveyed last, and moves follow one another: each begins where the one before ended.
    ///
    /// Default: everything that a [`Survey`] holds, in the one pass of [`Vector::survey`].
    fn survey(&mut self, g: &V, old: &V, d: &V) -> Survey<V::Scalar> {
        g.survey(old, d, &[], &mut [])
    }

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
        fn survey(&mut self, g: &V, old: &V, d: &V) -> Survey<V::Scalar> {
            (**self).survey(g, old, d)
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
    d.combine(-num_traits::one::<V::Scalar>(), g, &[], &[]);
}
