use super::{Problem, Squares, Vec, components, problem};

/// Powell's singular function, problem 13: the Hessian at the minimizer has rank 2.
///
/// `n = 4, m = 4`: `r1 = x1 + 10 x2`, `r2 = sqrt 5 (x3 - x4)`, `r3 = (x2 - 2 x3)^2`, `r4 = sqrt 10 (x1 - x4)^2`.
/// Start `(3, -1, 0, 1)`. Minimum 0 at the origin, approached slowly.
pub fn powell_singular() -> Problem {
    problem(13, "Powell singular", 4, residuals, [3.0, -1.0, 0.0, 1.0]).singular(0.0, &[0.0; 4])
}

pub(super) fn listed() -> Vec<Problem> {
    [powell_singular()].into()
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2, x3, x4] = components(x);
    sum.add(x1 + 10.0 * x2, || [1.0, 10.0]);
    sum.add_weighted(5.0, x3 - x4, || [0.0, 0.0, 1.0, -1.0]);
    let inner = x2 - 2.0 * x3;
    sum.add(inner * inner, || [0.0, 2.0 * inner, -4.0 * inner]);
    let outer = x1 - x4;
    sum.add_weighted(10.0, outer * outer, || {
        [2.0 * outer, 0.0, 0.0, -2.0 * outer]
    });
}
