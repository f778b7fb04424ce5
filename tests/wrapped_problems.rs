//! Wrappers change what they say and nothing else.
#![cfg(feature = "problems")]
#![allow(missing_docs)]

use std::time::{Duration, Instant};
use surefoot::acceptance::WeakWolfe;
use surefoot::audit::estimate_noise;
use surefoot::direction::Lbfgs;
use surefoot::finder::ThreePoint;
use surefoot::problems::large::{extended_rosenbrock, tridia};
use surefoot::problems::more_garbow_hillstrom::rosenbrock;
use surefoot::problems::wrapped::*;
use surefoot::{Cost, Criterion, Descent, Objective, RunEnding, Stopping, joint, separate};

/// 1 everywhere, with a gradient of ones.
fn flat() -> impl Objective<[f64; 3], Error = std::convert::Infallible> + Clone {
    separate(
        |_: &[f64; 3]| 1.0,
        |_: &[f64; 3], g: &mut [f64; 3]| *g = [1.0; 3],
    )
}

// ---- noise

#[test]
fn noise_is_uniform_and_within_its_level() {
    const DRAWS: usize = 40_000;
    for (noise, level) in [
        (Amplitude::Absolute(0.5), 0.5),
        (Amplitude::Relative(1e-6), 1e-6),
    ] {
        let mut noisy = Noisy::new(flat(), noise, 3).unwrap();
        let draws: Vec<f64> = (0..DRAWS)
            .map(|_| (noisy.value(&[0.0; 3]).unwrap() - 1.0) / level)
            .collect();
        assert!(draws.iter().all(|u| u.abs() <= 1.0 + 1e-9));
        // Four standard deviations of the estimates: the mean of u, of u^2 (variance 4/45), of neighbours' products, and the
        // counts of ten bins.
        let size = DRAWS as f64;
        let mean = |values: &mut dyn Iterator<Item = f64>| values.sum::<f64>() / size;
        assert!(mean(&mut draws.iter().copied()).abs() < 4.0 / (3.0 * size).sqrt());
        let squares = mean(&mut draws.iter().map(|u| u * u));
        assert!((squares - 1.0 / 3.0).abs() < 4.0 * (4.0 / 45.0 / size).sqrt());
        let products = mean(&mut draws.windows(2).map(|u| u[0] * u[1]));
        assert!(products.abs() < 4.0 / (3.0 * size.sqrt()));
        for bin in 0..10 {
            let low = -1.0 + 0.2 * f64::from(bin);
            let count = draws
                .iter()
                .filter(|u| (low..low + 0.2).contains(*u))
                .count();
            assert!((count as f64 - 0.1 * size).abs() < 4.0 * (0.09 * size).sqrt());
        }
    }
}

#[test]
fn noise_follows_from_the_seed_and_the_count() {
    let values = |seed| {
        let mut noisy = Noisy::new(flat(), Amplitude::Absolute(1.0), seed).unwrap();
        [(); 50].map(|()| noisy.value(&[0.0; 3]).unwrap())
    };
    assert_eq!(values(8), values(8));
    let (one, other) = (values(8), values(9));
    assert!(one.iter().zip(&other).all(|(a, b)| a != b));
    assert!(one.windows(2).all(|pair| pair[0] != pair[1]));
    // The kind of call before does not matter, only the count does.
    let mut noisy = Noisy::new(flat(), Amplitude::Absolute(1.0), 8).unwrap();
    let mut g = [0.0; 3];
    noisy.gradient(&[0.0; 3], &mut g).unwrap();
    assert_eq!(noisy.value_and_gradient(&[0.0; 3], &mut g).unwrap(), one[1]);
    assert_eq!(noisy.value(&[0.0; 3]).unwrap(), one[2]);
    assert_eq!(noisy.evaluations(), 3);
}

#[test]
fn gradients_are_exact_unless_noise_is_asked_for() {
    let mut g = [0.0; 3];
    let mut noisy = Noisy::new(flat(), Amplitude::Absolute(1.0), 0).unwrap();
    noisy.gradient(&[0.0; 3], &mut g).unwrap();
    assert_eq!(g, [1.0; 3]);
    let mut noisy = Noisy::new(flat(), Amplitude::Absolute(0.0), 0)
        .unwrap()
        .with_gradient_noise(Amplitude::Relative(0.01))
        .unwrap();
    let mut seen = Vec::new();
    for _ in 0..100 {
        assert_eq!(noisy.value_and_gradient(&[0.0; 3], &mut g), Ok(1.0));
        seen.extend(g);
        noisy.gradient(&[0.0; 3], &mut g).unwrap();
        seen.extend(g);
    }
    assert!(seen.iter().all(|g| (g - 1.0).abs() <= 0.01 + 1e-15));
    // No two components share their noise.
    seen.sort_by(f64::total_cmp);
    assert!(seen.windows(2).all(|pair| pair[0] < pair[1]));
}

#[test]
fn noise_leaves_alone_what_is_not_finite() {
    for special in [f64::NAN, f64::INFINITY, f64::NEG_INFINITY] {
        for noise in [Amplitude::Absolute(1.0), Amplitude::Relative(1.0)] {
            let function = joint(move |_: &[f64; 2], g: &mut [f64; 2]| {
                *g = [special, 1.0];
                special
            });
            let mut noisy = Noisy::new(function, noise, 4)
                .unwrap()
                .with_gradient_noise(noise)
                .unwrap();
            for _ in 0..20 {
                let mut g = [0.0; 2];
                let value = noisy.value_and_gradient(&[0.0; 2], &mut g).unwrap();
                assert_eq!(value.to_bits(), special.to_bits());
                assert_eq!(g[0].to_bits(), special.to_bits());
                assert!(g[1] != 1.0 && g[1].is_finite());
            }
        }
    }
}

#[test]
fn the_audit_finds_the_noise_that_was_put_in() {
    let problem = extended_rosenbrock(10).unwrap();
    let x = problem.start().to_vec();
    let level = 1e-4;
    let mut noisy = Noisy::new(problem, Amplitude::Absolute(level), 5).unwrap();
    let along = |step: f64| {
        let moved: Vec<f64> = x.iter().map(|x| x + step).collect();
        noisy.value(&moved).unwrap()
    };
    let found = estimate_noise(along, 1e-6).unwrap().level;
    // The standard deviation of uniform noise; Moré & Wild 2011 hold estimates within a factor of 4 for good.
    let wanted = level / 3f64.sqrt();
    assert!(found > wanted / 4.0 && found < 4.0 * wanted, "{found:e}");
}

#[test]
fn a_noise_that_is_no_size_is_refused() {
    for level in [-1e-3, f64::NAN, f64::INFINITY] {
        for noise in [Amplitude::Absolute(level), Amplitude::Relative(level)] {
            assert!(Noisy::new(flat(), noise, 0).is_err());
            let exact = Noisy::new(flat(), Amplitude::Absolute(0.0), 0).unwrap();
            assert!(exact.with_gradient_noise(noise).is_err());
        }
    }
    assert_eq!(
        AmplitudeError.to_string(),
        "the amplitude of the noise must be a finite number of at least 0; give 0 for none"
    );
}

// ---- delay

#[test]
fn every_evaluation_waits_once() {
    let wait = Duration::from_millis(4);
    for delay in [Delay::Spin(wait), Delay::Sleep(wait)] {
        let mut slow = Delayed::new(rosenbrock(), delay);
        let x = vec![-1.2, 1.0];
        let (mut g, mut h) = (vec![0.0; 2], vec![0.0; 2]);
        let begin = Instant::now();
        assert_eq!(slow.value(&x), rosenbrock().value(&x));
        assert!(begin.elapsed() >= wait);
        slow.value_up_to(&x, Some(1.0)).unwrap();
        slow.gradient(&x, &mut g).unwrap();
        slow.value_and_gradient(&x, &mut h).unwrap();
        slow.accepted(&x).unwrap();
        assert!(begin.elapsed() >= 4 * wait);
        assert_eq!(g, h);
    }
    // A delay of nothing takes none: ten thousand evaluations take far less than a second.
    let mut quick = Delayed::new(rosenbrock(), Delay::Spin(Duration::ZERO));
    let begin = Instant::now();
    let x = vec![1.0, 1.0];
    for _ in 0..10_000 {
        quick.value(&x).unwrap();
    }
    assert!(begin.elapsed() < Duration::from_secs(1));
}

// ---- edge

#[test]
fn beyond_the_edge_all_is_nan_and_nothing_is_asked() {
    let mut asked = 0;
    let mut edged = Edged::new(
        joint(|_: &Vec<f64>, g: &mut Vec<f64>| {
            asked += 1;
            g.fill(1.0);
            7.0
        }),
        farther_than(vec![1.0, 2.0], 0.5),
    );
    let mut g = vec![0.0; 2];
    // The faces of the box belong to it.
    for inside in [[1.0, 2.0], [1.5, 2.0], [0.5, 2.5]] {
        assert_eq!(edged.value_and_gradient(&inside.to_vec(), &mut g), Ok(7.0));
        assert_eq!(g, [1.0; 2]);
    }
    for outside in [[1.5000001, 2.0], [1.0, 1.4], [f64::NAN, 2.0], [1.0, 1e300]] {
        let outside = outside.to_vec();
        for held in [0.0, f64::INFINITY, 3.0] {
            g.fill(held);
            assert!(edged.value(&outside).unwrap().is_nan());
            assert!(edged.value_up_to(&outside, Some(0.0)).unwrap().is_nan());
            edged.gradient(&outside, &mut g).unwrap();
            assert!(g.iter().all(|g| g.is_nan()));
            g.fill(held);
            assert!(edged.value_and_gradient(&outside, &mut g).unwrap().is_nan());
            assert!(g.iter().all(|g| g.is_nan()));
        }
    }
    assert_eq!(edged.refused(), 4 * 3 * 4);
    drop(edged);
    assert_eq!(asked, 3);
}

#[test]
fn a_run_meets_the_edge_and_converges_within() {
    // From (-1.2, 1) to (1, 1), with room for little more.
    let mut edged = Edged::new(rosenbrock(), farther_than(vec![0.0, 0.5], 1.25));
    let report = Descent::new(
        Lbfgs::new(5).unwrap(),
        ThreePoint::new(),
        WeakWolfe::new(1e-4, 0.9).unwrap(),
    )
    .with_stopping(Stopping {
        gradient: Some(1e-8),
        ..Stopping::default()
    })
    .unwrap()
    .minimize(rosenbrock().start().to_vec(), &mut edged)
    .unwrap();
    assert_eq!(report.ending, RunEnding::Converged(Criterion::Gradient));
    assert!(report.point.iter().all(|x| (x - 1.0).abs() < 1e-6));
    assert!(edged.refused() > 0);
}

// ---- together

#[test]
fn wrappers_nest_and_pass_on_the_rest() {
    let problem = tridia(4).unwrap();
    let start = problem.start().to_vec();
    let edged = Edged::new(problem.clone(), farther_than(start.clone(), 2.0));
    let noisy = Noisy::new(edged, Amplitude::Relative(1e-3), 2)
        .unwrap()
        .with_gradient_noise(Amplitude::Absolute(1e-3))
        .unwrap();
    let mut all = Delayed::new(noisy, Delay::Spin(Duration::from_micros(1)));
    assert_eq!(Objective::<Vec<f64>>::cost(&all), Cost::Joint);
    let mut g = vec![0.0; 4];
    let value = all.value_and_gradient(&start, &mut g).unwrap();
    let exact = problem.value(&start).unwrap();
    assert!(value != exact && (value - exact).abs() <= 1e-3 * exact);
    let far = vec![9.0; 4];
    assert!(all.value_and_gradient(&far, &mut g).unwrap().is_nan());
    assert!(g.iter().all(|g| g.is_nan()));
    // The error of the problem comes back as itself.
    assert_eq!(all.value(&vec![1.0; 3]).unwrap_err().found, 3);
    let noisy = all.into_inner();
    assert_eq!(noisy.evaluations(), 3);
    assert_eq!(noisy.into_inner().refused(), 1);
}
