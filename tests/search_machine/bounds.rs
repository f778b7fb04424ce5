//! Bounds on the step and the trial budget.

use super::support::cast::{FINDERS, Rule, finder, finders};
use super::{RULES, valley};
use surefoot::search::{Fate, Origin};
use surefoot::{Ending, Limits, Need, Ray, Sample, Side, StepSearch};

const INFINITY: f64 = f64::INFINITY;

#[test]
fn what_falls_beyond_the_upper_bound_ends_at_the_bound() {
    for rule in &RULES[1..] {
        for first in [1.0, 0.01, 6.9, 7.0, 1e9] {
            for (name, finder) in finders() {
                let limits = Limits::new(0.0, 7.0, 100).unwrap();
                let mut search = StepSearch::new(finder, rule.boxed()).with_limits(limits);
                let falls = |a: f64| {
                    assert!(a <= 7.0, "{name} asks for {a}");
                    (-a, -1.0)
                };
                let outcome = search
                    .along(Ray::new(0.0, -1.0), first, falls)
                    .unwrap()
                    .outcome;
                let what = format!("{name} with {rule:?} from {first}: {}", outcome.ending);
                assert_eq!(outcome.ending, Ending::UpperBound { bound: 7.0 }, "{what}");
                assert_eq!(outcome.best.unwrap().step, 7.0, "{what}");
                assert_eq!(outcome.accepted(), None, "{what}");
                let last = search.log().iter().last().unwrap();
                assert_eq!(last.fate, Fate::Refused(Side::TooShort), "{what}");
                if first >= 7.0 {
                    assert_eq!((outcome.trials, last.origin), (1, Origin::First), "{what}");
                } else {
                    assert_eq!(last.origin, Origin::Bound, "{what}");
                }
            }
        }
    }
}

#[test]
fn a_bound_that_is_acceptable_is_accepted() {
    for rule in RULES {
        for name in FINDERS {
            for limits in [
                Limits::new(0.0, 0.95, 100),
                Limits::new(0.95, 0.95, 100),
                Limits::new(0.95, INFINITY, 1),
            ] {
                let mut search =
                    StepSearch::new(finder(name), rule.boxed()).with_limits(limits.unwrap());
                let first = if limits.unwrap().upper() > 1.0 {
                    0.01
                } else {
                    5.0
                };
                let outcome = search
                    .along(Ray::new(0.0, -1.0), first, valley)
                    .unwrap()
                    .outcome;
                assert_eq!(
                    outcome.accepted().expect(name).step,
                    0.95,
                    "{name} with {rule:?}"
                );
                assert_eq!(outcome.trials, 1);
            }
        }
    }
}

#[test]
fn what_rises_before_the_lower_bound_ends_at_the_bound() {
    let steep = |a: f64| (5e3 * a * a - a, 1e4 * a - 1.0); // minimizer 1e-4, sufficient decrease up to 2e-4
    for rule in RULES {
        for first in [1.0, 0.1, 0.01, 1e-9] {
            for (name, finder) in finders() {
                let limits = Limits::new(0.01, INFINITY, 100).unwrap();
                let mut search = StepSearch::new(finder, rule.boxed()).with_limits(limits);
                let probe = |a: f64| {
                    assert!(a >= 0.01, "{name} asks for {a}");
                    steep(a)
                };
                let outcome = search
                    .along(Ray::new(0.0, -1.0), first, probe)
                    .unwrap()
                    .outcome;
                let what = format!("{name} with {rule:?} from {first}: {}", outcome.ending);
                assert_eq!(outcome.ending, Ending::LowerBound { bound: 0.01 }, "{what}");
                assert_eq!(outcome.best.unwrap().step, 0.01, "{what}");
                assert_eq!(outcome.accepted(), None, "{what}");
            }
        }
    }
}

#[test]
fn bounds_that_no_proposal_touches_change_nothing() {
    for rule in RULES {
        for name in FINDERS {
            let mut free = StepSearch::new(finder(name), rule.boxed());
            free.along(Ray::new(0.0, -1.0), 0.013, valley).unwrap();
            let steps = || free.log().iter().map(|entry| entry.trial.step);
            let (least, most) = (
                steps().fold(INFINITY, f64::min),
                steps().fold(0.0, f64::max),
            );
            let limits = Limits::new(least, most, free.log().trials()).unwrap();
            let mut bound = StepSearch::new(finder(name), rule.boxed()).with_limits(limits);
            bound.along(Ray::new(0.0, -1.0), 0.013, valley).unwrap();
            assert_eq!(bound.log(), free.log(), "{name} with {rule:?}");
            assert_eq!(bound.outcome(), free.outcome());
        }
    }
}

#[test]
fn a_search_spends_its_budget_and_not_one_trial_more() {
    let strict = Rule::StrongWolfe {
        decrease: 1e-3,
        curvature: 1e-3,
    };
    // Far from a parabola: no finder is done in three trials.
    let at = |a: f64| {
        (
            (a - 1.0).powi(6) + 0.1 * (a - 1.0).powi(2),
            6.0 * (a - 1.0).powi(5) + 0.2 * (a - 1.0),
        )
    };
    let start = at(0.0);
    for name in FINDERS {
        for budget in 1..=3 {
            let limits = Limits::new(0.0, INFINITY, budget).unwrap();
            let mut search = StepSearch::new(finder(name), strict.boxed()).with_limits(limits);
            let mut least = INFINITY;
            let probe = |a: f64| {
                least = least.min(at(a).0);
                at(a)
            };
            let outcome = search
                .along(Ray::new(start.0, start.1), 7.3, probe)
                .unwrap()
                .outcome;
            assert_eq!(
                outcome.ending,
                Ending::BudgetSpent { trials: budget },
                "{name}"
            );
            assert_eq!(outcome.trials, budget, "{name}");
            assert_eq!(
                outcome.best.unwrap().value,
                least,
                "{name}: the best trial is kept"
            );
        }
    }
}

/// As the documentation of `with_limits` says.
#[test]
fn new_limits_hold_from_the_next_search_on() {
    let steps_after = |limits: Option<Limits<f64>>| {
        let mut search = StepSearch::new(finder("Bisection"), RULES[2].boxed());
        search.begin(Ray::new(0.0, -1.0), 0.01).unwrap();
        search
            .supply(Sample::Both(valley(0.01).0, valley(0.01).1))
            .unwrap();
        if let Some(limits) = limits {
            search = search.with_limits(limits);
        }
        while let Some(ask) = search.request() {
            search
                .supply(Sample::Both(valley(ask.step).0, valley(ask.step).1))
                .unwrap();
        }
        search
            .log()
            .iter()
            .map(|entry| entry.trial.step)
            .collect::<Vec<_>>()
    };
    let narrow = Limits::new(0.0, 0.05, 3).unwrap();
    assert_eq!(steps_after(Some(narrow)), steps_after(None));
}

/// The slope of the last trial serves no finder: it is asked for only where the verdict needs it.
#[test]
fn the_last_trial_of_the_budget_costs_no_idle_slope() {
    for (name, finder) in finders() {
        let limits = Limits::new(0.0, INFINITY, 1).unwrap();
        let mut search = StepSearch::new(finder, RULES[2].boxed()).with_limits(limits);
        let mut needs = Vec::new();
        let probe = |a: f64, need| {
            needs.push(need);
            let (value, slope) = valley(a);
            if need == Need::Value {
                Sample::Value(value)
            } else {
                Sample::Slope(slope)
            }
        };
        search
            .along_lazily(Ray::new(0.0, -1.0), 5.0, probe)
            .unwrap();
        assert_eq!(needs, [Need::Value], "{name}");
    }
}

#[test]
fn a_function_that_falls_for_ever_is_followed_to_the_largest_number() {
    for rule in &RULES[1..] {
        for (name, finder) in finders() {
            let limits = Limits::new(0.0, INFINITY, 3000).unwrap();
            let mut search = StepSearch::new(finder, rule.boxed()).with_limits(limits);
            let outcome = search
                .along(Ray::new(0.0, -1.0), 1.0, |a| (-a, -1.0))
                .unwrap()
                .outcome;
            let Ending::Endless { step } = outcome.ending else {
                panic!("{name} with {rule:?}: {}", outcome.ending)
            };
            // Twice the last step is not a number any more.
            assert!(
                2.0 * step == INFINITY,
                "{name} with {rule:?} stops at {step:e}"
            );
            assert_eq!(outcome.best.unwrap().step, step);
        }
    }
}

/// The slope says "go on", the value says "too far": no step satisfies both, and the bracket ends between neighbours.
#[test]
fn a_gradient_of_another_function_ends_in_a_bracket_of_neighbours() {
    let lies = |a: f64| (0.5 * a * a - a, -1.0);
    for rule in [RULES[1], RULES[2]] {
        for (name, finder) in finders() {
            let limits = Limits::new(0.0, INFINITY, 400).unwrap();
            let mut search = StepSearch::new(finder, rule.boxed()).with_limits(limits);
            let outcome = search
                .along(Ray::new(0.0, -1.0), 0.3, lies)
                .unwrap()
                .outcome;
            let Ending::Narrow { short, long } = outcome.ending else {
                panic!("{name} with {rule:?}: {}", outcome.ending)
            };
            assert_eq!(short.next_up(), long, "{name} with {rule:?}");
            assert!(
                (short - 2.0 * (1.0 - 1e-4)).abs() < 1e-14,
                "{name} with {rule:?}"
            );
        }
    }
}
