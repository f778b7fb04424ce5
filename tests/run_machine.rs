//! A run as a machine: the same moves as the loop, nothing lost wherever it is stopped, no reply that can break it.
#![cfg(feature = "alloc")]

use proptest::prelude::*;
use proptest::test_runner::RngSeed;
use std::ops::ControlFlow;
use surefoot::acceptance::{Goldstein, StrongWolfe, SufficientDecrease, WeakWolfe};
use surefoot::direction::{ConjugateGradient, Lbfgs, Moved, SteepestDescent, Update};
use surefoot::finder::{
    Backtracking, Bisection, BracketZoom, InterpolatingBacktracking, MoreThuente,
};
use surefoot::{
    Acceptance, BoxedDirection, BoxedFinder, BoxedRule, Cost, Criterion, Descent, Direction,
    Ending, Evaluations, Fault, FirstTrial, Given, Limits, Objective, Proposal, Ray, Real,
    Reference, Run, RunEnding, RunReply, Side, StepFinder, Stopping, Trial, Verdict, Want,
};

// ---- The same as the loop ----

#[test]
fn machine_and_loop_make_the_same_moves_bit_for_bit() {
    for cost in [Cost::Separate, Cost::Joint] {
        for choice in 0..CASTS {
            let mut looped = Valley::new(cost);
            let mut moves = Vec::new();
            let want = cast::<f64, 2>(choice)
                .minimize_watched(START, &mut looped, |run| {
                    moves.push(run.point().map(f64::to_bits));
                    ControlFlow::Continue(())
                })
                .unwrap();
            let mut machine = Valley::new(cost);
            let mut run = cast::<f64, 2>(choice).with_cost(cost).start(START);
            let mut steps = Vec::new();
            while let Some(given) = machine.answer(&mut run) {
                let before = run.iterations();
                run.supply(given).unwrap();
                if run.iterations() > before {
                    steps.push(run.point().map(f64::to_bits));
                }
            }
            assert_eq!(steps, moves, "cast {choice}, {cost:?}");
            assert_eq!(machine.calls, looped.calls, "cast {choice}, {cost:?}");
            let (_, found) = run.finish();
            assert_eq!(found, want, "cast {choice}, {cost:?}");
            assert!(
                found.converged(),
                "cast {choice}, {cost:?}: {:?}",
                found.ending
            );
        }
    }
}

#[test]
fn asking_twice_changes_nothing() {
    let mut valley = Valley::new(Cost::Separate);
    let mut asked_once = cast::<f64, 2>(3).start(START);
    let mut asked_often = cast::<f64, 2>(3).start(START);
    loop {
        let first = asked_often.request().map(|r| (r.want, *r.point));
        let second = asked_often.request().map(|r| (r.want, *r.point));
        assert_eq!(first, second);
        let once = asked_once.request().map(|r| (r.want, *r.point));
        assert_eq!(once, first);
        let Some(given) = valley.answer(&mut asked_once) else {
            break;
        };
        valley.answer(&mut asked_often);
        asked_once.supply(given).unwrap();
        asked_often.supply(given).unwrap();
    }
    assert_eq!(asked_once.finish().1, asked_often.finish().1);
}

#[test]
fn more_than_was_wanted_is_welcome() {
    let mut valley = Valley::new(Cost::Separate);
    let mut lean = lbfgs().start(START);
    let mut rich = lbfgs().start(START);
    let mut gifts = 0;
    valley.serve(&mut lean);
    while let Some(request) = rich.request() {
        // A value with its gradient where the value alone was wanted settles both questions at once.
        let value = valley_at(request.point, request.gradient);
        gifts += u32::from(request.want != Want::Both);
        rich.supply(Given::Both(value)).unwrap();
    }
    let (lean, rich) = (lean.finish().1, rich.finish().1);
    assert!(gifts > 10);
    assert_eq!(lean.point.map(f64::to_bits), rich.point.map(f64::to_bits));
    assert_eq!(
        (lean.iterations, lean.ending),
        (rich.iterations, rich.ending)
    );
}

#[test]
fn a_known_start_is_not_asked_about() {
    let mut g = [0.0; 2];
    let value = valley_at(&START, &mut g);
    for choice in 0..CASTS {
        let mut valley = Valley::new(Cost::Separate);
        let mut plain = cast::<f64, 2>(choice).start(START);
        valley.serve(&mut plain);
        let mut known = cast::<f64, 2>(choice).start_known(START, value, g);
        let first = *known.request().unwrap().point;
        assert_ne!(first, START);
        assert_eq!(known.evaluations(), Evaluations::default());
        assert_eq!((known.value(), known.gradient()), (value, Some(&g)));
        valley.serve(&mut known);
        let (plain, known) = (plain.finish().1, known.finish().1);
        assert_eq!(known.point.map(f64::to_bits), plain.point.map(f64::to_bits));
        assert_eq!(known.evaluations.calls() + 1, plain.evaluations.calls());
    }
    let mut there = cast::<f64, 2>(0).start_known([1.0, 1.0], 0.0, [0.0, 0.0]);
    assert!(there.request().is_none());
    assert_eq!(
        there.ending(),
        Some(RunEnding::Converged(Criterion::Gradient))
    );
    let ending = |value, g: Vec<f64>| {
        let how = Descent::new(SteepestDescent, Bisection::new(), WeakWolfe::default());
        how.start_known(vec![1.0, 2.0], value, g).ending()
    };
    let length = Fault::LengthChanged {
        expected: 2,
        found: 3,
    };
    assert_eq!(ending(1.0, vec![1.0; 3]), Some(RunEnding::Fault(length)));
    assert_eq!(
        ending(f64::NAN, vec![1.0; 2]),
        Some(RunEnding::Fault(Fault::ValueNotFinite))
    );
    assert_eq!(
        ending(1.0, vec![1.0, f64::NAN]),
        Some(RunEnding::Fault(Fault::GradientNotFinite))
    );
}

#[test]
fn a_clone_taken_anywhere_goes_on_alike() {
    let mut valley = Valley::new(Cost::Separate);
    let descent = lbfgs();
    let mut whole = descent.clone().start(START);
    valley.serve(&mut whole);
    let (_, want) = whole.finish();
    for k in 0..want.evaluations.calls() {
        let mut run = descent.clone().start(START);
        for _ in 0..k {
            let given = valley.answer(&mut run).unwrap();
            run.supply(given).unwrap();
        }
        let mut twin = run.clone();
        valley.serve(&mut run);
        valley.serve(&mut twin);
        assert_eq!(run.finish().1, want, "after {k}");
        assert_eq!(twin.finish().1, want, "the clone after {k}");
    }
}

// ---- Replies that do not fit ----

#[test]
fn a_reply_that_does_not_fit_is_named_and_the_request_stands() {
    let fits = |want: Want, given: Given<f64>| match (want, given) {
        (Want::Value | Want::Both, Given::Gradient | Given::NoGradient) => {
            Err(RunReply::ValueWanted)
        }
        (Want::Gradient, Given::Value(_)) => Err(RunReply::GradientWanted),
        _ => Ok(()),
    };
    let mut seen = [0; 3];
    for cost in [Cost::Separate, Cost::Joint] {
        let mut valley = Valley::new(cost);
        let descent = lbfgs().with_cost(cost);
        let mut undisturbed = descent.clone().start(START);
        valley.serve(&mut undisturbed);
        let mut run = descent.start(START);
        while let Some(request) = run.request() {
            let (want, point) = (request.want, *request.point);
            seen[want as usize] += 1;
            for given in [Given::Value(1.0), Given::Gradient, Given::NoGradient] {
                if let Err(error) = fits(want, given) {
                    let evaluations = run.evaluations();
                    assert_eq!(run.supply(given), Err(error), "{given:?} for {want:?}");
                    let again = run.request().unwrap();
                    assert_eq!((again.want, *again.point), (want, point));
                    assert_eq!(run.evaluations(), evaluations);
                }
            }
            let given = valley.answer(&mut run).unwrap();
            run.supply(given).unwrap();
        }
        for given in [
            Given::Value(1.0),
            Given::Gradient,
            Given::Both(1.0),
            Given::NoGradient,
            Given::OutsideDomain,
        ] {
            assert_eq!(run.supply(given), Err(RunReply::NothingWanted));
        }
        assert_eq!(run.finish().1, undisturbed.finish().1);
    }
    assert!(
        seen.iter().all(|n| *n > 3),
        "{seen:?}: not every request was seen"
    );
}

#[test]
fn a_value_alone_for_both_is_taken_and_the_gradient_is_wanted_next() {
    let mut valley = Valley::new(Cost::Joint);
    let mut whole = lbfgs().with_cost(Cost::Joint).start(START);
    valley.serve(&mut whole);
    let mut run = lbfgs().with_cost(Cost::Joint).start(START);
    let (mut values, mut gradients) = (0, 0);
    while let Some(request) = run.request() {
        let value = valley_at(request.point, request.gradient);
        let given = match request.want {
            Want::Gradient => {
                gradients += 1;
                Given::Gradient
            }
            _ => {
                values += 1;
                Given::Value(value)
            }
        };
        run.supply(given).unwrap();
    }
    let (whole, report) = (whole.finish().1, run.finish().1);
    assert_eq!(report.point, whole.point);
    assert!(gradients > 10 && values >= gradients);
    // What was given is counted, not what was wanted.
    let counted = report.evaluations;
    assert_eq!(
        (counted.values, counted.gradients, counted.both),
        (values, gradients, 0)
    );
}

// ---- Stopped anywhere ----

#[test]
fn a_run_stopped_at_any_evaluation_hands_over_its_best_point() {
    for cost in [Cost::Separate, Cost::Joint] {
        for choice in 0..CASTS {
            for k in 0..150 {
                let (run, _) = interrupted(choice, cost, k);
                let (last, iterations) = (run.value(), run.iterations());
                let ended = run.ending();
                let (_, report) = run.finish();
                assert_eq!(report.ending, ended.unwrap_or(RunEnding::Stopped));
                assert_eq!(report.iterations, iterations);
                assert!(report.value <= last || last.is_nan(), "cast {choice}, {k}");
                if report.value.is_finite() {
                    // The point is the one that the value belongs to, and the gradient too where there is one.
                    let mut g = [0.0; 2];
                    assert_eq!(
                        valley_at(&report.point, &mut g),
                        report.value,
                        "cast {choice}, {k}"
                    );
                    assert!(report.gradient.is_none_or(|found| found == g));
                    let most = g.iter().fold(0.0, |m: f64, g| m.max(g.abs()));
                    assert!(report.gradient_max.is_none_or(|found| found == most));
                } else {
                    assert!(k <= 1);
                }
            }
        }
    }
}

#[test]
fn no_lower_trial_of_the_search_under_way_is_lost_wherever_a_run_is_stopped() {
    for choice in 0..CASTS {
        for k in 1..150 {
            let (run, least) = interrupted(choice, Cost::Separate, k);
            let (_, report) = run.finish();
            assert!(
                report.value <= least,
                "cast {choice} stopped after {k} evaluations: {:e} was found, {:e} handed over",
                least,
                report.value
            );
        }
    }
}

/// A run that was supplied with `k` replies, and the least value among the last point moved to and the trials after it.
fn interrupted(choice: usize, cost: Cost, k: usize) -> (AnyRun<f64, 2>, f64) {
    let mut valley = Valley::new(cost);
    let mut run = cast::<f64, 2>(choice).with_cost(cost).start(START);
    let mut least = f64::INFINITY;
    for _ in 0..k {
        let Some(given) = valley.answer(&mut run) else {
            break;
        };
        if let Given::Value(value) | Given::Both(value) = given {
            least = least.min(value);
        }
        let before = run.iterations();
        run.supply(given).unwrap();
        if run.iterations() > before {
            least = run.value();
        }
    }
    (run, least)
}

#[test]
fn a_run_whose_values_may_rise_hands_over_its_lowest_point() {
    let usual = || {
        Descent::new(
            SteepestDescent,
            Backtracking::default(),
            SufficientDecrease::default(),
        )
        .with_first_trial(FirstTrial::Fixed(2e-3))
        .unwrap()
    };
    let largest = Reference::LargestOfLast { values: 10 };
    let average = Reference::WeightedAverage { eta: 0.85 };
    let mut rose = 0;
    for (name, descent) in [
        (
            "the largest of the last",
            usual().with_reference(largest).unwrap(),
        ),
        (
            "a weighted average",
            usual().with_reference(average).unwrap(),
        ),
        (
            "an allowance for noise",
            usual().with_value_noise(0.5).unwrap(),
        ),
    ] {
        for iterations in 1..60 {
            let stopping = Stopping {
                iterations,
                ..Stopping::default()
            };
            let mut values = vec![valley_at(&START, &mut [0.0; 2])];
            let report = descent
                .with_stopping(stopping)
                .unwrap()
                .minimize_watched(START, Valley::new(Cost::Separate), |run| {
                    values.push(run.value());
                    ControlFlow::Continue(())
                })
                .unwrap();
            let least = values.iter().copied().fold(f64::INFINITY, f64::min);
            assert_eq!(report.value, least, "{name}, {iterations} moves");
            assert_eq!(valley_at(&report.point, &mut [0.0; 2]), least);
            rose += u32::from(values.last() > Some(&least));
        }
    }
    assert!(rose > 10, "{rose}: no test");
}

// ---- No gradient, no point ----

#[test]
fn outside_of_the_domain_is_refused_and_the_run_goes_on() {
    // x - ln x for x > 0, minimum 1 at 1; a first step of 100 leaves the domain.
    let descent = Descent::new(SteepestDescent, MoreThuente::new(), StrongWolfe::default())
        .with_first_trial(FirstTrial::Fixed(100.0))
        .unwrap();
    let mut run = descent.start([3.0_f64]);
    let mut outside = 0;
    while let Some(request) = run.request() {
        let x = request.point[0];
        request.gradient[0] = 1.0 - 1.0 / x;
        let given = if x <= 0.0 {
            outside += 1;
            Given::OutsideDomain
        } else {
            match request.want {
                Want::Value => Given::Value(x - x.ln()),
                Want::Gradient => Given::Gradient,
                Want::Both => Given::Both(x - x.ln()),
            }
        };
        run.supply(given).unwrap();
    }
    let (_, report) = run.finish();
    assert_eq!(report.ending, RunEnding::Converged(Criterion::Gradient));
    assert!((report.point[0] - 1.0).abs() < 1e-5);
    assert!(outside > 0);
    assert_eq!(report.refusals.outside, outside);
}

#[test]
fn a_point_whose_gradient_is_outside_of_the_domain_is_refused_too() {
    let descent = Descent::new(SteepestDescent, Bisection::new(), WeakWolfe::default());
    let mut run = descent.start([4.0]);
    let mut refused = 0;
    while let Some(request) = run.request() {
        let x = request.point[0];
        request.gradient[0] = 2.0 * x;
        let given = match request.want {
            Want::Value => Given::Value(x * x),
            // Between 1 and 2 there is a value and no gradient.
            Want::Gradient if (1.0..2.0).contains(&x) => {
                refused += 1;
                Given::OutsideDomain
            }
            Want::Gradient => Given::Gradient,
            Want::Both => Given::Both(x * x),
        };
        run.supply(given).unwrap();
        assert!(!(1.0..2.0).contains(&run.point()[0]));
    }
    let (_, report) = run.finish();
    assert!(refused > 0);
    assert_eq!(report.refusals.outside, refused);
    assert!(!(1.0..2.0).contains(&report.point[0]));
}

#[test]
fn a_gradient_that_is_not_to_be_had_ends_the_run_with_the_lower_point() {
    let rules: [BoxedRule<f64>; 2] = [
        Box::new(WeakWolfe::default()),
        Box::new(SufficientDecrease::default()),
    ];
    for rule in rules {
        let descent = Descent::new(SteepestDescent, Bisection::new(), rule)
            .with_first_trial(FirstTrial::Fixed(0.25))
            .unwrap();
        let mut run = descent.start([4.0]);
        run.request();
        run.supply(Given::Value(16.0)).unwrap();
        let request = run.request().unwrap();
        assert_eq!(request.want, Want::Gradient);
        request.gradient[0] = 8.0;
        run.supply(Given::Gradient).unwrap();
        let request = run.request().unwrap();
        assert_eq!((request.want, *request.point), (Want::Value, [2.0]));
        run.supply(Given::Value(4.0)).unwrap();
        assert_eq!(run.request().unwrap().want, Want::Gradient);
        run.supply(Given::NoGradient).unwrap();
        let (_, report) = run.finish();
        let missing = Ending::SlopeMissing { step: 0.25 };
        assert_eq!(report.ending, RunEnding::SearchFailed(missing));
        assert_eq!((report.point, report.value), ([2.0], 4.0));
        assert_eq!((report.gradient, report.gradient_max), (None, None));
    }
}

#[test]
fn a_gradient_that_only_the_finder_wants_may_be_missing() {
    // Trials refused by their value: the rule needs no slope, MoreThuente would like one.
    let mut valley = Valley::new(Cost::Separate);
    let mut run = Descent::new(Lbfgs::default(), MoreThuente::new(), StrongWolfe::default())
        .with_first_trial(FirstTrial::Fixed(1.0))
        .unwrap()
        .start(START);
    let (mut missing, mut value) = (0, f64::NAN);
    while let Some(given) = valley.answer(&mut run) {
        if let Given::Value(v) | Given::Both(v) = given {
            value = v;
        }
        let given = match given {
            Given::Gradient if value > run.value() => {
                missing += 1;
                Given::NoGradient
            }
            given => given,
        };
        run.supply(given).unwrap();
    }
    assert!(missing > 0);
    assert_eq!(
        run.ending(),
        Some(RunEnding::Converged(Criterion::Gradient))
    );
}

#[test]
fn at_the_start_there_is_no_way_around_a_value_and_a_gradient() {
    let start =
        || Descent::new(SteepestDescent, Bisection::new(), WeakWolfe::default()).start([4.0]);
    let mut run = start();
    run.supply(Given::OutsideDomain).unwrap();
    assert_eq!(run.ending(), Some(RunEnding::Fault(Fault::ValueNotFinite)));
    for given in [Given::NoGradient, Given::OutsideDomain] {
        let mut run = start();
        run.supply(Given::Value(16.0)).unwrap();
        run.supply(given).unwrap();
        assert_eq!(
            run.ending(),
            Some(RunEnding::Fault(Fault::GradientNotFinite)),
            "{given:?}"
        );
    }
}

// ---- Moves to a trial that is not the latest ----

/// Tries twice the accepted step as well, once: the best accepted trial wins.
#[derive(Clone, Debug, Default)]
struct Doubles {
    done: bool,
}

impl StepFinder<f64> for Doubles {
    fn begin(&mut self, _: &Ray<f64>, first: f64) -> f64 {
        self.done = false;
        first
    }
    fn next(&mut self, _: &Ray<f64>, refused: &Trial<f64>, _: Side) -> Proposal<f64> {
        Proposal::Try(0.5 * refused.step)
    }
    fn polish(&mut self, _: &Ray<f64>, accepted: &Trial<f64>) -> Proposal<f64> {
        if self.done {
            return Proposal::Spent;
        }
        self.done = true;
        Proposal::Try(2.0 * accepted.step)
    }
}

#[test]
fn the_best_of_several_accepted_trials_is_moved_to() {
    for cost in [Cost::Separate, Cost::Joint] {
        // x^2 / 2 from 1: the steps 0.8 (to 0.2) and 1.6 (to -0.6) are both accepted, the first is better.
        let descent = Descent::new(
            SteepestDescent,
            Doubles::default(),
            SufficientDecrease::default(),
        )
        .with_first_trial(FirstTrial::Fixed(0.8))
        .unwrap()
        .with_cost(cost);
        let mut run = descent.start([1.0]);
        while let Some(request) = run.request() {
            let x = request.point[0];
            request.gradient[0] = x;
            let given = match request.want {
                Want::Value => Given::Value(0.5 * x * x),
                Want::Gradient => Given::Gradient,
                Want::Both => Given::Both(0.5 * x * x),
            };
            run.supply(given).unwrap();
            let moves = run.iterations() as i32;
            assert!((run.point()[0] - 0.2_f64.powi(moves)).abs() < 1e-12 * 0.2_f64.powi(moves));
            assert!(run.gradient().is_none_or(|g| g == run.point()));
        }
        let (_, report) = run.finish();
        assert!(report.converged());
        assert_eq!(report.remedies.best_taken, 0);
    }
}

#[test]
fn a_lower_point_whose_gradient_fails_is_not_lost() {
    for choice in [0, 1] {
        let direction: BoxedDirection<[f64; 1]> = match choice {
            0 => Box::new(SteepestDescent),
            _ => Box::new(Lbfgs::new(3).unwrap()),
        };
        let descent = Descent::new(direction, Doubles::default(), SufficientDecrease::default())
            .with_first_trial(FirstTrial::Fixed(0.8))
            .unwrap()
            .with_stopping(Stopping {
                iterations: 3,
                ..Stopping::default()
            })
            .unwrap();
        let mut run = descent.start([1.0]);
        let mut least = f64::INFINITY;
        let mut known = Vec::new();
        loop {
            let moves = run.iterations();
            let Some(request) = run.request() else { break };
            let x: f64 = request.point[0];
            request.gradient[0] = x;
            let given = match request.want {
                // After two moves, a gradient asked for the second time cannot be had any more.
                Want::Gradient if moves == 2 && known.contains(&x.to_bits()) => Given::NoGradient,
                Want::Gradient => {
                    known.push(x.to_bits());
                    Given::Gradient
                }
                Want::Value => {
                    least = least.min(0.5 * x * x);
                    Given::Value(0.5 * x * x)
                }
                Want::Both => Given::Both(0.5 * x * x),
            };
            run.supply(given).unwrap();
        }
        let (_, report) = run.finish();
        assert!(
            report.value <= least,
            "{:e} was found, {:e} handed over",
            least,
            report.value
        );
    }
}

#[test]
fn a_value_alone_is_taken_for_both_also_where_a_run_goes_back() {
    let both = |given: fn(f64) -> Given<f64>| {
        let descent = Descent::new(
            SteepestDescent,
            Doubles::default(),
            SufficientDecrease::default(),
        )
        .with_first_trial(FirstTrial::Fixed(0.8))
        .unwrap()
        .with_cost(Cost::Joint);
        let mut run = descent.start([1.0]);
        while let Some(request) = run.request() {
            let x: f64 = request.point[0];
            request.gradient[0] = x;
            let given = match request.want {
                Want::Gradient => Given::Gradient,
                _ => given(0.5 * x * x),
            };
            run.supply(given).unwrap();
        }
        let (_, report) = run.finish();
        (report.ending, report.point, report.iterations)
    };
    let want = both(Given::Both);
    assert_eq!(want.0, RunEnding::Converged(Criterion::Gradient));
    assert_eq!(both(Given::Value), want);
}

#[test]
fn a_step_tried_twice_with_two_answers_brings_in_no_stale_gradient() {
    /// After an acceptance: twice the step, then the accepted step once more.
    #[derive(Default)]
    struct Returns {
        first: f64,
        polished: u32,
    }
    impl StepFinder<f64> for Returns {
        fn begin(&mut self, _: &Ray<f64>, first: f64) -> f64 {
            self.polished = 0;
            self.first = first;
            first
        }
        fn next(&mut self, _: &Ray<f64>, _: &Trial<f64>, _: Side) -> Proposal<f64> {
            Proposal::Spent
        }
        fn polish(&mut self, _: &Ray<f64>, _: &Trial<f64>) -> Proposal<f64> {
            self.polished += 1;
            match self.polished {
                1 => Proposal::Try(2.0 * self.first),
                2 => Proposal::Try(self.first),
                _ => Proposal::Spent,
            }
        }
    }
    let descent = Descent::new(
        SteepestDescent,
        Returns::default(),
        SufficientDecrease::default(),
    )
    .with_first_trial(FirstTrial::Fixed(0.8))
    .unwrap()
    .with_stopping(Stopping {
        iterations: 3,
        ..Stopping::default()
    })
    .unwrap();
    let mut run = descent.start([1.0]);
    let mut asked = Vec::new();
    while let Some(request) = run.request() {
        let x: f64 = request.point[0];
        let again = request.want != Want::Gradient && asked.contains(&x.to_bits());
        asked.push(x.to_bits());
        request.gradient[0] = if again { f64::NAN } else { x };
        let given = match request.want {
            Want::Gradient => Given::Gradient,
            _ => Given::Both(0.5 * x * x),
        };
        run.supply(given).unwrap();
        assert!(run.gradient().is_none_or(|g| g[0].is_finite()));
        assert!(run.gradient().is_none_or(|g| g == run.point()));
    }
    assert_eq!(run.ending(), Some(RunEnding::IterationsSpent));
}

// ---- Beyond the largest number ----

/// Takes whatever is finite: the rule of fixed steps.
#[derive(Clone, Copy, Debug)]
struct Anything;

impl<T: Real> Acceptance<T> for Anything {
    fn judge(&self, _: &Ray<T>, _: &Trial<T>) -> Verdict {
        Verdict::Accept
    }
    fn uses_slope(&self) -> bool {
        false
    }
}

/// Steepest descent in another unit.
struct Stretched(f64);

impl Direction<[f64; 1]> for Stretched {
    fn direction(&mut self, _: &[f64; 1], g: &[f64; 1], d: &mut [f64; 1]) -> Option<f64> {
        d[0] = -self.0 * g[0];
        None
    }
    fn moved(&mut self, _: Moved<'_, [f64; 1]>) {}
    fn reset(&mut self) {}
}

#[test]
fn no_point_beyond_the_largest_number_is_asked_about_or_moved_to() {
    // exp(-r x) is 0 at infinity, with a gradient of 0: it must not be taken for a minimizer. Each first move overflows,
    // by its step, by its direction, or by neither alone.
    for (rate, stretch, step, x0) in [
        (100.0, 1.0, 1e308, 0.0),
        (1e-100, 1e300, 1e150, 0.0),
        (1.0, 1e300, 1e10, 0.0),
        (1e-308, 1e308, 1e308, 1.5e308),
    ] {
        let descent = Descent::new(Stretched(stretch), Backtracking::default(), Anything)
            .with_first_trial(FirstTrial::Fixed(step))
            .unwrap()
            .with_stopping(Stopping {
                gradient: Some(0.0),
                iterations: 3,
                ..Stopping::default()
            })
            .unwrap();
        let mut run = descent.start([x0]);
        let mut asked = 0;
        while let Some(request) = run.request() {
            let x = request.point[0];
            assert!(x.is_finite(), "asked about {x} at rate {rate}");
            let value = (-rate * x).exp();
            request.gradient[0] = -rate * value;
            asked += 1;
            run.supply(Given::Both(value)).unwrap();
            assert!(run.point()[0].is_finite());
        }
        assert!(asked > 1);
        assert!(run.ending().is_some());
        assert!(run.finish().1.point[0].is_finite());
    }
}

#[test]
fn a_run_whose_every_trial_overflows_ends_all_the_same() {
    /// Steepest descent at first, far out of scale from its second direction on.
    struct Explodes {
        calls: u32,
    }
    impl Direction<[f64; 1]> for Explodes {
        fn direction(&mut self, _: &[f64; 1], g: &[f64; 1], d: &mut [f64; 1]) -> Option<f64> {
            self.calls += 1;
            d[0] = if self.calls > 1 { -1e300 * g[0] } else { -g[0] };
            None
        }
        fn moved(&mut self, _: Moved<'_, [f64; 1]>) {}
        fn reset(&mut self) {}
    }
    // One trial a search. In the second search it lies beyond the largest number: nothing is asked, nor after the reset,
    // and the run must say why it ended.
    let descent = Descent::new(
        Explodes { calls: 0 },
        Backtracking::default(),
        SufficientDecrease::default(),
    )
    .with_first_trial(FirstTrial::Fixed(1e10))
    .unwrap()
    .with_limits(Limits::new(0.0, f64::INFINITY, 1).unwrap())
    .with_stopping(Stopping {
        gradient: Some(0.0),
        ..Stopping::default()
    })
    .unwrap();
    let mut run = descent.start([2.0]);
    run.request().unwrap().gradient[0] = 1e-10;
    run.supply(Given::Both(2.0)).unwrap();
    let request = run.request().unwrap();
    assert_eq!(request.point, &[1.0]);
    request.gradient[0] = 1.0;
    run.supply(Given::Both(1.0)).unwrap();
    assert_eq!(run.iterations(), 1);
    assert!(run.request().is_none());
    let ending = run.ending().expect("nothing is wanted, so it has ended");
    assert!(matches!(ending, RunEnding::SearchFailed(_)), "{ending:?}");
    assert_eq!(run.supply(Given::Both(1.0)), Err(RunReply::NothingWanted));
    let (_, report) = run.finish();
    assert_eq!(report.ending, ending);
    assert_eq!((report.point, report.value), ([1.0], 1.0));
}

// ---- Any replies at all ----

/// What an adversary says to one request.
#[derive(Clone, Debug)]
struct Answer {
    kind: u8,
    value: f64,
    gradient: [f64; 3],
}

fn number() -> impl Strategy<Value = f64> {
    prop_oneof![
        4 => any::<u64>().prop_map(f64::from_bits),
        4 => -10.0..10.0,
        1 => -1e-300..1e-300,
        1 => any::<u32>().prop_map(|bits| f64::from(f32::from_bits(bits))),
        1 => prop::sample::select(vec![
            0.0, -0.0, f64::MIN_POSITIVE, 5e-324, f64::MAX, f64::MIN, f64::INFINITY, f64::NEG_INFINITY, f64::NAN, 1.0,
        ]),
    ]
}

fn answers() -> impl Strategy<Value = Vec<Answer>> {
    let answer = (any::<u8>(), number(), [number(), number(), number()]);
    let answer = answer.prop_map(|(kind, value, gradient)| Answer {
        kind,
        value,
        gradient,
    });
    prop::collection::vec(answer, 1..60)
}

/// The settings of a run against an adversary.
#[derive(Clone, Debug)]
struct Duel {
    choice: usize,
    cost: Cost,
    limits: Limits<f64>,
    first: FirstTrial,
    reference: Reference,
    longest_move: Option<f64>,
    value_noise: f64,
}

fn duels() -> impl Strategy<Value = Duel> {
    let limits = prop::sample::select(vec![
        Limits::default(),
        Limits::new(0.0, f64::INFINITY, 3).unwrap(),
        Limits::new(1e-3, 1.0, 10).unwrap(),
    ]);
    let first = prop::sample::select(vec![
        FirstTrial::ByDirection,
        FirstTrial::Unit,
        FirstTrial::Fixed(1e300),
        FirstTrial::SameChange,
        FirstTrial::BarzilaiBorweinLong,
        FirstTrial::BarzilaiBorweinShort,
        FirstTrial::HagerZhangQuadratic,
    ]);
    let reference = prop::sample::select(vec![
        Reference::Current,
        Reference::Current,
        Reference::LargestOfLast { values: 4 },
        Reference::WeightedAverage { eta: 0.85 },
    ]);
    let longest_move = prop::sample::select(vec![None, None, Some(1e-300), Some(0.5), Some(1e300)]);
    let value_noise = prop::sample::select(vec![0.0, 0.0, 1.0, 1e308]);
    let settings = (limits, first, reference, longest_move, value_noise);
    (0..CASTS, any::<bool>(), settings).prop_map(|(choice, joint, settings)| {
        let (limits, first, reference, longest_move, value_noise) = settings;
        let cost = if joint { Cost::Joint } else { Cost::Separate };
        Duel {
            choice,
            cost,
            limits,
            first,
            reference,
            longest_move,
            value_noise,
        }
    })
}

fn adversary<T: Real>(duel: &Duel, answers: &[Answer]) -> Result<(), TestCaseError> {
    let (iterations, evaluations) = (25, 400);
    let start = [1.0, -2.0, 3.0].map(T::of);
    let mut descent = cast::<T, 3>(duel.choice);
    if let Some(longest) = duel.longest_move {
        descent = descent.with_longest_move(longest).unwrap();
    }
    let mut run = descent
        .with_cost(duel.cost)
        .with_limits(duel.limits)
        .with_first_trial(duel.first)
        .unwrap()
        .with_reference(duel.reference)
        .unwrap()
        .with_value_noise(duel.value_noise)
        .unwrap()
        .with_stopping(Stopping {
            gradient: Some(0.0),
            iterations,
            evaluations,
            ..Stopping::default()
        })
        .unwrap()
        .start(start);
    let mut at_start = T::nan();
    let mut said = answers.iter().cycle();
    let mut replies = 0;
    while let Some(request) = run.request() {
        replies += 1;
        prop_assert!(replies <= 2 * evaluations, "it does not end");
        let Some(answer) = said.next() else { break };
        // The start is sane: everything else is not.
        let first = replies == 1;
        let cast = |x: f64| T::of(if first && !x.is_finite() { 2.0 } else { x });
        *request.gradient = answer.gradient.map(cast);
        let value = cast(answer.value);
        let given = match answer.kind % 12 {
            _ if first => Given::Both(value),
            0 => Given::OutsideDomain,
            1 => Given::NoGradient,
            2 => Given::Gradient,
            3 => Given::Value(value),
            4 => Given::Both(value),
            _ => match request.want {
                Want::Value => Given::Value(value),
                Want::Gradient => Given::Gradient,
                Want::Both => Given::Both(value),
            },
        };
        if first {
            at_start = value;
        }
        // A reply that does not fit is refused; a second one then ends the argument.
        if run.supply(given).is_err() {
            run.supply(Given::Both(value)).unwrap();
        }
        prop_assert!(run.iterations() <= iterations);
        prop_assert!(run.evaluations().calls() <= evaluations);
        prop_assert!(
            run.point().iter().all(|x| x.is_finite()),
            "it moved to {:?}",
            run.point()
        );
    }
    prop_assert!(run.ending().is_some());
    let (_, report) = run.finish();
    prop_assert!(
        report.point.iter().all(|x| x.is_finite()),
        "it hands over {:?}",
        report.point
    );
    if at_start.is_finite() {
        prop_assert!(
            report.value <= at_start,
            "{} is above {at_start}",
            report.value
        );
    }
    Ok(())
}

proptest! {
    #![proptest_config(ProptestConfig {
        cases: 2000,
        failure_persistence: None,
        rng_seed: RngSeed::Fixed(1), // the same replies on every machine
        ..ProptestConfig::default()
    })]

    #[test]
    fn no_replies_can_break_a_run(
        duel in duels(),
        single in any::<bool>(),
        answers in answers(),
    ) {
        if single {
            adversary::<f32>(&duel, &answers)?;
        } else {
            adversary::<f64>(&duel, &answers)?;
        }
    }
}

// ---- Who plays ----

const START: [f64; 2] = [-1.2, 1.0];
const CASTS: usize = 9;

type AnyRun<T, const N: usize> = Run<[T; N], BoxedDirection<[T; N]>, BoxedFinder<T>, BoxedRule<T>>;

fn lbfgs() -> Descent<Lbfgs<[f64; 2]>, MoreThuente, StrongWolfe<f64>> {
    Descent::new(
        Lbfgs::new(4).unwrap(),
        MoreThuente::new(),
        StrongWolfe::default(),
    )
}

fn cast<T: Real, const N: usize>(
    choice: usize,
) -> Descent<BoxedDirection<[T; N]>, BoxedFinder<T>, BoxedRule<T>> {
    let strict = || Box::new(StrongWolfe::new(T::of(1e-4), T::of(0.1)).unwrap());
    let (direction, finder, rule): (BoxedDirection<[T; N]>, BoxedFinder<T>, BoxedRule<T>) =
        match choice {
            0 => (
                Box::new(Lbfgs::new(1).unwrap()),
                Box::new(Bisection::new()),
                Box::new(WeakWolfe::default()),
            ),
            1 => (
                Box::new(Lbfgs::new(5).unwrap()),
                Box::new(InterpolatingBacktracking::new()),
                Box::new(SufficientDecrease::default()),
            ),
            2 => (
                Box::new(Lbfgs::new(5).unwrap()),
                Box::new(BracketZoom::new()),
                Box::new(Goldstein::default()),
            ),
            3 => (
                Box::new(Lbfgs::default()),
                Box::new(MoreThuente::new()),
                Box::new(StrongWolfe::default()),
            ),
            4..=8 => {
                let updates = [
                    Update::FletcherReeves,
                    Update::PolakRibierePlus,
                    Update::HestenesStiefelPlus,
                    Update::DaiYuan,
                    Update::HagerZhang,
                ];
                let update = updates[choice - 4];
                let finder: BoxedFinder<T> = match update {
                    Update::DaiYuan => Box::new(BracketZoom::new()),
                    Update::HagerZhang => Box::new(Bisection::new()),
                    _ => Box::new(MoreThuente::new()),
                };
                (Box::new(ConjugateGradient::new(update)), finder, strict())
            }
            _ => panic!("no such cast"),
        };
    Descent::new(direction, finder, rule)
}

/// Rosenbrock's function.
fn valley_at(x: &[f64; 2], g: &mut [f64; 2]) -> f64 {
    let (a, b) = (1.0 - x[0], x[1] - x[0] * x[0]);
    *g = [-2.0 * a - 400.0 * x[0] * b, 200.0 * b];
    a * a + 100.0 * b * b
}

/// Rosenbrock's function as an objective that notes what it was asked, in order.
struct Valley {
    cost: Cost,
    calls: Vec<(Want, [u64; 2])>,
}

impl Valley {
    fn new(cost: Cost) -> Self {
        Valley {
            cost,
            calls: Vec::new(),
        }
    }

    fn note(&mut self, want: Want, x: &[f64; 2]) {
        self.calls.push((want, x.map(f64::to_bits)));
    }

    /// What the present request of a run asks for; `None` at its end.
    fn answer<D, F, A>(&mut self, run: &mut Run<[f64; 2], D, F, A>) -> Option<Given<f64>>
    where
        D: Direction<[f64; 2]>,
        F: StepFinder<f64>,
        A: Acceptance<f64>,
    {
        let request = run.request()?;
        self.note(request.want, request.point);
        Some(match request.want {
            Want::Value => Given::Value(valley_at(request.point, &mut [0.0; 2])),
            Want::Gradient => {
                valley_at(request.point, request.gradient);
                Given::Gradient
            }
            Want::Both => Given::Both(valley_at(request.point, request.gradient)),
        })
    }

    fn serve<D, F, A>(&mut self, run: &mut Run<[f64; 2], D, F, A>)
    where
        D: Direction<[f64; 2]>,
        F: StepFinder<f64>,
        A: Acceptance<f64>,
    {
        while let Some(given) = self.answer(run) {
            run.supply(given).unwrap();
        }
    }
}

impl Objective<[f64; 2]> for Valley {
    type Error = std::convert::Infallible;
    fn cost(&self) -> Cost {
        self.cost
    }
    fn value(&mut self, x: &[f64; 2]) -> Result<f64, Self::Error> {
        self.note(Want::Value, x);
        Ok(valley_at(x, &mut [0.0; 2]))
    }
    fn gradient(&mut self, x: &[f64; 2], g: &mut [f64; 2]) -> Result<(), Self::Error> {
        self.note(Want::Gradient, x);
        valley_at(x, g);
        Ok(())
    }
    fn value_and_gradient(&mut self, x: &[f64; 2], g: &mut [f64; 2]) -> Result<f64, Self::Error> {
        self.note(Want::Both, x);
        Ok(valley_at(x, g))
    }
}
