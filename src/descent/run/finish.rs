//! The loop form of a run, and its end.

use super::Run;
use crate::descent::{Descent, DescentError, Report, RunEnding};
use crate::{Acceptance, Direction, Objective, Real, StepFinder, Vector};
use core::ops::ControlFlow;

impl<V, D, F, A> Run<V, D, F, A>
where
    V: Vector,
    D: Direction<V>,
    F: StepFinder<V::Scalar>,
    A: Acceptance<V::Scalar>,
{
    /// Ends the run if it has not ended; returns the settings for another one, and what was found.
    pub fn finish(mut self) -> (Descent<D, F, A>, Report<V>) {
        self.stop();
        let ending = self.ending().unwrap_or(RunEnding::Stopped);
        // A trial of a search that did not end in a move may be lower than the last point moved to.
        let best = self.search.best().filter(|_| self.search_is_from_here);
        let lower = self
            .lower_with_probe(best)
            .filter(|best| best.value < self.value);
        // A converged point stands unless an earlier one is lower by more than rounding.
        let rounding = match ending {
            RunEnding::Converged(_) => self.rounding_of_value(),
            _ => V::Scalar::of(0.0),
        };
        let mut gradient = None;
        if let Some(best) = lower {
            self.trial.step_from(&self.x, best.step, &self.d);
            core::mem::swap(&mut self.x, &mut self.trial);
            self.value = best.value;
            self.gradient_max = None;
        } else if self.gradient_max.is_some() {
            gradient = Some(self.g);
        }
        if let Some(lowest) = self.lowest
            && lowest.value < self.value - rounding
        {
            self.x = lowest.point;
            self.value = lowest.value;
            self.gradient_max = lowest.gradient_max;
            gradient = None;
        }
        let (finder, rule) = self.search.into_parts();
        let descent = Descent {
            direction: self.direction,
            finder,
            rule: rule.into_inner(),
            settings: self.settings,
        };
        let report = Report {
            point: self.x,
            value: self.value,
            gradient,
            gradient_max: self.gradient_max,
            ending,
            iterations: self.iterations,
            evaluations: self.evaluations,
            refusals: self.refusals,
            remedies: self.remedies,
        };
        (descent, report)
    }

    /// The loop form of a run: calls `objective` until the end, and `watch` after each move.
    ///
    /// # Errors
    /// [`DescentError`] if the input is not fit or the objective fails.
    pub fn drive<O: Objective<V>>(
        mut self,
        mut objective: O,
        mut watch: impl FnMut(&Self) -> ControlFlow<()>,
    ) -> Result<Report<V>, DescentError<V, O::Error>> {
        self.settings.cost = objective.cost();
        self.search.set_cost(self.settings.cost);
        while let Some(request) = self.request() {
            let given = request.answer(&mut objective);
            let before = self.iterations;
            let moved = given.and_then(|given| {
                let answered = self.supply(given);
                debug_assert!(answered.is_ok(), "what was wanted was given");
                if self.iterations > before {
                    objective.accepted(&self.x)?;
                }
                Ok(self.iterations > before)
            });
            match moved {
                Ok(true) if watch(&self).is_break() => self.stop(),
                Ok(_) => {}
                Err(error) => {
                    let (_, report) = self.finish();
                    return Err(DescentError::Caller { error, report });
                }
            }
        }
        let (_, report) = self.finish();
        match report.ending {
            RunEnding::Fault(fault) => Err(DescentError::Input { fault, report }),
            _ => Ok(report),
        }
    }
}
