use super::{Problem, Squares, Vec, WrongSize, numbered, problem};

/// The second penalty function, problem 24, in `n` variables, 2 to 100.
///
/// `m = 2 n`: `r1 = x1 - 0.2`; `ri = sqrt(1e-5) (exp(xi / 10) + exp(x(i-1) / 10) - yi)` with
/// `yi = exp(i / 10) + exp((i - 1) / 10)` for `i = 2..n`; `ri = sqrt(1e-5) (exp(x(i-n+1) / 10) - exp(-1 / 10))` for
/// `i = n+1..2n-1`; `r(2n) = sum_j (n - j + 1) xj^2 - 1`. Start `xj = 1/2`. Minimum 9.37629...e-6 for `n = 4`, 2.93660...e-4
/// for `n = 10`. None is stored for other `n`.
///
/// # Errors
/// [`WrongSize`] unless `2 <= n <= 100`: beyond, the targets `yi` grow past all else.
pub fn penalty_2(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 2..=100)?;
    Ok(sized(n))
}

pub(super) fn listed() -> Vec<Problem> {
    [4, 10].map(sized).into()
}

const NAME: &str = "Penalty II";

fn sized(n: usize) -> Problem {
    let problem = problem(24, NAME, 2 * n, residuals, core::iter::repeat_n(0.5, n));
    match n {
        4 => problem.strict(
            9.376293007355442e-6,
            &[
                0.1999993333503804,
                0.19131670099277245,
                0.48010148533262315,
                0.5188454043902005,
            ],
        ),
        10 => problem.strict(
            0.00029366053745674594,
            &[
                0.1999836051978236,
                0.010350648471292297,
                0.019604934480438402,
                0.03208906722068565,
                0.049932677399641294,
                0.07651399515399361,
                0.11862407286950417,
                0.19214487233557667,
                0.34732058694184365,
                0.3691643741593508,
            ],
        ),
        _ => problem,
    }
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let size = x.len() as f64;
    sum.add(x[0] - 0.2, || [1.0]);
    let mut before = (x[0] / 10.0).exp();
    let mut weighted = size * x[0] * x[0];
    for (j, &xj) in x.iter().enumerate().skip(1) {
        let i = (j + 1) as f64;
        let y = (i / 10.0).exp() + ((i - 1.0) / 10.0).exp();
        let now = (xj / 10.0).exp();
        sum.add_at(j - 1, 1e-5, now + before - y, || {
            [before / 10.0, now / 10.0]
        });
        sum.add_at(j, 1e-5, now - (-0.1f64).exp(), || [now / 10.0]);
        before = now;
        weighted += (size - i + 1.0) * xj * xj;
    }
    sum.add(weighted - 1.0, || {
        numbered(x).map(|(j, xj)| 2.0 * (size - j + 1.0) * xj)
    });
}
