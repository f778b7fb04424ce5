//! Wrong parameters, wrong replies and hostile numbers: each gets its typed error with a sentence, or a clean ending;
//! nothing panics and no step outside of the bounds is ever asked for.
#![cfg(feature = "alloc")]

mod hostile;
mod sentences;
#[path = "../support/mod.rs"]
mod support;

use support::cast::{Rule, finders};
use surefoot::acceptance::{
    ApproximateWolfe, ForcingDecrease, ForcingDecreaseError, GeneralisedWolfe,
    GeneralisedWolfeError, Goldstein, GoldsteinError, StrongWolfe, SufficientDecrease,
    SufficientDecreaseError, WeakWolfe, WolfeError,
};
use surefoot::finder::{Backtracking, BacktrackingError, Bisection};
use surefoot::search::Fate;
use surefoot::{
    Acceptance, BeginError, Cost, Ending, Limits, LimitsError, Need, Proposal, Ray, RayFault,
    Sample, SearchError, Side, StepFinder, StepSearch, Trial, Verdict, WrongReply,
};

const NAN: f64 = f64::NAN;
const INFINITY: f64 = f64::INFINITY;

#[test]
fn rules_refuse_parameters_out_of_range() {
    for bad in [0.0, -0.0, -0.1, 1.0, 1.5, NAN, INFINITY, -INFINITY] {
        let error = SufficientDecreaseError::Decrease;
        assert_eq!(SufficientDecrease::new(bad), Err(error), "{bad}");
    }
    for bad in [0.0, -0.1, 0.5, 0.75, NAN, INFINITY, -INFINITY] {
        assert_eq!(Goldstein::new(bad), Err(GoldsteinError::Share), "{bad}");
    }
    for (decrease, curvature, error) in [
        (0.0, 0.5, WolfeError::Decrease),
        (-1.0, 0.5, WolfeError::Decrease),
        (NAN, 0.5, WolfeError::Decrease),
        (-INFINITY, NAN, WolfeError::Decrease),
        (0.1, 1.0, WolfeError::Curvature),
        (0.1, INFINITY, WolfeError::Curvature),
        (0.1, NAN, WolfeError::Curvature),
        (INFINITY, 0.5, WolfeError::DecreaseAboveCurvature),
        (0.5, 0.4, WolfeError::DecreaseAboveCurvature),
        (0.5, 0.0, WolfeError::DecreaseAboveCurvature),
        (0.5, -0.5, WolfeError::DecreaseAboveCurvature),
    ] {
        assert_eq!(
            WeakWolfe::new(decrease, curvature),
            Err(error),
            "{decrease} {curvature}"
        );
        assert_eq!(
            StrongWolfe::new(decrease, curvature),
            Err(error),
            "{decrease} {curvature}"
        );
    }
    use GeneralisedWolfeError::{Decrease, Left, Right};
    for (decrease, left, right, error) in [
        (0.0, 0.5, 0.5, Decrease),
        (NAN, 0.5, 0.5, Decrease),
        (0.1, 1.0, 0.5, Left),
        (0.1, 0.05, 0.5, Left),
        (0.1, NAN, 0.5, Left),
        (0.1, 0.5, -0.1, Right),
        (0.1, 0.5, NAN, Right),
    ] {
        assert_eq!(GeneralisedWolfe::new(decrease, left, right), Err(error));
    }
    assert!(GeneralisedWolfe::new(0.1, 0.1, INFINITY).is_ok());
    for (decrease, curvature, error) in [
        (0.0, 0.9, WolfeError::Decrease),
        (0.5, 0.9, WolfeError::DecreaseNotBelowHalf),
        (NAN, 0.9, WolfeError::Decrease),
        (0.1, 1.0, WolfeError::Curvature),
        (0.1, NAN, WolfeError::Curvature),
        (0.1, 0.05, WolfeError::DecreaseAboveCurvature),
    ] {
        assert_eq!(ApproximateWolfe::new(decrease, curvature), Err(error));
    }
    for bad in [0.0, -1.0, NAN, INFINITY] {
        assert_eq!(
            ForcingDecrease::new(bad),
            Err(ForcingDecreaseError::Forcing),
            "{bad}"
        );
    }
    for bad in [0.0, -0.5, 1.0, 2.0, NAN, INFINITY, -INFINITY] {
        assert_eq!(
            Backtracking::new(bad),
            Err(BacktrackingError::Ratio),
            "{bad}"
        );
    }
}

#[test]
fn rules_take_parameters_at_the_ends_of_their_range() {
    let (least, below_one) = (f64::from_bits(1), 1.0 - f64::EPSILON / 2.0);
    assert!(SufficientDecrease::new(least).is_ok() && SufficientDecrease::new(below_one).is_ok());
    assert!(Goldstein::new(least).is_ok() && Goldstein::new(below_one / 2.0).is_ok());
    assert!(
        StrongWolfe::new(least, least).is_ok() && StrongWolfe::new(below_one, below_one).is_ok()
    );
    assert!(WeakWolfe::new(least, below_one).is_ok());
    assert!(Backtracking::new(least).is_ok() && Backtracking::new(below_one).is_ok());
}

#[test]
fn limits_refuse_what_leaves_no_step() {
    for (lower, upper, trials, error) in [
        (-1.0, 1.0, 1, LimitsError::Lower),
        (NAN, 1.0, 1, LimitsError::Lower),
        (INFINITY, INFINITY, 1, LimitsError::Lower),
        (0.0, 0.0, 1, LimitsError::Upper),
        (0.0, -1.0, 1, LimitsError::Upper),
        (0.0, NAN, 1, LimitsError::Upper),
        (2.0, 1.0, 1, LimitsError::NoStepLeft),
        (0.0, 1.0, 0, LimitsError::Trials),
    ] {
        assert_eq!(
            Limits::new(lower, upper, trials),
            Err(error),
            "{lower} {upper} {trials}"
        );
    }
    let one_step = Limits::new(1.0, 1.0, 1).unwrap();
    assert_eq!(
        (one_step.lower(), one_step.upper(), one_step.trials()),
        (1.0, 1.0, 1)
    );
}

#[test]
fn a_search_does_not_begin_on_a_faulty_ray() {
    let ray = Ray::new(1.0, -1.0);
    let faulty = |change: fn(&mut Ray<f64>)| {
        let mut ray = ray;
        change(&mut ray);
        ray
    };
    for (ray, fault) in [
        (Ray::new(NAN, -1.0), RayFault::ValueNotFinite),
        (Ray::new(INFINITY, -1.0), RayFault::ValueNotFinite),
        (Ray::new(NAN, NAN), RayFault::ValueNotFinite),
        (Ray::new(1.0, NAN), RayFault::SlopeNotFinite),
        (Ray::new(1.0, -INFINITY), RayFault::SlopeNotFinite),
        (Ray::new(1.0, 0.0), RayFault::NotDescent),
        (Ray::new(1.0, -0.0), RayFault::NotDescent),
        (Ray::new(1.0, 2.0), RayFault::NotDescent),
        (ray.with_reference(NAN), RayFault::Reference),
        (ray.with_reference(INFINITY), RayFault::Reference),
        (ray.with_reference(0.5), RayFault::Reference),
        (ray.with_value_noise(-1.0), RayFault::Noise),
        (ray.with_value_noise(NAN), RayFault::Noise),
        (ray.with_value_noise(INFINITY), RayFault::Noise),
        (faulty(|ray| ray.slope_noise = -1.0), RayFault::Noise),
        (faulty(|ray| ray.slope_noise = NAN), RayFault::Noise),
        (ray.with_slack(-1.0), RayFault::Noise),
        (ray.with_slack(NAN), RayFault::Noise),
        (ray.with_slack(INFINITY), RayFault::Noise),
        (Ray::without_slope(1.0), RayFault::NotDescent),
    ] {
        let mut search = StepSearch::new(Bisection::new(), WeakWolfe::default());
        assert_eq!(
            search.begin(ray, 1.0),
            Err(BeginError::Ray(fault)),
            "{ray:?}"
        );
        assert!(search.request().is_none() && search.outcome().is_none());
        let untouched = |_| -> f64 { unreachable!("nothing is asked on a faulty ray") };
        let error = search.along(ray, 1.0, untouched).unwrap_err();
        assert_eq!(error, SearchError::Begin(BeginError::Ray(fault)));
    }
}

#[test]
fn a_search_does_not_begin_with_a_faulty_first_step() {
    for first in [0.0, -0.0, -1.0, NAN, INFINITY, -INFINITY] {
        let mut search = StepSearch::new(Bisection::new(), WeakWolfe::default());
        let ray = Ray::new(1.0, -1.0);
        search.begin(ray, 1.0).unwrap();
        assert_eq!(
            search.begin(ray, first),
            Err(BeginError::FirstStep),
            "{first}"
        );
        // The search that was under way is forgotten.
        assert!(search.request().is_none() && search.outcome().is_none());
        assert_eq!(
            search.supply(Sample::Value(0.0)),
            Err(WrongReply::NothingAsked)
        );
        assert!(search.begin(ray, 1.0).is_ok(), "the machine serves on");
    }
}

#[test]
fn every_reply_fits_its_request_or_is_refused_and_the_request_stands() {
    let samples = [
        Sample::Value(-0.4),
        Sample::Slope(-0.5),
        Sample::Both(-0.4, -0.5),
        Sample::NoSlope,
        Sample::OutsideDomain,
    ];
    use WrongReply::{NothingAsked, SlopeAsked, ValueAsked};
    let (fits, value, slope, nothing) =
        (Ok(()), Err(ValueAsked), Err(SlopeAsked), Err(NothingAsked));
    let mut compared = 0;
    for (machine, answers) in [
        (idle(), [nothing; 5]),
        (asking(Need::Value), [fits, value, fits, value, fits]),
        (asking(Need::Both), [fits, value, fits, value, fits]),
        (asking(Need::Slope), [slope, fits, fits, fits, fits]),
        (ended(), [nothing; 5]),
    ] {
        for (sample, answer) in samples.into_iter().zip(answers) {
            let mut search = machine.clone();
            let (request, outcome, best) = (search.request(), search.outcome(), search.best());
            assert_eq!(search.supply(sample), answer, "{request:?} {sample:?}");
            if answer.is_err() {
                assert_eq!(search.request(), request, "the request stands");
                assert_eq!(search.outcome(), outcome);
                assert_eq!(search.best(), best);
                assert_eq!(search.log(), machine.log());
            }
            compared += 1;
        }
    }
    assert_eq!(compared, 25);
}

#[test]
fn a_value_alone_where_both_were_asked_for_is_followed_by_the_slope() {
    let mut search = asking(Need::Both);
    search.supply(Sample::Value(-0.4)).unwrap();
    assert_eq!(search.request().unwrap().need, Need::Slope);
}

#[test]
fn numbers_that_are_not_finite_are_never_accepted_at_any_trial() {
    let valley = |a: f64| (0.5 * a * a - a, a - 1.0);
    let strict = Rule::StrongWolfe {
        decrease: 1e-3,
        curvature: 1e-3,
    };
    let bowls = [
        strict,
        Rule::WeakWolfe {
            decrease: 0.1,
            curvature: 0.1,
        },
        Rule::Goldstein { share: 0.45 },
    ];
    for rule in bowls {
        for (name, finder) in finders::<f64>() {
            let mut search = StepSearch::new(finder, rule.boxed());
            let undisturbed = search
                .along(Ray::new(0.0, -1.0), 0.013, valley)
                .unwrap()
                .outcome
                .trials;
            for at in 1..=undisturbed {
                for (value, slope) in [(true, false), (false, true), (true, true)] {
                    for bad in [NAN, INFINITY, -INFINITY] {
                        let mut trial = 0;
                        let found = search.along(Ray::new(0.0, -1.0), 0.013, |a| {
                            trial += 1;
                            let (v, s) = valley(a);
                            let here = trial == at;
                            (
                                if here && value { bad } else { v },
                                if here && slope { bad } else { s },
                            )
                        });
                        let outcome = found.unwrap().outcome;
                        let what =
                            format!("{name} {rule:?}, {bad} at trial {at}: {}", outcome.ending);
                        let entry = search.log().iter().nth(at as usize - 1).unwrap();
                        assert_eq!(entry.fate, Fate::Outside, "{what}");
                        for trial in outcome.accepted().iter().chain(&outcome.best) {
                            assert!(trial.value.is_finite(), "{what}");
                            assert!(trial.slope.is_none_or(f64::is_finite), "{what}");
                            assert!(trial.step != entry.trial.step, "{what}");
                        }
                    }
                }
            }
        }
    }
}

/// Says that it needs the slope, whatever it knows.
struct Insatiable;
impl Acceptance<f64> for Insatiable {
    fn judge(&self, _: &Ray<f64>, _: &Trial<f64>) -> Verdict {
        Verdict::NeedsSlope
    }
    fn uses_slope(&self) -> bool {
        true
    }
}

#[test]
fn a_rule_that_asks_for_a_slope_which_it_has_ends_the_search() {
    for cost in [Cost::Separate, Cost::Joint] {
        let mut search = StepSearch::new(Bisection::new(), Insatiable).with_cost(cost);
        let found = search
            .along(Ray::new(0.0, -1.0), 0.5, |a: f64| (-a, -1.0))
            .unwrap();
        assert_eq!(found.outcome.ending, Ending::RuleUndecided { step: 0.5 });
        assert_eq!(found.outcome.accepted(), None);
        assert_eq!(found.outcome.best.unwrap().value, -0.5);
        assert_eq!(search.log().iter().last().unwrap().fate, Fate::Undecided);
    }
}

#[test]
fn a_slope_that_cannot_be_given_ends_the_search_where_the_rule_needs_it() {
    let mut search = StepSearch::new(Bisection::new(), WeakWolfe::default());
    let found = search.along(Ray::new(0.0, -1.0), 0.5, |a: f64| -a).unwrap();
    assert_eq!(found.outcome.ending, Ending::SlopeMissing { step: 0.5 });
    assert_eq!(found.outcome.best.unwrap().value, -0.5);
    // A finder that would like it for a refused trial goes on without.
    for (name, finder) in finders() {
        let rule = SufficientDecrease::new(0.9).unwrap();
        let mut search = StepSearch::new(finder, rule);
        let found = search
            .along(Ray::new(0.0, -1.0), 50.0, |a: f64| 0.5 * a * a - a)
            .unwrap();
        let step = found.outcome.accepted().expect(name).step;
        assert!(step <= 0.2 * (1.0 + 1e-15), "{name} {step}");
    }
}

/// Proposes the same thing for ever, from the beginning.
#[derive(Clone, Copy, Debug)]
struct Stubborn(f64);
impl StepFinder<f64> for Stubborn {
    fn begin(&mut self, _: &Ray<f64>, _: f64) -> f64 {
        self.0
    }
    fn next(&mut self, _: &Ray<f64>, _: &Trial<f64>, _: Side) -> Proposal<f64> {
        Proposal::Try(self.0)
    }
    fn polish(&mut self, _: &Ray<f64>, _: &Trial<f64>) -> Proposal<f64> {
        Proposal::Try(self.0)
    }
}

/// Never content with what is accepted, and never twice at one place.
struct Restless;
impl StepFinder<f64> for Restless {
    fn begin(&mut self, _: &Ray<f64>, first: f64) -> f64 {
        first
    }
    fn next(&mut self, _: &Ray<f64>, refused: &Trial<f64>, _: Side) -> Proposal<f64> {
        Proposal::Try(0.99 * refused.step)
    }
    fn polish(&mut self, _: &Ray<f64>, accepted: &Trial<f64>) -> Proposal<f64> {
        Proposal::Try(0.99 * accepted.step)
    }
}

#[test]
fn a_finder_that_proposes_nonsense_is_put_right_by_the_guard() {
    for proposal in [
        NAN,
        INFINITY,
        -INFINITY,
        -1.0,
        0.0,
        1e300,
        0.3,
        7.0,
        f64::from_bits(1),
    ] {
        for bound in [1e9, 3.0] {
            let limits = Limits::new(1e-9, bound, 100).unwrap();
            let rule = StrongWolfe::new(1e-3, 1e-2).unwrap();
            let mut search = StepSearch::new(Stubborn(proposal), rule).with_limits(limits);
            let mut steps = 0;
            let valley = |a: f64| {
                steps += 1;
                assert!((1e-9..=bound).contains(&a), "{a} was asked for");
                (0.5 * a * a - a, a - 1.0)
            };
            let outcome = search
                .along(Ray::new(0.0, -1.0), 20.0, valley)
                .unwrap()
                .outcome;
            let trial = outcome.accepted().expect("the guard bisects by itself");
            assert!(
                (trial.step - 1.0).abs() <= 0.01,
                "{proposal}: {}",
                trial.step
            );
            assert_eq!(outcome.trials, steps);
        }
    }
}

#[test]
fn a_finder_that_never_stops_polishing_is_stopped_by_the_budget() {
    let limits = Limits::new(0.0, 10.0, 37).unwrap();
    let mut search = StepSearch::new(Restless, SufficientDecrease::default()).with_limits(limits);
    let valley = |a: f64| 0.5 * a * a - a;
    let outcome = search
        .along(Ray::new(0.0, -1.0), 1.9, valley)
        .unwrap()
        .outcome;
    assert_eq!((outcome.ending, outcome.trials), (Ending::Accepted, 37));
    // 1.9 x 0.99^36 is still above 1, where the value is least.
    assert_eq!(
        outcome.accepted().unwrap().step,
        search.log().iter().last().unwrap().trial.step
    );
}

type Plain = StepSearch<f64, Bisection, WeakWolfe<f64>>;

fn idle() -> Plain {
    StepSearch::new(Bisection::new(), WeakWolfe::new(1e-4, 0.1).unwrap())
}

fn asking(need: Need) -> Plain {
    let cost = if need == Need::Both {
        Cost::Joint
    } else {
        Cost::Separate
    };
    let mut search = idle().with_cost(cost);
    search.begin(Ray::new(0.0, -1.0), 0.5).unwrap();
    if need == Need::Slope {
        search.supply(Sample::Value(-0.4)).unwrap();
    }
    assert_eq!(search.request().unwrap().need, need);
    search
}

fn ended() -> Plain {
    let mut search = asking(Need::Value);
    search.supply(Sample::Both(-0.4, 0.0)).unwrap();
    assert_eq!(search.outcome().unwrap().ending, Ending::Accepted);
    search
}
