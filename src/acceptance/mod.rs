//! Acceptance rules: each looks at one trial and says accept, too long, too short, or "I need the slope".
//!
//! | rule | accepts when | reads slopes |
//! |---|---|---|
//! | [`SufficientDecrease`] (Armijo) | the value fell enough | no |
//! | [`Goldstein`] | the value fell enough, but not as much as the shortest steps would | no |
//! | [`WeakWolfe`] | the value fell enough and the slope rose to a set share | where the value does not settle it |
//! | [`StrongWolfe`] | as weak Wolfe, and the slope is not too positive either | where the value does not settle it |
//! | [`GeneralisedWolfe`] | as strong Wolfe, with separate bounds on negative and positive slopes | where the value does not settle it |
//! | [`ApproximateWolfe`] | weak Wolfe, and near rounding a form of it that goes by slopes | where the value does not settle it |
//! | [`ForcingDecrease`], [`AnyDecrease`] | the value fell, by a forcing function or at all | no, not even at the start |
//! | [`AnyFinite`] | the value is finite | no, not even at the start |
//! | [`rule`], [`value_rule`] | a closure of yours says so | as you say |
//! | [`both`] | two rules do | where one of them does |
//!
//! A rule is one small file. To bring your own, implement [`Acceptance`]: `judge` is enough.

mod approximate_wolfe;
mod combined;
mod generalised_wolfe;
mod goldstein;
mod sufficient_decrease;
mod value_only;
mod wolfe;

pub use approximate_wolfe::ApproximateWolfe;
pub use combined::{Both, ByClosure, both, rule, value_rule};
pub use generalised_wolfe::{GeneralisedWolfe, GeneralisedWolfeError};
pub use goldstein::{Goldstein, GoldsteinError};
pub use sufficient_decrease::{SufficientDecrease, SufficientDecreaseError};
pub use value_only::{AnyDecrease, AnyFinite, ForcingDecrease, ForcingDecreaseError};
pub use wolfe::{StrongWolfe, WeakWolfe, WolfeError};

use crate::{Condition, Ray, Real, Trial, Verdict};

/// An acceptance rule.
///
/// `judge` is pure: the same ray and trial give the same verdict. A trial's numbers are finite. `NeedsSlope` is said
/// only while the slope is unknown, and a verdict that the value settles never changes when the slope arrives.
///
/// ```
/// use surefoot::{Acceptance, Ray, Trial, Verdict, Side};
/// /// Takes whatever lowers the value to one half or less.
/// struct Halves;
/// impl Acceptance<f64> for Halves {
///     fn judge(&self, ray: &Ray<f64>, trial: &Trial<f64>) -> Verdict {
///         if trial.value <= 0.5 * ray.value { Verdict::Accept } else { Verdict::Refuse(Side::TooLong) }
///     }
///     fn uses_slope(&self) -> bool { false }
/// }
/// ```
pub trait Acceptance<T> {
    /// The verdict on one finite trial.
    fn judge(&self, ray: &Ray<T>, trial: &Trial<T>) -> Verdict;

    /// Whether some verdict needs the slope of a trial; if not, an objective without gradients will do.
    fn uses_slope(&self) -> bool;

    /// Whether it needs a slope at the start of the ray; if not, [`Ray::without_slope`] will do. Default: yes.
    fn uses_start_slope(&self) -> bool {
        true
    }

    /// Whether it reads [`Ray::slack`], as rules do that know what to do near rounding. Default: no.
    fn reads_slack(&self) -> bool {
        false
    }

    /// The sufficient-decrease parameter, for finders that work with it. Default: none.
    fn decrease(&self) -> Option<T> {
        None
    }

    /// A value above this is certain to be refused as too long at `step`, whatever the slope; a sum of non-negative
    /// terms may stop there. Default: none.
    fn ceiling(&self, ray: &Ray<T>, step: T) -> Option<T> {
        let _ = (ray, step);
        None
    }

    /// Tells each condition with what was found and what the limit was. Default: nothing.
    fn explain(&self, ray: &Ray<T>, trial: &Trial<T>, each: &mut dyn FnMut(Condition<T>)) {
        let _ = (ray, trial, each);
    }
}

macro_rules! forward_acceptance {
    () => {
        fn judge(&self, ray: &Ray<T>, trial: &Trial<T>) -> Verdict {
            (**self).judge(ray, trial)
        }
        fn uses_slope(&self) -> bool {
            (**self).uses_slope()
        }
        fn uses_start_slope(&self) -> bool {
            (**self).uses_start_slope()
        }
        fn reads_slack(&self) -> bool {
            (**self).reads_slack()
        }
        fn decrease(&self) -> Option<T> {
            (**self).decrease()
        }
        fn ceiling(&self, ray: &Ray<T>, step: T) -> Option<T> {
            (**self).ceiling(ray, step)
        }
        fn explain(&self, ray: &Ray<T>, trial: &Trial<T>, each: &mut dyn FnMut(Condition<T>)) {
            (**self).explain(ray, trial, each);
        }
    };
}

impl<T, A: Acceptance<T> + ?Sized> Acceptance<T> for &A {
    forward_acceptance!();
}

#[cfg(feature = "alloc")]
impl<T, A: Acceptance<T> + ?Sized> Acceptance<T> for alloc::boxed::Box<A> {
    forward_acceptance!();
}

/// A rule chosen at run time.
#[cfg(feature = "alloc")]
pub type BoxedRule<T> = alloc::boxed::Box<dyn Acceptance<T> + Send + Sync>;

/// The first Wolfe condition as a [`Condition`].
fn sufficient_decrease<T: Real>(ray: &Ray<T>, decrease: T, trial: &Trial<T>) -> Condition<T> {
    let limit = ray.decrease_limit(decrease, trial.step);
    Condition::at_most("sufficient decrease", trial.value, limit)
}

/// The second Wolfe condition: the slope has risen to a share of what it was.
fn slope_has_risen<T: Real>(ray: &Ray<T>, curvature: T, slope: T) -> Condition<T> {
    Condition::at_least("curvature", slope, curvature * ray.slope)
}

/// What a strong rule adds: the slope is not too positive either.
fn slope_not_too_positive<T: Real>(ray: &Ray<T>, curvature: T, slope: T) -> Condition<T> {
    Condition::at_most("slope not too positive", slope, -(curvature * ray.slope))
}
