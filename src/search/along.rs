//! The short loop around [`StepSearch`] that calls the caller's closure.

use super::{BeginError, Need, Outcome, Sample, StepSearch};
use crate::{Acceptance, Ray, Real, StepFinder};
use core::convert::Infallible;

/// What a closure found at a step.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Probe<T, P = ()> {
    /// What the search needs; [`Sample::OutsideDomain`] where the function is not defined.
    pub sample: Sample<T>,
    /// Whatever else was computed there and is worth keeping: a point, a field, a factorisation.
    pub product: P,
}

/// What a closure along a ray may return.
///
/// | returned | meaning |
/// |---|---|
/// | `value` | a value only, for rules that read no slopes |
/// | `(value, slope)` | both |
/// | `(value, slope, product)` | both, and a by-product that is handed back if the step is accepted |
/// | [`Sample`], [`Probe`] | anything else, such as a step outside of the domain |
/// | `Result` of any of these | an error of the caller's own ends the search and comes back as itself |
pub trait Probed<T> {
    /// What is handed back; `()` for none.
    type Product;
    /// [`Infallible`] for plain returns.
    type Error;
    /// In the common form.
    fn probed(self) -> Result<Probe<T, Self::Product>, Self::Error>;
}

macro_rules! value_alone {
    ($($real:ty),*) => {$(
        impl Probed<$real> for $real {
            type Product = ();
            type Error = Infallible;
            fn probed(self) -> Result<Probe<$real>, Infallible> {
                Sample::Value(self).probed()
            }
        }
    )*};
}
value_alone!(f32, f64);

impl<T> Probed<T> for Sample<T> {
    type Product = ();
    type Error = Infallible;
    fn probed(self) -> Result<Probe<T>, Infallible> {
        Ok(Probe {
            sample: self,
            product: (),
        })
    }
}

impl<T> Probed<T> for (T, T) {
    type Product = ();
    type Error = Infallible;
    fn probed(self) -> Result<Probe<T>, Infallible> {
        Sample::Both(self.0, self.1).probed()
    }
}

impl<T, P> Probed<T> for (T, T, P) {
    type Product = P;
    type Error = Infallible;
    fn probed(self) -> Result<Probe<T, P>, Infallible> {
        Ok(Probe {
            sample: Sample::Both(self.0, self.1),
            product: self.2,
        })
    }
}

impl<T, P> Probed<T> for Probe<T, P> {
    type Product = P;
    type Error = Infallible;
    fn probed(self) -> Result<Probe<T, P>, Infallible> {
        Ok(self)
    }
}

impl<T, S: Probed<T, Error = Infallible>, E> Probed<T> for Result<S, E> {
    type Product = S::Product;
    type Error = E;
    fn probed(self) -> Result<Probe<T, S::Product>, E> {
        self.map(|s| match s.probed() {
            Ok(probe) => probe,
            Err(never) => match never {},
        })
    }
}

/// What [`StepSearch::along`] found.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Found<T, P = ()> {
    /// How the search ended, the accepted trial, the best one.
    pub outcome: Outcome<T>,
    /// The by-product of the accepted trial; of the best one where none was accepted.
    pub product: Option<P>,
}

/// Why [`StepSearch::along`] could not finish. What was learnt before the caller's error stays in the search's
/// [`best`](StepSearch::best) and [`log`](StepSearch::log).
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
pub enum SearchError<E> {
    /// The search could not begin.
    #[error(transparent)]
    Begin(#[from] BeginError),
    /// The closure failed.
    #[error("the function failed at a trial step: {0}")]
    Caller(E),
}

impl<T: Real, F: StepFinder<T>, A: Acceptance<T>> StepSearch<T, F, A> {
    /// Searches along `ray` from the step `first`, calling `probe` for each trial.
    ///
    /// `probe` gets the step and returns any of the forms of [`Probed`]. Where it gives a value only and a slope is
    /// needed, the search ends with [`Ending::SlopeMissing`](super::Ending::SlopeMissing).
    ///
    /// ```
    /// use surefoot::{Ray, StepSearch, acceptance::SufficientDecrease, finder::Backtracking};
    /// let mut search = StepSearch::new(Backtracking::default(), SufficientDecrease::default());
    /// // The slope at the start is -1; the closure also hands over the point that it computed.
    /// let found = search.along(Ray::new(1.0, -2.0), 4.0, |a: f64| {
    ///     let point = [1.0 - a];
    ///     (point[0] * point[0], -2.0 * point[0], point)
    /// })?;
    /// assert_eq!(found.outcome.accepted().unwrap().step, 1.0);
    /// assert_eq!(found.product, Some([0.0]));
    /// # Ok::<(), surefoot::SearchError<std::convert::Infallible>>(())
    /// ```
    ///
    /// # Errors
    /// [`SearchError::Begin`] for a ray or first step that is not fit, [`SearchError::Caller`] with the closure's own.
    pub fn along<S: Probed<T>>(
        &mut self,
        ray: Ray<T>,
        first: T,
        mut probe: impl FnMut(T) -> S,
    ) -> Result<Found<T, S::Product>, SearchError<S::Error>> {
        self.along_lazily(ray, first, |step, _| probe(step))
    }

    /// As [`along`](StepSearch::along), with a closure that is told what is needed, so that it need not compute more.
    ///
    /// ```
    /// use surefoot::{Need, Ray, Sample, StepSearch, acceptance::WeakWolfe, finder::Bisection};
    /// let mut slopes = 0;
    /// let mut search = StepSearch::new(Bisection::new(), WeakWolfe::default());
    /// let found = search.along_lazily(Ray::new(1.0, -2.0), 8.0, |a: f64, need| match need {
    ///     Need::Value => Sample::Value((1.0 - a).powi(2)),
    ///     _ => { slopes += 1; Sample::Slope(-2.0 * (1.0 - a)) }
    /// })?;
    /// assert_eq!((found.outcome.trials, slopes), (4, 1)); // 8, 4 and 2 were settled by their values
    /// # Ok::<(), surefoot::SearchError<std::convert::Infallible>>(())
    /// ```
    ///
    /// # Errors
    /// As [`along`](StepSearch::along).
    pub fn along_lazily<S: Probed<T>>(
        &mut self,
        ray: Ray<T>,
        first: T,
        mut probe: impl FnMut(T, Need) -> S,
    ) -> Result<Found<T, S::Product>, SearchError<S::Error>> {
        self.begin(ray, first)?;
        let mut kept: Option<(T, S::Product)> = None;
        while let Some(ask) = self.request() {
            let Probe { sample, product } = probe(ask.step, ask.need)
                .probed()
                .map_err(SearchError::Caller)?;
            // A value alone where a slope is asked for says that there is no slope; nothing alone, that there is no point.
            let sample = match (ask.need, sample) {
                (Need::Slope, Sample::Value(_)) => Sample::NoSlope,
                (Need::Value | Need::Both, Sample::Slope(_) | Sample::NoSlope) => {
                    Sample::OutsideDomain
                }
                (_, sample) => sample,
            };
            let answered = self.supply(sample);
            debug_assert!(answered.is_ok(), "every form was made to fit its request");
            let wanted = self.accepted.or(self.best);
            if wanted.is_some_and(|t| t.step == ask.step) || kept.is_none() {
                kept = Some((ask.step, product));
            }
        }
        let outcome = match self.outcome() {
            Some(outcome) => outcome,
            // `request` returned nothing after a successful `begin`, so the search has ended.
            None => return Err(BeginError::FirstStep.into()),
        };
        let wanted = outcome.accepted().or(outcome.best);
        Ok(Found {
            product: kept
                .filter(|(step, _)| wanted.is_some_and(|t| t.step == *step))
                .map(|(_, product)| product),
            outcome,
        })
    }
}
