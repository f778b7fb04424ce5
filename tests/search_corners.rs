//! The machine at its corners: proposals that are none, the edge of the domain under a finder without guard, a finder
//! that creeps, the best trial while a slope is asked for, and which trials a wrong slope is read from.
#![cfg(feature = "alloc")]

mod support;

use std::cell::RefCell;
use support::cast::Between;
use surefoot::acceptance::{SufficientDecrease, WeakWolfe, value_rule};
use surefoot::finder::{Bisection, BrentSlopes};
use surefoot::search::{Fate, Origin};
use surefoot::{
    Ending, Limits, Need, Outcome, Proposal, Ray, Real, Sample, Side, StepFinder, StepSearch,
    Trial, Verdict,
};

/// Begins where it is told and proposes what stands on its list, after refusals and acceptances alike.
#[derive(Clone, Debug)]
struct Script<T> {
    begin: Option<T>,
    left: std::vec::IntoIter<T>,
    guarded: bool,
}

impl<T: Real> Script<T> {
    fn new(steps: &[T]) -> Self {
        Script {
            begin: None,
            left: Vec::from(steps).into_iter(),
            guarded: false,
        }
    }

    fn guarded(self) -> Self {
        Script {
            guarded: true,
            ..self
        }
    }
}

impl<T: Real> StepFinder<T> for Script<T> {
    fn begin(&mut self, _: &Ray<T>, first: T) -> T {
        self.begin.unwrap_or(first)
    }
    fn next(&mut self, _: &Ray<T>, _: &Trial<T>, _: Side) -> Proposal<T> {
        self.left.next().map_or(Proposal::Spent, Proposal::Try)
    }
    fn polish(&mut self, _: &Ray<T>, _: &Trial<T>) -> Proposal<T> {
        self.left.next().map_or(Proposal::Spent, Proposal::Try)
    }
    fn wants_guard(&self) -> bool {
        self.guarded
    }
}

/// Asks for the next double beyond the last step that was too short.
#[derive(Clone, Copy, Debug, Default)]
struct Creeping {
    short: f64,
}

impl StepFinder<f64> for Creeping {
    fn begin(&mut self, _: &Ray<f64>, first: f64) -> f64 {
        self.short = 0.0;
        first
    }
    fn next(&mut self, _: &Ray<f64>, refused: &Trial<f64>, side: Side) -> Proposal<f64> {
        if side == Side::TooShort {
            self.short = refused.step;
        }
        Proposal::Try(if self.short == 0.0 {
            1e-3
        } else {
            self.short.next_up()
        })
    }
}

fn budget(trials: u32) -> Limits<f64> {
    Limits::new(0.0, f64::INFINITY, trials).unwrap()
}

// ---- What a finder may not propose ----

#[test]
fn a_first_step_that_is_none_is_replaced_by_the_one_given() {
    let begun = |begin: f64| {
        let finder = Script {
            begin: Some(begin),
            ..Script::new(&[])
        };
        let mut search = StepSearch::new(finder, SufficientDecrease::default());
        search.begin(Ray::new(0.0, -1.0), 5.0).unwrap();
        search.request().unwrap().step
    };
    assert_eq!(begun(3.0), 3.0);
    for none in [0.0, -0.0, -3.0, f64::NAN, f64::INFINITY, f64::NEG_INFINITY] {
        assert_eq!(begun(none), 5.0, "{none}");
    }
}

#[test]
fn a_proposal_of_zero_after_an_acceptance_ends_the_search() {
    for guarded in [false, true] {
        let finder = Script {
            guarded,
            ..Script::new(&[0.0, 2.0])
        };
        let mut search = StepSearch::new(finder, SufficientDecrease::default());
        let found = search.along(Ray::new(0.0, -1.0), 1.0, |a: f64| -a).unwrap();
        assert_eq!(
            (found.outcome.ending, found.outcome.trials),
            (Ending::Accepted, 1)
        );
    }
}

#[test]
fn the_limits_are_those_that_were_set() {
    let limits = Limits::new(0.25, 8.0, 7).unwrap();
    let search = StepSearch::new(Bisection::new(), SufficientDecrease::default());
    assert_eq!(*search.with_limits(limits).limits(), limits);
}

/// Of equals the first one: both of them tell of the same trial.
#[test]
fn the_accepted_trial_is_the_first_of_least_value_too() {
    let mut search = StepSearch::new(Script::new(&[2.0, 3.0]), SufficientDecrease::default());
    let outcome = search
        .along(Ray::new(0.0, -1.0), 1.0, |_: f64| -1.0)
        .unwrap()
        .outcome;
    assert_eq!((outcome.ending, outcome.trials), (Ending::Accepted, 3));
    assert_eq!(outcome.best.map(|trial| trial.step), Some(1.0));
    assert_eq!(outcome.accepted(), outcome.best);
}

// ---- The edge of the domain ----

#[test]
fn the_edge_itself_is_not_tried_again_after_an_acceptance() {
    // Outside at 4, where the search comes from; the finder goes on from the accepted step to the edge.
    let mut search = StepSearch::new(
        Script::new(&[4.0, 1.0]).guarded(),
        SufficientDecrease::default(),
    );
    let steps = RefCell::new(Vec::new());
    let found = search
        .along(Ray::new(0.0, -1.0), 4.0, |a: f64| {
            steps.borrow_mut().push(a);
            if a < 4.0 {
                Sample::Value(-a)
            } else {
                Sample::OutsideDomain
            }
        })
        .unwrap();
    assert_eq!(found.outcome.ending, Ending::Accepted);
    assert_eq!(steps.into_inner(), [4.0, 2.0]);
}

/// Defined below 5: every step that the search chooses by itself lies strictly between the largest one inside and the
/// smallest one outside, wherever the finder wants to go.
#[test]
fn the_edge_is_sought_between_what_is_known_on_both_sides_of_it() {
    for accepts in [true, false] {
        let script = Script::new(&[16.0, 20.0, 16.0, 1e9, 6.0, 5.5, 16.0, 30.0, 40.0, 50.0]);
        let verdict = if accepts {
            Verdict::Accept
        } else {
            Verdict::Refuse(Side::TooShort)
        };
        let rule = value_rule(move |_: &Ray<f64>, _: &Trial<f64>| verdict);
        let mut search = StepSearch::new(script, rule);
        search
            .along(Ray::new(0.0, -1.0), 1.0, |a: f64| {
                if a < 5.0 {
                    Sample::Value(-a)
                } else {
                    Sample::OutsideDomain
                }
            })
            .unwrap();
        let (mut inside, mut outside) = (0.0, f64::INFINITY);
        let mut by_itself = 0;
        for entry in search.log().iter() {
            let step = entry.trial.step;
            assert!(step < outside, "{step} is known to lie outside");
            if entry.origin == Origin::Edge {
                by_itself += 1;
                assert!(inside < step, "{step} is known to lie inside: {inside}");
            }
            if entry.fate == Fate::Outside {
                outside = step;
            } else {
                inside = f64::max(inside, step);
            }
        }
        assert!(by_itself >= 6, "{by_itself} are too few to tell");
    }
}

#[test]
fn a_finder_that_is_kept_from_going_on_by_the_edge_keeps_what_was_accepted() {
    // Defined up to 1: each trial of the search itself lies outside, until no number is left.
    let mut search = StepSearch::new(Script::new(&[2.0]), SufficientDecrease::default());
    let found = search
        .along(Ray::new(0.0, -1.0), 1.0, |a: f64| {
            if a <= 1.0 {
                Sample::Value(-a)
            } else {
                Sample::OutsideDomain
            }
        })
        .unwrap();
    assert_eq!(found.outcome.ending, Ending::Accepted);
    assert_eq!(found.outcome.accepted().unwrap().step, 1.0);
}

/// A double has 53 binary digits: a finder that sees nothing of the wall spoils no more than two trials for each.
#[test]
fn a_creeping_finder_is_led_to_the_wall_within_three_trials_a_binary_digit() {
    let mut search =
        StepSearch::new(Creeping::default(), WeakWolfe::default()).with_limits(budget(3 * 53 + 20));
    let found = search
        .along(Ray::new(0.0, -1.0), 2.0, |a: f64| {
            if a < 0.7 {
                Sample::Both(-a, -1.0)
            } else {
                Sample::OutsideDomain
            }
        })
        .unwrap();
    let Ending::Edge { inside, outside } = found.outcome.ending else {
        panic!("{:?}", found.outcome)
    };
    assert!(inside < 0.7 && 0.7 <= outside);
}

/// Six trials running that keep more than 0.66 of the bracket are the finder's; then the bracket is halved.
#[test]
fn a_creeping_finder_has_six_trials_before_the_bracket_is_halved() {
    let target = Between {
        low: 700.0,
        high: 700.0,
    };
    let mut search = StepSearch::new(Creeping::default(), target).with_limits(budget(29));
    search
        .along(Ray::new(0.0, -1.0), 1024.0, |_: f64| -1.0)
        .unwrap();
    let origins: Vec<Origin> = search.log().iter().map(|entry| entry.origin).collect();
    assert_eq!(origins[0], Origin::First);
    for (trial, origin) in origins[1..].iter().enumerate() {
        let expected = if trial % 7 == 6 {
            Origin::Guard
        } else {
            Origin::Finder
        };
        assert_eq!(*origin, expected, "{trial}: {origins:?}");
    }
}

#[test]
fn the_wall_is_known_to_two_units_in_the_last_place_and_then_the_search_ends() {
    for wall in [0.7, 1.0, 1.9, 3e-12] {
        let mut search = StepSearch::new(Bisection::new(), WeakWolfe::default());
        search
            .along(Ray::new(0.0, -1.0), 2.0, |a: f64| {
                if a < wall {
                    Sample::Both(-a, -1.0)
                } else {
                    Sample::OutsideDomain
                }
            })
            .unwrap();
        let (mut inside, mut outside) = (0.0, f64::INFINITY);
        let known = |inside: f64, outside: f64| {
            outside.is_finite() && outside - inside <= 2.0 * f64::EPSILON * outside
        };
        for entry in search.log().iter() {
            assert!(!known(inside, outside), "{wall}: a trial too many");
            if entry.fate == Fate::Outside {
                outside = entry.trial.step;
            } else {
                inside = entry.trial.step;
            }
        }
        assert!(known(inside, outside), "{wall}");
        let told = Ending::Edge { inside, outside };
        assert_eq!(search.outcome().unwrap().ending, told);
    }
}

/// Thirty powers of ten lie between the last step inside and the first one outside: their means are geometric.
#[test]
fn any_scale_between_a_step_inside_and_the_edge_is_reached_in_a_few_trials() {
    for wall in [1e-25, 1e-15, 1e-5] {
        let rule = value_rule(|_: &Ray<f64>, _: &Trial<f64>| Verdict::Refuse(Side::TooShort));
        let mut search = StepSearch::new(Script::new(&[1.0]), rule);
        search
            .along(Ray::new(0.0, -1.0), 1e-30, |a: f64| {
                if a < wall {
                    Sample::Value(-a)
                } else {
                    Sample::OutsideDomain
                }
            })
            .unwrap();
        let steps = search.log().iter().map(|entry| entry.trial.step);
        let near = |step: f64| wall / 4.0 < step && step < 4.0 * wall;
        let trials = steps.take_while(|step| !near(*step)).count();
        assert!(trials <= 2 + 7, "{wall:e}: {trials}"); // 100 binary digits halve seven times
    }
}

/// Once a step inside was too long, the guard's own step is the middle, however far apart the ends are.
#[test]
fn a_proposal_outside_of_a_wide_bracket_is_replaced_by_its_middle() {
    let target = Between {
        low: 2.0,
        high: 2.5,
    };
    let script = Script::new(&[1000.0, 1000.0]).guarded();
    let mut search = StepSearch::new(script, target).with_limits(budget(3));
    search
        .along(Ray::new(0.0, -1.0), 1.0, |_: f64| -1.0)
        .unwrap();
    let tried: Vec<_> = search
        .log()
        .iter()
        .map(|entry| (entry.trial.step, entry.origin))
        .collect();
    let expected = [
        (1.0, Origin::First),
        (1000.0, Origin::Finder),
        (500.5, Origin::Guard),
    ];
    assert_eq!(tried, expected);
}

// ---- The log ----

#[test]
fn logs_are_equal_when_their_trials_are_and_the_latest_one_is_the_last() {
    let logged = |steps: &[f64], trials: u32| {
        let script = Script::new(&steps[1..]);
        let rule = value_rule(|_: &Ray<f64>, _: &Trial<f64>| Verdict::Refuse(Side::TooLong));
        let mut search = StepSearch::new(script, rule).with_limits(budget(trials));
        search
            .along(Ray::new(0.0, -1.0), steps[0], |a: f64| a)
            .unwrap();
        search.log().clone()
    };
    let steps: Vec<f64> = (1..=300).map(f64::from).collect();
    for trials in [1, 2, 63, 64, 65, 130, 200] {
        let log = logged(&steps, trials);
        assert_eq!(log.trials(), trials);
        assert_eq!(
            log.latest().map(|entry| entry.trial.step),
            Some(f64::from(trials))
        );
        assert_eq!(log.latest(), log.iter().last());
        assert!(log == logged(&steps, trials));
        assert!(log != logged(&steps, trials + 1));
        let mut other = steps.clone();
        other[trials as usize - 1] = 1000.0;
        assert!(log != logged(&other, trials)); // as many, one of them elsewhere
    }
    let fresh = StepSearch::new(Script::<f64>::new(&[]), SufficientDecrease::default());
    assert_eq!(fresh.log().latest(), None);
}

// ---- Slopes that are asked for ----

#[test]
fn the_best_trial_counts_one_whose_slope_is_still_asked_for() {
    let mut search = StepSearch::new(Bisection::new(), WeakWolfe::new(1e-4, 0.5).unwrap());
    search.begin(Ray::new(0.0, -1.0), 1.0).unwrap();
    let mut step = |value: f64| {
        let ask = search.request().unwrap();
        assert_eq!(ask.need, Need::Value);
        search.supply(Sample::Value(value)).unwrap();
        assert_eq!(search.request().unwrap().need, Need::Slope);
        let best = search.best().map(|trial| (trial.step, trial.value));
        search.supply(Sample::Slope(-1.0)).unwrap(); // too short
        assert_eq!(search.best().map(|trial| (trial.step, trial.value)), best);
        best
    };
    assert_eq!(step(-1.0), Some((1.0, -1.0)));
    assert_eq!(step(-1.0), Some((1.0, -1.0))); // the first of equals
    assert_eq!(step(-2.0), Some((4.0, -2.0)));
    assert_eq!(step(-1.5), Some((4.0, -2.0)));
}

/// The rule takes the trial by its value; the finder would go on by slopes, and there are none.
#[test]
fn a_slope_that_only_the_finder_wants_may_be_missing() {
    let run = |needed: bool| {
        let search = StepSearch::new(BrentSlopes::default(), SufficientDecrease::default());
        let mut search = if needed {
            search.with_slope_when_accepted()
        } else {
            search
        };
        search.begin(Ray::new(0.0, -1.0), 1.0).unwrap();
        search.supply(Sample::Value(-0.5)).unwrap();
        assert_eq!(search.request().map(|ask| ask.need), Some(Need::Slope));
        search.supply(Sample::NoSlope).unwrap();
        search
    };
    let accepted = Trial {
        step: 1.0,
        value: -0.5,
        slope: None,
    };
    assert_eq!(run(false).log().latest().unwrap().fate, Fate::Accepted);
    assert_eq!(run(false).log().latest().unwrap().trial, accepted);
    let outcome = run(true).outcome().unwrap();
    assert_eq!(outcome.ending, Ending::SlopeMissing { step: 1.0 });
    assert_eq!(outcome.accepted(), None);
}

// ---- What a wrong slope is read from ----

/// Refuses all as too long, but one step as too short.
fn refused<T: Real>(
    value: T,
    first: T,
    trials: &[(f64, f64)],
    too_short: Option<f64>,
) -> Outcome<T> {
    let steps: Vec<T> = trials.iter().map(|(step, _)| T::of(*step)).collect();
    let rule = value_rule(move |_: &Ray<T>, trial: &Trial<T>| {
        let short = too_short.is_some_and(|step| T::of(step) == trial.step);
        Verdict::Refuse(if short { Side::TooShort } else { Side::TooLong })
    });
    let mut search = StepSearch::new(Script::new(&steps), rule);
    search.begin(Ray::new(value, -T::one()), first).unwrap();
    let mean_slope = |step: T| {
        let given = trials.iter().find(|(at, _)| T::of(*at) == step);
        given.map_or(T::of(5.0), |(_, slope)| T::of(*slope))
    };
    while let Some(ask) = search.request() {
        let value = value + mean_slope(ask.step) * ask.step;
        search.supply(Sample::Value(value)).unwrap();
    }
    search.outcome().unwrap()
}

/// `2^-35`: next to a value of 1 the decrease that a slope of -1 promises there is 130,000 roundings, and short.
const U: f64 = 1.0 / (1_u64 << 35) as f64;

/// The steps in units of `U` and the mean slopes up to them, from a start of value 1 and slope -1.
fn blamed(trials: &[(f64, f64)], too_short: Option<f64>) -> Option<(f64, f64)> {
    let trials: Vec<_> = trials.iter().map(|(step, m)| (step * U, *m)).collect();
    let outcome = refused(1.0, 64.0 * U, &trials, too_short.map(|step| step * U));
    match outcome.ending {
        Ending::WrongSlope { measured, step, .. } => Some((step / U, measured)),
        Ending::FinderSpent => None,
        other => panic!("{other:?}"),
    }
}

#[test]
fn a_wrong_slope_is_read_from_the_shortest_trial_and_the_shortest_one_twice_as_long() {
    let told = Some((1.0, 3.0));
    // Longer ones, and those less than twice as long, differ and do not count, in whatever order they come.
    assert_eq!(
        blamed(
            &[(4.0, 5.0), (1.0, 3.0), (3.0, 5.0), (2.0, 3.0), (1.5, 5.0)],
            None
        ),
        told
    );
    assert_eq!(
        blamed(&[(1.0, 3.0), (2.0, 3.0), (3.0, 5.0), (1.75, 5.0)], None),
        told
    );
    assert_eq!(blamed(&[(4.0, 3.0), (1.5, 5.0), (1.0, 3.0)], None), told);
    assert_eq!(blamed(&[(2.0, 3.0), (1.0, 3.0)], None), told);
    // The two that count disagree.
    assert_eq!(blamed(&[(4.0, 3.0), (2.0, 5.0), (1.0, 3.0)], None), None);
    assert_eq!(blamed(&[(4.0, 3.0), (1.0, 3.0), (2.0, 5.0)], None), None);
    assert_eq!(blamed(&[(1.0, 3.0)], None), None); // 64 U, where the search began, is at 5
}

#[test]
fn two_measurements_agree_to_a_fifth_of_the_larger_slope() {
    // To a fifth of 3 and of 1, the slope at the start.
    for (near, further, agree) in [
        (3.0, 3.5, true),
        (3.0, 2.5, true),
        (3.0, 4.0, false),
        (3.0, 2.0, false),
        (0.0, 0.1875, true),
        (0.0, -0.1875, true),
        (0.0, 0.25, false),
        (0.0, -0.25, false),
    ] {
        let told = agree.then_some((1.0, near));
        assert_eq!(
            blamed(&[(2.0, further), (1.0, near)], None),
            told,
            "{near} and {further}"
        );
    }
}

#[test]
fn a_slope_of_which_half_is_measured_is_not_blamed() {
    for (measured, wrong) in [(-0.25, true), (-0.5, false), (-0.75, false), (-2.0, false)] {
        let told = wrong.then_some((1.0, measured));
        assert_eq!(
            blamed(&[(2.0, measured), (1.0, measured)], None),
            told,
            "{measured}"
        );
    }
}

#[test]
fn a_decrease_that_was_too_short_clears_the_slope() {
    let trials = [(4.0, 3.0), (2.0, 3.0), (1.0, 3.0)];
    assert_eq!(blamed(&trials, None), Some((1.0, 3.0)));
    for short in [4.0, 2.0, 1.0] {
        assert_eq!(blamed(&trials, Some(short)), None, "{short}");
    }
}

/// Far away the differences of a smooth function may settle on anything.
#[test]
fn trials_that_are_all_long_blame_no_slope() {
    let outcome = refused(1.0, 0.5, &[(0.25, 3.0), (0.125, 3.0)], None);
    assert_eq!(outcome.ending, Ending::FinderSpent);
}

/// Beside a value of 1 a single-precision slope means something from 1000 times 4 roundings on, and is near up to 4 times
/// that: `2^-10` and `2^-9` are 8192 and 16384 of the roundings of `2^-23`.
#[test]
fn a_wrong_slope_is_read_in_single_precision_too() {
    let (near, further) = (1.0 / 1024.0, 1.0 / 512.0);
    let outcome = refused(1.0_f32, 1.0, &[(further, 3.0), (near, 3.0)], None);
    assert_eq!(
        outcome.ending,
        Ending::WrongSlope {
            slope: -1.0,
            measured: 3.0,
            step: near as f32
        }
    );
}

/// A value of 0 has no rounding: there a step is short next to the first one, 1024, from `2^-39` of it on, the root of the
/// machine epsilon times the root of that.
#[test]
fn beside_a_value_of_zero_a_step_is_short_next_to_the_first_one() {
    let unit = f64::EPSILON.sqrt() * f64::EPSILON.sqrt().sqrt() * 1024.0;
    assert_eq!(unit, 0.5_f64.powi(29));
    let outcome = refused(0.0, 1024.0, &[(2.0 * unit, 3.0), (unit, 3.0)], None);
    let told = Ending::WrongSlope {
        slope: -1.0,
        measured: 3.0,
        step: unit,
    };
    assert_eq!(outcome.ending, told);
    let outcome = refused(0.0, 1024.0, &[(4.0 * unit, 3.0), (2.0 * unit, 3.0)], None);
    assert_eq!(outcome.ending, Ending::FinderSpent);
}
