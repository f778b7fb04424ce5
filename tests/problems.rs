//! The reference problems are what the papers say: values, gradients, minima, and the traps among them.
#![cfg(feature = "problems")]
#![allow(missing_docs)]

use surefoot::problems::more_garbow_hillstrom::*;
use surefoot::problems::{
    Minimum, Problem, RandomRay, WrongLength, WrongSize, more_garbow_hillstrom, more_thuente,
};
use surefoot::{Cost, Objective};

const EPS: f64 = f64::EPSILON;

/// A line of the data file; the file's head says what the columns are and where they come from.
struct Row {
    number: u32,
    n: usize,
    m: usize,
    role: &'static str,
    printed: &'static str,
    f: f64,
    x: Vec<f64>,
    gradient: Vec<f64>,
}

fn rows() -> Vec<Row> {
    let numbers = |cell: &str| -> Vec<f64> {
        cell.split_whitespace()
            .map(|t| t.parse().unwrap())
            .collect()
    };
    include_str!("data/more_garbow_hillstrom/values.csv")
        .lines()
        .filter(|line| !line.starts_with('#'))
        .skip(1)
        .map(|line| {
            let cells: Vec<&str> = line.split(',').collect();
            let [number, n, m, role, printed, f, x, gradient] = cells[..] else {
                panic!("eight columns in {line}");
            };
            Row {
                number: number.parse().unwrap(),
                n: n.parse().unwrap(),
                m: m.parse().unwrap(),
                role,
                printed,
                f: f.parse().unwrap(),
                x: numbers(x),
                gradient: numbers(gradient),
            }
        })
        .collect()
}

/// Number, `n`, `m`.
fn key(problem: &Problem) -> (u32, usize, usize) {
    (
        problem.number().unwrap(),
        problem.dim(),
        problem.residual_count().unwrap(),
    )
}

/// Each instance of the library with its rows of the data file.
fn instances() -> Vec<(Problem, Vec<Row>)> {
    let mut rows = rows();
    more_garbow_hillstrom()
        .into_iter()
        .map(|problem| {
            let key = key(&problem);
            let (own, rest) = rows
                .drain(..)
                .partition(|row| (row.number, row.n, row.m) == key);
            rows = rest;
            (problem, own)
        })
        .collect()
}

fn gradient(problem: &Problem, x: &[f64]) -> Vec<f64> {
    let mut g = vec![f64::NAN; x.len()];
    problem.gradient(x, &mut g).unwrap();
    g
}

fn is_minimum(row: &Row) -> bool {
    !["start", "check"].contains(&row.role)
}

fn max_abs(x: &[f64]) -> f64 {
    x.iter().fold(0.0, |m, v| v.abs().max(m))
}

fn label(problem: &Problem) -> String {
    format!(
        "{} {} n = {}",
        problem.number().unwrap(),
        problem.name(),
        problem.dim()
    )
}

// ---- the list

#[test]
fn the_list_has_every_stored_instance_once_and_in_order() {
    let keys: Vec<_> = more_garbow_hillstrom().iter().map(key).collect();
    let mut stored: Vec<_> = rows()
        .iter()
        .map(|row| (row.number, row.n, row.m))
        .collect();
    stored.dedup();
    assert_eq!(keys, stored);
    assert_eq!(keys.len(), 45);
}

#[test]
fn starts_and_minima_are_the_stored_ones() {
    for (problem, rows) in instances() {
        assert_eq!(problem.start(), rows[0].x, "{}", label(&problem));
        assert_eq!(rows[0].role, "start");
        assert_eq!(rows[1].role, "check");
        let stored = &rows[2..];
        assert_eq!(problem.minima().len(), stored.len(), "{}", label(&problem));
        for (minimum, row) in problem.minima().iter().zip(stored) {
            let role = match minimum {
                Minimum::Strict { .. } => "strict",
                Minimum::Singular { .. } => "singular",
                Minimum::Set { .. } => "set",
                Minimum::AtInfinity { .. } => "infinity",
                Minimum::Saddle { .. } => "saddle",
                other => panic!("a new kind of minimum, {other:?}"),
            };
            assert_eq!(role, row.role, "{}", label(&problem));
            assert_eq!(minimum.value(), row.f, "{}", label(&problem));
            assert_eq!(minimum.point().unwrap_or(&[]), row.x, "{}", label(&problem));
        }
    }
}

#[test]
fn printed_minima_come_out_to_every_printed_digit() {
    for row in rows().iter().filter(|row| is_minimum(row)) {
        if row.printed.is_empty() {
            // Local minima that the paper does not print.
            assert!([26, 31].contains(&row.number), "{}", row.number);
            continue;
        }
        let printed: f64 = row.printed.parse().unwrap();
        // One unit of the last of six printed digits; a printed 0 is exact.
        assert!(
            (row.f - printed).abs() <= 1e-5 * printed,
            "{} n = {}: {}",
            row.number,
            row.n,
            row.f
        );
    }
}

// ---- values and gradients against digits

#[test]
fn values_and_gradients_agree_with_25_digits() {
    for (problem, rows) in instances() {
        for row in rows.iter().filter(|row| !is_minimum(row)) {
            let value = problem.value(&row.x).unwrap();
            // Worst found: 4e-15; 5.8e-14 for problem 9, whose residuals at the start are small differences of data.
            let allowed = 1e-14 * if row.number == 9 { 20.0 } else { 1.0 };
            assert!(
                (value - row.f).abs() <= allowed * row.f,
                "{} {}: {value} for {}",
                label(&problem),
                row.role,
                row.f
            );
            let g = gradient(&problem, &row.x);
            // Worst found: 4e-14 of a component. The floor is for components that are sums of larger terms, or 0 by
            // symmetry: in problem 4, where 2 is taken from 2, 2.7e-11 of the component but 5e-23 of the largest; in
            // problem 35, whose recurrence adds to the rounding, 1.1e-15 of the largest.
            let floor = max_abs(&row.gradient) * EPS * if row.number == 35 { 8.0 } else { 1.0 };
            for (j, (found, wanted)) in g.iter().zip(&row.gradient).enumerate() {
                assert!(
                    (found - wanted).abs() <= 1e-13 * wanted.abs() + floor,
                    "{} {} component {}: {found} for {wanted}",
                    label(&problem),
                    row.role,
                    j + 1
                );
            }
        }
    }
}

/// At a stationary point nothing is left of f's derivatives but rounding. A residual is uncertain by about
/// `eps sum_k |dr/dx_k| |x_k|`, whether `x` or the arithmetic is rounded; that makes a gradient uncertain by
/// `eps sum_k |H_jk| |x_k|` and a value by `2 sqrt(f) eps N + (eps N)^2`, `N^2 = |x|' |H| |x| / 2`, `H` the Hessian.
#[test]
fn minima_are_stationary_and_have_their_values() {
    /// Worst found: 0.7 for gradients (problem 26), 0.2 for values (problem 35), without problem 29.
    const MARGIN: f64 = 2.0;
    /// There `x + t + 1` is rounded, which is ten times `x` and more. Worst found: 2.2.
    const MARGIN_OF_29: f64 = 4.0;
    for (problem, rows) in instances() {
        for row in rows
            .iter()
            .filter(|row| is_minimum(row) && !row.x.is_empty())
        {
            let uncertain = uncertainties(&problem, &row.x);
            let g = gradient(&problem, &row.x);
            let margin = if row.number == 29 {
                MARGIN_OF_29
            } else {
                MARGIN
            };
            for (j, (g, uncertain)) in g.iter().zip(&uncertain).enumerate() {
                assert!(
                    g.abs() <= margin * uncertain,
                    "{} {}: g{} = {g:e} {uncertain:e}",
                    label(&problem),
                    row.role,
                    j + 1
                );
            }
            let noise = MARGIN * residual_noise(&row.x, &uncertain);
            let value = problem.value(&row.x).unwrap();
            assert!(
                (value - row.f).abs() <= (2.0 * row.f.sqrt() + noise) * noise,
                "{} {}: {value:e} for {:e}",
                label(&problem),
                row.role,
                row.f
            );
        }
    }
}

/// `eps sum_k |H_jk| |x_k|`, with the Hessian by central differences of the gradient; the size of the component stands in
/// for an `x_k` of 0.
fn uncertainties(problem: &Problem, x: &[f64]) -> Vec<f64> {
    let mut sums = vec![0.0; x.len()];
    for k in 0..x.len() {
        let size = if x[k] == 0.0 {
            scale(problem, k)
        } else {
            x[k].abs()
        };
        let h = 1e-6 * size;
        let at = |moved: f64| {
            let mut x = x.to_vec();
            x[k] += moved;
            gradient(problem, &x)
        };
        for (sum, (above, below)) in sums.iter_mut().zip(at(h).iter().zip(at(-h))) {
            *sum += EPS * ((above - below) / (2.0 * h) * size).abs();
        }
    }
    sums
}

/// `eps N`: how uncertain the residuals are, all together.
fn residual_noise(x: &[f64], uncertain: &[f64]) -> f64 {
    let squares: f64 = x.iter().zip(uncertain).map(|(x, u)| x.abs() * u).sum();
    (0.5 * EPS * squares).sqrt()
}

// ---- gradients against central differences

/// The derivative of `f` at 0 and its uncertainty: central differences with `h`, `h / 2`, ... extrapolated to 0
/// (Richardson). An entry of the table is uncertain by how far it is from its neighbours, and by the `noise` of f, given
/// its value. `h` is a power of two and the point has few digits, so that moving it rounds nothing.
fn derivative(f: impl Fn(f64) -> f64, noise: impl Fn(f64) -> f64, h: f64) -> (f64, f64) {
    const LEVELS: usize = 9;
    let mut best = (f64::NAN, f64::INFINITY);
    let mut before: Vec<f64> = Vec::new();
    for level in 0..LEVELS {
        let h = h / f64::from(1 << level);
        let (above, below) = (f(h), f(-h));
        let rounding = (noise(above) + noise(below)) / h;
        let mut line = vec![(above - below) / (2.0 * h)];
        for (k, coarse) in before.iter().enumerate() {
            let power = 4f64.powi(k as i32 + 1);
            let entry = (power * line[k] - coarse) / (power - 1.0);
            let error = (entry - line[k]).abs().max((entry - coarse).abs()) + rounding;
            if error < best.1 {
                best = (entry, error);
            }
            line.push(entry);
        }
        before = line;
    }
    best
}

/// The power of two next below `h > 0`.
fn power_of_two(h: f64) -> f64 {
    h.log2().floor().exp2()
}

/// `x` to 24 bits.
fn few_digits(x: f64) -> f64 {
    f64::from(x as f32)
}

/// Counts comparisons, so that a test can ask for most of them to be sharp.
#[derive(Default)]
struct Comparisons {
    all: usize,
    sharp: usize,
}

impl Comparisons {
    fn add(&mut self, what: &str, analytic: f64, (differences, error): (f64, f64)) {
        assert!(
            (analytic - differences).abs() <= error,
            "{what}: {analytic:e} for {differences:e} +- {error:e}"
        );
        self.all += 1;
        if error <= 1e-7 * analytic.abs() {
            self.sharp += 1;
        }
    }
}

#[test]
fn problem_gradients_agree_with_central_differences() {
    let mut comparisons = Comparisons::default();
    for (problem, rows) in instances() {
        for x in places(&problem, &rows) {
            let g = gradient(&problem, &x);
            let uncertain = uncertainties(&problem, &x);
            let residual_noise = residual_noise(&x, &uncertain);
            for j in 0..x.len() {
                let along = |moved: f64| {
                    let mut x = x.clone();
                    x[j] += moved;
                    problem.value(&x).unwrap()
                };
                let h = power_of_two(0.02 * x[j].abs().max(scale(&problem, j)));
                let noise = |value: f64| 4.0 * EPS * value + value.sqrt() * residual_noise;
                let (found, error) = derivative(along, noise, h);
                let what = format!("{} x{}", label(&problem), j + 1);
                comparisons.add(&what, g[j], (found, error + uncertain[j]));
            }
        }
    }
    let Comparisons { all, sharp } = comparisons;
    // The others are components that vanish, at minima most of all, or drown in f (problem 4).
    assert!(all == 4431 && sharp > 3900, "{sharp} of {all}");
}

/// The start, the check point and points scattered about them and about the minimizers.
fn places(problem: &Problem, rows: &[Row]) -> Vec<Vec<f64>> {
    // |y - x2|^x3 of problem 11 has kinks where its minimizer lies.
    let smooth = |row: &&Row| !row.x.is_empty() && (row.number != 11 || !is_minimum(row));
    let mut places = Vec::new();
    for row in rows.iter().filter(smooth) {
        places.push(row.x.iter().map(|x| few_digits(*x)).collect());
        for turn in 0..2 {
            let scattered = |(j, x): (usize, &f64)| {
                let unit = ((7 * j + 13 * turn + 3) % 11) as f64 / 5.0 - 1.0;
                few_digits(x + 0.15 * unit * scale(problem, j))
            };
            places.push(row.x.iter().enumerate().map(scattered).collect());
        }
    }
    places
}

/// The size of component `j`: the largest at the start and the known minima, 1 if it is 0 everywhere.
fn scale(problem: &Problem, j: usize) -> f64 {
    let points = problem.minima().iter().filter_map(Minimum::point);
    let largest = points
        .chain([problem.start()])
        .map(|x| x[j].abs())
        .fold(0.0, f64::max);
    if largest > 0.0 { largest } else { 1.0 }
}

/// Values of rays are sums of terms of about 1.
fn ray_noise(value: f64) -> f64 {
    4.0 * EPS * (1.0 + value.abs())
}

#[test]
fn ray_slopes_agree_with_central_differences() {
    let mut comparisons = Comparisons::default();
    for ray in more_thuente() {
        // Function 3 joins its pieces at 1 -+ 0.01 with a jump of the curvature: keep clear of the joints.
        for step in [0.02, 0.3, 0.7, 1.0, 1.3, 5.0].map(few_digits) {
            let name = format!("function {} at {step}", ray.number());
            let found = derivative(
                |moved| ray.evaluate(step + moved).0,
                ray_noise,
                power_of_two(5e-3),
            );
            comparisons.add(&name, ray.evaluate(step).1, found);
        }
    }
    for seed in 0..400 {
        let ray = RandomRay::new(seed);
        for u in [0.05, 0.6, 1.4, 3.0] {
            let (step, h) = (
                few_digits(u * ray.scale()),
                power_of_two(0.03 * ray.scale()),
            );
            let name = format!("seed {seed}, {}, at {u}", ray.kind().name());
            let found = derivative(|moved| ray.evaluate(step + moved).0, ray_noise, h);
            comparisons.add(&name, ray.evaluate(step).1, found);
        }
    }
    let Comparisons { all, sharp } = comparisons;
    assert!(all == 1636 && sharp > 1560, "{sharp} of {all}");
}

// ---- use and misuse

#[test]
fn a_wrong_length_is_an_error_that_says_what_to_do() {
    for problem in more_garbow_hillstrom() {
        let n = problem.dim();
        for found in [0, n - 1, n + 1] {
            let error = problem.value(&vec![1.0; found]).unwrap_err();
            assert_eq!(
                (error.what, error.expected, error.found),
                ("point", n, found)
            );
            let mut g = vec![7.0; found];
            let error = problem.gradient(problem.start(), &mut g).unwrap_err();
            assert_eq!(
                (error.what, error.expected, error.found),
                ("gradient", n, found)
            );
            assert!(g.iter().all(|g| *g == 7.0));
        }
    }
    assert_eq!(
        rosenbrock().value(&[1.0]).unwrap_err().to_string(),
        "the point has length 1 but the problem has 2 variables; pass a slice of length 2"
    );
}

#[test]
fn a_wrong_size_is_an_error_that_says_what_to_do() {
    let text = |made: Result<Problem, WrongSize>| made.unwrap_err().to_string();
    assert_eq!(
        text(watson(1)),
        "Watson has no size 1; choose a size of at least 2"
    );
    assert_eq!(
        text(watson(32)),
        "Watson has no size 32; choose a size of at most 31"
    );
    assert_eq!(
        text(gulf(2)),
        "Gulf research and development has no size 2; choose a size of at least 3"
    );
    assert_eq!(
        text(gulf(101)),
        "Gulf research and development has no size 101; choose a size of at most 100"
    );
    assert_eq!(
        text(extended_powell_singular(6)),
        "Extended Powell singular has no size 6; choose a multiple of 4, at least 4"
    );
    assert_eq!(
        text(linear_full_rank(10, 9)),
        "The set of residuals of the linear function has no size 9; choose a size of at least 10"
    );
    for made in [
        extended_rosenbrock(0),
        extended_rosenbrock(3),
        penalty_2(101),
        brown_almost_linear(1),
        linear_rank_1(0, 5),
        linear_rank_1(5, 4),
        linear_rank_1_with_zeros(2, 5),
        linear_rank_1_with_zeros(5, 4),
    ] {
        assert!(made.is_err());
    }
    for made in [
        variably_dimensioned(0),
        trigonometric(0),
        chebyquad(0),
        penalty_1(0),
        discrete_boundary_value(0),
        discrete_integral_equation(0),
        broyden_tridiagonal(0),
        broyden_banded(0),
    ] {
        assert!(matches!(
            made,
            Err(WrongSize::TooSmall {
                found: 0,
                least: 1,
                ..
            })
        ));
    }
    for made in [
        variably_dimensioned(1),
        trigonometric(1),
        chebyquad(1),
        watson(2),
        gulf(3),
        extended_rosenbrock(2),
        extended_powell_singular(4),
        penalty_1(1),
        penalty_2(2),
        brown_almost_linear(2),
        discrete_boundary_value(1),
        discrete_integral_equation(1),
        broyden_tridiagonal(1),
        broyden_banded(1),
        linear_full_rank(1, 1),
        linear_rank_1(1, 1),
        linear_rank_1_with_zeros(3, 3),
    ] {
        let problem = made.unwrap();
        assert!(problem.value(problem.start()).unwrap().is_finite());
        assert!(
            gradient(&problem, problem.start())
                .iter()
                .all(|g| g.is_finite())
        );
    }
}

const EXTREMES: [f64; 7] = [
    f64::NAN,
    f64::INFINITY,
    f64::NEG_INFINITY,
    1e300,
    -1e300,
    f64::MIN_POSITIVE,
    -0.0,
];

#[test]
fn no_point_makes_a_problem_panic() {
    for problem in more_garbow_hillstrom() {
        for extreme in EXTREMES {
            for j in 0..problem.dim() {
                let mut x = problem.start().to_vec();
                x[j] = extreme;
                let value = problem.value(&x).unwrap();
                gradient(&problem, &x);
                assert!(
                    value.is_nan() || value >= 0.0,
                    "{} {value}",
                    label(&problem)
                );
                if extreme.is_nan() {
                    assert!(value.is_nan(), "{} hides a NaN", label(&problem));
                }
            }
        }
    }
    let extreme_steps = |evaluate: &dyn Fn(f64) -> (f64, f64)| {
        for step in EXTREMES {
            let (value, slope) = evaluate(step);
            assert!(!step.is_nan() || (value.is_nan() && slope.is_nan()));
        }
    };
    for seed in 0..100 {
        extreme_steps(&|step| RandomRay::new(seed).evaluate(step));
    }
    for ray in more_thuente() {
        extreme_steps(&|step| ray.evaluate(step));
    }
}

#[test]
fn evaluations_allocate_nothing() {
    for problem in more_garbow_hillstrom() {
        let x = problem.start().to_vec();
        let mut g = vec![0.0; x.len()];
        let counted = allocation_counter::measure(|| {
            problem.value(&x).unwrap();
            problem.gradient(&x, &mut g).unwrap();
        });
        assert_eq!(counted.count_total, 0, "{}", label(&problem));
    }
}

#[test]
fn a_problem_is_an_objective() {
    fn evaluate<O: Objective<Vec<f64>, Error = WrongLength> + Send + Sync>(mut objective: O) {
        assert_eq!(objective.cost(), Cost::Separate);
        let x = vec![-1.2, 1.0];
        let (mut g, mut both) = (vec![0.0; 2], vec![f64::NAN; 2]);
        let value = objective.value(&x).unwrap();
        objective.gradient(&x, &mut g).unwrap();
        assert_eq!(objective.value_and_gradient(&x, &mut both), Ok(value));
        assert_eq!(g, both);
        assert!(objective.value(&vec![1.0; 3]).is_err());
    }
    evaluate(rosenbrock());
    assert!(rosenbrock().source().contains("1981"));
}
