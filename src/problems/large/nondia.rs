use super::{BONGARTZ, Formula, GREATEST, Problem, Slopes, Total, WrongSize};

/// NONDIA, a nondiagonal relative of the Rosenbrock function, in `n` variables, at least 2.
///
/// `f = (x1 - 1)^2 + sum_{i=2..n} 100 (x1 - x(i-1)^2)^2`.
/// Start `(-1, ..., -1)`. Minimum 0 at `(1, ..., 1)`; `xn` does not appear, so the Hessian is singular everywhere.
///
/// Source: D. F. Shanno, "On variable metric methods for sparse Hessians", Math. Comp. 34, 1980, 499-514, as NONDIA of the collection of Bongartz, Conn, Gould & Toint 1995, doi:10.1145/200979.201043; from memory.
///
/// ```
/// let problem = surefoot::problems::large::nondia(1000)?;
/// assert_eq!(problem.value(problem.start()), Ok(399_604.0)); // 4 + 400 (n - 1)
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n < 2`.
pub fn nondia(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 2..=GREATEST)?;
    let start = core::iter::repeat_n(-1.0, n);
    Ok(Problem::one_pass(NAME, BONGARTZ, Nondia, start)
        .set(0.0, "x1 = 1, xi = 1 or -1 for 1 < i < n, xn anything"))
}

const NAME: &str = "NONDIA";

#[derive(Debug)]
struct Nondia;

impl Formula for Nondia {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let mut total = Total::default();
        let first = x[0];
        total.add((first - 1.0) * (first - 1.0));
        let mut of_first = Total::default();
        of_first.add(2.0 * (first - 1.0));
        for (j, &xj) in x[..x.len() - 1].iter().enumerate() {
            let r = first - xj * xj;
            total.add(100.0 * r * r);
            slopes.set(j, -400.0 * r * xj);
            of_first.add(200.0 * r);
        }
        // The last variable does not count, but a NaN in it must not get lost.
        let of_last = 0.0 * x[x.len() - 1];
        total.add(of_last);
        slopes.set(x.len() - 1, of_last);
        slopes.add(0, of_first.get());
        total.get()
    }
}
