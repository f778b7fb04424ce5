//! What a search may not exceed: bounds on the step and the trial budget.

use crate::Real;

/// Bounds on the step and the number of trials of one search.
///
/// ```
/// use surefoot::{Limits, LimitsError};
/// let limits = Limits::new(1e-12, 50.0, 20)?;
/// assert_eq!(limits.upper(), 50.0);
/// assert_eq!(Limits::new(2.0, 1.0, 20), Err(LimitsError::NoStepLeft)); // they exclude every step
/// # Ok::<(), LimitsError>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Limits<T = f64> {
    lower: T,
    upper: T,
    trials: u32,
}

/// Why [`Limits`] cannot be set.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum LimitsError {
    /// `!(0 <= lower < infinity)`.
    #[error("the lower bound on the step must be finite and not negative: use 0 for none")]
    Lower,
    /// `!(upper > 0)`.
    #[error("the upper bound on the step must be above 0: use infinity for none")]
    Upper,
    /// `!(lower <= upper)`.
    #[error("the bounds exclude every step: the lower bound must not exceed the upper one")]
    NoStepLeft,
    /// `trials == 0`.
    #[error("the budget must allow at least one trial")]
    Trials,
}

impl<T: Real> Limits<T> {
    /// Steps in `[lower, upper]`, at most `trials` of them: `0 <= lower <= upper`, `lower` finite, `upper > 0`,
    /// `trials >= 1`.
    ///
    /// # Errors
    /// [`LimitsError`] otherwise, and for NaN.
    pub fn new(lower: T, upper: T, trials: u32) -> Result<Self, LimitsError> {
        if !(lower >= T::zero() && lower.is_finite()) {
            Err(LimitsError::Lower)
        } else if !(upper > T::zero()) {
            Err(LimitsError::Upper)
        } else if !(lower <= upper) {
            Err(LimitsError::NoStepLeft)
        } else if trials == 0 {
            Err(LimitsError::Trials)
        } else {
            Ok(Limits {
                lower,
                upper,
                trials,
            })
        }
    }

    /// The smallest step. Default 0, which itself is never tried.
    pub fn lower(&self) -> T {
        self.lower
    }

    /// The largest step. Default infinity, which itself is never tried.
    pub fn upper(&self) -> T {
        self.upper
    }

    /// The largest number of trials. Default 100: twice what halving a bracket down to neighbouring doubles takes.
    pub fn trials(&self) -> u32 {
        self.trials
    }

    /// The same limits in another precision. Bounds that it cannot hold become the nearest that leave a step.
    pub(crate) fn cast<U: Real>(&self) -> Limits<U> {
        Limits {
            lower: U::of(self.lower.to_double()).min(U::max_value()),
            upper: U::of(self.upper.to_double()).max(U::min_positive_value()),
            trials: self.trials,
        }
    }

    /// The same limits with an upper bound of at most `most`, never below the lower bound.
    pub(crate) fn at_most(self, most: T) -> Self {
        let upper = self.upper.min(most.max(T::min_positive_value()));
        Limits {
            upper: upper.max(self.lower),
            ..self
        }
    }

    /// The step of `[lower, upper]` nearest to `step`.
    pub(super) fn nearest(&self, step: T) -> T {
        if step < self.lower {
            self.lower
        } else if step > self.upper {
            self.upper
        } else {
            step
        }
    }
}

impl<T: Real> Default for Limits<T> {
    fn default() -> Self {
        Limits {
            lower: T::zero(),
            upper: T::infinity(),
            trials: 100,
        }
    }
}
