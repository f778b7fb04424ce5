//! Minimizers of the parabola or cubic through what is known at one or two steps.
//!
//! Each function returns a number that may lie anywhere or be NaN when the interpolant has no minimizer; a finder
//! safeguards it.

use crate::Real;

/// A step with value and slope.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Point<T> {
    /// The step.
    pub step: T,
    /// The value there.
    pub value: T,
    /// The slope there.
    pub slope: T,
}

/// Minimizer of the cubic that matches value and slope at `a` and `b`; NaN if it has none.
///
/// Nocedal & Wright, Numerical Optimization, 2nd ed. 2006, eq. 3.59, with the square root scaled so that it does not
/// overflow.
///
/// ```
/// use surefoot::finder::interpolation::{Point, cubic};
/// // x^3 - 3 x: minimizer 1
/// let at = |x: f64| Point { step: x, value: x * x * x - 3.0 * x, slope: 3.0 * x * x - 3.0 };
/// assert!((cubic(&at(0.0), &at(3.0)) - 1.0).abs() < 1e-15);
/// ```
pub fn cubic<T: Real>(a: &Point<T>, b: &Point<T>) -> T {
    let three = T::of(3.0);
    let across = b.step - a.step;
    let theta = a.slope + b.slope - three * (b.value - a.value) / across;
    let size = theta.abs().max(a.slope.abs()).max(b.slope.abs());
    let (t, p, q) = (theta / size, a.slope / size, b.slope / size);
    let root = size * (t * t - p * q).sqrt();
    let root = if across < T::zero() { -root } else { root };
    let denominator = b.slope - a.slope + T::of(2.0) * root;
    b.step - across * ((b.slope + root - theta) / denominator)
}

/// Minimizer of the parabola that matches value and slope at `a` and the value at `b`.
///
/// Nocedal & Wright 2006, eq. 3.58, moved to an arbitrary first point.
pub fn quadratic<T: Real>(a: &Point<T>, b_step: T, b_value: T) -> T {
    let across = b_step - a.step;
    let rise = (b_value - a.value) / across; // mean slope
    a.step - T::of(0.5) * a.slope * across / (rise - a.slope)
}

/// Stationary point of the parabola that matches the slopes at `a` and `b`.
pub fn secant<T: Real>(a: &Point<T>, b: &Point<T>) -> T {
    b.step - (b.step - a.step) * (b.slope / (b.slope - a.slope))
}

/// Minimizer of the cubic that matches value and slope at 0 and the values at two further steps.
///
/// Nocedal & Wright 2006, section 3.5, the cubic after eq. 3.58.
pub fn cubic_by_values<T: Real>(start_value: T, start_slope: T, a: (T, T), b: (T, T)) -> T {
    // phi(x a) = value + slope a (x + q x^2 + k x^3): q and k are pure numbers, so no scale overflows.
    let left = |(step, value): (T, T)| (value - start_value) / step / start_slope - T::one();
    let (ra, rb) = (left(a), left(b)); // q + k at x = 1, q t + k t^2 at x = t
    let t = b.0 / a.0;
    let k = (rb / t - ra) / (t - T::one());
    let q = ra - k;
    let three = T::of(3.0);
    let root = (q * q - three * k).sqrt();
    if q < T::zero() {
        // The same root written without cancellation.
        a.0 / (root - q)
    } else {
        -a.0 * ((q + root) / (three * k))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use approx::assert_relative_eq;

    /// x^3 - 3x + 0.25 x^2, minimizer (sqrt(0.25 + 36) - 0.5) / 6.
    fn at(x: f64) -> Point<f64> {
        Point {
            step: x,
            value: x * x * x - 3.0 * x + 0.25 * x * x,
            slope: 3.0 * x * x - 3.0 + 0.5 * x,
        }
    }

    #[test]
    fn cubics_are_recovered_from_any_two_points_in_either_order() {
        let want = (36.25_f64.sqrt() - 0.5) / 6.0;
        for (a, b) in [(0.0, 2.0), (2.0, 0.0), (0.5, 0.75), (-0.3, 5.0)] {
            assert_relative_eq!(cubic(&at(a), &at(b)), want, max_relative = 1e-12);
        }
        for (a, b) in [(2.0, 1.0), (0.5, 3.0), (1.25, 1.0)] {
            let (pa, pb) = (at(a), at(b));
            let found = cubic_by_values(0.0, -3.0, (a, pa.value), (b, pb.value));
            assert_relative_eq!(found, want, max_relative = 1e-12);
        }
    }

    #[test]
    fn parabolas_are_recovered() {
        let at = |x: f64| Point {
            step: x,
            value: 2.0 * (x - 0.7) * (x - 0.7),
            slope: 4.0 * (x - 0.7),
        };
        assert_relative_eq!(
            quadratic(&at(0.1), 3.0, at(3.0).value),
            0.7,
            max_relative = 1e-14
        );
        assert_relative_eq!(secant(&at(0.1), &at(3.0)), 0.7, max_relative = 1e-14);
        // A cubic through a parabola: its leading coefficient is 0, which must not divide by 0.
        let found = cubic_by_values(0.98, -2.8, (1.0, at(1.0).value), (2.0, at(2.0).value));
        assert_relative_eq!(found, 0.7, max_relative = 1e-12);
    }
}
