use super::{Problem, Squares, Vec, WrongSize, numbered, problem};

/// The variably dimensioned function, problem 25, in `n` variables, at least 1.
///
/// `m = n + 2`: `rj = xj - 1` for `j = 1..n`, `r(n+1) = sum_j j (xj - 1)`, `r(n+2)` its square.
/// Start `xj = 1 - j / n`. Minimum 0 at `(1, ..., 1)`.
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn variably_dimensioned(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 1..=usize::MAX)?;
    Ok(sized(n))
}

pub(super) fn listed() -> Vec<Problem> {
    [10].map(sized).into()
}

const NAME: &str = "Variably dimensioned";

fn sized(n: usize) -> Problem {
    let start = (1..=n).map(|j| (n - j) as f64 / n as f64);
    problem(25, NAME, n + 2, residuals, start).strict(0.0, &std::vec![1.0; n])
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let mut total = 0.0;
    for (j, xj) in x.iter().enumerate() {
        sum.add_at(j, 1.0, xj - 1.0, || [1.0]);
        total += (j + 1) as f64 * (xj - 1.0);
    }
    sum.add(total, || numbered(x).map(|(j, _)| j));
    sum.add(total * total, || numbered(x).map(|(j, _)| 2.0 * total * j));
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_thousand_variables_agree_with_the_closed_form_at_the_start() {
        let n = 1000;
        let problem = variably_dimensioned(n).unwrap();
        let size = n as f64;
        // xj - 1 = -j / n
        let squares = (size + 1.0) * (2.0 * size + 1.0) / 6.0;
        let f = squares / size + squares * squares + squares.powi(4);
        assert!((problem.value(problem.start()).unwrap() - f).abs() <= 1e-14 * f);
        let mut g = std::vec![f64::NAN; problem.dim()];
        problem.gradient(problem.start(), &mut g).unwrap();
        for (j, g) in numbered(g) {
            let wanted = -2.0 * j / size - (2.0 * squares + 4.0 * squares.powi(3)) * j;
            assert!((g - wanted).abs() <= 1e-14 * wanted.abs());
        }
    }
}
