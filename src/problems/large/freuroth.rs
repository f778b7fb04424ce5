use super::{BONGARTZ, Formula, GREATEST, Problem, Slopes, Total, WrongSize};

/// FREUROTH, the chained function of Freudenstein and Roth, in `n` variables, at least 2.
///
/// `f = sum_{i=1..n-1} (xi + ((5 - y) y - 2) y - 13)^2 + (xi + ((1 + y) y - 14) y - 29)^2` with `y = x(i+1)`.
/// Start `(0.5, -2, 0, ..., 0)`. Local minima that runs from the start end at: 1014.06407... for `n = 10`, 11964.57734... for
/// 100, 121469.71010... for 1000, all near `(12.27, -0.83, -1.51, -1.53, ..., -1.54)` (from Newton's method with 50 digits).
/// None is stored for other `n`.
///
/// Source: FREUROTH of the collection of Bongartz, Conn, Gould & Toint 1995, doi:10.1145/200979.201043, after Toint 1978 and
/// problem 2 of Moré, Garbow & Hillstrom 1981; from memory.
///
/// ```
/// let problem = surefoot::problems::large::freuroth(1000)?;
/// assert!((problem.minima()[0].value() - 121_469.7).abs() < 0.1);
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n < 2`.
pub fn freuroth(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 2..=GREATEST)?;
    let start = (0..n).map(|j| match j {
        0 => 0.5,
        1 => -2.0,
        _ => 0.0,
    });
    let problem = Problem::one_pass(NAME, BONGARTZ, Freuroth, start);
    let minimum = match n {
        10 => 1014.0640725745184,
        100 => 11964.57734865419,
        1000 => 121469.71010945157,
        _ => return Ok(problem),
    };
    Ok(problem.described(minimum, "near (12.27, -0.83, -1.51, -1.53, ..., -1.54)"))
}

const NAME: &str = "FREUROTH";

#[derive(Debug)]
struct Freuroth;

impl Formula for Freuroth {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let mut total = Total::default();
        let mut before = x[0];
        let mut carried = 0.0;
        for (j, &y) in x.iter().enumerate().skip(1) {
            let r = before + ((5.0 - y) * y - 2.0) * y - 13.0;
            let s = before + ((1.0 + y) * y - 14.0) * y - 29.0;
            total.add(r * r + s * s);
            slopes.set(j - 1, carried + 2.0 * (r + s));
            carried = 2.0 * (r * ((10.0 - 3.0 * y) * y - 2.0) + s * ((2.0 + 3.0 * y) * y - 14.0));
            before = y;
        }
        slopes.set(x.len() - 1, carried);
        total.get()
    }
}
