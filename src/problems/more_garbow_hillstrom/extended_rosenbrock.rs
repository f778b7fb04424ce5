use super::{Problem, Squares, Vec, WrongSize, problem};

/// The extended Rosenbrock function, problem 21, in `n` variables, `n` even: independent pairs.
///
/// `m = n`: `r(2k-1) = 10 (x(2k) - x(2k-1)^2)`, `r(2k) = 1 - x(2k-1)`. Start `(-1.2, 1, -1.2, 1, ...)`.
/// Minimum 0 at `(1, ..., 1)`. For millions of variables:
/// [`large::extended_rosenbrock`](crate::problems::large::extended_rosenbrock).
///
/// # Errors
/// [`WrongSize`] unless `n` is even and positive.
pub fn extended_rosenbrock(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check_multiple(NAME, n, 2, "an even size, at least 2")?;
    Ok(sized(n))
}

pub(super) fn listed() -> Vec<Problem> {
    [10, 100].map(sized).into()
}

const NAME: &str = "Extended Rosenbrock";

fn sized(n: usize) -> Problem {
    let start = (0..n).map(|j| if j % 2 == 0 { -1.2 } else { 1.0 });
    problem(21, NAME, n, residuals, start).strict(0.0, &std::vec![1.0; n])
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let (pairs, _) = x.as_chunks::<2>();
    for (k, &[a, b]) in pairs.iter().enumerate() {
        sum.add_at(2 * k, 1.0, 10.0 * (b - a * a), || [-20.0 * a, 10.0]);
        sum.add_at(2 * k, 1.0, 1.0 - a, || [-1.0]);
    }
}
