//! Exact steps are exact: steepest descent with them obeys Kantorovich's bound and attains it, published minimizers come
//! out, nothing depends on units, values alone will do, and the finders end whatever they are told.
#![cfg(feature = "alloc")] // finders and rules in boxes

mod support;

use proptest::prelude::*;
use std::ops::ControlFlow;
use support::cast::Rule;
use support::curves::{FIRST_STEPS, PUBLISHED};
use support::rays::RandomRay;
use support::table::Table;
use surefoot::acceptance::{AnyDecrease, ForcingDecrease, StrongWolfe, SufficientDecrease, rule};
use surefoot::direction::SteepestDescent;
use surefoot::finder::{
    BrentSlopes, BrentValues, ExactStepError, Expansion, ExpansionError, GoldenSection, HagerZhang,
};
use surefoot::{
    BoxedFinder, Descent, Ending, Limits, Need, Proposal, Ray, Real, Sample, Side, StepSearch,
    Stopping, Trial, Verdict, joint,
};

/// The exact minimisers, at a relative tolerance.
fn exact<T: Real>(tolerance: f64) -> [(&'static str, BoxedFinder<T>); 3] {
    let (fit, tolerance) = ("a tolerance in range", T::of(tolerance));
    [
        (
            "BrentSlopes",
            Box::new(BrentSlopes::new(tolerance).expect(fit)),
        ),
        (
            "BrentValues",
            Box::new(BrentValues::new(tolerance).expect(fit)),
        ),
        (
            "GoldenSection",
            Box::new(GoldenSection::new(tolerance).expect(fit)),
        ),
    ]
}

/// A rule for each random ray, by name.
type Named = (&'static str, fn(&RandomRay) -> Rule);

/// The square root of the machine epsilon: the default tolerance.
const USUAL: f64 = 1.490_116_119_384_765_6e-8;

/// `x'Hx / 2` with the eigenvalues of `H` as given and eigenvectors reflected by `v`: `H = P D P`, `P = I - 2 v v' / v'v`.
#[derive(Clone, Debug)]
struct Bowl {
    eigenvalues: Vec<f64>,
    v: Vec<f64>,
}

impl Bowl {
    fn reflected(&self, x: &[f64]) -> Vec<f64> {
        let (vv, vx): (f64, f64) = (dot(&self.v, &self.v), dot(&self.v, x));
        x.iter()
            .zip(&self.v)
            .map(|(x, v)| x - 2.0 * vx / vv * v)
            .collect()
    }

    fn times(&self, x: &[f64]) -> Vec<f64> {
        let scaled: Vec<f64> = (self.reflected(x).iter().zip(&self.eigenvalues))
            .map(|(y, d)| y * d)
            .collect();
        self.reflected(&scaled)
    }

    fn value(&self, x: &[f64]) -> f64 {
        let squares = self.reflected(x).into_iter().zip(&self.eigenvalues);
        0.5 * squares.map(|(y, d)| d * y * y).sum::<f64>()
    }

    fn condition(&self) -> f64 {
        let most = self.eigenvalues.iter().copied().fold(0.0, f64::max);
        let least = self
            .eigenvalues
            .iter()
            .copied()
            .fold(f64::INFINITY, f64::min);
        most / least
    }
}

fn dot(x: &[f64], y: &[f64]) -> f64 {
    x.iter().zip(y).map(|(x, y)| x * y).sum()
}

/// Condition numbers from 1 to 1e4.
fn bowls() -> impl Strategy<Value = (Bowl, Vec<f64>)> {
    (2_usize..7).prop_flat_map(|dim| {
        let vector = || prop::collection::vec(0.1..1.0_f64, dim);
        let signs = prop::collection::vec(prop::bool::ANY, dim);
        let exponents = prop::collection::vec(0.0..4.0_f64, dim);
        (exponents, vector(), vector(), signs).prop_map(|(exponents, v, x, signs)| {
            let eigenvalues = exponents.iter().map(|e| 10_f64.powf(*e)).collect();
            let signed = x
                .iter()
                .zip(signs)
                .map(|(x, minus)| if minus { -x } else { *x });
            (Bowl { eigenvalues, v }, signed.collect())
        })
    })
}

/// Values and points of up to `moves` moves of steepest descent with exact steps, from the start on.
fn descend(
    finder: BoxedFinder<f64>,
    moves: u64,
    x0: &[f64],
    value: impl Fn(&[f64]) -> f64,
    gradient: impl Fn(&[f64]) -> Vec<f64>,
) -> Vec<(f64, Vec<f64>)> {
    let start = value(x0);
    let stopping = Stopping {
        gradient: Some(0.0),
        target: Some(1e-30 * start),
        iterations: moves,
        ..Stopping::default()
    };
    let descent = Descent::new(SteepestDescent, finder, SufficientDecrease::default());
    let descent = descent.with_stopping(stopping).unwrap();
    let objective = joint(|x: &Vec<f64>, g: &mut Vec<f64>| {
        g.copy_from_slice(&gradient(x));
        value(x)
    });
    let mut seen = vec![(start, x0.to_vec())];
    let report = descent.minimize_watched(x0.to_vec(), objective, |run| {
        seen.push((run.value(), run.point().clone()));
        ControlFlow::Continue(())
    });
    report.expect("a fit start");
    seen
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(48))]

    /// L. V. Kantorovich's inequality: one exact step leaves at most `((k - 1) / (k + 1))^2` of the value, `k` the condition
    /// number (D. G. Luenberger & Y. Ye, Linear and Nonlinear Programming, section 8.2, from memory). And what it leaves is
    /// `f - (g'g)^2 / (2 g'Hg)`, in closed form.
    #[test]
    fn steepest_descent_obeys_the_bound_of_kantorovich((bowl, x0) in bowls()) {
        let condition = bowl.condition();
        let rate = ((condition - 1.0) / (condition + 1.0)).powi(2);
        for (name, finder) in exact(USUAL) {
            let seen = descend(finder, 25, &x0, |x| bowl.value(x), |x| bowl.times(x));
            prop_assert!(seen.len() >= 2, "{name} made no move");
            for pair in seen.windows(2) {
                let ((before, x), (after, _)) = (&pair[0], &pair[1]);
                // A step off by the tolerance costs its square; a point rounded by e costs 2 e sqrt(k).
                let rounding = 1e-14 * (1.0 + condition.sqrt()) * before;
                prop_assert!(*after <= rate * before + rounding, "{name}: {before:e} to {after:e}, rate {rate}");
                let g = bowl.times(x);
                let gg = dot(&g, &g);
                let least = before - gg * gg / (2.0 * dot(&g, &bowl.times(&g)));
                prop_assert!((after - least).abs() <= rounding, "{name}: {after:e} is not the least, {least:e}");
            }
        }
    }
}

/// Worked in closed form; see the file.
const WORST: &str = include_str!("data/worked_examples/steepest_descent_worst_case.csv");

#[test]
fn the_worst_case_attains_the_bound() {
    let table = Table::read(WORST);
    let mut compared = 0;
    for (tolerance, allowed) in [(USUAL, 1e-6), (1e-13, 1e-6)] {
        for condition in [2.0, 10.0, 100.0, 1000.0] {
            let lines: Vec<_> = (table.lines())
                .filter(|line| line.get::<f64>("kappa") == condition)
                .collect();
            assert_eq!(lines.len(), 6);
            let rate: f64 = ((condition - 1.0) / (condition + 1.0)).powi(2);
            for (name, finder) in exact(tolerance) {
                let value = |x: &[f64]| 0.5 * (x[0] * x[0] + condition * x[1] * x[1]);
                let gradient = |x: &[f64]| vec![x[0], condition * x[1]];
                let seen = descend(finder, 5, &[condition, 1.0], value, gradient);
                assert_eq!(seen.len(), 6, "{name}");
                for (line, (value, x)) in lines.iter().zip(&seen) {
                    let at = format!(
                        "{name}, kappa {condition}, iterate {}",
                        line.text("iterate")
                    );
                    let close = |found: f64, wanted: &str| {
                        let wanted: f64 = line.get(wanted);
                        let off = (found - wanted).abs() / wanted.abs();
                        assert!(off <= allowed, "{at}: {found} for {wanted}");
                    };
                    close(*value, "value");
                    close(x[0], "x1");
                    close(x[1], "x2");
                    compared += 1;
                }
                for pair in seen.windows(2) {
                    let kept = pair[1].0 / pair[0].0;
                    assert!(
                        (kept / rate - 1.0).abs() <= allowed,
                        "{name}, kappa {condition}: {kept} for {rate}"
                    );
                }
            }
        }
    }
    assert_eq!(compared, 2 * 4 * 3 * 6);
}

/// Enclosed by interval arithmetic; see the file.
const MINIMIZERS: &str = include_str!("data/more_thuente_1994/minimizers.csv");

/// Within the tolerance, or where the finder's own limits lie: a slope below the tolerance times that at the start, or a
/// value that rounding cannot tell from the least.
#[test]
fn the_minimizers_of_the_published_functions_come_out() {
    for tolerance in [1e-3, 1e-5, USUAL] {
        for line in Table::read(MINIMIZERS).lines() {
            let curve = &PUBLISHED[line.get::<usize>("function") - 1];
            let (minimizer, least): (f64, f64) = (line.get("step"), line.get("value"));
            let start = (curve.at)(0.0);
            for first in FIRST_STEPS {
                for (name, finder) in exact(tolerance) {
                    let rule = SufficientDecrease::new(1e-4).unwrap();
                    let mut search = StepSearch::new(finder, rule);
                    let found = search.along(Ray::new(start.0, start.1), first, curve.at);
                    let outcome = found.unwrap().outcome;
                    let at = format!(
                        "{name}, tolerance {tolerance:e}, function {} from {first:e}",
                        curve.number
                    );
                    assert_eq!(outcome.ending, Ending::Accepted, "{at}");
                    let trial = outcome.accepted().expect("a step");
                    let off = (trial.step - minimizer).abs();
                    let (value, slope) = (curve.at)(trial.step);
                    let flat = name == "BrentSlopes" && slope.abs() <= tolerance * start.1.abs();
                    // Function 3 evaluates terms of size 1.
                    let blurred = value - least <= 4.0 * f64::EPSILON * least.abs().max(1.0);
                    assert!(
                        off <= tolerance * trial.step || flat || blurred,
                        "{at}: {} for {minimizer}, slope {slope:e}",
                        trial.step
                    );
                    assert!(outcome.trials < 60, "{at}: {} trials", outcome.trials);
                }
            }
        }
    }
}

/// `value + slope a + curvature a^2 / 2` has its minimizer at `-slope / curvature`.
#[test]
fn the_minimizers_of_parabolas_come_out() {
    for (slope, curvature) in [
        (-1.0, 1.0),
        (-2.0, 0.25),
        (-1e-8, 1e-4),
        (-1e5, 3e7),
        (-3e100, 7e-50),
    ] {
        let minimizer = -slope / curvature;
        let at = |a: f64| (a * (slope + 0.5 * curvature * a), slope + curvature * a);
        for first in [1e-3, 0.3, 1.0, 1.7, 2.0, 50.0] {
            for (name, finder) in exact::<f64>(USUAL) {
                let mut search = StepSearch::new(finder, SufficientDecrease::default());
                let found = search.along(Ray::new(0.0, slope), first * minimizer, at);
                let step = found.unwrap().outcome.accepted().expect("a step").step;
                // Values tell steps apart by sqrt(2 e) of the minimizer, and some units more for their own rounding.
                let allowed = if name == "BrentSlopes" {
                    USUAL
                } else {
                    4.0 * USUAL
                };
                assert!(
                    (step - minimizer).abs() <= allowed * minimizer,
                    "{name}: {step:e} for {minimizer:e}"
                );
            }
        }
    }
}

#[test]
fn slopes_resolve_a_minimizer_to_the_last_digits() {
    let minimizer = 3.0_f64.ln(); // of exp(a) - 3 a
    for first in [1e-3, 0.4, 1.0, 5.0, 40.0] {
        let finder = BrentSlopes::new(1e-15).unwrap();
        let mut search = StepSearch::new(finder, SufficientDecrease::default());
        let at = |a: f64| (a.exp() - 3.0 * a, a.exp() - 3.0);
        search.along(Ray::new(1.0, -2.0), first, at).unwrap();
        // The accepted trial is the lowest, and rounding ranks those within 1e-8; the nearest one is among the trials.
        let nearest = (search.log().iter())
            .map(|entry| (entry.trial.step - minimizer).abs())
            .fold(f64::INFINITY, f64::min);
        assert!(nearest <= 4e-16, "{nearest:e} from {first}");
    }
}

/// The finders of these tests, those with a guard too.
fn all<T: Real>() -> Vec<(&'static str, BoxedFinder<T>)> {
    let mut all = Vec::from(exact(T::epsilon().sqrt().to_double()));
    all.push(("HagerZhang", Box::new(HagerZhang::new())));
    all.push(("Expansion", Box::new(Expansion::default())));
    all
}

/// Units that are powers of two are exact, so every trial must scale exactly.
#[test]
fn nothing_depends_on_the_units_of_step_or_value() {
    for seed in 0..200 {
        let ray = RandomRay::new(seed);
        for ((name, plain), (_, scaled)) in all::<f64>().into_iter().zip(all::<f64>()) {
            let (step_unit, value_unit) = (2_f64.powi(300), 2_f64.powi(-250));
            let run = |finder, steps: f64, values: f64| {
                let at = |a: f64| {
                    let (value, slope) = ray.at(a / steps);
                    (values * value, values / steps * slope)
                };
                let (value, slope) = at(0.0);
                let rule = StrongWolfe::new(ray.decrease(), ray.curvature).unwrap();
                let mut search = StepSearch::new(finder, rule);
                let found = search
                    .along(Ray::new(value, slope), steps * ray.first, at)
                    .unwrap();
                let trials: Vec<f64> = search.log().iter().map(|e| e.trial.step / steps).collect();
                (found.outcome.trials, trials)
            };
            let (plain, scaled) = (run(plain, 1.0, 1.0), run(scaled, step_unit, value_unit));
            assert_eq!(plain, scaled, "{name}, seed {seed}");
        }
    }
}

#[test]
fn single_precision_finds_minimizers_too() {
    for first in [1e-3_f32, 0.5, 4.0, 300.0] {
        for (name, finder) in exact::<f32>(3.5e-4) {
            let at = |a: f32| ((a - 3.0) * (a - 3.0) + 1.0, 2.0 * (a - 3.0));
            let mut search = StepSearch::new(finder, SufficientDecrease::default());
            let found = search.along(Ray::new(10.0, -6.0), first, at).unwrap();
            let step = found.outcome.accepted().expect("a step").step;
            assert!((step - 3.0).abs() <= 4.0 * 3.5e-4 * 3.0, "{name}: {step}");
        }
    }
}

#[test]
fn values_alone_will_do() {
    let value = |a: f64| (a - 3.0).powi(4) + (a - 3.0).powi(2);
    let finders: [fn() -> BoxedFinder<f64>; 2] = [
        || Box::new(BrentValues::default()),
        || Box::new(GoldenSection::default()),
    ];
    for first in [1e-4, 1.0, 7.0, 1e5] {
        let ray = Ray::without_slope(value(0.0));
        for finder in finders {
            let any = StepSearch::new(finder(), AnyDecrease).along(ray, first, value);
            let rule = ForcingDecrease::new(1e-3).unwrap();
            let forced = StepSearch::new(finder(), rule).along(ray, first, value);
            for found in [any, forced] {
                let step = found.unwrap().outcome.accepted().expect("a step").step;
                assert!(
                    (step - 3.0).abs() <= 4.0 * USUAL * 3.0,
                    "{step} from {first}"
                );
            }
        }
        let finder = Expansion::default();
        let found = StepSearch::new(finder, AnyDecrease)
            .along(ray, first, value)
            .unwrap();
        let step = found.outcome.accepted().expect("a step").step;
        // Doubling and halving end where the other direction is no better.
        assert!(
            value(2.0 * step) >= value(step) || step >= first,
            "{step} from {first}"
        );
        assert!(value(step) < value(0.0));
    }
}

#[test]
fn parabolas_take_far_fewer_trials_than_golden_section() {
    let mut totals = [0_u32; 3];
    for seed in 0..4000 {
        let ray = RandomRay::new(seed);
        let (value, slope) = ray.at(0.0);
        for ((_, finder), total) in exact::<f64>(USUAL).into_iter().zip(&mut totals) {
            let mut search = StepSearch::new(finder, SufficientDecrease::default());
            let found = search
                .along(Ray::new(value, slope), ray.first, |a| ray.at(a))
                .unwrap();
            assert_eq!(found.outcome.ending, Ending::Accepted, "seed {seed}");
            *total += found.outcome.trials;
        }
    }
    let [slopes, values, golden] = totals;
    println!(
        "4000 rays: {slopes} trials by slopes, {values} by parabolas, {golden} by golden section"
    );
    assert!(slopes < values && 2 * values < golden);
}

/// On rays with several minima the one found need not be acceptable; where it is, the search says so.
#[test]
fn what_they_find_is_accepted_wherever_the_rule_allows() {
    let rules: [Named; 3] = [
        ("strong Wolfe", |ray| Rule::StrongWolfe {
            decrease: ray.decrease(),
            curvature: ray.curvature,
        }),
        ("weak Wolfe", |ray| Rule::WeakWolfe {
            decrease: ray.decrease(),
            curvature: ray.curvature,
        }),
        ("Goldstein", |_| Rule::Goldstein { share: 0.1 }),
    ];
    for (rule_name, rule) in rules {
        for which in 0..3 {
            let (mut name, mut total, mut longest, mut refused) = ("", 0, 0, 0);
            for seed in 0..4000 {
                let ray = RandomRay::new(seed);
                let rule = rule(&ray);
                let start = ray.at(0.0);
                let (finder_name, finder) = exact(USUAL).into_iter().nth(which).expect("three");
                name = finder_name;
                let mut search = StepSearch::new(finder, rule.boxed());
                let found = search.along(Ray::new(start.0, start.1), ray.first, |a| ray.at(a));
                let outcome = found.unwrap().outcome;
                total += outcome.trials;
                longest = longest.max(outcome.trials);
                let holds = |step: f64| rule.holds(start, step, ray.at(step));
                match outcome.accepted() {
                    Some(trial) => assert!(holds(trial.step), "{name}, {rule_name}, seed {seed}"),
                    None => {
                        refused += 1;
                        assert_eq!(outcome.ending, Ending::FinderSpent, "{name}, seed {seed}");
                        let best = outcome.best.expect("trials");
                        assert!(!holds(best.step), "{name}, {rule_name}, seed {seed}");
                    }
                }
            }
            println!(
                "{rule_name:13} {name:14} {total:6} trials, at most {longest}, {refused} minimizers refused"
            );
            assert!(
                refused == 0 || rule_name == "Goldstein",
                "{refused} refused"
            );
        }
    }
}

#[test]
fn no_search_by_expansion_fails() {
    let rules: [Named; 4] = [
        ("strong Wolfe", |ray| Rule::StrongWolfe {
            decrease: ray.decrease(),
            curvature: ray.curvature,
        }),
        ("weak Wolfe", |ray| Rule::WeakWolfe {
            decrease: ray.decrease(),
            curvature: ray.curvature,
        }),
        ("Goldstein", |_| Rule::Goldstein { share: 0.1 }),
        ("decrease", |_| Rule::SufficientDecrease { decrease: 0.1 }),
    ];
    for (rule_name, rule) in rules {
        for forward in [true, false] {
            let mut total = 0;
            for seed in 0..4000 {
                let ray = RandomRay::new(seed);
                let (rule, start) = (rule(&ray), ray.at(0.0));
                let finder = Expansion::default();
                let finder = if forward {
                    finder
                } else {
                    finder.without_forward_tracking()
                };
                let mut search = StepSearch::new(finder, rule.boxed());
                let found = search.along(Ray::new(start.0, start.1), ray.first, |a| ray.at(a));
                let outcome = found.unwrap().outcome;
                let Some(trial) = outcome.accepted() else {
                    panic!("{rule_name}, seed {seed}: {}", outcome.ending)
                };
                assert!(
                    rule.holds(start, trial.step, ray.at(trial.step)),
                    "{rule_name}, seed {seed}"
                );
                total += outcome.trials;
            }
            println!("{rule_name:13} forward tracking {forward:5}: {total} trials");
        }
    }
}

#[test]
fn forward_tracking_goes_on_while_the_value_falls_and_is_accepted() {
    let steps = |finder: Expansion, at: fn(f64) -> f64| {
        let mut search = StepSearch::new(finder, SufficientDecrease::new(0.1).unwrap());
        let found = search.along(Ray::new(at(0.0), -1.0), 1.0, at).unwrap();
        let tried: Vec<f64> = search.log().iter().map(|e| e.trial.step).collect();
        (tried, found.outcome.accepted().unwrap().step)
    };
    // a* = 5; 8 is accepted (below 2 (1 - c) a* = 9) and higher than 4
    let bowl = |a: f64| 0.1 * a * a - a;
    assert_eq!(
        steps(Expansion::default(), bowl),
        (vec![1.0, 2.0, 4.0, 8.0], 4.0)
    );
    assert_eq!(
        steps(Expansion::default().without_forward_tracking(), bowl),
        (vec![1.0], 1.0)
    );
    let threefold = Expansion::new(3.0, 0.5).unwrap();
    assert_eq!(steps(threefold, bowl), (vec![1.0, 3.0, 9.0], 3.0));
    // a* = 0.5: 1 is refused (2 (1 - c) a* = 0.9), and what lies beyond a shortened step is known
    let narrow = |a: f64| a * a - a;
    assert_eq!(steps(Expansion::default(), narrow), (vec![1.0, 0.5], 0.5));
    assert_eq!(
        steps(Expansion::new(2.0, 0.25).unwrap(), narrow),
        (vec![1.0, 0.25], 0.25)
    );
}

#[test]
fn bounds_are_coped_with() {
    // The minimizer, 3, lies within, above or below the bounds.
    let at = |a: f64| ((a - 3.0) * (a - 3.0), 2.0 * (a - 3.0));
    for (lower, upper, wanted) in [(0.5, 8.0, 3.0), (0.1, 2.0, 2.0), (4.0, 50.0, 4.0)] {
        for first in [1e-3, 1.0, 2.5, 6.0, 1e4] {
            for (name, finder) in exact::<f64>(USUAL) {
                let limits = Limits::new(lower, upper, 200).unwrap();
                let rule = SufficientDecrease::new(1e-4).unwrap();
                let mut search = StepSearch::new(finder, rule).with_limits(limits);
                let found = search.along(Ray::new(9.0, -6.0), first, at).unwrap();
                let step = found.outcome.accepted().expect("a step").step;
                let off = (step - wanted).abs();
                assert!(
                    off <= 4.0 * USUAL * wanted,
                    "{name} from {first}: {step} for {wanted}"
                );
            }
        }
    }
}

/// All trials of a finder that is handed a step shortened by `shorter` as long as the one it asks for is not to be had, as
/// a search does it at the edge of a domain.
fn trials_on(
    mut finder: BoxedFinder<f64>,
    first: f64,
    shorter: f64,
    at: impl Fn(f64) -> Option<(f64, f64)>,
) -> Vec<Trial<f64>> {
    let (value, slope) = at(0.0).expect("defined at the start");
    let ray = Ray::new(value, slope);
    let mut step = finder.begin(&ray, first);
    let mut trials = Vec::new();
    loop {
        let (value, slope) = loop {
            match at(step) {
                Some(found) => break found,
                None => step *= shorter,
            }
        };
        let trial = Trial {
            step,
            value,
            slope: Some(slope),
        };
        trials.push(trial);
        assert!(trials.len() < 120, "it does not end: {trials:?}");
        match finder.polish(&ray, &trial) {
            Proposal::Try(next) => step = next,
            Proposal::Spent => return trials,
        }
    }
}

/// `-ln(2 - a) - 3 a` ends at 2 and has its minimizer at 5/3.
#[test]
fn the_edge_of_a_domain_is_coped_with() {
    let at = |a: f64| (a < 2.0).then(|| (-(2.0 - a).ln() - 3.0 * a, 1.0 / (2.0 - a) - 3.0));
    for first in [1e-3, 0.4, 0.9, 1.0, 1.3, 1.9, 1.99, 2.5, 40.0, 1e5] {
        for shorter in [0.3, 0.5, 0.9] {
            for (name, finder) in exact(USUAL) {
                let trials = trials_on(finder, first, shorter, at);
                let best = trials
                    .iter()
                    .min_by(|a, b| a.value.total_cmp(&b.value))
                    .expect("one")
                    .step;
                let off = (best - 5.0 / 3.0).abs();
                assert!(
                    off <= 4.0 * USUAL * 5.0 / 3.0,
                    "{name} from {first}, {shorter}: {best}"
                );
            }
        }
    }
}

/// Defined below 1, with a minimizer at 1/2, and beyond 3, where it is lower and rises: the way back leads through the
/// hole, and the minimizer is the only one there is.
#[test]
fn a_hole_in_the_domain_is_coped_with() {
    let at = |a: f64| {
        if a < 1.0 {
            Some(((a - 0.5) * (a - 0.5), 2.0 * (a - 0.5)))
        } else {
            (a > 3.0).then_some((0.1 * a - 1.2, 0.1))
        }
    };
    for first in [3.1, 4.0, 6.0] {
        for shorter in [0.3, 0.5, 0.9] {
            for (name, finder) in exact(USUAL) {
                let trials = trials_on(finder, first, shorter, at);
                let last = trials.last().expect("one").step;
                assert!(
                    (last - 0.5).abs() <= 4.0 * USUAL,
                    "{name} from {first}, {shorter}: {last}"
                );
            }
        }
    }
}

/// `phi(0) = 1` and a slope that promises less than rounding shows: looking for a lower value at ever shorter steps is
/// of no use. Without a slope there is no telling.
#[test]
fn a_decrease_below_rounding_is_not_looked_for() {
    for (_, finder) in exact::<f64>(USUAL).into_iter().skip(1) {
        let mut search = StepSearch::new(finder, SufficientDecrease::default());
        let found = search.along(Ray::new(1.0, -1e-12), 1.0, |_: f64| 1.0 + f64::EPSILON);
        let outcome = found.unwrap().outcome;
        let ending = outcome.ending;
        assert!(matches!(ending, Ending::BelowRounding { .. }), "{ending}");
        assert_eq!(outcome.accepted(), None);
        // 0.382^k 1e-12 < 0.25 x 2.2e-16 from k = 11 on
        assert_eq!(outcome.trials, 11);
    }
}

#[test]
fn parameters_out_of_range_are_refused() {
    let wrong = Err(ExactStepError::Tolerance);
    for tolerance in [0.0, -1.0, 8e-16, 1.0, f64::INFINITY, f64::NAN] {
        assert_eq!(BrentSlopes::new(tolerance).map(|_| ()), wrong);
        assert_eq!(BrentValues::new(tolerance).map(|_| ()), wrong);
        assert_eq!(GoldenSection::new(tolerance).map(|_| ()), wrong);
    }
    assert_eq!(BrentValues::new(1e-8_f32).map(|_| ()), wrong); // below what single precision holds
    assert!(BrentValues::new(9e-16).is_ok());
    for factor in [1.0, 0.5, f64::INFINITY, f64::NAN] {
        assert_eq!(Expansion::new(factor, 0.5), Err(ExpansionError::Factor));
    }
    for ratio in [0.0, 1.0, -0.5, f64::NAN] {
        assert_eq!(Expansion::new(2.0, ratio), Err(ExpansionError::Ratio));
    }
}

/// What an adversary answers at one trial.
#[derive(Clone, Copy, Debug)]
struct Answer {
    value: f64,
    slope: f64,
    verdict: Verdict,
}

fn answers() -> impl Strategy<Value = Answer> {
    let number = || {
        prop_oneof![
            4 => -1.0..1.0_f64,
            1 => prop::sample::select(vec![0.0, -1e-300, 1e-300, -1e300, 1e300, -f64::MAX, f64::MAX, 1.0, -1.0]),
        ]
    };
    let value = prop_oneof![9 => number(), 1 => Just(f64::NAN)];
    let verdict = prop::sample::select(vec![
        Verdict::Accept,
        Verdict::Refuse(Side::TooLong),
        Verdict::Refuse(Side::TooShort),
    ]);
    (value, number(), verdict).prop_map(|(value, slope, verdict)| Answer {
        value,
        slope,
        verdict,
    })
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(400))]

    /// Answers that fit no function: every exact minimiser ends by itself, with bounds and without, and asks for nothing
    /// that is out of bounds.
    #[test]
    fn they_end_whatever_they_are_told(
        answers in prop::collection::vec(answers(), 1..40),
        drift in prop::sample::select(vec![0.0, -1.0, 1.0]),
        exponent in -300.0..300.0_f64,
        bounds in prop::option::of((0.0..1.0_f64, 1.0..3.0_f64)),
    ) {
        let first = 10_f64.powf(exponent);
        let limits = match bounds {
            Some((low, high)) => Limits::new(low * first, high * first, 20_000).unwrap(),
            None => Limits::new(0.0, f64::INFINITY, 20_000).unwrap(),
        };
        for (name, finder) in all::<f64>() {
            let turn = std::cell::Cell::new(0_usize);
            let now = || answers[turn.get() % answers.len()];
            let judge = rule(|_: &Ray<f64>, _: &Trial<f64>| now().verdict);
            let mut search = StepSearch::new(finder, judge).with_limits(limits);
            search.begin(Ray::new(0.5, -1.0), first).unwrap();
            let mut trials = 0;
            while let Some(ask) = search.request() {
                prop_assert!(ask.step.is_finite() && ask.step > 0.0, "{name}: {}", ask.step);
                prop_assert!(ask.step >= limits.lower() && ask.step <= limits.upper(), "{name}");
                turn.set(trials);
                trials += 1;
                let value = now().value + drift * trials as f64;
                search.supply(Sample::Both(value, now().slope)).unwrap();
            }
            let ending = search.outcome().expect("it ended").ending;
            let unguarded = name != "HagerZhang" && name != "Expansion";
            prop_assert!(!unguarded || !matches!(ending, Ending::BudgetSpent { .. }), "{name} ran on");
        }
    }
}
/// `-ln(2 - a) - 3 a` ends at 2 and has its minimizer at 5/3: the search goes on to it past trials outside.
#[test]
fn exact_steps_go_on_at_the_edge_of_a_domain() {
    let at = |a: f64| (-(2.0 - a).ln() - 3.0 * a, 1.0 / (2.0 - a) - 3.0);
    for first in [1e-3, 0.5, 1.0, 1.9, 2.5, 40.0, 1e5] {
        for (name, finder) in exact::<f64>(USUAL) {
            let mut search = StepSearch::new(finder, SufficientDecrease::default());
            let found = search
                .along(Ray::new(at(0.0).0, at(0.0).1), first, at)
                .unwrap();
            let step = found.outcome.accepted().expect("a step").step;
            assert!(
                (step - 5.0 / 3.0).abs() <= 4.0 * USUAL * 5.0 / 3.0,
                "{name} from {first}: {step}"
            );
        }
    }
}

/// With lazy slopes and a rule that reads none, a finder that lives on slopes is still given those of accepted trials.
#[test]
fn slopes_are_asked_for_where_the_finder_goes_on_by_them() {
    let at = |a: f64| (a.exp() - 3.0 * a, a.exp() - 3.0);
    let mut search = StepSearch::new(BrentSlopes::default(), SufficientDecrease::default());
    let found = search.along_lazily(Ray::new(1.0, -2.0), 0.1, |a, need| match need {
        Need::Value => Sample::Value(at(a).0),
        _ => Sample::Slope(at(a).1),
    });
    let step = found.unwrap().outcome.accepted().expect("a step").step;
    assert!((step - 3.0_f64.ln()).abs() <= 2.0 * USUAL, "{step}");
}
