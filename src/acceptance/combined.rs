//! A closure as a rule, and two rules at once.

use super::Acceptance;
use crate::{Condition, Ray, Real, Side, Trial, Verdict};

/// A rule made by [`rule`] or [`value_rule`].
#[derive(Clone, Copy, Debug)]
pub struct ByClosure<F> {
    judge: F,
    uses_slope: bool,
}

/// A closure `|ray, trial| verdict` as a rule that may ask for slopes. Its guarantee is: none known.
///
/// ```
/// use surefoot::{Ray, Side, StepSearch, Trial, Verdict, acceptance::rule, finder::Bisection};
/// // Steps whose slope has fallen to a tenth in magnitude, whatever the value.
/// let flat = rule(|ray: &Ray<f64>, trial: &Trial<f64>| match trial.slope {
///     None => Verdict::NeedsSlope,
///     Some(s) if s.abs() <= 0.1 * ray.slope.abs() => Verdict::Accept,
///     Some(s) => Verdict::Refuse(if s < 0.0 { Side::TooShort } else { Side::TooLong }),
/// });
/// let mut search = StepSearch::new(Bisection::new(), flat);
/// let found = search.along(Ray::new(0.0, -1.0), 0.1, |a: f64| (0.5 * a * a - a, a - 1.0))?;
/// assert!((found.outcome.accepted().unwrap().step - 1.0).abs() <= 0.1);
/// # Ok::<(), surefoot::SearchError<std::convert::Infallible>>(())
/// ```
pub fn rule<T, F: Fn(&Ray<T>, &Trial<T>) -> Verdict>(judge: F) -> ByClosure<F> {
    ByClosure {
        judge,
        uses_slope: true,
    }
}

/// As [`rule`], for a closure that never says [`Verdict::NeedsSlope`].
pub fn value_rule<T, F: Fn(&Ray<T>, &Trial<T>) -> Verdict>(judge: F) -> ByClosure<F> {
    ByClosure {
        judge,
        uses_slope: false,
    }
}

impl<T, F: Fn(&Ray<T>, &Trial<T>) -> Verdict> Acceptance<T> for ByClosure<F> {
    fn judge(&self, ray: &Ray<T>, trial: &Trial<T>) -> Verdict {
        (self.judge)(ray, trial)
    }
    fn uses_slope(&self) -> bool {
        self.uses_slope
    }
}

/// Two rules at once: a step must pass both. Made by [`both`].
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Both<A, B>(A, B);

/// A rule that accepts what both rules accept; where they disagree on the side, *too long* wins.
///
/// Its guarantee is: none known. The two may exclude each other, and then the search ends with
/// [`Ending::Narrow`](crate::Ending::Narrow) or its budget.
pub fn both<A, B>(first: A, second: B) -> Both<A, B> {
    Both(first, second)
}

impl<T: Real, A: Acceptance<T>, B: Acceptance<T>> Acceptance<T> for Both<A, B> {
    fn judge(&self, ray: &Ray<T>, trial: &Trial<T>) -> Verdict {
        use Verdict::{Accept, NeedsSlope, Refuse};
        let too_long = Refuse(Side::TooLong);
        match (self.0.judge(ray, trial), self.1.judge(ray, trial)) {
            (a, b) if a == too_long || b == too_long => too_long,
            // A slope could still turn "too short" into "too long": ask for it before saying so.
            (NeedsSlope, _) | (_, NeedsSlope) => NeedsSlope,
            (Accept, other) => other,
            (other, _) => other,
        }
    }
    fn uses_slope(&self) -> bool {
        self.0.uses_slope() || self.1.uses_slope()
    }
    fn uses_start_slope(&self) -> bool {
        self.0.uses_start_slope() || self.1.uses_start_slope()
    }
    fn reads_slack(&self) -> bool {
        self.0.reads_slack() || self.1.reads_slack()
    }
    /// The larger of the two parameters: it decides where both ask for sufficient decrease.
    fn decrease(&self) -> Option<T> {
        match (self.0.decrease(), self.1.decrease()) {
            (Some(a), Some(b)) => Some(a.max(b)),
            (a, b) => a.or(b),
        }
    }
    fn ceiling(&self, ray: &Ray<T>, step: T) -> Option<T> {
        match (self.0.ceiling(ray, step), self.1.ceiling(ray, step)) {
            (Some(a), Some(b)) => Some(a.min(b)),
            (a, b) => a.or(b),
        }
    }
    fn explain(&self, ray: &Ray<T>, trial: &Trial<T>, each: &mut dyn FnMut(Condition<T>)) {
        self.0.explain(ray, trial, each);
        self.1.explain(ray, trial, each);
    }
}
