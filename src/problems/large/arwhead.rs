use super::{BONGARTZ, Formula, GREATEST, Problem, Slopes, Total, WrongSize};

/// ARWHEAD, whose Hessian is an arrowhead: every variable is tied to the last. In `n` variables, at least 2.
///
/// `f = sum_{i=1..n-1} (xi^2 + xn^2)^2 - 4 xi + 3`.
/// Start `(1, ..., 1)`. Minimum 0 at `(1, ..., 1, 0)`, where the curvature in `xn` is `4 (n - 1)`.
///
/// Source: ARWHEAD of the collection of Bongartz, Conn, Gould & Toint 1995, doi:10.1145/200979.201043; from memory.
///
/// ```
/// let problem = surefoot::problems::large::arwhead(1000)?;
/// assert_eq!(problem.value(problem.start()), Ok(2997.0)); // 3 (n - 1)
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n < 2`.
pub fn arwhead(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 2..=GREATEST)?;
    let start = core::iter::repeat_n(1.0, n);
    Ok(Problem::one_pass(NAME, BONGARTZ, Arwhead, start).described(0.0, "(1, ..., 1, 0)"))
}

const NAME: &str = "ARWHEAD";

#[derive(Debug)]
struct Arwhead;

impl Formula for Arwhead {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let mut total = Total::default();
        let (last, others) = (x[x.len() - 1], &x[..x.len() - 1]);
        let mut of_last = Total::default();
        for (j, &xj) in others.iter().enumerate() {
            // x^4 - 4 x + 3 = (x - 1)^2 (x^2 + 2 x + 3): nothing cancels at the minimizer.
            let off = xj - 1.0;
            let (square, cross) = (xj * xj, last * last);
            total.add(off * off * (square + 2.0 * xj + 3.0) + cross * (2.0 * square + cross));
            slopes.set(j, 4.0 * (off * (square + xj + 1.0) + xj * cross));
            of_last.add(4.0 * (square + cross) * last);
        }
        slopes.set(others.len(), of_last.get());
        total.get()
    }
}
