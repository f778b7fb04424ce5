//! The loop that calls a closure: what the closure may return, what comes back, and errors of the caller's own.

use super::support::cast::{AnySearch, Between, FINDERS, finder};
use super::{RULES, valley};
use surefoot::acceptance::{SufficientDecrease, WeakWolfe, rule};
use surefoot::finder::{Backtracking, Bisection};
use surefoot::{
    Ending, Found, Limits, Need, Probe, Proposal, Ray, Sample, SearchError, Side, StepFinder,
    StepSearch, Trial, Verdict,
};

fn backtracking() -> StepSearch<f64, Backtracking, SufficientDecrease<f64>> {
    StepSearch::new(
        Backtracking::default(),
        SufficientDecrease::new(0.1).unwrap(),
    )
}

const RAY: fn() -> Ray<f64> = || Ray::new(0.0, -1.0);

#[test]
fn every_form_of_return_leads_to_the_same_step() {
    let mut search = backtracking();
    let value = |a| valley(a).0;
    let steps = [
        step(search.along(RAY(), 4.0, value)),
        step(search.along(RAY(), 4.0, valley)),
        step(search.along(RAY(), 4.0, |a| (valley(a).0, valley(a).1, "kept"))),
        step(search.along(RAY(), 4.0, |a| Sample::Value(value(a)))),
        step(search.along(RAY(), 4.0, |a| Probe {
            sample: Sample::Value(value(a)),
            product: [a],
        })),
        step(search.along(RAY(), 4.0, |a| Ok::<_, String>(value(a)))),
        step(search.along(RAY(), 4.0, |a| Ok::<_, String>(valley(a)))),
        step(search.along(RAY(), 4.0, |a| Ok::<_, String>((value(a), 0.0, [a])))),
        step(search.along(RAY(), 4.0, |a| Ok::<_, String>(Sample::Value(value(a))))),
        step(search.along_lazily(RAY(), 4.0, |a, _| Ok::<_, String>(value(a)))),
    ];
    assert_eq!(steps, [1.0; 10]);
}

fn step<P, E: std::fmt::Debug>(found: Result<Found<f64, P>, SearchError<E>>) -> f64 {
    found.unwrap().outcome.accepted().unwrap().step
}

#[test]
fn the_product_of_the_accepted_trial_comes_back() {
    for rule in RULES {
        for name in FINDERS {
            for first in [0.013, 1.0, 37.0] {
                let mut search: AnySearch<f64> = StepSearch::new(finder(name), rule.boxed());
                let found = search
                    .along(RAY(), first, |a| {
                        (valley(a).0, valley(a).1, format!("computed at {a}"))
                    })
                    .unwrap();
                let accepted = found.outcome.accepted().unwrap();
                assert_eq!(
                    found.product,
                    Some(format!("computed at {}", accepted.step)),
                    "{name} {rule:?}"
                );
            }
        }
    }
}

#[test]
fn without_an_accepted_trial_the_product_of_the_best_one_comes_back() {
    // Never content: the budget runs out.
    let never = rule(|_: &Ray<f64>, trial: &Trial<f64>| {
        Verdict::Refuse(if trial.step > 0.3 {
            Side::TooLong
        } else {
            Side::TooShort
        })
    });
    let limits = Limits::new(0.0, f64::INFINITY, 9).unwrap();
    let mut search = StepSearch::new(Bisection::new(), never).with_limits(limits);
    let found = search
        .along(RAY(), 6.0, |a| (valley(a).0, valley(a).1, a))
        .unwrap();
    assert_eq!(found.outcome.ending, Ending::BudgetSpent { trials: 9 });
    // 6, 3, 1.5, 0.75, 0.375, ..: the value is least at 0.75.
    assert_eq!(found.product, Some(0.75));
    assert_eq!(found.outcome.best.unwrap().step, 0.75);
    // Nothing finite: nothing to give back.
    let nowhere = |a: f64| Probe {
        sample: Sample::OutsideDomain,
        product: a,
    };
    let found = search.along(RAY(), 6.0, nowhere).unwrap();
    assert_eq!((found.product, found.outcome.best), (None, None));
}

#[test]
fn the_product_is_that_of_the_last_call_at_the_accepted_step() {
    let mut search = StepSearch::new(Bisection::new(), WeakWolfe::new(0.1, 0.5).unwrap());
    let mut calls = 0;
    let found = search
        .along_lazily(RAY(), 4.0, |a, need| {
            calls += 1;
            let (value, slope) = valley(a);
            let sample = if need == Need::Value {
                Sample::Value(value)
            } else {
                Sample::Slope(slope)
            };
            Probe {
                sample,
                product: calls,
            }
        })
        .unwrap();
    // Values at 4, 2 and 1, then the slope at 1.
    assert_eq!(
        (found.outcome.trials, calls, found.product),
        (3, 4, Some(4))
    );
}

/// Accepts its first trial, then looks on both sides of it.
struct Restless {
    left: Vec<f64>,
}

impl StepFinder<f64> for Restless {
    fn begin(&mut self, _: &Ray<f64>, first: f64) -> f64 {
        first
    }
    fn next(&mut self, ray: &Ray<f64>, refused: &Trial<f64>, _: Side) -> Proposal<f64> {
        self.polish(ray, refused)
    }
    fn polish(&mut self, _: &Ray<f64>, _: &Trial<f64>) -> Proposal<f64> {
        self.left.pop().map_or(Proposal::Spent, Proposal::Try)
    }
}

#[test]
fn the_product_is_that_of_the_best_accepted_trial_where_the_finder_goes_on() {
    for (order, best) in [
        (vec![1.9, 1.1, 1.5], 1.1),
        (vec![1.9, 2.5, 0.3], 0.3),
        (vec![3.0, 2.5], 0.2),
    ] {
        let mut search = StepSearch::new(Restless { left: order }, SufficientDecrease::default());
        let found = search
            .along(RAY(), 0.2, |a| (valley(a).0, valley(a).1, a))
            .unwrap();
        assert_eq!(found.outcome.accepted().unwrap().step, best);
        assert_eq!(found.product, Some(best));
    }
}

#[test]
fn an_error_of_the_caller_ends_the_search_and_what_was_learnt_stays() {
    #[derive(Debug, PartialEq)]
    struct OutOfFuel {
        at: f64,
    }
    let mut search = backtracking();
    let fails_below = |limit: f64| {
        move |a: f64| {
            if a < limit {
                Err(OutOfFuel { at: a })
            } else {
                Ok(valley(a).0)
            }
        }
    };
    let error = search.along(RAY(), 16.0, fails_below(3.0)).unwrap_err();
    assert_eq!(error, SearchError::Caller(OutOfFuel { at: 2.0 }));
    assert_eq!(search.best().unwrap().step, 4.0);
    assert_eq!(search.log().trials(), 3);
    // The search is still under way, and can be finished by hand or begun anew.
    assert_eq!(search.request().unwrap().step, 2.0);
    let found = search.along(RAY(), 16.0, fails_below(0.5)).unwrap();
    assert_eq!(found.outcome.accepted().unwrap().step, 1.0);
}

#[test]
fn a_closure_that_is_told_the_need_computes_no_more() {
    for (wanted, first) in [((4, 1), 8.0), ((3, 3), 0.01)] {
        let (mut values, mut slopes) = (0, 0);
        let mut search = StepSearch::new(Bisection::new(), WeakWolfe::new(0.1, 0.97).unwrap());
        search
            .along_lazily(RAY(), first, |a, need| match need {
                Need::Value => {
                    values += 1;
                    Sample::Value(valley(a).0)
                }
                _ => {
                    slopes += 1;
                    Sample::Slope(valley(a).1)
                }
            })
            .unwrap();
        // From 8: 8, 4 and 2 are settled by value. From 0.01: 0.01 and 0.02 are too short, which only slopes tell.
        assert_eq!((values, slopes), wanted, "from {first}");
    }
}

#[test]
fn a_closure_that_answers_something_else_is_taken_at_its_word() {
    // A slope where the value is asked for: there is no value, so no point.
    let mut search = backtracking();
    let found = search
        .along(RAY(), 4.0, |_| Sample::<f64>::Slope(-1.0))
        .unwrap();
    assert_eq!((found.outcome.accepted(), found.outcome.best), (None, None));
    let found = search
        .along(RAY(), 4.0, |_| Sample::<f64>::NoSlope)
        .unwrap();
    assert_eq!((found.outcome.accepted(), found.outcome.best), (None, None));
    // A value where the slope is asked for: there is no slope.
    let mut search = StepSearch::new(Bisection::new(), WeakWolfe::<f64>::default());
    let found = search
        .along(RAY(), 1.0, |a| Sample::Value(valley(a).0))
        .unwrap();
    assert_eq!(found.outcome.ending, Ending::SlopeMissing { step: 1.0 });
}

#[test]
fn rules_of_the_users_own_work_with_every_finder() {
    for name in FINDERS {
        for (low, first) in [(0.2, 1e3), (0.2, 1e-3), (0.2, 0.2)] {
            let target = Between {
                low,
                high: 1.05 * low,
            };
            let mut search = StepSearch::new(finder(name), target);
            let found = search.along(RAY(), first, valley).unwrap();
            let step = found.outcome.accepted().expect(name).step;
            assert!(
                target.low <= step && step <= target.high,
                "{name} from {first}: {step}"
            );
        }
    }
}
