//! Expansion and backtracking.

use super::{Proposal, Sides, StepFinder};
use crate::{Ray, Real, Side, Trial};

/// Lengthens a step that is too short by a factor, shortens one that is too long by a ratio, and goes on lengthening a
/// first step that was accepted while the value falls.
///
/// - Too short, nothing too long yet: the next step is `factor` times as long.
/// - Too long: the next one lies at the share `ratio` of the bracket, counted from its short end (0 to begin with).
/// - The *first* trial is accepted: lengthened by `factor` as long as the next step is accepted too, and lower in value;
///   the lowest accepted one is the result (forward tracking, common practice). It costs one trial more than the steps
///   it gains. After a refusal the first acceptance ends the search: what lies beyond it is known.
///
/// Forward tracking makes up for what rules such as sufficient decrease cannot say, that a step is too short. With a
/// rule that can (Wolfe, Goldstein), it buys lower values with trials that the rule does not ask for: switch it off by
/// [`without_forward_tracking`](Expansion::without_forward_tracking).
///
/// Reads no slope, not even the one at the start.
///
/// ```
/// use surefoot::{Ray, StepSearch, acceptance::SufficientDecrease, finder::{Expansion, ExpansionError}};
/// let bowl = |a: f64| (a - 10.0).powi(2);
/// let ray = Ray::new(100.0, -20.0);
/// let mut search = StepSearch::new(Expansion::default(), SufficientDecrease::default());
/// let found = search.along(ray, 1.0, bowl)?;
/// assert_eq!(found.outcome.accepted().unwrap().step, 8.0); // 1, 2, 4, 8; 16 is accepted, but higher
/// assert_eq!(found.outcome.trials, 5);
/// assert_eq!(Expansion::new(1.0, 0.5), Err(ExpansionError::Factor));
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Expansion<T = f64> {
    factor: T,
    ratio: T,
    forward: bool,
    sides: Sides<T>,
    /// Whether a trial was refused.
    refused: bool,
    /// The value of the last accepted trial.
    accepted: Option<T>,
}

/// Why [`Expansion::new`] refuses its parameters.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum ExpansionError {
    /// `!(1 < factor < infinity)`.
    #[error("the expansion factor must be above 1 and finite: 2 is usual")]
    Factor,
    /// `!(0 < ratio < 1)`.
    #[error("the backtracking ratio must lie strictly between 0 and 1: 0.5 is usual")]
    Ratio,
}

impl<T: Real> Expansion<T> {
    /// With the factor of lengthening, above 1 and finite, and the ratio of shortening, `0 < ratio < 1`.
    ///
    /// # Errors
    /// [`ExpansionError`] outside of those ranges, and for NaN.
    pub fn new(factor: T, ratio: T) -> Result<Self, ExpansionError> {
        if !(factor > T::one() && factor.is_finite()) {
            Err(ExpansionError::Factor)
        } else if !(ratio > T::zero() && ratio < T::one()) {
            Err(ExpansionError::Ratio)
        } else {
            Ok(Self::with(factor, ratio))
        }
    }

    /// The same finder, ending at the first acceptance.
    #[must_use]
    pub fn without_forward_tracking(self) -> Self {
        Expansion {
            forward: false,
            ..self
        }
    }

    fn with(factor: T, ratio: T) -> Self {
        Expansion {
            factor,
            ratio,
            forward: true,
            sides: Sides::new(),
            refused: false,
            accepted: None,
        }
    }
}

impl<T: Real> Default for Expansion<T> {
    /// `factor = 2`, `ratio = 0.5` (common practice), with forward tracking.
    fn default() -> Self {
        Self::with(T::of(2.0), T::of(0.5))
    }
}

impl<T: Real> StepFinder<T> for Expansion<T> {
    fn begin(&mut self, _: &Ray<T>, first: T) -> T {
        *self = Expansion {
            forward: self.forward,
            ..Self::with(self.factor, self.ratio)
        };
        first
    }

    fn next(&mut self, _: &Ray<T>, refused: &Trial<T>, side: Side) -> Proposal<T> {
        if self.accepted.is_some() {
            return Proposal::Spent; // forward tracking has gone too far
        }
        self.refused = true;
        self.sides.note(refused.step, side);
        let short = self.sides.short;
        Proposal::Try(match self.sides.long {
            Some(long) => short + self.ratio * (long - short),
            None => self.factor * refused.step,
        })
    }

    fn polish(&mut self, _: &Ray<T>, accepted: &Trial<T>) -> Proposal<T> {
        let falls = self.accepted.is_none_or(|last| accepted.value < last);
        self.accepted = Some(accepted.value);
        if self.forward && !self.refused && falls {
            Proposal::Try(self.factor * accepted.step)
        } else {
            Proposal::Spent
        }
    }
}
