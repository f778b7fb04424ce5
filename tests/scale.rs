//! No unit matters: with values and steps in other units, by powers of two so that nothing is rounded, every search tries
//! the same steps in the new units, and every run visits the same points.
#![cfg(feature = "alloc")]

mod support;

use support::cast::every_finder as finders;

use std::collections::BTreeMap;
use std::env;
use support::curves::{FIRST_STEPS, PUBLISHED};
use support::rays::RandomRay;
use surefoot::acceptance::{
    AnyDecrease, AnyFinite, ApproximateWolfe, ForcingDecrease, GeneralisedWolfe, Goldstein,
    StrongWolfe, SufficientDecrease, WeakWolfe, both,
};
use surefoot::direction::{ConjugateGradient, Lbfgs, SteepestDescent, Update};
use surefoot::finder::MoreThuente;
use surefoot::{
    BoxedDirection, BoxedRule, Descent, Ending, FirstTrial, Ray, Real, StepSearch, Stopping,
    separate,
};

const RULES: usize = 10;

/// The rule of this number, for values in units of `value` and steps in units of `step`.
fn rule<T: Real>(number: usize, curvature: f64, value: T, step: T) -> BoxedRule<T> {
    let fit = "parameters in range";
    let (c1, c2) = (T::of(1e-4), T::of(curvature));
    match number {
        0 => Box::new(SufficientDecrease::new(T::of(0.3)).expect(fit)),
        1 => Box::new(WeakWolfe::new(c1, c2).expect(fit)),
        2 => Box::new(StrongWolfe::new(c1, c2).expect(fit)),
        3 => Box::new(Goldstein::new(T::of(0.2)).expect(fit)),
        4 => Box::new(GeneralisedWolfe::new(c1, c2, T::of(0.3)).expect(fit)),
        5 => Box::new(ApproximateWolfe::new(c1, c2).expect(fit)),
        // In units of the value over the step squared.
        6 => Box::new(ForcingDecrease::new(T::of(1e-3) * value / step / step).expect(fit)),
        7 => Box::new(AnyDecrease),
        8 => Box::new(AnyFinite),
        _ => Box::new(both(
            Goldstein::new(T::of(0.2)).expect(fit),
            StrongWolfe::new(c1, c2).expect(fit),
        )),
    }
}

/// A curve of doubles: value and slope at a step.
type Curve<'c> = &'c dyn Fn(f64) -> (f64, f64);

/// All numbers of a search: step, value, slope.
struct Traced<T> {
    trials: Vec<[T; 3]>,
    ending: Ending<T>,
}

/// The search with values in units of `2^v` and steps in units of `2^s`; `None` where a number leaves the normal range.
fn search<T: Real>(
    curve: Curve<'_>,
    first: f64,
    curvature: f64,
    cast: (usize, usize),
    (v, s): (i32, i32),
) -> Option<Traced<T>> {
    let two = T::of(2.0);
    let (value_unit, step_unit) = (two.powi(v), two.powi(s));
    let slope_unit = two.powi(v - s);
    let normal = |x: T| x == T::zero() || x.is_normal();
    // Rounded in the old units, whose range the new ones share but for its ends: exact, or found out below.
    let at = |step: T| {
        let (value, slope) = curve((step / step_unit).to_double());
        [step, T::of(value) * value_unit, T::of(slope) * slope_unit]
    };
    let start = at(T::zero());
    // Curvatures and forcing factors are normal numbers, too, or the rule itself cannot be stated.
    let forcing = value_unit / step_unit / step_unit;
    if !start.into_iter().all(normal) || (cast.1 == 6 && !(forcing * T::of(1e-3)).is_normal()) {
        return None;
    }
    let ray = Ray::new(start[1], start[2]).with_slack(T::of(1e-6) * value_unit);
    let finder = finders::<T>().swap_remove(cast.0).1;
    let mut machine = StepSearch::new(finder, rule(cast.1, curvature, value_unit, step_unit));
    let mut trials = Vec::new();
    let found = machine.along(ray, T::of(first) * step_unit, |step| {
        let here = at(step);
        trials.push(here);
        surefoot::Sample::Both(here[1], here[2])
    });
    let ending = found.expect("a ray fit for a search").outcome.ending;
    let fit = trials.iter().flatten().all(|x| normal(*x));
    fit.then_some(Traced { trials, ending })
}

#[derive(Default)]
struct Tally {
    compared: u64,
    skipped: u64,
    /// Per finder: differences, and the first of them.
    different: BTreeMap<&'static str, (u64, String)>,
}

fn compare<T: Real>(
    name: &str,
    curve: Curve<'_>,
    (first, curvature): (f64, f64),
    units: &[(i32, i32)],
    tally: &mut Tally,
) {
    let two = T::of(2.0);
    for (number, (finder, _)) in finders::<T>().iter().enumerate() {
        for kind in 0..RULES {
            let plain = search::<T>(curve, first, curvature, (number, kind), (0, 0));
            let Some(plain) = plain else {
                tally.skipped += units.len() as u64;
                continue;
            };
            for &(v, s) in units {
                let scaled = search::<T>(curve, first, curvature, (number, kind), (v, s));
                let Some(scaled) = scaled else {
                    tally.skipped += 1;
                    continue;
                };
                tally.compared += 1;
                let exact = [two.powi(s), two.powi(v), two.powi(v - s)];
                let alike = |(a, b): (&[T; 3], &[T; 3])| (0..3).all(|i| a[i] * exact[i] == b[i]);
                let same = plain.trials.len() == scaled.trials.len()
                    && plain.trials.iter().zip(&scaled.trials).all(alike)
                    && matches!(plain.ending, Ending::Accepted)
                        == matches!(scaled.ending, Ending::Accepted);
                if !same {
                    let found = tally.different.entry(finder).or_default();
                    found.0 += 1;
                    if found.1.is_empty() {
                        let at = plain
                            .trials
                            .iter()
                            .zip(&scaled.trials)
                            .position(|pair| !alike(pair));
                        found.1 = format!(
                            "rule {kind} on {name} from {first:e}, values x 2^{v}, steps x 2^{s}: {} and {} trials, \
                             different from number {at:?} on",
                            plain.trials.len(),
                            scaled.trials.len()
                        );
                    }
                }
            }
        }
    }
}

fn every_curve<T: Real>(units: &[(i32, i32)], rays: u64) -> Tally {
    let mut tally = Tally::default();
    for published in &PUBLISHED {
        for first in FIRST_STEPS {
            let name = format!("function {}", published.number);
            let how = (first, published.curvature);
            compare::<T>(&name, &published.at, how, units, &mut tally);
        }
    }
    for seed in 0..rays {
        let ray = RandomRay::new(seed);
        // Each ray in five of the units, all of them by turns.
        let turn = seed as usize % units.len();
        let some: Vec<_> = units
            .iter()
            .cycle()
            .skip(turn)
            .step_by(5)
            .take(5)
            .copied()
            .collect();
        let units = if thorough() { units } else { &some };
        let how = (ray.first, ray.curvature);
        compare::<T>(
            &format!("ray {seed}"),
            &|a| ray.at(a),
            how,
            units,
            &mut tally,
        );
    }
    tally
}

/// Whether `SUREFOOT_THOROUGH` asks for every ray in all units.
fn thorough() -> bool {
    env::var_os("SUREFOOT_THOROUGH").is_some()
}

fn report(tally: &Tally, least: u64) {
    println!(
        "{} compared, {} left the range of normal numbers",
        tally.compared, tally.skipped
    );
    let faults: Vec<_> = tally
        .different
        .iter()
        .map(|(finder, (count, such))| format!("{finder}: {count}, such as {such}"))
        .collect();
    assert!(tally.compared >= least, "only {} compared", tally.compared);
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

#[test]
fn searches_in_double_precision_have_no_unit() {
    let exponents = [-500, -100, 0, 100, 500];
    let units: Vec<_> = exponents
        .iter()
        .flat_map(|v| exponents.iter().map(|s| (*v, *s)))
        .filter(|units| *units != (0, 0))
        .collect();
    report(&every_curve::<f64>(&units, 200), 50_000);
}

#[test]
fn searches_in_single_precision_have_no_unit() {
    let exponents = [-50, 0, 50];
    let units: Vec<_> = exponents
        .iter()
        .flat_map(|v| exponents.iter().map(|s| (*v, *s)))
        .filter(|units| *units != (0, 0))
        .collect();
    report(&every_curve::<f32>(&units, 200), 20_000);
}

/// All directions but the conjugate gradients of Hager and Zhang, whose formula for `eta` holds the published absolute
/// constant 0.01 (SIAM J. Optim. 16 (2005) 170-192, eq. 1.6).
fn directions() -> Vec<(&'static str, BoxedDirection<[f64; 5]>)> {
    let conjugate = |update| Box::new(ConjugateGradient::new(update));
    vec![
        ("steepest descent", Box::new(SteepestDescent)),
        ("Fletcher–Reeves", conjugate(Update::FletcherReeves)),
        ("Polak–Ribière+", conjugate(Update::PolakRibierePlus)),
        ("Hestenes–Stiefel+", conjugate(Update::HestenesStiefelPlus)),
        ("Dai–Yuan", conjugate(Update::DaiYuan)),
        ("L-BFGS", Box::new(Lbfgs::new(3).expect("three pairs"))),
    ]
}

/// The points that a run visits, its variables in units of `2^k`. `f(x) = q(x / unit)`, so that values stay as they are
/// and gradients go by `1 / unit`.
fn points(number: usize, first: FirstTrial, k: i32) -> Vec<[f64; 5]> {
    let unit = 2_f64.powi(k);
    let weight = [1.0, 7.0, 20.0, 3.0, 0.4];
    let centre = [0.3, -0.7, 0.1, 1.1, -2.0];
    let value = |x: &[f64; 5]| {
        let terms = (0..5).map(|i| weight[i] * (x[i] / unit - centre[i]).powi(2));
        0.5 + 0.5 * terms.sum::<f64>()
    };
    let gradient = |x: &[f64; 5], g: &mut [f64; 5]| {
        for i in 0..5 {
            g[i] = weight[i] * (x[i] / unit - centre[i]) / unit;
        }
    };
    let stopping = Stopping {
        gradient: Some(1e-5 / unit),
        iterations: 60,
        ..Stopping::default()
    };
    let (_, direction) = directions().swap_remove(number);
    let rule = StrongWolfe::new(1e-4, 0.1).expect("in range");
    let mut visited = Vec::new();
    let report = Descent::new(direction, MoreThuente::new(), rule)
        .with_stopping(stopping)
        .expect("in range")
        .with_first_trial(first)
        .expect("in range")
        .minimize_watched(
            [3.0, 2.0, -1.0, 0.0, 4.0].map(|x: f64| x * unit),
            separate(value, gradient),
            |run| {
                visited.push(*run.point());
                std::ops::ControlFlow::Continue(())
            },
        );
    report.expect("a fit start");
    visited
}

#[test]
fn runs_have_no_unit_of_the_variables() {
    // The squares of gradients of 1e-6 leave the range at 2^500; 2^400 leaves them room.
    for k in [-400, -100, 100, 400] {
        let unit = 2_f64.powi(k);
        for (number, (name, _)) in directions().iter().enumerate() {
            // The latter measure in steps along the gradient, which are no steps of a quasi-Newton direction.
            let by_gradient = [
                FirstTrial::BarzilaiBorweinLong,
                FirstTrial::BarzilaiBorweinShort,
                FirstTrial::HagerZhang,
                FirstTrial::HagerZhangQuadratic,
            ];
            let by_gradient = if *name == "L-BFGS" {
                &[][..]
            } else {
                &by_gradient
            };
            for first in [FirstTrial::ByDirection, FirstTrial::SameChange]
                .iter()
                .chain(by_gradient)
            {
                let first = *first;
                let plain = points(number, first, 0);
                let scaled = points(number, first, k);
                let wanted: Vec<_> = plain.iter().map(|x| x.map(|x| x * unit)).collect();
                assert!(plain.len() >= 4, "{name}, {first:?}: {} moves", plain.len());
                assert_eq!(scaled, wanted, "{name}, {first:?}, variables x 2^{k}");
            }
        }
    }
}
