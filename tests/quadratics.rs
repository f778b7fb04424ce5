//! On a quadratic every rule's set of steps has a closed form: rules judge by it, finders land in it, in both
//! precisions; and worked examples come out.
#![cfg(feature = "alloc")]

mod support;

use proptest::prelude::*;
use support::cast::{Rule, finders};
use support::table::Table;
use surefoot::acceptance::SufficientDecrease;
use surefoot::finder::Backtracking;
use surefoot::finder::interpolation::{Point, cubic, quadratic, secant};
use surefoot::{Acceptance, Limits, Ray, Real, StepSearch, Trial, Verdict};

/// `phi(a) = value + slope a + curvature a^2 / 2`, with a negative slope and a positive curvature.
#[derive(Clone, Copy, Debug)]
struct Quadratic<T> {
    value: T,
    slope: T,
    curvature: T,
}

impl<T: Real> Quadratic<T> {
    fn at(self, a: T) -> (T, T) {
        let bend = self.curvature * a;
        (
            self.value + a * (self.slope + T::of(0.5) * bend),
            self.slope + bend,
        )
    }

    fn ray(self) -> Ray<T> {
        Ray::new(self.value, self.slope)
    }

    fn minimizer(self) -> T {
        -self.slope / self.curvature
    }

    /// A step in units of the minimizer.
    fn units(self, step: T) -> f64 {
        step.to_double() * self.curvature.to_double() / -self.slope.to_double()
    }

    /// How near to an end, in units of the minimizer, rounding may decide.
    ///
    /// With `r` for the step in units and `u` for half an epsilon, divide a condition by `a |slope|`. The value then
    /// carries at most `(3 r + 4) u` from its own terms and `|value| / (a |slope|) u` from its last addition, and so does
    /// the limit, with `3 c u` instead of the first. The conditions change by 1/2 per unit of `r` at least.
    fn blur(self, step: T) -> f64 {
        let r = self.units(step);
        let drowned = (self.value / (step * self.slope)).abs().to_double();
        4.0 * T::epsilon().to_double() * (1.0 + r + drowned)
    }

    /// Whether the step lies in the closed set; `None` where rounding may decide.
    fn holds(self, rule: Rule, step: T) -> Option<bool> {
        let (low, high) = closed_form::<T>(rule);
        let (r, blur) = (self.units(step), self.blur(step));
        let above_low = low == 0.0 || low + blur <= r;
        if above_low && r <= high - blur {
            Some(true)
        } else if r < low - blur || r > high + blur {
            Some(false)
        } else {
            None
        }
    }
}

/// The ends of a rule's set in units of the minimizer, for its parameters as they are in the precision at hand.
fn closed_form<T: Real>(rule: Rule) -> (f64, f64) {
    let held = |parameter: f64| T::of(parameter).to_double();
    match rule {
        Rule::SufficientDecrease { decrease } => (0.0, 2.0 * (1.0 - held(decrease))),
        Rule::WeakWolfe {
            decrease,
            curvature,
        } => (1.0 - held(curvature), 2.0 * (1.0 - held(decrease))),
        Rule::StrongWolfe {
            decrease,
            curvature,
        } => {
            let (c1, c2) = (held(decrease), held(curvature));
            (1.0 - c2, (1.0 + c2).min(2.0 * (1.0 - c1)))
        }
        Rule::Goldstein { share } => (2.0 * held(share), 2.0 * (1.0 - held(share))),
    }
}

/// Exponents of slope and curvature, and the value in units of `|slope| x minimizer`.
fn quadratics<T: Real>(decades: f64) -> impl Strategy<Value = Quadratic<T>> {
    let exponent = -decades..decades;
    let value = prop_oneof![Just(0.0), -1.0..1.0];
    (exponent.clone(), exponent, value).prop_map(|(slope, curvature, value)| {
        let (slope, curvature) = (T::of(-(10_f64.powf(slope))), T::of(10_f64.powf(curvature)));
        let value = T::of(value) * slope * slope / curvature;
        Quadratic {
            value,
            slope,
            curvature,
        }
    })
}

/// Each rule, with parameters from strict to lax.
fn rules() -> impl Strategy<Value = Rule> {
    let wolfe = (-3.0..-0.35, 0.0..=1.0).prop_map(|(decrease, share): (f64, f64)| {
        let decrease = 10_f64.powf(decrease);
        (decrease, decrease + share * (0.99 - decrease))
    });
    prop_oneof![
        (1e-4..0.99).prop_map(|decrease| Rule::SufficientDecrease { decrease }),
        wolfe
            .clone()
            .prop_map(|(decrease, curvature)| Rule::WeakWolfe {
                decrease,
                curvature
            }),
        wolfe.prop_map(|(decrease, curvature)| Rule::StrongWolfe {
            decrease,
            curvature
        }),
        (0.001..0.499).prop_map(|share| Rule::Goldstein { share }),
    ]
}

/// How far from one of the ends of a set to judge: relative, on either side, from far off to the last digits.
fn offsets() -> impl Strategy<Value = (bool, f64)> {
    (any::<bool>(), -16.0..1.0).prop_flat_map(|(high, power): (bool, f64)| {
        let away = 10_f64.powf(power);
        (
            Just(high),
            prop_oneof![Just(1.0 + away), Just(1.0 / (1.0 + away))],
        )
    })
}

fn judges_by_the_closed_form<T: Real>(
    phi: Quadratic<T>,
    rule: Rule,
    (at_high, factor): (bool, f64),
) -> Result<(), TestCaseError> {
    let (low, high) = closed_form::<T>(rule);
    let end = if at_high || low == 0.0 { high } else { low };
    let step = T::of(end * factor) * phi.minimizer();
    let (value, slope) = phi.at(step);
    let trial = Trial {
        step,
        value,
        slope: Some(slope),
    };
    let verdict = rule.boxed().judge(&phi.ray(), &trial);
    if let Some(holds) = phi.holds(rule, step) {
        prop_assert_eq!(verdict == Verdict::Accept, holds, "{:?}", verdict);
    }
    Ok(())
}

fn finders_land_in_the_closed_form<T: Real>(
    phi: Quadratic<T>,
    rule: Rule,
    decades: f64,
) -> Result<(), TestCaseError> {
    let first = phi.minimizer() * T::of(10_f64.powf(decades));
    for (name, finder) in finders::<T>() {
        let mut search = StepSearch::new(finder, rule.boxed());
        let outcome = search
            .along(phi.ray(), first, |a| phi.at(a))
            .unwrap()
            .outcome;
        let Some(trial) = outcome.accepted() else {
            return Err(TestCaseError::fail(format!("{name}: {:?}", outcome.ending)));
        };
        let r = phi.units(trial.step);
        prop_assert_ne!(
            phi.holds(rule, trial.step),
            Some(false),
            "{} took {}",
            name,
            r
        );
    }
    Ok(())
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 2000, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn rules_judge_by_the_closed_form_in_f64(phi in quadratics::<f64>(60.0), rule in rules(), offset in offsets()) {
        judges_by_the_closed_form(phi, rule, offset)?;
    }

    #[test]
    fn rules_judge_by_the_closed_form_in_f32(phi in quadratics::<f32>(6.0), rule in rules(), offset in offsets()) {
        judges_by_the_closed_form(phi, rule, offset)?;
    }

    #[test]
    fn finders_land_in_the_closed_form_in_f64(phi in quadratics::<f64>(60.0), rule in rules(), decades in -3.0..3.0) {
        finders_land_in_the_closed_form(phi, rule, decades)?;
    }

    #[test]
    fn finders_land_in_the_closed_form_in_f32(phi in quadratics::<f32>(6.0), rule in rules(), decades in -3.0..3.0) {
        finders_land_in_the_closed_form(phi, rule, decades)?;
    }
}

/// Worked by hand from the closed forms, in rational arithmetic.
#[test]
fn worked_quadratics_are_judged_by_their_ends() {
    let table = Table::read(include_str!("data/worked_examples/quadratics.csv"));
    let (mut judged, mut skipped) = (0, 0);
    for line in table.lines() {
        let phi = Quadratic::<f64> {
            value: line.get("value"),
            slope: line.get("slope"),
            curvature: line.get("curvature"),
        };
        let (decrease, curvature) = (line.get("c1"), line.get("c2"));
        let minimizer: f64 = line.get("minimizer");
        let least: f64 = line.get("least_value");
        assert!((phi.minimizer() - minimizer).abs() <= f64::EPSILON * minimizer);
        let scale = phi.value.abs() + (phi.slope * minimizer).abs();
        assert!((phi.at(minimizer).0 - least).abs() <= 2.0 * f64::EPSILON * scale);
        let wolfe = [
            (
                "weak",
                Rule::WeakWolfe {
                    decrease,
                    curvature,
                },
            ),
            (
                "strong",
                Rule::StrongWolfe {
                    decrease,
                    curvature,
                },
            ),
        ];
        let others = [
            ("decrease", Rule::SufficientDecrease { decrease }),
            ("goldstein", Rule::Goldstein { share: decrease }),
        ];
        for (name, rule) in wolfe.into_iter().chain(others) {
            let high: f64 = line.get(&format!("{name}_high"));
            let low = match name {
                "decrease" => 0.0,
                _ => line.get(&format!("{name}_low")),
            };
            for (end, inward) in [(low, 1.0), (high, -1.0)] {
                // At an end rounding decides; 1.5 blurs to either side of it must not.
                let away = 1.5 * phi.blur(end) * minimizer;
                if end == 0.0 || away > 0.25 * (high - low).min(end) {
                    skipped += 1; // no end, or the value is so large that its last digit hides the decrease
                    continue;
                }
                for (step, accepted) in [(end + inward * away, true), (end - inward * away, false)]
                {
                    let (value, slope) = phi.at(step);
                    let trial = Trial {
                        step,
                        value,
                        slope: Some(slope),
                    };
                    let verdict = rule.boxed().judge(&phi.ray(), &trial);
                    assert_eq!(
                        verdict == Verdict::Accept,
                        accepted,
                        "{phi:?} {rule:?} at {step:e}"
                    );
                    judged += 1;
                }
            }
        }
    }
    assert_eq!(judged + 2 * skipped, 25 * 8 * 2);
    assert!(judged >= 300, "{judged}");
}

/// 60-digit arithmetic on f = 100 (y - x^2)^2 + (1 - x)^2 (H. H. Rosenbrock, Computer J. 3 (1960) 175-184).
#[test]
fn backtracking_shortens_as_often_as_worked_out() {
    let f = |x: [f64; 2]| {
        let (u, v) = (x[1] - x[0] * x[0], 1.0 - x[0]);
        (
            100.0 * u * u + v * v,
            [-400.0 * x[0] * u - 2.0 * v, 200.0 * u],
        )
    };
    let table = Table::read(include_str!(
        "data/worked_examples/rosenbrock_backtracking.csv"
    ));
    let mut x = [0.0; 2];
    for line in table.lines() {
        let iteration: u32 = line.get("iteration");
        if iteration == 1 {
            x = [-1.2, 1.0];
        }
        let (value, g) = f(x);
        let finder = Backtracking::new(line.get("ratio")).unwrap();
        let rule = SufficientDecrease::new(line.get("c1")).unwrap();
        let limits = Limits::new(0.0, f64::INFINITY, 200).unwrap();
        let mut search = StepSearch::new(finder, rule).with_limits(limits);
        let ray = Ray::new(value, -(g[0] * g[0] + g[1] * g[1]));
        let found = search
            .along(ray, 1.0, |a| f([x[0] - a * g[0], x[1] - a * g[1]]).0)
            .unwrap();
        let trial = found.outcome.accepted().unwrap();
        let what = format!("{} {} {iteration}", line.text("ratio"), line.text("c1"));
        assert_eq!(
            found.outcome.trials - 1,
            line.get::<u32>("shortenings"),
            "{what}"
        );
        // Steepest descent in this valley enlarges a rounding error by up to 1e6 within twelve iterations.
        let worked: f64 = line.get("value");
        assert!(
            (trial.value - worked).abs() <= 1e-9 * worked,
            "{what}: {}",
            trial.value
        );
        x = [x[0] - trial.step * g[0], x[1] - trial.step * g[1]];
    }
    assert_eq!(table.lines().count(), 7 * 12);
}

/// Rational arithmetic on known cubics.
#[test]
fn interpolants_are_the_worked_ones() {
    let number = |text: &str| -> f64 {
        let (above, below) = text.split_once('/').unwrap_or((text, "1"));
        above.parse::<f64>().unwrap() / below.parse::<f64>().unwrap()
    };
    let table = Table::read(include_str!("data/worked_examples/interpolation.csv"));
    for line in table.lines() {
        let get = |column: &str| number(line.text(column));
        let point = |step: &str, value: &str, slope: &str| Point {
            step: get(step),
            value: get(value),
            slope: get(slope),
        };
        let (a, b) = (
            point("a", "value_a", "slope_a"),
            point("b", "value_b", "slope_b"),
        );
        for (name, found) in [
            ("cubic", cubic(&a, &b)),
            ("cubic", cubic(&b, &a)),
            ("parabola", quadratic(&a, b.step, b.value)),
            ("secant", secant(&a, &b)),
            ("secant", secant(&b, &a)),
        ] {
            let worked = get(name);
            // The data are fractions rounded to doubles; the worst of the twenty loses three digits to cancellation.
            assert!(
                (found - worked).abs() <= 1e-12 * worked.abs().max(1.0),
                "{name} {found} {worked}"
            );
        }
    }
    assert_eq!(table.lines().count(), 20);
}
