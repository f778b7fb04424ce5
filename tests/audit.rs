//! The instruments tell the truth: planted errors in gradients are found and named, noise of known size is measured, and
//! profiles of quadratics show what the closed forms say.
#![cfg(feature = "alloc")]

use std::cell::Cell;
use std::convert::Infallible;
use surefoot::acceptance::{Goldstein, StrongWolfe, SufficientDecrease, WeakWolfe};
use surefoot::audit::{
    Agreement, CheckError, CheckSettingError, Comparison, Doubt, GradientCheck, Grid, GridError,
    Neighbours, NoiseError, NoiseEstimate, NoiseSettingError, ProfileError, TableError,
    check_gradient, check_gradient_by, check_slope, estimate_noise, step_profile, table_noise,
};
use surefoot::{
    Acceptance, Objective, Ray, RayFault, Real, Sample, Side, Trial, Vector, Verdict, joint,
    separate,
};

const NAN: f64 = f64::NAN;
const INFINITY: f64 = f64::INFINITY;

/// SplitMix64: G. L. Steele, D. Lea & C. H. Flood, "Fast splittable pseudorandom number generators", OOPSLA 2014,
/// doi:10.1145/2660193.2660195 (constants from memory; any even spread would do).
struct Dice(u64);

impl Dice {
    /// Evenly spread over 0 to 1.
    fn throw(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        ((z ^ (z >> 31)) >> 11) as f64 / (1_u64 << 53) as f64
    }

    /// Evenly spread, with mean 0 and standard deviation 1.
    fn noise(&mut self) -> f64 {
        12_f64.sqrt() * (self.throw() - 0.5)
    }
}

// ---- gradients

/// Twenty springs in a row, each a little nonlinear, in units that differ from spring to spring.
struct Springs {
    /// Unit of each component.
    units: Vec<f64>,
    /// Unit of the value.
    unit: f64,
    /// A component whose derivative is multiplied by `1 + error`.
    planted: Option<(usize, f64)>,
}

impl Springs {
    fn in_units(units: Vec<f64>, unit: f64) -> Self {
        Springs {
            units,
            unit,
            planted: None,
        }
    }

    fn stretched(&self, x: &[f64]) -> Vec<f64> {
        x.iter().zip(&self.units).map(|(x, u)| x / u).collect()
    }
}

impl Objective<Vec<f64>> for Springs {
    type Error = Infallible;

    fn value(&mut self, x: &Vec<f64>) -> Result<f64, Infallible> {
        let y = self.stretched(x);
        let links = y.windows(2).map(|w| (w[1] - w[0] * w[0]).powi(2));
        let anchors = y.iter().map(|y| y.cosh());
        Ok(self.unit * (links.sum::<f64>() + anchors.sum::<f64>()))
    }

    fn gradient(&mut self, x: &Vec<f64>, g: &mut Vec<f64>) -> Result<(), Infallible> {
        let y = self.stretched(x);
        for i in 0..y.len() {
            let mut slope = y[i].sinh();
            if let Some(&next) = y.get(i + 1) {
                slope -= 4.0 * y[i] * (next - y[i] * y[i]);
            }
            if i > 0 {
                slope += 2.0 * (y[i] - y[i - 1] * y[i - 1]);
            }
            g[i] = self.unit * slope / self.units[i];
        }
        if let Some((component, error)) = self.planted {
            g[component] *= 1.0 + error;
        }
        Ok(())
    }
}

fn somewhere(dice: &mut Dice, units: &[f64]) -> Vec<f64> {
    let sign = |d: f64| if d < 0.5 { -1.0 } else { 1.0 };
    units
        .iter()
        .map(|u| u * sign(dice.throw()) * (0.5 + dice.throw()))
        .collect()
}

/// From 1e-8 to 1e8 across the components.
fn mixed_units() -> Vec<f64> {
    (0..20)
        .map(|i| 10_f64.powf(f64::from(i) * 16.0 / 19.0 - 8.0))
        .collect()
}

#[test]
fn a_planted_error_of_a_thousandth_is_found_and_named() {
    let mut dice = Dice(1);
    for units in [vec![1.0; 20], mixed_units()] {
        for component in 0..20 {
            for error in [1e-3, -1e-3] {
                let x = somewhere(&mut dice, &units);
                let mut springs = Springs::in_units(units.clone(), 1.0);
                springs.planted = Some((component, error));
                let report = check_gradient(springs, &x).unwrap();
                let worst = report.worst().unwrap();
                assert_eq!(worst.component, Some(component), "{report}");
                assert_eq!(worst.agreement, Agreement::Disagrees, "{report}");
                assert_eq!(report.disagreeing().count(), 1, "{report}");
                assert_eq!(report.untold().count(), 0, "{report}");
                let relative = worst.relative_error().unwrap();
                assert!((relative - 1e-3).abs() < 1e-5, "{report}");
                let sentence = report.to_string();
                let named = format!("the worst: component {component} of the gradient disagrees");
                assert!(sentence.contains(&named), "{sentence}");
            }
        }
    }
}

#[test]
fn right_gradients_agree_on_scales_from_1e_8_to_1e8() {
    let mut dice = Dice(2);
    let mut all = vec![mixed_units()];
    all.extend([1e-8, 1e-4, 1.0, 1e4, 1e8].map(|u| vec![u; 20]));
    for units in all {
        for unit in [1e-8, 1e-4, 1.0, 1e4, 1e8] {
            for _ in 0..10 {
                let x = somewhere(&mut dice, &units);
                let springs = Springs::in_units(units.clone(), unit);
                let report = check_gradient(springs, &x).unwrap();
                assert!(report.agrees(), "units {:e}, {unit:e}: {report}", units[0]);
                for c in &report.comparisons {
                    assert!(c.evaluations <= 20, "{} values: {c}", c.evaluations);
                }
            }
        }
    }
}

#[test]
fn one_dimensional_functions_of_many_shapes_are_never_accused() {
    type Curve = fn(f64) -> f64;
    let curves: [(&str, Curve, Curve); 9] = [
        ("exp", f64::exp, f64::exp),
        ("fourth power", |x| x.powi(4), |x| 4.0 * x.powi(3)),
        ("logarithm", |x| x.abs().ln(), |x| 1.0 / x),
        ("wave", |x| (20.0 * x).sin(), |x| 20.0 * (20.0 * x).cos()),
        ("ripple on 1", |x| 1.0 + 1e-3 * x.sin(), |x| 1e-3 * x.cos()),
        (
            "switch",
            |x| (100.0 * x).tanh(),
            |x| 100.0 / (100.0 * x).cosh().powi(2),
        ),
        ("drowned", |x| 1e6 + x * x * x, |x| 3.0 * x * x),
        ("bell", |x| (-x * x).exp(), |x| -2.0 * x * (-x * x).exp()),
        (
            "long wave",
            |x| 1e8 * (1e-8 * x).sin(),
            |x| (1e-8 * x).cos(),
        ),
    ];
    for (name, value, slope) in curves {
        let mut dice = Dice(3);
        let mut untold = 0;
        for _ in 0..1000 {
            let x = [4.0 * (dice.throw() - 0.5) * 10_f64.powf(4.0 * dice.throw() - 3.0)];
            let found = check_one(value, slope, x[0]);
            assert_ne!(
                found.agreement,
                Agreement::Disagrees,
                "{name} at {x:?}: {found}"
            );
            untold += usize::from(found.agreement != Agreement::Agrees);

            // A hundredth more than the derivative is noticed wherever it matters beside the rounding of the value.
            let wrong = check_one(value, |x| 1.01 * slope(x), x[0]);
            if slope(x[0]).abs() * x[0].abs() > 1e-6 * value(x[0]).abs() && value(x[0]) != 0.0 {
                assert_eq!(
                    wrong.agreement,
                    Agreement::Disagrees,
                    "{name} at {x:?}: {wrong}"
                );
            }
        }
        assert!(untold <= 5, "{name}: {untold} of 1000 cannot be told");
    }
}

fn check_one(value: impl Fn(f64) -> f64, slope: impl Fn(f64) -> f64, x: f64) -> Comparison<f64> {
    let objective = separate(
        |x: &[f64; 1]| value(x[0]),
        |x: &[f64; 1], g: &mut [f64; 1]| g[0] = slope(x[0]),
    );
    check_gradient(objective, &[x]).unwrap().comparisons[0]
}

#[test]
fn at_zero_and_at_stationary_points_differences_still_tell() {
    let agrees = |c: Comparison<f64>| assert_eq!(c.agreement, Agreement::Agrees, "{c}");
    let disagrees = |c: Comparison<f64>| assert_eq!(c.agreement, Agreement::Disagrees, "{c}");
    agrees(check_one(|x| 3.0 * x + x * x, |_| 3.0, 0.0));
    disagrees(check_one(|x| 3.0 * x + x * x, |_| 3.003, 0.0));
    agrees(check_one(f64::cos, |_| 0.0, 0.0));
    disagrees(check_one(f64::cos, |_| 1e-6, 0.0));
    agrees(check_one(|x| 1.0 + (x - 1.0).powi(2), |_| 0.0, 1.0));
    // A component that the value does not depend on.
    agrees(check_one(|_| 7.0, |_| 0.0, 2.0));
    disagrees(check_one(|_| 7.0, |_| 1e-3, 2.0));
    // Lengths far from the usual 1 at 0.
    agrees(check_one(
        |x| (1e8 * x).sin(),
        |x| 1e8 * (1e8 * x).cos(),
        0.0,
    ));
    agrees(check_one(
        |x| 1.0 + (1e-8 * x).sin(),
        |x| 1e-8 * (1e-8 * x).cos(),
        0.0,
    ));
}

#[test]
fn at_a_kink_it_cannot_tell() {
    for claimed in [-1.0, 0.0, 1.0] {
        let found = check_one(f64::abs, |_| claimed, 0.0);
        let (left, right) = (-1.0, 1.0);
        let kink = Agreement::CannotTell(Doubt::Kink { left, right });
        assert_eq!(found.agreement, kink, "{found}");
        let found = check_one(|x| (x - 2.0).max(0.0) + x.exp(), |x| x.exp() + claimed, 2.0);
        let Agreement::CannotTell(Doubt::Kink { left, right }) = found.agreement else {
            panic!("{found}")
        };
        assert!((left - 2_f64.exp()).abs() < 1e-4 && (right - left - 1.0).abs() < 1e-4);
        assert!(found.to_string().contains("the function has a kink here"));
    }
    // A jump, and an infinite slope on both sides.
    let inaccurate = Agreement::CannotTell(Doubt::Inaccurate);
    let jump = check_one(|x| if x > 1.0 { 2.0 } else { 1.0 }, |_| 0.5, 1.0);
    assert_eq!(jump.agreement, inaccurate, "{jump}");
    let steep = check_one(f64::cbrt, |_| 5.0, 0.0);
    assert_eq!(steep.agreement, inaccurate, "{steep}");
    // Beside the kink it can.
    for beside in [-0.1, 1e-3, 1e-6] {
        let found = check_one(f64::abs, f64::signum, beside);
        assert_eq!(found.agreement, Agreement::Agrees, "{beside:e}: {found}");
    }
}

#[test]
fn at_the_edge_of_the_domain_it_takes_the_side_that_is_there() {
    let inside = |x: f64| if x >= 1.0 { x.exp() } else { NAN };
    for (value, x, side) in [
        (&inside as &dyn Fn(f64) -> f64, 1.0, Neighbours::Right),
        (&|x| inside(-x), -1.0, Neighbours::Left),
        (
            &|x| if x >= 0.0 { 3.0 * x - x * x } else { INFINITY },
            0.0,
            Neighbours::Right,
        ),
    ] {
        let truth = match (side, x == 0.0) {
            (_, true) => 3.0,
            (Neighbours::Left, _) => -1_f64.exp(),
            _ => 1_f64.exp(),
        };
        let found = check_one(value, |_| truth, x);
        assert_eq!(found.agreement, Agreement::Agrees, "{found}");
        assert_eq!(found.difference.unwrap().neighbours, side, "{found}");
        let found = check_one(value, |_| 1.001 * truth, x);
        assert_eq!(found.agreement, Agreement::Disagrees, "{found}");
    }
    // The slope at the edge is infinite; nothing around the point is defined; the edge lies within the usual steps.
    let root = check_one(f64::sqrt, |_| 1e3, 0.0);
    assert_eq!(
        root.agreement,
        Agreement::CannotTell(Doubt::Inaccurate),
        "{root}"
    );
    let alone = check_one(|x| if x == 1.0 { 1.0 } else { NAN }, |_| 1.0, 1.0);
    assert_eq!(
        alone.agreement,
        Agreement::CannotTell(Doubt::NoNeighbour),
        "{alone}"
    );
    assert_eq!(alone.difference, None);
    let near = check_one(|x| (x - 1.0).sqrt(), |x| 0.5 / (x - 1.0).sqrt(), 1.0 + 1e-4);
    assert_eq!(near.agreement, Agreement::Agrees, "{near}");
}

#[test]
fn noise_in_the_values_accuses_no_right_gradient() {
    let check = GradientCheck::default();
    let accused = |told: f64, noise: f64| {
        let check = check.with_value_noise(told).unwrap();
        let accused = (0..1000).filter(|&seed| {
            let mut dice = Dice(seed);
            let x = [3.0 * dice.throw()];
            let objective = separate(
                |x: &[f64; 1]| x[0].sin() + noise * dice.noise(),
                |x: &[f64; 1], g: &mut [f64; 1]| g[0] = x[0].cos(),
            );
            let found = check.slope(objective, &x, &[1.0]).unwrap();
            found.agreement == Agreement::Disagrees
        });
        accused.count()
    };
    for noise in [1e-9, 1e-6, 1e-3] {
        // Noise with a standard deviation of 1 that is spread evenly is 1.74 at most.
        assert_eq!(accused(1.74 * noise, noise), 0, "told, {noise:e}");
        let untold = accused(0.0, noise);
        assert!(untold <= 10, "untold, {noise:e}: {untold} of 1000");
    }
    // A parabola is told from far enough, whatever the noise.
    let check = check.with_value_noise(1e-4).unwrap();
    for (claimed, agreement) in [(2.0, Agreement::Agrees), (2.01, Agreement::Disagrees)] {
        let objective = separate(
            |x: &[f64; 1]| x[0] * x[0] + 1e-4 * (1e9 * x[0]).sin(),
            |_: &[f64; 1], g: &mut [f64; 1]| g[0] = claimed,
        );
        let found = check.slope(objective, &[1.0], &[1.0]).unwrap();
        assert_eq!(found.agreement, agreement, "{found}");
    }
}

#[test]
fn single_precision_finds_an_error_of_a_hundredth_and_accuses_no_right_gradient() {
    let f = |x: &[f32; 3]| x[0] * x[1].sin() + x[2].exp();
    let gradient = |x: &[f32; 3], g: &mut [f32; 3]| {
        *g = [x[1].sin(), x[0] * x[1].cos(), x[2].exp()];
    };
    let mut dice = Dice(4);
    for _ in 0..200 {
        let x = [(); 3].map(|()| (0.3 + dice.throw()) as f32);
        let report = check_gradient(separate(f, gradient), &x).unwrap();
        assert!(report.agrees(), "{x:?}: {report}");
        let wrong = |x: &[f32; 3], g: &mut [f32; 3]| {
            gradient(x, g);
            g[1] *= 1.01;
        };
        let report = check_gradient(separate(f, wrong), &x).unwrap();
        let worst = report.worst().unwrap();
        assert_eq!(
            (worst.component, worst.agreement),
            (Some(1), Agreement::Disagrees),
            "{report}"
        );
    }
}

/// A vector without components to index: a temperature and a pressure.
#[derive(Clone, Debug)]
struct State {
    temperature: f64,
    pressure: f64,
}

impl Vector for State {
    type Scalar = f64;
    fn dim(&self) -> usize {
        2
    }
    fn dot(&self, other: &Self) -> f64 {
        self.temperature * other.temperature + self.pressure * other.pressure
    }
    fn assign(&mut self, other: &Self) {
        *self = other.clone();
    }
    fn scale(&mut self, a: f64) {
        self.temperature *= a;
        self.pressure *= a;
    }
    fn add_scaled(&mut self, a: f64, x: &Self) {
        self.temperature += a * x.temperature;
        self.pressure += a * x.pressure;
    }
    fn max_abs(&self) -> f64 {
        let (a, b) = (self.temperature.abs(), self.pressure.abs());
        if a.is_nan() || a > b { a } else { b }
    }
}

#[test]
fn vectors_of_any_kind_can_be_checked_and_evaluations_are_counted() {
    let calls = Cell::new(0);
    let work = |error: f64| {
        let calls = &calls;
        joint(move |s: &State, g: &mut State| {
            calls.set(calls.get() + 1);
            g.temperature = 2.0 * s.temperature / s.pressure;
            g.pressure = -(1.0 + error) * (s.temperature / s.pressure).powi(2);
            s.temperature * s.temperature / s.pressure
        })
    };
    let x = State {
        temperature: 293.0,
        pressure: 1.013e5,
    };
    let add = |s: &mut State, component: usize, by: f64| match component {
        0 => s.temperature += by,
        _ => s.pressure += by,
    };
    let report = check_gradient_by(work(0.0), &x, add).unwrap();
    assert!(report.agrees(), "{report}");
    let counted: usize = report.comparisons.iter().map(|c| c.evaluations).sum();
    assert_eq!(calls.get(), counted + 1); // and one at the point itself
    let report = check_gradient_by(work(1e-3), &x, add).unwrap();
    assert_eq!(report.worst().unwrap().component, Some(1));
    let d = State {
        temperature: 1.0,
        pressure: 500.0,
    };
    let found = check_slope(work(0.0), &x, &d).unwrap();
    assert_eq!(
        (found.agreement, found.component),
        (Agreement::Agrees, None)
    );
    let found = check_slope(work(0.1), &x, &d).unwrap();
    assert_eq!(found.agreement, Agreement::Disagrees, "{found}");
}

#[test]
fn what_cannot_be_checked_says_so() {
    let f = |g0: f64| {
        joint(move |x: &[f64; 1], g: &mut [f64; 1]| {
            g[0] = g0;
            x[0]
        })
    };
    let at = |x: f64, g: f64| check_gradient(f(g), &[x]).unwrap_err();
    assert_eq!(at(NAN, 1.0), CheckError::PointNotFinite);
    assert_eq!(
        at(1.0, NAN),
        CheckError::GradientNotFinite { component: Some(0) }
    );
    let infinite = separate(|_: &[f64; 1]| INFINITY, |_: &[f64; 1], _: &mut [f64; 1]| ());
    assert_eq!(
        check_gradient(infinite, &[1.0]).unwrap_err(),
        CheckError::ValueNotFinite
    );
    for d in [0.0, NAN, INFINITY, 1e-310] {
        assert_eq!(
            check_slope(f(1.0), &[10.0], &[d]),
            Err(CheckError::Direction),
            "{d}"
        );
    }
    assert_eq!(
        check_slope(f(INFINITY), &[1.0], &[1.0]),
        Err(CheckError::GradientNotFinite { component: None })
    );
    let sum = joint(|x: &Vec<f64>, g: &mut Vec<f64>| {
        g.clear();
        x.iter().sum::<f64>()
    });
    assert_eq!(check_gradient(sum, &vec![]).unwrap_err(), CheckError::Empty);
    let length = CheckError::GradientLength {
        expected: 2,
        found: 0,
    };
    assert_eq!(check_gradient(sum, &vec![1.0; 2]).unwrap_err(), length);
    let fails = joint(|x: &[f64; 1], g: &mut [f64; 1]| {
        g[0] = 1.0;
        if x[0] == 1.0 {
            Ok(1.0)
        } else {
            Err("no licence")
        }
    });
    let error = check_gradient(fails, &[1.0]).unwrap_err();
    assert_eq!(error, CheckError::Caller("no licence"));
    assert_eq!(error.to_string(), "the objective failed: no licence");

    let check = GradientCheck::default();
    for bad in [0.0, 1.0, -1.0, NAN] {
        assert_eq!(
            check.with_tolerance(bad),
            Err(CheckSettingError::Tolerance),
            "{bad}"
        );
    }
    for bad in [0.0, -1.0, INFINITY, NAN] {
        assert_eq!(
            check.with_typical(bad),
            Err(CheckSettingError::Typical),
            "{bad}"
        );
    }
    for bad in [-1.0, INFINITY, NAN] {
        assert_eq!(
            check.with_value_noise(bad),
            Err(CheckSettingError::ValueNoise),
            "{bad}"
        );
    }
}

// ---- noise

type Curve = (&'static str, fn(f64) -> f64);
const CURVES: [Curve; 6] = [
    ("parabola", |a| 1.0 + (a - 0.3) * (a - 0.3)),
    ("wave", |a| 2.0 + (3.0 * a).sin()),
    ("fast wave", |a| 2.0 + (100.0 * a).sin()),
    ("steep exponential", |a| (50.0 * a).exp()),
    ("fourth power", |a| 1e4 * (a + 1.0).powi(4)),
    ("around 0", |a| a * a),
];

#[test]
fn noise_of_known_size_is_measured_within_a_factor_of_4() {
    for (name, f) in CURVES {
        for relative in [1e-12, 1e-9, 1e-6, 1e-3, 1e-2] {
            for spacing in [1e-6, 1e-2] {
                let truth = relative * f(0.0).abs().max(1e-3);
                let within = (0..100).filter(|&seed| {
                    let mut dice = Dice(seed);
                    estimate_noise(|a| f(a) + truth * dice.noise(), spacing)
                        .is_ok_and(|n| n.level > truth / 4.0 && n.level < truth * 4.0)
                });
                let within = within.count();
                assert!(
                    within >= 95,
                    "{name}, {relative:e} from {spacing:e}: {within} of 100"
                );
            }
        }
    }
}

#[test]
fn noise_is_measured_in_single_precision() {
    for (name, f) in CURVES {
        for relative in [1e-5, 1e-4, 1e-3, 1e-2] {
            let truth = relative * f(0.0).abs().max(1e-3);
            let within = (0..100).filter(|&seed| {
                let mut dice = Dice(seed);
                let noisy = |a: f32| (f(f64::from(a)) + truth * dice.noise()) as f32;
                estimate_noise(noisy, 1e-4_f32).is_ok_and(|n| {
                    let level = f64::from(n.level);
                    level > truth / 4.0 && level < truth * 4.0
                })
            });
            let within = within.count();
            assert!(within >= 95, "{name}, {relative:e}: {within} of 100");
        }
    }
}

/// Rounding to nearest is off by a third of an epsilon of the value, evenly spread; a handful of operations each add theirs.
#[test]
fn noiseless_polynomials_show_their_rounding() {
    fn level<T>(f: fn(T) -> T, spacing: f64) -> f64
    where
        T: Real + surefoot::Reply<T>,
        T::Error: std::fmt::Debug,
    {
        let noise = estimate_noise(f, T::of(spacing)).unwrap();
        noise.level.to_double() / (T::epsilon() * f(T::zero()).abs()).to_double()
    }
    for spacing in [1e-12, 1e-9, 1e-6, 1e-3, 1.0] {
        for level in [
            level(|a: f64| 1.0 + a * (2.0 - a * (0.5 + a)), spacing),
            level(|a: f64| (a * 1.1 + 1.3).powi(4), spacing),
            level(|a: f64| 1.0 + 1e-3 * a, spacing),
            level(|a: f32| 1.0 + a * (2.0 - a * (0.5 + a)), spacing),
            level(|a: f32| (a * 1.1 + 1.3).powi(4), spacing),
        ] {
            assert!(
                level > 0.05 && level < 5.0,
                "{level} epsilons from {spacing:e}"
            );
        }
    }
}

#[test]
fn levels_of_alternating_tables_are_exact() {
    // Differences of order k of +-s are +-2^k s: sigma_k = s sqrt(gamma_k 4^k), with gamma_1 = 1/2 and gamma_2 = 1/6.
    let alternating = |i: usize| if i.is_multiple_of(2) { 0.25 } else { -0.25 };
    let flat: Vec<f64> = (0..9).map(|i| 64.0 + alternating(i)).collect();
    let noise = table_noise(&flat).unwrap();
    assert_eq!(noise.order, 1);
    assert!((noise.level - 0.25 * 2_f64.sqrt()).abs() < 1e-14);
    // A slope that keeps the first differences from changing their sign.
    let rising: Vec<f64> = (0..9)
        .map(|i| 64.0 + 0.75 * i as f64 + alternating(i))
        .collect();
    let noise = table_noise(&rising).unwrap();
    assert_eq!(noise.order, 2);
    assert!((noise.level - 0.25 * (8.0_f64 / 3.0).sqrt()).abs() < 1e-14);
    // The same at the ends of the range of numbers.
    for unit in [2_f64.powi(-1000), 2_f64.powi(1000)] {
        let scaled: Vec<f64> = flat.iter().map(|v| v * unit).collect();
        let level = table_noise(&scaled).unwrap().level / unit;
        assert!(
            (level - 0.25 * 2_f64.sqrt()).abs() < 1e-14,
            "{unit:e}: {level}"
        );
    }
    assert_eq!(table_noise(&[1.0; 4]), Err(TableError::TooShort));
    assert_eq!(
        table_noise(&[1.0, 2.0, NAN, 1.0, 1.0]),
        Err(TableError::NotFinite)
    );
    assert_eq!(
        table_noise(&[1.0, 1.0, 1.01, 1.01, 1.0]),
        Err(TableError::TooFine)
    );
    assert_eq!(
        table_noise(&[1.0, 2.0, 1.5, 3.0, 1.0]),
        Err(TableError::TooCoarse)
    );
    let smooth: Vec<f64> = (0..9).map(|i| (1e-3 * i as f64).exp()).collect();
    assert_eq!(table_noise(&smooth[..6]), Err(TableError::NoAgreement));
}

#[test]
fn where_no_noise_can_be_measured_it_says_why() {
    for bad in [0.0, -1.0, NAN, INFINITY] {
        assert_eq!(
            estimate_noise(|_| 1.0, bad),
            Err(NoiseError::Spacing),
            "{bad}"
        );
    }
    assert!(matches!(
        estimate_noise(|_| 5.0, 1.0),
        Err(NoiseError::SpacingTooSmall { spacing }) if spacing > 1e20
    ));
    // Values around 0 that are exact there.
    assert!(matches!(
        estimate_noise(|a: f64| a, 1.0),
        Err(NoiseError::SpacingTooLarge { spacing }) if spacing < 1e-20
    ));
    // Defined to the right only, and nowhere.
    assert!(matches!(
        estimate_noise(|a: f64| a.sqrt(), 1.0),
        Err(NoiseError::NotFinite { step }) if step < 0.0
    ));
    // A pole within the first table: the spacing moves away from it.
    let noise = estimate_noise(|a: f64| 1.0 / (a + 1.0).max(0.0), 1.0).unwrap();
    assert!(
        noise.spacing < 1.0 && noise.level < 4.0 * f64::EPSILON,
        "{noise}"
    );
    let one_try = NoiseEstimate::new(6, 1).unwrap();
    assert_eq!(
        one_try.around_zero(|a: f64| (1e-3 * a).exp(), 1.0),
        Err(NoiseError::NoAgreement { spacing: 1.0 })
    );
    assert_eq!(
        estimate_noise(|_| Err::<f64, _>("no licence"), 1.0),
        Err(NoiseError::Caller("no licence"))
    );
    for values in [0, 4, 65] {
        assert_eq!(
            NoiseEstimate::new(values, 1),
            Err(NoiseSettingError::Values)
        );
    }
    assert_eq!(NoiseEstimate::new(9, 0), Err(NoiseSettingError::Attempts));
}

#[test]
fn a_level_counts_its_evaluations_and_is_ready_for_a_ray() {
    let mut dice = Dice(5);
    let mut calls = 0;
    let noise = estimate_noise(
        |a| {
            calls += 1;
            1.0 + a + 1e-5 * dice.noise()
        },
        1.0,
    )
    .unwrap();
    assert_eq!(noise.evaluations, calls);
    // With it, a rise that is nothing but noise is no longer refused.
    let ray = Ray::new(1.0, -1e-9).with_value_noise(noise.bound());
    let trial = Trial {
        step: 1.0,
        value: 1.0 + 2e-5,
        slope: None,
    };
    let rule = SufficientDecrease::default();
    assert_eq!(rule.judge(&ray, &trial), Verdict::Accept);
    let exact = Ray::new(1.0, -1e-9);
    assert_eq!(rule.judge(&exact, &trial), Verdict::Refuse(Side::TooLong));
}

// ---- profiles

/// `phi(a) = 3 - s a + s a^2 / (2 a*)`: slope `-s` at 0, least at `a*`.
fn quadratic<T: Real>(s: f64, least: f64) -> (Ray<T>, impl Fn(T) -> (T, T)) {
    let (s, least) = (T::of(s), T::of(least));
    let three = T::of(3.0);
    let at = move |a: T| {
        (
            three - s * a + s * a * a / (least + least),
            s * (a / least - T::one()),
        )
    };
    (Ray::new(three, -s), at)
}

#[test]
fn on_a_quadratic_the_slope_ratio_falls_along_a_straight_line() {
    fn falls<T: Real>(s: f64, least: f64) {
        let (ray, at) = quadratic::<T>(s, least);
        let grid = Grid::linear(T::zero(), T::of(2.0 * least), 101).unwrap();
        let profile = step_profile(&ray, &grid, |a| Sample::Both(at(a).0, at(a).1), &[]).unwrap();
        assert_eq!((profile.len(), profile.is_empty()), (101, false));
        for (i, row) in profile.rows().enumerate() {
            let ratio = row.slope_ratio.unwrap().to_double();
            let line = 1.0 - i as f64 / 50.0; // common practice: 1 at the start, 0 where it is least
            let rounding = 8.0 * T::epsilon().to_double();
            assert!(
                (ratio - line).abs() <= rounding,
                "row {i}: {ratio}, not {line}"
            );
        }
    }
    for s in [1e-6, 1.0, 1e6] {
        for least in [1e-6, 1.0, 1e6] {
            falls::<f64>(s, least);
            falls::<f32>(s, least);
        }
    }
}

#[test]
fn intervals_of_acceptance_are_those_of_the_closed_forms() {
    let armijo = SufficientDecrease::new(0.1).unwrap();
    let weak = WeakWolfe::new(0.1, 0.4).unwrap();
    let strong = StrongWolfe::new(0.1, 0.4).unwrap();
    let goldstein = Goldstein::new(0.2).unwrap();
    let rules: [(&str, &dyn Acceptance<f64>); 4] = [
        ("sufficient decrease", &armijo),
        ("weak Wolfe", &weak),
        ("strong Wolfe", &strong),
        ("Goldstein", &goldstein),
    ];
    // In units of a*: (0, 2 (1 - c1)], [1 - c2, 2 (1 - c1)], [1 - c2, 1 + c2], [2 c, 2 (1 - c)]; see each rule's page.
    let sets = [(0.0, 1.8), (0.6, 1.8), (0.6, 1.4), (0.4, 1.6)];
    for least in [1e-3, 2.0, 5e4] {
        let (ray, at) = quadratic(3.0, least);
        for grid in [
            Grid::linear(0.0, 3.0 * least, 734).unwrap(),
            Grid::geometric(1e-3 * least, 10.0 * least, 997).unwrap(),
        ] {
            let profile = step_profile(&ray, &grid, &at, &rules).unwrap();
            assert_eq!(profile.rules(), rules.map(|(name, _)| name));
            for (rule, (low, high)) in sets.into_iter().enumerate() {
                let inside = |a: f64| a > low * least && a < high * least;
                let steps = grid.steps();
                let first = steps.iter().position(|&a| inside(a)).unwrap();
                let last = steps.iter().rposition(|&a| inside(a)).unwrap();
                let found = profile.accepted(rule);
                assert_eq!(found.len(), 1, "{}", rules[rule].0);
                let rows = (found[0].first_row, found[0].last_row);
                assert_eq!(rows, (first, last), "{} with a* = {least}", rules[rule].0);
                assert_eq!((found[0].start, found[0].end), (steps[first], steps[last]));
                for row in profile.rows().filter(|row| row.step > 0.0) {
                    let side = match row.verdicts[rule].unwrap() {
                        Verdict::Accept => continue,
                        Verdict::Refuse(side) => side,
                        Verdict::NeedsSlope => panic!("the slope was given"),
                    };
                    let left = row.step < low * least + 1e-9 * least;
                    assert_eq!(side == Side::TooShort, left, "{}", rules[rule].0);
                }
            }
            assert_eq!(profile.accepted(4), []);
        }
    }
}

#[test]
fn several_intervals_holes_and_missing_slopes_show() {
    // Decreases in two wells; not defined between 4 and 5.
    let probe = |a: f64| match a {
        a if a > 4.0 && a < 5.0 => Sample::OutsideDomain,
        a if a < 2.0 => Sample::Value(-a),
        a if a < 3.5 => Sample::Value(1.0),
        a if a < 6.5 => Sample::Value(-5.0),
        _ => Sample::Value(NAN),
    };
    let rule = SufficientDecrease::default();
    let wolfe = WeakWolfe::default();
    let grid = Grid::of(vec![0.0, 0.5, 1.0, 3.0, 4.0, 4.5, 6.0, 7.0]).unwrap();
    let rules: [(&str, &dyn Acceptance<f64>); 2] =
        [("a \"plain\" rule, Armijo's", &rule), ("Wolfe", &wolfe)];
    let profile = step_profile(&Ray::new(0.0, -1.0), &grid, probe, &rules).unwrap();
    let rows: Vec<_> = profile
        .accepted(0)
        .iter()
        .map(|i| (i.first_row, i.last_row))
        .collect();
    assert_eq!(rows, [(1, 2), (4, 4), (6, 6)]);
    assert_eq!(profile.row(0).unwrap().verdicts, [None, None]); // step 0 is no trial
    assert_eq!(
        profile.row(1).unwrap().verdicts[1],
        Some(Verdict::NeedsSlope)
    );
    assert_eq!(profile.row(5).unwrap().value, None);
    assert_eq!(profile.row(7).unwrap().verdicts, [None, None]);
    assert_eq!(profile.row(8), None);
    let lines: Vec<String> = profile.csv_lines().collect();
    assert_eq!(
        lines[0],
        "step,value,slope,slope ratio,\"a \"\"plain\"\" rule, Armijo's\",Wolfe"
    );
    assert_eq!(lines[2], "0.5,-0.5,,,accept,needs slope");
    assert_eq!(lines[4], "3,1,,,too long,too long");
    assert_eq!(lines[6], "4.5,,,,,");
    assert_eq!(lines.len(), 9);
    assert_eq!(profile.to_string().lines().count(), 9);
}

#[test]
fn grids_and_profiles_refuse_what_they_cannot_do() {
    for bad in [-1.0, NAN, INFINITY] {
        assert_eq!(Grid::linear(bad, 1.0, 3), Err(GridError::Start), "{bad}");
        assert_eq!(Grid::geometric(bad, 1.0, 3), Err(GridError::Start), "{bad}");
    }
    assert_eq!(Grid::geometric(0.0, 1.0, 3), Err(GridError::Start));
    for bad in [0.5, 0.0, NAN, INFINITY] {
        assert_eq!(Grid::linear(0.5, bad, 3), Err(GridError::End), "{bad}");
        assert_eq!(Grid::geometric(0.5, bad, 3), Err(GridError::End), "{bad}");
    }
    for few in [0, 1] {
        assert_eq!(Grid::linear(0.0, 1.0, few), Err(GridError::Count));
    }
    assert_eq!(Grid::<f64>::of(vec![]), Err(GridError::Count));
    assert_eq!(
        Grid::linear(1.0, 1.0 + f64::EPSILON, 4),
        Err(GridError::NotIncreasing)
    );
    for bad in [[1.0, 1.0, 2.0], [1.0, NAN, 2.0], [2.0, 1.0, 3.0]] {
        assert_eq!(
            Grid::of(bad.to_vec()),
            Err(GridError::NotIncreasing),
            "{bad:?}"
        );
    }
    let wide = Grid::geometric(1e-300, 1e300, 7).unwrap();
    assert_eq!((wide.steps()[0], wide.steps()[6]), (1e-300, 1e300));
    assert!((wide.steps()[3] - 1.0_f64).abs() < 1e-12);

    let (grid, rule) = (
        Grid::linear(0.0, 1.0, 3).unwrap(),
        SufficientDecrease::default(),
    );
    let rules: [(&str, &dyn Acceptance<f64>); 1] = [("rule", &rule)];
    let uphill = step_profile(&Ray::new(0.0, 1.0), &grid, |a: f64| a, &rules);
    assert_eq!(uphill, Err(ProfileError::Ray(RayFault::NotDescent)));
    let fails = step_profile(
        &Ray::new(0.0, -1.0),
        &grid,
        |a: f64| if a < 0.6 { Ok(a) } else { Err("no licence") },
        &rules,
    );
    assert_eq!(fails, Err(ProfileError::Caller("no licence")));
}
