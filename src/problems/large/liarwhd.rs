use super::{BONGARTZ, Formula, GREATEST, Problem, Slopes, Total, WrongSize};

/// LIARWHD, a quartic whose Hessian is an arrowhead: every variable is tied to the first. In `n` variables, at least 1.
///
/// `f = sum_{i=1..n} 4 (xi^2 - x1)^2 + (xi - 1)^2`.
/// Start `(4, ..., 4)`. Minimum 0 at `(1, ..., 1)`.
///
/// Source: LIARWHD of the collection of Bongartz, Conn, Gould & Toint 1995, doi:10.1145/200979.201043; from memory.
///
/// ```
/// let problem = surefoot::problems::large::liarwhd(1000)?;
/// assert_eq!(problem.value(problem.start()), Ok(585_000.0)); // 585 n
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn liarwhd(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 1..=GREATEST)?;
    let start = core::iter::repeat_n(4.0, n);
    Ok(Problem::one_pass(NAME, BONGARTZ, Liarwhd, start).described(0.0, "(1, ..., 1)"))
}

const NAME: &str = "LIARWHD";

#[derive(Debug)]
struct Liarwhd;

impl Formula for Liarwhd {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let mut total = Total::default();
        let first = x[0];
        let mut of_first = Total::default();
        for (j, &xj) in x.iter().enumerate() {
            let (r, s) = (xj * xj - first, xj - 1.0);
            total.add(4.0 * r * r + s * s);
            slopes.set(j, 16.0 * r * xj + 2.0 * s);
            of_first.add(-8.0 * r);
        }
        slopes.add(0, of_first.get());
        total.get()
    }
}
