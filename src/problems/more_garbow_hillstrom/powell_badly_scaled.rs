use super::{Problem, Squares, Vec, components, problem};

/// Powell's badly scaled function, problem 3: the two components of the minimizer differ by a factor of 1e6.
///
/// `n = 2, m = 2`: `r1 = 10^4 x1 x2 - 1`, `r2 = exp(-x1) + exp(-x2) - 1.0001`.
/// Start `(0, 1)`. Minimum 0 at `(1.09815...e-5, 9.10614...)`.
pub fn powell_badly_scaled() -> Problem {
    problem(3, "Powell badly scaled", 2, residuals, [0.0, 1.0])
        .strict(0.0, &[1.0981593296998175e-5, 9.106146739866524])
}

pub(super) fn listed() -> Vec<Problem> {
    [powell_badly_scaled()].into()
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2] = components(x);
    sum.add(1e4 * x1 * x2 - 1.0, || [1e4 * x2, 1e4 * x1]);
    // exp(-x1) - 1 keeps its digits where x1 is tiny, which is where the minimizer lies.
    sum.add((-x1).exp_m1() + ((-x2).exp() - 1e-4), || {
        [-(-x1).exp(), -(-x2).exp()]
    });
}
