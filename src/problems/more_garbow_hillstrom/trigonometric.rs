use super::{Problem, Squares, Vec, WrongSize, problem};

/// The trigonometric function, problem 26, in `n` variables, at least 1.
///
/// `m = n`: `ri = n - sum_j cos xj + i (1 - cos xi) - sin xi`. Start `xj = 1 / n`. Minimum 0 at the origin, among
/// others. For `n = 10` runs from the start end at the local minimum 2.79505...e-5; none is stored for other `n`.
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn trigonometric(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 1..=usize::MAX)?;
    Ok(sized(n))
}

pub(super) fn listed() -> Vec<Problem> {
    [10].map(sized).into()
}

const NAME: &str = "Trigonometric";

fn sized(n: usize) -> Problem {
    let start = core::iter::repeat_n(1.0 / n as f64, n);
    let problem = problem(26, NAME, n, residuals, start).strict(0.0, &std::vec![0.0; n]);
    match n {
        10 => problem.strict(
            2.7950561218794563e-5,
            &[
                0.05515090398069129,
                0.05684061679473856,
                0.058764001762695084,
                0.06099060865676081,
                0.06362621369585451,
                0.06684317945275879,
                0.20816151856988116,
                0.16436309588564774,
                0.08500689568850744,
                0.09143145071470794,
            ],
        ),
        _ => problem,
    }
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    // n - sum cos = sum (1 - cos): no cancellation near the minimizer.
    let shared: f64 = x.iter().map(|&xj| versine(xj)).sum();
    let mut total = 0.0;
    for (i, &xi) in x.iter().enumerate() {
        let weight = (i + 1) as f64;
        let r = shared + weight * versine(xi) - xi.sin();
        sum.add_at(i, 1.0, r, || [weight * xi.sin() - xi.cos()]);
        total += r;
    }
    // Every residual depends on x through the shared sum: its part of all rows at once.
    sum.add_gradient(0, 2.0 * total, || x.iter().map(|xj| xj.sin()));
}

/// `1 - cos t`
fn versine(t: f64) -> f64 {
    let s = (0.5 * t).sin();
    2.0 * s * s
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn digits_are_kept_in_a_thousand_variables() {
        // The formula at the start, from 50-digit arithmetic; n - sum cos alone would cost 8 of a double's.
        let problem = trigonometric(1000).unwrap();
        let value = problem.value(problem.start()).unwrap();
        assert!(
            (value - 8.320831950695173e-5).abs() <= 2e-13 * value,
            "{value:e}"
        );
        let mut g = std::vec![f64::NAN; problem.dim()];
        problem.gradient(problem.start(), &mut g).unwrap();
        for (found, wanted) in [
            (g[0], 4.985005425415457e-4),
            (g[3], 4.925155455377952e-4),
            (g[996], -4.994907099605789e-4),
            (g[999], -4.994997084583291e-4),
        ] {
            assert!(
                (found - wanted).abs() <= 1e-12 * wanted.abs(),
                "{found:e} for {wanted:e}"
            );
        }
    }
}
