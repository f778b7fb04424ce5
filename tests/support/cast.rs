//! Who plays: every finder and every rule of the crate, by name.

use surefoot::acceptance::{Goldstein, StrongWolfe, SufficientDecrease, WeakWolfe};
use surefoot::finder::{
    Backtracking, Bisection, BracketZoom, BrentSlopes, BrentValues, Expansion, GoldenSection,
    HagerZhang, InterpolatingBacktracking, MoreThuente, ThreePoint,
};
use surefoot::{Acceptance, BoxedFinder, BoxedRule, Real, Side, StepSearch, Trial, Verdict};

/// A search whose finder and rule are chosen at run time.
pub(crate) type AnySearch<T> = StepSearch<T, BoxedFinder<T>, BoxedRule<T>>;

/// The names of the finders that keep to the bracket of the guard.
pub(crate) const FINDERS: [&str; 8] = [
    "Bisection",
    "Backtracking",
    "InterpolatingBacktracking",
    "BracketZoom",
    "MoreThuente",
    "HagerZhang",
    "Expansion",
    "ThreePoint",
];

/// The names of the exact minimisers, which are exempt from the guard.
pub(crate) const EXEMPT: [&str; 3] = ["BrentSlopes", "BrentValues", "GoldenSection"];

/// A new finder of this name.
pub(crate) fn finder<T: Real>(name: &str) -> BoxedFinder<T> {
    match name {
        "Bisection" => Box::new(Bisection::new()),
        "Backtracking" => Box::new(Backtracking::new(T::of(0.5)).expect("0.5 is a ratio")),
        "InterpolatingBacktracking" => Box::new(InterpolatingBacktracking::new()),
        "BracketZoom" => Box::new(BracketZoom::new()),
        "MoreThuente" => Box::new(MoreThuente::new()),
        "HagerZhang" => Box::new(HagerZhang::new()),
        "Expansion" => Box::new(Expansion::default()),
        "ThreePoint" => Box::new(ThreePoint::new()),
        "BrentSlopes" => Box::new(BrentSlopes::default()),
        "BrentValues" => Box::new(BrentValues::default()),
        "GoldenSection" => Box::new(GoldenSection::default()),
        other => panic!("no finder is called {other}"),
    }
}

/// Every finder that keeps to the bracket of the guard, with its name.
pub(crate) fn finders<T: Real>() -> [(&'static str, BoxedFinder<T>); 8] {
    FINDERS.map(|name| (name, finder(name)))
}

/// Every finder of the crate, with its name.
pub(crate) fn every_finder<T: Real>() -> Vec<(&'static str, BoxedFinder<T>)> {
    let names = FINDERS.iter().chain(&EXEMPT);
    names.map(|name| (*name, finder(name))).collect()
}

/// A rule as plain data.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum Rule {
    SufficientDecrease { decrease: f64 },
    WeakWolfe { decrease: f64, curvature: f64 },
    StrongWolfe { decrease: f64, curvature: f64 },
    Goldstein { share: f64 },
}

impl Rule {
    /// The crate's rule.
    pub(crate) fn boxed<T: Real>(self) -> BoxedRule<T> {
        let fit = "parameters in range";
        match self {
            Rule::SufficientDecrease { decrease } => {
                Box::new(SufficientDecrease::new(T::of(decrease)).expect(fit))
            }
            Rule::WeakWolfe {
                decrease,
                curvature,
            } => Box::new(WeakWolfe::new(T::of(decrease), T::of(curvature)).expect(fit)),
            Rule::StrongWolfe {
                decrease,
                curvature,
            } => Box::new(StrongWolfe::new(T::of(decrease), T::of(curvature)).expect(fit)),
            Rule::Goldstein { share } => Box::new(Goldstein::new(T::of(share)).expect(fit)),
        }
    }

    /// The rule's inequalities, written out once more without the crate: does the step satisfy them?
    ///
    /// `start` and `here` are value and slope at 0 and at the step.
    pub(crate) fn holds<T: Real>(self, start: (T, T), step: T, here: (T, T)) -> bool {
        let ((value0, slope0), (value, slope)) = (start, here);
        let fell = |share: f64| value <= value0 + T::of(share) * step * slope0;
        match self {
            Rule::SufficientDecrease { decrease } => fell(decrease),
            Rule::WeakWolfe {
                decrease,
                curvature,
            } => fell(decrease) && slope >= T::of(curvature) * slope0,
            Rule::StrongWolfe {
                decrease,
                curvature,
            } => fell(decrease) && slope.abs() <= T::of(curvature) * slope0.abs(),
            Rule::Goldstein { share } => {
                fell(share) && value >= value0 + (T::one() - T::of(share)) * step * slope0
            }
        }
    }
}

/// A rule that answers by the step alone: a target to search for.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Between {
    pub(crate) low: f64,
    pub(crate) high: f64,
}

impl Acceptance<f64> for Between {
    fn judge(&self, _: &surefoot::Ray<f64>, trial: &Trial<f64>) -> Verdict {
        if trial.step < self.low {
            Verdict::Refuse(Side::TooShort)
        } else if trial.step > self.high {
            Verdict::Refuse(Side::TooLong)
        } else {
            Verdict::Accept
        }
    }
    fn uses_slope(&self) -> bool {
        false
    }
}
