use super::{Problem, Squares, Vec, components, numbered, problem};

/// Meyer's function, problem 10: badly scaled, with a long narrow valley.
///
/// `n = 3, m = 16`: `ri = x1 exp(x2 / (ti + x3)) - yi` with `ti = 45 + 5 i` and 16 data `yi` (the data set MGH10 of the
/// NIST Statistical Reference Datasets). Start `(0.02, 4000, 250)`. Minimum 87.9458... at
/// `(5.60963...e-3, 6181.34..., 345.223...)`; the Hessian's eigenvalues there differ by a factor of 1e16.
pub fn meyer() -> Problem {
    problem(10, "Meyer", 16, residuals, [0.02, 4000.0, 250.0]).strict(
        87.94585517085112,
        &[0.005609636471028053, 6181.346346286372, 345.2236346241365],
    )
}

pub(super) fn listed() -> Vec<Problem> {
    [meyer()].into()
}

const Y: [f64; 16] = [
    34780.0, 28610.0, 23650.0, 19630.0, 16370.0, 13720.0, 11540.0, 9744.0, 8261.0, 7030.0, 6005.0,
    5147.0, 4427.0, 3820.0, 3307.0, 2872.0,
];

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2, x3] = components(x);
    for (i, y) in numbered(Y) {
        let below = 45.0 + 5.0 * i + x3;
        let growth = (x2 / below).exp();
        sum.add(x1 * growth - y, || {
            let per_x2 = x1 * growth / below;
            [growth, per_x2, -per_x2 * x2 / below]
        });
    }
}
