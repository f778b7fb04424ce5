use super::{Problem, Squares, Vec, components, problem};

/// Osborne's first function, problem 17: a sum of two decays and a constant, fitted to 33 data.
///
/// `n = 5, m = 33`: `ri = yi - (x1 + x2 exp(-ti x4) + x3 exp(-ti x5))` with `ti = 10 (i - 1)` (the data set MGH17 of the NIST
/// Statistical Reference Datasets). Start `(0.5, 1.5, -1, 0.01, 0.02)`. Minimum 5.46489...e-5 at
/// `(0.3754..., 1.9358..., -1.4647..., 0.012867..., 0.022122...)`.
pub fn osborne_1() -> Problem {
    problem(17, "Osborne 1", 33, residuals, [0.5, 1.5, -1.0, 0.01, 0.02]).strict(
        5.464894697482907e-5,
        &[
            0.37541005210695205,
            1.9358469127123674,
            -1.464687136613423,
            0.012867534640057288,
            0.02212269966167261,
        ],
    )
}

pub(super) fn listed() -> Vec<Problem> {
    [osborne_1()].into()
}

const Y: [f64; 33] = [
    0.844, 0.908, 0.932, 0.936, 0.925, 0.908, 0.881, 0.850, 0.818, 0.784, 0.751, 0.718, 0.685,
    0.658, 0.628, 0.603, 0.580, 0.558, 0.538, 0.522, 0.506, 0.490, 0.478, 0.467, 0.457, 0.448,
    0.438, 0.431, 0.424, 0.420, 0.414, 0.411, 0.406,
];

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2, x3, x4, x5] = components(x);
    for (i, y) in (0..).map(f64::from).zip(Y) {
        let t = 10.0 * i;
        let (first, second) = ((-t * x4).exp(), (-t * x5).exp());
        sum.add(y - (x1 + x2 * first + x3 * second), || {
            [-1.0, -first, -second, t * x2 * first, t * x3 * second]
        });
    }
}
