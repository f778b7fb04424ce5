use super::{Formula, MGH, Problem, Slopes, Total, WrongSize};

/// The extended Rosenbrock function, `n / 2` independent pairs, `n` even.
///
/// `f = sum over pairs (a, b) of 100 (b - a^2)^2 + (1 - a)^2`. Start `(-1.2, 1, -1.2, 1, ...)`. Minimum 0 at `(1, ..., 1)`.
///
/// Source: Moré, Garbow & Hillstrom 1981, problem 21, doi:10.1145/355934.355936. Here value and gradient come out of one pass
/// that writes each component once, for sizes up to 1e7 and beyond;
/// [`more_garbow_hillstrom::extended_rosenbrock`](crate::problems::more_garbow_hillstrom::extended_rosenbrock) keeps the residuals.
///
/// ```
/// let problem = surefoot::problems::large::extended_rosenbrock(100_000)?;
/// assert!((problem.value(problem.start()).unwrap() / 50_000.0 - 24.2).abs() < 1e-12);
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] unless `n` is even and positive.
pub fn extended_rosenbrock(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check_multiple(NAME, n, 2, "an even size, at least 2")?;
    let start = (0..n).map(|j| if j % 2 == 0 { -1.2 } else { 1.0 });
    Ok(Problem::one_pass(NAME, MGH, ExtendedRosenbrock, start).described(0.0, "(1, ..., 1)"))
}

const NAME: &str = "Extended Rosenbrock";

#[derive(Debug)]
struct ExtendedRosenbrock;

impl Formula for ExtendedRosenbrock {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let mut total = Total::default();
        let (pairs, _) = x.as_chunks::<2>();
        for (k, &[a, b]) in pairs.iter().enumerate() {
            let r = b - a * a;
            let s = 1.0 - a;
            total.add(100.0 * r * r + s * s);
            slopes.set(2 * k, -400.0 * r * a - 2.0 * s);
            slopes.set(2 * k + 1, 200.0 * r);
        }
        total.get()
    }
}
