use super::{Problem, Squares, Vec, components, problem};

/// The function of Jennrich and Sampson, problem 6: residuals of size 1 at the minimum.
///
/// `n = 2, m = 10`: `ri = 2 + 2 i - (exp(i x1) + exp(i x2))`. Start `(0.3, 0.4)`.
/// Minimum 124.362... at `x1 = x2 = 0.2578...`.
pub fn jennrich_sampson() -> Problem {
    problem(6, "Jennrich and Sampson", 10, residuals, [0.3, 0.4]).strict(
        124.36218235561485,
        &[0.2578252136703641, 0.2578252136703641],
    )
}

pub(super) fn listed() -> Vec<Problem> {
    [jennrich_sampson()].into()
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2] = components(x);
    for i in (1..=10).map(f64::from) {
        let (first, second) = ((i * x1).exp(), (i * x2).exp());
        sum.add(2.0 + 2.0 * i - (first + second), || {
            [-i * first, -i * second]
        });
    }
}
