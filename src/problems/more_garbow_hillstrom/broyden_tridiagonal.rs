use super::{GREATEST, Problem, Squares, Vec, WrongSize, problem};

/// Broyden's tridiagonal function, problem 30, in `n` variables, at least 1.
///
/// `m = n`: `ri = (3 - 2 xi) xi - x(i-1) - 2 x(i+1) + 1` with `x0 = x(n+1) = 0`. Start `(-1, ..., -1)`. Minimum 0; its point is
/// stored for `n = 10`.
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn broyden_tridiagonal(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 1..=GREATEST)?;
    Ok(sized(n))
}

pub(super) fn listed() -> Vec<Problem> {
    [10].map(sized).into()
}

const NAME: &str = "Broyden tridiagonal";

fn sized(n: usize) -> Problem {
    let problem = problem(30, NAME, n, residuals, core::iter::repeat_n(-1.0, n));
    match n {
        10 => problem.strict(
            0.0,
            &[
                -0.5707221320112248,
                -0.681806949984275,
                -0.7022100760176601,
                -0.7055106298950804,
                -0.7049061557287437,
                -0.7014966070298512,
                -0.6918893223547983,
                -0.6657965144058537,
                -0.5960351090263657,
                -0.4164122575286934,
            ],
        ),
        _ => problem,
    }
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let mut before = 0.0;
    for (i, &xi) in x.iter().enumerate() {
        let after = x.get(i + 1).copied().unwrap_or(0.0);
        let r = (3.0 - 2.0 * xi) * xi - before - 2.0 * after + 1.0;
        let own = 3.0 - 4.0 * xi;
        // The first row has no left neighbour, and the last one ends before its right one.
        if i == 0 {
            sum.add(r, || [own, -2.0]);
        } else {
            sum.add_at(i - 1, 1.0, r, || [-1.0, own, -2.0]);
        }
        before = xi;
    }
}
