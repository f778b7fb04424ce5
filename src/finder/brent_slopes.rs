//! Brent's zero finder on the slope.

use super::golden_section::{ExactStepError, MOST, checked};
use super::interpolation::{Point, secant};
use super::{Proposal, StepFinder};
use crate::{Ray, Real, Side, Trial};

/// Minimises along the ray by Brent's zero finder on the slope: inverse quadratic interpolation and secants, halving where
/// those do not close in.
///
/// Grows steps until the slope turns positive or the value lies above `phi(0)`; where it lies above and the slope is not
/// positive, halves until the bracket has `phi' < 0` and `phi <= phi(0)` on its left, `phi' > 0` on its right; then closes in
/// on a zero of the slope. Ends when the bracket is at most `tolerance` times its best step wide, or at an accepted step
/// with `|phi'(a)| <= tolerance |phi'(0)|`. Slopes resolve a minimizer to about the rounding unit, values only to its
/// square root.
///
/// It goes on after acceptances, and the lowest accepted trial is the result. The rule's sides are not read, so it is
/// exempt from the guard of the search, and the guarantees there are not its own: where the minimizer that it finds is
/// not acceptable, the search ends with [`Ending::FinderSpent`](crate::Ending::FinderSpent). Of accepted trials that
/// differ by rounding alone, the lowest need not be the one with the least slope. A trial without a
/// slope ends the search.
///
/// Source: R. P. Brent, Algorithms for Minimization Without Derivatives, 1973, chapter 4. Numbered deviations:
/// 1. the bracket is found first: the next step is the zero of the secant of the last two slopes, kept between 1.1 and 4
///    times the last advance beyond it (the factors of Moré & Thuente 1994, section 4);
/// 2. a trial inside the bracket whose value lies above `phi(0)` and whose slope is not positive becomes its right end, and
///    the bracket is halved until the slope there is positive: the zero found is then not that of a higher valley;
/// 3. his tolerance is half of `tolerance a`, with no absolute part: nothing depends on the units of the step;
/// 4. after a trial that is not where it was asked for, he starts again from the bracket as it is then; if it lies
///    before that step, the bracket ends there.
///
/// ```
/// use surefoot::{Ray, StepSearch, acceptance::StrongWolfe, finder::BrentSlopes};
/// let mut search = StepSearch::new(BrentSlopes::new(1e-14)?, StrongWolfe::new(1e-4, 0.1)?);
/// let found = search.along(Ray::new(1.0, -2.0), 0.1, |a: f64| (a.exp() - 3.0 * a, a.exp() - 3.0))?;
/// assert!((found.outcome.accepted().unwrap().step - 3.0_f64.ln()).abs() < 3e-8);
/// let last = search.log().iter().last().unwrap();
/// assert!((last.trial.step - 3.0_f64.ln()).abs() < 1e-14);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BrentSlopes<T = f64> {
    tolerance: T,
    /// A negative slope, and a value not above `phi(0)`.
    left: Point<T>,
    right: Right<T>,
    /// While closing in from a bracket with slopes of opposite sign.
    zero: Option<Zero<T>>,
    asked: T,
    trials: u32,
}

/// The right end of the bracket.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Right<T> {
    Unknown,
    /// The slope there is positive.
    Rising(Point<T>),
    /// The value lies above `phi(0)` and the slope is not positive; or the step is not to be had.
    Hill(T),
}

/// The variables of Brent's procedure, by his names: `b` is the best, `c` the other end, `a` the `b` before.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Zero<T> {
    a: Point<T>,
    b: Point<T>,
    c: Point<T>,
    /// The last advance, and the one before it.
    d: T,
    e: T,
}

impl<T: Real> BrentSlopes<T> {
    /// With the tolerance on the step relative to it and on the slope relative to that at the start, `4 e <= tolerance < 1`
    /// with the machine epsilon `e` of the type.
    ///
    /// # Errors
    /// [`ExactStepError`] outside of that range, and for NaN.
    pub fn new(tolerance: T) -> Result<Self, ExactStepError> {
        checked(tolerance).map(Self::with)
    }

    fn with(tolerance: T) -> Self {
        let origin = Point {
            step: T::zero(),
            value: T::zero(),
            slope: T::zero(),
        };
        BrentSlopes {
            tolerance,
            left: origin,
            right: Right::Unknown,
            zero: None,
            asked: T::zero(),
            trials: 0,
        }
    }

    fn advance(&mut self, ray: &Ray<T>, trial: &Trial<T>) -> Proposal<T> {
        self.trials += 1;
        let Some(slope) = trial.slope else {
            return Proposal::Spent;
        };
        let here = Point {
            step: trial.step,
            value: trial.value,
            slope,
        };
        match self.following(ray, here) {
            Some(step) if self.trials < MOST && step != here.step => {
                self.asked = step;
                Proposal::Try(step)
            }
            _ => Proposal::Spent,
        }
    }

    fn following(&mut self, ray: &Ray<T>, here: Point<T>) -> Option<T> {
        if here.step != self.asked {
            self.zero = None;
            if !self.rearrange(here.step) {
                return None;
            }
        }
        let before = self.left;
        if self.contains(here.step) {
            if here.slope > T::zero() {
                self.right = Right::Rising(here);
            } else if here.value > ceiling(ray) {
                self.right = Right::Hill(here.step);
                self.zero = None;
            } else {
                self.left = here;
            }
        }
        let left = self.left;
        match (self.right, self.zero.as_mut()) {
            (Right::Unknown, _) => Some(self.grown(&before)),
            (Right::Rising(_), Some(zero)) => {
                zero.take(here);
                zero.next(self.tolerance)
            }
            (Right::Rising(right), None) if left.slope < T::zero() => {
                let mut zero = Zero::new(left, right);
                let step = zero.next(self.tolerance);
                self.zero = Some(zero);
                step
            }
            // No slope at the start, or none at the left end
            (Right::Rising(right), None) => self.halved(right.step),
            (Right::Hill(right), _) => self.halved(right),
        }
    }

    /// After a trial that was not where it was asked for; false if that leaves nothing to go on with.
    fn rearrange(&mut self, here: T) -> bool {
        let forbidden = here < self.asked && !self.is_at_or_beyond_right(self.asked);
        if forbidden {
            self.right = Right::Hill(self.asked);
        }
        forbidden || self.contains(here)
    }

    fn is_at_or_beyond_right(&self, step: T) -> bool {
        match self.right {
            Right::Unknown => false,
            Right::Rising(Point { step: right, .. }) | Right::Hill(right) => step >= right,
        }
    }

    fn contains(&self, step: T) -> bool {
        step > self.left.step && !self.is_at_or_beyond_right(step)
    }

    fn grown(&self, before: &Point<T>) -> T {
        let here = &self.left;
        let advance = here.step - before.step;
        let least = here.step + T::of(1.1) * advance;
        let most = here.step + T::of(4.0) * advance;
        let found = secant(before, here);
        if found > here.step && found < least {
            least
        } else if found > here.step && found < most {
            found
        } else {
            most
        }
    }

    fn halved(&self, right: T) -> Option<T> {
        let left = self.left.step;
        let step = left + T::of(0.5) * (right - left);
        let wide = right - left > self.tolerance * right;
        (wide && left < step && step < right).then_some(step)
    }
}

impl<T: Real> Zero<T> {
    fn new(left: Point<T>, right: Point<T>) -> Self {
        let width = right.step - left.step;
        Zero {
            a: left,
            b: right,
            c: left,
            d: width,
            e: width,
        }
    }

    fn take(&mut self, here: Point<T>) {
        self.a = self.b;
        self.b = here;
    }

    /// The next step; `None` at the end.
    fn next(&mut self, tolerance: T) -> Option<T> {
        let (zero, half, one, two, three) =
            (T::zero(), T::of(0.5), T::one(), T::of(2.0), T::of(3.0));
        if (self.b.slope > zero) == (self.c.slope > zero) {
            self.c = self.a;
            self.d = self.b.step - self.a.step;
            self.e = self.d;
        }
        if self.c.slope.abs() < self.b.slope.abs() {
            (self.a, self.b, self.c) = (self.b, self.c, self.b);
        }
        let (a, b, c) = (self.a, self.b, self.c);
        let least = half * tolerance * b.step;
        let m = half * (c.step - b.step);
        if m.abs() <= least || b.slope == zero {
            return None;
        }
        if self.e.abs() < least || a.slope.abs() <= b.slope.abs() {
            (self.d, self.e) = (m, m);
        } else {
            let s = b.slope / a.slope;
            let (p, q) = if a.step == c.step {
                (two * m * s, one - s)
            } else {
                let (q, r) = (a.slope / c.slope, b.slope / c.slope);
                let p = s * (two * m * q * (q - r) - (b.step - a.step) * (r - one));
                (p, (q - one) * (r - one) * (s - one))
            };
            let (p, q) = if p > zero { (p, -q) } else { (-p, q) };
            let before = self.e;
            self.e = self.d;
            if two * p < three * m * q - (least * q).abs() && p < (half * before * q).abs() {
                self.d = p / q;
            } else {
                (self.d, self.e) = (m, m);
            }
        }
        let d = if self.d.abs() > least {
            self.d
        } else if m > zero {
            least
        } else {
            -least
        };
        let step = b.step + d;
        let (low, high) = (b.step.min(c.step), b.step.max(c.step));
        (low < step && step < high).then_some(step)
    }
}

impl<T: Real> Default for BrentSlopes<T> {
    /// `tolerance` = the square root of the machine epsilon: 1.5e-8 in double, 3.5e-4 in single precision. A step so near
    /// the minimizer changes the value by the rounding unit times the decrease.
    fn default() -> Self {
        Self::with(T::epsilon().sqrt())
    }
}

impl<T: Real> StepFinder<T> for BrentSlopes<T> {
    fn begin(&mut self, ray: &Ray<T>, first: T) -> T {
        *self = BrentSlopes {
            left: start(ray),
            asked: first,
            ..Self::with(self.tolerance)
        };
        first
    }

    fn next(&mut self, ray: &Ray<T>, refused: &Trial<T>, _: Side) -> Proposal<T> {
        self.advance(ray, refused)
    }

    fn polish(&mut self, ray: &Ray<T>, accepted: &Trial<T>) -> Proposal<T> {
        let small = self.tolerance * ray.slope.abs();
        let flat = accepted.slope.is_some_and(|slope| slope.abs() <= small);
        if flat && accepted.value <= ceiling(ray) {
            return Proposal::Spent;
        }
        self.advance(ray, accepted)
    }

    fn wants_slope(&self) -> bool {
        true
    }

    fn wants_guard(&self) -> bool {
        false
    }
}

fn start<T: Real>(ray: &Ray<T>) -> Point<T> {
    Point {
        step: T::zero(),
        value: ray.value,
        slope: ray.slope,
    }
}

/// A value above this lies above `phi(0)` for certain: by more than the slack, the noise, or the rounding of both values.
fn ceiling<T: Real>(ray: &Ray<T>) -> T {
    let two = T::of(2.0);
    let slack = ray.slack.unwrap_or_else(T::zero);
    ray.value
        + slack
            .max(two * ray.value_noise)
            .max(two * T::epsilon() * ray.value.abs())
}
