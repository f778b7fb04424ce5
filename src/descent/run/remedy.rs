//! What a run does when a search fails.

use super::{Next, Phase, Run, Want};
use crate::descent::RunEnding;
use crate::{Acceptance, Cost, Direction, Ending, Real, StepFinder, Trial, Vector};
use num_traits::Float;

/// So many failed searches running end a run.
const TROUBLES: u32 = 3;
/// The same where each found a value lower by more than rounding.
const TROUBLES_WITH_PROGRESS: u32 = 20;
/// The slack near rounding, in units of the rounding of the value. Along the runs of `tests/problem_matrix.rs` the value at
/// neighbouring points was seen to be off by 1,900 such units on Meyer's problem, and by 41,000 on Watson's with nine variables.
const RESCUE: f64 = 65_536.0;
/// So many moves at the level of rounding without a lower value or a flatter gradient end a run; each third of them starts the
/// direction over.
pub(super) const IDLE: u32 = 60;

impl<V, D, F, A> Run<V, D, F, A>
where
    V: Vector,
    D: Direction<V>,
    F: StepFinder<V::Scalar>,
    A: Acceptance<V::Scalar>,
{
    /// Whether point and gradient of a trial stand in the buffers.
    pub(super) fn at_hand(&self, trial: &Trial<V::Scalar>) -> bool {
        let latest = self.search.log().latest();
        trial.slope.is_some() && latest.is_some_and(|entry| entry.trial == *trial)
    }

    /// Asks for the gradient at an earlier trial. It is computed twice there, which keeps a run at five vectors.
    pub(super) fn go_back_to(&mut self, trial: Trial<V::Scalar>, after_failure: bool) {
        self.trial.step_from(&self.x, trial.step, &self.d);
        self.phase = Phase::GoingBack {
            trial,
            after_failure,
            want: match self.settings.cost {
                Cost::Separate => Want::Gradient,
                Cost::Joint => Want::Both,
            },
        };
    }

    /// The search failed. In this order: the best trial if it is lower by more than rounding; near rounding, the rule with a
    /// slack; the best trial if it is lower at all; steepest descent if there is a memory to give up; the end.
    pub(super) fn remedy(&mut self, ending: Ending<V::Scalar>, best: Option<Trial<V::Scalar>>) {
        let ending = match ending {
            // Values that stand still because the point does are no evidence against the gradient.
            Ending::WrongSlope { step, .. } | Ending::Flat { step, .. } if self.vanishes(step) => {
                Ending::MoveBelowRounding {
                    moved: step * self.d.max_abs(),
                    point: self.x.max_abs(),
                }
            }
            other => other,
        };
        let hopeless = matches!(
            ending,
            Ending::Endless { .. } | Ending::SlopeMissing { .. } | Ending::RuleUndecided { .. }
        );
        let rounding = self.rounding_of_value();
        let lower = best.filter(|b| b.value < self.value);
        let progress = lower.is_some_and(|b| self.value - b.value > rounding);
        self.troubles += 1;
        let patience = if progress {
            TROUBLES_WITH_PROGRESS
        } else {
            TROUBLES
        };
        if hopeless || self.troubles > patience {
            return self.fail(ending);
        }
        match lower {
            Some(trial) if progress => self.take(trial),
            _ if self.rescue.is_none() && self.drowns(ending, rounding) => {
                self.remedies.near_rounding += 1;
                self.rescue = Some(rounding);
                let first = closed_in(ending).unwrap_or_else(|| self.search.first_step());
                self.between(Next::Again { first });
            }
            Some(trial) => self.take(trial),
            None => self.give_up(ending),
        }
    }

    /// What counts as rounding of the present value.
    pub(super) fn rounding_of_value(&self) -> V::Scalar {
        V::Scalar::of(RESCUE) * V::Scalar::epsilon() * self.value.abs()
    }

    /// Moves to the best trial of a failed search.
    fn take(&mut self, trial: Trial<V::Scalar>) {
        if self.at_hand(&trial) {
            self.remedies.best_taken += 1;
            self.move_to(trial, true);
        } else {
            self.go_back_to(trial, true);
        }
    }

    /// Whether the decrease drowned in rounding and slopes could go on: the search says so, or its first trial promised too
    /// little.
    fn drowns(&self, ending: Ending<V::Scalar>, rounding: V::Scalar) -> bool {
        let says_so = matches!(
            ending,
            Ending::Narrow { .. }
                | Ending::BelowRounding { .. }
                | Ending::MoveBelowRounding { .. }
                | Ending::Flat { .. }
        );
        let promised = -self.slope * self.search.first_step();
        let usable = self.search.rule().rule().uses_start_slope();
        usable && (says_so || promised <= rounding)
    }

    /// No remedy is left. Where the slack could not help either, and the step that the search closed in on promises no more
    /// than rounding, the arithmetic is at its end, not the search.
    pub(super) fn fail(&mut self, ending: Ending<V::Scalar>) {
        let drowned = |step| -self.slope * step <= self.rounding_of_value();
        let at_rounding = match ending {
            // Where the first trial promised no more than rounding, values are no evidence against the gradient either.
            Ending::WrongSlope { .. } | Ending::Flat { .. } => drowned(self.search.first_step()),
            other => self.rescue.is_some() && closed_in(other).is_some_and(drowned),
        };
        self.end(if at_rounding {
            RunEnding::AtRounding
        } else {
            RunEnding::SearchFailed(ending)
        });
    }

    /// Whether `x + a d` is `x`, in every component.
    fn vanishes(&mut self, step: V::Scalar) -> bool {
        self.trial.step_from(&self.x, step, &self.d);
        self.trial.add_scaled(V::Scalar::of(-1.0), &self.x);
        self.trial.max_abs() == V::Scalar::of(0.0)
    }

    /// Nothing lower was found along this direction.
    pub(super) fn give_up(&mut self, ending: Ending<V::Scalar>) {
        if self.fresh {
            self.fail(ending);
        } else {
            self.reset_direction();
            self.between(Next::Direction {
                failed: Some(ending),
            });
        }
    }
}

/// The step that a failed search closed in on, if it did.
pub(super) fn closed_in<T: Real>(ending: Ending<T>) -> Option<T> {
    match ending {
        Ending::Narrow { long, .. } => Some(long),
        _ => None,
    }
}
