//! Shapes through what is known at two or three steps, on a unit interval.
//!
//! [`Span`] holds two steps with value and slope: 0 and 1 stand for the steps, slopes are multiplied by the width, and
//! values are measured from the one at 0. All formulas are then free of units. [`Quintic`] adds a third step.

use super::interpolation::Point;
use crate::Real;

/// Two steps with value and slope.
///
/// While `slope < rise < end_slope` the data are convex, and [`lean`](Span::lean) says on which side the curvature lies.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Span<T> {
    /// Slope at 0.
    pub(super) slope: T,
    /// Value at 1 less value at 0: the slope of the chord.
    pub(super) rise: T,
    /// Slope at 1.
    pub(super) end_slope: T,
}

/// Below this lean the power shape stands in for the rational one. The two agree at 1; a pole only 1 / (1 - lean) away
/// is not assumed below it. Anything from 0.55 to 0.8 serves (measured, see `ThreePoint`).
const POWER_BELOW: f64 = 0.7;
/// Halvings of the exponent in [`power`]: its error is then below 1% over the whole range of doubles.
const HALVINGS: u32 = 16;
/// Iterations of the safeguarded Newton method: enough to halve a unit interval down to rounding on its own.
const ITERATIONS: u32 = 52;

impl<T: Real> Span<T> {
    /// From `a` to `b`, with `tilt` taken off every slope.
    pub(super) fn new(a: &Point<T>, b: &Point<T>, tilt: T) -> Self {
        let width = b.step - a.step;
        Span {
            slope: (a.slope - tilt) * width,
            rise: b.value - a.value - tilt * width,
            end_slope: (b.slope - tilt) * width,
        }
    }

    pub(super) fn is_convex(&self) -> bool {
        self.slope < self.rise && self.rise < self.end_slope
    }

    /// 1 for a parabola, below 1 where the curvature lies toward 1, above 1 where it lies toward 0.
    fn lean(&self) -> T {
        (self.rise - self.slope) / (self.end_slope - self.rise)
    }

    /// Where the tangents at both ends meet. A convex function has no point below them, so a kink lies here.
    pub(super) fn crossing(&self) -> T {
        (self.rise - self.end_slope) / (self.slope - self.end_slope)
    }

    /// Where the straight line through the slopes vanishes, with the slope at 1 taken as rising.
    pub(super) fn line(&self) -> T {
        -self.slope / (self.end_slope.abs() - self.slope)
    }

    /// Minimizer of a shape through both ends, inside or beyond 1; may lie elsewhere or be NaN where it has none.
    ///
    /// The power for convex data that lean far to 1, the rational function for other convex data, the cubic for the rest.
    pub(super) fn minimizer(&self) -> T {
        if !self.is_convex() {
            self.cubic()
        } else if self.lean() < T::of(POWER_BELOW) {
            self.power()
        } else {
            self.rational()
        }
    }

    /// The cubic `slope t + b t^2 + a t^3`, as `(a, b)`.
    fn coefficients(&self) -> (T, T) {
        let Span {
            slope,
            rise,
            end_slope,
        } = *self;
        let twice = rise + rise;
        (
            slope + end_slope - twice,
            twice + rise - slope - slope - end_slope,
        )
    }

    /// The same with its largest number at 1, so that products neither overflow nor vanish.
    fn of_unit_size(&self) -> Self {
        let size = self
            .slope
            .abs()
            .max(self.rise.abs())
            .max(self.end_slope.abs());
        Span {
            slope: self.slope / size,
            rise: self.rise / size,
            end_slope: self.end_slope / size,
        }
    }

    /// Minimizer of the cubic (Nocedal & Wright, Numerical Optimization, 2nd ed. 2006, eq. 3.59, in powers of `t`).
    fn cubic(&self) -> T {
        let unit = self.of_unit_size();
        let (slope, (a, b)) = (unit.slope, unit.coefficients());
        let three = T::of(3.0);
        let root = (b * b - three * a * slope).sqrt();
        if b > T::zero() {
            -slope / (b + root) // the same root written without cancellation
        } else {
            (root - b) / (three * a)
        }
    }

    /// Minimizer of `(slope t + c t^2) / (1 + d t)`, the hyperbola through both ends: convex on convex data, with a pole
    /// beyond 1 where the lean is below 1, as a barrier has, and an asymptote where it is above 1, as beside a kink.
    ///
    /// The interpolant is the rational quadratic of R. Delbourgo & J. A. Gregory, "Shape preserving piecewise rational
    /// interpolation", SIAM J. Sci. Stat. Comput. 6 (1985) 967-976, doi:10.1137/0906065. Its derivative vanishes at
    /// `-slope (end - rise) / (q (q + rise - slope))` with `q^2 = rise^2 - slope end`.
    fn rational(&self) -> T {
        let Span {
            slope,
            rise,
            end_slope: end,
        } = self.of_unit_size();
        let q = (rise * rise - slope * end).sqrt();
        -slope * (end - rise) / (q * (q + rise - slope))
    }

    /// Minimizer of `slope t + c t^n`, whose slope is a power between both ends: `r^lean` with `r` the zero of the
    /// straight line through the slopes. Measured: it needs one trial where interpolation by polynomials creeps down
    /// from far beyond the minimizer of a steep function.
    fn power(&self) -> T {
        power(-self.slope / (self.end_slope - self.slope), self.lean())
    }
}

/// `base^exponent` for `0 <= exponent < 1` by square roots, so that it is the same on every machine.
fn power<T: Real>(base: T, exponent: T) -> T {
    let (mut root, mut left, mut product) = (base, exponent, T::one());
    for _ in 0..HALVINGS {
        root = root.sqrt();
        left = left + left;
        if left >= T::one() {
            left = left - T::one();
            product = product * root;
        }
    }
    product
}

/// The polynomial of degree 5 through value and slope at 0, 1 and a third place: the cubic plus
/// `t^2 (1 - t)^2 (c + e t)`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Quintic<T> {
    span: Span<T>,
    c: T,
    e: T,
}

impl<T: Real> Quintic<T> {
    /// Through both ends of `span`, which begins at `origin` and is `width` wide, and through `third`, which lies at
    /// neither; with `tilt` taken off every slope.
    pub(super) fn new(
        span: Span<T>,
        origin: &Point<T>,
        third: &Point<T>,
        width: T,
        tilt: T,
    ) -> Self {
        let along = third.step - origin.step;
        let place = along / width;
        let value = third.value - origin.value - tilt * along;
        let slope = (third.slope - tilt) * width;
        let zero = T::zero();
        let cubic = Quintic {
            span,
            c: zero,
            e: zero,
        };
        let (a, b) = span.coefficients();
        let (bump, lean) = (place * (T::one() - place), T::one() - place - place);
        let at_place = (value - place * (span.slope + place * (b + place * a))) / (bump * bump);
        let left = slope - cubic.slope_at(place) - (lean + lean) * bump * at_place;
        let e = left / (bump * bump);
        Quintic {
            span,
            c: at_place - e * place,
            e,
        }
    }

    fn slope_at(&self, t: T) -> T {
        let (a, b) = self.span.coefficients();
        let (bump, lean) = (t * (T::one() - t), T::one() - t - t);
        let factor = self.c + self.e * t;
        self.span.slope
            + t * (b + b + T::of(3.0) * a * t)
            + (lean + lean) * bump * factor
            + bump * bump * self.e
    }

    fn curvature_at(&self, t: T) -> T {
        let (a, b) = self.span.coefficients();
        let two = T::of(2.0);
        let (bump, lean) = (t * (T::one() - t), T::one() - t - t);
        let factor = self.c + self.e * t;
        two * b
            + T::of(6.0) * a * t
            + two * (lean * lean - two * bump) * factor
            + T::of(4.0) * bump * lean * self.e
    }

    /// A place between `low` and `high` where the slope turns from negative to positive; near one of the two, or NaN,
    /// where there is none.
    pub(super) fn turn_within(&self, mut low: T, mut high: T) -> T {
        let middle = |low: T, high: T| low + T::of(0.5) * (high - low);
        let mut t = middle(low, high);
        for _ in 0..ITERATIONS {
            let (slope, curvature) = (self.slope_at(t), self.curvature_at(t));
            if slope < T::zero() {
                low = t;
            } else if slope >= T::zero() {
                high = t;
            } else {
                return slope; // NaN: the third place is one of the ends
            }
            let newton = t - slope / curvature;
            let next = if curvature > T::zero() && newton > low && newton < high {
                newton
            } else {
                middle(low, high)
            };
            if (next - t).abs() <= T::of(4.0) * T::epsilon() * t.abs() {
                return next;
            }
            t = next;
        }
        t
    }

    /// How far beyond 1 the slope first turns from negative to positive, as a march outward in growing strides sees it;
    /// none within `reach`.
    pub(super) fn turn_beyond(&self, reach: T) -> Option<T> {
        let mut low = T::one();
        let mut stride = T::of(0.25);
        while stride <= reach {
            let high = T::one() + stride;
            if self.slope_at(high) > T::zero() {
                return Some(self.turn_within(low, high) - T::one());
            }
            low = high;
            stride = T::of(1.5) * stride;
        }
        None
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use approx::assert_relative_eq;

    fn span(slope: f64, rise: f64, end_slope: f64) -> Span<f64> {
        Span {
            slope,
            rise,
            end_slope,
        }
    }

    /// `t^5 - 2 t^4 + t^2 - t`, whose slope vanishes once beyond 0.
    fn at(t: f64) -> Point<f64> {
        Point {
            step: t,
            value: t.powi(5) - 2.0 * t.powi(4) + t * t - t,
            slope: 5.0 * t.powi(4) - 8.0 * t.powi(3) + 2.0 * t - 1.0,
        }
    }

    #[test]
    fn a_parabola_is_common_to_all_convex_shapes() {
        // (t - 0.3)^2 / 2
        let parabola = span(-0.3, 0.2, 0.7);
        assert_relative_eq!(parabola.rational(), 0.3, max_relative = 1e-14);
        assert_relative_eq!(parabola.cubic(), 0.3, max_relative = 1e-14);
        assert_relative_eq!(parabola.line(), 0.3, max_relative = 1e-14);
        let nearly = span(-0.3, 0.2 - 1e-9, 0.7);
        assert_relative_eq!(nearly.power(), 0.3, max_relative = 1e-4);
    }

    #[test]
    fn hyperbolas_are_recovered_with_pole_or_asymptote() {
        // (-t + c t^2) / (1 + d t): the slope vanishes at 1 / (c + sqrt(c (c + d))).
        for (c, d) in [(0.8, -0.2), (3.0, 2.0), (40.0, 90.0)] {
            let rise = (c - 1.0) / (1.0 + d);
            let end_slope = (2.0 * c - 1.0 + c * d) / ((1.0 + d) * (1.0 + d));
            let hyperbola = span(-1.0, rise, end_slope);
            assert!(hyperbola.is_convex());
            let want = 1.0 / (c + f64::sqrt(c * (c + d)));
            assert_relative_eq!(hyperbola.minimizer(), want, max_relative = 1e-12);
        }
    }

    #[test]
    fn powers_are_recovered_as_far_as_the_exponent_is_read() {
        // -t + c t^n: the slope vanishes at (1 / (n c))^(1 / (n - 1)).
        for (c, n) in [(5.0, 3.0), (1e6, 4.0), (1e30, 9.0)] {
            let steep = span(-1.0, c - 1.0, n * c - 1.0);
            let want = f64::powf(1.0 / (n * c), 1.0 / (n - 1.0));
            assert_relative_eq!(steep.minimizer(), want, max_relative = 2e-3);
        }
    }

    #[test]
    fn data_that_are_not_convex_get_the_cubic() {
        // -t + 4 t^2 - 2.5 t^3
        let bent = span(-1.0, 0.5, -0.5);
        assert!(!bent.is_convex());
        assert_relative_eq!(
            bent.minimizer(),
            (8.0 - f64::sqrt(34.0)) / 15.0,
            max_relative = 1e-14
        );
    }

    #[test]
    fn tangents_meet_at_a_kink() {
        // max(-t, 3 (t - 0.2) - 0.2)
        assert_relative_eq!(span(-1.0, 2.2, 3.0).crossing(), 0.2, max_relative = 1e-14);
    }

    #[test]
    fn sizes_near_the_end_of_the_range_do_no_harm() {
        for scale in [1e-200, 1.0, 1e200] {
            let lopsided = span(-scale, 5e9 * scale, 6e9 * scale);
            assert_relative_eq!(
                lopsided.minimizer(),
                span(-1.0, 5e9, 6e9).minimizer(),
                max_relative = 1e-14
            );
        }
    }

    #[test]
    fn quintics_are_recovered_from_any_third_place() {
        let slope = |t: f64| at(t).slope;
        for (a, b, third) in [
            (0.2, 2.0, 0.0),
            (0.2, 2.0, 1.1),
            (0.5, 1.8, 3.0),
            (1.0, 1.7, -2.0),
        ] {
            let (a, b, third) = (at(a), at(b), at(third));
            let width = b.step - a.step;
            let quintic = Quintic::new(Span::new(&a, &b, 0.0), &a, &third, width, 0.0);
            let turn = a.step + width * quintic.turn_within(0.0, 1.0);
            assert!(slope(turn).abs() < 1e-10, "{turn}: {}", slope(turn));
        }
    }

    #[test]
    fn quintics_are_followed_outward_as_far_as_told() {
        let (a, b, third) = (at(0.1), at(0.3), at(0.0));
        let width = b.step - a.step;
        let quintic = Quintic::new(Span::new(&a, &b, 0.0), &a, &third, width, 0.0);
        let ahead = quintic.turn_beyond(100.0).expect("it turns near 1.5");
        assert!(at(b.step + width * ahead).slope.abs() < 1e-9);
        assert_eq!(quintic.turn_beyond(2.0), None);
    }

    #[test]
    fn a_third_place_at_an_end_gives_no_turn() {
        let (a, b) = (at(0.2), at(2.0));
        let quintic = Quintic::new(Span::new(&a, &b, 0.0), &a, &a, 1.8, 0.0);
        assert!(quintic.turn_within(0.0, 1.0).is_nan());
    }
}
