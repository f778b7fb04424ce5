//! Rules that read no slope at all, not even the one at the start.

use super::Acceptance;
use crate::{Condition, Ray, Real, Side, Trial, Verdict};

/// Forcing-function decrease, for derivative-free methods: `phi(a) <= reference - forcing a^2`.
///
/// With `forcing = 0` it asks for any decrease, and then strictly: `phi(a) < reference` ([`AnyDecrease`] by name).
/// Use it with [`Ray::without_slope`] where there is no slope at the start either.
///
/// Source: T. G. Kolda, R. M. Lewis & V. Torczon, "Optimization by direct search", SIAM Review 45 (2003) 385-482,
/// doi:10.1137/S003614450242889, section 3.7 (sufficient decrease with a forcing function).
///
/// ```
/// use surefoot::{Ray, StepSearch, acceptance::ForcingDecrease, finder::Backtracking};
/// let mut search = StepSearch::new(Backtracking::default(), ForcingDecrease::new(0.1)?);
/// let found = search.along(Ray::without_slope(1.0), 8.0, |a: f64| (1.0 - a).abs())?; // no slopes anywhere
/// assert_eq!(found.outcome.accepted().unwrap().step, 1.0);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ForcingDecrease<T> {
    forcing: T,
}

/// Why [`ForcingDecrease::new`] refuses its parameter.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum ForcingDecreaseError {
    /// `!(0 < forcing < infinity)`.
    #[error(
        "the forcing factor must be positive and finite: for any decrease at all use AnyDecrease"
    )]
    Forcing,
}

impl<T: Real> ForcingDecrease<T> {
    /// With the factor of the square of the step, in units of the objective over the step squared, positive and finite.
    ///
    /// # Errors
    /// [`ForcingDecreaseError`] outside of that range, and for NaN.
    pub fn new(forcing: T) -> Result<Self, ForcingDecreaseError> {
        if !(forcing > T::zero() && forcing.is_finite()) {
            return Err(ForcingDecreaseError::Forcing);
        }
        Ok(ForcingDecrease { forcing })
    }

    fn limit(&self, ray: &Ray<T>, step: T) -> T {
        ray.reference - self.forcing * step * step + T::of(2.0) * ray.value_noise
    }

    fn condition(&self, ray: &Ray<T>, trial: &Trial<T>) -> Condition<T> {
        Condition::at_most("forced decrease", trial.value, self.limit(ray, trial.step))
    }
}

impl<T: Real> Acceptance<T> for ForcingDecrease<T> {
    fn judge(&self, ray: &Ray<T>, trial: &Trial<T>) -> Verdict {
        if self.condition(ray, trial).holds {
            Verdict::Accept
        } else {
            Verdict::Refuse(Side::TooLong)
        }
    }
    fn uses_slope(&self) -> bool {
        false
    }
    fn uses_start_slope(&self) -> bool {
        false
    }
    fn ceiling(&self, ray: &Ray<T>, step: T) -> Option<T> {
        Some(self.limit(ray, step))
    }
    fn explain(&self, ray: &Ray<T>, trial: &Trial<T>, each: &mut dyn FnMut(Condition<T>)) {
        each(self.condition(ray, trial));
    }
}

/// Any decrease: `phi(a) < reference`. It proves nothing about convergence: the decreases may shrink to nothing.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct AnyDecrease;

impl<T: Real> Acceptance<T> for AnyDecrease {
    fn judge(&self, ray: &Ray<T>, trial: &Trial<T>) -> Verdict {
        if trial.value < ray.reference + T::of(2.0) * ray.value_noise {
            Verdict::Accept
        } else {
            Verdict::Refuse(Side::TooLong)
        }
    }
    fn uses_slope(&self) -> bool {
        false
    }
    fn uses_start_slope(&self) -> bool {
        false
    }
    fn ceiling(&self, ray: &Ray<T>, _: T) -> Option<T> {
        Some(ray.reference + T::of(2.0) * ray.value_noise)
    }
    fn explain(&self, ray: &Ray<T>, trial: &Trial<T>, each: &mut dyn FnMut(Condition<T>)) {
        let limit = ray.reference + T::of(2.0) * ray.value_noise;
        let holds = trial.value < limit;
        each(Condition {
            holds,
            ..Condition::at_most("any decrease", trial.value, limit)
        });
    }
}

/// Takes the first trial with a finite value: for fixed and diminishing steps, whose convergence does not rest on decrease.
///
/// Use it with [`FirstTrial::Fixed`](crate::FirstTrial::Fixed) or
/// [`FirstTrial::Diminishing`](crate::FirstTrial::Diminishing).
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct AnyFinite;

impl<T: Real> Acceptance<T> for AnyFinite {
    fn judge(&self, _: &Ray<T>, _: &Trial<T>) -> Verdict {
        Verdict::Accept // a rule is only shown finite values
    }
    fn uses_slope(&self) -> bool {
        false
    }
    fn uses_start_slope(&self) -> bool {
        false
    }
}
