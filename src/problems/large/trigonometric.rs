use super::{Formula, GREATEST, MGH, Problem, Slopes, Total, WrongSize};

/// The trigonometric function, in `n` variables, at least 1: every residual depends on all of them.
///
/// `f = sum_{i=1..n} ri^2`, `ri = n - sum_j cos xj + i (1 - cos xi) - sin xi`. Start `xi = 1 / n`. Minimum 0 at the origin,
/// among others; runs from the start may end in a local one.
///
/// Source: Moré, Garbow & Hillstrom 1981, problem 26, doi:10.1145/355934.355936. Here value and gradient count as one evaluation;
/// [`more_garbow_hillstrom::trigonometric`](crate::problems::more_garbow_hillstrom::trigonometric) keeps the residuals.
///
/// ```
/// let problem = surefoot::problems::large::trigonometric(1000)?;
/// assert!((problem.value(problem.start()).unwrap() - 8.320832e-5).abs() < 1e-11);
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn trigonometric(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 1..=GREATEST)?;
    let start = core::iter::repeat_n(1.0 / n as f64, n);
    Ok(Problem::one_pass(NAME, MGH, Trigonometric, start)
        .described(0.0, "the origin, among others"))
}

const NAME: &str = "Trigonometric";

#[derive(Debug)]
struct Trigonometric;

impl Formula for Trigonometric {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        // n - sum cos = sum (1 - cos): no cancellation near the minimizer.
        let mut shared = Total::default();
        x.iter().for_each(|&xj| shared.add(versine(xj)));
        let shared = shared.get();
        let (mut total, mut residuals) = (Total::default(), Total::default());
        for (j, &xj) in x.iter().enumerate() {
            let weight = (j + 1) as f64;
            let (sine, versine) = (xj.sin(), versine(xj));
            let r = shared + weight * versine - sine;
            total.add(r * r);
            residuals.add(r);
            slopes.set(j, 2.0 * r * (weight * sine - (1.0 - versine)));
        }
        // Every residual depends on x through the shared sum.
        let residuals = 2.0 * residuals.get();
        for (j, &xj) in x.iter().enumerate() {
            slopes.add(j, residuals * xj.sin());
        }
        total.get()
    }
}

/// `1 - cos t`
fn versine(t: f64) -> f64 {
    let s = (0.5 * t).sin();
    2.0 * s * s
}
