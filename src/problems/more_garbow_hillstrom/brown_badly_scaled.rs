use super::{Problem, Squares, Vec, components, problem};

/// Brown's badly scaled function, problem 4.
///
/// `n = 2, m = 3`: `r1 = x1 - 10^6`, `r2 = x2 - 2e-6`, `r3 = x1 x2 - 2`.
/// Start `(1, 1)`. Minimum 0 at `(10^6, 2e-6)`.
pub fn brown_badly_scaled() -> Problem {
    problem(4, "Brown badly scaled", 3, residuals, [1.0, 1.0]).strict(0.0, &[1e6, 2e-6])
}

pub(super) fn listed() -> Vec<Problem> {
    [brown_badly_scaled()].into()
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2] = components(x);
    sum.add(x1 - 1e6, || [1.0]);
    sum.add(x2 - 2e-6, || [0.0, 1.0]);
    sum.add(x1 * x2 - 2.0, || [x2, x1]);
}
