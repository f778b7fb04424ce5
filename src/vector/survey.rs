//! [`Survey`]: what one look at a new gradient tells.

use super::Vector;
use crate::Real;

/// What one look at a new gradient `g` tells, beside the gradient `old` at the point before and the direction `d` of the move
/// between; `y = g - old`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Survey<T> {
    /// `g.d`: the slope along the direction.
    pub slope: T,
    /// The largest magnitude in `g`; NaN if any component is NaN.
    pub max_abs: T,
    /// `g.g`.
    pub square: T,
    /// `y.g`.
    pub change_gradient: T,
    /// `y.y`.
    pub change_square: T,
    /// `y.d`.
    pub change_slope: T,
    /// `d.d`.
    pub direction_square: T,
}

impl<T: Real> Survey<T> {
    /// Slope and largest magnitude alone, for directions that read no more; the other numbers are NaN.
    pub fn slope_alone<V: Vector<Scalar = T>>(g: &V, d: &V) -> Self {
        Survey {
            slope: g.dot(d),
            max_abs: g.max_abs(),
            ..Survey::unknown()
        }
    }

    /// All NaN.
    pub(crate) fn unknown() -> Self {
        Survey {
            slope: T::nan(),
            max_abs: T::nan(),
            square: T::nan(),
            change_gradient: T::nan(),
            change_square: T::nan(),
            change_slope: T::nan(),
            direction_square: T::nan(),
        }
    }

    /// From inner products of the three vectors. Where the gradient changed little, `y.g` and `y.y` are small differences of
    /// large numbers: see [`change_is_sure`](Survey::change_is_sure).
    pub fn of<V: Vector<Scalar = T>>(g: &V, old: &V, d: &V) -> Self {
        let (slope, square, mixed) = (g.dot(d), g.dot(g), g.dot(old));
        Survey {
            slope,
            max_abs: g.max_abs(),
            square,
            change_gradient: square - mixed,
            change_square: (square - mixed) + (old.dot(old) - mixed),
            change_slope: slope - old.dot(d),
            direction_square: d.dot(d),
        }
    }

    /// Whether the change of the gradient is large enough beside the gradient that differences of inner products tell it:
    /// `y.y > sqrt(eps) g.g`, so that `h.g - h.old` is off by at most about `eps |g| / |y| < eps^(3/4)` of `|h| |y|`, for any `h`
    /// (rounding analysis of first order).
    pub fn change_is_sure(&self) -> bool {
        self.change_square > T::epsilon().sqrt() * self.square
    }

    /// The numbers of the change again, from `y` itself.
    #[must_use]
    pub fn with_change<V: Vector<Scalar = T>>(self, g: &V, y: &V, d: &V) -> Self {
        Survey {
            change_gradient: y.dot(g),
            change_square: y.dot(y),
            change_slope: y.dot(d),
            ..self
        }
    }
}
