//! The words that rules, finders and searches speak: [`Ray`], [`Trial`], [`Side`], [`Verdict`], [`Condition`].
//!
//! A search looks at `phi(a) = f(x + a d)` for steps `a > 0`. Its *slope* is `phi'(a)`, the inner product of the
//! gradient at `x + a d` with the direction `d`.

use crate::Real;
use core::fmt;

/// What is known where the search begins: `phi(0)`, `phi'(0)` and what decrease is measured from.
///
/// ```
/// use surefoot::Ray;
/// let ray = Ray::new(3.5, -2.0);
/// assert_eq!(ray.reference, 3.5); // decrease is measured from phi(0) unless told otherwise
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
#[non_exhaustive]
pub struct Ray<T> {
    /// `phi(0)`, in the units of the objective.
    pub value: T,
    /// `phi'(0)`, objective units per unit of step; negative for a descent direction.
    pub slope: T,
    /// What decrease is measured from: `phi(0)` in a monotone search, an older or averaged value otherwise.
    pub reference: T,
    /// Bound on the error of a value (objective units). Decrease is relaxed by twice as much. Default 0.
    pub value_noise: T,
    /// Bound on the error of a slope. Default 0.
    pub slope_noise: T,
    /// How much a value may exceed the reference where rules go by slopes because the decrease drowns in rounding; `None`
    /// where it does not. Read by [`ApproximateWolfe`](crate::acceptance::ApproximateWolfe).
    pub slack: Option<T>,
    /// The sufficient-decrease parameter of the rule in force, put here by the search for finders that need it.
    pub decrease: Option<T>,
}

impl<T: Real> Ray<T> {
    /// A ray with exact values, measured from its own start.
    pub fn new(value: T, slope: T) -> Self {
        Ray {
            value,
            slope,
            reference: value,
            value_noise: T::zero(),
            slope_noise: T::zero(),
            slack: None,
            decrease: None,
        }
    }

    /// A ray with no slope at its start, for rules that read none there; its slope stands as 0.
    pub fn without_slope(value: T) -> Self {
        Self::new(value, T::zero())
    }

    /// The same ray with decrease measured from `reference` (finite, at least `value`).
    #[must_use]
    pub fn with_reference(self, reference: T) -> Self {
        Ray { reference, ..self }
    }

    /// The same ray with a bound on the error of each value (finite, at least 0).
    #[must_use]
    pub fn with_value_noise(self, value_noise: T) -> Self {
        Ray {
            value_noise,
            ..self
        }
    }

    /// The same ray near rounding: values up to `slack` above the reference count as no worse (finite, at least 0).
    #[must_use]
    pub fn with_slack(self, slack: T) -> Self {
        Ray {
            slack: Some(slack),
            ..self
        }
    }

    /// The line of sufficient decrease with its noise allowance: `reference + decrease a phi'(0) + 2 noise`.
    pub(crate) fn decrease_limit(&self, decrease: T, step: T) -> T {
        self.reference + decrease * step * self.slope + T::of(2.0) * self.value_noise
    }

    /// What is wrong with it for a rule that needs a slope at the start, or does not.
    pub(crate) fn fault(&self, needs_slope: bool) -> Option<RayFault> {
        let zero = T::zero();
        let allowance = |e: T| e.is_finite() && e >= zero;
        if !self.value.is_finite() {
            Some(RayFault::ValueNotFinite)
        } else if !self.slope.is_finite() {
            Some(RayFault::SlopeNotFinite)
        } else if !(self.slope < zero || (self.slope == zero && !needs_slope)) {
            Some(RayFault::NotDescent)
        } else if !(self.reference.is_finite() && self.reference >= self.value) {
            Some(RayFault::Reference)
        } else if !(allowance(self.value_noise)
            && allowance(self.slope_noise)
            && allowance(self.slack.unwrap_or(zero)))
        {
            Some(RayFault::Noise)
        } else {
            None
        }
    }
}

/// Why a search cannot begin on a ray.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum RayFault {
    /// `phi(0)` is NaN or infinite.
    #[error(
        "the value at the start is not finite: begin from a point where the objective is defined"
    )]
    ValueNotFinite,
    /// `phi'(0)` is NaN or infinite.
    #[error("the slope at the start is not finite: check the gradient and the direction there")]
    SlopeNotFinite,
    /// `phi'(0) >= 0`.
    #[error(
        "the slope at the start is not negative: no step along this direction is a descent; use the negative gradient, or check its sign"
    )]
    NotDescent,
    /// The reference is not finite, or below `phi(0)`.
    #[error(
        "the reference is not finite or lies below the value at the start: use a value that an accepted point had"
    )]
    Reference,
    /// A noise bound or the slack is negative or not finite.
    #[error("a noise bound or the slack is negative or not finite: use 0 where no noise is known")]
    Noise,
}

/// One step that was evaluated.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Trial<T> {
    /// The step `a`.
    pub step: T,
    /// `phi(a)`.
    pub value: T,
    /// `phi'(a)`, where somebody needed it.
    pub slope: Option<T>,
}

/// Which way a refused step is wrong.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Side {
    /// An acceptable step lies to the left.
    TooLong,
    /// An acceptable step lies to the right.
    TooShort,
}

/// A rule's answer about one trial.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Verdict {
    /// All conditions hold: take the step.
    Accept,
    /// Refused; look on the other side of it.
    Refuse(Side),
    /// The value alone cannot settle it. Said only while the slope is unknown.
    NeedsSlope,
}

/// How a found number is compared with its limit.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Relation {
    /// `found <= limit` is asked for.
    AtMost,
    /// `found >= limit` is asked for.
    AtLeast,
}

/// One condition of a rule at one trial: the account of why it was refused.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Condition<T> {
    /// The condition's usual name, such as `sufficient decrease`.
    pub name: &'static str,
    /// What was found at the trial.
    pub found: T,
    /// The comparison that is asked for.
    pub relation: Relation,
    /// What it is compared with.
    pub limit: T,
    /// Whether it holds; false where a NaN is involved.
    pub holds: bool,
}

impl<T: Real> Condition<T> {
    /// `found <= limit`.
    pub fn at_most(name: &'static str, found: T, limit: T) -> Self {
        Condition {
            name,
            found,
            relation: Relation::AtMost,
            limit,
            holds: found <= limit,
        }
    }

    /// `found >= limit`.
    pub fn at_least(name: &'static str, found: T, limit: T) -> Self {
        Condition {
            name,
            found,
            relation: Relation::AtLeast,
            limit,
            holds: found >= limit,
        }
    }
}

impl<T: fmt::Display + fmt::LowerExp> fmt::Display for Condition<T> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let (met, missed) = match self.relation {
            Relation::AtMost => ("<=", ">"),
            Relation::AtLeast => (">=", "<"),
        };
        let sign = if self.holds { met } else { missed };
        write!(
            f,
            "{}: {:.6e} {sign} {:.6e}",
            self.name, self.found, self.limit
        )
    }
}
