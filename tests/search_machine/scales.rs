//! No scale is special: values and steps multiplied by powers of two give the same search, bit for bit.

use super::RULES;
use super::support::cast::{FINDERS, Rule, finder};
use super::support::curves::{FIRST_STEPS, PUBLISHED};
use surefoot::{Ray, Real, Sample, StepSearch};

#[test]
fn a_search_scales_exactly_with_values_and_steps() {
    let exponents = [-500, -100, 0, 100, 500];
    let mut wrong = Vec::new();
    for curve in &PUBLISHED {
        for first in FIRST_STEPS {
            for rule in RULES {
                for name in FINDERS {
                    let plain = steps(name, rule, curve.at, first);
                    for value_exponent in exponents {
                        for step_exponent in exponents {
                            // Beyond that a slope is not a number any more.
                            if i32::abs(value_exponent - step_exponent) > 600 {
                                continue;
                            }
                            let (v, s) = (power(value_exponent), power(step_exponent));
                            let scaled = |a: f64| {
                                let (value, slope) = (curve.at)(a / s);
                                (v * value, v * slope / s)
                            };
                            let found = steps(name, rule, scaled, s * first);
                            let unscaled: Vec<f64> = found.iter().map(|step| step / s).collect();
                            if unscaled != plain {
                                wrong.push(format!(
                                    "{name} with {rule:?} on {} from {first:e}, values x 2^{value_exponent}, steps x \
                                     2^{step_exponent}: {} trials instead of {}",
                                    curve.number,
                                    found.len(),
                                    plain.len()
                                ));
                            }
                        }
                    }
                }
            }
        }
    }
    let count = wrong.len();
    wrong.truncate(20);
    assert!(
        count == 0,
        "{count} searches change with the scale, such as\n{}",
        wrong.join("\n")
    );
}

#[test]
fn a_search_in_single_precision_scales_too() {
    let at = |a: f32| {
        (
            1.0 / (1.0 + a) + a * a,
            2.0 * a - 1.0 / ((1.0 + a) * (1.0 + a)),
        )
    };
    for rule in RULES {
        for name in FINDERS {
            for first in [1e-3, 0.1, 30.0] {
                let plain = steps(name, rule, at, first);
                for (value_exponent, step_exponent) in
                    [(-40, -40), (40, 40), (0, 40), (40, 0), (0, -40), (-40, 0)]
                {
                    let (v, s) = (2_f32.powi(value_exponent), 2_f32.powi(step_exponent));
                    let scaled = |a: f32| {
                        let (value, slope) = at(a / s);
                        (v * value, v * slope / s)
                    };
                    let found = steps(name, rule, scaled, s * first);
                    let unscaled: Vec<f32> = found.iter().map(|step| step / s).collect();
                    assert_eq!(
                        unscaled, plain,
                        "{name} with {rule:?}, 2^{value_exponent} and 2^{step_exponent}"
                    );
                }
            }
        }
    }
}

fn steps<T: Real>(name: &str, rule: Rule, at: impl Fn(T) -> (T, T), first: T) -> Vec<T> {
    let mut search = StepSearch::new(finder(name), rule.boxed());
    let (value, slope) = at(T::zero());
    search.begin(Ray::new(value, slope), first).unwrap();
    while let Some(ask) = search.request() {
        let (value, slope) = at(ask.step);
        search.supply(Sample::Both(value, slope)).unwrap();
    }
    search.log().iter().map(|entry| entry.trial.step).collect()
}

/// `2^exponent`, exactly.
fn power(exponent: i32) -> f64 {
    2_f64.powi(exponent)
}
