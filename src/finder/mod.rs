//! Step finders: each is told of a refused trial and its side, and proposes the next step.
//!
//! | finder | how it looks | slopes of refused trials |
//! |---|---|---|
//! | [`ThreePoint`] | grows and zooms by shapes through the last three points; ours, and the one to begin with | wanted |
//! | [`Bisection`] | doubles until something is too long, then halves the bracket | not read |
//! | [`Backtracking`] | shortens by a fixed ratio | not read |
//! | [`InterpolatingBacktracking`] | shortens to the minimizer of a parabola or a cubic | not read |
//! | [`BracketZoom`] | grows a bracket, then zooms in by cubic interpolation | wanted |
//! | [`MoreThuente`] | the published method with guaranteed sufficient decrease | wanted |
//! | [`HagerZhang`] | the published method with double secant steps, good where the decrease drowns in rounding | wanted |
//! | [`Expansion`] | lengthens while that pays, shortens otherwise | not read |
//! | [`BrentSlopes`] | minimises exactly, by zeros of the slope | wanted |
//! | [`BrentValues`] | minimises exactly, by parabolas through values | not read |
//! | [`GoldenSection`] | minimises exactly, by golden section: the reference for the other two | not read |
//!
//! A finder knows nothing of budgets, bounds, vectors or the edge of the domain: those belong to
//! [`StepSearch`](crate::StepSearch), whose guard lets any finder work with any rule. A finder is one file; to bring
//! your own, implement [`StepFinder`].

mod backtracking;
mod bisection;
mod bracket_zoom;
mod brent_slopes;
mod brent_values;
mod expansion;
mod golden_section;
mod hager_zhang;
mod interpolating_backtracking;
pub mod interpolation;
mod more_thuente;
mod shapes;
mod three_point;

pub use backtracking::{Backtracking, BacktrackingError};
pub use bisection::Bisection;
pub use bracket_zoom::BracketZoom;
pub use brent_slopes::BrentSlopes;
pub use brent_values::BrentValues;
pub use expansion::{Expansion, ExpansionError};
pub use golden_section::{ExactStepError, GoldenSection};
pub use hager_zhang::HagerZhang;
pub use interpolating_backtracking::InterpolatingBacktracking;
pub use more_thuente::MoreThuente;
pub use three_point::ThreePoint;

use crate::{Ray, Real, Side, Trial};

/// A finder's answer.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Proposal<T> {
    /// Try this step. The search may replace it by one inside the bracket, the bounds and the domain.
    Try(T),
    /// Nothing left to try.
    Spent,
}

/// A step finder.
///
/// It is never shown a number that is not finite, may be handed any step inside the bracket (not only the one it
/// proposed), must take both sides, and must not panic.
///
/// ```
/// use surefoot::{StepFinder, Proposal, Ray, Trial, Side};
/// /// Thirds instead of halves.
/// #[derive(Default)]
/// struct Thirds;
/// impl StepFinder<f64> for Thirds {
///     fn begin(&mut self, _: &Ray<f64>, first: f64) -> f64 { first }
///     fn next(&mut self, _: &Ray<f64>, refused: &Trial<f64>, side: Side) -> Proposal<f64> {
///         Proposal::Try(match side { Side::TooLong => refused.step / 3.0, Side::TooShort => refused.step * 3.0 })
///     }
/// }
/// ```
pub trait StepFinder<T> {
    /// Forgets the last search; returns the first step to try, usually `first`.
    fn begin(&mut self, ray: &Ray<T>, first: T) -> T;

    /// The next step after a refusal.
    fn next(&mut self, ray: &Ray<T>, refused: &Trial<T>, side: Side) -> Proposal<T>;

    /// Called after an acceptance: exact minimisation goes on from here, and the best accepted trial wins.
    /// Default: [`Proposal::Spent`], which ends the search.
    fn polish(&mut self, ray: &Ray<T>, accepted: &Trial<T>) -> Proposal<T> {
        let _ = (ray, accepted);
        Proposal::Spent
    }

    /// Whether the search may replace its proposals by steps inside the bracket that verdicts draw. A finder that minimises
    /// along the ray without regard to verdicts says no: its proposals are then kept within the bounds and the domain
    /// only, and the guarantees of the guard are not its own. Default: yes.
    fn wants_guard(&self) -> bool {
        true
    }

    /// Whether slopes of refused trials are wanted too, where the verdict did not need them. Default: no.
    fn wants_slope(&self) -> bool {
        false
    }
}

macro_rules! forward_finder {
    () => {
        fn begin(&mut self, ray: &Ray<T>, first: T) -> T {
            (**self).begin(ray, first)
        }
        fn next(&mut self, ray: &Ray<T>, refused: &Trial<T>, side: Side) -> Proposal<T> {
            (**self).next(ray, refused, side)
        }
        fn polish(&mut self, ray: &Ray<T>, accepted: &Trial<T>) -> Proposal<T> {
            (**self).polish(ray, accepted)
        }
        fn wants_slope(&self) -> bool {
            (**self).wants_slope()
        }
        fn wants_guard(&self) -> bool {
            (**self).wants_guard()
        }
    };
}

impl<T, F: StepFinder<T> + ?Sized> StepFinder<T> for &mut F {
    forward_finder!();
}

#[cfg(feature = "alloc")]
impl<T, F: StepFinder<T> + ?Sized> StepFinder<T> for alloc::boxed::Box<F> {
    forward_finder!();
}

/// A finder chosen at run time.
#[cfg(feature = "alloc")]
pub type BoxedFinder<T> = alloc::boxed::Box<dyn StepFinder<T> + Send>;

/// The bracket as verdicts alone draw it: the last step that was too short (0 to begin with), the last too long.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Sides<T> {
    short: T,
    long: Option<T>,
}

impl<T: Real> Sides<T> {
    fn new() -> Self {
        Sides {
            short: T::zero(),
            long: None,
        }
    }

    fn note(&mut self, step: T, side: Side) {
        match side {
            Side::TooLong => self.long = Some(step),
            Side::TooShort => self.short = step,
        }
    }

    fn middle(&self) -> Option<T> {
        self.long
            .map(|long| self.short + T::of(0.5) * (long - self.short))
    }
}

/// Where a finder that lives on slopes goes when a trial came without one: half or twice the step, which the guard
/// turns into the middle of the bracket where that is not inside.
fn without_slope<T: Real>(refused: &Trial<T>, side: Side) -> Proposal<T> {
    Proposal::Try(match side {
        Side::TooLong => T::of(0.5) * refused.step,
        Side::TooShort => T::of(2.0) * refused.step,
    })
}
