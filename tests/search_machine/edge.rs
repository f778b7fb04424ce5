//! The edge of the domain: the search closes in on it, whatever stands for "not defined", and finds what lies before it.

use super::support::cast::{Rule, finders};
use super::{RULES, valley};
use surefoot::search::{Fate, Origin};
use surefoot::{Ending, Ray, Sample, StepSearch};

/// What a function may give where it is not defined.
const UNDEFINED: [Sample<f64>; 6] = [
    Sample::OutsideDomain,
    Sample::Value(f64::NAN),
    Sample::Value(f64::INFINITY),
    Sample::Value(f64::NEG_INFINITY),
    Sample::Both(f64::NAN, f64::NAN),
    Sample::Both(0.0, f64::NAN),
];

/// A logarithmic barrier at a tenth of the first step, `phi(a) = -a - m log(1 - a/e)`, has its minimizer at `e - m`.
/// (Goldstein is left out: below its lower line until `e - a < e exp(-e/4m)`, it accepts only what no number resolves.)
#[test]
fn a_step_before_a_barrier_is_accepted_within_thirty_trials() {
    let wolfe = |curvature| Rule::StrongWolfe {
        decrease: 1e-4,
        curvature,
    };
    let rules = [RULES[0], RULES[1], wolfe(0.9), wolfe(0.1)];
    let (mut total, mut worst) = (0, (0, String::new()));
    for first in [1.0, 1e-7, 1e12] {
        let edge = 0.1 * first;
        for weight in [0.5, 0.1, 1e-2, 1e-3] {
            let m = weight * edge;
            let barrier = |a: f64| (-a - m * (1.0 - a / edge).ln(), -1.0 + m / (edge - a));
            let start = barrier(0.0);
            for rule in rules {
                for (name, finder) in finders() {
                    let mut search = StepSearch::new(finder, rule.boxed());
                    let probe = |a: f64| {
                        let (value, slope) = barrier(a);
                        if a < edge {
                            Sample::Both(value, slope)
                        } else {
                            Sample::OutsideDomain
                        }
                    };
                    let ray = Ray::new(start.0, start.1);
                    let outcome = search.along(ray, first, probe).unwrap().outcome;
                    let what = format!("{name} with {rule:?}, barrier of {weight} at {edge:e}");
                    let trial = outcome.accepted().expect(&what);
                    assert!(rule.holds(start, trial.step, barrier(trial.step)), "{what}");
                    assert!(outcome.trials <= 30, "{what}: {} trials", outcome.trials);
                    total += outcome.trials;
                    worst = worst.max((outcome.trials, what));
                }
            }
        }
    }
    println!(
        "before barriers: {total} trials in all, at most {}, {}",
        worst.0, worst.1
    );
}

#[test]
fn a_function_that_falls_right_up_to_the_edge_is_followed_to_its_last_digits() {
    let mut wrong = Vec::new();
    for edge in [0.1, 3e-5, 7e10] {
        for times in [10.0, 1e6, 1e-3, 0.999, 1.0] {
            for rule in &RULES[1..] {
                for (name, finder) in finders() {
                    let mut search = StepSearch::new(finder, rule.boxed());
                    let falls = |a: f64| {
                        if a < edge {
                            Sample::Both(-a, -1.0)
                        } else {
                            Sample::OutsideDomain
                        }
                    };
                    let outcome = search
                        .along(Ray::new(0.0, -1.0), times * edge, falls)
                        .unwrap()
                        .outcome;
                    let what = format!(
                        "{name} with {rule:?} from {times} x {edge:e}: {}",
                        outcome.ending
                    );
                    let Ending::Edge { inside, outside } = outcome.ending else {
                        wrong.push(what);
                        continue;
                    };
                    assert!(inside < edge && edge <= outside, "{what}");
                    assert!(edge - inside <= 1e-12 * edge, "{what}");
                    assert_eq!(outcome.best.unwrap().step, inside, "{what}");
                    assert_eq!(outcome.accepted(), None, "{what}");
                }
            }
        }
    }
    assert!(
        wrong.is_empty(),
        "{} searches:\n{}",
        wrong.len(),
        wrong.join("\n")
    );
}

#[test]
fn single_precision_is_followed_to_its_last_digits_too() {
    let edge = 0.1_f32;
    for (name, finder) in finders::<f32>() {
        let mut search = StepSearch::new(finder, RULES[1].boxed());
        let falls = |a: f32| {
            if a < edge {
                (-a, -1.0)
            } else {
                (f32::NAN, f32::NAN)
            }
        };
        let outcome = search
            .along(Ray::new(0.0, -1.0), 1.0, falls)
            .unwrap()
            .outcome;
        let Ending::Edge { inside, outside } = outcome.ending else {
            panic!("{name}: {}", outcome.ending)
        };
        assert!(
            inside < edge && edge <= outside && edge - inside <= 2.0 * f32::EPSILON * edge,
            "{name}"
        );
    }
}

#[test]
fn everything_that_is_not_a_number_to_go_by_counts_alike() {
    for rule in RULES {
        for (name, finder) in finders::<f64>() {
            let mut search = StepSearch::new(finder, rule.boxed());
            let mut sequences = UNDEFINED.iter().map(|undefined| {
                let probe = |a: f64| {
                    let (value, slope) = valley(a);
                    if a < 1.5 {
                        Sample::Both(value, slope)
                    } else {
                        *undefined
                    }
                };
                let outcome = search
                    .along(Ray::new(0.0, -1.0), 100.0, probe)
                    .unwrap()
                    .outcome;
                assert_eq!(search.log().iter().next().unwrap().fate, Fate::Outside);
                let steps: Vec<f64> = search.log().iter().map(|entry| entry.trial.step).collect();
                (outcome, steps)
            });
            let first = sequences.next().unwrap();
            assert!(first.0.accepted().is_some());
            assert!(
                sequences.all(|sequence| sequence == first),
                "{name} with {rule:?}"
            );
        }
    }
}

#[test]
fn the_finder_has_no_say_after_a_trial_outside() {
    let mut search = StepSearch::new(finders().into_iter().last().unwrap().1, RULES[2].boxed());
    let probe = |a: f64| {
        if a < 0.01 {
            Sample::Both(-a, -1.0)
        } else {
            Sample::OutsideDomain
        }
    };
    search.along(Ray::new(0.0, -1.0), 1.0, probe).unwrap();
    let entries: Vec<_> = search.log().iter().collect();
    for pair in entries.windows(2) {
        if pair[0].fate == Fate::Outside {
            assert_eq!(pair[1].origin, Origin::Edge, "trial {}", pair[1].number);
        }
        assert_eq!(pair[0].fate == Fate::Outside, pair[0].trial.step >= 0.01);
    }
    // 1, then 1/2, 1/8 and 1/128 of it: each contraction squares the share.
    let steps: Vec<f64> = entries
        .iter()
        .take(4)
        .map(|entry| entry.trial.step)
        .collect();
    assert_eq!(steps, [1.0, 0.5, 0.125, 0.0078125]);
}

/// Not defined between 1 and 2; the valley's minimizer lies before.
#[test]
fn a_hole_beyond_the_minimizer_does_not_keep_from_it() {
    let strict = Rule::StrongWolfe {
        decrease: 0.1,
        curvature: 0.1,
    };
    for rule in RULES.into_iter().chain([strict]) {
        for first in [10.0, 1.5, 4.0, 0.01] {
            for (name, finder) in finders() {
                let mut search = StepSearch::new(finder, rule.boxed());
                let at = |a: f64| (2.0 * a * a - 2.0 * a, 4.0 * a - 2.0); // minimizer 1/2
                let probe = |a: f64| {
                    if (1.0..2.0).contains(&a) {
                        (f64::NAN, f64::NAN)
                    } else {
                        at(a)
                    }
                };
                let outcome = search
                    .along(Ray::new(0.0, -2.0), first, probe)
                    .unwrap()
                    .outcome;
                let what = format!("{name} with {rule:?} from {first}: {}", outcome.ending);
                let trial = outcome.accepted().expect(&what);
                assert!(
                    rule.holds((0.0, -2.0), trial.step, at(trial.step)),
                    "{what}"
                );
                assert!(outcome.trials <= 30, "{what}");
            }
        }
    }
}

/// Not defined between 1 and 2, and still falling beyond: the search passes the hole, or says where it is.
#[test]
fn a_hole_before_the_minimizer_is_passed_or_reported() {
    for rule in &RULES[1..] {
        for first in [0.003, 0.1, 0.7, 1.5, 10.0, 1e3] {
            for (name, finder) in finders() {
                let mut search = StepSearch::new(finder, rule.boxed());
                let at = |a: f64| (a * a / 20.0 - a, a / 10.0 - 1.0); // minimizer 10
                let probe = |a: f64| {
                    if (1.0..2.0).contains(&a) {
                        (f64::NAN, f64::NAN)
                    } else {
                        at(a)
                    }
                };
                let outcome = search
                    .along(Ray::new(0.0, -1.0), first, probe)
                    .unwrap()
                    .outcome;
                let what = format!("{name} with {rule:?} from {first}: {}", outcome.ending);
                match (outcome.accepted(), outcome.ending) {
                    (Some(trial), _) => {
                        assert!(
                            rule.holds((0.0, -1.0), trial.step, at(trial.step)),
                            "{what}"
                        );
                    }
                    (None, Ending::Edge { inside, outside }) => {
                        assert!(inside < 1.0 && (1.0..2.0).contains(&outside), "{what}");
                        assert!(1.0 - inside <= 1e-12, "{what}");
                    }
                    _ => panic!("{what}"),
                }
            }
        }
    }
}

/// A function without any finite value ends cleanly, without a best trial.
#[test]
fn a_function_that_is_defined_nowhere_ends_without_a_step() {
    for (name, finder) in finders::<f64>() {
        let mut search = StepSearch::new(finder, RULES[2].boxed());
        let nowhere = |_| Sample::OutsideDomain;
        let outcome = search
            .along(Ray::new(0.0, -1.0), 1.0, nowhere)
            .unwrap()
            .outcome;
        assert_eq!((outcome.accepted(), outcome.best), (None, None), "{name}");
        match outcome.ending {
            Ending::Edge { inside, outside } => assert!(inside == 0.0 && outside > 0.0, "{name}"),
            Ending::BudgetSpent { trials } => assert_eq!(trials, 100, "{name}"),
            other => panic!("{name}: {other}"),
        }
    }
}
