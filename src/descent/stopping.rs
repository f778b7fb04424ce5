//! When a run stops.

use crate::Real;

/// The tests that stop a run. All of them are looked at after each move; the first that holds ends the run.
///
/// A test of 0 is off, except that `gradient` always applies. Everything is in double precision and is rounded to the
/// run's own.
///
/// ```
/// use surefoot::Stopping;
/// let stopping = Stopping { gradient: Some(1e-9), iterations: 200, ..Stopping::default() };
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Stopping {
    /// Converged when `max|g| <= gradient + gradient_by_value |f|`, in gradient units; at least 0. Default `None`: the
    /// cube root of the rounding unit, 6.1e-6 in double and 4.9e-3 in single precision.
    pub gradient: Option<f64>,
    /// The part of that limit that grows with `|f|`; at least 0. Default 0.
    pub gradient_by_value: f64,
    /// Converged when a move changed the value by at most this share of it, `|f_old - f| <= value_change max(|f_old|,
    /// |f|)`; at least 0. Default 0: off.
    pub value_change: f64,
    /// Converged when a move is at most this share of the point, `a max|d| <= step_change max|x|`; at least 0. Default 0:
    /// off.
    pub step_change: f64,
    /// Converged when `f <= target`. Default `None`: off.
    pub target: Option<f64>,
    /// Ends after so many moves. Default 10,000.
    pub iterations: u64,
    /// Ends before more than so many calls of the objective (values, gradients or both at once). Default: no limit.
    pub evaluations: u64,
}

impl Default for Stopping {
    fn default() -> Self {
        Stopping {
            gradient: None,
            gradient_by_value: 0.0,
            value_change: 0.0,
            step_change: 0.0,
            target: None,
            iterations: 10_000,
            evaluations: u64::MAX,
        }
    }
}

/// A setting of [`Descent`](super::Descent) that it refuses.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum SettingError {
    /// `gradient` or `gradient_by_value` is negative, infinite or NaN.
    #[error("the gradient tolerances must be finite and not negative")]
    Gradient,
    /// `value_change` is negative, infinite or NaN.
    #[error(
        "the tolerance on the change of the value must be finite and not negative: 0 switches it off"
    )]
    ValueChange,
    /// `step_change` is negative, infinite or NaN.
    #[error(
        "the tolerance on the length of a move must be finite and not negative: 0 switches it off"
    )]
    StepChange,
    /// `target` is NaN.
    #[error("the target value is not a number: use None for no target")]
    Target,
    /// A fixed or diminishing first trial is not positive and finite.
    #[error("a fixed or diminishing first trial must be positive and finite")]
    FirstTrial,
    /// The cap on the length of a move is not positive and finite.
    #[error("the cap on the length of a move must be positive and finite")]
    LongestMove,
    /// The noise of the values is negative, infinite or NaN.
    #[error("the noise of the values must be finite and not negative")]
    ValueNoise,
}

/// A test that held.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Criterion {
    /// The largest component of the gradient is small.
    Gradient,
    /// The last move hardly changed the value.
    ValueChange,
    /// The last move was short.
    StepChange,
    /// The target value is reached.
    Target,
}

impl Stopping {
    pub(super) fn check(&self) -> Result<(), SettingError> {
        let tolerance = |t: f64| t >= 0.0 && t.is_finite();
        if !(tolerance(self.gradient.unwrap_or(0.0)) && tolerance(self.gradient_by_value)) {
            Err(SettingError::Gradient)
        } else if !tolerance(self.value_change) {
            Err(SettingError::ValueChange)
        } else if !tolerance(self.step_change) {
            Err(SettingError::StepChange)
        } else if self.target.is_some_and(f64::is_nan) {
            Err(SettingError::Target)
        } else {
            Ok(())
        }
    }

    /// The tests that need no move.
    pub(super) fn at_point<T: Real>(&self, value: T, gradient_max: T) -> Option<Criterion> {
        let gradient = self.gradient.map_or(T::CUBE_ROOT_OF_EPSILON, T::of);
        if gradient_max <= gradient + T::of(self.gradient_by_value) * value.abs() {
            Some(Criterion::Gradient)
        } else if self.target.is_some_and(|t| value <= T::of(t)) {
            Some(Criterion::Target)
        } else {
            None
        }
    }

    /// Whether [`after_move`](Stopping::after_move) will ask how long a move was.
    pub(super) fn looks_at_lengths(&self) -> bool {
        self.step_change > 0.0
    }

    /// The tests on a move; `lengths` gives `a max|d|` and `max|x|` where they are needed.
    pub(super) fn after_move<T: Real>(
        &self,
        old_value: T,
        value: T,
        lengths: impl FnOnce() -> (T, T),
    ) -> Option<Criterion> {
        let size = old_value.abs().max(value.abs());
        if self.value_change > 0.0 && (old_value - value).abs() <= T::of(self.value_change) * size {
            return Some(Criterion::ValueChange);
        }
        if self.step_change > 0.0 {
            let (moved, point) = lengths();
            if moved <= T::of(self.step_change) * point {
                return Some(Criterion::StepChange);
            }
        }
        None
    }
}
