//! The Goldstein rule.

use super::{Acceptance, sufficient_decrease};
use crate::{Condition, Ray, Real, Side, Trial, Verdict};

/// Goldstein: `phi(0) + (1 - c) a phi'(0) <= phi(a) <= phi(0) + c a phi'(0)`.
///
/// Two lines through the start; an acceptable step has its value between them. It reads no slope but the one at the
/// start, and can exclude every minimizer along the ray when the function is far from a quadratic.
///
/// On a quadratic with minimizer `a*` it accepts exactly `2 c a* <= a <= 2 (1 - c) a*`.
///
/// Source: A. A. Goldstein, "On steepest descent", SIAM J. Control 3 (1965) 147-151, doi:10.1137/0303013; in the form
/// of Nocedal & Wright, Numerical Optimization, 2nd ed. 2006, eq. 3.11.
///
/// ```
/// use surefoot::{Acceptance, Ray, Trial, Verdict, Side};
/// use surefoot::acceptance::Goldstein;
/// let rule = Goldstein::new(0.25)?;
/// let ray = Ray::new(0.0, -1.0);
/// let trial = |step: f64| Trial { step, value: 0.5 * step * step - step, slope: None }; // a* = 1
/// assert_eq!(rule.judge(&ray, &trial(0.4)), Verdict::Refuse(Side::TooShort));
/// assert_eq!(rule.judge(&ray, &trial(1.0)), Verdict::Accept);
/// assert_eq!(rule.judge(&ray, &trial(1.6)), Verdict::Refuse(Side::TooLong));
/// # Ok::<(), surefoot::acceptance::GoldsteinError>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Goldstein<T> {
    share: T,
}

/// Why [`Goldstein::new`] refuses its parameter.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum GoldsteinError {
    /// `!(0 < c < 1/2)`.
    #[error("the Goldstein parameter must lie strictly between 0 and 1/2: 0.25 is usual")]
    Share,
}

impl<T: Real> Goldstein<T> {
    /// With the share `c` of the slope for the upper line and `1 - c` for the lower one, `0 < c < 1/2`.
    ///
    /// # Errors
    /// [`GoldsteinError`] outside of that range, and for NaN.
    pub fn new(c: T) -> Result<Self, GoldsteinError> {
        if !(c > T::zero() && c < T::of(0.5)) {
            return Err(GoldsteinError::Share);
        }
        Ok(Goldstein { share: c })
    }

    /// The second condition: the value lies on or above the steeper line.
    fn not_too_short(&self, ray: &Ray<T>, trial: &Trial<T>) -> Condition<T> {
        // A noise allowance on this side would accept steps that the exact rule refuses for nothing in return: the
        // steeper line is measured from the same reference, without it.
        let limit = ray.reference + (T::one() - self.share) * trial.step * ray.slope;
        Condition::at_least("not too short", trial.value, limit)
    }
}

impl<T: Real> Default for Goldstein<T> {
    /// `c = 0.25` (common practice).
    fn default() -> Self {
        Goldstein { share: T::of(0.25) }
    }
}

impl<T: Real> Acceptance<T> for Goldstein<T> {
    fn judge(&self, ray: &Ray<T>, trial: &Trial<T>) -> Verdict {
        if !sufficient_decrease(ray, self.share, trial).holds {
            Verdict::Refuse(Side::TooLong)
        } else if !self.not_too_short(ray, trial).holds {
            Verdict::Refuse(Side::TooShort)
        } else {
            Verdict::Accept
        }
    }
    fn uses_slope(&self) -> bool {
        false
    }
    fn decrease(&self) -> Option<T> {
        Some(self.share)
    }
    fn ceiling(&self, ray: &Ray<T>, step: T) -> Option<T> {
        Some(ray.decrease_limit(self.share, step))
    }
    fn explain(&self, ray: &Ray<T>, trial: &Trial<T>, each: &mut dyn FnMut(Condition<T>)) {
        each(sufficient_decrease(ray, self.share, trial));
        each(self.not_too_short(ray, trial));
    }
}
