//! The line search of Hager and Zhang.

use super::interpolation::{Point, secant};
use super::{Proposal, StepFinder, without_slope};
use crate::{Ray, Real, Side, Trial};

/// Hager and Zhang's search: a bracket kept by slopes, narrowed by two secant steps at a time.
///
/// The bracket `[a, b]` has `phi'(a) < 0`, `phi(a) <= phi(0) + eps` and `phi'(b) >= 0`. It is found by expansion (B0 to B3,
/// factor 5), updated by U0 to U3 (which halves until the three inequalities hold again), narrowed by the double secant
/// step S1 to S4, and halved (L2) where that kept more than 0.66 of its width. Values serve only to tell a descent from a
/// hill, so it also works where the decrease drowns in rounding: use it with
/// [`ApproximateWolfe`](crate::acceptance::ApproximateWolfe).
///
/// On a quadratic the first secant step is exact. Without parameters: `eps` is the ray's [`slack`](Ray::slack), and `1e-6
/// |phi(0)|` where it has none, the value of the paper.
///
/// Source: W. W. Hager & H. Zhang, "A new conjugate gradient method with guaranteed descent and an efficient line
/// search", SIAM J. Optim. 16 (2005) 170-192, doi:10.1137/030601880, section 4; the steps of the bracket and their factor
/// as in their ACM Trans. Math. Software 32 (2006) 113-137, doi:10.1145/1132973.1132979, section 3 (both recalled from
/// memory). Numbered deviations:
/// 1. whether a step is acceptable is the rule's to say;
/// 2. a step that the rule calls too long counts as too high where its slope is negative, so that both brackets, this
///    one and that of the verdicts, look to the same side;
/// 3. the halving of B2 begins at the last step of the expansion, not at 0;
/// 4. a trial that is not where it was asked for is taken as the `c` of the update under way; in the expansion, one
///    that lies to the left of `a` takes `a` back to 0;
/// 5. a trial without a slope is answered by half or twice its step.
///
/// ```
/// use surefoot::{Ray, StepSearch, acceptance::ApproximateWolfe, finder::HagerZhang};
/// // The values are 1 to the last digit: only slopes tell where the minimizer is, at 3e-9.
/// let drowned = |a: f64| (1.0 + 0.5 * (a - 3e-9) * (a - 3e-9), a - 3e-9);
/// let mut search = StepSearch::new(HagerZhang::new(), ApproximateWolfe::default());
/// let found = search.along(Ray::new(1.0, -3e-9).with_slack(1e-12), 1e-10, drowned)?;
/// assert!((found.outcome.accepted().unwrap().step - 3e-9).abs() < 0.9 * 3e-9);
/// # Ok::<(), surefoot::SearchError<std::convert::Infallible>>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct HagerZhang<T = f64> {
    /// `phi'(a) < 0`, and `phi(a) <= phi(0) + eps`.
    a: Point<T>,
    /// `phi'(b) >= 0`; holds nothing while expanding.
    b: Point<T>,
    stage: Stage,
    /// The upper end of U3's bisection while that is under way; its lower end is `a`.
    hill: Option<T>,
    /// `b - a` when the double secant step began.
    width: T,
}

/// What the trial under way was asked for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Stage {
    Expansion,
    /// S1.
    Secant,
    /// S4.
    SecondSecant,
    /// L2.
    Middle,
}

/// The paper's `rho`.
const EXPANSION: f64 = 5.0;
/// The paper's `gamma`.
const SLOW: f64 = 0.66;
/// The paper's `theta`, and the middle of L2.
const HALF: f64 = 0.5;
/// The paper's `epsilon`.
const SLACK: f64 = 1e-6;

impl<T: Real> HagerZhang<T> {
    /// Without parameters.
    pub fn new() -> Self {
        let origin = Point {
            step: T::zero(),
            value: T::zero(),
            slope: T::zero(),
        };
        HagerZhang {
            a: origin,
            b: origin,
            stage: Stage::Expansion,
            hill: None,
            width: T::infinity(),
        }
    }

    /// B1 to B3.
    fn expand(&mut self, start: Point<T>, c: Point<T>, high: bool) -> T {
        if c.step <= self.a.step {
            self.a = start;
        }
        if c.slope >= T::zero() {
            self.b = c;
            self.secant_or_middle()
        } else if high {
            self.climb_down(c.step)
        } else {
            self.a = c;
            T::of(EXPANSION) * c.step
        }
    }

    /// U0 to U3 for a step `c` that was asked for.
    fn update(&mut self, c: Point<T>, high: bool) -> T {
        if !self.contains(c.step) {
            self.go_on(None) // U0
        } else if c.slope >= T::zero() {
            let before = core::mem::replace(&mut self.b, c); // U1
            self.go_on(Some((before, c)))
        } else if !high {
            let before = core::mem::replace(&mut self.a, c); // U2
            self.go_on(Some((before, c)))
        } else {
            self.climb_down(c.step) // U3
        }
    }

    /// U3: the next step of the bisection between `a` and `hill`.
    fn climb_down(&mut self, hill: T) -> T {
        self.hill = Some(hill);
        between(self.a.step, hill)
    }

    /// U3 a to c, for its step `d`.
    fn climbed_down(&mut self, d: Point<T>, hill: T, high: bool) -> T {
        if !(d.step > self.a.step && d.step < hill) {
            self.climb_down(hill)
        } else if d.slope >= T::zero() {
            self.b = d;
            self.hill = None;
            self.go_on(None)
        } else if high {
            self.climb_down(d.step)
        } else {
            self.a = d;
            self.climb_down(hill)
        }
    }

    /// What follows a finished update; `moved` holds an end before and after, if the trial itself became that end.
    fn go_on(&mut self, moved: Option<(Point<T>, Point<T>)>) -> T {
        match (self.stage, moved) {
            (Stage::Secant, Some((before, c))) => {
                let second = secant(&before, &c); // S2, S3
                if self.contains(second) {
                    self.stage = Stage::SecondSecant; // S4
                    second
                } else {
                    self.halve_if_slow()
                }
            }
            (Stage::Secant | Stage::SecondSecant, _) => self.halve_if_slow(),
            (Stage::Expansion | Stage::Middle, _) => self.secant_or_middle(),
        }
    }

    /// L2.
    fn halve_if_slow(&mut self) -> T {
        if self.b.step - self.a.step > T::of(SLOW) * self.width {
            self.stage = Stage::Middle;
            between(self.a.step, self.b.step)
        } else {
            self.secant_or_middle() // L3
        }
    }

    /// L1 with S1. A secant step outside of the bracket changes nothing (U0), so that L2 follows at once.
    fn secant_or_middle(&mut self) -> T {
        self.width = self.b.step - self.a.step;
        let c = secant(&self.a, &self.b);
        if self.contains(c) {
            self.stage = Stage::Secant;
            c
        } else {
            self.stage = Stage::Middle;
            between(self.a.step, self.b.step)
        }
    }

    fn contains(&self, step: T) -> bool {
        step > self.a.step && step < self.b.step
    }
}

fn between<T: Real>(low: T, high: T) -> T {
    low + T::of(HALF) * (high - low)
}

impl<T: Real> Default for HagerZhang<T> {
    fn default() -> Self {
        Self::new()
    }
}

impl<T: Real> StepFinder<T> for HagerZhang<T> {
    fn begin(&mut self, ray: &Ray<T>, first: T) -> T {
        *self = HagerZhang {
            a: start(ray),
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
        let high = here.value > limit(ray) || side == Side::TooLong;
        Proposal::Try(match (self.hill, self.stage) {
            (Some(hill), _) => self.climbed_down(here, hill, high),
            (None, Stage::Expansion) => self.expand(start(ray), here, high),
            (None, _) => self.update(here, high),
        })
    }

    fn wants_slope(&self) -> bool {
        true
    }
}

fn start<T: Real>(ray: &Ray<T>) -> Point<T> {
    Point {
        step: T::zero(),
        value: ray.value,
        slope: ray.slope,
    }
}

/// `phi(0) + eps`.
fn limit<T: Real>(ray: &Ray<T>) -> T {
    ray.value + ray.slack.unwrap_or_else(|| T::of(SLACK) * ray.value.abs())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{Acceptance, Verdict, acceptance::ApproximateWolfe};

    /// Rays with hills, wells and flats; `phi` and `phi'`.
    const RAYS: [fn(f64) -> (f64, f64); 4] = [
        |a| {
            let well = (5.0 * a).cos() - 1.0;
            (
                0.02 * a * a - 0.1 * a + well,
                0.04 * a - 0.1 - 5.0 * (5.0 * a).sin(),
            )
        },
        |a| ((a - 1.0).powi(8), 8.0 * (a - 1.0).powi(7)),
        |a| {
            (
                (1.0 + (a - 2.0).powi(2)).ln(),
                2.0 * (a - 2.0) / (1.0 + (a - 2.0).powi(2)),
            )
        },
        |a| (a.exp() - 3.0 * a, a.exp() - 3.0),
    ];

    #[test]
    fn the_brackets_of_the_paper_hold_after_every_trial() {
        let mut brackets = 0;
        for (number, phi) in RAYS.iter().enumerate() {
            for first in [1e-6, 1e-3, 0.1, 1.0, 3.0, 30.0, 300.0] {
                let (value, slope) = phi(0.0);
                let ray = Ray::new(value, slope).with_slack(0.0);
                let rule = ApproximateWolfe::new(1e-9, 1e-9).unwrap();
                let mut finder = HagerZhang::new();
                let mut step = finder.begin(&ray, first);
                for _ in 0..60 {
                    let (value, slope) = phi(step);
                    let trial = Trial {
                        step,
                        value,
                        slope: Some(slope),
                    };
                    let Verdict::Refuse(side) = rule.judge(&ray, &trial) else {
                        break;
                    };
                    let Proposal::Try(next) = finder.next(&ray, &trial, side) else {
                        panic!("it never gives up")
                    };
                    step = next;
                    let name = || std::format!("ray {number} from {first:e}: {finder:?}");
                    let (a, b) = (finder.a, finder.b);
                    assert!(a.slope < 0.0 && a.value <= limit(&ray), "{}", name());
                    assert_eq!((a.value, a.slope), phi(a.step), "{}", name());
                    if let Some(hill) = finder.hill {
                        assert!(a.step < step && step < hill, "{}", name());
                    } else if finder.stage != Stage::Expansion {
                        brackets += 1;
                        assert!(b.slope >= 0.0, "{}", name());
                        assert!(
                            a.step < b.step && a.step <= step && step <= b.step,
                            "{}",
                            name()
                        );
                        assert_eq!((b.value, b.slope), phi(b.step), "{}", name());
                    }
                }
            }
        }
        assert!(brackets > 50, "{brackets} brackets are too few to tell");
    }

    /// The steps that follow `first`, by a rule that refuses everything.
    fn steps<const N: usize>(first: f64, phi: impl Fn(f64) -> (f64, f64)) -> [f64; N] {
        let ray = Ray::new(phi(0.0).0, phi(0.0).1);
        let mut finder = HagerZhang::new();
        let mut step = finder.begin(&ray, first);
        [(); N].map(|()| {
            let (value, slope) = phi(step);
            let trial = Trial {
                step,
                value,
                slope: Some(slope),
            };
            let side = if slope < 0.0 {
                Side::TooShort
            } else {
                Side::TooLong
            };
            let Proposal::Try(next) = finder.next(&ray, &trial, side) else {
                panic!("it never gives up")
            };
            step = next;
            next
        })
    }

    /// Worked by hand from S1 to S4 for `phi' = a^2 + a - 1`: 1/2 is the zero of the secant of slopes -1 at 0 and 1 at 1,
    /// 2/3 that of -1 at 0 and -1/4 at 1/2 (S3), 8/13 that of -1/4 at 1/2 and 1/9 at 2/3.
    #[test]
    fn a_double_secant_step_is_as_worked_by_hand() {
        let phi = |a: f64| (a * (a * (a / 3.0 + 0.5) - 1.0), a * a + a - 1.0);
        for (found, worked) in steps::<3>(1.0, phi)
            .iter()
            .zip([0.5, 2.0 / 3.0, 8.0 / 13.0])
        {
            assert!((found - worked).abs() < 1e-15, "{found} for {worked}");
        }
    }

    /// Worked by hand for `phi' = a^3 - 1`: 1/4 is the zero of the secant of -1 at 0 and 7 at 2; S3 leads to 16, outside; of
    /// the width 7/8 are left, so L2 asks for the middle of 1/4 and 2.
    #[test]
    fn a_slow_bracket_is_halved_as_worked_by_hand() {
        let phi = |a: f64| (0.25 * a * a * a * a - a, a * a * a - 1.0);
        assert_eq!(steps::<2>(2.0, phi), [0.25, 1.125]);
    }

    /// B3, with the factor of the paper.
    #[test]
    fn expansion_is_fivefold() {
        assert_eq!(steps::<3>(0.5, |a: f64| (-a, -1.0)), [2.5, 12.5, 62.5]);
    }

    #[test]
    fn the_first_secant_step_is_exact_on_a_quadratic() {
        let phi = |a: f64| (a * a - 3.0 * a, 2.0 * a - 3.0);
        assert_eq!(steps::<1>(7.0, phi), [1.5]);
    }
}
