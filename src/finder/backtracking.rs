//! Backtracking by a fixed ratio.

use super::{Proposal, Sides, StepFinder};
use crate::{Ray, Real, Side, Trial};

/// Shortens a step that is too long by a fixed ratio.
///
/// The published method knows only "too long" and measures from 0; here it is completed for rules that also say "too
/// short": then the ratio is taken of the bracket, or the step divided by it while nothing was too long.
///
/// With sufficient decrease and a descent direction it ends after finitely many trials on every continuously
/// differentiable ray (Nocedal & Wright, Numerical Optimization, 2nd ed. 2006, algorithm 3.1 and section 3.1).
///
/// ```
/// use surefoot::finder::{Backtracking, BacktrackingError};
/// assert!(Backtracking::new(0.3).is_ok());
/// assert_eq!(Backtracking::new(1.0), Err(BacktrackingError::Ratio));
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Backtracking<T = f64> {
    ratio: T,
    sides: Sides<T>,
}

/// Why [`Backtracking::new`] refuses its parameter.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum BacktrackingError {
    /// `!(0 < ratio < 1)`.
    #[error("the backtracking ratio must lie strictly between 0 and 1: 0.5 is usual")]
    Ratio,
}

impl<T: Real> Backtracking<T> {
    /// With the factor `ratio` from a refused step to the next, `0 < ratio < 1`.
    ///
    /// # Errors
    /// [`BacktrackingError`] outside of that range, and for NaN.
    pub fn new(ratio: T) -> Result<Self, BacktrackingError> {
        if !(ratio > T::zero() && ratio < T::one()) {
            return Err(BacktrackingError::Ratio);
        }
        Ok(Backtracking {
            ratio,
            sides: Sides::new(),
        })
    }
}

impl<T: Real> Default for Backtracking<T> {
    /// `ratio = 0.5` (common practice).
    fn default() -> Self {
        Backtracking {
            ratio: T::of(0.5),
            sides: Sides::new(),
        }
    }
}

impl<T: Real> StepFinder<T> for Backtracking<T> {
    fn begin(&mut self, _: &Ray<T>, first: T) -> T {
        self.sides = Sides::new();
        first
    }

    fn next(&mut self, _: &Ray<T>, refused: &Trial<T>, side: Side) -> Proposal<T> {
        self.sides.note(refused.step, side);
        let short = self.sides.short;
        Proposal::Try(match self.sides.long {
            Some(long) => short + self.ratio * (long - short),
            None => refused.step / self.ratio,
        })
    }
}
