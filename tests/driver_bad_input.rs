//! What a driver cannot work with is named, each by its own error, and the texts say what to do.
#![cfg(feature = "alloc")]

use std::convert::Infallible;
use surefoot::acceptance::{SufficientDecrease, WeakWolfe};
use surefoot::direction::{ConjugateGradient, Lbfgs, LbfgsError, Moved, SteepestDescent, Update};
use surefoot::finder::{Backtracking, Bisection};
use surefoot::{
    Cost, Criterion, Descent, DescentError, Direction, Ending, Fault, FirstTrial, Given, Report,
    RunEnding, RunReply, SettingError, Stopping, Want, joint, separate,
};

const BAD: [f64; 3] = [f64::NAN, f64::INFINITY, f64::NEG_INFINITY];

// ---- The start ----

#[test]
fn an_empty_point_is_refused_and_nothing_is_asked() {
    let report = refused(usual(), vec![], |_, _| panic!("asked"), Fault::EmptyPoint);
    assert_eq!(report.evaluations.calls(), 0);
    let run =
        Descent::new(SteepestDescent, Bisection::new(), WeakWolfe::default()).start([0.0_f64; 0]);
    assert_eq!(run.ending(), Some(RunEnding::Fault(Fault::EmptyPoint)));
    let run = usual().start_known(Vec::new(), 1.0, Vec::new());
    assert_eq!(run.ending(), Some(RunEnding::Fault(Fault::EmptyPoint)));
}

#[test]
fn a_point_that_is_not_finite_is_refused_and_nothing_is_asked() {
    for bad in BAD {
        for at in 0..21 {
            let mut x0 = vec![1.0; 21];
            x0[at] = bad;
            let report = refused(usual(), x0, |_, _| panic!("asked"), Fault::PointNotFinite);
            assert_eq!(report.evaluations.calls(), 0);
            assert!(report.value.is_nan() && report.gradient.is_none());
        }
    }
}

#[test]
fn a_value_at_the_start_that_is_not_finite_is_named() {
    for bad in BAD {
        let report = refused(usual(), vec![1.0, 2.0], |_, _| bad, Fault::ValueNotFinite);
        assert_eq!(report.point, vec![1.0, 2.0]);
        assert_eq!((report.iterations, report.evaluations.calls()), (0, 1));
        let apart = separate(|_: &Vec<f64>| bad, |_: &Vec<f64>, _: &mut Vec<f64>| ());
        let error = usual().minimize(vec![1.0], apart).unwrap_err();
        assert!(matches!(
            error,
            DescentError::Input {
                fault: Fault::ValueNotFinite,
                ..
            }
        ));
    }
}

#[test]
fn a_gradient_at_the_start_that_is_not_finite_never_counts_as_converged() {
    let eager = || {
        let stopping = Stopping {
            gradient: Some(1e300),
            gradient_by_value: 1e300,
            value_change: 1e300,
            step_change: 1e300,
            target: Some(1e300),
            ..Stopping::default()
        };
        usual().with_stopping(stopping).unwrap()
    };
    for n in [1, 2, 8, 9, 21] {
        for at in 0..n {
            for bad in BAD {
                let fill = |_: &Vec<f64>, g: &mut Vec<f64>| {
                    g.fill(0.0);
                    g[at] = bad;
                    3.5
                };
                let report = refused(eager(), vec![1.0; n], fill, Fault::GradientNotFinite);
                assert_eq!((report.value, report.iterations), (3.5, 0));
                assert_eq!((report.gradient, report.gradient_max), (None, None));
                // With the gradient asked for on its own, too.
                let mut run = eager().start(vec![1.0; n]);
                run.supply(Given::Value(3.5)).unwrap();
                fill(&vec![], run.request().unwrap().gradient);
                run.supply(Given::Gradient).unwrap();
                let fault = RunEnding::Fault(Fault::GradientNotFinite);
                assert_eq!(run.ending(), Some(fault));
            }
        }
    }
}

// ---- Later ----

#[test]
fn a_gradient_that_is_not_finite_later_is_a_trial_outside_of_the_domain() {
    // x^2 from 3, with no gradient between 1.2 and 2.2: the way to 0 leads over it.
    for bad in BAD {
        for at in 0..3 {
            for cost in [Cost::Separate, Cost::Joint] {
                let descent = Descent::new(SteepestDescent, Bisection::new(), WeakWolfe::default())
                    .with_first_trial(FirstTrial::Fixed(0.3))
                    .unwrap()
                    .with_cost(cost);
                let mut run = descent.start(vec![3.0; 3]);
                let mut spoiled = 0;
                while let Some(request) = run.request() {
                    let x = request.point;
                    let value = x.iter().map(|x| x * x).sum();
                    for (g, x) in request.gradient.iter_mut().zip(x) {
                        *g = 2.0 * x;
                    }
                    if (1.2..2.2).contains(&x[0]) && request.want != Want::Value {
                        request.gradient[at] = bad;
                        spoiled += 1;
                    }
                    let given = match request.want {
                        Want::Value => Given::Value(value),
                        Want::Gradient => Given::Gradient,
                        Want::Both => Given::Both(value),
                    };
                    run.supply(given).unwrap();
                    assert!(!(1.2..2.2).contains(&run.point()[0]), "it moved there");
                    assert!(
                        run.gradient()
                            .is_none_or(|g| g.iter().all(|g| g.is_finite()))
                    );
                }
                let (_, report) = run.finish();
                assert!(spoiled > 0);
                assert_eq!(report.refusals.outside, spoiled, "{bad} at {at}");
                assert!(report.point[0] < 3.0);
            }
        }
    }
}

#[test]
fn a_value_that_is_not_finite_later_is_outside_of_the_domain() {
    for bad in BAD {
        let descent = usual().with_first_trial(FirstTrial::Fixed(64.0)).unwrap();
        let report = descent
            .minimize_fn(vec![1.0, -1.0], |x, g| {
                (g[0], g[1]) = (2.0 * x[0], 2.0 * x[1]);
                if x[0].abs() > 2.0 {
                    bad
                } else {
                    x[0] * x[0] + x[1] * x[1]
                }
            })
            .unwrap();
        assert_eq!(
            report.ending,
            RunEnding::Converged(Criterion::Gradient),
            "{bad}"
        );
        assert!(report.refusals.outside > 0);
    }
}

#[test]
fn a_vector_of_another_length_is_named_at_the_start_and_later() {
    for found in [0, 1, 2, 4, 50] {
        for swapped_at in [1, 2, 3, 5, 8] {
            let mut calls = 0;
            let mut least = f64::INFINITY;
            let fault = Fault::LengthChanged { expected: 3, found };
            let report = refused(
                usual(),
                vec![3.0, -2.0, 1.0],
                |x, g| {
                    calls += 1;
                    *g = vec![2.0 * x[0], 20.0 * x[1], 200.0 * x[2]];
                    let value = x[0] * x[0] + 10.0 * x[1] * x[1] + 100.0 * x[2] * x[2];
                    if calls == swapped_at {
                        *g = vec![1.0; found];
                    } else {
                        least = value.min(least);
                    }
                    value
                },
                fault,
            );
            assert_eq!(calls, swapped_at);
            assert_eq!(report.evaluations.calls(), swapped_at);
            assert_eq!(report.point.len(), 3);
            // The best point so far is still there, unless the very first reply was the bad one.
            assert!(report.value == least || swapped_at == 1 && report.value.is_nan());
            assert!(report.gradient.is_none_or(|g| g.len() == 3));
        }
    }
}

#[test]
fn a_swapped_vector_is_noticed_whatever_is_said_beside_it() {
    let fault = RunEnding::Fault(Fault::LengthChanged {
        expected: 2,
        found: 5,
    });
    // At the start.
    for given in [Given::Value(1.0), Given::OutsideDomain, Given::Both(1.0)] {
        let mut run = usual().start(vec![1.0, 2.0]);
        *run.request().unwrap().gradient = vec![0.0; 5];
        run.supply(given).unwrap();
        assert_eq!(run.ending(), Some(fault), "{given:?}");
    }
    // In a search, where a value or a gradient is wanted.
    for (wanted, given) in [
        (Want::Value, Given::Value(1.0)),
        (Want::Value, Given::OutsideDomain),
        (Want::Gradient, Given::NoGradient),
        (Want::Gradient, Given::OutsideDomain),
        (Want::Gradient, Given::Gradient),
    ] {
        let mut run = usual().start(vec![1.0, 2.0]);
        loop {
            let request = run.request().unwrap();
            if request.want == wanted {
                *request.gradient = vec![0.0; 5];
                break run.supply(given).unwrap();
            }
            let x = request.point;
            *request.gradient = vec![2.0 * x[0], 2.0 * x[1]];
            let value = x[0] * x[0] + x[1] * x[1];
            let answer = match request.want {
                Want::Value => Given::Value(value),
                _ => Given::Both(value),
            };
            run.supply(answer).unwrap();
        }
        assert_eq!(run.ending(), Some(fault), "{given:?} for {wanted:?}");
        assert_eq!(run.finish().1.point.len(), 2);
    }
}

// ---- Directions of the caller's own ----

/// Steepest descent that goes wrong from one call on; a reset may put it right.
struct Wrong {
    how: fn(&Vec<f64>, &mut Vec<f64>),
    from: u32,
    calls: u32,
    reset_helps: bool,
    resets: u32,
}

impl Direction<Vec<f64>> for Wrong {
    fn begin(&mut self, _: &Vec<f64>) {}
    fn direction(&mut self, _: &Vec<f64>, g: &Vec<f64>, d: &mut Vec<f64>) -> Option<f64> {
        self.calls += 1;
        d.clone_from(g);
        d.iter_mut().for_each(|d| *d = -*d);
        if self.calls >= self.from {
            (self.how)(g, d);
        }
        None
    }
    fn moved(&mut self, _: Moved<'_, Vec<f64>>) {}
    fn reset(&mut self) {
        self.resets += 1;
        if self.reset_helps {
            self.from = u32::MAX;
        }
    }
}

#[test]
fn a_direction_that_does_not_descend_is_named_with_its_slope() {
    type Spoil = fn(&Vec<f64>, &mut Vec<f64>);
    let zero: Spoil = |_, d| d.fill(0.0);
    let ascent: Spoil = |g, d| d.clone_from(g);
    let nan_first: Spoil = |_, d| d[0] = f64::NAN;
    let nan_last: Spoil = |_, d| d[2] = f64::NAN;
    let infinite: Spoil = |_, d| d[1] = f64::NEG_INFINITY;
    let mut kinds = Vec::new();
    for (name, how) in [
        ("zero", zero),
        ("ascent", ascent),
        ("NaN first", nan_first),
        ("NaN last", nan_last),
        ("infinite", infinite),
    ] {
        for from in [1, 4] {
            for reset_helps in [false, true] {
                let wrong = Wrong {
                    how,
                    from,
                    calls: 0,
                    reset_helps,
                    resets: 0,
                };
                let descent = Descent::new(wrong, Bisection::new(), WeakWolfe::default());
                let mut run = descent.start(vec![3.0, 2.0, 1.0]);
                while let Some(request) = run.request() {
                    let value = bowl(request.point, request.gradient);
                    run.supply(Given::Both(value)).unwrap();
                }
                // Of its own accord a run resets once the direction has learnt something: after a move.
                let rescued = reset_helps && from > 1;
                assert_eq!(run.direction().resets, u32::from(from > 1), "{name}");
                let (_, report) = run.finish();
                assert_eq!(report.remedies.resets, u64::from(from > 1), "{name}");
                match report.ending {
                    RunEnding::Converged(_) => assert!(rescued, "{name}"),
                    RunEnding::NotDescent { slope } => {
                        assert!(!rescued, "{name}");
                        assert!(
                            !(slope < 0.0) || slope == f64::NEG_INFINITY,
                            "{name}: {slope}"
                        );
                        assert_eq!(report.iterations, u64::from(from - 1));
                        kinds.push(slope);
                    }
                    other => panic!("{name}: {other:?}"),
                }
            }
        }
    }
    assert!(
        kinds.iter().any(|s| s.is_nan()) && kinds.contains(&0.0) && kinds.iter().any(|s| *s > 0.0)
    );
}

// ---- Settings ----

#[test]
fn settings_out_of_range_are_refused_each_by_its_own_error() {
    let refused = |stopping: Stopping| usual().with_stopping(stopping).err();
    let usual_stopping = Stopping::default();
    for bad in [-1e-300, f64::NAN, f64::INFINITY, f64::NEG_INFINITY] {
        let cases = [
            (
                Stopping {
                    gradient: Some(bad),
                    ..usual_stopping
                },
                SettingError::Gradient,
            ),
            (
                Stopping {
                    gradient_by_value: bad,
                    ..usual_stopping
                },
                SettingError::Gradient,
            ),
            (
                Stopping {
                    value_change: bad,
                    ..usual_stopping
                },
                SettingError::ValueChange,
            ),
            (
                Stopping {
                    step_change: bad,
                    ..usual_stopping
                },
                SettingError::StepChange,
            ),
        ];
        for (stopping, error) in cases {
            assert_eq!(refused(stopping), Some(error), "{bad}");
        }
        for first in [
            FirstTrial::Fixed(bad),
            FirstTrial::Diminishing { first: bad },
        ] {
            let error = usual().with_first_trial(first).err();
            assert_eq!(error, Some(SettingError::FirstTrial), "{bad}");
        }
        let error = usual().with_longest_move(bad).err();
        assert_eq!(error, Some(SettingError::LongestMove), "{bad}");
        let error = usual().with_value_noise(bad).err();
        assert_eq!(error, Some(SettingError::ValueNoise), "{bad}");
    }
    let target = Stopping {
        target: Some(f64::NAN),
        ..usual_stopping
    };
    assert_eq!(refused(target), Some(SettingError::Target));
    for zero in [0.0, -0.0] {
        let error = usual().with_first_trial(FirstTrial::Fixed(zero)).err();
        assert_eq!(error, Some(SettingError::FirstTrial));
        assert_eq!(
            usual().with_longest_move(zero).err(),
            Some(SettingError::LongestMove)
        );
        assert_eq!(usual().with_value_noise(zero).err(), None);
    }
    // What is in range is taken: zeros, the least positive number, a target of minus infinity.
    let edge = Stopping {
        gradient: Some(0.0),
        gradient_by_value: f64::MAX,
        value_change: 5e-324,
        step_change: 0.0,
        target: Some(f64::NEG_INFINITY),
        iterations: 0,
        evaluations: 0,
    };
    assert_eq!(refused(edge), None);
    assert_eq!(
        usual().with_first_trial(FirstTrial::Fixed(5e-324)).err(),
        None
    );
    assert_eq!(Lbfgs::<Vec<f64>>::new(0).err(), Some(LbfgsError::Memory));
}

#[test]
fn a_setting_that_single_precision_cannot_hold_does_no_harm() {
    let descent = Descent::new(
        SteepestDescent,
        Backtracking::default(),
        SufficientDecrease::<f32>::default(),
    )
    .with_first_trial(FirstTrial::Fixed(1e300))
    .unwrap()
    .with_stopping(Stopping {
        gradient: Some(1e-300),
        target: Some(1e-3),
        iterations: 500,
        ..Stopping::default()
    })
    .unwrap();
    let report = descent
        .minimize_fn(vec![1.0_f32], |x, g| {
            g[0] = 2.0 * x[0];
            x[0] * x[0]
        })
        .unwrap();
    assert_eq!(report.ending, RunEnding::Converged(Criterion::Target));
}

// ---- Texts ----

#[test]
fn the_texts_say_what_to_do() {
    let fault = |fault: Fault| fault.to_string();
    assert_eq!(
        fault(Fault::EmptyPoint),
        "the starting point is empty: there is nothing to minimise over"
    );
    assert_eq!(
        fault(Fault::PointNotFinite),
        "the starting point has a component that is not finite"
    );
    assert_eq!(
        fault(Fault::ValueNotFinite),
        "the value at the starting point is not finite: begin where the objective is defined"
    );
    assert_eq!(
        fault(Fault::GradientNotFinite),
        "the gradient at the starting point has a component that is not finite: check its formula there"
    );
    assert_eq!(
        fault(Fault::LengthChanged {
            expected: 3,
            found: 2
        }),
        "the gradient has 2 components where the point has 3: the objective must fill it, not replace it"
    );

    let ending = |ending: RunEnding<f64>| ending.to_string();
    for (criterion, text) in [
        (Criterion::Gradient, "converged: the gradient is small"),
        (
            Criterion::ValueChange,
            "converged: the last move hardly changed the value",
        ),
        (Criterion::StepChange, "converged: the last move was short"),
        (Criterion::Target, "converged: the target value is reached"),
    ] {
        assert_eq!(ending(RunEnding::Converged(criterion)), text);
    }
    assert_eq!(
        ending(RunEnding::IterationsSpent),
        "the limit on iterations was reached: go on from this point, or allow more"
    );
    assert_eq!(
        ending(RunEnding::EvaluationsSpent),
        "the limit on evaluations was reached: go on from this point, or allow more"
    );
    assert_eq!(
        ending(RunEnding::SearchFailed(Ending::FinderSpent)),
        "no acceptable step was found: the step finder had nothing more to propose: use another, or allow it more"
    );
    assert_eq!(
        ending(RunEnding::NotDescent { slope: 0.5 }),
        "the direction does not descend (slope 5.000e-1), not even after a reset: check the gradient's sign, and that the \
         direction is neither zero nor NaN"
    );
    assert_eq!(
        ending(RunEnding::AtRounding),
        "value and gradient improve no more: along the directions tried, the arithmetic resolves no better here; \
         rescale the variables, try another direction, or accept the point"
    );
    assert_eq!(ending(RunEnding::Stopped), "stopped by the caller");
    assert_eq!(
        ending(RunEnding::Fault(Fault::EmptyPoint)),
        fault(Fault::EmptyPoint)
    );

    for (error, text) in [
        (
            SettingError::Gradient,
            "the gradient tolerances must be finite and not negative",
        ),
        (
            SettingError::ValueChange,
            "the tolerance on the change of the value must be finite and not negative: 0 switches it off",
        ),
        (
            SettingError::StepChange,
            "the tolerance on the length of a move must be finite and not negative: 0 switches it off",
        ),
        (
            SettingError::Target,
            "the target value is not a number: use None for no target",
        ),
        (
            SettingError::FirstTrial,
            "a fixed or diminishing first trial must be positive and finite",
        ),
        (
            SettingError::LongestMove,
            "the cap on the length of a move must be positive and finite",
        ),
        (
            SettingError::ValueNoise,
            "the noise of the values must be finite and not negative",
        ),
    ] {
        assert_eq!(error.to_string(), text);
    }
    for (error, text) in [
        (
            RunReply::NothingWanted,
            "the run has ended: nothing is wanted",
        ),
        (
            RunReply::ValueWanted,
            "a value is wanted here, and a gradient alone was given: give the value, or both",
        ),
        (
            RunReply::GradientWanted,
            "a gradient is wanted here, and a value alone was given: write the gradient, or say NoGradient",
        ),
    ] {
        assert_eq!(error.to_string(), text);
    }
    assert_eq!(
        LbfgsError::Memory.to_string(),
        "the memory must hold at least one pair: 5 to 20 is usual"
    );
}

#[test]
fn a_drivers_error_tells_the_fault_or_the_callers_own() {
    let input = usual().minimize_fn(Vec::new(), |_, _| 0.0).unwrap_err();
    assert_eq!(
        input.to_string(),
        "the starting point is empty: there is nothing to minimise over"
    );
    assert_eq!(input.report().ending, RunEnding::Fault(Fault::EmptyPoint));
    let own = usual()
        .minimize_fn(vec![1.0], |_, _| Err::<f64, _>("the pump is off"))
        .unwrap_err();
    assert_eq!(own.to_string(), "the objective failed: the pump is off");
    assert_eq!(own.report().point, vec![1.0]);
    assert_eq!(own.report().ending, RunEnding::Stopped);
    // It goes where any error goes, if the caller's own does.
    let failed = usual().minimize_fn(vec![1.0], |_, _| Err::<f64, _>(std::fmt::Error));
    let any: Box<dyn std::error::Error> = Box::new(failed.unwrap_err());
    assert!(any.to_string().starts_with("the objective failed: "));
}

// ---- Who plays ----

fn usual() -> Descent<ConjugateGradient, Bisection, WeakWolfe<f64>> {
    Descent::new(
        ConjugateGradient::new(Update::PolakRibierePlus),
        Bisection::new(),
        WeakWolfe::new(1e-4, 0.1).unwrap(),
    )
}

fn bowl(x: &[f64], g: &mut [f64]) -> f64 {
    for (g, x) in g.iter_mut().zip(x) {
        *g = 2.0 * x;
    }
    x.iter().map(|x| x * x).sum()
}

/// The report of a run that ends with this fault.
fn refused(
    descent: Descent<ConjugateGradient, Bisection, WeakWolfe<f64>>,
    x0: Vec<f64>,
    both: impl FnMut(&Vec<f64>, &mut Vec<f64>) -> f64,
    expected: Fault,
) -> Report<Vec<f64>> {
    match descent.minimize(x0, joint(both)) {
        Err(DescentError::<_, Infallible>::Input { fault, report }) => {
            assert_eq!(fault, expected);
            assert_eq!(report.ending, RunEnding::Fault(fault));
            report
        }
        other => panic!("{other:?} where {expected:?} was due"),
    }
}
