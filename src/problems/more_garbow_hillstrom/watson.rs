use super::{Problem, Squares, Vec, WrongSize, problem};

/// Watson's function, problem 20, in `n` variables, 2 to 31: ever worse conditioned as `n` grows.
///
/// `m = 31`: with `ti = i / 29` and the polynomial `p(t) = sum_j xj t^(j-1)`, `ri = p'(ti) - p(ti)^2 - 1` for
/// `i = 1..29`, `r30 = x1`, `r31 = x2 - x1^2 - 1`. Start at the origin. Minimum 2.28767...e-3 for `n = 6`,
/// 1.39976...e-6 for `n = 9`, 4.72238...e-10 for `n = 12`; the least eigenvalue of the Hessian at the last is 1.7e-11.
/// No minimum is stored for other `n`.
///
/// # Errors
/// [`WrongSize`] unless `2 <= n <= 31`.
pub fn watson(n: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, n, 2..=31)?;
    Ok(sized(n))
}

pub(super) fn listed() -> Vec<Problem> {
    [6, 9, 12].map(sized).into()
}

const NAME: &str = "Watson";

fn sized(n: usize) -> Problem {
    let problem = problem(20, NAME, 31, residuals, core::iter::repeat_n(0.0, n));
    match n {
        6 => problem.strict(
            0.0022876700535524363,
            &[
                -0.015725086401458456,
                1.0124348693691099,
                -0.2329916259567377,
                1.2604300877996084,
                -1.5137289227222797,
                0.9929964324311346,
            ],
        ),
        9 => problem.strict(
            1.39976013809902e-6,
            &[
                -1.5307036521394342e-5,
                0.9997897039319483,
                0.014763963693556958,
                0.14634232829936222,
                1.0008211030047092,
                -2.617731140519015,
                4.104403164478857,
                -3.1436122785564424,
                1.0526264080101668,
            ],
        ),
        12 => problem.strict(
            4.722381105891757e-10,
            &[
                -6.638060464520687e-9,
                1.000001644117862,
                -0.0005639322103423058,
                0.34782054050404243,
                -0.15673150409616513,
                1.0528151772071777,
                -3.2472711534596677,
                7.288434897938061,
                -10.271848241321724,
                9.074113647075317,
                -4.541375466692512,
                1.0120118885528104,
            ],
        ),
        _ => problem,
    }
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    for i in 1..=29 {
        let t = f64::from(i) / 29.0;
        let (mut p, mut slope) = (0.0, 0.0);
        for (xj, (power, derivative)) in x.iter().zip(powers(t)) {
            p += xj * power;
            slope += xj * derivative;
        }
        sum.add(slope - p * p - 1.0, || {
            powers(t).map(move |(power, derivative)| derivative - 2.0 * p * power)
        });
    }
    let (x1, x2) = (x[0], x[1]);
    sum.add(x1, || [1.0]);
    sum.add(x2 - x1 * x1 - 1.0, || [-2.0 * x1, 1.0]);
}

/// `(t^k, k t^(k-1))` for `k = 0, 1, ...`
fn powers(t: f64) -> impl Iterator<Item = (f64, f64)> {
    (0..)
        .map(f64::from)
        .scan((1.0, 0.0), move |(power, below), k| {
            let item = (*power, k * *below);
            (*power, *below) = (*power * t, *power);
            Some(item)
        })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_start_in_the_greatest_number_of_variables() {
        // f(0) = 29 + 0 + 1 whatever n, and -2 d(slope)/dx_j summed: dr/dxj = (j - 1) t^(j-2) at the origin.
        let problem = watson(31).unwrap();
        assert_eq!(problem.value(problem.start()), Ok(30.0));
        let mut g = std::vec![f64::NAN; problem.dim()];
        problem.gradient(problem.start(), &mut g).unwrap();
        for (k, g) in g.iter().enumerate() {
            let slopes: f64 = (1..=29)
                .map(|i| k as f64 * (f64::from(i) / 29.0).powi(k as i32 - 1))
                .sum();
            let wanted = -2.0 * (slopes + if k == 1 { 1.0 } else { 0.0 });
            assert!(
                (g - wanted).abs() <= 1e-13 * wanted.abs(),
                "{g} for {wanted}"
            );
        }
    }
}
