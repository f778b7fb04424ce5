//! Why a search found nothing: each diagnosis comes with the right evidence, and a correct gradient is never blamed.
#![cfg(feature = "alloc")]

mod support;

use support::cast::every_finder as finders;

use support::curves::{FIRST_STEPS, PUBLISHED};
use support::rays::RandomRay;
use surefoot::acceptance::{
    AnyFinite, Goldstein, StrongWolfe, SufficientDecrease, WeakWolfe, rule, value_rule,
};
use surefoot::direction::{Lbfgs, Moved, SteepestDescent};
use surefoot::finder::{Backtracking, Bisection, MoreThuente};
use surefoot::{
    Acceptance, BeginError, BoxedFinder, BoxedRule, Cost, Descent, Direction, Ending, FirstTrial,
    Limits, Need, Objective, Proposal, Ray, RayFault, Report, RunEnding, Sample, Side, StepFinder,
    StepSearch, Stopping, Trial, Verdict, joint,
};

/// The ending of a search within `limits` along a curve of values and slopes.
fn ending<F: StepFinder<f64>, A: Acceptance<f64>>(
    finder: F,
    rule: A,
    limits: Limits<f64>,
    ray: Ray<f64>,
    first: f64,
    phi: impl Fn(f64) -> (f64, f64),
) -> Ending<f64> {
    let mut search = StepSearch::new(finder, rule).with_limits(limits);
    search
        .along(ray, first, phi)
        .expect("a fit ray")
        .outcome
        .ending
}

fn budget(trials: u32) -> Limits<f64> {
    Limits::new(0.0, f64::INFINITY, trials).expect("at least one trial")
}

fn within(lower: f64, upper: f64) -> Limits<f64> {
    Limits::new(lower, upper, 100).expect("lower <= upper")
}

fn armijo(decrease: f64) -> SufficientDecrease<f64> {
    SufficientDecrease::new(decrease).expect("in range")
}

// ---- One ending after another ----

#[test]
fn endless() {
    // In single precision doubling from 1 ends at 2^127, the last power of two.
    let mut search = StepSearch::new(Bisection::new(), WeakWolfe::<f32>::default())
        .with_limits(Limits::new(0.0, f32::INFINITY, 200).unwrap());
    let found = search.along(Ray::new(0.0, -1.0), 1.0, |a: f32| (-a, -1.0));
    let outcome = found.unwrap().outcome;
    assert_eq!(
        outcome.ending,
        Ending::Endless {
            step: 2_f32.powi(127)
        }
    );
    assert_eq!(outcome.trials, 128);
    let last = f64::MAX / 1.5;
    let found = ending(
        Bisection::new(),
        WeakWolfe::default(),
        budget(9),
        Ray::new(0.0, -1.0),
        last,
        |a| (-a, -1.0),
    );
    assert_eq!(found, Ending::Endless { step: last });
}

#[test]
fn flat() {
    for first in [1.0, 1e-9, 1e9] {
        let found = ending(
            Backtracking::default(),
            armijo(0.1),
            budget(10),
            Ray::new(3.0, -1e7),
            first,
            |_| (3.0, 0.0),
        );
        let told = Ending::Flat {
            value: 3.0,
            slope: -1e7,
            step: first,
        };
        assert_eq!(found, told);
    }
    // One trial is no flat stretch.
    let ray = Ray::new(3.0, -1e7);
    let found = ending(
        Backtracking::default(),
        armijo(0.1),
        budget(1),
        ray,
        1.0,
        |_| (3.0, 0.0),
    );
    assert_eq!(found, Ending::BudgetSpent { trials: 1 });
}

#[test]
fn a_slope_of_the_wrong_sign_by_every_finder() {
    // It rises at 3 from 2, and the slope is said to be -3.
    for (name, _) in finders::<f64>() {
        for rule in [strong(0.1), weak(0.9), decrease(0.1), goldstein()] {
            let phi = |a: f64| (2.0 + 3.0 * a + a * a, -3.0 - 2.0 * a);
            let mut search = StepSearch::new(fresh(name), rule);
            let found = search.along(Ray::new(2.0, -3.0), 1.0, phi).unwrap();
            told_wrong(name, found.outcome.ending, -3.0, 3.0, 2.0);
        }
    }
}

#[test]
fn a_slope_three_times_too_steep() {
    // It falls at 1; half of the promised 3 is never met. The exact minimisers find the minimum and are spent there.
    for (name, _) in finders::<f64>().into_iter().take(8) {
        let phi = |a: f64| (5.0 - a + a * a, -3.0 + 6.0 * a);
        let mut search = StepSearch::new(fresh(name), armijo(0.5));
        let found = search.along(Ray::new(5.0, -3.0), 1.0, phi).unwrap();
        told_wrong(name, found.outcome.ending, -3.0, -1.0, 5.0);
    }
}

#[test]
fn a_slope_that_is_wrong_at_any_scale() {
    for (first, size) in [
        (1e-6, 1.0),
        (1.0, 1e-6),
        (1e6, 1.0),
        (1e-3, 1e3),
        (30.0, 1e12),
    ] {
        let phi = |a: f64| (size * (1.0 + a), -size);
        for decrease in [decrease(1e-4), goldstein(), weak(0.9)] {
            let mut search = StepSearch::new(Backtracking::default(), decrease);
            let found = search.along(Ray::new(size, -size), first, phi).unwrap();
            told_wrong("Backtracking", found.outcome.ending, -size, size, size);
        }
    }
}

fn told_wrong(name: &str, ending: Ending<f64>, slope: f64, truth: f64, value: f64) {
    let Ending::WrongSlope {
        slope: said,
        measured,
        step,
    } = ending
    else {
        panic!("{name}: {ending:?}")
    };
    assert_eq!(said, slope, "{name}");
    // At the shortest step that means something rounding is a thousandth of the promise at most.
    assert!(
        (measured - truth).abs() <= 3e-3 * truth.abs(),
        "{name}: {measured:e}"
    );
    assert!(
        step * slope.abs() >= 1000.0 * f64::EPSILON * value,
        "{name}: {step:e}"
    );
}

#[test]
fn one_wrong_component_of_a_gradient() {
    // f = 1 + x^2 / 2 + 2 y^2 from (1, 1); its gradient is (1, 4), and -4 was written: d = (-1, 4), said -17, truly 15.
    let wrong = |x: &[f64; 2], g: &mut [f64; 2]| {
        *g = [x[0], -4.0 * x[1]];
        1.0 + 0.5 * x[0] * x[0] + 2.0 * x[1] * x[1]
    };
    for (name, _) in finders::<f64>() {
        let how = Descent::new(SteepestDescent, fresh(name), strong(0.9));
        let report = how.minimize([1.0, 1.0], joint(wrong)).unwrap();
        let RunEnding::SearchFailed(ending) = report.ending else {
            panic!("{name}: {:?}", report.ending)
        };
        told_wrong(name, ending, -17.0, 15.0, 3.5);
        assert_eq!((report.point, report.iterations), ([1.0, 1.0], 0), "{name}");
        assert_eq!(report.remedies.near_rounding, 0, "{name}");
    }
    let how = Descent::new(Lbfgs::default(), MoreThuente::new(), WeakWolfe::default());
    let report = how.minimize([1.0, 1.0], joint(wrong)).unwrap();
    let blamed = matches!(
        report.ending,
        RunEnding::SearchFailed(Ending::WrongSlope { .. })
    );
    assert!(blamed, "{:?}", report.ending);
}

#[test]
fn below_rounding() {
    // Each value but the first is a unit in the last place of 1 too high: the promised 1e-14 a drowns at every step.
    let phi = |a: f64| (1.0 + f64::EPSILON + a * a, -1e-14 + 2.0 * a);
    let ray = Ray::new(1.0, -1e-14);
    let found = ending(
        Backtracking::default(),
        armijo(0.1),
        budget(50),
        ray,
        1.0,
        phi,
    );
    let shortest = 2_f64.powi(-49);
    let told = Ending::BelowRounding {
        promised: 1e-14 * shortest,
        resolved: 4.0 * f64::EPSILON,
    };
    assert_eq!(found, told);
    // Stated noise counts twice, as in the rules.
    let ray = Ray::new(0.0, -1.0).with_value_noise(1e-3);
    let noisy = |a: f64| (0.01 + a, 1.0);
    let found = ending(
        Backtracking::default(),
        armijo(0.1),
        budget(6),
        ray,
        1.0,
        noisy,
    );
    let told = Ending::BelowRounding {
        promised: 2_f64.powi(-5),
        resolved: 2e-3,
    };
    assert_eq!(found, told);
}

#[test]
fn a_move_below_rounding() {
    // A point of 1e12, moves of 1e-6: the point stays where it is, to the last digit.
    let far = |x: &[f64; 1], g: &mut [f64; 1]| {
        *g = [1.0];
        x[0] - 1e12
    };
    let report = Descent::new(SteepestDescent, Backtracking::default(), armijo(0.1))
        .with_first_trial(FirstTrial::Fixed(1e-6))
        .unwrap()
        .minimize([1e12], joint(far))
        .unwrap();
    let told = Ending::MoveBelowRounding {
        moved: 1e-6,
        point: 1e12,
    };
    assert_eq!(report.ending, RunEnding::SearchFailed(told));
    assert_eq!(
        (report.point, report.value, report.iterations),
        ([1e12], 0.0, 0)
    );
    // A flat objective at a point where moves do count is flat.
    let report = Descent::new(SteepestDescent, Backtracking::default(), armijo(0.1))
        .with_first_trial(FirstTrial::Fixed(0.5))
        .unwrap()
        .minimize_fn([1.0], |_, g| {
            *g = [1.0];
            3.0
        })
        .unwrap();
    let told = Ending::Flat {
        value: 3.0,
        slope: -1.0,
        step: 0.5,
    };
    assert_eq!(report.ending, RunEnding::SearchFailed(told));
}

/// Nothing is acceptable: below 1 is too short, the rest too long.
fn wall() -> BoxedRule<f64> {
    Box::new(value_rule(|_: &Ray<f64>, t: &Trial<f64>| {
        Verdict::Refuse(if t.step < 1.0 {
            Side::TooShort
        } else {
            Side::TooLong
        })
    }))
}

#[test]
fn narrow_and_budget() {
    let ray = Ray::new(0.0, -1.0);
    let parabola = |a: f64| (a * a - a, 2.0 * a - 1.0);
    for (name, finder) in finders::<f64>().into_iter().take(8) {
        let found = ending(finder, wall(), budget(400), ray, 0.3, parabola);
        let told = Ending::Narrow {
            short: 1.0 - f64::EPSILON / 2.0,
            long: 1.0,
        };
        assert_eq!(found, told, "{name}");
        let found = ending(fresh(name), wall(), budget(5), ray, 0.3, parabola);
        assert_eq!(found, Ending::BudgetSpent { trials: 5 }, "{name}");
    }
}

#[test]
fn bounds() {
    let ray = Ray::new(0.0, -1.0);
    for (name, finder) in finders::<f64>() {
        let found = ending(finder, weak(0.9), within(0.0, 8.0), ray, 1.0, |a| {
            (-a, -1.0)
        });
        assert_eq!(found, Ending::UpperBound { bound: 8.0 }, "{name}");
    }
    for (name, finder) in finders::<f64>().into_iter().take(8) {
        let valley = |a: f64| ((a - 0.01).powi(2), 2.0 * (a - 0.01));
        let ray = Ray::new(valley(0.0).0, valley(0.0).1);
        let found = ending(finder, decrease(0.1), within(1.0, 1e3), ray, 4.0, valley);
        assert_eq!(found, Ending::LowerBound { bound: 1.0 }, "{name}");
    }
}

#[test]
fn edge() {
    let ray = Ray::new(0.0, -1.0);
    let fenced = |a: f64| {
        if a < 3.0 {
            (-a, -1.0)
        } else {
            (f64::NAN, f64::NAN)
        }
    };
    for (name, finder) in finders::<f64>().into_iter().take(8) {
        let found = ending(finder, weak(0.9), budget(300), ray, 1.0, fenced);
        let Ending::Edge { inside, outside } = found else {
            panic!("{name}: {found:?}")
        };
        assert!(inside < 3.0 && 3.0 <= outside, "{name}: {inside} {outside}");
        assert!(outside - inside <= 2.0 * f64::EPSILON * outside, "{name}");
    }
}

/// Proposes nothing.
struct Tired;

impl StepFinder<f64> for Tired {
    fn begin(&mut self, _: &Ray<f64>, first: f64) -> f64 {
        first
    }
    fn next(&mut self, _: &Ray<f64>, _: &Trial<f64>, _: Side) -> Proposal<f64> {
        Proposal::Spent
    }
}

#[test]
fn finder_spent_slope_missing_rule_undecided() {
    let ray = Ray::new(0.0, -1.0);
    let parabola = |a: f64| (a * a - a, 2.0 * a - 1.0);
    let found = ending(Tired, armijo(0.1), budget(9), ray, 7.0, parabola);
    assert_eq!(found, Ending::FinderSpent);

    let mut search = StepSearch::new(Bisection::new(), WeakWolfe::default());
    let found = search.along_lazily(ray, 0.25, |a: f64, need| match need {
        Need::Slope => Sample::NoSlope,
        _ => Sample::Value(a * a - a),
    });
    let outcome = found.unwrap().outcome;
    assert_eq!(outcome.ending, Ending::SlopeMissing { step: 0.25 });
    assert_eq!(outcome.best.unwrap().value, -0.1875);

    let never = rule(|_: &Ray<f64>, _: &Trial<f64>| Verdict::NeedsSlope);
    let found = ending(Bisection::new(), never, budget(9), ray, 0.25, parabola);
    assert_eq!(found, Ending::RuleUndecided { step: 0.25 });
}

/// Up the gradient after each move, and downhill again after a reset.
struct Contrary {
    uphill: bool,
}

impl Direction<[f64; 2]> for Contrary {
    fn begin(&mut self, _: &[f64; 2]) {}
    fn direction(&mut self, _: &[f64; 2], g: &[f64; 2], d: &mut [f64; 2]) -> Option<f64> {
        *d = g.map(|g| if self.uphill { g } else { -g });
        None
    }
    fn moved(&mut self, _: Moved<'_, [f64; 2]>) {
        self.uphill = true;
    }
    fn reset(&mut self) {
        self.uphill = false;
    }
}

fn bowl(x: &[f64; 2], g: &mut [f64; 2]) -> f64 {
    *g = [x[0], 4.0 * x[1]];
    0.5 * x[0] * x[0] + 2.0 * x[1] * x[1]
}

#[test]
fn not_descent_and_reset() {
    let from = |uphill| {
        let how = Descent::new(Contrary { uphill }, Backtracking::default(), armijo(0.1));
        how.minimize_fn([1.0, 1.0], bowl).unwrap()
    };
    // Uphill from the start: g.g = 17, and there is no memory to give up.
    let report = from(true);
    assert_eq!(report.ending, RunEnding::NotDescent { slope: 17.0 });
    assert_eq!(report.remedies.resets, 0);
    // After each move but the last it is reset, once.
    let report = from(false);
    assert!(report.converged(), "{:?}", report.ending);
    assert!(report.iterations > 3);
    assert_eq!(report.remedies.resets, report.iterations - 1);
    let mut search = StepSearch::new(Bisection::new(), WeakWolfe::default());
    let fault = search.begin(Ray::new(1.0, 0.0), 1.0);
    assert_eq!(fault, Err(BeginError::Ray(RayFault::NotDescent)));
}

#[test]
fn the_best_trial_is_taken() {
    // The rule refuses everything; the lowest trial is taken each time, up to a limit.
    let refuse = value_rule(|_: &Ray<f64>, _: &Trial<f64>| Verdict::Refuse(Side::TooLong));
    let report = Descent::new(SteepestDescent, Backtracking::default(), refuse)
        .with_limits(budget(4))
        .minimize_fn([1.0, 1.0], bowl)
        .unwrap();
    assert!(report.remedies.best_taken >= 3, "{report:?}");
    assert_eq!(report.remedies.best_taken, report.iterations);
    assert!(report.value < 2.5);
    let failed = RunEnding::SearchFailed(Ending::BudgetSpent { trials: 4 });
    assert_eq!(report.ending, failed);
}

#[test]
fn near_rounding() {
    // The bowl on a plateau of 1e6: values resolve 1e-10, gradients 1e-16.
    let high = |x: &[f64; 2], g: &mut [f64; 2]| 1e6 + bowl(x, g);
    let stopping = Stopping {
        gradient: Some(1e-11),
        ..Stopping::default()
    };
    let from = |rule: BoxedRule<f64>| -> Report<[f64; 2]> {
        Descent::new(Lbfgs::default(), MoreThuente::new(), rule)
            .with_stopping(stopping)
            .unwrap()
            .minimize([1.0, 1.0], joint(high))
            .unwrap()
    };
    for rule in [weak(0.9), strong(0.1)] {
        let report = from(rule);
        assert!(report.converged(), "{report:?}");
        assert!(report.remedies.near_rounding <= 1);
    }
    // With values of steps that rounding decides, each one a unit too high, it must be called upon.
    let mut first = true;
    let unlucky = |x: &[f64; 2], g: &mut [f64; 2]| {
        let start = std::mem::replace(&mut first, false);
        bowl(x, g) + if start { 1e6 } else { 1e6 + 1.2e-10 }
    };
    let report = Descent::new(Lbfgs::default(), MoreThuente::new(), strong(0.1))
        .with_stopping(Stopping {
            gradient: Some(1e-9),
            iterations: 200,
            ..Stopping::default()
        })
        .unwrap()
        .minimize([1e-6, 1e-6], joint(unlucky))
        .unwrap();
    assert_eq!(report.remedies.near_rounding, 1, "{report:?}");
    assert!(report.converged(), "{report:?}");
}

/// A search that refused a correct slope says anything but that.
#[test]
fn a_correct_slope_is_never_blamed() {
    let mut searches = 0_u32;
    let mut failed = 0_u32;
    let mut blamed = Vec::new();
    let mut try_one = |name: &str, phi: &dyn Fn(f64) -> (f64, f64), first: f64| {
        let (value, slope) = phi(0.0);
        for (finder, _) in finders::<f64>() {
            for (kind, rule) in [strong(1e-3), weak(0.1), decrease(0.1), goldstein()]
                .iter()
                .enumerate()
            {
                for trials in [3, 4, 5, 7, 10, 15, 20, 30, 40] {
                    let mut search =
                        StepSearch::new(fresh(finder), rule).with_limits(budget(trials));
                    let found = search.along(Ray::new(value, slope), first, phi);
                    let ending = found.unwrap().outcome.ending;
                    searches += 1;
                    failed += u32::from(ending != Ending::Accepted);
                    if let Ending::WrongSlope { .. } = ending {
                        blamed.push(format!(
                            "{finder}, rule {kind}, {name} from {first:e}, {trials} trials: {ending}"
                        ));
                    }
                }
            }
        }
    };
    for published in &PUBLISHED {
        for first in FIRST_STEPS.into_iter().chain([1e6]) {
            try_one(
                &format!("function {}", published.number),
                &published.at,
                first,
            );
        }
    }
    for seed in 0..150 {
        let ray = RandomRay::new(seed);
        try_one(&format!("ray {seed}"), &|a| ray.at(a), ray.first);
        try_one(&format!("ray {seed}"), &|a| ray.at(a), 1e4 * ray.first);
    }
    println!(
        "{searches} searches, {failed} of them without a step, {} blamed the slope",
        blamed.len()
    );
    assert!(
        failed > 1000,
        "too easy: only {failed} searches found nothing"
    );
    let such = &blamed[..blamed.len().min(8)];
    assert!(
        blamed.is_empty(),
        "{} such as\n{}",
        blamed.len(),
        such.join("\n")
    );
}

/// A sum of non-negative terms that stops at the ceiling gives values that mean "above" and no more.
#[test]
fn a_value_cut_short_at_the_ceiling_blames_no_slope() {
    for trials in 3..=40 {
        let mut terms = Steep;
        let report = Descent::new(SteepestDescent, Backtracking::default(), armijo(0.1))
            .with_limits(budget(trials))
            .with_first_trial(FirstTrial::Fixed(1e6))
            .unwrap()
            .minimize([1.0], &mut terms)
            .unwrap();
        let blamed = matches!(
            report.ending,
            RunEnding::SearchFailed(Ending::WrongSlope { .. })
        );
        assert!(!blamed, "{trials} trials: {}", report.ending);
    }
}

/// `f(x) = x^2`, as ten thousand equal terms.
struct Steep;

impl Objective<[f64; 1]> for Steep {
    type Error = std::convert::Infallible;
    fn cost(&self) -> Cost {
        Cost::Separate
    }
    fn value(&mut self, x: &[f64; 1]) -> Result<f64, Self::Error> {
        self.value_up_to(x, None)
    }
    fn value_up_to(&mut self, x: &[f64; 1], ceiling: Option<f64>) -> Result<f64, Self::Error> {
        let term = 1e-4 * x[0] * x[0];
        let whole = 1e4 * term;
        // The first partial sum above the ceiling, without adding them up.
        Ok(match ceiling {
            Some(ceiling) if whole > ceiling => ((ceiling / term).floor() + 1.0) * term,
            _ => whole,
        })
    }
    fn gradient(&mut self, x: &[f64; 1], g: &mut [f64; 1]) -> Result<(), Self::Error> {
        *g = [2.0 * x[0]];
        Ok(())
    }
}

#[test]
fn a_finite_value_is_all_that_any_finite_asks_for() {
    let found = ending(
        Tired,
        AnyFinite,
        budget(1),
        Ray::new(0.0, -1.0),
        2.0,
        |_| (9.0, 9.0),
    );
    assert_eq!(found, Ending::Accepted);
}

// ---- The sentences ----

#[test]
fn sentences() {
    let told: [(Ending<f64>, &str); 14] = [
        (Ending::Accepted, "a step was accepted"),
        (
            Ending::BudgetSpent { trials: 7 },
            "the budget of 7 trials ran out: look at the log for a side that never changes, or allow more",
        ),
        (
            Ending::UpperBound { bound: 8.0 },
            "the upper bound 8.000e0 is still too short for the rule: take it as it is, or raise the bound",
        ),
        (
            Ending::LowerBound { bound: 0.5 },
            "the lower bound 5.000e-1 is still too long: lower it, or check the sign and scale of the gradient",
        ),
        (
            Ending::Edge {
                inside: 1.0,
                outside: 1.5,
            },
            "the function falls right up to the edge of its domain, between 1.00000000000000000e0 and \
             1.50000000000000000e0: the minimum lies on a constraint that the objective does not say",
        ),
        (
            Ending::Endless { step: 1e300 },
            "the function still falls at step 1.000e300: it seems to be unbounded below along this direction",
        ),
        (
            Ending::Flat {
                value: 3.0,
                slope: -1.0,
                step: 0.5,
            },
            "every value up to step 5.000e-1 equals the one at the start, 3.000000e0, although the slope there is \
             -1.000e0: the variables may not reach the objective, or the steps may be too short to be felt",
        ),
        (
            Ending::MoveBelowRounding {
                moved: 1e-6,
                point: 1e12,
            },
            "moves up to 1.000e-6 vanish in the rounding of a point of size 1.000e12: rescale the variables, or take \
             longer first steps",
        ),
        (
            Ending::WrongSlope {
                slope: -3.0,
                measured: 3.0,
                step: 1e-9,
            },
            "the slope at the start is said to be -3.000000e0, but the values up to step 1.000e-9 change at \
             3.000000e0: check the gradient against differences, or whether the objective is smooth there",
        ),
        (
            Ending::BelowRounding {
                promised: 1e-20,
                resolved: 1e-15,
            },
            "acceptable steps promise a decrease of 1.000e-20, and values resolve only 1.000e-15: this may be the minimum \
             as far as the arithmetic goes; use a rule that goes by slopes, or state the noise",
        ),
        (
            Ending::Narrow {
                short: 0.5,
                long: 1.0,
            },
            "no acceptable step exists between the neighbouring steps 5.00000000000000000e-1 and \
             1.00000000000000000e0: check that the gradient belongs to the value, or whether the decrease drowns in \
             rounding",
        ),
        (
            Ending::FinderSpent,
            "the step finder had nothing more to propose: use another, or allow it more",
        ),
        (
            Ending::SlopeMissing { step: 0.25 },
            "the rule needs the slope at step 2.500e-1 and none could be given: give slopes, or use a rule that reads \
             values only",
        ),
        (
            Ending::RuleUndecided { step: 0.25 },
            "the rule asked for the slope at step 2.500e-1 although it had it: NeedsSlope may be said only while the \
             slope is unknown",
        ),
    ];
    for (ending, sentence) in told {
        assert_eq!(ending.to_string(), sentence);
    }
}

// ---- Who plays ----

fn fresh(name: &str) -> BoxedFinder<f64> {
    let found = finders().into_iter().find(|finder| finder.0 == name);
    found.expect("a finder of this name").1
}

fn strong(curvature: f64) -> BoxedRule<f64> {
    Box::new(StrongWolfe::new(1e-4, curvature).expect("in range"))
}

fn weak(curvature: f64) -> BoxedRule<f64> {
    Box::new(WeakWolfe::new(1e-4, curvature).expect("in range"))
}

fn decrease(decrease: f64) -> BoxedRule<f64> {
    Box::new(armijo(decrease))
}

fn goldstein() -> BoxedRule<f64> {
    Box::new(Goldstein::new(0.25).expect("in range"))
}
