use super::{GREATEST, Problem, Squares, Vec, WrongSize, problem};

/// The discrete boundary value function, problem 28, in `n` variables, at least 1: `u'' = (u + t + 1)^3 / 2`,
/// `u(0) = u(1) = 0`, by differences.
///
/// `m = n`: `ri = 2 xi - x(i-1) - x(i+1) + h^2 (xi + ti + 1)^3 / 2` with `h = 1 / (n + 1)`, `ti = i h`, `x0 = x(n+1) = 0`.
/// Start `xj = tj (tj - 1)`. Minimum 0; its point is stored for `n = 10`.
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn discrete_boundary_value(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 1..=GREATEST)?;
    Ok(sized(n))
}

pub(super) fn listed() -> Vec<Problem> {
    [10].map(sized).into()
}

const NAME: &str = "Discrete boundary value";

fn sized(n: usize) -> Problem {
    let problem = problem(28, NAME, n, residuals, start(n));
    match n {
        10 => problem.strict(0.0, &SOLUTION),
        _ => problem,
    }
}

/// `tj (tj - 1)`, also the start of problem 29.
pub(super) fn start(n: usize) -> impl Iterator<Item = f64> {
    let cells = (n + 1) as f64;
    (1..=n).map(move |j| -(j as f64 * (n + 1 - j) as f64) / (cells * cells))
}

/// For `n = 10`, also of problem 29.
pub(super) const SOLUTION: [f64; 10] = [
    -0.04316498251876487,
    -0.08157715653538689,
    -0.11448571438052929,
    -0.14097357686259668,
    -0.1599086961819831,
    -0.16987720231277492,
    -0.16908998378120835,
    -0.15524953522183182,
    -0.125355891678935,
    -0.07541653368589209,
];

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let h = 1.0 / (x.len() + 1) as f64;
    let mut before = 0.0;
    for (i, &xi) in x.iter().enumerate() {
        let after = x.get(i + 1).copied().unwrap_or(0.0);
        let inner = xi + (i + 1) as f64 * h + 1.0;
        let r = 2.0 * xi - before - after + 0.5 * h * h * inner * inner * inner;
        let own = 2.0 + 1.5 * h * h * inner * inner;
        // The first row has no left neighbour, and the last one ends before its right one.
        if i == 0 {
            sum.add(r, || [own, -1.0]);
        } else {
            sum.add_at(i - 1, 1.0, r, || [-1.0, own, -1.0]);
        }
        before = xi;
    }
}
