use super::{Formula, MGH, Problem, Slopes, Total, WrongSize};

/// The extended Powell singular function, `n / 4` independent blocks of four.
///
/// `f = sum over blocks (a, b, c, d) of (a + 10 b)^2 + 5 (c - d)^2 + (b - 2 c)^4 + 10 (a - d)^4`. Start `(3, -1, 0, 1, ...)`.
/// Minimum 0 at the origin, where the Hessian has half its rank: approached slowly.
///
/// Source: Moré, Garbow & Hillstrom 1981, problem 22, doi:10.1145/355934.355936. Here value and gradient come out of one pass;
/// [`more_garbow_hillstrom::extended_powell_singular`](crate::problems::more_garbow_hillstrom::extended_powell_singular) keeps
/// the residuals.
///
/// ```
/// let problem = surefoot::problems::large::extended_powell_singular(1000)?;
/// assert_eq!(problem.value(problem.start()), Ok(215.0 * 250.0));
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] unless `n` is a positive multiple of 4.
pub fn extended_powell_singular(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check_multiple(NAME, n, 4, "a multiple of 4, at least 4")?;
    let start = (0..n).map(|j| [3.0, -1.0, 0.0, 1.0][j % 4]);
    Ok(Problem::one_pass(NAME, MGH, ExtendedPowellSingular, start).described(0.0, "the origin"))
}

const NAME: &str = "Extended Powell singular";

#[derive(Debug)]
struct ExtendedPowellSingular;

impl Formula for ExtendedPowellSingular {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let mut total = Total::default();
        let (blocks, _) = x.as_chunks::<4>();
        for (k, &[a, b, c, d]) in blocks.iter().enumerate() {
            let (p, q, r, s) = (a + 10.0 * b, c - d, b - 2.0 * c, a - d);
            let (r2, s2) = (r * r, s * s);
            total.add(p * p + 5.0 * q * q + r2 * r2 + 10.0 * s2 * s2);
            slopes.set(4 * k, 2.0 * p + 40.0 * s2 * s);
            slopes.set(4 * k + 1, 20.0 * p + 4.0 * r2 * r);
            slopes.set(4 * k + 2, 10.0 * q - 8.0 * r2 * r);
            slopes.set(4 * k + 3, -10.0 * q - 40.0 * s2 * s);
        }
        total.get()
    }
}
