#![doc = include_str!("../README.md")]
//!
//! # Which rule, which finder, when
//!
//! | rule | take it when |
//! |---|---|
//! | [`WeakWolfe`](acceptance::WeakWolfe) | quasi-Newton directions: it keeps their curvature positive at the least cost; kinks |
//! | [`StrongWolfe`](acceptance::StrongWolfe) | nonlinear conjugate gradients, with a curvature of 0.1 |
//! | [`GeneralisedWolfe`](acceptance::GeneralisedWolfe) | as strong Wolfe, where overshooting is worth less, or more, than falling short |
//! | [`ApproximateWolfe`](acceptance::ApproximateWolfe) | gradients far more accurate than values, close to a minimum |
//! | [`SufficientDecrease`](acceptance::SufficientDecrease) | gradients cost much more than values, and a first trial of 1 is natural (Newton, Gauss–Newton, L-BFGS) |
//! | [`Goldstein`](acceptance::Goldstein) | as above, and steps must not become too short |
//! | [`ForcingDecrease`](acceptance::ForcingDecrease), [`AnyDecrease`](acceptance::AnyDecrease) | there are no gradients at all |
//! | [`AnyFinite`](acceptance::AnyFinite) | fixed and diminishing steps |
//! | [`rule`](acceptance::rule), [`both`](acceptance::both) | a condition of your own |
//!
//! | finder | take it when |
//! |---|---|
//! | [`ThreePoint`](finder::ThreePoint) | slopes come with the values, or are cheap: **begin with this one**. It spends the fewest trials (`examples/finder_economy.rs`) |
//! | [`MoreThuente`](finder::MoreThuente), [`BracketZoom`](finder::BracketZoom), [`HagerZhang`](finder::HagerZhang) | you want a published method; the last one where the decrease drowns in rounding |
//! | [`InterpolatingBacktracking`](finder::InterpolatingBacktracking), [`Backtracking`](finder::Backtracking) | slopes are dear, and the first trial is seldom too short |
//! | [`Expansion`](finder::Expansion) | slopes are dear, and the first trial is a guess |
//! | [`Bisection`](finder::Bisection) | kinks, noise, slopes that cannot be trusted |
//! | [`BrentSlopes`](finder::BrentSlopes), [`BrentValues`](finder::BrentValues), [`GoldenSection`](finder::GoldenSection) | the minimizer along the ray itself is wanted |
//!
//! ## Guarantees
//!
//! What is known of each pair on a continuously differentiable ray that descends and is bounded below, in exact arithmetic
//! and with trials enough. **G**: the theorem on the [page of the search](search#why-a-search-ends): the search ends with an
//! acceptable step, for parameters with strict inequalities. Sources in brackets know the pair already. **–**: none known.
//!
//! | | sufficient decrease | Goldstein | weak Wolfe | strong Wolfe | generalised Wolfe | approximate Wolfe | forcing or any decrease | any finite | closures, both |
//! |---|---|---|---|---|---|---|---|---|---|
//! | three-point | G | G | G | G | G | G\* | – | first trial | – |
//! | bisection | G | G | G, also on kinked rays \[1\] | G | G | G\* | – | first trial | – |
//! | backtracking | G \[2\] | G | G | G | G | G\* | G† | first trial | – |
//! | interpolating backtracking | G \[3\] | G | G | G | G | G\* | G† | first trial | – |
//! | bracket and zoom | G | G | G | G \[4\] | G | G\* | – | first trial | – |
//! | Moré–Thuente | G | G | G | G \[5\] | G | G\* | – | first trial | – |
//! | Hager–Zhang | G | G | G | G | G | G\* \[6\] | – | first trial | – |
//! | expansion | G | G | G | G | G | G\* | G† | first trial | – |
//! | exact minimisers | a local minimizer where the ray is unimodal; whether the rule accepts it is not known | | | | | | | | |
//!
//! \* For the plain rule (weak Wolfe), and for the approximate one on rays where it accepts what weak Wolfe accepts; the
//! approximate conditions alone: none known. † Where every short enough step decreases, as on a descent ray.
//!
//! \[1\] A. S. Lewis & M. L. Overton, Math. Program. 141 (2013), theorem 4.7. \[2\] Nocedal & Wright 2006, section 3.1. \[3\] Dennis &
//! Schnabel 1983, section 6.3. \[4\] Nocedal & Wright 2006, section 3.5. \[5\] Moré & Thuente 1994, section 3. \[6\] Hager & Zhang 2005,
//! section 4. (Places in \[1\], \[3\] and \[5\] are recalled from memory.)
//!
//! With equal parameters (`decrease = curvature`), with a nonmonotone [`Reference`], with a rule or a finder of your own, or in
//! floating point: none known, but the search ends within its budget and says how.
//!
//! What an accepted step is worth to the method: with weak or strong Wolfe, or Goldstein, Zoutendijk's theorem holds
//! (Nocedal & Wright 2006, theorem 3.2): `sum cos^2(theta) |g|^2` is finite on functions that are bounded below and have a
//! Lipschitz continuous gradient, so a gradient method converges to stationary points. With sufficient decrease alone it
//! needs a backtracking finder whose first trial is not too short.
//!
//! When nothing works: the [guide].

#![no_std]

#[cfg(feature = "alloc")]
extern crate alloc;
#[cfg(any(feature = "std", test))]
extern crate std;

#[cfg(not(any(feature = "std", feature = "libm")))]
compile_error!("surefoot needs square roots: switch on the feature `std` or the feature `libm`");

pub mod acceptance;
#[cfg(feature = "alloc")]
pub mod audit;
pub mod descent;
pub mod direction;
#[cfg(feature = "experiment")]
pub mod experiment;
pub mod finder;
pub mod guide;
mod line;
mod objective;
#[cfg(feature = "plot")]
pub mod plot;
#[cfg(feature = "problems")]
pub mod problems;
mod real;
pub mod search;
pub mod vector;

pub use acceptance::Acceptance;
#[cfg(feature = "alloc")]
pub use acceptance::BoxedRule;
pub use descent::{
    Criterion, Descent, DescentError, Fault, FirstTrial, Given, Reference, Report, Request, Run,
    RunEnding, RunReply, SettingError, Stopping, Want,
};
#[cfg(feature = "alloc")]
pub use direction::BoxedDirection;
pub use direction::Direction;
#[cfg(feature = "alloc")]
pub use finder::BoxedFinder;
pub use finder::{Proposal, StepFinder};
pub use line::{Condition, Ray, RayFault, Relation, Side, Trial, Verdict};
pub use objective::{
    Cost, Counted, Evaluations, Joint, Objective, Reply, Separate, joint, separate,
};
pub use real::Real;
pub use search::{
    Ask, BeginError, Ending, Found, Limits, LimitsError, Need, Outcome, Probe, Probed, Sample,
    SearchError, StepSearch, WrongReply,
};
pub use vector::Vector;
