//! How a search ends, with the evidence.

use crate::{Real, Trial};
use core::fmt;

/// How a search ended. Everything but [`Accepted`](Ending::Accepted) is a diagnosis with its evidence; its `Display`
/// is a sentence that says what to look at.
#[derive(Clone, Copy, Debug, PartialEq)]
#[non_exhaustive]
pub enum Ending<T> {
    /// The rule accepted a trial.
    Accepted,
    /// The trial budget ran out.
    BudgetSpent {
        /// Number of trials.
        trials: u32,
    },
    /// The upper bound was tried and is too short: the rule wants more than the bound allows.
    UpperBound {
        /// The bound.
        bound: T,
    },
    /// The lower bound was tried and is too long.
    LowerBound {
        /// The bound.
        bound: T,
    },
    /// Steps up to the edge of the domain are too short, those past it are undefined.
    Edge {
        /// The largest step inside.
        inside: T,
        /// The smallest step outside.
        outside: T,
    },
    /// Steps up to the largest number are too short: the objective seems to fall without end along the ray.
    Endless {
        /// The largest step tried.
        step: T,
    },
    /// All values seen equal the one at the start, although the slope promised a decrease.
    Flat {
        /// The value.
        value: T,
        /// The slope at the start.
        slope: T,
        /// The longest step with that value.
        step: T,
    },
    /// The values near the start do not follow the slope there: the gradient does not belong to the value.
    WrongSlope {
        /// The slope at the start.
        slope: T,
        /// The mean slope measured from the start to `step`.
        measured: T,
        /// A short step, yet long enough for the difference of values to mean something.
        step: T,
    },
    /// The moves that were tried are lost in the rounding of the point; said by a run, which knows the point.
    MoveBelowRounding {
        /// The longest move without effect, `a max|d|`.
        moved: T,
        /// The size of the point, `max|x|`.
        point: T,
    },
    /// Steps short enough to be acceptable promise less decrease than values resolve.
    BelowRounding {
        /// The decrease that the slope promises at the shortest step.
        promised: T,
        /// What rounding of the value, and its noise, hide.
        resolved: T,
    },
    /// The bracket narrowed to neighbouring numbers without an acceptable step.
    Narrow {
        /// Too short.
        short: T,
        /// Too long.
        long: T,
    },
    /// The finder had nothing more to propose.
    FinderSpent,
    /// The rule needs a slope that the objective could not give.
    SlopeMissing {
        /// Where it was missing.
        step: T,
    },
    /// The rule asked for a slope that it already had.
    RuleUndecided {
        /// Where.
        step: T,
    },
}

impl<T: fmt::LowerExp> fmt::Display for Ending<T> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Ending::Accepted => write!(f, "a step was accepted"),
            Ending::BudgetSpent { trials } => write!(
                f,
                "the budget of {trials} trials ran out: look at the log for a side that never changes, or allow more"
            ),
            Ending::UpperBound { bound } => write!(
                f,
                "the upper bound {bound:.3e} is still too short for the rule: take it as it is, or raise the bound"
            ),
            Ending::LowerBound { bound } => write!(
                f,
                "the lower bound {bound:.3e} is still too long: lower it, or check the sign and scale of the gradient"
            ),
            Ending::Edge { inside, outside } => write!(
                f,
                "the function falls right up to the edge of its domain, between {inside:.17e} and {outside:.17e}: \
                 the minimum lies on a constraint that the objective does not say"
            ),
            Ending::Endless { step } => write!(
                f,
                "the function still falls at step {step:.3e}: it seems to be unbounded below along this direction"
            ),
            Ending::Flat { value, slope, step } => write!(
                f,
                "every value up to step {step:.3e} equals the one at the start, {value:.6e}, although the slope there is \
                 {slope:.3e}: the variables may not reach the objective, or the steps may be too short to be felt"
            ),
            Ending::MoveBelowRounding { moved, point } => write!(
                f,
                "moves up to {moved:.3e} vanish in the rounding of a point of size {point:.3e}: rescale the variables, or take \
                 longer first steps"
            ),
            Ending::WrongSlope {
                slope,
                measured,
                step,
            } => write!(
                f,
                "the slope at the start is said to be {slope:.6e}, but the values up to step {step:.3e} change at \
                 {measured:.6e}: check the gradient against differences, or whether the objective is smooth there"
            ),
            Ending::BelowRounding { promised, resolved } => write!(
                f,
                "acceptable steps promise a decrease of {promised:.3e}, and values resolve only {resolved:.3e}: this may be \
                 the minimum as far as the arithmetic goes; use a rule that goes by slopes, or state the noise"
            ),
            Ending::Narrow { short, long } => write!(
                f,
                "no acceptable step exists between the neighbouring steps {short:.17e} and {long:.17e}: check that the \
                 gradient belongs to the value, or whether the decrease drowns in rounding"
            ),
            Ending::FinderSpent => write!(
                f,
                "the step finder had nothing more to propose: use another, or allow it more"
            ),
            Ending::SlopeMissing { step } => write!(
                f,
                "the rule needs the slope at step {step:.3e} and none could be given: give slopes, or use a rule that \
                 reads values only"
            ),
            Ending::RuleUndecided { step } => write!(
                f,
                "the rule asked for the slope at step {step:.3e} although it had it: NeedsSlope may be said only while \
                 the slope is unknown"
            ),
        }
    }
}

/// The result of a search.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Outcome<T> {
    /// How it ended.
    pub ending: Ending<T>,
    /// The trial of least value among all finite ones, accepted or not; the first of equals. It may be no lower than the
    /// start: compare it with [`Ray::value`](crate::Ray::value) before you take it.
    pub best: Option<Trial<T>>,
    /// Number of trials.
    pub trials: u32,
    pub(super) accepted: Option<Trial<T>>,
}

impl<T: Real> Outcome<T> {
    /// The accepted trial: the one of least value where a finder minimised on after an acceptance.
    pub fn accepted(&self) -> Option<Trial<T>> {
        self.accepted
    }
}
