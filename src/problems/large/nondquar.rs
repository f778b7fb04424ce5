use super::{BONGARTZ, Formula, GREATEST, Problem, Slopes, Total, WrongSize};

/// NONDQUAR, a nondiagonal quartic, in `n` variables, at least 3: the Hessian has rank 2 at the minimizer.
///
/// `f = (x1 - x2)^2 + sum_{i=1..n-2} (xi + x(i+1) + xn)^4 + (x(n-1) + xn)^2`.
/// Start `(1, -1, 1, -1, ...)`. Minimum 0 at the origin, approached slowly.
///
/// Source: NONDQUAR of the collection of Bongartz, Conn, Gould & Toint 1995, doi:10.1145/200979.201043; from memory.
///
/// ```
/// let problem = surefoot::problems::large::nondquar(1000)?;
/// assert_eq!(problem.value(problem.start()), Ok(1002.0)); // 4 + (n - 2) + 0
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n < 3`.
pub fn nondquar(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 3..=GREATEST)?;
    let start = (0..n).map(|j| if j % 2 == 0 { 1.0 } else { -1.0 });
    Ok(Problem::one_pass(NAME, BONGARTZ, Nondquar, start).described(0.0, "the origin"))
}

const NAME: &str = "NONDQUAR";

#[derive(Debug)]
struct Nondquar;

impl Formula for Nondquar {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let n = x.len();
        let last = x[n - 1];
        let mut total = Total::default();
        let (first, end) = (x[0] - x[1], x[n - 2] + last);
        total.add(first * first + end * end);
        slopes.clear();
        slopes.add(0, 2.0 * first);
        slopes.add(1, -2.0 * first);
        slopes.add(n - 2, 2.0 * end);
        let mut of_last = Total::default();
        of_last.add(2.0 * end);
        for (j, pair) in x[..n - 1].windows(2).enumerate() {
            let s = pair[0] + pair[1] + last;
            let cube = s * s * s;
            total.add(cube * s);
            slopes.add(j, 4.0 * cube);
            slopes.add(j + 1, 4.0 * cube);
            of_last.add(4.0 * cube);
        }
        slopes.add(n - 1, of_last.get());
        total.get()
    }
}
