//! The six functions of one variable of Moré and Thuente, each with its rule and its starts.

use core::f64::consts::PI;

/// A published function `phi(a)` of a step `a >= 0`, to search along from 0.
///
/// The published runs ask for the strong Wolfe rule with the pair `(mu, eta)`, [`decrease`](RayProblem::decrease) and
/// [`curvature`](RayProblem::curvature), from each of the [`FIRST_STEPS`](RayProblem::FIRST_STEPS). Functions 4 to 6
/// are convex, after Yanai, Ozawa and Kaneko (1981).
///
/// | | `phi(a)` | `mu` | `eta` | minimizer |
/// |---|---|---|---|---|
/// | 1 | `-a / (a^2 + 2)` | 0.001 | 0.1 | `sqrt 2` |
/// | 2 | `t^5 - 2 t^4`, `t = a + 0.004` | 0.1 | 0.1 | 1.596 |
/// | 3 | `p(a) + 2 (1 - b) / (l pi) sin(l pi a / 2)`, `b = 0.01`, `l = 39` | 0.1 | 0.1 | 1 |
/// | 4 | `g(b1) sqrt((1 - a)^2 + b2^2) + g(b2) sqrt(a^2 + b1^2)`, `b1 = b2 = 0.001` | 0.001 | 0.001 | 0.5 |
/// | 5 | as 4, `b1 = 0.01`, `b2 = 0.001` | 0.001 | 0.001 | 0.0741987... |
/// | 6 | as 4, `b1 = 0.001`, `b2 = 0.01` | 0.001 | 0.001 | 0.925801... |
///
/// with `p(a) = |a - 1|` rounded to `(a - 1)^2 / (2 b) + b / 2` where `|a - 1| < b`, and `g(b) = sqrt(1 + b^2) - b`.
///
/// The formulas are evaluated as written, in doubles (function 2 as `t^4 (t - 2)`, with slope `t^3 (5 t - 8)`): far beyond
/// any sensible step (`a > 1e154` for function 1) squares overflow and the slope may come out as NaN.
///
/// Source: J. J. Moré, D. J. Thuente, "Line search algorithms with guaranteed sufficient decrease", ACM Trans. Math.
/// Software 20(3), 1994, 286-307, section 5, doi:10.1145/192115.192132.
///
/// ```
/// use surefoot::problems::more_thuente;
///
/// let [first, ..] = more_thuente();
/// assert_eq!(first.evaluate(0.0), (0.0, -0.5));
/// assert!(first.evaluate(first.minimizer()).1.abs() < 1e-15);
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct RayProblem {
    number: u32,
    decrease: f64,
    curvature: f64,
    minimizer: f64,
    shape: Shape,
}

/// The six published functions, in the order of the paper's Tables I to VI.
pub fn more_thuente() -> [RayProblem; 6] {
    let ray = |number, decrease, curvature, minimizer, shape| RayProblem {
        number,
        decrease,
        curvature,
        minimizer,
        shape,
    };
    let two_roots = |b1, b2| Shape::TwoRoots { b1, b2 };
    [
        ray(1, 1e-3, 0.1, core::f64::consts::SQRT_2, Shape::Rational),
        ray(2, 0.1, 0.1, 1.596, Shape::Quintic),
        ray(3, 0.1, 0.1, 1.0, Shape::Wavy),
        ray(4, 1e-3, 1e-3, 0.5, two_roots(1e-3, 1e-3)),
        ray(5, 1e-3, 1e-3, 0.07419870787308315, two_roots(1e-2, 1e-3)),
        ray(6, 1e-3, 1e-3, 0.9258012921269169, two_roots(1e-3, 1e-2)),
    ]
}

impl RayProblem {
    /// The published first steps.
    pub const FIRST_STEPS: [f64; 4] = [1e-3, 1e-1, 1e1, 1e3];

    /// The number in the paper, 1 to 6.
    pub fn number(&self) -> u32 {
        self.number
    }

    /// `mu`: the parameter of sufficient decrease in the published runs.
    pub fn decrease(&self) -> f64 {
        self.decrease
    }

    /// `eta`: the parameter of the curvature condition in the published runs.
    pub fn curvature(&self) -> f64 {
        self.curvature
    }

    /// The only stationary point on `a > 0`, a minimizer, rounded to a double.
    pub fn minimizer(&self) -> f64 {
        self.minimizer
    }

    /// Value and slope, `(phi(step), phi'(step))`.
    pub fn evaluate(&self, step: f64) -> (f64, f64) {
        match self.shape {
            Shape::Rational => rational(step),
            Shape::Quintic => quintic(step),
            Shape::Wavy => wavy(step),
            Shape::TwoRoots { b1, b2 } => two_roots(b1, b2, step),
        }
    }
}

#[derive(Clone, Copy, Debug, PartialEq)]
enum Shape {
    Rational,
    Quintic,
    Wavy,
    TwoRoots { b1: f64, b2: f64 },
}

fn rational(a: f64) -> (f64, f64) {
    let below = a * a + 2.0;
    (-a / below, (a * a - 2.0) / (below * below))
}

fn quintic(a: f64) -> (f64, f64) {
    let t = a + 0.004;
    let cube = t * t * t;
    (cube * t * (t - 2.0), cube * (5.0 * t - 8.0))
}

fn wavy(a: f64) -> (f64, f64) {
    const B: f64 = 0.01;
    const FREQUENCY: f64 = 39.0 * PI / 2.0;
    let off = a - 1.0;
    let (value, slope) = if off <= -B {
        (-off, -1.0)
    } else if off >= B {
        (off, 1.0)
    } else {
        (off * off / (2.0 * B) + B / 2.0, off / B)
    };
    let (sine, cosine) = (FREQUENCY * a).sin_cos();
    (
        value + (1.0 - B) / FREQUENCY * sine,
        slope + (1.0 - B) * cosine,
    )
}

fn two_roots(b1: f64, b2: f64, a: f64) -> (f64, f64) {
    let weight = |b: f64| (1.0 + b * b).sqrt() - b;
    let rest = 1.0 - a;
    let far = (rest * rest + b2 * b2).sqrt();
    let near = (a * a + b1 * b1).sqrt();
    (
        weight(b1) * far + weight(b2) * near,
        weight(b2) * (a / near) - weight(b1) * (rest / far),
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    /// `mu`, `eta`; then, computed from the formulas with 60 digits: phi(0), phi'(0), the stationary point, phi and phi''
    /// there. Formulas and pairs of the paper (see [`RayProblem`]) from memory, confirmed by its evaluation counts.
    #[rustfmt::skip]
    const PUBLISHED: [[f64; 7]; 6] = [
        [1e-3, 0.1, 0.0, -0.5, core::f64::consts::SQRT_2, -0.3535533905932738, 0.1767766952966369],
        [0.1, 0.1, -5.10976e-10, -5.1072e-7, 1.596, -2.62144, 20.48],
        [0.1, 0.1, 1.0, -0.01, 1.0, -0.01116034806779245, 160.64844617755097],
        [1e-3, 1e-3, 1.0, -0.9990000004999996, 0.5, 0.999002497998877, 1.5983912096429518e-5],
        [1e-3, 1e-3, 1.000040498774937, -0.9900495037254344, 0.07419870787308315, 0.9913848122425984, 0.23804138074689996],
        [1e-3, 1e-3, 1.000040498774937, -0.9989505537208148, 0.9258012921269169, 0.9913848122425984, 0.23804138074689996],
    ];

    #[test]
    fn parameters_starts_and_minimizers_are_the_published_ones() {
        assert_eq!(RayProblem::FIRST_STEPS, [1e-3, 1e-1, 1e1, 1e3]);
        for (ray, (number, row)) in more_thuente().iter().zip((1..).zip(PUBLISHED)) {
            let [
                mu,
                eta,
                value_at_0,
                slope_at_0,
                stationary,
                least,
                curvature,
            ] = row;
            assert_eq!(
                (ray.number(), ray.decrease(), ray.curvature()),
                (number, mu, eta)
            );
            let close = |found: f64, wanted: f64, allowed: f64| {
                assert!(
                    (found - wanted).abs() <= allowed,
                    "function {number}: {found} for {wanted}"
                );
            };
            let (value, slope) = ray.evaluate(0.0);
            close(value, value_at_0, 4.0 * f64::EPSILON * value_at_0.abs());
            // Function 3 takes 0.99 from 1.
            close(slope, slope_at_0, 1e-14 * slope_at_0.abs());
            assert_eq!(ray.minimizer(), stationary);
            let (value, slope) = ray.evaluate(stationary);
            close(value, least, 1e-14 * least.abs());
            // The minimizer is rounded, and so is the argument of the cosine of function 3 (61 radians).
            close(
                slope,
                0.0,
                2.0 * f64::EPSILON * (1.0 + curvature * stationary),
            );
            // phi'' by differences of the slope, extrapolated once; 1e-12: their rounding.
            let difference = |h: f64| {
                (ray.evaluate(stationary + h).1 - ray.evaluate(stationary - h).1) / (2.0 * h)
            };
            let h = 1e-3 * stationary;
            close(
                (4.0 * difference(0.5 * h) - difference(h)) / 3.0,
                curvature,
                1e-5 * curvature + 1e-12,
            );
        }
    }

    #[test]
    fn the_pieces_of_function_3_join() {
        let [_, _, ray, ..] = more_thuente();
        for joint in [0.99, 1.01] {
            let ((v1, s1), (v2, s2)) = (ray.evaluate(joint - 1e-9), ray.evaluate(joint + 1e-9));
            assert!((v1 - v2).abs() < 1e-8 && (s1 - s2).abs() < 1e-5);
        }
    }

    #[test]
    fn function_6_mirrors_function_5() {
        let [.., five, six] = more_thuente();
        for step in [0.0, 0.1, 0.37, 0.9, 1.0] {
            let ((v1, s1), (v2, s2)) = (five.evaluate(step), six.evaluate(1.0 - step));
            assert!((v1 - v2).abs() < 1e-15 && (s1 + s2).abs() < 1e-12);
        }
    }
}
