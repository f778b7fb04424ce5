use super::{GREATEST, Problem, Squares, Vec, WrongSize, problem};

/// Brown's almost-linear function, problem 27, in `n` variables, at least 2.
///
/// `m = n`: `ri = xi + sum_j xj - (n + 1)` for `i < n`, `rn = x1 x2 ... xn - 1`. Start `xj = 1/2`. Minimum 0 at
/// `(a, ..., a, a^(1-n))` where `n a^n - (n + 1) a^(n-1) + 1 = 0`: `a = 1` for every `n`, and `a = 0.97943...` for `n = 10`.
///
/// `(0, ..., 0, n + 1)`, `f = 1`, is published as a minimum but only stationary for `n >= 3`: the Hessian is singular, and along
/// `(t, ..., t, n + 1 - n t)` f is `(t^(n-1) (n + 1 - n t) - 1)^2`, which falls for small `t > 0`.
///
/// # Errors
/// [`WrongSize`] if `n < 2`.
pub fn brown_almost_linear(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 2..=GREATEST)?;
    Ok(sized(n))
}

pub(super) fn listed() -> Vec<Problem> {
    [10].map(sized).into()
}

const NAME: &str = "Brown almost-linear";

fn sized(n: usize) -> Problem {
    let mut problem = problem(27, NAME, n, residuals, core::iter::repeat_n(0.5, n))
        .strict(0.0, &std::vec![1.0; n]);
    if n == 10 {
        problem = problem.strict(
            0.0,
            &[
                0.9794303033498625,
                0.9794303033498625,
                0.9794303033498625,
                0.9794303033498625,
                0.9794303033498625,
                0.9794303033498625,
                0.9794303033498625,
                0.9794303033498625,
                0.9794303033498625,
                1.2056969665013755,
            ],
        );
    }
    if n >= 3 {
        let mut point = std::vec![0.0; n];
        point[n - 1] = (n + 1) as f64;
        problem = problem.saddle(1.0, &point);
    }
    problem
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let Some((_, before_last)) = x.split_last() else {
        return;
    };
    let excess = x.iter().sum::<f64>() - (x.len() + 1) as f64;
    let mut total = 0.0;
    for (i, xi) in before_last.iter().enumerate() {
        let r = xi + excess;
        sum.add_at(i, 1.0, r, || [1.0]);
        total += r;
    }
    // Every one of them depends on x through the shared sum.
    sum.add_gradient(0, 2.0 * total, || x.iter().map(|_| 1.0));
    let product: f64 = x.iter().product();
    sum.add(product - 1.0, || {
        (0..x.len()).map(move |k| {
            if product.is_normal() {
                return product / x[k];
            }
            let others = x[..k].iter().chain(&x[k + 1..]);
            others.product()
        })
    });
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_published_minimum_of_1_is_none() {
        let problem = brown_almost_linear(10).unwrap();
        let along = |t: f64| {
            let mut x = [t; 10];
            x[9] = 11.0 - 10.0 * t;
            problem.value(&x).unwrap()
        };
        assert_eq!(along(0.0), 1.0);
        let values = [0.05, 0.1, 0.2, 0.3, 0.4].map(along);
        assert!(values[0] < 1.0 && values.is_sorted_by(|a, b| a > b));
    }

    #[test]
    fn derivatives_of_the_product_are_right_where_it_vanishes() {
        // Residual n is x1 x2 x3 - 1 = -1, the others are 0 + 4 - 4 and 3 + 4 - 4; its row is (x2 x3, 0, 0).
        let problem = brown_almost_linear(3).unwrap();
        let mut g = [f64::NAN; 3];
        problem.gradient(&[0.0, 3.0, 1.0], &mut g).unwrap();
        let others = 2.0 * 3.0;
        assert_eq!(g, [others - 2.0 * 3.0, 2.0 * others, others]);
    }
}
