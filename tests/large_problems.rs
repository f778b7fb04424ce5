//! The large problems are what their sources say: values, gradients, minima, sizes, and that they cost no memory.
#![cfg(feature = "problems")]
#![allow(missing_docs)]

use surefoot::acceptance::WeakWolfe;
use surefoot::audit::check_gradient;
use surefoot::direction::Lbfgs;
use surefoot::finder::ThreePoint;
use surefoot::problems::large::*;
use surefoot::problems::{Minimum, Problem, WrongSize, large_problems};
use surefoot::{Cost, Descent, Objective, Stopping};

fn gradient(problem: &Problem, x: &[f64]) -> Vec<f64> {
    let mut g = vec![f64::NAN; x.len()];
    problem.gradient(x, &mut g).unwrap();
    g
}

fn max_abs(x: &[f64]) -> f64 {
    x.iter().fold(0.0, |m, v| v.abs().max(m))
}

fn norm(x: &[f64]) -> f64 {
    x.iter().map(|v| v * v).sum::<f64>().sqrt()
}

/// The check point of the data file.
fn check_point(problem: &Problem) -> Vec<f64> {
    let off = |(i, x): (usize, &f64)| x + (((i + 1) % 7) as f64 - 3.0) / 20.0;
    problem.start().iter().enumerate().map(off).collect()
}

fn by_name(name: &str, n: usize) -> Problem {
    match name {
        "TRIDIA" => tridia(n),
        "DIXMAANL" => dixmaan(DixmaanVariant::L, n),
        "FREUROTH" => freuroth(n),
        "GENROSE" => genrose(n),
        "EIGENALS" => eigenals(n),
        "Chained Rosenbrock" => chained_rosenbrock(n),
        "Extended Rosenbrock" => extended_rosenbrock(n),
        "Extended Powell singular" => extended_powell_singular(n),
        "Trigonometric" => trigonometric(n),
        name => panic!("no problem {name}"),
    }
    .unwrap()
}

// ---- against digits

#[test]
fn values_and_gradients_agree_with_25_digits() {
    /// Worst found: 5.1e-15, in a norm, whose plain sum of 1000 squares here is most of it.
    const ALLOWED: f64 = 1e-14;
    let close = |what: &str, found: f64, wanted: f64, scale: f64| {
        let error = (found - wanted).abs();
        assert!(
            error <= ALLOWED * scale,
            "{what}: {found:e} for {wanted:e}, off by {:e}",
            error / scale
        );
    };
    let numbers = |cell: &str| -> Vec<f64> {
        cell.split_whitespace()
            .map(|t| t.parse().unwrap())
            .collect()
    };
    let mut rows = 0;
    for line in include_str!("data/large/values.csv")
        .lines()
        .filter(|line| !line.starts_with('#'))
        .skip(1)
    {
        let cells: Vec<&str> = line.split(',').collect();
        let [name, n, place, f, length, largest, first, last] = cells[..] else {
            panic!("eight columns in {line}");
        };
        let what = format!("{name} {n} {place}");
        let problem = by_name(name, n.parse().unwrap());
        let x = match place {
            "start" => problem.start().to_vec(),
            "check" => check_point(&problem),
            place => panic!("no place {place}"),
        };
        let mut g = vec![f64::NAN; x.len()];
        let value = problem.value_and_gradient(&x, &mut g).unwrap();
        let [f, length, largest]: [f64; 3] = [f, length, largest].map(|t| t.parse().unwrap());
        close(&what, value, f, f.abs());
        close(&what, norm(&g), length, length);
        close(&what, max_abs(&g), largest, largest);
        let (first, last) = (numbers(first), numbers(last));
        assert!(first.len() >= 4 && last.len() == 4);
        let tail = g.len() - last.len();
        for (found, wanted) in g.iter().zip(&first).chain(g[tail..].iter().zip(&last)) {
            close(&what, *found, *wanted, largest);
        }
        rows += 1;
    }
    assert_eq!(rows, 38);
}

#[test]
fn the_dixmaan_family_has_its_closed_form_at_the_start() {
    // With x = 2 throughout: xi^2 = 4, xi^2 (xi + xi^2)^2 = 144, xi^6 = 64, and sums of powers of i / n.
    let variants = DixmaanVariant::ALL;
    for (place, variant) in variants.iter().enumerate() {
        let problem = dixmaan(*variant, 30).unwrap();
        let name = char::from(b'A' + place as u8);
        assert_eq!(problem.name(), format!("DIXMAAN{name}"));
        let [beta, gamma] = [[0.0, 0.125], [0.0625; 2], [0.125; 2], [0.26; 2]][place % 4];
        let (n, third) = (30.0, 10.0);
        let sum = |m: f64| match place / 4 {
            0 => m,
            1 => m * (m + 1.0) / 2.0 / n,
            _ => m * (m + 1.0) * (2.0 * m + 1.0) / 6.0 / (n * n),
        };
        let wanted = 1.0
            + 4.0 * sum(n)
            + 144.0 * beta * (n - 1.0)
            + 64.0 * gamma * 2.0 * third
            + 4.0 * gamma * sum(third);
        let value = problem.value(problem.start()).unwrap();
        assert!(
            (value - wanted).abs() <= 1e-14 * wanted,
            "{name}: {value} for {wanted}"
        );
    }
}

// ---- gradients against differences

#[test]
fn gradients_agree_with_extrapolated_central_differences() {
    for problem in large_problems(40).unwrap() {
        let start = problem.start().to_vec();
        let perturbed = check_point(&problem);
        for x in [start, perturbed] {
            let report = check_gradient(&mut problem.clone(), &x).unwrap();
            assert!(report.agrees(), "{}: {:?}", problem.name(), report.worst());
        }
    }
}

// ---- minima

/// The minimizers that the documentation gives in closed form.
fn minimizers(problem: &Problem) -> Vec<Vec<f64>> {
    let n = problem.dim();
    match problem.name() {
        "TRIDIA" => vec![(0..n).map(|j| 0.5f64.powi(j as i32)).collect()],
        "GENROSE" => {
            let mut mirrored = vec![1.0; n];
            mirrored[0] = -1.0;
            vec![vec![1.0; n], mirrored]
        }
        "Chained Rosenbrock"
        | "Extended Rosenbrock"
        | "Extended Wood"
        | "LIARWHD"
        | "NONDIA"
        | "Variably dimensioned" => {
            vec![vec![1.0; n]]
        }
        "Extended Powell singular" | "Trigonometric" | "DQDRTIC" | "NONDQUAR" => vec![vec![0.0; n]],
        "ARWHEAD" => {
            let mut x = vec![1.0; n];
            x[n - 1] = 0.0;
            vec![x]
        }
        "QUARTC" => vec![(1..=n).map(|i| i as f64).collect()],
        "EIGENALS" => {
            let p = n.isqrt();
            let mut x = problem.start().to_vec();
            x[..p]
                .iter_mut()
                .enumerate()
                .for_each(|(j, d)| *d = (j + 1) as f64);
            vec![x]
        }
        name if name.starts_with("DIXMAAN") => vec![vec![0.0; n]],
        _ => Vec::new(),
    }
}

#[test]
fn minima_in_closed_form_have_their_values_and_no_slope() {
    let mut seen = 0;
    for problem in large_problems(100).unwrap() {
        for (k, x) in minimizers(&problem).iter().enumerate() {
            let minimum = &problem.minima()[k];
            let what = problem.name();
            assert_eq!(problem.value(x), Ok(minimum.value()), "{what}");
            assert!(max_abs(&gradient(&problem, x)) == 0.0, "{what}");
            // It is a minimum: values around it are not less.
            for turn in 0..50 {
                let around: Vec<f64> = x
                    .iter()
                    .enumerate()
                    .map(|(j, x)| x + 1e-3 * (((7 * j + 13 * turn + j * j) % 11) as f64 - 5.0))
                    .collect();
                assert!(problem.value(&around).unwrap() >= minimum.value(), "{what}");
            }
            seen += 1;
        }
    }
    assert_eq!(seen, 28);
}

#[test]
fn minima_of_the_smallest_sizes_are_stationary() {
    for problem in [engval1(2).unwrap(), cragg_levy(4).unwrap()] {
        let minimum = &problem.minima()[0];
        let point = minimum.point().expect("the point is stored");
        assert_eq!(problem.value(point), Ok(minimum.value()));
        assert_eq!(max_abs(&gradient(&problem, point)), 0.0);
    }
}

#[test]
fn every_cosine_can_be_least_at_once() {
    // t^2 - t / 2 = pi
    let t = 0.25 + (0.0625 + std::f64::consts::PI).sqrt();
    let problem = cosine(100).unwrap();
    let x = vec![t; 100];
    assert_eq!(problem.minima()[0].value(), -99.0);
    assert!((problem.value(&x).unwrap() + 99.0).abs() <= 99.0 * f64::EPSILON);
    // sin at a rounded odd multiple of pi, times 2 t + 1 / 2
    assert!(max_abs(&gradient(&problem, &x)) <= 4.5 * 4.0 * f64::EPSILON);
}

#[test]
fn the_second_minimum_of_the_chain_of_ten_is_stationary() {
    let problem = chained_rosenbrock(10).unwrap();
    let Minimum::Strict { value, point } = &problem.minima()[1] else {
        panic!("the point is stored");
    };
    assert!((problem.value(point).unwrap() - value).abs() <= 1e-14 * value);
    // The Hessian's entries are at most 1202: rounding x and the arithmetic leaves this much.
    assert!(max_abs(&gradient(&problem, point)) <= 1202.0 * 4.0 * f64::EPSILON);
}

/// Values that later collections of test problems print, from memory: here they come out of the formulas, which confirms both.
#[test]
fn runs_end_at_the_minima_that_are_stored() {
    for (problem, printed) in [
        (freuroth(10), Some(1014.06)),
        (freuroth(100), Some(11964.6)),
        (freuroth(1000), Some(121470.0)),
        (cragg_levy(50), Some(15.3725)),
        (cragg_levy(100), None),
        (cragg_levy(1000), Some(336.423)),
        (engval1(100), None),
        (engval1(1000), Some(1108.19)),
        (bdqrtic(100), None),
        (bdqrtic(1000), Some(3983.82)),
        (penalty_2(100), Some(97096.1)),
        (penalty_1(50), None),
        (penalty_1(1000), Some(9.68618e-3)),
    ] {
        let problem = problem.unwrap();
        let (name, n) = (problem.name(), problem.dim());
        let minimum = problem.minima()[0].value();
        if let Some(printed) = printed {
            // Half a unit of the last of six digits.
            assert!((minimum - printed).abs() <= 5e-6 * printed, "{name} {n}");
        }
        let x = minimizer(&problem, 1e-9);
        let value = problem.value(&x).unwrap();
        assert!(
            (value - minimum).abs() <= 1e-12 * minimum,
            "{name} {n}: {value} for {minimum}"
        );
        assert!(max_abs(&gradient(&problem, &x)) <= 1e-7, "{name} {n}");
    }
}

// ---- the same function written down twice

#[test]
fn problems_in_both_modules_are_the_same_functions() {
    use surefoot::problems::more_garbow_hillstrom as published;
    for (one, other) in [
        (extended_rosenbrock(40), published::extended_rosenbrock(40)),
        (
            extended_powell_singular(40),
            published::extended_powell_singular(40),
        ),
        (extended_wood(4), Ok(published::wood())),
        (trigonometric(40), published::trigonometric(40)),
        (
            discrete_integral_equation(40),
            published::discrete_integral_equation(40),
        ),
    ] {
        let (one, other) = (one.unwrap(), other.unwrap());
        assert_eq!(one.start(), other.start(), "{}", one.name());
        for x in [one.start().to_vec(), check_point(&one)] {
            let (value, wanted) = (one.value(&x).unwrap(), other.value(&x).unwrap());
            assert!(
                (value - wanted).abs() <= 1e-14 * wanted,
                "{}: {value} for {wanted}",
                one.name()
            );
            let (g, h) = (gradient(&one, &x), gradient(&other, &x));
            for (g, wanted) in g.iter().zip(&h) {
                assert!(
                    (g - wanted).abs() <= 1e-14 * max_abs(&h),
                    "{}: {g} for {wanted}",
                    one.name()
                );
            }
        }
    }
}

// ---- fields on a grid

/// A minimizer, by L-BFGS down to this gradient.
fn minimizer(problem: &Problem, gradient: f64) -> Vec<f64> {
    let stopping = Stopping {
        gradient: Some(gradient),
        iterations: 20_000,
        ..Stopping::default()
    };
    let rule = WeakWolfe::new(1e-4, 0.9).unwrap();
    Descent::new(Lbfgs::new(20).unwrap(), ThreePoint::new(), rule)
        .with_stopping(stopping)
        .unwrap()
        .minimize(problem.start().to_vec(), &mut problem.clone())
        .unwrap()
        .point
}

#[test]
fn minimal_surfaces_tend_to_the_closed_form_with_the_square_of_the_mesh() {
    for boundary in [SurfaceBoundary::Scherk, SurfaceBoundary::Catenoid] {
        // Cells of a side, not square, so that an exchange of the axes would show.
        let errors = [(6, 8), (12, 16), (24, 32)].map(|(across, along)| {
            let (nx, ny) = (across - 1, along - 1);
            let problem = minimal_surface(boundary, nx, ny).unwrap();
            let surface = minimizer(&problem, 1e-13);
            let exact = boundary.heights(nx, ny).unwrap();
            let errors = surface.iter().zip(&exact).map(|(a, b)| (a - b).abs());
            errors.fold(0.0, f64::max)
        });
        let orders = [0, 1].map(|k| (errors[k] / errors[k + 1]).log2());
        assert!(
            orders.iter().all(|order| (order - 2.0).abs() < 0.15),
            "{boundary:?}: orders {orders:?} of {errors:?}"
        );
        assert!(errors[2] < 2e-3, "{errors:?}");
    }
}

#[test]
fn the_torsion_minimum_is_reached_and_tends_to_the_series() {
    let problem = elastic_torsion(14, 9).unwrap();
    let (x, minimum) = (minimizer(&problem, 1e-13), problem.minima()[0].value());
    let value = problem.value(&x).unwrap();
    assert!((value - minimum).abs() <= 1e-13, "{value} for {minimum}");
    // S. P. Timoshenko & J. N. Goodier, Theory of Elasticity, section on bars of narrow and of rectangular cross section: the
    // torsion constant of a square of side 1 (from memory; 0.1406 as tabulated there) is four times the integral of v at c = 1.
    let odd = (0..40).map(|k| f64::from(2 * k + 1));
    let pi = std::f64::consts::PI;
    let series: f64 = odd.map(|k| (0.5 * pi * k).tanh() / k.powi(5)).sum();
    let constant = (1.0 - 192.0 / pi.powi(5) * series) / 3.0;
    assert!((constant - 0.1406).abs() < 5e-5);
    let limit = -0.5 * 25.0 * constant / 4.0;
    let errors =
        [15, 31, 63, 127].map(|n| elastic_torsion(n, n).unwrap().minima()[0].value() - limit);
    let ratios = |errors: &[f64]| -> Vec<f64> { errors.windows(2).map(|e| e[0] / e[1]).collect() };
    // Falls with h^2, and once that term is gone with h^4 (and a logarithm, from the corners).
    assert!(ratios(&errors).iter().all(|r| (r - 4.0).abs() < 0.05));
    let extrapolated: Vec<f64> = errors
        .windows(2)
        .map(|e| (4.0 * e[1] - e[0]) / 3.0)
        .collect();
    assert!(
        ratios(&extrapolated).iter().all(|r| *r > 12.0),
        "{extrapolated:?}"
    );
}

#[test]
fn an_optimal_design_shares_the_bar_between_two_materials() {
    // Where |grad v| stays below t1 the energy is that of the strong material alone: psi(t) = t^2, twice the quadratic part of
    // the torsion problem.
    let (design, torsion) = (
        optimal_design(12, 7).unwrap(),
        elastic_torsion(12, 7).unwrap(),
    );
    let small: Vec<f64> = torsion.start().iter().map(|x| 0.02 * x).collect();
    let sum = small.iter().sum::<f64>() / (13.0 * 8.0);
    let wanted = 2.0 * (torsion.value(&small).unwrap() + 5.0 * sum) + sum;
    let value = design.value(&small).unwrap();
    assert!((value - wanted).abs() <= 1e-15, "{value} for {wanted}");
    // The minimizer is negative inside, and better than no potential at all.
    let x = minimizer(&design, 1e-12);
    assert!(x.iter().all(|x| *x < 0.0));
    assert!(design.value(&x).unwrap() < design.value(design.start()).unwrap());
    assert!(max_abs(&gradient(&design, &x)) <= 1e-8);
}

// ---- use and misuse

#[test]
fn the_list_has_each_problem_once_in_a_size_below() {
    for n in [5, 6, 7, 30, 100, 1000] {
        let problems = large_problems(n).unwrap();
        let mut names: Vec<_> = problems.iter().map(Problem::name).collect();
        assert!(problems.iter().all(|p| (1..=n).contains(&p.dim())));
        let fits = |p: &Problem| 2 * p.dim() >= n || (p.name() == "Penalty II" && p.dim() == 100);
        assert!(n < 30 || problems.iter().all(fits));
        assert_eq!(names.len(), 42);
        names.sort_unstable();
        names.dedup();
        assert_eq!(names.len(), problems.len());
    }
    assert!(large_problems(4).is_err());
}

#[test]
fn a_value_alone_is_the_value_with_a_gradient() {
    for mut problem in large_problems(60).unwrap() {
        assert_eq!(problem.cost(), Cost::Joint, "{}", problem.name());
        for x in [problem.start().to_vec(), check_point(&problem)] {
            // What the gradient held before does not matter.
            let (mut g, mut h) = (vec![f64::NAN; x.len()], vec![7.0; x.len()]);
            let both = Objective::value_and_gradient(&mut problem, &x, &mut g).unwrap();
            assert_eq!(Objective::value(&mut problem, &x), Ok(both));
            Objective::gradient(&mut problem, &x, &mut h).unwrap();
            assert_eq!(g, h, "{}", problem.name());
            assert!(g.iter().all(|g| g.is_finite()), "{}", problem.name());
        }
    }
}

#[test]
fn evaluations_allocate_nothing() {
    for problem in large_problems(60).unwrap() {
        let x = problem.start().to_vec();
        let mut g = vec![0.0; x.len()];
        let counted = allocation_counter::measure(|| {
            problem.value(&x).unwrap();
            problem.value_and_gradient(&x, &mut g).unwrap();
        });
        assert_eq!(counted.count_total, 0, "{}", problem.name());
    }
}

#[test]
fn a_million_variables_take_the_memory_of_their_start() {
    let n = 1_000_000;
    let counted = allocation_counter::measure(|| {
        let problem = extended_rosenbrock(n).unwrap();
        assert_eq!(problem.dim(), n);
    });
    assert!(counted.bytes_max <= 8 * n as u64 + 1024, "{counted:?}");
    let problem = extended_rosenbrock(n).unwrap();
    let value = problem.value(problem.start()).unwrap();
    // 24.2 for each pair.
    assert!((value - 12.1e6).abs() <= 1e-15 * value, "{value}");
}

#[test]
fn a_wrong_size_is_an_error_that_says_what_to_do() {
    let text = |made: Result<Problem, WrongSize>| made.unwrap_err().to_string();
    assert_eq!(
        text(dixmaan(DixmaanVariant::L, 100)),
        "DIXMAANL has no size 100; choose a multiple of 3, at least 3"
    );
    assert_eq!(
        text(eigenals(100)),
        "EIGENALS has no size 100; choose p (p + 1) for a whole p, such as 6 or 110"
    );
    assert_eq!(
        text(tridia(usize::MAX)),
        format!(
            "TRIDIA has no size {}; choose a size of at most {}",
            usize::MAX,
            isize::MAX / 8
        )
    );
    for made in [
        tridia(0),
        dixmaan(DixmaanVariant::A, 0),
        dixmaan(DixmaanVariant::A, usize::MAX),
        freuroth(1),
        genrose(1),
        chained_rosenbrock(1),
        extended_rosenbrock(0),
        extended_rosenbrock(3),
        extended_powell_singular(6),
        trigonometric(0),
        arwhead(1),
        bdqrtic(4),
        cosine(1),
        cragg_levy(2),
        cragg_levy(5),
        dqdrtic(2),
        engval1(1),
        extended_wood(7),
        liarwhd(0),
        nondia(1),
        nondquar(2),
        quartc(0),
        discrete_integral_equation(0),
        penalty_2(101),
        minimal_surface(SurfaceBoundary::Scherk, 0, 5),
        elastic_torsion(5, 0),
        optimal_design(usize::MAX, usize::MAX),
        eigenals(0),
        eigenals(1),
        eigenals(usize::MAX),
    ] {
        assert!(made.is_err());
    }
    for made in [
        tridia(1),
        dixmaan(DixmaanVariant::H, 3),
        freuroth(2),
        genrose(2),
        chained_rosenbrock(2),
        extended_rosenbrock(2),
        extended_powell_singular(4),
        trigonometric(1),
        arwhead(2),
        bdqrtic(5),
        cosine(2),
        cragg_levy(4),
        dqdrtic(3),
        engval1(2),
        extended_wood(4),
        liarwhd(1),
        nondia(2),
        nondquar(3),
        quartc(1),
        discrete_integral_equation(1),
        minimal_surface(SurfaceBoundary::Catenoid, 1, 1),
        elastic_torsion(1, 2),
        optimal_design(2, 1),
        eigenals(2),
    ] {
        let problem = made.unwrap();
        assert!(
            gradient(&problem, problem.start())
                .iter()
                .all(|g| g.is_finite())
        );
    }
}

#[test]
fn no_point_makes_a_problem_panic() {
    for problem in large_problems(12).unwrap() {
        for extreme in [f64::NAN, f64::INFINITY, -f64::INFINITY, 1e300, -1e300, -0.0] {
            for j in 0..problem.dim() {
                let mut x = problem.start().to_vec();
                x[j] = extreme;
                let value = problem.value(&x).unwrap();
                gradient(&problem, &x);
                assert!(
                    !extreme.is_nan() || value.is_nan(),
                    "{} hides a NaN",
                    problem.name()
                );
            }
        }
        assert!(problem.value(&[]).is_err());
        assert!(problem.gradient(problem.start(), &mut []).is_err());
    }
}
