//! Bisection with expansion.

use super::{Proposal, Sides, StepFinder};
use crate::{Ray, Real, Side, Trial};

/// Doubles the step until a trial is too long, then halves the bracket.
///
/// Reads no values at all: only sides. With the weak Wolfe rule it ends at an acceptable step on every ray that is
/// bounded below, smooth or not (A. S. Lewis & M. L. Overton, "Nonsmooth optimization via quasi-Newton methods", Math.
/// Program. 141 (2013) 135-163, doi:10.1007/s10107-012-0514-2, theorem 4.7, for absolutely continuous rays whose
/// slope exists at every trial).
///
/// ```
/// use surefoot::{StepSearch, Ray, acceptance::WeakWolfe, finder::Bisection};
/// let mut search = StepSearch::new(Bisection::default(), WeakWolfe::new(1e-4, 0.5)?);
/// let kink = |a: f64| ((a - 3.0).abs(), if a < 3.0 { -1.0 } else { 1.0 });
/// let found = search.along(Ray::new(3.0, -1.0), 1.0, kink)?;
/// assert_eq!(found.outcome.accepted().unwrap().step, 4.0); // 1, 2, then 4: past the kink
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Bisection<T = f64> {
    sides: Sides<T>,
}

impl<T: Real> Bisection<T> {
    /// Without parameters.
    pub fn new() -> Self {
        Bisection {
            sides: Sides::new(),
        }
    }
}

impl<T: Real> Default for Bisection<T> {
    fn default() -> Self {
        Self::new()
    }
}

impl<T: Real> StepFinder<T> for Bisection<T> {
    fn begin(&mut self, _: &Ray<T>, first: T) -> T {
        self.sides = Sides::new();
        first
    }

    fn next(&mut self, _: &Ray<T>, refused: &Trial<T>, side: Side) -> Proposal<T> {
        self.sides.note(refused.step, side);
        let doubled = T::of(2.0) * refused.step;
        Proposal::Try(self.sides.middle().unwrap_or(doubled))
    }
}
