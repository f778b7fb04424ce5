use super::discrete_boundary_value::{SOLUTION, start};
use super::{GREATEST, Problem, Squares, Vec, WrongSize, problem};

/// The discrete integral equation, problem 29, in `n` variables, at least 1: [problem 28](super::discrete_boundary_value()) with
/// the kernel of the second derivative, so that all residuals depend on all variables. An evaluation costs `n^2` operations.
///
/// `m = n`: `ri = xi + h / 2 ((1 - ti) sum_{j<=i} tj cj + ti sum_{j>i} (1 - tj) cj)` with `cj = (xj + tj + 1)^3`,
/// `h = 1 / (n + 1)`, `ti = i h`. Start `xj = tj (tj - 1)`. Minimum 0 where problem 28 has it; its point is stored for `n = 10`.
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn discrete_integral_equation(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 1..=GREATEST)?;
    Ok(sized(n))
}

pub(super) fn listed() -> Vec<Problem> {
    [10].map(sized).into()
}

const NAME: &str = "Discrete integral equation";

fn sized(n: usize) -> Problem {
    let problem = problem(29, NAME, n, residuals, start(n));
    match n {
        10 => problem.strict(0.0, &SOLUTION),
        _ => problem,
    }
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let h = 1.0 / (x.len() + 1) as f64;
    let knot = |j: usize| (j + 1) as f64 * h;
    // h / 2 times the kernel
    let kernel = |i: usize, j: usize| {
        let (lower, upper) = (knot(i.min(j)), knot(i.max(j)));
        0.5 * h * lower * (1.0 - upper)
    };
    let inner = |j: usize| x[j] + knot(j) + 1.0;
    for (i, xi) in x.iter().enumerate() {
        let integral: f64 = (0..x.len())
            .map(|j| kernel(i, j) * inner(j) * inner(j) * inner(j))
            .sum();
        sum.add(xi + integral, || {
            (0..x.len()).map(|j| {
                let own = if i == j { 1.0 } else { 0.0 };
                own + 3.0 * kernel(i, j) * inner(j) * inner(j)
            })
        });
    }
}
