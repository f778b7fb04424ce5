use super::{Problem, Squares, Vec, components, problem};

/// Biggs' function EXP6, problem 18, with `m = 13`: one published minimum is a saddle.
///
/// `n = 6`: `ri = x3 exp(-ti x1) - x4 exp(-ti x2) + x6 exp(-ti x5) - yi` with `ti = i / 10` and
/// `yi = exp(-ti) - 5 exp(-10 ti) + 3 exp(-4 ti)`. Start `(1, 2, 1, 1, 1, 1)`. Minimum 0 at `(1, 10, 1, 5, 4, 3)`, and
/// at `(4, 10, 3, 5, 1, 1)`, where the two positive terms have changed places.
///
/// The published 5.65565...e-3 is stationary where `x1 = x5` and `x3 + x6 = 2.32628...`, but the Hessian there has the
/// eigenvalue -0.0098 along a direction that parts `x1` from `x5`. The start has `x1 = x5` and `x3 = x6`, so a gradient
/// method stays in that symmetric subspace and ends at the saddle, unless rounding leads it out and on to 0: a test
/// must let both pass.
pub fn biggs_exp6() -> Problem {
    problem(
        18,
        "Biggs EXP6",
        13,
        residuals,
        [1.0, 2.0, 1.0, 1.0, 1.0, 1.0],
    )
    .strict(0.0, &[1.0, 10.0, 1.0, 5.0, 4.0, 3.0])
    .strict(0.0, &[4.0, 10.0, 3.0, 5.0, 1.0, 1.0])
    .saddle(
        0.005655649925499931,
        &[
            1.7114159947195875,
            17.683198180949066,
            1.162461350769346,
            5.186561551993452,
            1.7114159947195875,
            1.163825971068439,
        ],
    )
}

pub(super) fn listed() -> Vec<Problem> {
    [biggs_exp6()].into()
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2, x3, x4, x5, x6] = components(x);
    for i in 1..=sum.residuals() {
        let t = i as f64 / 10.0;
        // Summed like the model below, so that f is exactly 0 at the first minimizer.
        let y = (-t).exp() - 5.0 * (-10.0 * t).exp() + 3.0 * (-4.0 * t).exp();
        let (e1, e2, e5) = ((-t * x1).exp(), (-t * x2).exp(), (-t * x5).exp());
        sum.add(x3 * e1 - x4 * e2 + x6 * e5 - y, || {
            [-t * x3 * e1, t * x4 * e2, e1, -e2, -t * x6 * e5, e5]
        });
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::problems::Minimum;

    #[test]
    fn the_published_minimum_of_biggs_exp6_is_a_saddle() {
        let problem = biggs_exp6();
        let Minimum::Saddle { point, value } = &problem.minima()[2] else {
            panic!("the third answer is the saddle");
        };
        // Parting x1 from x5; the least eigenvalue of the Hessian is -0.0098031618 (70 digits), its eigenvector
        // (0.7075, 0, 0, 0, -0.7067, 0).
        let h = 1e-2;
        let parted = |h: f64| {
            let mut x = point.clone();
            x[0] += h;
            x[4] -= h;
            problem.value(&x).unwrap()
        };
        assert!(parted(h) < *value && parted(-h) < *value);
        let curvature = (parted(h) + parted(-h) - 2.0 * value) / (2.0 * h * h);
        assert!((curvature + 0.0098031618).abs() < 1e-4, "{curvature}");
    }
}
