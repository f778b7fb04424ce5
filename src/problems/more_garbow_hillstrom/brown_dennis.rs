use super::{Problem, Squares, Vec, components, problem};

/// The function of Brown and Dennis, problem 16, with `m = 20`: a large minimum.
///
/// `n = 4`: `ri = (x1 + ti x2 - exp(ti))^2 + (x3 + x4 sin(ti) - cos(ti))^2` with `ti = i / 5`.
/// Start `(25, 5, -5, -1)`. Minimum 85822.2... at `(-11.5944..., 13.2036..., -0.403439..., 0.236778...)`.
pub fn brown_dennis() -> Problem {
    problem(
        16,
        "Brown and Dennis",
        20,
        residuals,
        [25.0, 5.0, -5.0, -1.0],
    )
    .strict(
        85822.20162635634,
        &[
            -11.594439904762165,
            13.203630051207204,
            -0.40343948817685954,
            0.2367787744557363,
        ],
    )
}

pub(super) fn listed() -> Vec<Problem> {
    [brown_dennis()].into()
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2, x3, x4] = components(x);
    for i in 1..=sum.residuals() {
        let t = i as f64 / 5.0;
        let (sine, cosine) = t.sin_cos();
        let a = x1 + t * x2 - t.exp();
        let b = x3 + x4 * sine - cosine;
        sum.add(a * a + b * b, || {
            [2.0 * a, 2.0 * a * t, 2.0 * b, 2.0 * b * sine]
        });
    }
}
