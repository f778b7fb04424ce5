//! Nonmonotone references: the memories against a naive recomputation, and runs that may rise but never above them.
#![cfg(feature = "alloc")]

use proptest::prelude::*;
use std::ops::ControlFlow;
use surefoot::acceptance::{SufficientDecrease, WeakWolfe};
use surefoot::descent::{MOST_VALUES, ReferenceError, ReferenceMemory};
use surefoot::direction::{Lbfgs, SteepestDescent};
use surefoot::finder::{Backtracking, MoreThuente};
use surefoot::{
    BoxedDirection, BoxedFinder, BoxedRule, Descent, FirstTrial, Reference, Report, Stopping,
    separate,
};

proptest! {
    #[test]
    fn the_largest_of_the_last(values in prop::collection::vec(-1e3..1e3, 1..100), memory in 1..=MOST_VALUES) {
        let how = Reference::LargestOfLast { values: memory };
        let mut held = ReferenceMemory::new(how, values[0]).unwrap();
        for k in 0..values.len() {
            if k > 0 {
                held.accepted(values[k]);
            }
            let naive = values[(k + 1).saturating_sub(memory)..=k].iter().copied().fold(f64::MIN, f64::max);
            prop_assert_eq!(held.value(), naive, "after {} values", k + 1);
        }
    }

    /// Written out, `C_k` is the mean of all values with weights `eta^(k - i)`.
    #[test]
    fn the_weighted_average(
        falls in prop::collection::vec(0.0..10.0, 1..100),
        eta in prop_oneof![Just(0.0), Just(1.0), 0.0..=1.0],
        start in -1e3..1e3,
    ) {
        let how = Reference::WeightedAverage { eta };
        let mut held = ReferenceMemory::new(how, start).unwrap();
        let mut values = vec![start];
        for fall in falls {
            // Never above the reference, as a run keeps it.
            let value = held.value() - fall;
            held.accepted(value);
            values.push(value);
            let weights: Vec<f64> = (0..values.len()).rev().map(|age| eta.powi(age as i32)).collect();
            let sum: f64 = weights.iter().zip(&values).map(|(w, f)| w * f).sum();
            let naive = (sum / weights.iter().sum::<f64>()).max(value);
            prop_assert!((held.value() - naive).abs() <= 1e-12 * (1.0 + naive.abs() + start.abs()), "{} {}", held.value(), naive);
            prop_assert!(held.value() >= value);
        }
    }

    #[test]
    fn a_memory_of_one_is_the_current_value(values in prop::collection::vec(-1e3..1e3, 1..50)) {
        let memories = [Reference::Current, Reference::LargestOfLast { values: 1 }, Reference::WeightedAverage { eta: 0.0 }];
        let mut held: [ReferenceMemory<f64>; 3] = memories.map(|how| ReferenceMemory::<f64>::new(how, values[0]).unwrap());
        for value in &values {
            for memory in &mut held {
                memory.accepted(*value);
                prop_assert_eq!(memory.value().to_bits(), value.to_bits());
            }
        }
    }
}

#[test]
fn parameters_out_of_range() {
    for values in [0, MOST_VALUES + 1, usize::MAX] {
        let how = Reference::LargestOfLast { values };
        assert_eq!(
            ReferenceMemory::new(how, 1.0).err(),
            Some(ReferenceError::Values)
        );
        let descent = Descent::new(SteepestDescent, Backtracking::<f64>::default(), armijo());
        assert_eq!(
            descent.with_reference(how).err(),
            Some(ReferenceError::Values)
        );
    }
    for eta in [-1e-9, 1.0 + 1e-9, f64::NAN, f64::INFINITY] {
        let how = Reference::WeightedAverage { eta };
        assert_eq!(
            ReferenceMemory::new(how, 1.0_f32).err(),
            Some(ReferenceError::Eta)
        );
    }
    assert_eq!(
        ReferenceError::Values.to_string(),
        "the largest of the last values needs 1 to 32 values: 10 is usual"
    );
    assert_eq!(
        ReferenceError::Eta.to_string(),
        "the weight of the past must lie between 0 and 1: 0.85 is usual"
    );
}

// ---- Runs ----

/// Rosenbrock's valley: H. H. Rosenbrock, Computer J. 3 (1960) 175-184, doi:10.1093/comjnl/3.3.175.
fn rosenbrock(x: &[f64; 2]) -> (f64, [f64; 2]) {
    let (a, b) = (1.0 - x[0], x[1] - x[0] * x[0]);
    (
        a * a + 100.0 * b * b,
        [-2.0 * a - 400.0 * x[0] * b, 200.0 * b],
    )
}

/// A valley of our own along a sine, least at the origin.
fn bend(x: &[f64; 2]) -> (f64, [f64; 2]) {
    let off = x[1] - x[0].sin();
    (
        0.05 * x[0] * x[0] + 5.0 * off * off,
        [0.1 * x[0] - 10.0 * off * x[0].cos(), 10.0 * off],
    )
}

type Function = fn(&[f64; 2]) -> (f64, [f64; 2]);

struct Watched {
    report: Report<[f64; 2]>,
    values: Vec<f64>,
    points: Vec<[f64; 2]>,
}

fn run(
    f: Function,
    x0: [f64; 2],
    how: Option<Reference>,
    (direction, finder, rule): Parts,
    first: FirstTrial,
) -> Watched {
    let mut descent = Descent::new(direction, finder, rule)
        .with_stopping(Stopping {
            gradient: Some(1e-6),
            iterations: 50_000,
            ..Stopping::default()
        })
        .unwrap()
        .with_first_trial(first)
        .unwrap();
    if let Some(how) = how {
        descent = descent.with_reference(how).unwrap();
    }
    let (mut values, mut points) = (vec![f(&x0).0], vec![x0]);
    let objective = separate(
        |x: &[f64; 2]| f(x).0,
        |x: &[f64; 2], g: &mut [f64; 2]| *g = f(x).1,
    );
    let report = descent
        .minimize_watched(x0, objective, |run| {
            values.push(run.value());
            points.push(*run.point());
            ControlFlow::Continue(())
        })
        .unwrap();
    Watched {
        report,
        values,
        points,
    }
}

fn armijo() -> SufficientDecrease<f64> {
    SufficientDecrease::new(1e-4).unwrap()
}

/// Direction, finder and rule.
type Parts = (BoxedDirection<[f64; 2]>, BoxedFinder<f64>, BoxedRule<f64>);

/// Steepest descent with the long steps of Barzilai and Borwein, and L-BFGS.
fn methods() -> [(Parts, FirstTrial); 2] {
    let long: Parts = (
        Box::new(SteepestDescent),
        Box::new(Backtracking::default()),
        Box::new(armijo()),
    );
    let quasi: Parts = (
        Box::new(Lbfgs::new(5).unwrap()),
        Box::new(MoreThuente::new()),
        Box::new(WeakWolfe::default()),
    );
    [
        (long, FirstTrial::BarzilaiBorweinLong),
        (quasi, FirstTrial::ByDirection),
    ]
}

const VALLEYS: [(&str, Function, [f64; 2], [f64; 2]); 2] = [
    ("Rosenbrock", rosenbrock, [-1.2, 1.0], [1.0, 1.0]),
    ("bend", bend, [4.0, 3.0], [0.0, 0.0]),
];

#[test]
fn values_may_rise_but_not_above_the_reference() {
    let mut rises = 0;
    for (name, f, x0, minimizer) in VALLEYS {
        for how in [
            Reference::LargestOfLast { values: 10 },
            Reference::LargestOfLast { values: 3 },
            Reference::WeightedAverage { eta: 0.85 },
            Reference::WeightedAverage { eta: 1.0 },
        ] {
            for (number, (parts, first)) in methods().into_iter().enumerate() {
                let what = format!("{name}, {how:?}, method {number}");
                let watched = run(f, x0, Some(how), parts, first);
                let report = &watched.report;
                assert!(report.converged(), "{what}: {}", report.ending);
                let off = (0..2)
                    .map(|i| (report.point[i] - minimizer[i]).abs())
                    .fold(0.0, f64::max);
                assert!(off < 1e-4, "{what}: {off:e}");
                // Each value lies below the reference of its search, which is recomputed here.
                for k in 1..watched.values.len() {
                    let past = &watched.values[..k];
                    let reference = naive(how, past);
                    let value = watched.values[k];
                    assert!(
                        value <= reference + 1e-12 * reference.abs(),
                        "{what}: move {k} to {value:e} above {reference:e}"
                    );
                    rises += u32::from(value > past[k - 1]);
                }
                // The report holds the lowest point of all that were visited.
                let lowest = watched.values.iter().copied().fold(f64::INFINITY, f64::min);
                assert_eq!(report.value, lowest, "{what}");
                let at = watched.values.iter().position(|v| *v == lowest).unwrap();
                assert_eq!(f(&report.point).0, lowest, "{what}");
                let same = watched.values.iter().zip(&watched.points);
                let mut same = same.filter(|(v, _)| **v == lowest).map(|(_, x)| x);
                assert!(
                    same.any(|x| *x == report.point),
                    "{what}: visited first as {at}"
                );
                if let (Some(g), Some(most)) = (&report.gradient, report.gradient_max) {
                    assert_eq!(
                        (*g, g[0].abs().max(g[1].abs())),
                        (f(&report.point).1, most),
                        "{what}"
                    );
                }
            }
        }
    }
    assert!(
        rises > 20,
        "only {rises} moves rose: the runs were monotone"
    );
}

fn naive(how: Reference, past: &[f64]) -> f64 {
    let last = *past.last().unwrap();
    match how {
        Reference::LargestOfLast { values } => {
            let kept = &past[past.len().saturating_sub(values)..];
            kept.iter().copied().fold(f64::MIN, f64::max)
        }
        Reference::WeightedAverage { eta } => {
            let (mut weight, mut average) = (1.0, past[0]);
            for value in &past[1..] {
                let old = eta * weight;
                weight = old + 1.0;
                average = (old * average + value) / weight;
            }
            average.max(last)
        }
        _ => last,
    }
}

#[test]
fn memories_of_one_value_make_the_monotone_run() {
    for (name, f, x0, _) in VALLEYS {
        for method in 0..2 {
            let of = |how| {
                let (parts, first) = methods().into_iter().nth(method).unwrap();
                run(f, x0, how, parts, first)
            };
            let plain = of(None);
            for k in 1..plain.values.len() {
                assert!(
                    plain.values[k] <= plain.values[k - 1],
                    "{name}, method {method}"
                );
            }
            for how in [
                Reference::Current,
                Reference::LargestOfLast { values: 1 },
                Reference::WeightedAverage { eta: 0.0 },
            ] {
                let other = of(Some(how));
                let bits = |w: &Watched| {
                    w.points
                        .iter()
                        .map(|x| x.map(f64::to_bits))
                        .collect::<Vec<_>>()
                };
                assert_eq!(
                    bits(&other),
                    bits(&plain),
                    "{name}, method {method}, {how:?}"
                );
                assert_eq!(
                    other.report, plain.report,
                    "{name}, method {method}, {how:?}"
                );
            }
        }
    }
}
