use super::{Problem, Squares, Vec, WrongSize, components, problem};

/// The Gulf research and development function, problem 11, with `m` residuals, 3 to 100.
///
/// `n = 3`: `ri = exp(-|yi - x2|^x3 / x1) - ti` with `ti = i / 100`, `yi = 25 + (-50 ln ti)^(2/3)`.
/// Start `(5, 2.5, 0.15)`. Minimum 0 at `(50, 25, 1.5)`.
///
/// The paper prints `|yi m i x2|` where the difference `|yi - x2|` is meant, a known misprint: only the difference has
/// the published minimum. At `x2 = yi` the power has no derivative for small `x3`; its share of the gradient counts as 0.
///
/// # Errors
/// [`WrongSize`] unless `3 <= m <= 100`.
pub fn gulf(m: usize) -> Result<Problem, WrongSize> {
    WrongSize::check(NAME, m, 3..=100)?;
    Ok(sized(m))
}

pub(super) fn listed() -> Vec<Problem> {
    [99, 10].map(sized).into()
}

const NAME: &str = "Gulf research and development";

fn sized(m: usize) -> Problem {
    problem(11, NAME, m, residuals, [5.0, 2.5, 0.15]).strict(0.0, &[50.0, 25.0, 1.5])
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2, x3] = components(x);
    for i in 1..=sum.residuals() {
        let t = i as f64 / 100.0;
        // y - x2, summed so that nothing is lost at the minimizer, where x2 = 25.
        let off = (-50.0 * t.ln()).powf(2.0 / 3.0) + (25.0 - x2);
        let power = off.abs().powf(x3);
        let decay = (-power / x1).exp();
        sum.add(decay - t, || {
            if off == 0.0 {
                return [0.0; 3];
            }
            let share = decay * power / x1;
            [share / x1, share * x3 / off, -share * off.abs().ln()]
        });
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn there_is_a_value_where_a_datum_is_met() {
        // i = 100: y = 25, so x2 = 25 makes the power 0, the exponential 1 and the residual 0.
        let problem = gulf(100).unwrap();
        assert!(problem.value(&[50.0, 25.0, 0.5]).unwrap().is_finite());
        let mut g = [f64::NAN; 3];
        problem.gradient(&[50.0, 25.0, 0.5], &mut g).unwrap();
        assert!(g.iter().all(|g| g.is_finite()));
        assert!(problem.value(&[50.0, 25.0, 1.5]).unwrap() < 1e-28);
    }
}
