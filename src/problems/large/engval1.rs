use super::{BONGARTZ, Formula, GREATEST, Problem, Slopes, Total, WrongSize};

/// ENGVAL1, a convex quartic chain, in `n` variables, at least 2.
///
/// `f = sum_{i=1..n-1} (xi^2 + x(i+1)^2)^2 - 4 xi + 3`.
/// Start `(2, ..., 2)`. Minimum 0 at `(1, 0)` for `n = 2`, 109.088... for `n = 100` (computed),
/// 1108.19... for 1000 (recalled and reproduced); none is stored for other `n`.
///
/// Source: ENGVAL1 of the collection of Bongartz, Conn, Gould & Toint 1995, doi:10.1145/200979.201043; from memory.
///
/// ```
/// let problem = surefoot::problems::large::engval1(1000)?;
/// assert_eq!(problem.value(problem.start()), Ok(58_941.0)); // 59 (n - 1)
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n < 2`.
pub fn engval1(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 2..=GREATEST)?;
    let start = core::iter::repeat_n(2.0, n);
    let problem = Problem::one_pass(NAME, BONGARTZ, Engval1, start);
    let minimum = match n {
        2 => return Ok(problem.strict(0.0, &[1.0, 0.0])),
        100 => 109.088136143092,
        1000 => 1108.19471878501,
        _ => return Ok(problem),
    };
    Ok(problem.described(minimum, "the minimizer of a convex function"))
}

const NAME: &str = "ENGVAL1";

#[derive(Debug)]
struct Engval1;

impl Formula for Engval1 {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let mut total = Total::default();
        let mut before = x[0];
        let mut carried = 0.0;
        for (j, &xj) in x.iter().enumerate().skip(1) {
            // x^4 - 4 x + 3 = (x - 1)^2 (x^2 + 2 x + 3): nothing cancels at the minimizer for n = 2.
            let off = before - 1.0;
            let (square, cross) = (before * before, xj * xj);
            total.add(off * off * (square + 2.0 * before + 3.0) + cross * (2.0 * square + cross));
            slopes.set(
                j - 1,
                carried + 4.0 * (off * (square + before + 1.0) + before * cross),
            );
            carried = 4.0 * (square + cross) * xj;
            before = xj;
        }
        slopes.set(x.len() - 1, carried);
        total.get()
    }
}
