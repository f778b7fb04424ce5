//! Growth and zoom by shapes through two and three points.

use super::interpolation::Point;
use super::shapes::{Quintic, Span};
use super::{Proposal, StepFinder};
use crate::{Ray, Real, Side, Trial};

/// Grows and zooms by the minimizers of shapes through the last two points and the one that they replaced.
///
/// The bracket is the verdicts' own: the last step that was too short (the start to begin with) and the last that was
/// too long. Nothing is tuned to a function, and nothing has units.
///
/// **Two points** with value and slope fix a shape with three free numbers. With the slopes `g0`, `g1` at the ends and
/// the slope `m` of the chord between them, convex data (`g0 < m < g1`) lean by `k = (m - g0) / (g1 - m)`:
///
/// | data | shape | minimizer, as a share of the way |
/// |---|---|---|
/// | convex, `k >= 0.7` | hyperbola `(g0 t + c t^2) / (1 + d t)`: barriers, kinks, decays | `-g0 (g1 - m) / (q (q + m - g0))`, `q^2 = m^2 - g0 g1` |
/// | convex, `k < 0.7` | power `g0 t + c t^n`: steep functions seen from afar | `(-g0 / (g1 - g0))^k` |
/// | not convex | cubic | Nocedal & Wright 2006, eq. 3.59 |
///
/// The parabola, `k = 1`, is common to all three. The hyperbola is the interpolant of Delbourgo & Gregory (SIAM J. Sci.
/// Stat. Comput. 6 (1985) 967-976, doi:10.1137/0906065), which is convex on convex data; the power is our own.
///
/// **Three points** fix the quintic, whose minimizer is found by Newton's method within a bracket.
///
/// 1. *Growth*, while nothing is too long: the mean of both minimizers, at most 1000 times the last advance; three times
///    as far where only one of the two shapes turns. Where none does, 30 times the last advance over the square of
///    what the slope gained, at least once. A too short step that does not descend (Goldstein knows such) is doubled.
/// 2. *Zoom*: the quintic's minimizer where it lies within a quarter of the bracket from the two-point minimizer or the
///    data are not convex, the two-point minimizer otherwise.
/// 3. *Margins*: 0.1 of the bracket; on convex data no more than 0.3 of the way to the zero of the line through the
///    slopes, nor than the way to where the tangents at both ends meet, for a kink far to one side.
/// 4. *A stalled end*: where the slope keeps more than 0.6 of its size, on convex data, something turns unseen. The
///    next trial goes 0.7 of the way to where the tangents meet, or to the zero of the line through the two slopes of
///    that side, whichever is nearer.
/// 5. An end that is too long for want of decrease although it lies lower shows as much to the shapes through
///    `psi(a) = phi(a) - c1 a phi'(0)` (Moré & Thuente 1994, section 2).
/// 6. *Never far behind bisection*: the first step that [`Bisection`](super::Bisection) would have tried and that the
///    bracket has not settled is tried, once bisection would have got there in less than half as many trials. So twice its
///    trials and four more suffice, where each verdict holds for all steps on its side and none lies outside of the
///    domain. Elsewhere bisection may chance upon a step that a longer leap has passed, and that then lies outside of
///    the bracket: of 2 million rays of the reference family 3 took more, by 2 at most; of as many of further kinds 50, by
///    8 at most, where the edge of a domain was to be found.
///
/// All settings are measured: chosen on the 24 published runs of Moré & Thuente, on those functions with random
/// parameters, and on random rays of 20 kinds; then confirmed on seeds and kinds that chose nothing. When any one of
/// them is changed by half, the total over the family of random rays moves by no more than 1%, but for the lean of 0.7
/// (4%).
///
/// Limits: it wants slopes. A missing one is replaced by that of the parabola through the low end, and then the finder
/// is no better than any other. Convergence is the guard's: [`StepSearch`](crate::StepSearch) halves a bracket that
/// narrows too slowly.
///
/// ```
/// use surefoot::{Ray, StepSearch, acceptance::StrongWolfe, finder::ThreePoint};
/// // A rounded kink at 1, and a first step that is ten thousand times too long.
/// let kink = |a: f64| {
///     let root = ((a - 1.0).powi(2) + 1e-4).sqrt();
///     (root, (a - 1.0) / root)
/// };
/// let mut search = StepSearch::new(ThreePoint::new(), StrongWolfe::new(1e-4, 1e-3)?);
/// let found = search.along(Ray::new(kink(0.0).0, kink(0.0).1), 1e4, kink)?;
/// assert!(found.outcome.accepted().is_some_and(|t| (t.step - 1.0).abs() < 1e-4));
/// assert_eq!(found.outcome.trials, 4);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ThreePoint<T = f64> {
    /// The last step that was too short; the start to begin with.
    short: Point<T>,
    /// The last step that was too long.
    long: Option<Point<T>>,
    /// The end that was replaced last.
    third: Option<Point<T>>,
    /// The first step, where bisection would have begun.
    first: T,
    /// Trials so far.
    trials: u32,
}

/// The longest advance while no shape turns ahead, in units of the last one, shortened by the square of what the slope
/// gained: where it steepens, what makes it fall is no larger than the last advance.
const BLIND: f64 = 30.0;
/// The longest advance after a shape.
const REACH: f64 = 1000.0;
/// Where only one of two shapes turns, so many times as far, to have the minimizer behind.
const LONE: f64 = 3.0;
/// An end whose slope keeps more than this share has stalled.
const STALLED: f64 = 0.6;
/// How far a stalled end is taken to where something must turn.
const UNSEEN: f64 = 0.7;
/// Margin, as a share of the bracket, for a stalled end.
const STALLED_MARGIN: f64 = 0.05;
/// Largest distance, as a share of the bracket, between the minimizers of shapes that agree.
const AGREEMENT: f64 = 0.25;
/// Margin, as a share of the bracket (the lower factor of Dennis & Schnabel 1983, A6.3.1).
const MARGIN: f64 = 0.1;
/// Margin, as a share of the way to the zero of the line through the slopes.
const NEAR: f64 = 0.3;

/// How many trials more than twice those of bisection are left to the shapes.
const AHEAD: u32 = 3;

impl<T: Real> ThreePoint<T> {
    /// Without parameters.
    pub fn new() -> Self {
        let zero = T::zero();
        ThreePoint {
            short: Point {
                step: zero,
                value: zero,
                slope: zero,
            },
            long: None,
            third: None,
            first: zero,
            trials: 0,
        }
    }

    /// Beyond all that was tried, after an advance from `before`; `earlier` is the point before that.
    fn grow(&self, before: &Point<T>, earlier: Option<Point<T>>) -> T {
        let here = &self.short;
        if !(here.slope < T::zero()) {
            return here.step + here.step;
        }
        let advance = here.step - before.step;
        let span = Span::new(before, here, T::zero());
        let (lone, reach) = (T::of(LONE), T::of(REACH));
        let two = Some(span.minimizer() - T::one()).filter(|ahead| *ahead > T::zero());
        let ahead = match earlier {
            None => two,
            Some(earlier) => {
                let quintic = Quintic::new(span, before, &earlier, advance, T::zero());
                match (two, quintic.turn_beyond(reach)) {
                    (Some(two), Some(three)) => Some(T::of(0.5) * (two + three)),
                    (Some(one), None) | (None, Some(one)) => Some(lone * one),
                    (None, None) => None,
                }
            }
        };
        let ahead = match ahead {
            Some(ahead) => {
                let secant = (here.slope / (before.slope - here.slope)).abs();
                ahead.max(T::of(NEAR) * secant.min(T::one())).min(reach)
            }
            None => {
                let kept = before.slope / here.slope;
                (T::of(BLIND) * kept * kept).max(T::one()).min(T::of(BLIND))
            }
        };
        here.step + ahead * advance
    }

    /// The first step on bisection's way that the bracket has not settled, where bisection would have got there in less
    /// than half as many trials.
    fn overdue(&self) -> Option<T> {
        let (mut low, mut high) = (T::zero(), None);
        let mut step = self.first;
        for _ in 0..(self.trials.saturating_add(1)).saturating_sub(AHEAD) / 2 {
            if step <= self.short.step {
                low = step;
            } else if self.long.is_some_and(|long| step >= long.step) {
                high = Some(step);
            } else {
                return Some(step);
            }
            step = match high {
                Some(high) => low + T::of(0.5) * (high - low),
                None => step + step,
            };
        }
        None
    }

    /// Between the two ends of the bracket, of which one may have `stalled`.
    fn zoom(&self, ray: &Ray<T>, long: &Point<T>, stalled: Option<Side>) -> T {
        let short = &self.short;
        let (zero, half, one) = (T::zero(), T::of(0.5), T::one());
        let width = long.step - short.step;
        let decline = ray.decrease.unwrap_or_else(|| T::of(1e-4)) * ray.slope;
        let limit = ray.reference + decline * long.step + T::of(2.0) * ray.value_noise;
        let tilt = if long.value > limit && long.value < short.value {
            decline
        } else {
            zero
        };
        let span = Span::new(short, long, tilt);
        if !(span.slope < zero) {
            return short.step + half * width;
        }
        let convex = span.is_convex();
        let mut share = span.minimizer();
        if !(share > zero && share < one) {
            share = half;
        }
        if let Some(third) = self.third {
            let turn = Quintic::new(span, short, &third, width, tilt).turn_within(zero, one);
            let agree = !convex || (turn - share).abs() < T::of(AGREEMENT);
            if turn > zero && turn < one && agree {
                share = turn;
            }
        }
        let margin = T::of(MARGIN);
        let (mut low, mut high) = (margin, margin);
        if convex {
            if let Some(side) = stalled {
                share = share + T::of(UNSEEN) * (self.unseen(&span, width, side) - share);
                low = T::of(STALLED_MARGIN);
                high = low;
            } else {
                let (line, crossing) = (span.line(), span.crossing());
                low = margin.min(T::of(NEAR) * line).min(crossing);
                high = margin.min(T::of(NEAR) * (one - line)).min(one - crossing);
            }
        }
        short.step + width * share.max(low).min(one - high)
    }

    /// Where convex data must turn though the shapes do not show it: where the tangents meet, or nearer to the stalled
    /// end, at the zero of the line through its last two slopes.
    fn unseen(&self, span: &Span<T>, width: T, side: Side) -> T {
        let crossing = span.crossing();
        let Some(third) = self.third else {
            return crossing;
        };
        let (zero, one) = (T::zero(), T::one());
        let place = (third.step - self.short.step) / width;
        let slope = third.slope * width;
        let (line, nearer) = match side {
            Side::TooShort if place < zero => {
                let line = span.slope * place / (span.slope - slope);
                (line, line < crossing)
            }
            Side::TooLong if place > one => {
                let line = one - span.end_slope * (place - one) / (slope - span.end_slope);
                (line, line > crossing)
            }
            _ => return crossing,
        };
        if nearer && line > zero && line < one {
            line
        } else {
            crossing
        }
    }
}

impl<T: Real> Default for ThreePoint<T> {
    fn default() -> Self {
        Self::new()
    }
}

impl<T: Real> StepFinder<T> for ThreePoint<T> {
    fn begin(&mut self, ray: &Ray<T>, first: T) -> T {
        *self = ThreePoint {
            short: Point {
                step: T::zero(),
                value: ray.value,
                slope: ray.slope,
            },
            first,
            ..Self::new()
        };
        first
    }

    fn next(&mut self, ray: &Ray<T>, refused: &Trial<T>, side: Side) -> Proposal<T> {
        let beyond = self.long.is_some_and(|long| refused.step >= long.step);
        if beyond || refused.step <= self.short.step {
            // The domain has a hole and the search begins anew below it.
            self.begin(ray, refused.step);
        }
        self.trials = self.trials.saturating_add(1);
        let short = self.short;
        // Without a slope, that of the parabola through the low end.
        let slope = refused.slope.unwrap_or_else(|| {
            let chord = (refused.value - short.value) / (refused.step - short.step);
            chord + chord - short.slope
        });
        let here = Point {
            step: refused.step,
            value: refused.value,
            slope,
        };
        let earlier = self.third;
        let replaced = match side {
            Side::TooShort => Some(core::mem::replace(&mut self.short, here)),
            Side::TooLong => self.long.replace(here),
        };
        self.third = replaced.or(earlier);
        let Some(long) = self.long else {
            let grown = self.grow(&short, earlier);
            return Proposal::Try(self.overdue().map_or(grown, |due| due.max(grown)));
        };
        let stalls = replaced.is_some_and(|end| {
            let kept = here.slope.abs() / end.slope.abs();
            kept > T::of(STALLED) && kept < T::one()
        });
        Proposal::Try(match self.overdue() {
            Some(step) => step,
            None => self.zoom(ray, &long, stalls.then_some(side)),
        })
    }

    fn wants_slope(&self) -> bool {
        true
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::acceptance::{Goldstein, StrongWolfe};
    use crate::{Acceptance, Need, Outcome, Sample, StepSearch};
    use approx::assert_relative_eq;

    fn search<T: Real>(
        phi: impl Fn(T) -> (T, T),
        first: T,
        rule: impl Acceptance<T>,
    ) -> Outcome<T> {
        let (value, slope) = phi(T::zero());
        let mut search = StepSearch::new(ThreePoint::new(), rule);
        match search.along_lazily(Ray::new(value, slope), first, |step, _| {
            let (value, slope) = phi(step);
            Sample::Both(value, slope)
        }) {
            Ok(found) => found.outcome,
            Err(error) => panic!("{error}"),
        }
    }

    fn strict<T: Real>() -> StrongWolfe<T> {
        StrongWolfe::new(T::of(1e-4), T::of(1e-3)).expect("in range")
    }

    #[test]
    fn the_second_trial_on_a_parabola_is_its_minimizer() {
        let parabola = |a: f64| (0.5 * (a - 3.0) * (a - 3.0), a - 3.0);
        for first in [0.01, 0.5, 2.9, 3.1, 7.0, 1e3, 1e6] {
            let outcome = search(parabola, first, strict());
            let accepted = outcome.accepted().expect("a parabola is easy");
            assert_eq!(outcome.trials, 2, "first {first}");
            assert_relative_eq!(accepted.step, 3.0, max_relative = 1e-6);
        }
    }

    #[test]
    fn far_beyond_a_steep_function_takes_few_trials() {
        // (a - 1)^8 from 1e3: its value is 1e24, and slopes fall by 10 to 50 times a trial by polynomials.
        let steep = |a: f64| ((a - 1.0).powi(8), 8.0 * (a - 1.0).powi(7));
        assert!(search(steep, 1e3, strict()).trials <= 3);
    }

    #[test]
    fn a_kink_far_to_one_side_takes_few_trials() {
        let kink = |a: f64| {
            let root = ((a - 1.0) * (a - 1.0) + 1e-4).sqrt();
            (root, (a - 1.0) / root)
        };
        assert!(search(kink, 1e6, strict()).trials <= 5);
    }

    #[test]
    fn powers_of_two_in_step_and_value_change_nothing_but_the_scale() {
        let phi = |a: f64| {
            let root = ((a - 1.0) * (a - 1.0) + 1e-4).sqrt();
            (root + 0.1 * a, (a - 1.0) / root + 0.1)
        };
        let steps = |by_step: f64, by_value: f64, first: f64| -> [f64; 16] {
            let ray = Ray::new(phi(0.0).0 * by_value, phi(0.0).1 * by_value / by_step);
            let mut search = StepSearch::new(ThreePoint::new(), strict());
            let found = search.along(ray, first * by_step, |a| {
                let (value, slope) = phi(a / by_step);
                (value * by_value, slope * by_value / by_step)
            });
            assert!(found.is_ok_and(|f| f.outcome.accepted().is_some()));
            let mut steps = [0.0; 16];
            for (step, entry) in steps.iter_mut().zip(search.log().iter()) {
                *step = entry.trial.step / by_step;
            }
            steps
        };
        for first in [1e-3, 0.3, 20.0] {
            let plain = steps(1.0, 1.0, first);
            assert!(plain[2] > 0.0);
            for (by_step, by_value) in [(64.0, 1.0), (1.0 / 1024.0, 2f64.powi(300)), (1.0, 0.125)] {
                assert_eq!(steps(by_step, by_value, first), plain);
            }
        }
    }

    #[test]
    fn any_step_side_and_slope_is_taken() {
        // Replies of no function at all: the proposal stays within the bracket and is never NaN.
        let mut state = 1_u64;
        let mut random = || {
            state = state
                .wrapping_mul(6364136223846793005)
                .wrapping_add(1442695040888963407);
            (state >> 11) as f64 / (1_u64 << 53) as f64
        };
        let ray = Ray::new(1.0, -1.0);
        for _ in 0..2000 {
            let mut finder = ThreePoint::new();
            let (mut short, mut long) = (0.0, f64::INFINITY);
            let mut step = finder.begin(&ray, 10f64.powf(20.0 * random() - 10.0));
            for _ in 0..30 {
                let size = 10f64.powf(600.0 * random() - 300.0);
                let trial = Trial {
                    step,
                    value: (random() - 0.5) * size,
                    slope: (random() < 0.8).then(|| (random() - 0.5) * size),
                };
                let side = if random() < 0.5 {
                    short = step;
                    Side::TooShort
                } else {
                    long = step;
                    Side::TooLong
                };
                let Proposal::Try(next) = finder.next(&ray, &trial, side) else {
                    panic!("it always has a proposal")
                };
                assert!(next >= short && next <= long, "{next} in {short}..{long}");
                // Now and then somebody else places the trial.
                let middle = short + 0.5 * (long.min(4.0 * short + 1.0) - short);
                step = if random() < 0.7 && next > short && next < long {
                    next
                } else {
                    middle
                };
                if !(step > short && step < long) {
                    break;
                }
            }
        }
    }

    #[test]
    fn twice_the_trials_of_bisection_and_four_more_suffice_whatever_the_values() {
        let mut state = 7_u64;
        let mut random = || {
            state = state
                .wrapping_mul(6364136223846793005)
                .wrapping_add(1442695040888963407);
            (state >> 11) as f64 / (1_u64 << 53) as f64
        };
        let ray = Ray::new(0.0, -1.0);
        for _ in 0..2000 {
            let low = 10f64.powf(8.0 * random() - 4.0);
            let high = low * (1.0 + 10f64.powf(-4.0 * random()));
            let side = |step: f64| match step {
                _ if step < low => Some(Side::TooShort),
                _ if step > high => Some(Side::TooLong),
                _ => None,
            };
            let mut count = |finder: &mut dyn StepFinder<f64>| {
                let (mut short, mut long) = (0.0_f64, f64::INFINITY);
                let mut step = finder.begin(&ray, 1.0);
                for trials in 1.. {
                    let Some(side) = side(step) else {
                        return trials;
                    };
                    match side {
                        Side::TooShort => short = step,
                        Side::TooLong => long = step,
                    }
                    let trial = Trial {
                        step,
                        value: random() - 0.5,
                        slope: Some(random() - 0.5),
                    };
                    let Proposal::Try(next) = finder.next(&ray, &trial, side) else {
                        panic!("it always has a proposal")
                    };
                    assert!(next > short && next < long, "{next} in {short}..{long}");
                    step = next;
                }
                unreachable!("the loop has no end of its own")
            };
            let (own, bisection) = (
                count(&mut ThreePoint::new()),
                count(&mut crate::finder::Bisection::new()),
            );
            assert!(
                own <= 2 * bisection + 4,
                "{own} trials, bisection {bisection}"
            );
        }
    }

    #[test]
    fn values_alone_will_do_with_a_rule_that_reads_no_slopes() {
        let rule = Goldstein::new(0.25).expect("in range");
        let mut search = StepSearch::new(ThreePoint::new(), rule);
        for first in [1e-4, 1.0, 1e4] {
            let found =
                search.along_lazily(Ray::new(1.0, -2.0), first, |a: f64, need| match need {
                    Need::Slope => Sample::NoSlope,
                    _ => Sample::Value((a - 1.0) * (a - 1.0)),
                });
            let outcome = found.expect("the ray is fit").outcome;
            assert!(outcome.accepted().is_some() && outcome.trials <= 8);
        }
    }

    #[test]
    fn a_search_that_begins_anew_below_a_hole_is_followed() {
        let ray = Ray::new(0.0, -1.0);
        let mut finder = ThreePoint::new();
        let trial = |step: f64, value, slope| Trial {
            step,
            value,
            slope: Some(slope),
        };
        finder.begin(&ray, 8.0);
        finder.next(&ray, &trial(8.0, -4.0, -0.5), Side::TooShort);
        // 16 and 4 had no value; 1 is too long.
        let Proposal::Try(next) = finder.next(&ray, &trial(1.0, 0.0, 1.0), Side::TooLong) else {
            panic!("it always has a proposal")
        };
        assert_relative_eq!(next, 0.5, max_relative = 1e-14);
    }

    #[test]
    fn single_precision_will_do() {
        let barrier = |a: f32| (-a - 0.01 * (1.0 - a).ln(), -1.0 + 0.01 / (1.0 - a));
        let rule = StrongWolfe::new(1e-4_f32, 0.1).expect("in range");
        let outcome = search(barrier, 1e-3_f32, rule);
        let accepted = outcome.accepted().expect("the minimizer is 0.99");
        assert!((accepted.step - 0.99).abs() < 2e-3);
    }
}
