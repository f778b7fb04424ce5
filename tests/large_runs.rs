//! Runs with very many variables end where theory says. Smaller without optimisation, to end in time; the surface has its full
//! size, 300 x 1,000, where SUREFOOT_LARGE is set.
#![cfg(feature = "problems")]

use surefoot::acceptance::WeakWolfe;
use surefoot::direction::Lbfgs;
use surefoot::finder::ThreePoint;
use surefoot::problems::large::{SurfaceBoundary, extended_rosenbrock, minimal_surface};
use surefoot::{Descent, Report, Stopping};

fn run(problem: surefoot::problems::Problem, gradient: f64) -> Report<Vec<f64>> {
    let stopping = Stopping {
        gradient: Some(gradient),
        iterations: 100_000,
        ..Stopping::default()
    };
    let start = problem.start().to_vec();
    let descent = Descent::new(Lbfgs::default(), ThreePoint::new(), WeakWolfe::default());
    let descent = descent.with_stopping(stopping).unwrap();
    descent.minimize(start, problem).unwrap()
}

#[test]
fn extended_rosenbrock_ends_at_ones() {
    // Moré, Garbow & Hillstrom 1981, problem 21: f = 0 at (1, ..., 1).
    let n = if cfg!(debug_assertions) {
        1_000_000
    } else {
        10_000_000
    };
    let report = run(extended_rosenbrock(n).unwrap(), 1e-6);
    assert!(report.converged(), "{}", report.ending);
    let off = report
        .point
        .iter()
        .map(|x| (x - 1.0).abs())
        .fold(0.0, f64::max);
    println!(
        "n = {n}: {} moves, {} calls, off by {off:e}",
        report.iterations,
        report.evaluations.calls()
    );
    assert!(off <= 1e-5);
}

#[test]
fn a_minimal_surface_ends_within_the_discretisation_of_its_closed_form() {
    // Piecewise linear elements: the error at the nodes falls with the square of the mesh, so a mesh of twice the width tells
    // what to expect (tests/large_problems.rs has the orders).
    let (nx, ny) = match (cfg!(debug_assertions), std::env::var("SUREFOOT_LARGE")) {
        (true, _) => (30, 100),
        (false, Err(_)) => (150, 500),
        (false, Ok(_)) => (300, 1000),
    };
    let off = |nx, ny| {
        let boundary = SurfaceBoundary::Catenoid;
        let problem = minimal_surface(boundary, nx, ny).unwrap();
        // What is left of the gradient is far below the discretisation: the error is that of the elements.
        let report = run(problem, 1e-11);
        assert!(report.gradient_max.unwrap() <= 1e-10, "{}", report.ending);
        let exact = boundary.heights(nx, ny).unwrap();
        let off = report.point.iter().zip(&exact).map(|(a, b)| (a - b).abs());
        let off = off.fold(0.0, f64::max);
        println!("{nx} x {ny}: {} moves, off by {off:e}", report.iterations);
        off
    };
    let coarse = off(nx / 2, ny / 2);
    assert!(off(nx, ny) <= 0.3 * coarse);
}
