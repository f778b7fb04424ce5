//! Near rounding: the switch to rules that go by slopes, remembered in the run.

use crate::{Acceptance, Condition, Ray, Real, Side, Trial, Verdict};

/// Watches when the values of a run stop to tell steps apart.
///
/// For [`ApproximateWolfe`](crate::acceptance::ApproximateWolfe) it is the switch of Hager & Zhang (SIAM J. Optim. 16 (2005) 170-192,
/// doi:10.1137/030601880, section 4): once a move changes the value by at most `omega C`, the approximate conditions apply
/// with a slack of `eps C`, for the rest of the run. `C` is their weighted average of `|f|`. The constants are theirs.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct RoundingWatch<T> {
    /// `Q` and `C`.
    weight: T,
    average: T,
    switched: bool,
}

const DELTA: f64 = 0.7;
const OMEGA: f64 = 1e-3;
const EPS: f64 = 1e-6;

impl<T: Real> RoundingWatch<T> {
    pub(super) fn new(start: T) -> Self {
        RoundingWatch {
            weight: T::one(),
            average: start.abs(),
            switched: false,
        }
    }

    pub(super) fn moved(&mut self, old: T, new: T) {
        self.switched = self.switched || (new - old).abs() <= T::of(OMEGA) * self.average;
        self.weight = T::one() + self.weight * T::of(DELTA);
        self.average = self.average + (new.abs() - self.average) / self.weight;
    }

    /// The slack for a rule that reads one.
    pub(super) fn slack(&self) -> Option<T> {
        self.switched.then(|| T::of(EPS) * self.average)
    }
}

/// A run's rule, and what takes its place where the ray has a slack that the rule does not read.
///
/// Then the rule is asked with its decrease relaxed by the slack, and a trial that only the slack lets pass must have
/// decreased by its slope: `phi'(a) <= (2 c - 1) phi'(0)` with `c = 0.1`, the approximate first Wolfe condition of Hager &
/// Zhang 2005, eq. 4.1. So every rule keeps its own curvature condition near rounding.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WithRescue<A>(A);

/// `c` in the approximate condition: Hager & Zhang 2005, section 4.
const DECREASE_BY_SLOPE: f64 = 0.1;

impl<A> WithRescue<A> {
    pub(super) fn new(rule: A) -> Self {
        WithRescue(rule)
    }

    pub(super) fn into_inner(self) -> A {
        self.0
    }

    /// The run's own rule.
    pub fn rule(&self) -> &A {
        &self.0
    }

    /// The ray with its decrease relaxed by the slack, where that is for this type to read.
    fn relaxed<T: Real>(&self, ray: &Ray<T>) -> Option<Ray<T>>
    where
        A: Acceptance<T>,
    {
        let slack = ray.slack.filter(|_| !self.0.reads_slack())?;
        let value_noise = ray.value_noise + T::of(0.5) * slack; // a rule allows twice the noise
        Some(Ray {
            value_noise,
            ..*ray
        })
    }

    fn by_slope<T: Real>(ray: &Ray<T>, slope: T) -> Condition<T> {
        let share = T::of(2.0 * DECREASE_BY_SLOPE - 1.0);
        Condition::at_most("decrease by slope", slope, share * ray.slope)
    }
}

impl<T: Real, A: Acceptance<T>> Acceptance<T> for WithRescue<A> {
    fn judge(&self, ray: &Ray<T>, trial: &Trial<T>) -> Verdict {
        let plain = self.0.judge(ray, trial);
        let Some(relaxed) = self.relaxed(ray) else {
            return plain;
        };
        if plain != Verdict::Refuse(Side::TooLong) {
            return plain;
        }
        match (self.0.judge(&relaxed, trial), trial.slope) {
            (Verdict::Accept, None) => Verdict::NeedsSlope,
            (Verdict::Accept, Some(slope)) if !Self::by_slope(ray, slope).holds => plain,
            (verdict, _) => verdict,
        }
    }
    fn uses_slope(&self) -> bool {
        self.0.uses_slope()
    }
    fn uses_start_slope(&self) -> bool {
        self.0.uses_start_slope()
    }
    fn reads_slack(&self) -> bool {
        true
    }
    fn decrease(&self) -> Option<T> {
        self.0.decrease()
    }
    fn ceiling(&self, ray: &Ray<T>, step: T) -> Option<T> {
        self.0
            .ceiling(self.relaxed(ray).as_ref().unwrap_or(ray), step)
    }
    fn explain(&self, ray: &Ray<T>, trial: &Trial<T>, each: &mut dyn FnMut(Condition<T>)) {
        let relaxed = self.relaxed(ray);
        self.0.explain(relaxed.as_ref().unwrap_or(ray), trial, each);
        if let (Some(_), Some(slope)) = (relaxed, trial.slope) {
            each(Self::by_slope(ray, slope));
        }
    }
}
