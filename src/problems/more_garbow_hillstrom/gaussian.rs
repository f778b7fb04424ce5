use super::{Problem, Squares, Vec, components, numbered, problem};

/// The Gaussian function, problem 9.
///
/// `n = 3, m = 15`: `ri = x1 exp(-x2 (ti - x3)^2 / 2) - yi` with `ti = (8 - i) / 2` and 15 data `yi`.
/// Start `(0.4, 1, 0)`. Minimum 1.12793...e-8 at `(0.398956..., 1.0000190..., 0)`.
pub fn gaussian() -> Problem {
    problem(9, "Gaussian", 15, residuals, [0.4, 1.0, 0.0]).strict(
        1.127932769618648e-8,
        &[0.39895613783875666, 1.0000190844878056, 0.0],
    )
}

pub(super) fn listed() -> Vec<Problem> {
    [gaussian()].into()
}

const Y: [f64; 15] = [
    0.0009, 0.0044, 0.0175, 0.0540, 0.1295, 0.2420, 0.3521, 0.3989, 0.3521, 0.2420, 0.1295, 0.0540,
    0.0175, 0.0044, 0.0009,
];

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2, x3] = components(x);
    for (i, y) in numbered(Y) {
        let off = 0.5 * (8.0 - i) - x3;
        let bell = (-0.5 * x2 * off * off).exp();
        sum.add(x1 * bell - y, || {
            [bell, -0.5 * x1 * bell * off * off, x1 * bell * x2 * off]
        });
    }
}
