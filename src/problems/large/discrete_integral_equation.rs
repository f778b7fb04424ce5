use super::{Formula, GREATEST, MGH, Problem, Slopes, Total, WrongSize};

/// The discrete integral equation in `n` variables, at least 1: all residuals depend on all variables, and the Hessian is well
/// conditioned whatever `n`.
///
/// `f = sum_{i=1..n} ri^2`, `ri = xi + h / 2 ((1 - ti) sum_{j<=i} tj cj + ti sum_{j>i} (1 - tj) cj)` with
/// `cj = (xj + tj + 1)^3`, `h = 1 / (n + 1)`, `ti = i h`. Start `xj = tj (tj - 1)`. Minimum 0.
///
/// Source: Moré, Garbow & Hillstrom 1981, problem 29, doi:10.1145/355934.355936. Here running sums make an evaluation cost `n`
/// operations, not the `n^2` of
/// [`more_garbow_hillstrom::discrete_integral_equation`](crate::problems::more_garbow_hillstrom::discrete_integral_equation).
///
/// ```
/// let problem = surefoot::problems::large::discrete_integral_equation(1000)?;
/// assert_eq!(problem.dim(), 1000);
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn discrete_integral_equation(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 1..=GREATEST)?;
    let cells = (n + 1) as f64;
    let start = (1..=n).map(|j| -(j as f64 * (n + 1 - j) as f64) / (cells * cells));
    Ok(
        Problem::one_pass(NAME, MGH, DiscreteIntegralEquation, start)
            .described(0.0, "the solution of the equations ri = 0"),
    )
}

const NAME: &str = "Discrete integral equation";

#[derive(Debug)]
struct DiscreteIntegralEquation;

impl Formula for DiscreteIntegralEquation {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let h = 1.0 / (x.len() + 1) as f64;
        let knots = || {
            x.iter().enumerate().map(|(j, &xj)| {
                let t = (j + 1) as f64 * h;
                (t, xj, xj + t + 1.0)
            })
        };
        let mut all = Total::default();
        knots().for_each(|(t, _, inner)| all.add((1.0 - t) * inner * inner * inner));
        let above_all = all.get();
        // The residuals, knot by knot, from the sums up to and beyond each.
        let residuals = || {
            let (mut below, mut above) = (0.0, above_all);
            knots().map(move |(t, xj, inner)| {
                let cube = inner * inner * inner;
                below += t * cube;
                above -= (1.0 - t) * cube;
                (t, inner, xj + 0.5 * h * ((1.0 - t) * below + t * above))
            })
        };
        let mut total = Total::default();
        let mut beyond = Total::default();
        for (t, _, r) in residuals() {
            total.add(r * r);
            beyond.add((1.0 - t) * r);
        }
        // dri/dxk has the kernel with i and k exchanged.
        let (mut below, mut beyond) = (0.0, beyond.get());
        for (k, (t, inner, r)) in residuals().enumerate() {
            let kernel = t * beyond + (1.0 - t) * below;
            slopes.set(k, 2.0 * r + 3.0 * h * inner * inner * kernel);
            beyond -= (1.0 - t) * r;
            below += t * r;
        }
        total.get()
    }
}
