use super::{Problem, Squares, Vec, components, problem};

/// The function of Kowalik and Osborne, problem 15: a second minimum at infinity.
///
/// `n = 4, m = 11`: `ri = yi - x1 (ui^2 + ui x2) / (ui^2 + ui x3 + x4)` with 11 data `(yi, ui)` (the data set MGH09 of
/// the NIST Statistical Reference Datasets). Start `(0.25, 0.39, 0.415, 0.39)`. Minimum 3.07505...e-4 at
/// `(0.192806..., 0.191282..., 0.123056..., 0.136062...)`; f falls to 1.02734...e-3 as `x1` goes to infinity,
/// `x2 = -14.0758...`, and `x3, x4` go to minus infinity.
pub fn kowalik_osborne() -> Problem {
    problem(
        15,
        "Kowalik and Osborne",
        11,
        residuals,
        [0.25, 0.39, 0.415, 0.39],
    )
    .strict(
        0.00030750560384923745,
        &[
            0.19280693457903786,
            0.19128232873436696,
            0.12305650692632066,
            0.13606233068379484,
        ],
    )
    .at_infinity(
        0.0010273430486954578,
        "x1 to infinity, x2 = -14.0758..., x3 and x4 to minus infinity",
    )
}

pub(super) fn listed() -> Vec<Problem> {
    [kowalik_osborne()].into()
}

/// `(yi, ui)`
const DATA: [(f64, f64); 11] = [
    (0.1957, 4.0),
    (0.1947, 2.0),
    (0.1735, 1.0),
    (0.1600, 0.5),
    (0.0844, 0.25),
    (0.0627, 0.167),
    (0.0456, 0.125),
    (0.0342, 0.1),
    (0.0323, 0.0833),
    (0.0235, 0.0714),
    (0.0246, 0.0625),
];

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2, x3, x4] = components(x);
    for (y, u) in DATA {
        let above = u * (u + x2);
        let below = u * (u + x3) + x4;
        let ratio = above / below;
        sum.add(y - x1 * ratio, || {
            let per_below = x1 / below;
            [
                -ratio,
                -per_below * u,
                per_below * ratio * u,
                per_below * ratio,
            ]
        });
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_minimum_at_infinity_is_approached() {
        // The model becomes c (u^2 + u x2) / (a u + 1) with c = x1 / x4, a = x3 / x4; c and a by least squares with 40
        // digits.
        let (c, a) = (-0.03542143031148698, 1.6030744632880345);
        let problem = kowalik_osborne();
        let limit = problem.minima()[1].value();
        for far in [1e6, 1e9] {
            let value = problem
                .value(&[-far * c, -14.07588340060331, -far * a, -far])
                .unwrap();
            assert!((value - limit).abs() < 1.0 / far, "{value}");
        }
    }
}
