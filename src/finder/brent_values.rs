//! Brent's minimisation by values.

use super::golden_section::{At, Bracket, ExactStepError, MOST, at, checked, smaller_part};
use super::{Proposal, StepFinder};
use crate::{Ray, Real, Side, Trial};

/// Minimises along the ray by Brent's method: parabolas through the three lowest trials, golden section where those do not
/// close in. Values only.
///
/// The bracket is found as by [`GoldenSection`](super::GoldenSection). The search goes on until both ends of the bracket
/// are at most `tolerance` times the lowest step away from that; on a ray with a single minimizer it is then within that
/// distance, on others near some local one. On the 4,000 random rays of `tests/exact_steps.rs` that took 17 trials a ray,
/// and golden section 44.
///
/// It goes on after acceptances, and the lowest accepted trial is the result. The rule's sides are not read, so it is
/// exempt from the guard of the search, and the guarantees there are not its own: where the minimizer that it finds is
/// not acceptable, the search ends with [`Ending::FinderSpent`](crate::Ending::FinderSpent). The slope at the start serves
/// only to give up where `a |phi'(0)|` drowns in the rounding of `phi(0)`; it may be missing.
///
/// Values resolve a minimizer to the square root of the rounding unit at best: for narrow sets of acceptable steps use
/// [`BrentSlopes`](super::BrentSlopes).
///
/// Source: R. P. Brent, Algorithms for Minimization Without Derivatives, 1973, chapter 5. Numbered deviations:
/// 1. it starts from the three trials of the bracket, so that the first step may be a parabola's;
/// 2. the tolerance is half of `tolerance x`, with no absolute part: step 0 is never the answer, and so nothing depends
///    on the units of the step;
/// 3. a trial that is not where it was asked for is taken in like any other; if it lies before that step, the bracket
///    ends there.
///
/// ```
/// use surefoot::{Ray, StepSearch, acceptance::SufficientDecrease, finder::BrentValues};
/// let mut search = StepSearch::new(BrentValues::default(), SufficientDecrease::default());
/// let found = search.along(Ray::new(1.0, -2.0), 0.1, |a: f64| a.exp() - 3.0 * a)?;
/// assert!((found.outcome.accepted().unwrap().step - 3.0_f64.ln()).abs() < 3e-8);
/// # Ok::<(), surefoot::SearchError<std::convert::Infallible>>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BrentValues<T = f64> {
    tolerance: T,
    start: T,
    phase: Phase<T>,
    asked: T,
    trials: u32,
}

#[derive(Clone, Copy, Debug, PartialEq)]
enum Phase<T> {
    Bracketing(Bracket<T>),
    Closing(Closing<T>),
}

/// The variables of Brent's procedure, by his names.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Closing<T> {
    /// The ends of the bracket.
    a: T,
    b: T,
    /// The lowest trial, the second lowest, and the one that was second lowest before.
    x: At<T>,
    w: At<T>,
    v: At<T>,
    /// The last advance, and the one before it.
    d: T,
    e: T,
}

impl<T: Real> BrentValues<T> {
    /// With the tolerance on the step relative to it, `4 e <= tolerance < 1` with the machine epsilon `e` of the type.
    ///
    /// # Errors
    /// [`ExactStepError`] outside of that range, and for NaN.
    pub fn new(tolerance: T) -> Result<Self, ExactStepError> {
        checked(tolerance).map(Self::with)
    }

    fn with(tolerance: T) -> Self {
        BrentValues {
            tolerance,
            start: T::zero(),
            phase: Phase::Bracketing(Bracket::new(T::zero())),
            asked: T::zero(),
            trials: 0,
        }
    }

    fn advance(&mut self, ray: &Ray<T>, trial: &Trial<T>) -> Proposal<T> {
        self.trials += 1;
        match self.following(ray, at(trial)) {
            Some(step) if self.trials < MOST && step != trial.step => {
                self.asked = step;
                Proposal::Try(step)
            }
            _ => Proposal::Spent,
        }
    }

    fn following(&mut self, ray: &Ray<T>, here: At<T>) -> Option<T> {
        if let Phase::Closing(closing) = &mut self.phase {
            if here.step < self.asked && self.asked <= closing.x.step {
                // The domain has a hole: begin again below it.
                self.phase = Phase::Bracketing(Bracket::new(self.start));
            } else {
                let forbidden = here.step < self.asked && closing.forbid(self.asked);
                if !closing.take(here) && !forbidden {
                    return None;
                }
                return closing.next(self.tolerance);
            }
        }
        if let Phase::Bracketing(bracket) = &mut self.phase {
            if !bracket.take(self.asked, here) {
                return None;
            }
            if let (left, Some(middle), Some(right)) = (bracket.left, bracket.middle, bracket.right)
            {
                let mut closing = Closing::new(left, middle, right);
                let step = closing.next(self.tolerance);
                self.phase = Phase::Closing(closing);
                return step;
            }
            return bracket.next(ray);
        }
        None
    }
}

impl<T: Real> Closing<T> {
    fn new(left: At<T>, middle: At<T>, right: At<T>) -> Self {
        let (w, v) = if left.value < right.value {
            (left, right)
        } else {
            (right, left)
        };
        let width = right.step - left.step;
        Closing {
            a: left.step,
            b: right.step,
            x: middle,
            w,
            v,
            d: width,
            e: width,
        }
    }

    fn contains(&self, step: T) -> bool {
        step > self.a && step < self.b
    }

    fn forbid(&mut self, asked: T) -> bool {
        let cuts = self.contains(asked);
        if cuts {
            self.b = asked;
        }
        cuts
    }

    /// Takes in a trial; false if it taught nothing.
    fn take(&mut self, u: At<T>) -> bool {
        let x = self.x;
        if !self.contains(u.step) || u.step == x.step {
            return false;
        }
        if u.value <= x.value {
            if u.step < x.step {
                self.b = x.step;
            } else {
                self.a = x.step;
            }
            (self.v, self.w, self.x) = (self.w, x, u);
        } else {
            if u.step < x.step {
                self.a = u.step;
            } else {
                self.b = u.step;
            }
            if u.value <= self.w.value || self.w.step == x.step {
                (self.v, self.w) = (self.w, u);
            } else if u.value <= self.v.value || self.v.step == x.step || self.v.step == self.w.step
            {
                self.v = u;
            }
        }
        true
    }

    /// The next step; `None` at the end.
    fn next(&mut self, tolerance: T) -> Option<T> {
        let half = T::of(0.5);
        let (a, b, x) = (self.a, self.b, self.x.step);
        let middle = a + half * (b - a);
        let least = half * tolerance * x;
        let twice = least + least;
        if (b - x).max(x - a) <= twice {
            return None;
        }
        let before = self.e;
        self.e = self.d;
        match self.parabola() {
            Some(d)
                if before.abs() > least
                    && d.abs() < half * before.abs()
                    && self.contains(x + d) =>
            {
                self.d = d;
                let u = x + d;
                if u - a < twice || b - u < twice {
                    self.d = if x < middle { least } else { -least };
                }
            }
            _ => {
                self.e = if x < middle { b - x } else { a - x };
                self.d = smaller_part::<T>() * self.e;
            }
        }
        let d = if self.d.abs() >= least {
            self.d
        } else if self.d > T::zero() {
            least
        } else {
            -least
        };
        let u = x + d;
        (self.contains(u) && u != x).then_some(u)
    }

    /// From `x` to the vertex of the parabola through `x`, `w` and `v`; NaN or infinite values have none.
    fn parabola(&self) -> Option<T> {
        let (x, w, v) = (self.x, self.w, self.v);
        let (s, t) = (x.step - w.step, x.step - v.step);
        // Brent's p / q, both divided by s t, so that no product overflows: mean slopes in place of values.
        let (from_w, from_v) = ((x.value - w.value) / s, (x.value - v.value) / t);
        let d = -(T::of(0.5) * (t * from_w - s * from_v) / (from_w - from_v));
        d.is_finite().then_some(d)
    }
}

impl<T: Real> Default for BrentValues<T> {
    /// `tolerance` = the square root of the machine epsilon: 1.5e-8 in double, 3.5e-4 in single precision (Brent 1973,
    /// section 5.2: much less is of no use).
    fn default() -> Self {
        Self::with(T::epsilon().sqrt())
    }
}

impl<T: Real> StepFinder<T> for BrentValues<T> {
    fn begin(&mut self, ray: &Ray<T>, first: T) -> T {
        *self = BrentValues {
            start: ray.value,
            phase: Phase::Bracketing(Bracket::new(ray.value)),
            asked: first,
            ..Self::with(self.tolerance)
        };
        first
    }

    fn next(&mut self, ray: &Ray<T>, refused: &Trial<T>, _: Side) -> Proposal<T> {
        self.advance(ray, refused)
    }

    fn polish(&mut self, ray: &Ray<T>, accepted: &Trial<T>) -> Proposal<T> {
        self.advance(ray, accepted)
    }

    fn wants_guard(&self) -> bool {
        false
    }
}
