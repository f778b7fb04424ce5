use super::{BONGARTZ, Formula, Problem, Slopes, Total, WrongSize};

/// The extended Wood function, `n / 4` independent blocks of four.
///
/// `f = sum over blocks (a, b, c, d) of 100 (b - a^2)^2 + (1 - a)^2 + 90 (d - c^2)^2 + (1 - c)^2 + 10 (b + d - 2)^2 + (b - d)^2 / 10`.
/// Start `(-3, -1, -3, -1, ...)`. Minimum 0 at `(1, ..., 1)`.
///
/// Source: problem 14 of Moré, Garbow & Hillstrom 1981, doi:10.1145/355934.355936, as WOODS of the collection of Bongartz, Conn, Gould & Toint 1995, doi:10.1145/200979.201043; from memory.
///
/// ```
/// let problem = surefoot::problems::large::extended_wood(1000)?;
/// assert_eq!(problem.value(problem.start()), Ok(4_798_000.0)); // 19192 n / 4
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] unless `n` is a positive multiple of 4.
pub fn extended_wood(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check_multiple(NAME, n, 4, "a multiple of 4, at least 4")?;
    let start = (0..n).map(|j| if j % 2 == 0 { -3.0 } else { -1.0 });
    Ok(Problem::one_pass(NAME, BONGARTZ, ExtendedWood, start).described(0.0, "(1, ..., 1)"))
}

const NAME: &str = "Extended Wood";

#[derive(Debug)]
struct ExtendedWood;

impl Formula for ExtendedWood {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let mut total = Total::default();
        let (blocks, _) = x.as_chunks::<4>();
        for (k, &[a, b, c, d]) in blocks.iter().enumerate() {
            let (p, q, r, s) = (b - a * a, 1.0 - a, d - c * c, 1.0 - c);
            let (t, u) = (b + d - 2.0, b - d);
            total.add(100.0 * p * p + q * q + 90.0 * r * r + s * s + 10.0 * t * t + 0.1 * u * u);
            slopes.set(4 * k, -400.0 * p * a - 2.0 * q);
            slopes.set(4 * k + 1, 200.0 * p + 20.0 * t + 0.2 * u);
            slopes.set(4 * k + 2, -360.0 * r * c - 2.0 * s);
            slopes.set(4 * k + 3, 180.0 * r + 20.0 * t - 0.2 * u);
        }
        total.get()
    }
}
