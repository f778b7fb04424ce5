//! Wolfe conditions with separate bounds on the slope to the left and to the right.

use super::{Acceptance, slope_has_risen, slope_not_too_positive, sufficient_decrease};
use crate::{Condition, Ray, Real, Side, Trial, Verdict};

/// Generalised Wolfe: sufficient decrease, and `left phi'(0) <= phi'(a) <= -right phi'(0)`.
///
/// `left` is the curvature parameter of the weak rule; `right` says how positive the slope may be, as a multiple of
/// `|phi'(0)|`. `right = left` is the strong Wolfe rule; `right` infinite is the weak one.
///
/// On a quadratic with minimizer `a*` it accepts exactly `(1 - left) a* <= a <= min(1 + right, 2 (1 - c1)) a*`.
///
/// Source: Y. H. Dai & Y. Yuan, "Convergence properties of the Fletcher–Reeves method", IMA J. Numer. Anal. 16 (1996)
/// 155-164, doi:10.1093/imanum/16.2.155 (recalled from memory).
///
/// ```
/// use surefoot::acceptance::{GeneralisedWolfe, GeneralisedWolfeError};
/// assert!(GeneralisedWolfe::new(1e-4, 0.1, 2.0).is_ok());
/// assert_eq!(GeneralisedWolfe::new(1e-4, 0.1, -1.0), Err(GeneralisedWolfeError::Right));
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct GeneralisedWolfe<T> {
    decrease: T,
    left: T,
    right: T,
}

/// Why [`GeneralisedWolfe::new`] refuses its parameters.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum GeneralisedWolfeError {
    /// `!(decrease > 0)`.
    #[error("the decrease parameter must be above 0: 1e-4 is usual")]
    Decrease,
    /// `!(decrease <= left < 1)`.
    #[error("the left curvature parameter must be at least the decrease parameter and below 1")]
    Left,
    /// `!(right >= 0)`.
    #[error("the right curvature parameter must not be negative: use infinity for no bound")]
    Right,
}

impl<T: Real> GeneralisedWolfe<T> {
    /// With `c1 = decrease`, `0 < decrease <= left < 1` and `right >= 0`, which may be infinite.
    ///
    /// # Errors
    /// [`GeneralisedWolfeError`] outside of those ranges, and for NaN.
    pub fn new(decrease: T, left: T, right: T) -> Result<Self, GeneralisedWolfeError> {
        if !(decrease > T::zero()) {
            Err(GeneralisedWolfeError::Decrease)
        } else if !(decrease <= left && left < T::one()) {
            Err(GeneralisedWolfeError::Left)
        } else if !(right >= T::zero()) {
            Err(GeneralisedWolfeError::Right)
        } else {
            Ok(GeneralisedWolfe {
                decrease,
                left,
                right,
            })
        }
    }
}

impl<T: Real> Acceptance<T> for GeneralisedWolfe<T> {
    fn judge(&self, ray: &Ray<T>, trial: &Trial<T>) -> Verdict {
        if !sufficient_decrease(ray, self.decrease, trial).holds {
            return Verdict::Refuse(Side::TooLong);
        }
        match trial.slope {
            None => Verdict::NeedsSlope,
            Some(slope) if !slope_has_risen(ray, self.left, slope).holds => {
                Verdict::Refuse(Side::TooShort)
            }
            Some(slope) if slope_not_too_positive(ray, self.right, slope).holds => Verdict::Accept,
            Some(_) => Verdict::Refuse(Side::TooLong),
        }
    }
    fn uses_slope(&self) -> bool {
        true
    }
    fn decrease(&self) -> Option<T> {
        Some(self.decrease)
    }
    fn ceiling(&self, ray: &Ray<T>, step: T) -> Option<T> {
        Some(ray.decrease_limit(self.decrease, step))
    }
    fn explain(&self, ray: &Ray<T>, trial: &Trial<T>, each: &mut dyn FnMut(Condition<T>)) {
        each(sufficient_decrease(ray, self.decrease, trial));
        if let Some(slope) = trial.slope {
            each(slope_has_risen(ray, self.left, slope));
            each(slope_not_too_positive(ray, self.right, slope));
        }
    }
}
