use super::{Problem, Squares, Vec, components, problem};

/// Beale's function, problem 5.
///
/// `n = 2, m = 3`: `ri = yi - x1 (1 - x2^i)` with `y = (1.5, 2.25, 2.625)`.
/// Start `(1, 1)`. Minimum 0 at `(3, 0.5)`.
pub fn beale() -> Problem {
    problem(5, "Beale", 3, residuals, [1.0, 1.0]).strict(0.0, &[3.0, 0.5])
}

pub(super) fn listed() -> Vec<Problem> {
    [beale()].into()
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2] = components(x);
    sum.add(1.5 - x1 * (1.0 - x2), || [x2 - 1.0, x1]);
    let square = x2 * x2;
    sum.add(2.25 - x1 * (1.0 - square), || [square - 1.0, 2.0 * x1 * x2]);
    let cube = square * x2;
    sum.add(2.625 - x1 * (1.0 - cube), || {
        [cube - 1.0, 3.0 * x1 * square]
    });
}
