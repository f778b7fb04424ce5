use super::{GREATEST, Problem, Squares, Vec, WrongSize, numbered, problem};

/// The linear function of rank 1 with zero columns and rows, problem 34, in `n` variables with `m` residuals, `m >= n >= 3`.
///
/// `r1 = rm = -1`, `ri = (i - 1) sum_{j=2..n-1} j xj - 1` between. Start `(1, ..., 1)`.
/// Minimum `(m^2 + 3 m - 6) / (2 (2 m - 3))` wherever `sum_{j=2..n-1} j xj = 3 / (2 m - 3)`.
///
/// # Errors
/// [`WrongSize`] unless `m >= n >= 3`.
pub fn linear_rank_1_with_zeros(n: usize, m: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 3..=GREATEST)?;
    WrongSize::check(RESIDUALS, m, n..=GREATEST)?;
    Ok(sized(n, m))
}

pub(super) fn listed() -> Vec<Problem> {
    [sized(10, 20)].into()
}

const NAME: &str = "Linear function of rank 1 with zero columns and rows";
const RESIDUALS: &str = "The set of residuals of the linear function";

fn sized(n: usize, m: usize) -> Problem {
    let size = m as f64;
    let minimum = (size * size + 3.0 * size - 6.0) / (2.0 * (2.0 * size - 3.0));
    problem(34, NAME, m, residuals, core::iter::repeat_n(1.0, n))
        .set(minimum, "sum_{j=2..n-1} j xj = 3 / (2 m - 3)")
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let last = x.len() as f64;
    let column = move |j: f64| if j == 1.0 || j == last { 0.0 } else { j };
    // A NaN in a component that does not count must not get lost.
    let shared: f64 = numbered(x).map(|(j, xj)| column(j) * xj).sum();
    let m = sum.residuals();
    let mut total = 0.0;
    for i in 1..=m {
        let row = if i == 1 || i == m {
            0.0
        } else {
            (i - 1) as f64
        };
        let r = row * shared - 1.0;
        sum.add_value(r * r);
        total += row * r;
    }
    sum.add_gradient(0, 2.0 * total, || numbered(x).map(move |(j, _)| column(j)));
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_set_of_minimizers_has_the_minimum() {
        let problem = linear_rank_1_with_zeros(10, 20).unwrap();
        let minimum = problem.minima()[0].value();
        // sum_{j=2..9} j = 44; the first and the last component do not count.
        let mut x = [3.0 / 37.0 / 44.0; 10];
        (x[0], x[9]) = (5.0, -7.0);
        let mut g = [f64::NAN; 10];
        let value = problem.value_and_gradient(&x, &mut g).unwrap();
        assert!((value - minimum).abs() <= 1e-15 * minimum, "{value}");
        assert!(g.iter().all(|g| g.abs() <= 1e-11), "{g:?}");
    }
}
