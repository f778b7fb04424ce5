use super::{Problem, Squares, Vec, components, problem};

/// Wood's function, problem 14.
///
/// `n = 4, m = 6`: `r1 = 10 (x2 - x1^2)`, `r2 = 1 - x1`, `r3 = sqrt 90 (x4 - x3^2)`, `r4 = 1 - x3`,
/// `r5 = sqrt 10 (x2 + x4 - 2)`, `r6 = (x2 - x4) / sqrt 10`.
/// Start `(-3, -1, -3, -1)`. Minimum 0 at `(1, 1, 1, 1)`.
pub fn wood() -> Problem {
    problem(14, "Wood", 6, residuals, [-3.0, -1.0, -3.0, -1.0]).strict(0.0, &[1.0; 4])
}

pub(super) fn listed() -> Vec<Problem> {
    [wood()].into()
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2, x3, x4] = components(x);
    sum.add(10.0 * (x2 - x1 * x1), || [-20.0 * x1, 10.0]);
    sum.add(1.0 - x1, || [-1.0]);
    sum.add_weighted(90.0, x4 - x3 * x3, || [0.0, 0.0, -2.0 * x3, 1.0]);
    sum.add(1.0 - x3, || [0.0, 0.0, -1.0]);
    sum.add_weighted(10.0, x2 + x4 - 2.0, || [0.0, 1.0, 0.0, 1.0]);
    sum.add_weighted(0.1, x2 - x4, || [0.0, 1.0, 0.0, -1.0]);
}
