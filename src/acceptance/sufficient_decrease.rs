//! The Armijo condition on its own.

use super::{Acceptance, sufficient_decrease};
use crate::{Condition, Ray, Real, Side, Trial, Verdict};

/// Sufficient decrease (Armijo): `phi(a) <= phi(0) + c1 a phi'(0)`.
///
/// It refuses steps as too long only, so short steps always pass: use it with a finder that begins long and
/// backtracks. It reads no slope but the one at the start.
///
/// On a quadratic with minimizer `a*` along the ray it accepts exactly `a <= 2 (1 - c1) a*`.
///
/// Source: L. Armijo, "Minimization of functions having Lipschitz continuous first partial derivatives", Pacific
/// J. Math. 16 (1966) 1-3, doi:10.2140/pjm.1966.16.1.
///
/// ```
/// use surefoot::{Acceptance, Ray, Trial, Verdict, Side};
/// use surefoot::acceptance::SufficientDecrease;
/// let rule = SufficientDecrease::new(0.1)?;
/// let ray = Ray::new(1.0, -1.0);
/// let trial = |step, value| Trial { step, value, slope: None };
/// assert_eq!(rule.judge(&ray, &trial(1.0, 0.9)), Verdict::Accept);
/// assert_eq!(rule.judge(&ray, &trial(1.0, 0.91)), Verdict::Refuse(Side::TooLong));
/// # Ok::<(), surefoot::acceptance::SufficientDecreaseError>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SufficientDecrease<T> {
    decrease: T,
}

/// Why [`SufficientDecrease::new`] refuses its parameter.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum SufficientDecreaseError {
    /// `!(0 < decrease < 1)`.
    #[error("the decrease parameter must lie strictly between 0 and 1: 1e-4 is usual")]
    Decrease,
}

impl<T: Real> SufficientDecrease<T> {
    /// With the share `c1 = decrease` of the decrease that the slope promises, `0 < decrease < 1`.
    ///
    /// # Errors
    /// [`SufficientDecreaseError`] outside of that range, and for NaN.
    pub fn new(decrease: T) -> Result<Self, SufficientDecreaseError> {
        if !(decrease > T::zero() && decrease < T::one()) {
            return Err(SufficientDecreaseError::Decrease);
        }
        Ok(SufficientDecrease { decrease })
    }
}

impl<T: Real> Default for SufficientDecrease<T> {
    /// `decrease = 1e-4` (Nocedal & Wright, Numerical Optimization, 2nd ed. 2006, section 3.1).
    fn default() -> Self {
        SufficientDecrease {
            decrease: T::of(1e-4),
        }
    }
}

impl<T: Real> Acceptance<T> for SufficientDecrease<T> {
    fn judge(&self, ray: &Ray<T>, trial: &Trial<T>) -> Verdict {
        if sufficient_decrease(ray, self.decrease, trial).holds {
            Verdict::Accept
        } else {
            Verdict::Refuse(Side::TooLong)
        }
    }
    fn uses_slope(&self) -> bool {
        false
    }
    fn decrease(&self) -> Option<T> {
        Some(self.decrease)
    }
    fn ceiling(&self, ray: &Ray<T>, step: T) -> Option<T> {
        Some(ray.decrease_limit(self.decrease, step))
    }
    fn explain(&self, ray: &Ray<T>, trial: &Trial<T>, each: &mut dyn FnMut(Condition<T>)) {
        each(sufficient_decrease(ray, self.decrease, trial));
    }
}
