use super::{GREATEST, Problem, Squares, Vec, WrongSize, problem};

/// Broyden's banded function, problem 31, in `n` variables, at least 1.
///
/// `m = n`: `ri = xi (2 + 5 xi^2) + 1 - sum xj (1 + xj)` over the neighbours `j` from `i - 5` to `i + 1`, without `i`, that
/// exist. Start `(-1, ..., -1)`. Minimum 0; for `n = 10` its point is stored, and the local
/// minimum 3.05727... where most runs of gradient methods from the start end (Newton's method with 70 digits; the paper prints none).
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn broyden_banded(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 1..=GREATEST)?;
    Ok(sized(n))
}

pub(super) fn listed() -> Vec<Problem> {
    [10].map(sized).into()
}

const NAME: &str = "Broyden banded";

fn sized(n: usize) -> Problem {
    let problem = problem(31, NAME, n, residuals, core::iter::repeat_n(-1.0, n));
    match n {
        10 => problem
            .strict(
                0.0,
                &[
                    -0.4283028635872503,
                    -0.47659642435629024,
                    -0.5196524636468617,
                    -0.5580993248321809,
                    -0.5925061568294574,
                    -0.624503682199468,
                    -0.6232394714405911,
                    -0.6213938417965735,
                    -0.6204535966590874,
                    -0.5864692707204351,
                ],
            )
            .strict(
                3.057278432425819,
                &[
                    0.2107138580958654,
                    0.26097668597427015,
                    0.22794767243645642,
                    0.19702558873939555,
                    0.2032296940376458,
                    0.22191597803090826,
                    0.16281223658962146,
                    0.048302528220170456,
                    -0.07935658424045178,
                    -0.15312518668267333,
                ],
            ),
        _ => problem,
    }
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    for (i, xi) in x.iter().enumerate() {
        let first = i.saturating_sub(5);
        let band = &x[first..x.len().min(i + 2)];
        let neighbours: f64 = band
            .iter()
            .zip(first..)
            .filter(|(_, j)| *j != i)
            .map(|(xj, _)| xj * (1.0 + xj))
            .sum();
        let r = xi * (2.0 + 5.0 * xi * xi) + 1.0 - neighbours;
        sum.add_at(first, 1.0, r, || {
            band.iter().zip(first..).map(|(xj, j)| {
                if j == i {
                    2.0 + 15.0 * xj * xj
                } else {
                    -1.0 - 2.0 * xj
                }
            })
        });
    }
}
