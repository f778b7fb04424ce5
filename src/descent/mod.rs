//! Drivers: [`Descent`] puts a direction, a step finder and an acceptance rule together; [`Run`] is it under way.

mod first_trial;
mod reference;
mod report;
mod rounding;
mod run;
mod stopping;

pub use first_trial::FirstTrial;
pub use reference::{MOST_VALUES, Reference, ReferenceError, ReferenceMemory};
pub use report::{DescentError, Fault, Refusals, Remedies, Report, RunEnding};
pub use rounding::WithRescue;
pub use run::{Given, Request, Run, RunReply, Want};
pub use stopping::{Criterion, SettingError, Stopping};

use crate::{
    Acceptance, Cost, Direction, Limits, Objective, Reply, StepFinder, Vector, joint, separate,
};
use core::ops::ControlFlow;

/// A descent method: a direction, a step finder, an acceptance rule, and settings.
///
/// ```
/// use surefoot::{Descent, Stopping, acceptance::WeakWolfe, direction::Lbfgs, finder::MoreThuente};
///
/// let descent = Descent::new(Lbfgs::new(5)?, MoreThuente::new(), WeakWolfe::default())
///     .with_stopping(Stopping { gradient: Some(1e-9), ..Stopping::default() })?;
/// let report = descent.minimize_fn([-1.2_f64, 1.0], |x, g| {
///     let (a, b) = (1.0 - x[0], x[1] - x[0] * x[0]);
///     g[0] = -2.0 * a - 400.0 * x[0] * b;
///     g[1] = 200.0 * b;
///     a * a + 100.0 * b * b
/// })?;
/// assert!(report.converged());
/// assert!((report.point[0] - 1.0).abs() < 1e-8);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Descent<D, F, A> {
    direction: D,
    finder: F,
    rule: A,
    settings: run::Settings,
}

impl<D, F, A> Descent<D, F, A> {
    /// With default [`Limits`] for each search, [`FirstTrial`] and [`Stopping`].
    pub fn new(direction: D, finder: F, rule: A) -> Self {
        Descent {
            direction,
            finder,
            rule,
            settings: run::Settings {
                limits: Limits::default(),
                first_trial: FirstTrial::default(),
                stopping: Stopping::default(),
                reference: Reference::default(),
                longest_move: None,
                value_noise: 0.0,
                cost: Cost::Separate,
            },
        }
    }

    fn with(self, change: impl FnOnce(&mut run::Settings)) -> Self {
        let mut settings = self.settings;
        change(&mut settings);
        Descent { settings, ..self }
    }

    /// The direction; after a run it still knows what it counted.
    pub fn direction(&self) -> &D {
        &self.direction
    }

    /// The step finder.
    pub fn finder(&self) -> &F {
        &self.finder
    }

    /// The acceptance rule.
    pub fn rule(&self) -> &A {
        &self.rule
    }

    /// With other bounds and another budget for each search.
    #[must_use]
    pub fn with_limits(self, limits: Limits<f64>) -> Self {
        self.with(|s| s.limits = limits)
    }

    /// With another choice of first trials.
    ///
    /// # Errors
    /// [`SettingError::FirstTrial`] for a fixed or diminishing step that is not positive and finite.
    pub fn with_first_trial(self, first_trial: FirstTrial) -> Result<Self, SettingError> {
        if !first_trial.is_valid() {
            return Err(SettingError::FirstTrial);
        }
        Ok(self.with(|s| s.first_trial = first_trial))
    }

    /// With other stopping tests.
    ///
    /// # Errors
    /// [`SettingError`] for a tolerance that is negative, infinite or NaN.
    pub fn with_stopping(self, stopping: Stopping) -> Result<Self, SettingError> {
        stopping.check()?;
        Ok(self.with(|s| s.stopping = stopping))
    }

    /// For a caller of the machine form whose objective gives value and gradient for the price of one. The loop forms ask
    /// the objective itself.
    #[must_use]
    pub fn with_cost(self, cost: Cost) -> Self {
        self.with(|s| s.cost = cost)
    }

    /// With another reference for the decrease: a nonmonotone search. The run keeps one vector more, its lowest point.
    ///
    /// # Errors
    /// [`ReferenceError`] for parameters out of range.
    pub fn with_reference(self, reference: Reference) -> Result<Self, ReferenceError> {
        reference.check()?;
        Ok(self.with(|s| s.reference = reference))
    }

    /// With a cap on the length of a move: `a max|d| <= longest`, in units of the variables; positive and finite. Default:
    /// none.
    ///
    /// # Errors
    /// [`SettingError::LongestMove`] otherwise.
    pub fn with_longest_move(self, longest: f64) -> Result<Self, SettingError> {
        if !(longest > 0.0 && longest.is_finite()) {
            return Err(SettingError::LongestMove);
        }
        Ok(self.with(|s| s.longest_move = Some(longest)))
    }

    /// For values with errors up to `noise` (objective units, finite, at least 0): decrease is relaxed by twice as much, as
    /// in H.-J. M. Shi, Y. Xie, R. Byrd & J. Nocedal, "A noise-tolerant quasi-Newton algorithm for unconstrained
    /// optimization", SIAM J. Optim. 32 (2022) 29-55, doi:10.1137/20M1373190 (recalled from memory). Noise of the gradient is
    /// met there by lengthening the interval over which gradients are differenced, not by relaxing curvature. Default 0.
    ///
    /// # Errors
    /// [`SettingError::ValueNoise`] otherwise.
    pub fn with_value_noise(self, noise: f64) -> Result<Self, SettingError> {
        if !(noise >= 0.0 && noise.is_finite()) {
            return Err(SettingError::ValueNoise);
        }
        Ok(self.with(|s| s.value_noise = noise))
    }

    /// The machine form: a run from `x0` that asks for its evaluations. See [`Run`].
    pub fn start<V>(self, x0: V) -> Run<V, D, F, A>
    where
        V: Vector,
        D: Direction<V>,
        F: StepFinder<V::Scalar>,
        A: Acceptance<V::Scalar>,
    {
        Run::new(self, x0, None)
    }

    /// The machine form from a point whose value and gradient are known: they are not asked for again.
    pub fn start_known<V>(self, x0: V, value: V::Scalar, gradient: V) -> Run<V, D, F, A>
    where
        V: Vector,
        D: Direction<V>,
        F: StepFinder<V::Scalar>,
        A: Acceptance<V::Scalar>,
    {
        Run::new(self, x0, Some((value, gradient)))
    }

    /// Minimises `objective` from `x0`.
    ///
    /// Any end that the method finds by itself is `Ok`, with the reason in [`Report::ending`].
    ///
    /// # Errors
    /// [`DescentError`] if the input is not fit or the objective fails; the best point so far travels inside.
    pub fn minimize<V, O>(self, x0: V, objective: O) -> Result<Report<V>, DescentError<V, O::Error>>
    where
        V: Vector,
        O: Objective<V>,
        D: Direction<V>,
        F: StepFinder<V::Scalar>,
        A: Acceptance<V::Scalar>,
    {
        self.start(x0)
            .drive(objective, |_| ControlFlow::Continue(()))
    }

    /// As [`minimize`](Descent::minimize), for one closure `|x, g| value` that writes the gradient into `g`.
    ///
    /// The closure returns a plain value, or a `Result` with an error of the caller's own.
    ///
    /// # Errors
    /// As [`minimize`](Descent::minimize).
    pub fn minimize_fn<V, R>(
        self,
        x0: V,
        both: impl FnMut(&V, &mut V) -> R,
    ) -> Result<Report<V>, DescentError<V, R::Error>>
    where
        V: Vector,
        R: Reply<V::Scalar>,
        D: Direction<V>,
        F: StepFinder<V::Scalar>,
        A: Acceptance<V::Scalar>,
    {
        self.minimize(x0, joint(both))
    }

    /// As [`minimize`](Descent::minimize), for two closures, `|x| value` and `|x, g| { .. }`, where a gradient costs extra.
    ///
    /// ```
    /// use surefoot::{Descent, acceptance::WeakWolfe, direction::Lbfgs, finder::Bisection};
    /// let descent = Descent::new(Lbfgs::new(5)?, Bisection::new(), WeakWolfe::default());
    /// let report = descent.minimize_pair(
    ///     vec![4.0, -2.0],
    ///     |x| x[0] * x[0] + 3.0 * x[1] * x[1],
    ///     |x, g| { g[0] = 2.0 * x[0]; g[1] = 6.0 * x[1]; },
    /// )?;
    /// assert!(report.evaluations.all_gradients() <= report.evaluations.all_values());
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    ///
    /// # Errors
    /// As [`minimize`](Descent::minimize).
    pub fn minimize_pair<V, R, S>(
        self,
        x0: V,
        value: impl FnMut(&V) -> R,
        gradient: impl FnMut(&V, &mut V) -> S,
    ) -> Result<Report<V>, DescentError<V, R::Error>>
    where
        V: Vector,
        R: Reply<V::Scalar>,
        S: Reply<(), Error = R::Error>,
        D: Direction<V>,
        F: StepFinder<V::Scalar>,
        A: Acceptance<V::Scalar>,
    {
        self.minimize(x0, separate(value, gradient))
    }

    /// As [`minimize`](Descent::minimize), with a look at the run after each move; `ControlFlow::Break(())` stops it. The log of
    /// the search that made the move can be read there ([`Run::log`]).
    ///
    /// ```
    /// use surefoot::{Descent, Run, RunEnding, joint};
    /// use surefoot::{acceptance::SufficientDecrease, direction::SteepestDescent, finder::Backtracking};
    /// use std::ops::ControlFlow;
    /// let descent = Descent::new(SteepestDescent, Backtracking::default(), SufficientDecrease::default());
    /// let bowl = joint(|x: &Vec<f64>, g: &mut Vec<f64>| { g[0] = 2.0 * x[0]; x[0] * x[0] });
    /// let report = descent.minimize_watched(vec![8.0], bowl, |run| {
    ///     println!("{} {:e}", run.iterations(), run.value());
    ///     if run.value() < 1.0 { ControlFlow::Break(()) } else { ControlFlow::Continue(()) }
    /// })?;
    /// assert_eq!(report.ending, RunEnding::Stopped);
    /// # Ok::<(), Box<dyn std::error::Error>>(())
    /// ```
    ///
    /// # Errors
    /// As [`minimize`](Descent::minimize).
    pub fn minimize_watched<V, O>(
        self,
        x0: V,
        objective: O,
        watch: impl FnMut(&Run<V, D, F, A>) -> ControlFlow<()>,
    ) -> Result<Report<V>, DescentError<V, O::Error>>
    where
        V: Vector,
        O: Objective<V>,
        D: Direction<V>,
        F: StepFinder<V::Scalar>,
        A: Acceptance<V::Scalar>,
    {
        self.start(x0).drive(objective, watch)
    }
}
