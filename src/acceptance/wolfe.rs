//! The Wolfe rules, weak and strong.

use super::{Acceptance, slope_has_risen, slope_not_too_positive, sufficient_decrease};
use crate::{Condition, Ray, Real, Side, Trial, Verdict};

/// Weak Wolfe: sufficient decrease `phi(a) <= phi(0) + c1 a phi'(0)` and curvature `phi'(a) >= c2 phi'(0)`.
///
/// The second condition asks the slope to rise to a set share of what it was, so that the direction is not wasted.
/// `c2` near 0 is strict (only steps near a minimizer, or beyond one, pass); near 1 only very short steps are refused.
/// Under it, the curvature `s'y` that quasi-Newton updates need is positive.
///
/// On a quadratic with minimizer `a*` along the ray it accepts exactly `(1 - c2) a* <= a <= 2 (1 - c1) a*`.
///
/// Source: P. Wolfe, "Convergence conditions for ascent methods", SIAM Review 11 (1969) 226-235, doi:10.1137/1011036.
///
/// ```
/// use surefoot::{Acceptance, Ray, Trial, Verdict, Side};
/// use surefoot::acceptance::WeakWolfe;
/// let rule = WeakWolfe::new(1e-4, 0.9)?;
/// let ray = Ray::new(0.0, -1.0);
/// let trial = |step: f64, slope| Trial { step, value: 0.5 * step * step - step, slope };
/// assert_eq!(rule.judge(&ray, &trial(2.5, None)), Verdict::Refuse(Side::TooLong)); // settled without a slope
/// assert_eq!(rule.judge(&ray, &trial(0.05, None)), Verdict::NeedsSlope);
/// assert_eq!(rule.judge(&ray, &trial(0.05, Some(-0.95))), Verdict::Refuse(Side::TooShort));
/// assert_eq!(rule.judge(&ray, &trial(1.0, Some(0.0))), Verdict::Accept);
/// # Ok::<(), surefoot::acceptance::WolfeError>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WeakWolfe<T>(Wolfe<T>);

/// Strong Wolfe: sufficient decrease `phi(a) <= phi(0) + c1 a phi'(0)` and `|phi'(a)| <= c2 |phi'(0)|`.
///
/// As [`WeakWolfe`], and a slope that is too positive is refused as too long: accepted steps lie near a stationary
/// point along the ray. The usual rule for nonlinear conjugate gradients, with a small `c2`.
///
/// On a quadratic with minimizer `a*` it accepts exactly `(1 - c2) a* <= a <= min(1 + c2, 2 (1 - c1)) a*`.
///
/// Source: J. Nocedal & S. J. Wright, Numerical Optimization, 2nd ed. 2006, eq. 3.7.
///
/// ```
/// use surefoot::acceptance::{StrongWolfe, WolfeError};
/// assert!(StrongWolfe::new(0.1, 0.1).is_ok()); // equality is allowed: published runs use it
/// assert_eq!(StrongWolfe::new(0.5, 0.1), Err(WolfeError::DecreaseAboveCurvature));
/// assert_eq!(StrongWolfe::new(f64::NAN, 0.1), Err(WolfeError::Decrease));
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct StrongWolfe<T>(Wolfe<T>);

/// Why a Wolfe rule refuses its parameters.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum WolfeError {
    /// `!(decrease > 0)`.
    #[error("the decrease parameter must be above 0: 1e-4 is usual")]
    Decrease,
    /// `!(decrease < 1/2)`, for the approximate rule.
    #[error("the decrease parameter of the approximate Wolfe rule must be below 1/2: 0.1 is usual")]
    DecreaseNotBelowHalf,
    /// `!(curvature < 1)`.
    #[error(
        "the curvature parameter must be below 1: 0.9 is usual with quasi-Newton directions, 0.1 with conjugate gradients"
    )]
    Curvature,
    /// `!(decrease <= curvature)`.
    #[error(
        "the decrease parameter must not exceed the curvature parameter, or no step may satisfy both conditions"
    )]
    DecreaseAboveCurvature,
}

/// The two parameters, checked.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Wolfe<T> {
    decrease: T,
    curvature: T,
}

impl<T: Real> Wolfe<T> {
    fn new(decrease: T, curvature: T) -> Result<Self, WolfeError> {
        if !(decrease > T::zero()) {
            Err(WolfeError::Decrease)
        } else if !(curvature < T::one()) {
            Err(WolfeError::Curvature)
        } else if !(decrease <= curvature) {
            Err(WolfeError::DecreaseAboveCurvature)
        } else {
            Ok(Wolfe {
                decrease,
                curvature,
            })
        }
    }

    fn usual() -> Self {
        Wolfe {
            decrease: T::of(1e-4),
            curvature: T::of(0.9),
        }
    }
}

impl<T: Real> WeakWolfe<T> {
    /// With `c1 = decrease` and `c2 = curvature`, `0 < decrease <= curvature < 1`.
    ///
    /// # Errors
    /// [`WolfeError`] outside of that range, and for NaN.
    pub fn new(decrease: T, curvature: T) -> Result<Self, WolfeError> {
        Wolfe::new(decrease, curvature).map(WeakWolfe)
    }
}

impl<T: Real> StrongWolfe<T> {
    /// With `c1 = decrease` and `c2 = curvature`, `0 < decrease <= curvature < 1`.
    ///
    /// # Errors
    /// [`WolfeError`] outside of that range, and for NaN.
    pub fn new(decrease: T, curvature: T) -> Result<Self, WolfeError> {
        Wolfe::new(decrease, curvature).map(StrongWolfe)
    }
}

impl<T: Real> Default for WeakWolfe<T> {
    /// `decrease = 1e-4`, `curvature = 0.9` (Nocedal & Wright 2006, section 3.1, for quasi-Newton directions).
    fn default() -> Self {
        WeakWolfe(Wolfe::usual())
    }
}

impl<T: Real> Default for StrongWolfe<T> {
    /// `decrease = 1e-4`, `curvature = 0.9` (Nocedal & Wright 2006, section 3.1, for quasi-Newton directions).
    fn default() -> Self {
        StrongWolfe(Wolfe::usual())
    }
}

impl<T: Real> Acceptance<T> for WeakWolfe<T> {
    fn judge(&self, ray: &Ray<T>, trial: &Trial<T>) -> Verdict {
        if !sufficient_decrease(ray, self.0.decrease, trial).holds {
            return Verdict::Refuse(Side::TooLong);
        }
        match trial.slope {
            None => Verdict::NeedsSlope,
            Some(slope) if slope_has_risen(ray, self.0.curvature, slope).holds => Verdict::Accept,
            Some(_) => Verdict::Refuse(Side::TooShort),
        }
    }
    fn uses_slope(&self) -> bool {
        true
    }
    fn decrease(&self) -> Option<T> {
        Some(self.0.decrease)
    }
    fn ceiling(&self, ray: &Ray<T>, step: T) -> Option<T> {
        Some(ray.decrease_limit(self.0.decrease, step))
    }
    fn explain(&self, ray: &Ray<T>, trial: &Trial<T>, each: &mut dyn FnMut(Condition<T>)) {
        each(sufficient_decrease(ray, self.0.decrease, trial));
        if let Some(slope) = trial.slope {
            each(slope_has_risen(ray, self.0.curvature, slope));
        }
    }
}

impl<T: Real> Acceptance<T> for StrongWolfe<T> {
    fn judge(&self, ray: &Ray<T>, trial: &Trial<T>) -> Verdict {
        if !sufficient_decrease(ray, self.0.decrease, trial).holds {
            return Verdict::Refuse(Side::TooLong);
        }
        match trial.slope {
            None => Verdict::NeedsSlope,
            Some(slope) if !slope_has_risen(ray, self.0.curvature, slope).holds => {
                Verdict::Refuse(Side::TooShort)
            }
            Some(slope) if slope_not_too_positive(ray, self.0.curvature, slope).holds => {
                Verdict::Accept
            }
            Some(_) => Verdict::Refuse(Side::TooLong),
        }
    }
    fn uses_slope(&self) -> bool {
        true
    }
    fn decrease(&self) -> Option<T> {
        Some(self.0.decrease)
    }
    fn ceiling(&self, ray: &Ray<T>, step: T) -> Option<T> {
        Some(ray.decrease_limit(self.0.decrease, step))
    }
    fn explain(&self, ray: &Ray<T>, trial: &Trial<T>, each: &mut dyn FnMut(Condition<T>)) {
        each(sufficient_decrease(ray, self.0.decrease, trial));
        if let Some(slope) = trial.slope {
            each(slope_has_risen(ray, self.0.curvature, slope));
            each(slope_not_too_positive(ray, self.0.curvature, slope));
        }
    }
}
