use core::f64::consts::TAU;

use super::{Problem, Squares, Vec, components, problem};

/// The helical valley of Fletcher and Powell, problem 7.
///
/// `n = 3, m = 3`: `r1 = 10 (x3 - 10 theta)`, `r2 = 10 (sqrt(x1^2 + x2^2) - 1)`, `r3 = x3`, where
/// `theta = arctan(x2 / x1) / (2 pi)` for `x1 > 0`, and 1/2 more for `x1 < 0`.
/// Start `(-1, 0, 0)`. Minimum 0 at `(1, 0, 0)`.
///
/// f is discontinuous across the half plane `x1 = 0, x2 < 0`, where `theta` jumps by 1. The paper leaves `x1 = 0`
/// open; here `theta` is then 1/4 for `x2 > 0`, -1/4 for `x2 < 0`, 0 for `x2 = 0` (common practice). On the axis
/// `x1 = x2 = 0` there is no gradient: it comes out as NaN.
pub fn helical_valley() -> Problem {
    problem(7, "Helical valley", 3, residuals, [-1.0, 0.0, 0.0]).strict(0.0, &[1.0, 0.0, 0.0])
}

pub(super) fn listed() -> Vec<Problem> {
    [helical_valley()].into()
}

fn residuals(x: &[f64], sum: &mut Squares<'_>) {
    let [x1, x2, x3] = components(x);
    let radius = x1.hypot(x2);
    sum.add(10.0 * (x3 - 10.0 * turn(x1, x2)), || {
        // d theta = (x1 dx2 - x2 dx1) / (2 pi radius^2)
        let per_radius = 100.0 / (TAU * radius);
        [
            per_radius * (x2 / radius),
            -per_radius * (x1 / radius),
            10.0,
        ]
    });
    sum.add(10.0 * (radius - 1.0), || {
        [10.0 * (x1 / radius), 10.0 * (x2 / radius)]
    });
    sum.add(x3, || [0.0, 0.0, 1.0]);
}

/// The angle of `(x1, x2)` in turns, from -1/4 to 3/4.
fn turn(x1: f64, x2: f64) -> f64 {
    if x1 > 0.0 {
        (x2 / x1).atan() / TAU
    } else if x1 < 0.0 {
        (x2 / x1).atan() / TAU + 0.5
    } else if x2 == 0.0 {
        0.0
    } else {
        0.25 * x2.signum()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn f_jumps_across_half_a_plane_only() {
        let problem = helical_valley();
        let jump = |x2: f64| {
            let [left, on, right] =
                [-1e-9, 0.0, 1e-9].map(|x1| problem.value(&[x1, x2, 0.0]).unwrap());
            (left - on, right - on)
        };
        let (left, right) = jump(1.0);
        assert!(left.abs() < 1e-4 && right.abs() < 1e-4);
        // theta is 3/4 on the left and -1/4 on the right: f = (100 theta)^2.
        let (left, right) = jump(-1.0);
        assert!((left - 5000.0).abs() < 1e-4 && right.abs() < 1e-4);
        assert_eq!(problem.value(&[0.0, 0.0, 0.0]), Ok(100.0));
    }
}
