use super::{BONGARTZ, Formula, GREATEST, Problem, Slopes, Total, WrongSize};

/// BDQRTIC, a banded quartic with an arrow, in `n` variables, at least 5.
///
/// `f = sum_{i=1..n-4} (3 - 4 xi)^2 + (xi^2 + 2 x(i+1)^2 + 3 x(i+2)^2 + 4 x(i+3)^2 + 5 xn^2)^2`.
/// Start `(1, ..., 1)`. Minimum 378.769... for `n = 100` (computed), 3983.81... for 1000
/// (recalled and reproduced), where runs from the start end; none is stored for other `n`.
///
/// Source: BDQRTIC of the collection of Bongartz, Conn, Gould & Toint 1995, doi:10.1145/200979.201043; from memory.
///
/// ```
/// let problem = surefoot::problems::large::bdqrtic(1000)?;
/// assert_eq!(problem.value(problem.start()), Ok(225_096.0)); // 226 (n - 4)
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n < 5`.
pub fn bdqrtic(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 5..=GREATEST)?;
    let start = core::iter::repeat_n(1.0, n);
    let problem = Problem::one_pass(NAME, BONGARTZ, Bdqrtic, start);
    let minimum = match n {
        100 => 378.769191808684,
        1000 => 3983.81795057654,
        _ => return Ok(problem),
    };
    Ok(problem.described(minimum, "where runs from the start end"))
}

const NAME: &str = "BDQRTIC";

#[derive(Debug)]
struct Bdqrtic;

impl Formula for Bdqrtic {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let n = x.len();
        let last = x[n - 1];
        let mut total = Total::default();
        let mut of_last = Total::default();
        slopes.clear();
        for (j, band) in x[..n - 1].windows(4).enumerate() {
            let r = 3.0 - 4.0 * band[0];
            let squares = [1.0, 2.0, 3.0, 4.0].iter().zip(band);
            let s = squares.map(|(w, x)| w * x * x).sum::<f64>() + 5.0 * last * last;
            total.add(r * r + s * s);
            slopes.add(j, -8.0 * r);
            for (k, x) in band.iter().enumerate() {
                slopes.add(j + k, 4.0 * (k + 1) as f64 * s * x);
            }
            of_last.add(20.0 * s * last);
        }
        slopes.add(n - 1, of_last.get());
        total.get()
    }
}
