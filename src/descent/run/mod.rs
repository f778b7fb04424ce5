//! [`Run`]: a whole minimisation as a machine that asks for evaluations.

mod exchange;
mod finish;
mod probe;
mod remedy;

pub use exchange::{Given, Request, RunReply, Want};

use super::first_trial::{LastMove, Products, Stride, opening};
use super::reference::{Reference, ReferenceMemory};
use super::report::{Fault, Refusals, Remedies, RunEnding};
use super::rounding::{RoundingWatch, WithRescue};
use super::{Descent, FirstTrial, Stopping};
use crate::direction::Moved;
use crate::search::{Entry, Fate, Log};
use crate::vector::Survey;
use crate::{
    Acceptance, Condition, Cost, Direction, Ending, Evaluations, Need, Ray, Real, Sample, Side,
    StepFinder, StepSearch, Trial, Vector,
};
use num_traits::Float;

/// The settings of a run besides direction, finder and rule.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Settings {
    pub(super) limits: crate::Limits<f64>,
    pub(super) first_trial: FirstTrial,
    pub(super) stopping: Stopping,
    pub(super) reference: Reference,
    pub(super) longest_move: Option<f64>,
    pub(super) value_noise: f64,
    pub(super) cost: Cost,
}

/// A minimisation under way, as a machine: it asks, the caller evaluates and supplies.
///
/// It owns its settings and five vectors besides the direction's own (six where values may rise: the lowest point is
/// kept), allocates nothing after its start, and can be stored, sent, stopped and resumed at any evaluation.
///
/// ```
/// use surefoot::{Descent, Given, Want, acceptance::StrongWolfe, direction::Lbfgs, finder::MoreThuente};
/// let descent = Descent::new(Lbfgs::new(4)?, MoreThuente::new(), StrongWolfe::default());
/// let mut run = descent.start(vec![5.0, -3.0]);
/// while let Some(request) = run.request() {
///     let (x, g) = (request.point, request.gradient);
///     let given = match request.want {
///         Want::Value => Given::Value(x[0] * x[0] + 4.0 * x[1] * x[1]),
///         _ => {
///             (g[0], g[1]) = (2.0 * x[0], 8.0 * x[1]);
///             Given::Both(x[0] * x[0] + 4.0 * x[1] * x[1])
///         }
///     };
///     run.supply(given)?;
/// }
/// let (descent, report) = run.finish();
/// assert!(report.converged() && report.value < 1e-10);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Debug)]
pub struct Run<V: Vector, D, F, A> {
    direction: D,
    search: StepSearch<V::Scalar, F, WithRescue<A>>,
    settings: Settings,
    dim: usize,
    /// The point, its gradient and value.
    x: V,
    g: V,
    value: V::Scalar,
    gradient_max: Option<V::Scalar>,
    /// The direction, and the slope along it.
    d: V,
    slope: V::Scalar,
    /// The point asked about, the step it stands for, and its gradient.
    trial: V,
    trial_gradient: V,
    /// What the direction told about that gradient.
    survey: Survey<V::Scalar>,
    phase: Phase<V::Scalar>,
    last: Option<LastMove<V::Scalar>>,
    stride: Stride<V::Scalar>,
    /// What was probed along `d` before the search, where it is lower than here.
    probed: Option<Trial<V::Scalar>>,
    /// Whether the direction in use is that of a reset: no memory is left to give up.
    fresh: bool,
    /// Whether the search's steps are measured from `x` along `d` as they are now.
    search_is_from_here: bool,
    /// Failed searches running.
    troubles: u32,
    /// What decrease is measured from; read once a value is known.
    reference: ReferenceMemory<V::Scalar>,
    rounding: RoundingWatch<V::Scalar>,
    /// The slack that a failed search near rounding brought in, for the rest of the run.
    rescue: Option<V::Scalar>,
    /// The lowest point so far, kept where a later one may be higher.
    lowest: Option<Lowest<V>>,
    /// Moves at the level of rounding that improved neither value nor gradient, and the least of both so far.
    idle: u32,
    least_value: V::Scalar,
    least_gradient: V::Scalar,
    iterations: u64,
    evaluations: Evaluations,
    refusals: Refusals,
    remedies: Remedies,
}

#[derive(Clone, Debug)]
struct Lowest<V: Vector> {
    point: V,
    value: V::Scalar,
    gradient_max: Option<V::Scalar>,
}

#[derive(Clone, Copy, Debug, PartialEq)]
enum Phase<T> {
    /// Value and gradient at the start are wanted; the value once it is known.
    Start {
        value: Option<T>,
    },
    /// A search is over and the next not begun: the log of the last one can be read until the next request.
    Between(Next<T>),
    /// The value at `step` is wanted for a better first step of the next search than this one.
    Probing {
        step: T,
        first: T,
    },
    /// A search is under way, and `trial` is at its step.
    Searching,
    /// The run moves to a trial that is not the latest one: the gradient there is wanted.
    GoingBack {
        trial: Trial<T>,
        after_failure: bool,
        want: Want,
    },
    Ended(RunEnding<T>),
}

/// How a run goes on after a search.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Next<T> {
    /// Along a new direction; with the ending of the last search if it was given up at this point.
    Direction { failed: Option<Ending<T>> },
    /// Along the same direction again, from this first step.
    Again { first: T },
}

impl<V, D, F, A> Run<V, D, F, A>
where
    V: Vector,
    D: Direction<V>,
    F: StepFinder<V::Scalar>,
    A: Acceptance<V::Scalar>,
{
    pub(super) fn new(how: Descent<D, F, A>, x0: V, known: Option<(V::Scalar, V)>) -> Self {
        let settings = how.settings;
        let search = StepSearch::new(how.finder, WithRescue::new(how.rule))
            .with_limits(settings.limits.cast())
            .with_cost(settings.cost)
            .with_slope_when_accepted();
        let fault = if x0.dim() == 0 {
            Some(Fault::EmptyPoint)
        } else if !x0.max_abs().is_finite() {
            Some(Fault::PointNotFinite)
        } else {
            None
        };
        let mut run = Run {
            direction: how.direction,
            search,
            settings,
            dim: x0.dim(),
            g: x0.clone(),
            value: V::Scalar::nan(),
            gradient_max: None,
            d: x0.clone(),
            slope: V::Scalar::nan(),
            trial: x0.clone(),
            trial_gradient: x0.clone(),
            survey: Survey::unknown(),
            x: x0,
            phase: Phase::Start { value: None },
            last: None,
            stride: Stride::new(),
            probed: None,
            fresh: true,
            search_is_from_here: false,
            troubles: 0,
            reference: ReferenceMemory::checked(settings.reference, V::Scalar::nan()),
            rounding: RoundingWatch::new(V::Scalar::nan()),
            rescue: None,
            lowest: None,
            idle: 0,
            least_value: V::Scalar::infinity(),
            least_gradient: V::Scalar::infinity(),
            iterations: 0,
            evaluations: Evaluations::default(),
            refusals: Refusals::default(),
            remedies: Remedies::default(),
        };
        if let Some(fault) = fault {
            run.end(RunEnding::Fault(fault));
            return run;
        }
        run.direction.begin(&run.x);
        if settings.stopping.evaluations == 0 && known.is_none() {
            run.end(RunEnding::EvaluationsSpent);
        }
        if let Some((value, gradient)) = known {
            run.trial_gradient = gradient;
            run.started(value);
        }
        run
    }

    /// What to evaluate next; `None` after the end. Asking twice changes nothing.
    pub fn request(&mut self) -> Option<Request<'_, V>> {
        self.go_on();
        let want = self.want()?;
        Some(Request {
            want,
            ceiling: match self.phase {
                Phase::Searching => self.search.ceiling(),
                Phase::Probing { .. } => Some(self.value),
                _ => None,
            },
            point: &self.trial,
            gradient: &mut self.trial_gradient,
        })
    }

    fn want(&self) -> Option<Want> {
        match self.phase {
            Phase::Start { value: None } => Some(Want::Both),
            Phase::Start { value: Some(_) } => Some(Want::Gradient),
            Phase::Searching => self.search.request().map(|ask| match ask.need {
                Need::Value => Want::Value,
                Need::Slope => Want::Gradient,
                Need::Both => Want::Both,
            }),
            Phase::GoingBack { want, .. } => Some(want),
            Phase::Probing { .. } => Some(match self.settings.cost {
                Cost::Separate => Want::Value,
                Cost::Joint => Want::Both,
            }),
            Phase::Between(_) | Phase::Ended(_) => None,
        }
    }

    /// Takes what was evaluated.
    ///
    /// # Errors
    /// [`RunReply`] if it does not answer the request; the request stands. Faults of the input end the run instead and
    /// stand in its [`ending`](Run::ending).
    pub fn supply(&mut self, given: Given<V::Scalar>) -> Result<(), RunReply> {
        self.go_on();
        let Some(want) = self.want() else {
            return Err(RunReply::NothingWanted);
        };
        match (want, given) {
            (Want::Value | Want::Both, Given::Gradient | Given::NoGradient) => {
                return Err(RunReply::ValueWanted);
            }
            (Want::Gradient, Given::Value(_)) => return Err(RunReply::GradientWanted),
            _ => {}
        }
        self.count(want, given);
        if self.length_changed() {
            return Ok(());
        }
        match self.phase {
            Phase::Start { value } => self.start_with(value, given),
            Phase::Probing { step, first } => self.search_after(step, first, given),
            Phase::Searching => self.search_with(given),
            Phase::GoingBack {
                trial,
                after_failure,
                ..
            } => match given {
                // The value is known; the gradient is still wanted.
                Given::Value(_) => {
                    self.phase = Phase::GoingBack {
                        trial,
                        after_failure,
                        want: Want::Gradient,
                    };
                }
                Given::Gradient | Given::Both(_) if self.surveyed().max_abs.is_finite() => {
                    self.remedies.best_taken += u64::from(after_failure);
                    self.troubles = if after_failure { self.troubles } else { 0 };
                    self.move_to(trial, after_failure);
                }
                // It had a finite value, and `finish` hands it over: the gradient alone is missing.
                _ => self.end(RunEnding::SearchFailed(Ending::SlopeMissing {
                    step: trial.step,
                })),
            },
            Phase::Between(_) | Phase::Ended(_) => {}
        }
        if self.ending().is_none() && self.evaluations.calls() >= self.settings.stopping.evaluations
        {
            self.end(RunEnding::EvaluationsSpent);
        }
        Ok(())
    }

    /// Ends the run at the caller's wish; nothing found is lost.
    pub fn stop(&mut self) {
        if self.ending().is_none() {
            self.end(RunEnding::Stopped);
        }
    }

    /// Why the run ended; `None` while it is under way.
    pub fn ending(&self) -> Option<RunEnding<V::Scalar>> {
        match self.phase {
            Phase::Ended(ending) => Some(ending),
            _ => None,
        }
    }

    /// The point after the last move; the start before the first.
    pub fn point(&self) -> &V {
        &self.x
    }

    /// The value there; NaN before it was supplied.
    pub fn value(&self) -> V::Scalar {
        self.value
    }

    /// The gradient there, once it was supplied.
    pub fn gradient(&self) -> Option<&V> {
        self.gradient_max.map(|_| &self.g)
    }

    /// The largest magnitude in it.
    pub fn gradient_max(&self) -> Option<V::Scalar> {
        self.gradient_max
    }

    /// Number of moves so far.
    pub fn iterations(&self) -> u64 {
        self.iterations
    }

    /// What was evaluated so far, by kind.
    pub fn evaluations(&self) -> Evaluations {
        self.evaluations
    }

    /// What was refused so far.
    pub fn refusals(&self) -> Refusals {
        self.refusals
    }

    /// What was done so far where a search failed.
    pub fn remedies(&self) -> Remedies {
        self.remedies
    }

    /// The trials of the last search: after a move or a failure the whole of it, until the next request.
    pub fn log(&self) -> &Log<V::Scalar> {
        self.search.log()
    }

    /// Tells each condition of the rule at a trial of the log: what was found, and what the limit was.
    pub fn explain(&self, entry: &Entry<V::Scalar>, each: &mut dyn FnMut(Condition<V::Scalar>)) {
        self.search.explain(entry, each);
    }

    /// The last search. Its rule is the run's own, with what takes its place near rounding.
    pub fn search(&self) -> &StepSearch<V::Scalar, F, WithRescue<A>> {
        &self.search
    }

    /// The direction's state.
    pub fn direction(&self) -> &D {
        &self.direction
    }

    fn count(&mut self, want: Want, given: Given<V::Scalar>) {
        match (given, want) {
            (Given::Both(_), _) => self.evaluations.both += 1,
            (Given::Value(_), _) => self.evaluations.values += 1,
            (Given::Gradient, _) => self.evaluations.gradients += 1,
            // Nothing came back, but what was wanted was tried.
            (_, Want::Both) => self.evaluations.both += 1,
            (_, Want::Value) => self.evaluations.values += 1,
            (_, Want::Gradient) => self.evaluations.gradients += 1,
        }
    }

    /// Ends the run if a callback swapped the gradient for a vector of another length. The buffer gets the right length
    /// again, whatever becomes of the run.
    fn length_changed(&mut self) -> bool {
        let (expected, found) = (self.dim, self.trial_gradient.dim());
        if found == expected {
            return false;
        }
        self.trial_gradient = self.g.clone();
        self.end(RunEnding::Fault(Fault::LengthChanged { expected, found }));
        true
    }

    fn start_with(&mut self, known: Option<V::Scalar>, given: Given<V::Scalar>) {
        match (known, given) {
            (_, Given::Both(value)) => self.started(value),
            (Some(value), Given::Gradient) => self.started(value),
            (None, Given::Value(value)) if value.is_finite() => {
                self.phase = Phase::Start { value: Some(value) };
            }
            (Some(_), _) => self.end(RunEnding::Fault(Fault::GradientNotFinite)),
            (None, _) => self.end(RunEnding::Fault(Fault::ValueNotFinite)),
        }
    }

    /// The value at the start is known, and the gradient there stands in `trial_gradient`.
    fn started(&mut self, value: V::Scalar) {
        if self.length_changed() {
            return;
        }
        let gradient_max = self.trial_gradient.max_abs();
        if !value.is_finite() {
            return self.end(RunEnding::Fault(Fault::ValueNotFinite));
        }
        self.value = value;
        if !gradient_max.is_finite() {
            return self.end(RunEnding::Fault(Fault::GradientNotFinite));
        }
        core::mem::swap(&mut self.g, &mut self.trial_gradient);
        self.gradient_max = Some(gradient_max);
        self.reference = ReferenceMemory::checked(self.settings.reference, value);
        self.rounding = RoundingWatch::new(value);
        self.least_gradient = gradient_max;
        let rule = self.search.rule().rule();
        let monotone = self.settings.reference == Reference::Current
            && self.settings.value_noise == 0.0
            && !rule.reads_slack()
            && rule.decrease().is_some();
        if !monotone {
            self.lowest = Some(Lowest {
                point: self.x.clone(),
                value,
                gradient_max: self.gradient_max,
            });
        }
        self.least_value = value;
        match self.settings.stopping.at_point(value, gradient_max) {
            Some(criterion) => self.end(RunEnding::Converged(criterion)),
            None => self.between(Next::Direction { failed: None }),
        }
    }

    /// Ends a search; the next one begins with the next request.
    fn between(&mut self, next: Next<V::Scalar>) {
        if self.iterations >= self.settings.stopping.iterations {
            self.end(RunEnding::IterationsSpent);
        } else if self.evaluations.calls() >= self.settings.stopping.evaluations {
            self.end(RunEnding::EvaluationsSpent);
        } else {
            self.phase = Phase::Between(next);
        }
    }

    fn go_on(&mut self) {
        // A search may end without a question, where its points are not finite.
        while let Phase::Between(next) = self.phase {
            match next {
                Next::Direction { failed } => self.new_direction(failed),
                Next::Again { first } => self.begin_search(first),
            }
        }
    }

    fn new_direction(&mut self, failed: Option<Ending<V::Scalar>>) {
        let old_slope = self.slope;
        self.search_is_from_here = false;
        self.slope = self.point_downhill();
        if !self.descends() && !self.fresh {
            self.reset_direction();
            self.slope = self.point_downhill();
        }
        if !self.descends() {
            return self.end(RunEnding::NotDescent { slope: self.slope });
        }
        if let Some(ending) = failed
            && self.slope == old_slope
        {
            // The direction had no memory to give up: a second search would repeat the first.
            return self.fail(ending);
        }
        let (x, g, value) = (&self.x, &self.g, self.value);
        let gradient_max = self.gradient_max.unwrap_or_else(V::Scalar::nan);
        let first = self.settings.first_trial.step::<V>(
            self.direction.unit_step().then(|| self.stride.first()),
            self.slope,
            self.iterations,
            self.last,
            || opening(x, value, g, gradient_max),
        );
        // After a search that closed in on one step: the step that promises what that one did.
        let closed_in = failed
            .and_then(remedy::closed_in)
            .map(|a| a * (old_slope / self.slope))
            .filter(|a| *a > V::Scalar::of(0.0) && a.is_finite());
        match closed_in {
            Some(step) => self.begin_search(step),
            None => self.probe(first),
        }
    }

    fn begin_search(&mut self, first: V::Scalar) {
        let mut ray = Ray::new(self.value, self.slope);
        ray.reference = self.reference.value().max(self.value);
        ray.value_noise = V::Scalar::of(self.settings.value_noise);
        ray.slack = match self.rescue {
            // Never above the lowest value by more than the slack, however many moves.
            Some(slack) => {
                let used = self.value - self.least_value;
                Some((slack - used).max(V::Scalar::of(0.0)))
            }
            None if self.search.rule().rule().reads_slack() => self.rounding.slack(),
            None => None,
        };
        if self.settings.longest_move.is_some() {
            self.search.set_limits(self.limits());
        }
        if self.search.begin(ray, first).is_err() {
            return self.end(RunEnding::NotDescent { slope: self.slope });
        }
        self.search_is_from_here = true;
        self.phase = Phase::Searching;
        self.next_trial();
    }

    /// The limits of a search along `d`.
    fn limits(&self) -> crate::Limits<V::Scalar> {
        let limits = self.settings.limits.cast::<V::Scalar>();
        match self.settings.longest_move {
            Some(longest) => limits.at_most(V::Scalar::of(longest) / self.d.max_abs()),
            None => limits,
        }
    }

    fn point_downhill(&mut self) -> V::Scalar {
        let known = self.direction.direction(&self.x, &self.g, &mut self.d);
        known.unwrap_or_else(|| self.g.dot(&self.d))
    }

    fn descends(&self) -> bool {
        self.slope < V::Scalar::of(0.0) && self.slope.is_finite()
    }

    fn reset_direction(&mut self) {
        self.direction.reset();
        self.stride = Stride::new();
        self.remedies.resets += 1;
        self.fresh = true;
    }

    /// Puts `trial` where the search asks, if that is a new step.
    fn next_trial(&mut self) {
        while let Some(ask) = self.search.request() {
            if ask.need == Need::Slope {
                return;
            }
            if self.trial.finite_step_from(&self.x, ask.step, &self.d) {
                return;
            }
            // `x + a d` overflows: such a point is never asked about.
            let answered = self.search.supply(Sample::OutsideDomain);
            debug_assert!(answered.is_ok(), "a value was asked for");
            self.refusals.outside += 1;
        }
        self.searched();
    }

    /// What the direction tells about the gradient at the trial.
    fn surveyed(&mut self) -> &Survey<V::Scalar> {
        self.survey = self
            .direction
            .survey(&self.trial_gradient, &self.g, &self.d);
        &self.survey
    }

    fn search_with(&mut self, given: Given<V::Scalar>) {
        let sample = match given {
            Given::Value(value) => Sample::Value(value),
            Given::Gradient => Sample::Slope(self.surveyed().slope),
            Given::Both(value) => Sample::Both(value, self.surveyed().slope),
            Given::NoGradient => Sample::NoSlope,
            Given::OutsideDomain => Sample::OutsideDomain,
        };
        let tried = self.search.log().trials();
        let answered = self.search.supply(sample);
        debug_assert!(
            answered.is_ok(),
            "a reply that fits the run fits its search"
        );
        if self.search.log().trials() > tried {
            match self.search.log().latest().map(|entry| entry.fate) {
                Some(Fate::Refused(Side::TooLong)) => self.refusals.too_long += 1,
                Some(Fate::Refused(Side::TooShort)) => self.refusals.too_short += 1,
                Some(Fate::Outside) => self.refusals.outside += 1,
                Some(Fate::Accepted | Fate::Undecided) | None => {}
            }
        }
        if self.search.request().is_some() {
            self.next_trial();
        } else {
            self.searched();
        }
    }

    /// The search has ended.
    fn searched(&mut self) {
        let Some(outcome) = self.search.outcome() else {
            return;
        };
        match outcome.accepted() {
            Some(trial) if self.at_hand(&trial) => {
                self.troubles = 0;
                self.move_to(trial, false);
            }
            // A finder minimised on beyond the best accepted trial.
            Some(trial) => self.go_back_to(trial, false),
            None => match (outcome.ending, outcome.best) {
                // The caller's bound, not a failure: the rule wants more than the bound allows.
                (Ending::UpperBound { bound }, Some(trial))
                    if trial.step == bound && trial.value < self.value =>
                {
                    if self.at_hand(&trial) {
                        self.troubles = 0;
                        self.move_to(trial, false);
                    } else {
                        self.go_back_to(trial, false);
                    }
                }
                (ending, best) => self.remedy(ending, self.lower_with_probe(best)),
            },
        }
    }

    /// Moves to the trial, whose point and gradient stand in the buffers.
    fn move_to(&mut self, trial: Trial<V::Scalar>, after_failure: bool) {
        let gradient_max = self.survey.max_abs;
        let moved = match self.settings.stopping.looks_at_lengths() {
            true => trial.step * self.d.max_abs(),
            false => V::Scalar::nan(),
        };
        self.fresh = false;
        self.search_is_from_here = false;
        self.probed = None;
        let products = self
            .settings
            .first_trial
            .wants_products()
            .then(|| Products::of(trial.step, &self.d, &self.g, &self.trial_gradient));
        if self.direction.unit_step() {
            let slopes = (self.slope, self.survey.slope);
            self.stride.accepted(trial.step, slopes);
        }
        self.direction.moved(Moved {
            step: trial.step,
            direction: &mut self.d,
            x_old: &self.x,
            x_new: &self.trial,
            g_old: &mut self.g,
            g_new: &self.trial_gradient,
            survey: self.survey,
        });
        core::mem::swap(&mut self.x, &mut self.trial);
        core::mem::swap(&mut self.g, &mut self.trial_gradient);
        let old_value = core::mem::replace(&mut self.value, trial.value);
        self.gradient_max = Some(gradient_max);
        self.last = Some(LastMove {
            step: trial.step,
            slope: self.slope,
            decrease: old_value - trial.value,
            products,
        });
        self.iterations += 1;
        self.reference.accepted(self.value);
        self.rounding.moved(old_value, self.value);
        self.note_progress(gradient_max);
        let (x, stopping) = (&self.x, &self.settings.stopping);
        let criterion = stopping
            .at_point(self.value, gradient_max)
            .or_else(|| stopping.after_move(old_value, self.value, || (moved, x.max_abs())));
        if let Some(criterion) = criterion {
            return self.end(RunEnding::Converged(criterion));
        }
        if self.idle >= remedy::IDLE {
            return self.end(RunEnding::AtRounding);
        }
        let start_over = self.idle > 0 && self.idle.is_multiple_of(remedy::IDLE / 3);
        if after_failure || start_over {
            self.reset_direction();
        }
        self.between(Next::Direction { failed: None });
    }

    /// Keeps the lowest point where values may rise, and counts idle moves.
    fn note_progress(&mut self, gradient_max: V::Scalar) {
        let lower = self.value < self.least_value;
        let flatter = gradient_max < self.least_gradient;
        if lower {
            self.least_value = self.value;
            if let Some(lowest) = &mut self.lowest {
                lowest.point.assign(&self.x);
                lowest.value = self.value;
                lowest.gradient_max = Some(gradient_max);
            }
        }
        if flatter {
            self.least_gradient = gradient_max;
        }
        let level = self.value - self.least_value <= self.rounding_of_value();
        self.idle = if level && !lower && !flatter {
            self.idle + 1
        } else {
            0
        };
    }

    fn end(&mut self, ending: RunEnding<V::Scalar>) {
        self.phase = Phase::Ended(ending);
    }
}
