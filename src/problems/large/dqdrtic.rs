use super::{BONGARTZ, Formula, GREATEST, Problem, Slopes, Total, WrongSize};

/// DQDRTIC, a diagonal quadratic, in `n` variables, at least 3: eigenvalues in four clusters.
///
/// `f = sum_{i=1..n-2} xi^2 + 100 x(i+1)^2 + 100 x(i+2)^2`.
/// Start `(3, ..., 3)`. Minimum 0 at the origin.
///
/// Source: DQDRTIC of the collection of Bongartz, Conn, Gould & Toint 1995, doi:10.1145/200979.201043; from memory.
///
/// ```
/// let problem = surefoot::problems::large::dqdrtic(1000)?;
/// assert_eq!(problem.value(problem.start()), Ok(1_805_382.0)); // 1809 (n - 2)
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n < 3`.
pub fn dqdrtic(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 3..=GREATEST)?;
    let start = core::iter::repeat_n(3.0, n);
    Ok(Problem::one_pass(NAME, BONGARTZ, Dqdrtic, start).described(0.0, "the origin"))
}

const NAME: &str = "DQDRTIC";

#[derive(Debug)]
struct Dqdrtic;

impl Formula for Dqdrtic {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let mut total = Total::default();
        let n = x.len();
        for (j, &xj) in x.iter().enumerate() {
            // As xi, as x(i+1), as x(i+2) of a term that exists.
            let mut weight = 0.0;
            if j + 2 < n {
                weight += 1.0;
            }
            if j >= 1 && j + 1 < n {
                weight += 100.0;
            }
            if j >= 2 {
                weight += 100.0;
            }
            total.add(weight * xj * xj);
            slopes.set(j, 2.0 * weight * xj);
        }
        total.get()
    }
}
