//! Backtracking by safeguarded interpolation.

use super::interpolation::{Point, cubic_by_values, quadratic};
use super::{Proposal, Sides, StepFinder};
use crate::{Ray, Real, Side, Trial};

/// Shortens a step that is too long to the minimizer of a parabola (first time) or cubic (later) through the values
/// seen, kept between 0.1 and 0.5 of the refused step.
///
/// Reads values of refused trials, no slopes. Once a trial was too short it halves the bracket, or doubles the step
/// while nothing was too long: the published method knows only "too long".
///
/// Source: J. E. Dennis & R. B. Schnabel, Numerical Methods for Unconstrained Optimization and Nonlinear Equations,
/// 1983, algorithm A6.3.1; Nocedal & Wright 2006, section 3.5. Numbered deviations: (1) the completion for "too short".
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct InterpolatingBacktracking<T = f64> {
    sides: Sides<T>,
    /// The last refused step that was too long, and its value.
    last: Option<(T, T)>,
}

impl<T: Real> InterpolatingBacktracking<T> {
    /// Without parameters.
    pub fn new() -> Self {
        InterpolatingBacktracking {
            sides: Sides::new(),
            last: None,
        }
    }

    fn shorter(&mut self, ray: &Ray<T>, refused: &Trial<T>) -> T {
        let now = (refused.step, refused.value);
        let found = match self.last.replace(now) {
            None => {
                let start = Point {
                    step: T::zero(),
                    value: ray.value,
                    slope: ray.slope,
                };
                quadratic(&start, now.0, now.1)
            }
            Some(before) => cubic_by_values(ray.value, ray.slope, now, before),
        };
        // Dennis & Schnabel A6.3.1, step 10.3: between a tenth and a half of the refused step.
        let (least, most) = (T::of(0.1) * refused.step, T::of(0.5) * refused.step);
        if found < least {
            least
        } else if found < most {
            found
        } else {
            most // also where the interpolant has no minimizer (NaN)
        }
    }
}

impl<T: Real> Default for InterpolatingBacktracking<T> {
    fn default() -> Self {
        Self::new()
    }
}

impl<T: Real> StepFinder<T> for InterpolatingBacktracking<T> {
    fn begin(&mut self, _: &Ray<T>, first: T) -> T {
        *self = Self::new();
        first
    }

    fn next(&mut self, ray: &Ray<T>, refused: &Trial<T>, side: Side) -> Proposal<T> {
        self.sides.note(refused.step, side);
        let untouched = self.sides.short == T::zero();
        Proposal::Try(match self.sides.middle() {
            Some(_) if untouched => self.shorter(ray, refused),
            Some(middle) => middle,
            None => T::of(2.0) * refused.step,
        })
    }
}
