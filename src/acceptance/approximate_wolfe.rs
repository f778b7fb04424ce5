//! The approximate Wolfe rule, for where the decrease drowns in rounding.

use super::{Acceptance, WolfeError, slope_has_risen, sufficient_decrease};
use crate::{Condition, Ray, Real, Side, Trial, Verdict};

/// Hager and Zhang's pair of rules: weak Wolfe, and near rounding the approximate Wolfe conditions
/// `(2 c1 - 1) phi'(0) >= phi'(a) >= c2 phi'(0)` with `phi(a) <= reference + slack`.
///
/// Near a minimizer the decrease is of the order of the square of the distance and drowns in the rounding of the values,
/// long before the slopes do. The approximate conditions replace the first Wolfe condition by one on slopes, exact on a
/// quadratic. Which of the two is in force is not the rule's to remember: it is the approximate one where the ray has a
/// [`slack`](Ray::slack). A [`Run`](crate::Run) gives the ray one once the value hardly changes; with a search of your own,
/// use [`Ray::with_slack`].
///
/// With a slack, a trial that satisfies the weak Wolfe conditions is accepted as well, as in the paper.
///
/// Source: W. W. Hager & H. Zhang, "A new conjugate gradient method with guaranteed descent and an efficient line
/// search", SIAM J. Optim. 16 (2005) 170-192, doi:10.1137/030601880, section 4, conditions T1 and T2, eq. 4.1 and 4.3.
///
/// ```
/// use surefoot::{Acceptance, Ray, Trial, Verdict, Side, acceptance::ApproximateWolfe};
/// let rule = ApproximateWolfe::new(0.1, 0.9)?;
/// let ray = Ray::new(1.0, -1e-9);
/// // A value that rounding left 1e-16 too high, at a step where the slope has almost vanished:
/// let trial = Trial { step: 1e-9, value: 1.0 + 2.3e-16, slope: Some(-1e-11) };
/// assert_eq!(rule.judge(&ray, &trial), Verdict::Refuse(Side::TooLong));
/// assert_eq!(rule.judge(&ray.with_slack(1e-12), &trial), Verdict::Accept);
/// # Ok::<(), surefoot::acceptance::WolfeError>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ApproximateWolfe<T> {
    decrease: T,
    curvature: T,
}

impl<T: Real> ApproximateWolfe<T> {
    /// With `c1 = decrease` and `c2 = curvature`, `0 < decrease < 1/2` and `decrease <= curvature < 1`.
    ///
    /// # Errors
    /// [`WolfeError`] outside of those ranges, and for NaN.
    pub fn new(decrease: T, curvature: T) -> Result<Self, WolfeError> {
        if !(decrease > T::zero()) {
            Err(WolfeError::Decrease)
        } else if !(decrease < T::of(0.5)) {
            Err(WolfeError::DecreaseNotBelowHalf)
        } else if !(curvature < T::one()) {
            Err(WolfeError::Curvature)
        } else if !(decrease <= curvature) {
            Err(WolfeError::DecreaseAboveCurvature)
        } else {
            Ok(ApproximateWolfe {
                decrease,
                curvature,
            })
        }
    }

    /// The first Wolfe condition, in slopes: eq. 4.1.
    fn decrease_by_slope(&self, ray: &Ray<T>, slope: T) -> Condition<T> {
        let share = T::of(2.0) * self.decrease - T::one();
        Condition::at_most("decrease by slope", slope, share * ray.slope)
    }

    /// The value did not rise by more than the slack: eq. 4.3.
    fn within_slack(&self, ray: &Ray<T>, slack: T, trial: &Trial<T>) -> Condition<T> {
        let limit = ray.reference + slack + T::of(2.0) * ray.value_noise;
        Condition::at_most("within slack", trial.value, limit)
    }
}

impl<T: Real> Default for ApproximateWolfe<T> {
    /// `decrease = 0.1`, `curvature = 0.9` (Hager & Zhang 2005, section 4).
    fn default() -> Self {
        ApproximateWolfe {
            decrease: T::of(0.1),
            curvature: T::of(0.9),
        }
    }
}

impl<T: Real> Acceptance<T> for ApproximateWolfe<T> {
    fn judge(&self, ray: &Ray<T>, trial: &Trial<T>) -> Verdict {
        let decreased = sufficient_decrease(ray, self.decrease, trial).holds;
        let low_enough = match ray.slack {
            None => decreased,
            Some(slack) => decreased || self.within_slack(ray, slack, trial).holds,
        };
        if !low_enough {
            return Verdict::Refuse(Side::TooLong);
        }
        match trial.slope {
            None => Verdict::NeedsSlope,
            Some(slope) if !slope_has_risen(ray, self.curvature, slope).holds => {
                Verdict::Refuse(Side::TooShort)
            }
            Some(slope) if decreased || self.decrease_by_slope(ray, slope).holds => Verdict::Accept,
            Some(_) => Verdict::Refuse(Side::TooLong),
        }
    }
    fn uses_slope(&self) -> bool {
        true
    }
    fn reads_slack(&self) -> bool {
        true
    }
    fn decrease(&self) -> Option<T> {
        Some(self.decrease)
    }
    fn ceiling(&self, ray: &Ray<T>, step: T) -> Option<T> {
        let limit = ray.decrease_limit(self.decrease, step);
        let slack = ray.slack.unwrap_or_else(T::zero);
        let relaxed = ray.reference + slack + T::of(2.0) * ray.value_noise;
        Some(if ray.slack.is_some() {
            limit.max(relaxed)
        } else {
            limit
        })
    }
    fn explain(&self, ray: &Ray<T>, trial: &Trial<T>, each: &mut dyn FnMut(Condition<T>)) {
        each(sufficient_decrease(ray, self.decrease, trial));
        if let Some(slack) = ray.slack {
            each(self.within_slack(ray, slack, trial));
        }
        if let Some(slope) = trial.slope {
            each(slope_has_risen(ray, self.curvature, slope));
            if ray.slack.is_some() {
                each(self.decrease_by_slope(ray, slope));
            }
        }
    }
}
