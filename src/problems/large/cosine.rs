use super::{BONGARTZ, Formula, GREATEST, Problem, Slopes, Total, WrongSize};

/// COSINE, a chain of cosines, in `n` variables, at least 2: many minima, and saddles between.
///
/// `f = sum_{i=1..n-1} cos(xi^2 - x(i+1) / 2)`.
/// Start `(1, ..., 1)`. Minimum `-(n - 1)`, wherever every `xi^2 - x(i+1) / 2` is an odd multiple of pi.
///
/// Source: COSINE of the collection of Bongartz, Conn, Gould & Toint 1995, doi:10.1145/200979.201043; from memory.
///
/// ```
/// let problem = surefoot::problems::large::cosine(1000)?;
/// let value = problem.value(problem.start()).unwrap();
/// assert!((value - 999.0 * 0.5f64.cos()).abs() < 1e-11);
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n < 2`.
pub fn cosine(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 2..=GREATEST)?;
    let start = core::iter::repeat_n(1.0, n);
    Ok(Problem::one_pass(NAME, BONGARTZ, Cosine, start).set(
        -((n - 1) as f64),
        "every xi^2 - x(i+1) / 2 an odd multiple of pi",
    ))
}

const NAME: &str = "COSINE";

#[derive(Debug)]
struct Cosine;

impl Formula for Cosine {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let mut total = Total::default();
        let mut before = x[0];
        let mut carried = 0.0;
        for (j, &xj) in x.iter().enumerate().skip(1) {
            let (sine, cosine) = (before * before - 0.5 * xj).sin_cos();
            total.add(cosine);
            slopes.set(j - 1, carried - 2.0 * before * sine);
            carried = 0.5 * sine;
            before = xj;
        }
        slopes.set(x.len() - 1, carried);
        total.get()
    }
}
