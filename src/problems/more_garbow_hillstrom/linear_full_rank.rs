use super::{GREATEST, Problem, Squares, Vec, WrongSize, problem};

/// The linear function of full rank, problem 32, in `n` variables with `m` residuals, `m >= n >= 1`.
///
/// `ri = xi - 2 / m sum_j xj - 1` for `i <= n`, `ri = -2 / m sum_j xj - 1` for `i > n`. Start `(1, ..., 1)`.
/// Minimum `m - n` at `(-1, ..., -1)`; the Hessian is twice the identity.
///
/// # Errors
/// [`WrongSize`] unless `m >= n >= 1`.
pub fn linear_full_rank(n: usize, m: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 1..=GREATEST)?;
    WrongSize::check(RESIDUALS, m, n..=GREATEST)?;
    Ok(sized(n, m))
}

pub(super) fn listed() -> Vec<Problem> {
    [sized(10, 20)].into()
}

const NAME: &str = "Linear function of full rank";
const RESIDUALS: &str = "The set of residuals of the linear function";

fn sized(n: usize, m: usize) -> Problem {
    problem(32, NAME, m, residuals, core::iter::repeat_n(1.0, n))
        .strict((m - n) as f64, &std::vec![-1.0; n])
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let m = sum.residuals();
    let share = 2.0 / m as f64;
    let shared = -share * x.iter().sum::<f64>() - 1.0;
    let mut total = 0.0;
    for (i, xi) in x.iter().enumerate() {
        sum.add_at(i, 1.0, xi + shared, || [1.0]);
        total += xi + shared;
    }
    for _ in x.len()..m {
        sum.add_value(shared * shared);
        total += shared;
    }
    // Every residual depends on x through the shared sum.
    sum.add_gradient(0, -2.0 * share * total, || x.iter().map(|_| 1.0));
}
