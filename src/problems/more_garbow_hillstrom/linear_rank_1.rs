use super::{GREATEST, Problem, Squares, Vec, WrongSize, numbered, problem};

/// The linear function of rank 1, problem 33, in `n` variables with `m` residuals, `m >= n >= 1`.
///
/// `ri = i sum_j j xj - 1`. Start `(1, ..., 1)`. Minimum `m (m - 1) / (2 (2 m + 1))` wherever `sum_j j xj = 3 / (2 m + 1)`.
///
/// # Errors
/// [`WrongSize`] unless `m >= n >= 1`.
pub fn linear_rank_1(n: usize, m: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 1..=GREATEST)?;
    WrongSize::check(RESIDUALS, m, n..=GREATEST)?;
    Ok(sized(n, m))
}

pub(super) fn listed() -> Vec<Problem> {
    [sized(10, 20)].into()
}

const NAME: &str = "Linear function of rank 1";
const RESIDUALS: &str = "The set of residuals of the linear function";

fn sized(n: usize, m: usize) -> Problem {
    let size = m as f64;
    let minimum = size * (size - 1.0) / (2.0 * (2.0 * size + 1.0));
    problem(33, NAME, m, residuals, core::iter::repeat_n(1.0, n))
        .set(minimum, "sum_j j xj = 3 / (2 m + 1)")
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let shared: f64 = numbered(x).map(|(j, xj)| j * xj).sum();
    let mut total = 0.0;
    for i in 1..=sum.residuals() {
        let i = i as f64;
        let r = i * shared - 1.0;
        sum.add_value(r * r);
        total += i * r;
    }
    sum.add_gradient(0, 2.0 * total, || numbered(x).map(|(j, _)| j));
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_set_of_minimizers_has_the_minimum() {
        let problem = linear_rank_1(10, 20).unwrap();
        let minimum = problem.minima()[0].value();
        // sum_j j = 55, or component 3 alone
        for x in [
            [3.0 / 41.0 / 55.0; 10],
            [0., 0., 1.0 / 41.0, 0., 0., 0., 0., 0., 0., 0.],
        ] {
            let mut g = [f64::NAN; 10];
            let value = problem.value_and_gradient(&x, &mut g).unwrap();
            assert!((value - minimum).abs() <= 1e-15 * minimum, "{value}");
            // Ten thousand times less than at the least distance that the start's digits can tell.
            assert!(g.iter().all(|g| g.abs() <= 1e-11), "{g:?}");
        }
    }
}
