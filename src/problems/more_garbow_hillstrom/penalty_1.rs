use super::{GREATEST, Problem, Squares, Vec, WrongSize, problem};

/// The first penalty function, problem 23, in `n` variables, at least 1.
///
/// `m = n + 1`: `ri = sqrt(1e-5) (xi - 1)` for `i = 1..n`, `r(n+1) = sum_j xj^2 - 1/4`. Start `xj = j`. Minimum where all
/// components are the root `t` of `1e-5 (t - 1) + 2 t (n t^2 - 1/4) = 0` near `1 / (2 sqrt n)`: 2.24997...e-5 for `n = 4`,
/// 7.08765...e-5 for `n = 10`. None is stored for other `n`.
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn penalty_1(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 1..=GREATEST)?;
    Ok(sized(n))
}

pub(super) fn listed() -> Vec<Problem> {
    [4, 10].map(sized).into()
}

const NAME: &str = "Penalty I";

fn sized(n: usize) -> Problem {
    let start = (1..=n).map(|j| j as f64);
    let problem = problem(23, NAME, n + 1, residuals, start);
    match n {
        4 => problem.strict(2.249977500899937e-5, &[0.2500074995875379; 4]),
        10 => problem.strict(7.087651467090369e-5, &[0.15812230111311634; 10]),
        _ => problem,
    }
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let mut squares = 0.0;
    for (j, xj) in x.iter().enumerate() {
        sum.add_at(j, 1e-5, xj - 1.0, || [1.0]);
        squares += xj * xj;
    }
    sum.add(squares - 0.25, || x.iter().map(|xj| 2.0 * xj));
}
