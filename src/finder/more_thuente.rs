//! The method of Moré and Thuente.

use super::interpolation::{Point, cubic, quadratic, secant};
use super::{Proposal, StepFinder, without_slope};
use crate::{Ray, Real, Side, Trial};

/// Moré and Thuente's method with guaranteed sufficient decrease.
///
/// A first stage works on `psi(a) = phi(a) - phi(0) - c1 a phi'(0)` (through the modified updating) until a step with
/// `psi <= 0` and a slope of at least `c1 phi'(0)` was seen; then on `phi` itself. Trials come from four cases of cubic,
/// quadratic and secant interpolation, and a bracket that keeps more than 0.66 of its width over two trials is halved.
/// With the strong Wolfe rule on a continuously differentiable ray it finds an acceptable step or an end of the bounds
/// (theorems 2.1 and 3.3 of the paper).
///
/// Source: J. J. Moré & D. J. Thuente, "Line search algorithms with guaranteed sufficient decrease", ACM Trans. Math.
/// Software 20 (1994) 286-307, doi:10.1145/192115.192132. Numbered deviations:
/// 1. `c1` is the rule's own parameter; 1e-4 where the rule has none;
/// 2. the bounds on the step belong to the search, so the first two widths are unbounded;
/// 3. a trial without a slope is answered by half or twice its step.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MoreThuente<T = f64> {
    /// The end with the least value, and the other one.
    best: Point<T>,
    other: Point<T>,
    bracketed: bool,
    first_stage: bool,
    /// Where the next trial may lie.
    low: T,
    high: T,
    /// The last two widths of the bracket.
    widths: [T; 2],
}

impl<T: Real> MoreThuente<T> {
    /// Without parameters.
    pub fn new() -> Self {
        let zero = T::zero();
        let origin = Point {
            step: zero,
            value: zero,
            slope: zero,
        };
        MoreThuente {
            best: origin,
            other: origin,
            bracketed: false,
            first_stage: true,
            low: zero,
            high: zero,
            widths: [T::infinity(); 2],
        }
    }

    /// The four cases of section 4, and the update of the bracket (section 2, or section 3 when `tilt` is not 0).
    fn trial(&mut self, here: Point<T>, tilt: T) -> T {
        let tilted = |p: &Point<T>| Point {
            step: p.step,
            value: p.value - p.step * tilt,
            slope: p.slope - tilt,
        };
        let (l, u, t) = (tilted(&self.best), tilted(&self.other), tilted(&here));
        let turns = t.slope * l.slope.signum() < T::zero();
        let rightward = t.step > l.step;
        let end = if rightward { self.high } else { self.low };
        let next = if t.value > l.value {
            // Case 1: higher. The cubic, or its mean with the parabola where that is nearer to l.
            self.bracketed = true;
            let (c, q) = (cubic(&l, &t), quadratic(&l, t.step, t.value));
            if (c - l.step).abs() < (q - l.step).abs() {
                c
            } else {
                c + T::of(0.5) * (q - c)
            }
        } else if turns {
            // Case 2: lower, slopes of opposite sign. Whichever is farther from t.
            self.bracketed = true;
            let (c, s) = (cubic(&l, &t), secant(&l, &t));
            farther(&t, c, s)
        } else if t.slope.abs() < l.slope.abs() {
            // Case 3: lower, same sign, flatter. The cubic counts only where it rises beyond t.
            let c = beyond(&l, &t).unwrap_or(end);
            let s = secant(&l, &t);
            if self.bracketed {
                let nearer = if (c - t.step).abs() < (s - t.step).abs() {
                    c
                } else {
                    s
                };
                let limit = t.step + T::of(0.66) * (u.step - t.step);
                if rightward {
                    nearer.min(limit)
                } else {
                    nearer.max(limit)
                }
            } else {
                farther(&t, c, s).max(self.low).min(self.high)
            }
        } else if self.bracketed {
            // Case 4: lower, same sign, not flatter.
            cubic(&u, &t)
        } else {
            end
        };
        if t.value > l.value {
            self.other = here;
        } else {
            if turns {
                self.other = self.best;
            }
            self.best = here;
        }
        next
    }

    fn width(&self) -> T {
        (self.other.step - self.best.step).abs()
    }
}

/// Whichever of two candidates is farther from `t`.
fn farther<T: Real>(t: &Point<T>, c: T, s: T) -> T {
    if (c - t.step).abs() > (s - t.step).abs() {
        c
    } else {
        s
    }
}

/// The cubic's minimizer for case 3, where it exists and lies beyond `t` as seen from `l`; the paper's condition that
/// the cubic tends to infinity in the direction of the step.
fn beyond<T: Real>(l: &Point<T>, t: &Point<T>) -> Option<T> {
    let across = t.step - l.step;
    let theta = T::of(3.0) * (l.value - t.value) / across + l.slope + t.slope;
    let size = theta.abs().max(l.slope.abs()).max(t.slope.abs());
    let inside = (theta / size) * (theta / size) - (l.slope / size) * (t.slope / size);
    // Rounding may leave a double root slightly negative.
    let root = size * inside.max(T::zero()).sqrt();
    let root = if across > T::zero() { -root } else { root };
    let ratio = (root - t.slope + theta) / (root + (l.slope - t.slope) + root);
    (ratio < T::zero() && root != T::zero()).then(|| t.step - ratio * across)
}

impl<T: Real> Default for MoreThuente<T> {
    fn default() -> Self {
        Self::new()
    }
}

impl<T: Real> StepFinder<T> for MoreThuente<T> {
    fn begin(&mut self, ray: &Ray<T>, first: T) -> T {
        let start = Point {
            step: T::zero(),
            value: ray.value,
            slope: ray.slope,
        };
        *self = MoreThuente {
            best: start,
            other: start,
            high: first + T::of(4.0) * first,
            ..Self::new()
        };
        first
    }

    fn next(&mut self, ray: &Ray<T>, refused: &Trial<T>, side: Side) -> Proposal<T> {
        let Some(slope) = refused.slope else {
            return without_slope(refused, side);
        };
        let here = Point {
            step: refused.step,
            value: refused.value,
            slope,
        };
        let tilt = ray.decrease.unwrap_or_else(|| T::of(1e-4)) * ray.slope;
        let psi = here.value - ray.reference - here.step * tilt;
        if self.first_stage && psi <= T::zero() && slope >= tilt {
            self.first_stage = false;
        }
        // Section 4: psi predicts only where it decides, at a lower value without sufficient decrease.
        let modified = self.first_stage && here.value <= self.best.value && psi > T::zero();
        let mut step = self.trial(here, if modified { tilt } else { T::zero() });
        if self.bracketed {
            let width = self.width();
            if width >= T::of(0.66) * self.widths[0] {
                step = self.best.step + T::of(0.5) * (self.other.step - self.best.step);
            }
            self.widths = [self.widths[1], width];
            self.low = self.best.step.min(self.other.step);
            self.high = self.best.step.max(self.other.step);
        } else {
            let advance = step - self.best.step;
            self.low = step + T::of(1.1) * advance;
            self.high = step + T::of(4.0) * advance;
        }
        Proposal::Try(step)
    }

    fn wants_slope(&self) -> bool {
        true
    }
}
