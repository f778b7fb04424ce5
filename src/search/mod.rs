//! [`StepSearch`]: the machine that asks for evaluations along a ray until a step is accepted or it knows why none is.
//!
//! It owns what is not a decision: the guard, the bounds on the step, the trial budget, the closing in on the edge of the
//! domain, the best trial so far, the [`Log`], and the [`Ending`] with its evidence.
//!
//! # The guard
//!
//! The search keeps the last step that was too short (0 to begin with) and the last that was too long. A finder's proposal
//! outside of the two is replaced by their middle, or by twice the longest step while nothing was too long. A bracket that
//! six times running kept more than 0.66 of its width is halved, whatever the finder proposes, unless every trial was too long:
//! then a finder may shorten as slowly as it says. So any finder works with any
//! rule: published finders, proven for a rule of their own, fail with others.
//!
//! # Why a search ends
//!
//! *Let `phi` be continuously differentiable and bounded below, `phi'(0) < 0`, and let trials be unlimited and exact. With
//! sufficient decrease, Goldstein, or a Wolfe rule with `c1 < c2`, and any finder that grows its steps without bound while
//! nothing is too long, and shortens them to 0 while nothing is too short (all of this crate that the guard watches do), the
//! search ends with an acceptable step.*
//!
//! Growth ends: a step that is too short has sufficient decrease, so if all steps of an unbounded sequence were too short,
//! `phi` would fall below `phi(0) + c1 a phi'(0)` for arbitrarily large `a`. From then on each trial becomes an end of the
//! bracket. While nothing is too short the finder itself shortens it; after that at least one trial in seven halves it. So the
//! ends close in on one step `b`. Write `s` for short ends, `l` for long ones, and `psi(a) = phi(a) - phi(0) - c1 a phi'(0)`.
//! - *Wolfe.* Short ends have `psi(s) <= 0` and `phi'(s) < c2 phi'(0)`, hence `phi'(b) <= c2 phi'(0)` (with `s = 0`, too,
//!   where `phi'(0) < c2 phi'(0)`). If infinitely many long ends have `psi(l) > 0`, then `psi` rises somewhere between the
//!   ends, so `phi'(b) >= c1 phi'(0) > c2 phi'(0)`; if they have `phi'(l) > -c2 phi'(0)`, then `phi'(b) >= -c2 phi'(0) > 0`.
//!   Both contradict the first.
//! - *Goldstein.* In the limit `phi(b)` lies on or below the lower line and on or above the upper one; they differ unless `b =
//!   0`, and near 0 the upper line is above `phi`.
//! - *Sufficient decrease.* Nothing is too short, so `b = 0`, and near 0 the line is above `phi`.
//!
//! In floating point the ends become neighbours instead: [`Ending::Narrow`].

mod along;
mod bounds;
mod diagnosis;
mod ending;
mod guard;
mod log;

pub use along::{Found, Probe, Probed, SearchError};
pub use bounds::{Limits, LimitsError};
pub use ending::{Ending, Outcome};
pub use log::{Entry, Fate, KEPT, Log, Origin};

use crate::{
    Acceptance, Condition, Cost, Proposal, Ray, RayFault, Real, Side, StepFinder, Trial, Verdict,
};
use diagnosis::Evidence;
use guard::{Guard, Place};

/// What is asked for at a step.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Need {
    /// `phi(a)`.
    Value,
    /// `phi'(a)`; the value there is known already.
    Slope,
    /// Both.
    Both,
}

/// A request of the machine.
#[derive(Clone, Copy, Debug, PartialEq)]
#[must_use = "evaluate what is asked for and supply it"]
pub struct Ask<T> {
    /// The step `a`: finite, positive, within the bounds.
    pub step: T,
    /// What is needed there.
    pub need: Need,
}

/// What is supplied. More than was asked for is welcome.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Sample<T> {
    /// `phi(a)`. A NaN or an infinity counts as [`OutsideDomain`](Sample::OutsideDomain).
    Value(T),
    /// `phi'(a)`. A NaN or an infinity counts as [`OutsideDomain`](Sample::OutsideDomain).
    Slope(T),
    /// `phi(a)` and `phi'(a)`.
    Both(T, T),
    /// A slope was asked for, and there is none to be had.
    NoSlope,
    /// The function is not defined at this step.
    OutsideDomain,
}

/// A reply that does not fit the request.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum WrongReply {
    /// Nothing is being asked for.
    #[error(
        "nothing is being asked for: begin a search, and supply only while `request` returns a step"
    )]
    NothingAsked,
    /// The value is asked for first.
    #[error("the value is asked for, and a slope alone was supplied: supply the value, or both")]
    ValueAsked,
    /// The slope is asked for.
    #[error(
        "the slope is asked for, and a value alone was supplied: supply the slope, or say NoSlope"
    )]
    SlopeAsked,
}

/// Why a search cannot begin.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum BeginError {
    /// The ray is not fit for a search.
    #[error(transparent)]
    Ray(#[from] RayFault),
    /// `!(0 < first < infinity)`.
    #[error("the first step must be positive and finite: 1 is usual for quasi-Newton directions")]
    FirstStep,
}

/// A search for a step along a ray, as a machine: it asks, the caller evaluates and supplies.
///
/// Nothing here calls the caller's code, so it links into a solver of any style. One machine serves any number of
/// searches, allocates nothing, and always ends within its budget, whatever it is supplied with.
///
/// The protocol: [`begin`](StepSearch::begin) a search; while [`request`](StepSearch::request) returns a step, evaluate
/// there and [`supply`](StepSearch::supply); then read the [`outcome`](StepSearch::outcome) and the
/// [`log`](StepSearch::log). The short loop around it is [`along`](StepSearch::along).
///
/// ```
/// use surefoot::{Need, Ray, Sample, StepSearch, acceptance::StrongWolfe, finder::MoreThuente};
///
/// let (value, slope) = (|a: f64| (a - 2.0).powi(4), |a: f64| 4.0 * (a - 2.0).powi(3));
/// let mut search = StepSearch::new(MoreThuente::new(), StrongWolfe::new(1e-4, 0.1)?);
/// search.begin(Ray::new(value(0.0), slope(0.0)), 0.1)?;
/// while let Some(ask) = search.request() {
///     search.supply(match ask.need {
///         Need::Value => Sample::Value(value(ask.step)),
///         Need::Slope => Sample::Slope(slope(ask.step)),
///         Need::Both => Sample::Both(value(ask.step), slope(ask.step)),
///     })?;
/// }
/// let accepted = search.outcome().and_then(|o| o.accepted()).expect("a step within the default budget");
/// assert!((accepted.step - 2.0).abs() < 1.0);
/// for entry in search.log().iter() {
///     print!("step {:.3} {:?}:", entry.trial.step, entry.fate);
///     search.explain(entry, &mut |condition| print!(" [{condition}]"));
///     println!();
/// }
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Debug)]
pub struct StepSearch<T, F, A> {
    finder: F,
    rule: A,
    limits: Limits<T>,
    /// The limits of the search under way.
    in_force: Limits<T>,
    cost: Cost,
    /// Whether an accepted trial must have its slope, also where the rule reads none.
    slope_when_accepted: bool,
    ray: Ray<T>,
    phase: Phase<T>,
    /// Who put the trial under way where it is.
    origin: Origin,
    guard: Guard<T>,
    evidence: Evidence<T>,
    best: Option<Trial<T>>,
    accepted: Option<Trial<T>>,
    log: Log<T>,
}

#[derive(Clone, Copy, Debug, PartialEq)]
enum Phase<T> {
    Idle,
    /// The value at `step` is asked for.
    Value {
        step: T,
    },
    /// The slope at a trial is asked for. Where the value settled the verdict, it stands and the slope is for somebody
    /// else: the finder after a refusal, the caller after an acceptance.
    Slope {
        trial: Trial<T>,
        settled: Option<Settled>,
    },
    Ended(Ending<T>),
}

/// A verdict that the value settled.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Settled {
    Accepted,
    Refused(Side),
}

impl<T: Real, F: StepFinder<T>, A: Acceptance<T>> StepSearch<T, F, A> {
    /// A machine with the default [`Limits`] that asks for values and slopes separately.
    pub fn new(finder: F, rule: A) -> Self {
        StepSearch {
            finder,
            rule,
            limits: Limits::default(),
            in_force: Limits::default(),
            cost: Cost::Separate,
            slope_when_accepted: false,
            ray: Ray::new(T::zero(), T::zero()),
            phase: Phase::Idle,
            origin: Origin::First,
            guard: Guard::new(T::one()),
            evidence: Evidence::new(&Ray::new(T::zero(), T::zero())),
            best: None,
            accepted: None,
            log: Log::new(),
        }
    }

    /// The same machine within other bounds and budget; they hold from the next `begin` on.
    #[must_use]
    pub fn with_limits(self, limits: Limits<T>) -> Self {
        StepSearch { limits, ..self }
    }

    /// The same machine for a function that gives value and slope for the price of one: it asks for both at once.
    #[must_use]
    pub fn with_cost(self, cost: Cost) -> Self {
        StepSearch { cost, ..self }
    }

    /// The same machine for a caller who needs the slope (and with it a gradient) of the accepted trial also where the
    /// rule reads none. A trial whose slope is not finite is then not accepted.
    #[must_use]
    pub fn with_slope_when_accepted(self) -> Self {
        StepSearch {
            slope_when_accepted: true,
            ..self
        }
    }

    /// The step that the present search was begun with.
    pub(crate) fn first_step(&self) -> T {
        self.guard.first()
    }

    pub(crate) fn set_limits(&mut self, limits: Limits<T>) {
        self.limits = limits;
    }

    pub(crate) fn set_cost(&mut self, cost: Cost) {
        self.cost = cost;
    }

    /// Begins a search along `ray` with the step `first` (positive and finite; moved into the bounds).
    ///
    /// A search under way is forgotten. After an error nothing is asked for.
    ///
    /// # Errors
    /// [`BeginError`] if the ray does not descend, a number is not finite, or the first step is not positive.
    pub fn begin(&mut self, ray: Ray<T>, first: T) -> Result<(), BeginError> {
        self.phase = Phase::Idle;
        self.best = None;
        self.accepted = None;
        self.log.clear();
        if let Some(fault) = ray.fault(self.rule.uses_start_slope()) {
            return Err(fault.into());
        }
        if !(first > T::zero() && first.is_finite()) {
            return Err(BeginError::FirstStep);
        }
        self.ray = ray;
        self.in_force = self.limits;
        self.ray.decrease = self.rule.decrease();
        let first = self.in_force.nearest(first);
        self.guard = Guard::new(first);
        self.evidence = Evidence::new(&self.ray);
        let step = self.finder.begin(&self.ray, first);
        let step = if step > T::zero() && step.is_finite() {
            self.in_force.nearest(step)
        } else {
            first
        };
        self.origin = Origin::First;
        self.phase = Phase::Value { step };
        Ok(())
    }

    /// What to evaluate next; `None` before the first search and after the end. Asking twice changes nothing.
    #[inline]
    pub fn request(&self) -> Option<Ask<T>> {
        match self.phase {
            Phase::Value { step } => Some(Ask {
                step,
                need: match self.cost {
                    Cost::Separate => Need::Value,
                    Cost::Joint => Need::Both,
                },
            }),
            Phase::Slope { trial, .. } => Some(Ask {
                step: trial.step,
                need: Need::Slope,
            }),
            Phase::Idle | Phase::Ended(_) => None,
        }
    }

    /// Takes what was evaluated at the step asked for.
    ///
    /// # Errors
    /// [`WrongReply`] if it does not answer the request; the request stands.
    #[inline]
    pub fn supply(&mut self, sample: Sample<T>) -> Result<(), WrongReply> {
        match (self.phase, sample) {
            (Phase::Idle | Phase::Ended(_), _) => return Err(WrongReply::NothingAsked),
            (Phase::Value { .. }, Sample::Slope(_) | Sample::NoSlope) => {
                return Err(WrongReply::ValueAsked);
            }
            (Phase::Slope { .. }, Sample::Value(_)) => return Err(WrongReply::SlopeAsked),
            (Phase::Value { step }, Sample::Value(value)) => self.valued(step, value, None),
            (Phase::Value { step }, Sample::Both(value, slope)) => {
                self.valued(step, value, Some(slope));
            }
            (Phase::Value { step }, Sample::OutsideDomain) => self.outside(Trial {
                step,
                value: T::nan(),
                slope: None,
            }),
            (Phase::Slope { trial, settled }, Sample::Slope(slope) | Sample::Both(_, slope)) => {
                self.sloped(trial, settled, slope);
            }
            (Phase::Slope { trial, .. }, Sample::OutsideDomain) => self.outside(trial),
            (Phase::Slope { trial, settled }, Sample::NoSlope) => match settled {
                Some(Settled::Refused(side)) => self.refuse(trial, side),
                Some(Settled::Accepted) if !self.slope_when_accepted => self.accept(trial),
                Some(Settled::Accepted) | None => {
                    self.undecided(trial, Ending::SlopeMissing { step: trial.step });
                }
            },
        }
        Ok(())
    }

    /// How the search ended; `None` before the first one and while one is under way.
    pub fn outcome(&self) -> Option<Outcome<T>> {
        match self.phase {
            Phase::Ended(ending) => Some(Outcome {
                ending,
                best: self.best,
                trials: self.log.trials(),
                accepted: self.accepted,
            }),
            _ => None,
        }
    }

    /// The trial of least value so far, also while the search is under way, and also where its slope is still asked for.
    pub fn best(&self) -> Option<Trial<T>> {
        match (self.phase, self.best) {
            (Phase::Slope { trial, .. }, best) if best.is_none_or(|b| trial.value < b.value) => {
                Some(trial)
            }
            (_, best) => best,
        }
    }

    /// The trials so far.
    pub fn log(&self) -> &Log<T> {
        &self.log
    }

    /// Tells each condition of the rule at a trial of the log: what was found, and what the limit was.
    pub fn explain(&self, entry: &Entry<T>, each: &mut dyn FnMut(Condition<T>)) {
        if entry.fate != Fate::Outside {
            self.rule.explain(&self.ray, &entry.trial, each);
        }
    }

    /// The ray of the present search, as the rule sees it.
    pub fn ray(&self) -> &Ray<T> {
        &self.ray
    }

    /// The rule.
    pub fn rule(&self) -> &A {
        &self.rule
    }

    /// The bounds and the budget of the next search.
    pub fn limits(&self) -> &Limits<T> {
        &self.limits
    }

    /// A value above this is certain to be refused at the step now asked for: an objective that is a sum of
    /// non-negative terms may stop adding there and supply what it has. It is never below `phi(0)`, so that a sum cut short
    /// cannot pass for a lower value.
    pub fn ceiling(&self) -> Option<T> {
        match self.phase {
            Phase::Value { step } => {
                let ceiling = self.rule.ceiling(&self.ray, step);
                ceiling.map(|c| c.max(self.ray.value))
            }
            _ => None,
        }
    }

    /// Finder and rule, back.
    pub fn into_parts(self) -> (F, A) {
        (self.finder, self.rule)
    }

    #[inline]
    fn valued(&mut self, step: T, value: T, slope: Option<T>) {
        let trial = Trial { step, value, slope };
        if value.is_finite() && slope.is_none_or(T::is_finite) {
            self.judge(trial);
        } else {
            self.outside(trial);
        }
    }

    fn sloped(&mut self, trial: Trial<T>, settled: Option<Settled>, slope: T) {
        let trial = Trial {
            slope: Some(slope),
            ..trial
        };
        if !slope.is_finite() {
            return self.outside(trial);
        }
        match settled {
            Some(Settled::Accepted) => self.accept(trial),
            Some(Settled::Refused(side)) => self.refuse(trial, side),
            None => self.judge(trial),
        }
    }

    #[inline]
    fn judge(&mut self, trial: Trial<T>) {
        let unknown = trial.slope.is_none();
        let settled = match self.rule.judge(&self.ray, &trial) {
            Verdict::Accept
                if unknown && (self.slope_when_accepted || self.polishes_by_slopes()) =>
            {
                Some(Settled::Accepted)
            }
            Verdict::Accept => return self.accept(trial),
            // The last trial's slope would serve no finder.
            Verdict::Refuse(side) if unknown && self.finder.wants_slope() && !self.last_trial() => {
                Some(Settled::Refused(side))
            }
            Verdict::Refuse(side) => return self.refuse(trial, side),
            Verdict::NeedsSlope if unknown => None,
            Verdict::NeedsSlope => {
                return self.undecided(trial, Ending::RuleUndecided { step: trial.step });
            }
        };
        self.phase = Phase::Slope { trial, settled };
    }

    fn undecided(&mut self, trial: Trial<T>, ending: Ending<T>) {
        self.log.write(trial, self.origin, Fate::Undecided);
        self.note_best(trial);
        self.end(if self.accepted.is_some() {
            Ending::Accepted
        } else {
            ending
        });
    }

    fn accept(&mut self, trial: Trial<T>) {
        // Where the slope is wrong, a step may pass whose promise is lost in the rounding of the value.
        if self.accepted.is_none()
            && trial.value >= self.ray.value
            && self.rule.uses_start_slope()
            && let Some(wrong) = self.evidence.of_the_slope(&self.ray)
        {
            let flat = self.evidence.of_flatness(&self.ray);
            return self.undecided(trial, flat.unwrap_or(wrong));
        }
        self.log.write(trial, self.origin, Fate::Accepted);
        self.note_best(trial);
        if self.accepted.is_none_or(|a| trial.value < a.value) {
            self.accepted = Some(trial);
        }
        if self.budget_spent() {
            self.end(Ending::Accepted);
        } else {
            self.guard.inside(trial.step);
            let proposal = self.finder.polish(&self.ray, &trial);
            self.polish(trial.step, proposal);
        }
    }

    #[inline]
    fn refuse(&mut self, trial: Trial<T>, side: Side) {
        self.log.write(trial, self.origin, Fate::Refused(side));
        self.note_best(trial);
        self.evidence.note(&self.ray, &trial, side);
        let guarded = self.accepted.is_none() && self.finder.wants_guard();
        if guarded {
            // Before the budget ends the search: its diagnosis asks whether anything was too short.
            self.guard.refused(trial.step, side);
        } else {
            self.guard.inside(trial.step);
        }
        if self.budget_spent() {
            return self.out_of_budget();
        }
        if !guarded {
            let proposal = self.finder.next(&self.ray, &trial, side);
            return self.polish(trial.step, proposal);
        }
        match self.finder.next(&self.ray, &trial, side) {
            Proposal::Try(step) => self.go_on(Some(step), Origin::Guard),
            Proposal::Spent => self.end(Ending::FinderSpent),
        }
    }

    fn outside(&mut self, trial: Trial<T>) {
        self.log.write(trial, self.origin, Fate::Outside);
        self.guard.outside(trial.step);
        if self.budget_spent() {
            self.out_of_budget();
        } else if self.accepted.is_some() && self.finder.wants_guard() {
            self.end(Ending::Accepted);
        } else {
            // The finder never sees a number that is not finite: the search itself closes in.
            self.go_on(None, Origin::Edge);
        }
    }

    /// Goes on to the finder's proposal, or to where the guard puts the trial instead; `own` names the latter.
    #[inline]
    fn go_on(&mut self, proposal: Option<T>, own: Origin) {
        let (step, origin) = match self.guard.place(proposal, &self.in_force) {
            Place::Proposed(step) => (step, Origin::Finder),
            Place::Bound(step) => (step, Origin::Bound),
            Place::Guarded(step) => (step, own),
            _ if self.accepted.is_some() => return self.end(Ending::Accepted),
            Place::UpperBound(bound) => return self.end(Ending::UpperBound { bound }),
            Place::LowerBound(bound) => return self.end(Ending::LowerBound { bound }),
            Place::Narrow { short, long } => return self.end(Ending::Narrow { short, long }),
            Place::Edge { inside, outside } => return self.end(Ending::Edge { inside, outside }),
            Place::Endless(step) => return self.end(Ending::Endless { step }),
        };
        self.origin = origin;
        self.phase = Phase::Value { step };
    }

    /// Exact minimisation: on the finder's own way, without the guard but within the bounds and the domain.
    fn polish(&mut self, here: T, proposal: Proposal<T>) {
        let proposal = match proposal {
            Proposal::Try(step) => Proposal::Try(self.in_force.nearest(step)),
            Proposal::Spent => Proposal::Spent,
        };
        match proposal {
            Proposal::Try(step)
                if self.guard.edge().is_some_and(|edge| step >= edge)
                    && !self.finder.wants_guard() =>
            {
                // The finder was not told of the edge: it sees by the next trial that its step was not to be had.
                self.go_on(None, Origin::Edge);
            }
            Proposal::Try(step)
                if step > T::zero()
                    && step.is_finite()
                    && step != here
                    && self.guard.edge().is_none_or(|edge| step < edge) =>
            {
                self.origin = Origin::Polish;
                self.phase = Phase::Value { step };
            }
            _ if self.accepted.is_some() => self.end(Ending::Accepted),
            _ => match self.evidence.too_short() {
                // The bound, not the finder, kept the search from what the rule wants.
                Some(bound) if bound >= self.in_force.upper() => {
                    self.end(Ending::UpperBound { bound });
                }
                _ => self.end(Ending::FinderSpent),
            },
        }
    }

    /// Whether the finder minimises on after acceptances and lives on slopes. The last trial's slope would not serve it.
    fn polishes_by_slopes(&self) -> bool {
        self.finder.wants_slope() && !self.finder.wants_guard() && !self.last_trial()
    }

    fn note_best(&mut self, trial: Trial<T>) {
        if self.best.is_none_or(|b| trial.value < b.value) {
            self.best = Some(trial);
        }
    }

    fn budget_spent(&self) -> bool {
        self.log.trials() >= self.in_force.trials()
    }

    /// Whether the trial under way, once written, is the last.
    fn last_trial(&self) -> bool {
        self.log.trials() + 1 >= self.in_force.trials()
    }

    fn out_of_budget(&mut self) {
        self.end(if self.accepted.is_some() {
            Ending::Accepted
        } else {
            Ending::BudgetSpent {
                trials: self.log.trials(),
            }
        });
    }

    fn end(&mut self, ending: Ending<T>) {
        let nothing_found = matches!(
            ending,
            Ending::BudgetSpent { .. }
                | Ending::LowerBound { .. }
                | Ending::Narrow { .. }
                | Ending::FinderSpent
        );
        let told = if nothing_found && self.rule.uses_start_slope() {
            // A side that never changed says that nothing short enough was found.
            let (seen, ray) = (&self.evidence, &self.ray);
            let one_sided = seen.too_short().is_none();
            let flat = seen.of_flatness(ray).filter(|_| one_sided);
            let told = flat.or_else(|| seen.of_the_slope(ray));
            told.or_else(|| seen.of_rounding(ray).filter(|_| one_sided))
        } else {
            None
        };
        self.phase = Phase::Ended(told.unwrap_or(ending));
    }
}
