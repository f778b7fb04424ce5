//! What a run leaves behind.

use crate::{Ending, Evaluations, Vector};
use core::fmt;

use super::stopping::Criterion;

/// Why a run ended.
#[derive(Clone, Copy, Debug, PartialEq)]
#[non_exhaustive]
pub enum RunEnding<T> {
    /// A stopping test held.
    Converged(Criterion),
    /// The limit on moves was reached.
    IterationsSpent,
    /// The limit on evaluations was reached.
    EvaluationsSpent,
    /// A search found no acceptable step, and the remedies did not help; here is its diagnosis.
    SearchFailed(Ending<T>),
    /// No descent: `g . d` is not negative, not even after the direction was reset.
    NotDescent {
        /// The slope found.
        slope: T,
    },
    /// At the level of rounding, thirty moves running brought neither a lower value nor a smaller gradient, or no step was
    /// acceptable even with a slack.
    AtRounding,
    /// The caller stopped it.
    Stopped,
    /// The input was not fit.
    Fault(Fault),
}

impl<T: fmt::LowerExp> fmt::Display for RunEnding<T> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            RunEnding::Converged(Criterion::Gradient) => {
                write!(f, "converged: the gradient is small")
            }
            RunEnding::Converged(Criterion::ValueChange) => {
                write!(f, "converged: the last move hardly changed the value")
            }
            RunEnding::Converged(Criterion::StepChange) => {
                write!(f, "converged: the last move was short")
            }
            RunEnding::Converged(Criterion::Target) => {
                write!(f, "converged: the target value is reached")
            }
            RunEnding::IterationsSpent => write!(
                f,
                "the limit on iterations was reached: go on from this point, or allow more"
            ),
            RunEnding::EvaluationsSpent => write!(
                f,
                "the limit on evaluations was reached: go on from this point, or allow more"
            ),
            RunEnding::SearchFailed(ending) => write!(f, "no acceptable step was found: {ending}"),
            RunEnding::NotDescent { slope } => write!(
                f,
                "the direction does not descend (slope {slope:.3e}), not even after a reset: check the gradient's sign, and \
                 that the direction is neither zero nor NaN"
            ),
            RunEnding::AtRounding => write!(
                f,
                "value and gradient improve no more: along the directions tried, the arithmetic resolves no better here; \
                 rescale the variables, try another direction, or accept the point"
            ),
            RunEnding::Stopped => write!(f, "stopped by the caller"),
            RunEnding::Fault(fault) => write!(f, "{fault}"),
        }
    }
}

/// Input that a run cannot work with.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum Fault {
    /// The point has no components.
    #[error("the starting point is empty: there is nothing to minimise over")]
    EmptyPoint,
    /// A component of the starting point is NaN or infinite.
    #[error("the starting point has a component that is not finite")]
    PointNotFinite,
    /// The value at the start is NaN or infinite.
    #[error("the value at the starting point is not finite: begin where the objective is defined")]
    ValueNotFinite,
    /// The gradient at the start has a component that is NaN or infinite.
    #[error(
        "the gradient at the starting point has a component that is not finite: check its formula there"
    )]
    GradientNotFinite,
    /// A vector came back with another length.
    #[error(
        "the gradient has {found} components where the point has {expected}: the objective must fill it, not replace it"
    )]
    LengthChanged {
        /// The length of the point.
        expected: usize,
        /// What came back.
        found: usize,
    },
}

/// Trials of a run that were not accepted, by verdict.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub struct Refusals {
    /// Refused as too long.
    pub too_long: u64,
    /// Refused as too short.
    pub too_short: u64,
    /// Outside of the domain: a value or slope that is not finite.
    pub outside: u64,
}

/// What a run did when a search failed.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub struct Remedies {
    /// The direction did not descend, or its search found nothing: it was reset to steepest descent.
    pub resets: u64,
    /// A search found no acceptable step, but one of lower value: it was taken.
    pub best_taken: u64,
    /// The promised decrease drowned in rounding: from then on the rule had a slack, and went by slopes where
    /// only the slack let a trial pass.
    pub near_rounding: u64,
}

/// What a run found, and what it cost.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub struct Report<V: Vector> {
    /// The best point.
    pub point: V,
    /// The value there; NaN if the run ended before a first finite value.
    pub value: V::Scalar,
    /// The gradient there, where it was computed.
    pub gradient: Option<V>,
    /// Its largest magnitude.
    pub gradient_max: Option<V::Scalar>,
    /// Why the run ended.
    pub ending: RunEnding<V::Scalar>,
    /// Number of moves.
    pub iterations: u64,
    /// Calls of the objective, by kind.
    pub evaluations: Evaluations,
    /// Trials that were not accepted, by verdict.
    pub refusals: Refusals,
    /// What was done when a search failed.
    pub remedies: Remedies,
}

impl<V: Vector> Report<V> {
    /// Whether a stopping test held.
    pub fn converged(&self) -> bool {
        matches!(self.ending, RunEnding::Converged(_))
    }
}

/// Why [`Descent::minimize`](super::Descent::minimize) did not end by itself. The best point so far travels inside.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum DescentError<V: Vector, E> {
    /// The input was not fit.
    #[error("{fault}")]
    Input {
        /// What is wrong with it.
        fault: Fault,
        /// What was found until then.
        report: Report<V>,
    },
    /// The objective failed with an error of the caller's own.
    #[error("the objective failed: {error}")]
    Caller {
        /// That error.
        error: E,
        /// What was found until then; its ending is [`RunEnding::Stopped`].
        report: Report<V>,
    },
}

impl<V: Vector, E> DescentError<V, E> {
    /// What was found until then.
    pub fn report(&self) -> &Report<V> {
        match self {
            DescentError::Input { report, .. } | DescentError::Caller { report, .. } => report,
        }
    }
}
