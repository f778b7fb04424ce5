//! Golden section, and the bracket by values that it shares with [`BrentValues`](super::BrentValues).

use super::{Proposal, StepFinder};
use crate::{Ray, Real, Side, Trial};

/// Minimises along the ray by golden section: values only, one trial for each shrinking of the bracket by 0.618.
///
/// Grows steps by the golden ratio until the value rises, or shortens the first one until it lies below `phi(0)`. That
/// leaves three steps whose middle one is lowest; the longer of the two parts between them is then divided in the golden
/// ratio, until both parts are at most `tolerance` times the middle step. On a ray with a single minimizer `a*` the lowest
/// trial is then within `tolerance a` of it; on others it is near some local minimizer. The reference for
/// [`BrentValues`](super::BrentValues), which needs far fewer trials on smooth rays.
///
/// It goes on after acceptances, and the lowest accepted trial is the result. The rule's sides are not read, so it is
/// exempt from the guard of the search, and the guarantees there are not its own: where the minimizer that it finds is
/// not acceptable, the search ends with [`Ending::FinderSpent`](crate::Ending::FinderSpent). The slope at the start serves
/// only to give up where `a |phi'(0)|` drowns in the rounding of `phi(0)`; it may be missing.
///
/// Values resolve a minimizer to the square root of the rounding unit at best. The default tolerance takes some 38
/// trials once there is a bracket.
///
/// Source: J. Kiefer, "Sequential minimax search for a maximum", Proc. Amer. Math. Soc. 4 (1953) 502-506,
/// doi:10.1090/S0002-9939-1953-0055639-3. Numbered deviations: (1) the limit of his Fibonacci ratios, so that the number of
/// trials need not be fixed beforehand; (2) the bracket is found first, with trials already in the golden ratio.
///
/// ```
/// use surefoot::{Ray, StepSearch, acceptance::AnyDecrease, finder::GoldenSection};
/// let mut search = StepSearch::new(GoldenSection::new(1e-4)?, AnyDecrease);
/// let found = search.along(Ray::without_slope(9.0), 1.0, |a: f64| (a - 3.0).powi(2))?; // values only
/// assert!((found.outcome.accepted().unwrap().step - 3.0).abs() <= 3e-4);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct GoldenSection<T = f64> {
    tolerance: T,
    bracket: Bracket<T>,
    asked: T,
    trials: u32,
}

/// Why an exact minimiser along the ray refuses its parameter.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum ExactStepError {
    /// `!(4 e <= tolerance < 1)`, with the machine epsilon `e` of the type.
    #[error(
        "the relative tolerance on the step must lie between 4 machine epsilons and 1: the square root of epsilon is usual"
    )]
    Tolerance,
}

impl<T: Real> GoldenSection<T> {
    /// With the tolerance on the step relative to it, `4 e <= tolerance < 1` with the machine epsilon `e` of the type.
    ///
    /// # Errors
    /// [`ExactStepError`] outside of that range, and for NaN.
    pub fn new(tolerance: T) -> Result<Self, ExactStepError> {
        checked(tolerance).map(Self::with)
    }

    fn with(tolerance: T) -> Self {
        GoldenSection {
            tolerance,
            bracket: Bracket::new(T::zero()),
            asked: T::zero(),
            trials: 0,
        }
    }

    fn advance(&mut self, ray: &Ray<T>, trial: &Trial<T>) -> Proposal<T> {
        self.trials += 1;
        let helped = self.bracket.take(self.asked, at(trial));
        if !helped || self.trials >= MOST || self.bracket.is_narrow(self.tolerance) {
            return Proposal::Spent;
        }
        match self.bracket.next(ray) {
            Some(step) => {
                self.asked = step;
                Proposal::Try(step)
            }
            None => Proposal::Spent,
        }
    }
}

impl<T: Real> Default for GoldenSection<T> {
    /// `tolerance` = the square root of the machine epsilon: 1.5e-8 in double, 3.5e-4 in single precision (what values can
    /// resolve: R. P. Brent 1973, section 5.2).
    fn default() -> Self {
        Self::with(T::epsilon().sqrt())
    }
}

impl<T: Real> StepFinder<T> for GoldenSection<T> {
    fn begin(&mut self, ray: &Ray<T>, first: T) -> T {
        *self = GoldenSection {
            bracket: Bracket::new(ray.value),
            asked: first,
            ..Self::with(self.tolerance)
        };
        first
    }

    fn next(&mut self, ray: &Ray<T>, refused: &Trial<T>, _: Side) -> Proposal<T> {
        self.advance(ray, refused)
    }

    fn polish(&mut self, ray: &Ray<T>, accepted: &Trial<T>) -> Proposal<T> {
        self.advance(ray, accepted)
    }

    fn wants_guard(&self) -> bool {
        false
    }
}

/// No minimiser asks for more trials in one search. Growing from the smallest double to the largest takes 3,023 of them.
pub(super) const MOST: u32 = 4096;

/// The tolerance, if it is one.
pub(super) fn checked<T: Real>(tolerance: T) -> Result<T, ExactStepError> {
    if tolerance >= T::of(4.0) * T::epsilon() && tolerance < T::one() {
        Ok(tolerance)
    } else {
        Err(ExactStepError::Tolerance)
    }
}

/// A step with its value.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct At<T> {
    pub(super) step: T,
    pub(super) value: T,
}

pub(super) fn at<T: Real>(trial: &Trial<T>) -> At<T> {
    At {
        step: trial.step,
        value: trial.value,
    }
}

/// `(3 - sqrt 5) / 2`, the smaller part of the golden section.
pub(super) fn smaller_part<T: Real>() -> T {
    T::of(0.5) * (T::of(3.0) - T::of(5.0).sqrt())
}

/// Three steps by value: `left < middle < right`, the middle one lower than `left` and not higher than `right`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Bracket<T> {
    start: At<T>,
    pub(super) left: At<T>,
    /// The lowest trial, once one is lower than the start.
    pub(super) middle: Option<At<T>>,
    /// Not lower than the middle, once there is such a trial. Where the domain or a bound forbids a step, its value
    /// counts as infinite.
    pub(super) right: Option<At<T>>,
}

impl<T: Real> Bracket<T> {
    pub(super) fn new(start: T) -> Self {
        let start = At {
            step: T::zero(),
            value: start,
        };
        Bracket {
            start,
            left: start,
            middle: None,
            right: None,
        }
    }

    /// Takes in a trial where `asked` was asked for; false if that taught nothing.
    pub(super) fn take(&mut self, asked: T, here: At<T>) -> bool {
        let forbidden = here.step < asked && self.forbid(asked);
        self.sort_in(here) || forbidden
    }

    /// The search put the trial before `asked`: neither that step nor one beyond it is to be had.
    pub(super) fn forbid(&mut self, asked: T) -> bool {
        if self.right.is_some_and(|right| right.step <= asked) {
            return false;
        }
        if self.middle.is_some_and(|middle| middle.step >= asked) {
            // The domain has a hole: begin again below it.
            *self = Self::new(self.start.value);
        }
        self.right = Some(At {
            step: asked,
            value: T::infinity(),
        });
        true
    }

    fn sort_in(&mut self, here: At<T>) -> bool {
        if here.step <= self.left.step || self.right.is_some_and(|right| here.step >= right.step) {
            return false;
        }
        match self.middle {
            None if here.value < self.left.value => self.middle = Some(here),
            None => self.right = Some(here),
            Some(middle) if here.step == middle.step => return false,
            Some(middle) => {
                let beyond = here.step > middle.step;
                let lower = here.value < middle.value;
                let end = if lower { middle } else { here };
                if beyond == lower {
                    self.left = end;
                } else {
                    self.right = Some(end);
                }
                if lower {
                    self.middle = Some(here);
                }
            }
        }
        true
    }

    /// The next step in the golden ratio; `None` where there is none.
    pub(super) fn next(&self, ray: &Ray<T>) -> Option<T> {
        let share = smaller_part();
        let left = self.left.step;
        let (low, step, high) = match (self.middle, self.right) {
            (None, None) => return None,
            (None, Some(right)) => {
                let step = left + share * (right.step - left);
                // Half a rounding unit of phi(0), and half of that: no decrease can be seen.
                if -(step * ray.slope) < T::of(0.25) * T::epsilon() * ray.value.abs()
                    && ray.slope < T::zero()
                {
                    return None;
                }
                (left, step, right.step)
            }
            (Some(middle), None) => {
                let middle = middle.step;
                // (1 + sqrt 5) / 2 times the last advance
                let step = middle + (T::of(2.0) - share) * (middle - left);
                (middle, step, T::infinity())
            }
            (Some(middle), Some(right)) => {
                let (middle, right) = (middle.step, right.step);
                if right - middle > middle - left {
                    (middle, middle + share * (right - middle), right)
                } else {
                    (left, middle - share * (middle - left), middle)
                }
            }
        };
        (low < step && step < high).then_some(step)
    }

    fn is_narrow(&self, tolerance: T) -> bool {
        match (self.middle, self.right) {
            (Some(middle), Some(right)) => {
                let wide = (right.step - middle.step).max(middle.step - self.left.step);
                wide <= tolerance * middle.step
            }
            _ => false,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn growing_and_shortening_leave_trials_in_the_golden_ratio() {
        for (first, minimizer) in [(1.0, 30.0), (1.0, 0.01)] {
            let value = |step: f64| (step - minimizer) * (step - minimizer);
            let ray = Ray::without_slope(value(0.0));
            let mut bracket = Bracket::new(ray.value);
            let mut step = first;
            while bracket.right.is_none() || bracket.middle.is_none() {
                assert!(bracket.take(
                    step,
                    At {
                        step,
                        value: value(step)
                    }
                ));
                step = bracket.next(&ray).unwrap();
            }
            let (left, middle, right) = (
                bracket.left.step,
                bracket.middle.unwrap().step,
                bracket.right.unwrap().step,
            );
            assert!(left < minimizer && minimizer < right);
            let share = (middle - left) / (right - left);
            // (3 - sqrt 5) / 2
            assert!((share - 0.381_966_011_250_105).abs() < 1e-12, "{share}");
        }
    }

    #[test]
    fn growth_from_the_smallest_to_the_largest_double_stays_within_the_most_trials() {
        let ray = Ray::without_slope(0.0);
        let mut finder = GoldenSection::<f64>::default();
        let mut step = finder.begin(&ray, f64::from_bits(1));
        let mut trials = 0;
        loop {
            trials += 1;
            let trial = Trial {
                step,
                value: -f64::from(trials),
                slope: None,
            };
            match finder.polish(&ray, &trial) {
                Proposal::Try(next) => step = next,
                Proposal::Spent => break,
            }
        }
        assert!(step > f64::MAX / 3.0, "{step:e} after {trials}");
        assert!(trials < MOST as i32, "{trials}");
    }
}
