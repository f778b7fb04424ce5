//! The search of Hager and Zhang ends at steps that satisfy the rule: on the published functions, on random rays, and
//! where the decrease drowns in rounding.
#![cfg(feature = "alloc")] // rules in boxes

mod support;

use support::curves::{FIRST_STEPS, PUBLISHED};
use support::rays::RandomRay;
use surefoot::acceptance::{ApproximateWolfe, Goldstein, StrongWolfe, WeakWolfe};
use surefoot::finder::HagerZhang;
use surefoot::{BoxedRule, Ray, StepSearch};

#[derive(Clone, Copy, Debug, PartialEq)]
enum Wanted {
    Weak,
    Strong,
    Approximate,
    Goldstein,
}

/// The share of Goldstein's rule in these tests.
const SHARE: f64 = 0.1;

impl Wanted {
    fn rule(self, decrease: f64, curvature: f64) -> BoxedRule<f64> {
        match self {
            Wanted::Weak => Box::new(WeakWolfe::new(decrease, curvature).unwrap()),
            Wanted::Strong => Box::new(StrongWolfe::new(decrease, curvature).unwrap()),
            Wanted::Approximate => Box::new(ApproximateWolfe::new(decrease, curvature).unwrap()),
            Wanted::Goldstein => Box::new(Goldstein::new(SHARE).unwrap()),
        }
    }

    /// The inequalities, written out once more. `(v0, s0)` at 0 and `(v, s)` at the step.
    fn holds(
        self,
        (c1, c2): (f64, f64),
        (v0, s0): (f64, f64),
        step: f64,
        (v, s): (f64, f64),
    ) -> bool {
        let weak = v <= v0 + c1 * step * s0 && s >= c2 * s0;
        match self {
            Wanted::Weak => weak,
            Wanted::Strong => weak && s <= -(c2 * s0),
            // Without a slack only the Wolfe conditions count.
            Wanted::Approximate => weak,
            Wanted::Goldstein => v <= v0 + SHARE * step * s0 && v >= v0 + (1.0 - SHARE) * step * s0,
        }
    }
}

const ALL: [Wanted; 4] = [
    Wanted::Weak,
    Wanted::Strong,
    Wanted::Approximate,
    Wanted::Goldstein,
];

/// J. J. Moré & D. J. Thuente, ACM Trans. Math. Software 20 (1994) 286-307, doi:10.1145/192115.192132, section 5.
#[test]
fn accepted_steps_on_the_published_functions_satisfy_the_rules() {
    for wanted in ALL {
        let mut counts = Vec::new();
        for curve in PUBLISHED {
            for first in FIRST_STEPS {
                let pair = (curve.decrease, curve.curvature);
                let start = (curve.at)(0.0);
                let mut search = StepSearch::new(HagerZhang::new(), wanted.rule(pair.0, pair.1));
                let found = search.along(Ray::new(start.0, start.1), first, curve.at);
                let outcome = found.unwrap().outcome;
                let name = format!("function {} from {first:e}, {wanted:?}", curve.number);
                let Some(trial) = outcome.accepted() else {
                    panic!("{name}: {}", outcome.ending)
                };
                let here = (curve.at)(trial.step);
                assert!(
                    wanted.holds(pair, start, trial.step, here),
                    "{name}: {trial:?}"
                );
                counts.push(outcome.trials);
            }
        }
        assert_eq!(counts.len(), 24);
        let total: u32 = counts.iter().sum();
        println!("{wanted:?}: {total} trials, {counts:?}");
    }
}

#[test]
fn no_search_of_the_random_family_fails() {
    for wanted in ALL {
        let (mut total, mut longest) = (0, 0);
        for seed in 0..4000 {
            let ray = RandomRay::new(seed);
            let pair = (ray.decrease(), ray.curvature);
            let start = ray.at(0.0);
            let mut search = StepSearch::new(HagerZhang::new(), wanted.rule(pair.0, pair.1));
            assert_eq!(search.limits().trials(), 100);
            let found = search.along(Ray::new(start.0, start.1), ray.first, |a| ray.at(a));
            let outcome = found.unwrap().outcome;
            let Some(trial) = outcome.accepted() else {
                panic!("{wanted:?}, seed {seed}: {}", outcome.ending)
            };
            let here = ray.at(trial.step);
            assert!(
                wanted.holds(pair, start, trial.step, here),
                "{wanted:?}, seed {seed}: {trial:?}"
            );
            total += outcome.trials;
            longest = longest.max(outcome.trials);
        }
        println!("{wanted:?}: {total} trials on 4000 rays, at most {longest}");
    }
}

/// Slopes are exact, and values carry an error of up to three units in their last place, more than the whole decrease:
/// eq. 4.1 of Hager & Zhang 2005 must decide.
#[test]
fn a_decrease_that_drowns_in_rounding_is_found_by_slopes() {
    let (delta, sigma) = (0.1, 0.9);
    let (mut searches, mut drowned) = (0, 0);
    for minimizer in [1e-9, 1e-3, 1.0, 1e6] {
        for depth in [1e-20, 1e-18, 1e-17, 1e-16] {
            // phi(a) = 1 + h (a - m)^2 / 2 - h m^2 / 2 with h m^2 / 2 = depth
            let h = 2.0 * depth / (minimizer * minimizer);
            let slope = |a: f64| h * (a - minimizer);
            let value = |a: f64| {
                let units = (a.to_bits().wrapping_mul(0x9E37_79B9_7F4A_7C15) >> 62) as f64;
                1.0 + 0.5 * h * a * (a - 2.0 * minimizer) + units * f64::EPSILON
            };
            let s0 = slope(0.0);
            for first in [1e-4, 0.05, 0.7, 1.95, 30.0] {
                for slack in [1e-6, 1e-14] {
                    let first = first * minimizer;
                    let rule = ApproximateWolfe::new(delta, sigma).unwrap();
                    let mut search = StepSearch::new(HagerZhang::new(), rule);
                    let ray = Ray::new(1.0, s0).with_slack(slack);
                    let found = search.along(ray, first, |a| (value(a), slope(a)));
                    let outcome = found.unwrap().outcome;
                    let name = format!(
                        "m {minimizer:e}, depth {depth:e}, first {first:e}, slack {slack:e}"
                    );
                    let Some(trial) = outcome.accepted() else {
                        panic!("{name}: {}", outcome.ending)
                    };
                    let (v, s) = (value(trial.step), slope(trial.step));
                    let by_slope = (2.0 * delta - 1.0) * s0 >= s && s >= sigma * s0;
                    let approximate = by_slope && v <= 1.0 + slack;
                    let weak = v <= 1.0 + delta * trial.step * s0 && s >= sigma * s0;
                    assert!(approximate || weak, "{name}: {trial:?}");
                    searches += 1;
                    drowned += u32::from(approximate && !weak);
                }
            }
        }
    }
    println!("{drowned} of {searches} steps were accepted by slopes alone");
    // Three of four values lie above the line of sufficient decrease.
    assert!(
        2 * drowned > searches,
        "{drowned}: rounding hardly played a part"
    );
}

/// A secant step is exact on a parabola: after the first trial, the second is the minimizer.
#[test]
fn two_trials_do_on_a_parabola_whose_minimizer_is_passed() {
    let at = |a: f64| (0.5 * a * a - 6.0 * a, a - 6.0);
    let rule = StrongWolfe::new(1e-4, 1e-3).unwrap();
    let mut search = StepSearch::new(HagerZhang::new(), rule);
    let found = search.along(Ray::new(0.0, -6.0), 32.0, at).unwrap();
    assert_eq!(found.outcome.accepted().unwrap().step, 6.0);
    assert_eq!(found.outcome.trials, 2);
}

#[test]
fn trials_without_slopes_are_coped_with() {
    for first in [1e-6, 1.0, 1e6] {
        let mut search = StepSearch::new(HagerZhang::new(), Goldstein::new(SHARE).unwrap());
        let value = |a: f64| (a - 3.0) * (a - 3.0);
        let found = search.along(Ray::new(9.0, -6.0), first, value).unwrap();
        let trial = found.outcome.accepted().expect("a step");
        // Closed form: 2 c a* <= a <= 2 (1 - c) a*
        assert!(0.6 <= trial.step && trial.step <= 5.4, "{trial:?}");
    }
}
