//! A value before the search, for a better first trial.

use super::{Given, Phase, Run};
use crate::descent::first_trial::quadratic_step;
use crate::{Acceptance, Direction, StepFinder, Trial, Vector};
use num_traits::Float;

impl<V, D, F, A> Run<V, D, F, A>
where
    V: Vector,
    D: Direction<V>,
    F: StepFinder<V::Scalar>,
    A: Acceptance<V::Scalar>,
{
    /// Begins the search at `first`, or asks for a value before, where the first trial is to follow from one.
    pub(super) fn probe(&mut self, first: V::Scalar) {
        let Some(step) = self.settings.first_trial.probe(self.last) else {
            return self.begin_search(first);
        };
        let limits = self.limits();
        let step = step.max(limits.lower()).min(limits.upper());
        if self.trial.finite_step_from(&self.x, step, &self.d) {
            self.phase = Phase::Probing { step, first };
        } else {
            self.begin_search(first);
        }
    }

    /// The probe was answered: begins the search where it says, or at `first`.
    pub(super) fn search_after(
        &mut self,
        step: V::Scalar,
        first: V::Scalar,
        given: Given<V::Scalar>,
    ) {
        let value = match given {
            Given::Value(value) | Given::Both(value) if value.is_finite() => value,
            _ => return self.begin_search(first),
        };
        self.probed = (value < self.value).then_some(Trial {
            step,
            value,
            slope: None,
        });
        let better = quadratic_step(self.value, self.slope, step, value);
        self.begin_search(better.unwrap_or(first));
    }

    /// The lower one of the best trial of a search and the probe before it.
    pub(super) fn lower_with_probe(
        &self,
        best: Option<Trial<V::Scalar>>,
    ) -> Option<Trial<V::Scalar>> {
        match (best, self.probed) {
            (Some(best), Some(probed)) if best.value <= probed.value => Some(best),
            (_, Some(probed)) => Some(probed),
            (best, None) => best,
        }
    }
}
