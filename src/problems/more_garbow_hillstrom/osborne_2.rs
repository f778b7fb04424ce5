use super::{Problem, Squares, Vec, components, problem};

/// Osborne's second function, problem 19: a decay and three bells, fitted to 65 data.
///
/// `n = 11, m = 65`: `ri = yi - (x1 exp(-ti x5) + x2 exp(-(ti - x9)^2 x6) + x3 exp(-(ti - x10)^2 x7) + x4 exp(-(ti - x11)^2 x8))`
/// with `ti = (i - 1) / 10`. Start `(1.3, 0.65, 0.65, 0.7, 0.6, 3, 5, 7, 2, 4.5, 5.5)`. Minimum 4.01377...e-2 at
/// `(1.30998, 0.43155, 0.63366, 0.59943, 0.75418, 0.90429, 1.36581, 4.82370, 2.39868, 4.56887, 5.67534)`.
pub fn osborne_2() -> Problem {
    let start = [1.3, 0.65, 0.65, 0.7, 0.6, 3.0, 5.0, 7.0, 2.0, 4.5, 5.5];
    problem(19, "Osborne 2", 65, residuals, start).strict(
        0.040137736293547735,
        &[
            1.3099771546273005,
            0.4315537946029889,
            0.633661698960724,
            0.5994305347859163,
            0.7541832263280113,
            0.9042885798596336,
            1.3658118352370285,
            4.8236988172271555,
            2.3986848661317546,
            4.568874597667672,
            5.6753414705806415,
        ],
    )
}

pub(super) fn listed() -> Vec<Problem> {
    [osborne_2()].into()
}

const Y: [f64; 65] = [
    1.366, 1.191, 1.112, 1.013, 0.991, 0.885, 0.831, 0.847, 0.786, 0.725, 0.746, 0.679, 0.608,
    0.655, 0.616, 0.606, 0.602, 0.626, 0.651, 0.724, 0.649, 0.649, 0.694, 0.644, 0.624, 0.661,
    0.612, 0.558, 0.533, 0.495, 0.500, 0.423, 0.395, 0.375, 0.372, 0.391, 0.396, 0.405, 0.428,
    0.429, 0.523, 0.562, 0.607, 0.653, 0.672, 0.708, 0.633, 0.668, 0.645, 0.632, 0.591, 0.559,
    0.597, 0.625, 0.739, 0.710, 0.729, 0.720, 0.636, 0.581, 0.428, 0.292, 0.162, 0.098, 0.054,
];

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2, x3, x4, x5, x6, x7, x8, x9, x10, x11] = components(x);
    for (i, y) in (0..).map(f64::from).zip(Y) {
        let t = i / 10.0;
        let decay = (-t * x5).exp();
        let offs = [t - x9, t - x10, t - x11];
        let [bell1, bell2, bell3] = [0, 1, 2].map(|k| (-offs[k] * offs[k] * [x6, x7, x8][k]).exp());
        let model = x1 * decay + x2 * bell1 + x3 * bell2 + x4 * bell3;
        sum.add(y - model, || {
            let [off1, off2, off3] = offs;
            [
                -decay,
                -bell1,
                -bell2,
                -bell3,
                t * x1 * decay,
                off1 * off1 * x2 * bell1,
                off2 * off2 * x3 * bell2,
                off3 * off3 * x4 * bell3,
                -2.0 * off1 * x6 * x2 * bell1,
                -2.0 * off2 * x7 * x3 * bell2,
                -2.0 * off3 * x8 * x4 * bell3,
            ]
        });
    }
}
