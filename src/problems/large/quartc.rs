use super::{BONGARTZ, Formula, GREATEST, Problem, Slopes, Total, WrongSize};

/// QUARTC, separate fourth powers, in `n` variables, at least 1: the Hessian vanishes at the minimizer.
///
/// `f = sum_{i=1..n} (xi - i)^4`.
/// Start `(2, ..., 2)`. Minimum 0 at `xi = i`, approached slowly: the error falls by a third in a Newton step.
///
/// Source: QUARTC of the collection of Bongartz, Conn, Gould & Toint 1995, doi:10.1145/200979.201043; from memory.
///
/// ```
/// let problem = surefoot::problems::large::quartc(4)?;
/// assert_eq!(problem.value(problem.start()), Ok(18.0)); // 1 + 0 + 1 + 16
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn quartc(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 1..=GREATEST)?;
    let start = core::iter::repeat_n(2.0, n);
    Ok(Problem::one_pass(NAME, BONGARTZ, Quartc, start).described(0.0, "xi = i"))
}

const NAME: &str = "QUARTC";

#[derive(Debug)]
struct Quartc;

impl Formula for Quartc {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let mut total = Total::default();
        for (j, &xj) in x.iter().enumerate() {
            let r = xj - (j + 1) as f64;
            let cube = r * r * r;
            total.add(cube * r);
            slopes.set(j, 4.0 * cube);
        }
        total.get()
    }
}
