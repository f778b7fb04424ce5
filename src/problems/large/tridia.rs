use super::{BONGARTZ, Formula, GREATEST, Problem, Slopes, Total, WrongSize};

/// TRIDIA, a quadratic with a tridiagonal Hessian, in `n` variables, at least 1.
///
/// `f = (x1 - 1)^2 + sum_{i=2..n} i (2 xi - x(i-1))^2`. Start `(1, ..., 1)`. Minimum 0 at `xi = 2^(1-i)`.
/// The condition number of the Hessian grows in proportion to `n`.
///
/// Source: TRIDIA of the collection of Bongartz, Conn, Gould & Toint 1995, doi:10.1145/200979.201043; from memory.
///
/// ```
/// let problem = surefoot::problems::large::tridia(1000)?;
/// assert_eq!(problem.value(problem.start()), Ok(500_499.0)); // 2 + 3 + ... + n
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn tridia(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 1..=GREATEST)?;
    let start = core::iter::repeat_n(1.0, n);
    Ok(Problem::one_pass(NAME, BONGARTZ, Tridia, start).described(0.0, "xi = 2^(1-i)"))
}

const NAME: &str = "TRIDIA";

#[derive(Debug)]
struct Tridia;

impl Formula for Tridia {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let mut total = Total::default();
        let mut before = x[0];
        total.add((before - 1.0) * (before - 1.0));
        let mut carried = 2.0 * (before - 1.0);
        for (j, &xj) in x.iter().enumerate().skip(1) {
            let i = (j + 1) as f64;
            let r = 2.0 * xj - before;
            total.add(i * r * r);
            slopes.set(j - 1, carried - 2.0 * i * r);
            carried = 4.0 * i * r;
            before = xj;
        }
        slopes.set(x.len() - 1, carried);
        total.get()
    }
}
