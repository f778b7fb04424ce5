//! What works without an allocator: searches, rules and finders, and drivers over arrays, all with static types.

use surefoot::acceptance::{
    ApproximateWolfe, Goldstein, StrongWolfe, SufficientDecrease, WeakWolfe,
};
use surefoot::direction::{ConjugateGradient, SteepestDescent, Update};
use surefoot::finder::{Backtracking, Bisection, BracketZoom, MoreThuente, ThreePoint};
use surefoot::{Acceptance, Descent, Ray, StepFinder, StepSearch};

/// `(a - 3)^2`, whose minimizer lies at 3.
fn accepted(finder: impl StepFinder<f64>, rule: impl Acceptance<f64>) -> f64 {
    let mut search = StepSearch::new(finder, rule);
    let found = search.along(Ray::new(9.0, -6.0), 0.1, |a: f64| {
        ((a - 3.0) * (a - 3.0), 2.0 * (a - 3.0))
    });
    let outcome = found.unwrap().outcome;
    outcome.accepted().unwrap().step
}

#[test]
fn searches_end_inside_the_closed_form_sets() {
    // On a quadratic with minimizer a*: strong Wolfe accepts (1 - c2) a* <= a <= (1 + c2) a*, and so on.
    let near = |step: f64, share: f64| assert!((step - 3.0).abs() <= share * 3.0, "{step}");
    near(
        accepted(ThreePoint::new(), StrongWolfe::new(1e-4, 0.1).unwrap()),
        0.1,
    );
    near(
        accepted(MoreThuente::new(), StrongWolfe::new(1e-4, 0.01).unwrap()),
        0.01,
    );
    near(
        accepted(BracketZoom::new(), Goldstein::new(0.4).unwrap()),
        0.2,
    );
    let step = accepted(Bisection::new(), WeakWolfe::new(0.1, 0.5).unwrap());
    assert!((1.5..=5.4).contains(&step));
    let step = accepted(
        Backtracking::default(),
        SufficientDecrease::new(0.1).unwrap(),
    );
    assert!((0.0..=5.4).contains(&step));
    let step = accepted(ThreePoint::new(), ApproximateWolfe::new(0.1, 0.5).unwrap());
    assert!((1.5..=5.4).contains(&step));
}

#[test]
fn drivers_reach_the_minimum_of_a_valley_over_arrays() {
    let valley = |x: &[f64; 2], g: &mut [f64; 2]| {
        let (a, b) = (1.0 - x[0], x[1] - x[0] * x[0]);
        *g = [-2.0 * a - 40.0 * x[0] * b, 20.0 * b];
        a * a + 10.0 * b * b
    };
    let rule = StrongWolfe::new(1e-4, 0.1).unwrap();
    let directions = Update::HagerZhang;
    let report = Descent::new(ConjugateGradient::new(directions), ThreePoint::new(), rule)
        .minimize_fn([-1.2, 1.0], valley)
        .unwrap();
    assert!(report.converged() && (report.point[0] - 1.0).abs() < 1e-4);
    let report = Descent::new(SteepestDescent, ThreePoint::new(), rule)
        .minimize_fn([-1.2, 1.0], valley)
        .unwrap();
    assert!(report.converged() && (report.point[0] - 1.0).abs() < 1e-3);
}
