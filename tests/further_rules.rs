//! The rules beside the four classical ones: their sets of steps in closed form, what they make of noise, where they refuse
//! for certain, and what their errors say.
#![cfg(feature = "alloc")]

mod support;

use support::cast::every_finder as finders;

use proptest::prelude::*;
use std::convert::Infallible;
use support::table::Table;
use surefoot::acceptance::{
    AnyDecrease, AnyFinite, ApproximateWolfe, ForcingDecrease, ForcingDecreaseError,
    GeneralisedWolfe, GeneralisedWolfeError, Goldstein, StrongWolfe, SufficientDecrease, WeakWolfe,
    WolfeError, both, rule, value_rule,
};
use surefoot::direction::Lbfgs;
use surefoot::finder::{Backtracking, Bisection, BrentSlopes};
use surefoot::{
    Acceptance, BoxedRule, Condition, Descent, Ending, Objective, Ray, Real, Report, Side,
    StepSearch, Trial, Verdict,
};

// ---- Closed forms on quadratics ----

/// `phi(a) = slope a + curvature a^2 / 2`.
#[derive(Clone, Copy, Debug)]
struct Quadratic<T> {
    slope: T,
    curvature: T,
}

impl<T: Real> Quadratic<T> {
    fn trial(self, step: T) -> Trial<T> {
        let bend = self.curvature * step;
        Trial {
            step,
            value: step * (self.slope + T::of(0.5) * bend),
            slope: Some(self.slope + bend),
        }
    }

    /// Whether `step` lies in `[low, high]` minimizers; `None` where rounding may decide, as derived in
    /// `tests/quadratics.rs`.
    fn within(self, step: T, low: f64, high: f64) -> Option<bool> {
        let r = step.to_double() * self.curvature.to_double() / -self.slope.to_double();
        let blur = 8.0 * T::epsilon().to_double() * (1.0 + r);
        if low + blur <= r && r <= high - blur {
            Some(true)
        } else if r < low - blur || r > high + blur {
            Some(false)
        } else {
            None
        }
    }
}

/// The rule accepts the steps from `low` to `high` minimizers, and no others.
fn accepts_exactly<T: Real>(
    rule: &dyn Acceptance<T>,
    ray: &Ray<T>,
    bowl: Quadratic<T>,
    steps: &[f64],
    (low, high): (f64, f64),
) {
    let minimizer = bowl.slope.to_double() / -bowl.curvature.to_double();
    // Both ends, from both sides, and steps from anywhere.
    let near = [low, high].into_iter().flat_map(|end| {
        [1e-1, 1e-3, 1e-5, 1e-7, 1e-13].map(|away| [end * (1.0 - away), end * (1.0 + away)])
    });
    for r in near
        .flatten()
        .chain(steps.iter().copied())
        .filter(|r| *r > 0.0)
    {
        let trial = bowl.trial(T::of(r * minimizer));
        let Some(inside) = bowl.within(trial.step, low, high) else {
            continue;
        };
        let verdict = rule.judge(ray, &trial);
        let wanted = match (inside, r < low) {
            (true, _) => Verdict::Accept,
            (false, true) => Verdict::Refuse(Side::TooShort),
            (false, false) => Verdict::Refuse(Side::TooLong),
        };
        assert_eq!(verdict, wanted, "{r} minimizers, set {low} to {high}");
        // What the value settles stands; where it does not, the slope is asked for.
        let blind = rule.judge(
            ray,
            &Trial {
                slope: None,
                ..trial
            },
        );
        assert!(
            blind == verdict || blind == Verdict::NeedsSlope,
            "{blind:?}, {verdict:?}"
        );
    }
}

fn check_closed_forms<T: Real>(
    (slope, curvature): (f64, f64),
    (c1, left, right, slack): (f64, f64, f64, f64),
    steps: &[f64],
) {
    let bowl = Quadratic {
        slope: T::of(-slope),
        curvature: T::of(curvature),
    };
    let held = |x: f64| T::of(x).to_double();
    let ray = Ray::new(T::zero(), bowl.slope);
    let fit = "parameters in range";
    let general = GeneralisedWolfe::new(T::of(c1), T::of(left), T::of(right)).expect(fit);
    let lowest = 1.0 - held(left);
    let highest = 2.0 * (1.0 - held(c1));
    let set = (lowest, highest.min(1.0 + held(right)));
    if set.0 < set.1 {
        accepts_exactly(&general, &ray, bowl, steps, set);
    }
    let unbounded = GeneralisedWolfe::new(T::of(c1), T::of(left), T::infinity()).expect(fit);
    accepts_exactly(&unbounded, &ray, bowl, steps, (lowest, highest));
    // Hager & Zhang 2005: on a quadratic the approximate conditions are the Wolfe conditions.
    let approximate = ApproximateWolfe::new(T::of(c1), T::of(left)).expect(fit);
    accepts_exactly(&approximate, &ray, bowl, steps, (lowest, highest));
    let slack = T::of(slack) * bowl.slope * bowl.slope / bowl.curvature;
    accepts_exactly(
        &approximate,
        &ray.with_slack(slack),
        bowl,
        steps,
        (lowest, highest),
    );
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(400))]

    #[test]
    fn closed_forms_in_both_precisions(
        exponents in (-6.0..6.0, -6.0..6.0),
        c1 in 1e-4..0.45,
        share in 0.0..0.98,
        right in prop_oneof![Just(0.0), 0.0..3.0],
        slack in 0.0..2.0,
        steps in prop::collection::vec(0.0..4.0, 20),
    ) {
        let sizes = (10_f64.powf(exponents.0), 10_f64.powf(exponents.1));
        let how = (c1, c1 + share * (0.99 - c1), right, slack);
        check_closed_forms::<f64>(sizes, how, &steps);
        check_closed_forms::<f32>(sizes, how, &steps);
    }

    /// With no noise a verdict is that of the plain formula, bit for bit; noise relaxes its limit by twice itself.
    #[test]
    fn noise_relaxes_a_limit_by_twice_itself(
        (value, slope) in (-5.0..5.0, -4.0..-0.1),
        (step, excess) in (0.01..3.0, -2.0..2.0),
        above in prop_oneof![Just(0.0), 0.0..1.0],
        noise in prop_oneof![Just(0.0), 1e-9..0.5],
    ) {
        let ray = Ray::new(value, slope).with_reference(value + above).with_value_noise(noise);
        let reference = value + above;
        let c = 0.1;
        let line = |share: f64| -> f64 { reference + share * step * slope + 2.0 * noise };
        let exact = |share: f64| -> f64 { reference + share * step * slope };
        let forced = reference - 0.3 * step * step + 2.0 * noise;
        if noise == 0.0 {
            prop_assert_eq!(line(c).to_bits(), exact(c).to_bits());
        }
        let limits: [(BoxedRule<f64>, f64); 8] = [
            (Box::new(SufficientDecrease::new(c).unwrap()), line(c)),
            (Box::new(WeakWolfe::new(c, 0.9).unwrap()), line(c)),
            (Box::new(StrongWolfe::new(c, 0.9).unwrap()), line(c)),
            (Box::new(GeneralisedWolfe::new(c, 0.9, 1.0).unwrap()), line(c)),
            (Box::new(ApproximateWolfe::new(c, 0.9).unwrap()), line(c)),
            (Box::new(Goldstein::new(c).unwrap()), line(c)),
            (Box::new(ForcingDecrease::new(0.3).unwrap()), forced),
            (Box::new(AnyDecrease), reference + 2.0 * noise),
        ];
        for (number, (rule, limit)) in limits.iter().enumerate() {
            // Just at the limit, the numbers next to it, and anywhere.
            for found in [*limit, limit.next_up(), limit.next_down(), limit + excess] {
                // A slope of 0 passes every curvature condition.
                let trial = Trial { step, value: found, slope: Some(0.0) };
                let too_long = if number == 7 { found >= *limit } else { found > *limit };
                let low = exact(1.0 - c);
                let wanted = match (too_long, number == 5 && found < low) {
                    (true, _) => Verdict::Refuse(Side::TooLong),
                    (false, true) => Verdict::Refuse(Side::TooShort), // Goldstein's second line has no allowance
                    (false, false) => Verdict::Accept,
                };
                prop_assert_eq!(rule.judge(&ray, &trial), wanted, "rule {}, {}", number, found);
            }
        }
    }

    /// Whatever the slope, a value above the ceiling is too long; and a rule that has one states it as its first condition.
    #[test]
    fn above_the_ceiling_every_rule_refuses(
        (value, slope) in (-5.0..5.0, -4.0..-0.1),
        (step, excess) in (1e-3..30.0, 1e-12..1e6),
        (above, noise) in (0.0..1.0, 0.0..0.2),
        slack in prop_oneof![Just(None), (0.0..2.0).prop_map(Some)],
        trial_slope in prop_oneof![Just(None), (-1e3..1e3).prop_map(Some), Just(Some(0.0))],
    ) {
        let mut ray = Ray::new(value, slope).with_reference(value + above).with_value_noise(noise);
        if let Some(slack) = slack {
            ray = ray.with_slack(slack);
        }
        for (number, rule) in all_rules().iter().enumerate() {
            let Some(ceiling) = rule.ceiling(&ray, step) else {
                prop_assert!(number >= 10, "rule {number} has no ceiling");
                continue;
            };
            for found in [ceiling + excess, ceiling.next_up(), f64::MAX] {
                let trial = Trial { step, value: found, slope: trial_slope };
                prop_assert_eq!(rule.judge(&ray, &trial), Verdict::Refuse(Side::TooLong), "rule {}", number);
            }
        }
    }

    /// Both accept what each accepts; too long wins; too short is said only when no slope could still say too long.
    #[test]
    fn both_is_the_conjunction(
        (value, trial_slope) in (-3.0..1.0, -1.5..1.5),
        step in 0.01..3.0,
        pair in (0_usize..10, 0_usize..10),
        known in any::<bool>(),
    ) {
        let ray = Ray::new(0.0, -1.0);
        let trial = Trial { step, value, slope: known.then_some(trial_slope) };
        let (a, b) = (all_rules().swap_remove(pair.0), all_rules().swap_remove(pair.1));
        let (va, vb) = (a.judge(&ray, &trial), b.judge(&ray, &trial));
        let found = both(a, b).judge(&ray, &trial);
        let long = Verdict::Refuse(Side::TooLong);
        prop_assert_eq!(found == Verdict::Accept, va == Verdict::Accept && vb == Verdict::Accept);
        prop_assert_eq!(found == long, va == long || vb == long);
        let asks = va == Verdict::NeedsSlope || vb == Verdict::NeedsSlope;
        prop_assert_eq!(found == Verdict::NeedsSlope, asks && va != long && vb != long);
        let short = Verdict::Refuse(Side::TooShort);
        prop_assert_eq!(found == short, (va == short || vb == short) && va != long && vb != long && !asks);
    }
}

/// Rules with a ceiling first, those without from the tenth on.
fn all_rules() -> Vec<BoxedRule<f64>> {
    let fit = "parameters in range";
    vec![
        Box::new(SufficientDecrease::new(0.1).expect(fit)),
        Box::new(WeakWolfe::new(0.1, 0.9).expect(fit)),
        Box::new(StrongWolfe::new(0.1, 0.3).expect(fit)),
        Box::new(GeneralisedWolfe::new(0.1, 0.3, 0.5).expect(fit)),
        Box::new(ApproximateWolfe::new(0.1, 0.9).expect(fit)),
        Box::new(Goldstein::new(0.25).expect(fit)),
        Box::new(ForcingDecrease::new(0.3).expect(fit)),
        Box::new(AnyDecrease),
        Box::new(both(
            Goldstein::new(0.1).expect(fit),
            StrongWolfe::new(0.2, 0.5).expect(fit),
        )),
        Box::new(both(
            ApproximateWolfe::new(0.1, 0.9).expect(fit),
            AnyDecrease,
        )),
        Box::new(AnyFinite),
        Box::new(both(AnyFinite, AnyFinite)),
    ]
}

#[test]
fn worked_examples_of_the_approximate_rule() {
    let table = Table::read(include_str!("data/worked_examples/approximate_wolfe.csv"));
    let mut rows = 0;
    for line in table.lines() {
        let [value, slope, curvature, c1, c2, low, high] =
            ["value", "slope", "curvature", "c1", "c2", "low", "high"].map(|c| line.get::<f64>(c));
        let rule = ApproximateWolfe::new(c1, c2).unwrap();
        let gain = slope * slope / curvature;
        let at = |a: f64| Trial {
            step: a,
            value: value + a * (slope + 0.5 * curvature * a),
            slope: Some(slope + curvature * a),
        };
        let ray = Ray::new(value, slope);
        // Without a slack the values decide, if they tell steps apart; with one that hides them the slopes do.
        let told_apart = gain > 1e-9 * value.abs();
        let rays = [
            ray,
            ray.with_slack(gain),
            ray.with_slack(1e3 * gain + 1e-12 * value.abs()),
        ];
        for (number, ray) in rays.iter().enumerate().skip(usize::from(!told_apart)) {
            for (a, wanted) in [
                (low * (1.0 + 1e-6), Verdict::Accept),
                (high * (1.0 - 1e-6), Verdict::Accept),
                (0.5 * (low + high), Verdict::Accept),
                (low * (1.0 - 1e-6), Verdict::Refuse(Side::TooShort)),
                (high * (1.0 + 1e-6), Verdict::Refuse(Side::TooLong)),
            ] {
                // A drowned value may pass the first Wolfe condition by its rounding alone.
                if told_apart || wanted != Verdict::Refuse(Side::TooLong) {
                    assert_eq!(
                        rule.judge(ray, &at(a)),
                        wanted,
                        "row {rows}, ray {number}, {a:e}"
                    );
                }
            }
        }
        rows += 1;
    }
    assert_eq!(rows, 25);
}

// ---- Values only ----

#[test]
fn rules_without_slopes_work_with_values_alone() {
    // Minimizers of their own: at 3, at 0.02, at 700, and a kink.
    let curves: [fn(f64) -> f64; 4] = [
        |a| (a - 3.0).powi(2),
        |a| (50.0 * a - 1.0).powi(4),
        |a| (1.0 + (a / 700.0 - 1.0).powi(2)).ln(),
        |a| (a - 3.0).abs() + 0.1 * a,
    ];
    for (number, phi) in curves.iter().enumerate() {
        let start = phi(0.0);
        for (name, finder) in finders::<f64>() {
            if name == "BrentSlopes" {
                continue; // it lives on slopes: see below
            }
            let mut search = StepSearch::new(finder, AnyDecrease);
            let found = search
                .along(Ray::without_slope(start), 1.0, phi)
                .unwrap()
                .outcome;
            let step = found
                .accepted()
                .unwrap_or_else(|| panic!("{name} on {number}: {}", found.ending))
                .step;
            assert!(phi(step) < start, "{name} on {number}: {step}");
            // A factor so small that steps up to 1 gain more than it asks for.
            let forcing = ForcingDecrease::new(1e-7).unwrap();
            let mut search = StepSearch::new(search.into_parts().0, forcing);
            let found = search
                .along(Ray::without_slope(start), 1.0, phi)
                .unwrap()
                .outcome;
            let step = found
                .accepted()
                .unwrap_or_else(|| panic!("{name} on {number}: {}", found.ending))
                .step;
            assert!(
                phi(step) <= start - 1e-7 * step * step,
                "{name} on {number}: {step}"
            );
            let mut search = StepSearch::new(search.into_parts().0, AnyFinite);
            let found = search
                .along(Ray::without_slope(start), 0.5, phi)
                .unwrap()
                .outcome;
            let minimises = ["Expansion", "BrentValues", "GoldenSection"].contains(&name);
            let accepted = found.accepted().unwrap();
            assert!(
                minimises || (accepted.step, found.trials) == (0.5, 1),
                "{name} on {number}"
            );
            assert!(accepted.value <= phi(0.5), "{name} on {number}");
        }
    }
    let mut search = StepSearch::new(
        BrentSlopes::<f64>::default(),
        ForcingDecrease::new(1.0).unwrap(),
    );
    let found = search.along(Ray::without_slope(1.0), 8.0, |a: f64| (1.0 - a).abs());
    assert_eq!(found.unwrap().outcome.ending, Ending::FinderSpent);
}

#[test]
fn a_forcing_function_is_met_exactly() {
    // 1 - a <= 1 - 0.25 a^2 up to a = 4: of 32, 16, 8, 4 the last; and any decrease excludes a value as high as the start.
    let line = |a: f64| 1.0 - a;
    let mut search = StepSearch::new(Backtracking::default(), ForcingDecrease::new(0.25).unwrap());
    let found = search.along(Ray::without_slope(1.0), 32.0, line).unwrap();
    assert_eq!(found.outcome.accepted().unwrap().step, 4.0);
    let mut search = StepSearch::new(Backtracking::default(), AnyDecrease);
    let found = search
        .along(Ray::without_slope(1.0), 8.0, |a: f64| (a - 1.0).powi(2))
        .unwrap();
    // 8, 4 and 2 give 49, 9 and 1; the last is no decrease.
    assert_eq!(
        (found.outcome.accepted().unwrap().step, found.outcome.trials),
        (1.0, 4)
    );
}

// ---- Closures ----

#[test]
fn a_closure_is_the_rule_that_it_writes_out() {
    let own = rule(|ray: &Ray<f64>, t: &Trial<f64>| {
        if t.value > ray.reference + 0.1 * t.step * ray.slope + 2.0 * ray.value_noise {
            return Verdict::Refuse(Side::TooLong);
        }
        match t.slope {
            None => Verdict::NeedsSlope,
            Some(s) if s < 0.9 * ray.slope => Verdict::Refuse(Side::TooShort),
            Some(_) => Verdict::Accept,
        }
    });
    let below = value_rule(|ray: &Ray<f64>, t: &Trial<f64>| {
        if t.value <= ray.reference + 0.1 * t.step * ray.slope + 2.0 * ray.value_noise {
            Verdict::Accept
        } else {
            Verdict::Refuse(Side::TooLong)
        }
    });
    assert!(Acceptance::<f64>::uses_slope(&own) && !Acceptance::<f64>::uses_slope(&below));
    let phi = |a: f64| (a.exp() - 3.0 * a, a.exp() - 3.0);
    let steps = |rule: BoxedRule<f64>, first: f64| {
        let mut search = StepSearch::new(Bisection::new(), rule);
        search.along(Ray::new(1.0, -2.0), first, phi).unwrap();
        search
            .log()
            .iter()
            .map(|e| (e.trial.step, e.fate))
            .collect::<Vec<_>>()
    };
    for first in [1e-6, 0.1, 1.0, 7.0, 300.0] {
        let weak = steps(Box::new(WeakWolfe::new(0.1, 0.9).unwrap()), first);
        assert_eq!(steps(Box::new(own), first), weak);
        let armijo = steps(Box::new(SufficientDecrease::new(0.1).unwrap()), first);
        assert_eq!(steps(Box::new(below), first), armijo);
        assert_eq!(weak.last().unwrap().1, surefoot::search::Fate::Accepted);
    }
}

#[test]
fn conditions_are_told_with_their_limits() {
    let told = |rule: &dyn Acceptance<f64>, ray: Ray<f64>| {
        let trial = Trial {
            step: 2.0,
            value: 1.5,
            slope: Some(-0.5),
        };
        let mut all = Vec::new();
        rule.explain(&ray, &trial, &mut |c: Condition<f64>| {
            all.push(c.to_string());
        });
        all
    };
    let ray = Ray::new(2.0, -1.0);
    let general = GeneralisedWolfe::new(0.125, 0.75, 0.25).unwrap();
    assert_eq!(
        told(&general, ray),
        [
            "sufficient decrease: 1.500000e0 <= 1.750000e0",
            "curvature: -5.000000e-1 >= -7.500000e-1",
            "slope not too positive: -5.000000e-1 <= 2.500000e-1",
        ]
    );
    let approximate = ApproximateWolfe::new(0.125, 0.25).unwrap();
    assert_eq!(
        told(&approximate, ray.with_slack(0.5).with_value_noise(0.25)),
        [
            "sufficient decrease: 1.500000e0 <= 2.250000e0",
            "within slack: 1.500000e0 <= 3.000000e0",
            "curvature: -5.000000e-1 < -2.500000e-1",
            "decrease by slope: -5.000000e-1 <= 7.500000e-1",
        ]
    );
    let forcing = ForcingDecrease::new(0.25).unwrap();
    assert_eq!(
        told(&forcing, ray),
        ["forced decrease: 1.500000e0 > 1.000000e0"]
    );
    // Strictly below is asked for, which `<=` shows as met and `>` as missed.
    assert_eq!(
        told(&AnyDecrease, ray),
        ["any decrease: 1.500000e0 <= 2.000000e0"]
    );
    assert!(told(&AnyFinite, ray).is_empty());
}

// ---- Sums that stop at the ceiling ----

/// `sum_i w_i ((x_0 - c_i)^2 + (x_1 + c_i)^2)^2 / 4` of many terms.
struct Terms {
    stops: bool,
    added: u64,
}

const TERMS: u32 = 60;

impl Terms {
    fn term(i: u32, x: &[f64; 2]) -> (f64, f64, f64, f64) {
        let (w, c) = (
            1.0 + f64::from(i % 7),
            f64::from(i) / f64::from(TERMS) - 0.3,
        );
        (w, x[0] - c, x[1] + c, c)
    }
}

impl Objective<[f64; 2]> for Terms {
    type Error = Infallible;
    fn value(&mut self, x: &[f64; 2]) -> Result<f64, Infallible> {
        self.value_up_to(x, None)
    }
    fn value_up_to(&mut self, x: &[f64; 2], ceiling: Option<f64>) -> Result<f64, Infallible> {
        let ceiling = ceiling.filter(|_| self.stops).unwrap_or(f64::INFINITY);
        let mut sum = 0.0;
        for i in 0..TERMS {
            let (w, a, b, _) = Terms::term(i, x);
            let square = a * a + b * b;
            sum += 0.25 * w * square * square;
            self.added += 1;
            if sum > ceiling {
                break;
            }
        }
        Ok(sum)
    }
    fn gradient(&mut self, x: &[f64; 2], g: &mut [f64; 2]) -> Result<(), Infallible> {
        *g = [0.0; 2];
        for i in 0..TERMS {
            let (w, a, b, _) = Terms::term(i, x);
            let square = a * a + b * b;
            g[0] += w * square * a;
            g[1] += w * square * b;
        }
        Ok(())
    }
}

fn descend(name: usize, rule: BoxedRule<f64>, stops: bool) -> (Report<[f64; 2]>, u64) {
    let mut terms = Terms { stops, added: 0 };
    let finder = finders::<f64>().swap_remove(name).1;
    let memory = Lbfgs::new(4).expect("four pairs");
    let report = Descent::new(memory, finder, rule)
        .with_first_trial(surefoot::FirstTrial::Fixed(20.0))
        .expect("positive")
        .minimize([5.0, -3.0], &mut terms)
        .expect("a fit start");
    (report, terms.added)
}

/// Finders that compare values of refused trials with nothing make the same moves; those that interpolate them may not, but
/// arrive all the same.
#[test]
fn a_sum_that_stops_at_the_ceiling_makes_the_same_run() {
    let blind = ["Bisection", "Backtracking", "Expansion", "HagerZhang"];
    for (number, (name, _)) in finders::<f64>().iter().enumerate() {
        for kind in 0..3 {
            let rule = || -> BoxedRule<f64> {
                match kind {
                    0 => Box::new(SufficientDecrease::new(0.1).unwrap()),
                    1 => Box::new(WeakWolfe::new(1e-3, 0.9).unwrap()),
                    _ => Box::new(StrongWolfe::new(1e-3, 0.5).unwrap()),
                }
            };
            let (whole, all) = descend(number, rule(), false);
            let (short, fewer) = descend(number, rule(), true);
            assert!(
                whole.converged() && short.converged(),
                "{name}, rule {kind}: {} {}",
                whole.ending,
                short.ending
            );
            if blind.contains(name) {
                assert_eq!(short, whole, "{name}, rule {kind}");
                assert_eq!(short.point.map(f64::to_bits), whole.point.map(f64::to_bits));
                assert!(fewer < all, "{name}, rule {kind}: {fewer} of {all} terms");
            }
            assert!(
                (short.value - whole.value).abs() <= 1e-9 * whole.value,
                "{name}, rule {kind}"
            );
        }
    }
}

// ---- Errors ----

#[test]
fn errors() {
    let nan = f64::NAN;
    for (bad, error) in [
        ((0.0, 0.5, 0.5), GeneralisedWolfeError::Decrease),
        ((nan, 0.5, 0.5), GeneralisedWolfeError::Decrease),
        ((0.5, 0.4, 0.5), GeneralisedWolfeError::Left),
        ((0.5, 1.0, 0.5), GeneralisedWolfeError::Left),
        ((0.5, nan, 0.5), GeneralisedWolfeError::Left),
        ((0.1, 0.5, -1e-9), GeneralisedWolfeError::Right),
        ((0.1, 0.5, nan), GeneralisedWolfeError::Right),
    ] {
        assert_eq!(GeneralisedWolfe::new(bad.0, bad.1, bad.2), Err(error));
    }
    assert!(GeneralisedWolfe::new(0.1, 0.1, 0.0).is_ok());
    for (bad, error) in [
        ((0.0, 0.5), WolfeError::Decrease),
        ((0.5, 0.9), WolfeError::DecreaseNotBelowHalf),
        ((nan, 0.9), WolfeError::Decrease),
        ((0.1, 1.0), WolfeError::Curvature),
        ((0.1, nan), WolfeError::Curvature),
        ((0.2, 0.1), WolfeError::DecreaseAboveCurvature),
    ] {
        assert_eq!(ApproximateWolfe::new(bad.0, bad.1), Err(error));
    }
    for bad in [0.0, -1.0, nan, f64::INFINITY] {
        assert_eq!(
            ForcingDecrease::new(bad),
            Err(ForcingDecreaseError::Forcing)
        );
    }
    assert_eq!(
        GeneralisedWolfeError::Decrease.to_string(),
        "the decrease parameter must be above 0: 1e-4 is usual"
    );
    assert_eq!(
        GeneralisedWolfeError::Left.to_string(),
        "the left curvature parameter must be at least the decrease parameter and below 1"
    );
    assert_eq!(
        GeneralisedWolfeError::Right.to_string(),
        "the right curvature parameter must not be negative: use infinity for no bound"
    );
    assert_eq!(
        ForcingDecreaseError::Forcing.to_string(),
        "the forcing factor must be positive and finite: for any decrease at all use AnyDecrease"
    );
}
