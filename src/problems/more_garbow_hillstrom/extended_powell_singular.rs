use super::{Problem, Squares, Vec, WrongSize, problem};

/// The extended Powell singular function, problem 22, in `n` variables, a multiple of 4: independent blocks of
/// [problem 13](super::powell_singular()).
///
/// `m = n`: for each block of variables `(a, b, c, d)` the residuals `a + 10 b`, `sqrt 5 (c - d)`, `(b - 2 c)^2`,
/// `sqrt 10 (a - d)^2`. Start `(3, -1, 0, 1, ...)`. Minimum 0 at the origin, approached slowly. For millions of variables:
/// [`large::extended_powell_singular`](crate::problems::large::extended_powell_singular).
///
/// # Errors
/// [`WrongSize`] unless `n` is a positive multiple of 4.
pub fn extended_powell_singular(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check_multiple(NAME, n, 4, "a multiple of 4, at least 4")?;
    Ok(sized(n))
}

pub(super) fn listed() -> Vec<Problem> {
    [12, 100].map(sized).into()
}

const NAME: &str = "Extended Powell singular";

fn sized(n: usize) -> Problem {
    let start = (0..n).map(|j| [3.0, -1.0, 0.0, 1.0][j % 4]);
    problem(22, NAME, n, residuals, start).singular(0.0, &std::vec![0.0; n])
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let (blocks, _) = x.as_chunks::<4>();
    for (k, &[a, b, c, d]) in blocks.iter().enumerate() {
        sum.add_at(4 * k, 1.0, a + 10.0 * b, || [1.0, 10.0]);
        sum.add_at(4 * k + 2, 5.0, c - d, || [1.0, -1.0]);
        let inner = b - 2.0 * c;
        sum.add_at(4 * k + 1, 1.0, inner * inner, || {
            [2.0 * inner, -4.0 * inner]
        });
        let outer = a - d;
        sum.add_at(4 * k, 10.0, outer * outer, || {
            [2.0 * outer, 0.0, 0.0, -2.0 * outer]
        });
    }
}
