use super::{Problem, Squares, Vec, components, problem};

/// Rosenbrock's function, problem 1: a curved valley.
///
/// `n = 2, m = 2`: `r1 = 10 (x2 - x1^2)`, `r2 = 1 - x1`.
/// Start `(-1.2, 1)`. Minimum 0 at `(1, 1)`.
pub fn rosenbrock() -> Problem {
    problem(1, "Rosenbrock", 2, residuals, [-1.2, 1.0]).strict(0.0, &[1.0, 1.0])
}

pub(super) fn listed() -> Vec<Problem> {
    [rosenbrock()].into()
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2] = components(x);
    sum.add(10.0 * (x2 - x1 * x1), || [-20.0 * x1, 10.0]);
    sum.add(1.0 - x1, || [-1.0]);
}
