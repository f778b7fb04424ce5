//! The published finders, step by step, against a naive recomputation from their papers, and what finders do at corners
//! that no smooth function of the other tests leads to.
#![cfg(feature = "alloc")]

mod support;

use support::curves::{FIRST_STEPS, PUBLISHED};
use support::rays::RandomRay;
use surefoot::finder::interpolation::cubic_by_values;
use surefoot::finder::{
    Backtracking, BracketZoom, BrentSlopes, BrentValues, Expansion, GoldenSection, HagerZhang,
    InterpolatingBacktracking, MoreThuente, ThreePoint,
};
use surefoot::{Proposal, Ray, Side, StepFinder, Trial};

/// A step, the value and the slope there.
type Known = (f64, f64, f64);

/// A name, a first step, and value and slope at a step.
type Function = (String, f64, Box<dyn Fn(f64) -> (f64, f64)>);

/// The end on the other side, the two last steps of the stalled side, that side, and where their line vanishes.
type Stalled = (&'static str, Known, Known, Known, Side, Option<f64>);

/// The minimizer of the cubic through value and slope at `p` and `q`, by its coefficients in shares of the way from `p`:
/// that share, or none where the slope does not vanish.
fn cubic_share(p: Known, q: Known) -> Option<f64> {
    let way = q.0 - p.0;
    let (start, end, rise) = (p.2 * way, q.2 * way, q.1 - p.1);
    let (a, b) = (start + end - 2.0 * rise, 3.0 * rise - 2.0 * start - end);
    let root = (b * b - 3.0 * a * start).sqrt();
    let share = if b > 0.0 {
        -start / (b + root)
    } else {
        (root - b) / (3.0 * a)
    };
    share.is_finite().then_some(share)
}

fn cubic(p: Known, q: Known) -> f64 {
    cubic_share(p, q).map_or(f64::NAN, |share| p.0 + share * (q.0 - p.0))
}

/// The minimizer of the parabola through value and slope at `p` and the value at `q`.
fn parabola(p: Known, q: Known) -> f64 {
    let way = q.0 - p.0;
    p.0 - p.2 * way * way / (2.0 * (q.1 - p.1 - p.2 * way))
}

/// The zero of the straight line through the slopes at `p` and `q`.
fn secant(p: Known, q: Known) -> f64 {
    p.0 - p.2 * (q.0 - p.0) / (q.2 - p.2)
}

/// The method of Moré & Thuente, ACM Trans. Math. Software 20 (1994) 286-307, sections 2 to 4, with the choices that the
/// page of the finder names.
struct NaiveMoreThuente {
    low: Known,
    up: Known,
    bracketed: bool,
    first_stage: bool,
    range: (f64, f64),
    widths: (f64, f64),
}

impl NaiveMoreThuente {
    fn new(start: (f64, f64), first: f64) -> Self {
        let start = (0.0, start.0, start.1);
        NaiveMoreThuente {
            low: start,
            up: start,
            bracketed: false,
            first_stage: true,
            range: (0.0, 5.0 * first),
            widths: (f64::INFINITY, f64::INFINITY),
        }
    }

    fn next(&mut self, start: (f64, f64), c1: f64, here: Known) -> f64 {
        let line = c1 * start.1;
        let psi = here.1 - start.0 - line * here.0;
        if psi <= 0.0 && here.2 >= line {
            self.first_stage = false;
        }
        let modified = self.first_stage && here.1 <= self.low.1 && psi > 0.0;
        let tilt = if modified { line } else { 0.0 };
        let tilted = |p: Known| (p.0, p.1 - tilt * p.0, p.2 - tilt);
        let (l, u, t) = (tilted(self.low), tilted(self.up), tilted(here));
        let end = if t.0 > l.0 {
            self.range.1
        } else {
            self.range.0
        };
        let away = |step: f64| (step - t.0).abs();
        let was_bracketed = self.bracketed;
        let mut step = if t.1 > l.1 {
            let (c, q) = (cubic(l, t), parabola(l, t));
            if (c - l.0).abs() < (q - l.0).abs() {
                c
            } else {
                0.5 * (c + q)
            }
        } else if t.2 * l.2 < 0.0 {
            let (c, s) = (cubic(l, t), secant(l, t));
            if away(c) > away(s) { c } else { s }
        } else if t.2.abs() < l.2.abs() {
            let beyond = cubic_share(l, t).filter(|share| *share > 1.0);
            let c = beyond.map_or(end, |share| l.0 + share * (t.0 - l.0));
            let s = secant(l, t);
            if was_bracketed {
                let nearer = if away(c) < away(s) { c } else { s };
                let limit = t.0 + 0.66 * (u.0 - t.0);
                if t.0 > l.0 {
                    nearer.min(limit)
                } else {
                    nearer.max(limit)
                }
            } else {
                let farther = if away(c) > away(s) { c } else { s };
                farther.max(self.range.0).min(self.range.1)
            }
        } else if was_bracketed {
            cubic(u, t)
        } else {
            end
        };
        // The three cases of the updating algorithm.
        if t.1 > l.1 {
            self.up = here;
            self.bracketed = true;
        } else {
            if t.2 * l.2 < 0.0 {
                self.up = self.low;
                self.bracketed = true;
            }
            self.low = here;
        }
        if self.bracketed {
            let width = (self.up.0 - self.low.0).abs();
            if width >= 0.66 * self.widths.0 {
                step = 0.5 * (self.low.0 + self.up.0);
            }
            self.widths = (self.widths.1, width);
            self.range = (self.low.0.min(self.up.0), self.low.0.max(self.up.0));
        } else {
            let advance = step - self.low.0;
            self.range = (step + 1.1 * advance, step + 4.0 * advance);
        }
        step
    }
}

/// Algorithms 3.5 and 3.6 of Nocedal & Wright, Numerical Optimization, 2nd ed. 2006, with the numbered safeguards of the
/// page of the finder.
struct NaiveZoom {
    before: Known,
    /// `low`, `high`, and the width at the last trial.
    bracket: Option<(Known, Known, f64)>,
}

impl NaiveZoom {
    fn next(&mut self, start: (f64, f64), c1: f64, here: Known, side: Side) -> f64 {
        let enough = here.1 <= start.0 + c1 * here.0 * start.1;
        let Some((low, high, width)) = self.bracket else {
            let before = self.before;
            let is_first = before.0 == 0.0;
            let (low, high) = if !enough || (here.1 >= before.1 && !is_first) {
                (before, here)
            } else if here.2 < 0.0 && side == Side::TooShort {
                self.before = here;
                let advance = here.0 - before.0;
                let ahead = (cubic(before, here) - here.0) / advance;
                return here.0
                    + advance
                        * if ahead > 0.0 {
                            ahead.clamp(1.1, 4.0)
                        } else {
                            4.0
                        };
            } else {
                (here, before)
            };
            self.bracket = Some((low, high, (high.0 - low.0).abs()));
            return interpolated(low, high);
        };
        let (low, high) = if !enough || here.1 >= low.1 {
            (low, here)
        } else if here.2 * (high.0 - low.0) >= 0.0 {
            (here, low)
        } else {
            (here, high)
        };
        let left = (high.0 - low.0).abs();
        self.bracket = Some((low, high, left));
        if left > 0.66 * width {
            0.5 * (low.0 + high.0)
        } else {
            interpolated(low, high)
        }
    }
}

fn interpolated(low: Known, high: Known) -> f64 {
    let share = cubic_share(low, high).filter(|share| *share <= 1.0);
    low.0 + share.map_or(0.5, |share| share.clamp(0.1, 0.9)) * (high.0 - low.0)
}

/// What Hager & Zhang's method waits for.
#[derive(Clone, Copy, PartialEq)]
enum Waiting {
    Secant,
    SecondSecant,
    Middle,
}

/// The method of Hager & Zhang, SIAM J. Optim. 16 (2005) 170-192, section 4, with the deviations that the page of the
/// finder names.
struct NaiveHagerZhang {
    limit: f64,
    a: Known,
    b: Option<Known>,
    hill: Option<f64>,
    waiting: Waiting,
    width: f64,
}

impl NaiveHagerZhang {
    fn new(start: (f64, f64)) -> Self {
        NaiveHagerZhang {
            limit: start.0 + 1e-6 * start.0.abs(),
            a: (0.0, start.0, start.1),
            b: None,
            hill: None,
            waiting: Waiting::Middle,
            width: f64::INFINITY,
        }
    }

    fn next(&mut self, here: Known, side: Side) -> f64 {
        let high = here.1 > self.limit || side == Side::TooLong;
        if here.2 < 0.0 && high {
            self.hill = Some(here.0); // B2 and U3: bisect between a and here
            return 0.5 * (self.a.0 + here.0);
        }
        let replaced = if here.2 >= 0.0 {
            self.b.replace(here)
        } else {
            Some(std::mem::replace(&mut self.a, here))
        };
        if let Some(hill) = self.hill {
            if here.2 < 0.0 {
                return 0.5 * (self.a.0 + hill);
            }
            self.hill = None;
            return self.narrowed(None, here);
        }
        if self.b.is_none() {
            return 5.0 * here.0; // B3
        }
        self.narrowed(replaced, here)
    }

    fn narrowed(&mut self, replaced: Option<Known>, here: Known) -> f64 {
        let (a, b) = (self.a.0, self.b.unwrap().0);
        match (self.waiting, replaced) {
            (Waiting::Middle, _) => return self.first_secant(),
            (Waiting::Secant, Some(old)) => {
                let second = secant(old, here);
                if a < second && second < b {
                    self.waiting = Waiting::SecondSecant;
                    return second;
                }
            }
            _ => {}
        }
        if b - a > 0.66 * self.width {
            self.waiting = Waiting::Middle;
            return 0.5 * (a + b);
        }
        self.first_secant()
    }

    fn first_secant(&mut self) -> f64 {
        let (a, b) = (self.a, self.b.unwrap());
        self.width = b.0 - a.0;
        let c = secant(a, b);
        if a.0 < c && c < b.0 {
            self.waiting = Waiting::Secant;
            c
        } else {
            self.waiting = Waiting::Middle;
            0.5 * (a.0 + b.0)
        }
    }
}

/// Growth to a slope of the other sign, then the zero of the slope as in R. P. Brent, Algorithms for Minimization Without
/// Derivatives, 1973, chapter 4.
struct NaiveBrentSlopes {
    start: f64,
    left: Known,
    hill: Option<f64>,
    /// `a`, `b`, `c`, the last advance and the one before it.
    zero: Option<(Known, Known, Known, f64, f64)>,
}

impl NaiveBrentSlopes {
    /// The next step; none where the bracket is narrower than `tolerance`.
    fn next(&mut self, here: Known, tolerance: f64) -> Option<f64> {
        let high = here.1 > self.start + 2.0 * f64::EPSILON * self.start.abs();
        if here.2 <= 0.0 && high {
            (self.hill, self.zero) = (Some(here.0), None);
        } else if let Some((_, b, c, d, e)) = self.zero {
            if here.2 <= 0.0 {
                self.left = here;
            }
            return self.closer((b, here, c, d, e), tolerance);
        } else if here.2 > 0.0 {
            let (left, d) = (self.left, here.0 - self.left.0);
            return self.closer((left, here, left, d, d), tolerance);
        } else {
            let before = std::mem::replace(&mut self.left, here);
            if self.hill.is_none() {
                let advance = here.0 - before.0;
                let ahead = (secant(before, here) - here.0) / advance;
                let ahead = if ahead > 0.0 {
                    ahead.clamp(1.1, 4.0)
                } else {
                    4.0
                };
                return Some(here.0 + advance * ahead);
            }
        }
        let hill = self.hill?;
        (hill - self.left.0 > tolerance * hill).then_some(0.5 * (self.left.0 + hill))
    }

    fn closer(&mut self, zero: (Known, Known, Known, f64, f64), tolerance: f64) -> Option<f64> {
        let (mut a, mut b, mut c, mut d, mut e) = zero;
        if (b.2 > 0.0) == (c.2 > 0.0) {
            c = a;
            d = b.0 - a.0;
            e = d;
        }
        if c.2.abs() < b.2.abs() {
            (a, b, c) = (b, c, b);
        }
        let least = 0.5 * tolerance * b.0;
        let m = 0.5 * (c.0 - b.0);
        if m.abs() <= least {
            return None;
        }
        let before = e;
        let step = if a.0 == c.0 {
            secant(b, a)
        } else {
            // Inverse quadratic interpolation, in Lagrange's form.
            let share = |p: Known, q: Known, r: Known| p.0 * q.2 * r.2 / (p.2 - q.2) / (p.2 - r.2);
            share(a, b, c) + share(b, c, a) + share(c, a, b)
        } - b.0;
        let free = e.abs() >= least && a.2.abs() > b.2.abs();
        let near = 2.0 * step.abs() < 3.0 * m.abs() - least && step.abs() < 0.5 * before.abs();
        if free && near && step * m > 0.0 {
            (d, e) = (step, d);
        } else {
            (d, e) = (m, m);
        }
        self.zero = Some((a, b, c, d, e));
        Some(
            b.0 + if d.abs() > least {
                d
            } else {
                least.copysign(m)
            },
        )
    }
}

/// Brent's minimisation by values, chapter 5 of the same book, from three trials of a golden bracket.
struct NaiveBrentValues {
    tried: Vec<(f64, f64)>,
    closing: Option<NaiveClosing>,
}

struct NaiveClosing {
    ends: (f64, f64),
    /// The lowest three.
    x: (f64, f64),
    w: (f64, f64),
    v: (f64, f64),
    d: f64,
    e: f64,
}

impl NaiveBrentValues {
    fn next(&mut self, here: (f64, f64), tolerance: f64) -> Option<f64> {
        let phi = 0.5 * (1.0 + 5.0_f64.sqrt());
        if let Some(closing) = &mut self.closing {
            closing.take(here);
            return closing.next(tolerance);
        }
        self.tried.push(here);
        self.tried.sort_by(|a, b| a.0.total_cmp(&b.0));
        let by_value = |a: &usize, b: &usize| self.tried[*a].1.total_cmp(&self.tried[*b].1);
        let least = (0..self.tried.len()).min_by(by_value).unwrap();
        let (before, x) = (self.tried[least.saturating_sub(1)], self.tried[least]);
        if least == 0 {
            return Some(self.tried[1].0 / (phi * phi));
        }
        let Some(&after) = self.tried.get(least + 1) else {
            return Some(x.0 + phi * (x.0 - before.0));
        };
        let (w, v) = if before.1 < after.1 {
            (before, after)
        } else {
            (after, before)
        };
        let width = after.0 - before.0;
        let mut closing = NaiveClosing {
            ends: (before.0, after.0),
            x,
            w,
            v,
            d: width,
            e: width,
        };
        let next = closing.next(tolerance);
        self.closing = Some(closing);
        next
    }
}

impl NaiveClosing {
    fn take(&mut self, u: (f64, f64)) {
        let x = self.x;
        let beyond = u.0 > x.0;
        let lower = u.1 <= x.1;
        let end = if lower { x.0 } else { u.0 };
        if beyond == lower {
            self.ends.0 = end;
        } else {
            self.ends.1 = end;
        }
        if lower {
            (self.x, self.w, self.v) = (u, x, self.w);
        } else if u.1 <= self.w.1 || self.w.0 == x.0 {
            (self.w, self.v) = (u, self.w);
        } else if u.1 <= self.v.1 || self.v.0 == x.0 || self.v.0 == self.w.0 {
            self.v = u;
        }
    }

    fn next(&mut self, tolerance: f64) -> Option<f64> {
        let ((low, high), (x, w, v)) = (self.ends, (self.x, self.w, self.v));
        let least = 0.5 * tolerance * x.0;
        let toward_middle = if x.0 < 0.5 * (low + high) {
            high - x.0
        } else {
            low - x.0
        };
        if (high - x.0).max(x.0 - low) <= 2.0 * least {
            return None;
        }
        // The vertex of the parabola through all three.
        let (r, q) = ((x.0 - w.0) * (x.1 - v.1), (x.0 - v.0) * (x.1 - w.1));
        let vertex = 0.5 * ((x.0 - w.0) * r - (x.0 - v.0) * q) / (q - r);
        let u = x.0 + vertex;
        let near = vertex.abs() < 0.5 * self.e.abs() && self.e.abs() > least;
        if near && low < u && u < high {
            self.e = self.d;
            self.d = vertex;
            if u - low < 2.0 * least || high - u < 2.0 * least {
                self.d = least.copysign(toward_middle);
            }
        } else {
            self.e = toward_middle;
            self.d = 0.5 * (3.0 - 5.0_f64.sqrt()) * self.e;
        }
        Some(
            x.0 + if self.d.abs() >= least {
                self.d
            } else {
                least.copysign(self.d)
            },
        )
    }
}

/// Functions that make a finder grow, zoom and change its mind: the published six, the random family, falls and waves.
fn functions() -> Vec<Function> {
    let mut all: Vec<Function> = Vec::new();
    for curve in PUBLISHED {
        for first in FIRST_STEPS {
            all.push((
                format!("published {}", curve.number),
                first,
                Box::new(curve.at),
            ));
        }
    }
    for seed in 0..600 {
        let first = RandomRay::new(seed).first;
        let ray = RandomRay::new(seed);
        all.push((
            format!("random {seed}"),
            first,
            Box::new(move |a| ray.at(a)),
        ));
    }
    for first in [0.01, 0.1, 0.4, 1.0, 2.0, 5.0, 20.0, 60.0, 90.0] {
        all.push((
            "a decay".into(),
            first,
            Box::new(|a| ((-a).exp(), -(-a).exp())),
        ));
        for wave in [0.3, 1.0, 2.5, 6.0] {
            all.push((
                format!("a fall with waves of {wave}"),
                first,
                Box::new(move |a| (-a + wave * a.cos() - wave, -1.0 - wave * a.sin())),
            ));
            all.push((
                format!("a bowl with waves of {wave}"),
                first,
                Box::new(move |a| {
                    let value = 0.02 * a * a - a + wave * (2.0 * a).cos() - wave;
                    (value, 0.04 * a - 1.0 - 2.0 * wave * (2.0 * a).sin())
                }),
            ));
        }
    }
    all
}

/// Follows a finder for at most eight refusals, as far as the slope is far from vanishing, and compares each of its
/// steps with `naive`. Returns how many were compared.
fn compare<F: StepFinder<f64>>(
    fresh: impl Fn() -> F,
    c1: f64,
    naive: impl Fn((f64, f64), f64) -> Box<dyn FnMut(Known, Side) -> f64>,
) -> usize {
    let mut compared = 0;
    for (name, first, phi) in functions() {
        let start = phi(0.0);
        let mut ray = Ray::new(start.0, start.1);
        ray.decrease = Some(c1);
        let mut finder = fresh();
        let mut step = finder.begin(&ray, first);
        assert_eq!(step, first);
        let mut naive = naive(start, first);
        for trial in 1..=8 {
            let (value, slope) = phi(step);
            let settled = slope.abs() < 1e-4 * start.1.abs() || (value - start.0).abs() < 1e-9;
            if settled || !value.is_finite() || !slope.is_finite() {
                break;
            }
            let enough = value <= start.0 + c1 * step * start.1;
            let side = if enough && slope < 0.0 {
                Side::TooShort
            } else {
                Side::TooLong
            };
            let refused = Trial {
                step,
                value,
                slope: Some(slope),
            };
            let Proposal::Try(next) = finder.next(&ray, &refused, side) else {
                panic!("{name}: it never gives up")
            };
            let expected = naive((step, value, slope), side);
            if expected.abs() < 1e-9 * step {
                break; // so near to 0 that the digits of the way there do not hold it
            }
            assert!(
                (next - expected).abs() <= 1e-6 * expected.abs() + 1e-14 * step,
                "{name} from {first:e} with c1 = {c1}, after trial {trial} at {step:e}: {next:e} for {expected:e}"
            );
            compared += 1;
            step = next;
        }
    }
    compared
}

#[test]
fn more_thuente_asks_for_the_steps_of_the_paper() {
    for c1 in [1e-4, 0.1, 0.4] {
        let compared = compare(MoreThuente::<f64>::new, c1, |start, first| {
            let mut naive = NaiveMoreThuente::new(start, first);
            Box::new(move |here, _| naive.next(start, c1, here))
        });
        assert!(compared > 1500, "{compared}");
    }
}

#[test]
fn bracket_zoom_asks_for_the_steps_of_the_book() {
    for c1 in [1e-4, 0.1, 0.4] {
        let compared = compare(BracketZoom::<f64>::new, c1, |start, _| {
            let mut naive = NaiveZoom {
                before: (0.0, start.0, start.1),
                bracket: None,
            };
            Box::new(move |here, side| naive.next(start, c1, here, side))
        });
        assert!(compared > 1500, "{compared}");
    }
}

#[test]
fn hager_zhang_asks_for_the_steps_of_the_paper() {
    for c1 in [1e-4, 0.1, 0.4] {
        let compared = compare(HagerZhang::<f64>::new, c1, |start, _| {
            let mut naive = NaiveHagerZhang::new(start);
            Box::new(move |here, side| naive.next(here, side))
        });
        assert!(compared > 1500, "{compared}");
    }
}

// ---- Corners, worked by hand ----

/// The steps after a first step of 1 and these refusals, from a start of slope -1.
fn steps(mut finder: impl StepFinder<f64>, ray: Ray<f64>, refusals: &[(Known, Side)]) -> Vec<f64> {
    finder.begin(&ray, 1.0);
    let next = |&((step, value, slope), side): &(Known, Side)| {
        let refused = Trial {
            step,
            value,
            slope: Some(slope),
        };
        match finder.next(&ray, &refused, side) {
            Proposal::Try(next) => next,
            Proposal::Spent => panic!("it never gives up"),
        }
    };
    refusals.iter().map(next).collect()
}

fn ray(value: f64, decrease: f64) -> Ray<f64> {
    let mut ray = Ray::new(value, -1.0);
    ray.decrease = Some(decrease);
    ray
}

const LONG: Side = Side::TooLong;
const SHORT: Side = Side::TooShort;

/// Case 3 of the paper holds for a slope of 0, too; the cubic `-t + t^2/8 + t^3/4` has its minimizer at the trial, not
/// beyond it, so the longest step allowed is next: 1 and 4 times the advance from 0.
#[test]
fn a_lower_trial_with_no_slope_sends_more_thuente_outward() {
    let refusals = [((1.0, -0.625, 0.0), SHORT)];
    assert_eq!(steps(MoreThuente::new(), ray(0.0, 1e-4), &refusals), [5.0]);
}

/// `f_t = f_l` with slopes of opposite sign is case 2 of the paper, not case 1: the secant step 1/4 lies farther from the
/// trial than the cubic one, 0.61.
#[test]
fn a_value_equal_to_the_best_is_no_higher_one_for_more_thuente() {
    // Decrease is measured from 1, so that the first stage is over.
    let ray = ray(0.0, 1e-4).with_reference(1.0);
    let trials = [((1.0, 0.0, 3.0), LONG), ((0.25, -0.25, 0.125), LONG)];
    let mut naive = NaiveMoreThuente::new((0.0, -1.0), 1.0);
    naive.first_stage = false;
    let expected = trials.map(|(here, _)| naive.next((0.0, -1.0), 1e-4, here));
    assert_eq!(expected[0], 0.25);
    let found = steps(MoreThuente::new(), ray, &trials);
    for (found, expected) in found.iter().zip(expected) {
        assert!((found - expected).abs() < 1e-14, "{found} for {expected}");
    }
}

/// Algorithm 3.5 zooms back to the step before as soon as the slope does not descend, whatever the verdict; and where the
/// verdict says that it went too far, whatever the slope.
#[test]
fn bracket_zoom_grows_only_where_slope_and_verdict_both_point_outward() {
    let next = |slope: f64, side: Side| {
        let refusals = [((1.0, -0.5, slope), side)];
        steps(BracketZoom::new(), ray(0.0, 0.1), &refusals)[0]
    };
    for (slope, side) in [(0.25, SHORT), (0.0, SHORT), (0.25, LONG), (-0.25, LONG)] {
        let expected = interpolated((1.0, -0.5, slope), (0.0, 0.0, -1.0));
        assert!(
            (next(slope, side) - expected).abs() < 1e-14,
            "{slope}, {side:?}"
        );
        assert!(next(slope, side) < 1.0);
    }
    assert!(next(-0.25, SHORT) > 1.0);
}

/// The cubic `-t + 7/8 t^2 - t^3/4` has its minimizer at the end of the bracket: a tenth of the width is kept from it.
#[test]
fn bracket_zoom_keeps_a_tenth_from_a_minimizer_at_the_end() {
    let refusals = [((1.0, -0.375, 0.0), LONG)];
    assert_eq!(steps(BracketZoom::new(), ray(0.0, 0.5), &refusals), [0.9]);
}

/// `eps` is `1e-6 |phi(0)|`, or the slack of the ray; U2 wants `phi(c) <= phi(0) + eps`.
#[test]
fn hager_zhang_tells_a_hill_by_the_value_at_the_start_and_the_slack() {
    let next = |ray: Ray<f64>, value: f64, side: Side| {
        steps(HagerZhang::new(), ray, &[((1.0, value, -0.5), side)])[0]
    };
    let (expanded, halved) = (5.0, 0.5);
    for start in [2.0, -2.0] {
        let plain = ray(start, 1e-4);
        assert_eq!(next(plain, start + 1e-6, SHORT), expanded, "{start}");
        assert_eq!(next(plain, start + 3e-6, SHORT), halved, "{start}");
        assert_eq!(next(plain, start - 1.0, SHORT), expanded, "{start}");
        assert_eq!(next(plain, start - 1.0, LONG), halved, "{start}");
        let slack = plain.with_slack(0.5);
        assert_eq!(next(slack, start + 0.5, SHORT), expanded, "{start}");
        assert_eq!(
            next(slack, start + 0.5_f64.next_up() + 1e-9, SHORT),
            halved,
            "{start}"
        );
    }
}

/// Where the slope vanishes at `b` itself, the secant leads to `b`, which is known: the middle is next.
#[test]
fn hager_zhang_does_not_ask_for_an_end_again() {
    let refusals = [((1.0, -0.5, 0.0), LONG)];
    assert_eq!(steps(HagerZhang::new(), ray(0.0, 1e-4), &refusals), [0.5]);
}

/// While the hill is being climbed down from 4, trials outside of `(a, hill)` teach nothing: the middle of the two is
/// asked for again.
#[test]
fn hager_zhang_climbs_down_where_it_was_though_trials_come_from_elsewhere() {
    let refusals = [
        ((1.0, -0.5, -0.5), SHORT), // a
        ((4.0, 1.0, -0.5), LONG),   // the hill
        ((5.0, -9.0, -0.5), SHORT),
        ((0.5, -0.3, 0.5), LONG),
        ((3.0, 1.0, -0.5), LONG),    // the hill has come nearer
        ((2.0, -0.75, -0.5), SHORT), // a has moved
    ];
    let found = steps(HagerZhang::new(), ray(0.0, 1e-4), &refusals);
    assert_eq!(found, [5.0, 2.5, 2.5, 2.5, 2.0, 2.5]);
}

/// Once a trial was too short, the method knows no more than the bracket.
#[test]
fn interpolating_backtracking_halves_a_bracket_with_two_ends() {
    let refusals = [((4.0, 2.0, 1.0), LONG), ((1.0, -0.5, -0.5), SHORT)];
    let found = steps(InterpolatingBacktracking::new(), ray(0.0, 1e-4), &refusals);
    assert_eq!(found[1], 2.5);
}

/// `x^3 - c x^2 - 3 x` bends down before it turns up; its minimizer is `(c + sqrt(c^2 + 9)) / 3`.
#[test]
fn cubics_that_bend_down_first_are_recovered_from_values_alone() {
    for bend in [0.0, 0.5, 2.0, 7.0] {
        let value = |x: f64| x * x * x - bend * x * x - 3.0 * x;
        let expected = (bend + f64::sqrt(bend * bend + 9.0)) / 3.0;
        for (a, b) in [(2.0, 1.0), (0.5, 3.0), (4.0, 0.25), (8.0, 6.0)] {
            let found = cubic_by_values(0.0, -3.0, (a, value(a)), (b, value(b)));
            assert!(
                (found - expected).abs() < 1e-11 * expected,
                "{bend}: {found} for {expected}"
            );
        }
    }
}

fn three_point(refusals: &[(Known, Side)]) -> f64 {
    steps(ThreePoint::new(), ray(0.0, 1e-4), refusals)[refusals.len() - 1]
}

/// `(a - 3)^2 / 6`: both shapes have their minimizer at 3, and so has their mean.
#[test]
fn three_point_grows_to_the_mean_of_two_minimizers() {
    let at = |a: f64| ((a, a * a / 6.0 - a, a / 3.0 - 1.0), SHORT);
    let grown = three_point(&[at(0.1), at(0.25)]);
    assert!((grown - 3.0).abs() < 1e-9, "{grown}");
}

/// Nothing turns ahead, and the slope has gained a factor of 2: 30 / 2^2 times the last advance.
#[test]
fn three_point_leaps_by_the_square_of_what_the_slope_gained() {
    assert_eq!(three_point(&[((1.0, -1.4, -2.0), SHORT)]), 8.5);
    let leap = three_point(&[((1.0, -1.1, -1.25), SHORT)]);
    assert!((leap - 20.2).abs() < 1e-12, "{leap}"); // 1 + 30 / 1.25^2
    // At least once, and at most 30 times.
    assert_eq!(three_point(&[((1.0, -8.0, -16.0), SHORT)]), 2.0);
}

/// Kinks at 0.95 and 0.05 of the bracket lie where the tangents at its ends meet: no margin keeps the finder from them.
#[test]
fn three_point_reaches_a_kink_far_to_one_side() {
    let kink = three_point(&[((1.0, -0.9, 1.0), LONG)]);
    assert!((kink - 0.95).abs() < 1e-12, "{kink}");
    let kink = three_point(&[((1.0, 0.9, 1.0), LONG)]);
    assert!((kink - 0.05).abs() < 1e-12, "{kink}");
}

/// A step that did not decrease enough shows so to the shapes, unless the noise of the values explains it.
#[test]
fn three_point_tilts_its_shapes_only_beyond_the_noise() {
    let refusals = [((1.0, -0.375, 0.5), LONG)];
    let next = |decrease: f64, noise: f64| {
        let ray = ray(0.0, decrease).with_value_noise(noise);
        steps(ThreePoint::new(), ray, &refusals)[0]
    };
    let plain = next(1e-4, 0.0);
    assert!(next(0.5, 0.0) < plain); // the line falls to -1/2 there
    assert_eq!(next(0.5, 0.25), plain); // and with twice the noise to 0
    assert_eq!(next(0.5, 0.0625), plain); // on the line itself
    assert!(next(0.5, 0.03125) < plain);
}

/// The shares of the way where the slope of the polynomial of degree 5 through value and slope at 0, 1 and `place` turns
/// upward: its coefficients by elimination, its turn by halving.
fn quintic_turn(slope: f64, rise: f64, end_slope: f64, place: f64, value: f64, there: f64) -> f64 {
    let row = |t: f64| [t * t, t.powi(3), t.powi(4), t.powi(5)];
    let slopes = |t: f64| [2.0 * t, 3.0 * t * t, 4.0 * t.powi(3), 5.0 * t.powi(4)];
    let mut rows = [
        (row(1.0), rise - slope),
        (slopes(1.0), end_slope - slope),
        (row(place), value - slope * place),
        (slopes(place), there - slope),
    ];
    for i in 0..4 {
        let pivot = (i..4).max_by(|a, b| rows[*a].0[i].abs().total_cmp(&rows[*b].0[i].abs()));
        rows.swap(i, pivot.unwrap());
        let (lead, right) = rows[i];
        for (j, (left, value)) in rows.iter_mut().enumerate() {
            let factor = left[i] / lead[i];
            if j != i {
                (0..4).for_each(|k| left[k] -= factor * lead[k]);
                *value -= factor * right;
            }
        }
    }
    let coefficients: Vec<f64> = (0..4).map(|i| rows[i].1 / rows[i].0[i]).collect();
    let slope_at = |t: f64| slope + (0..4).map(|i| coefficients[i] * slopes(t)[i]).sum::<f64>();
    let (mut low, mut high) = (0.0, 1.0);
    for _ in 0..60 {
        let middle = 0.5 * (low + high);
        if slope_at(middle) < 0.0 {
            low = middle;
        } else {
            high = middle;
        }
    }
    low
}

/// Item 4 of the page: where an end's slope keeps more than 0.6 of its size on convex data, the next trial goes 0.7 of the
/// way from the minimizer of the shapes to where the tangents meet, or to the zero of the line through the two slopes of
/// that side, whichever is nearer to the stalled end. The two-point shape is the hyperbola on all of these data.
#[test]
fn three_point_goes_where_a_stalled_end_must_turn_unseen() {
    // The end on the other side; the last two steps of the stalled side; the share where the unseen turn is taken to be.
    let cases: [Stalled; 5] = [
        // too short: the line through -1 at 0 and -0.7 at 1 vanishes at 10/3
        (
            "line",
            (10.0, 9.05, 2.0),
            (0.0, 0.0, -1.0),
            (1.0, -0.85, -0.7),
            SHORT,
            Some(10.0 / 3.0),
        ),
        (
            "tangents",
            (10.0, 15.35, 2.0),
            (0.0, 0.0, -1.0),
            (1.0, -0.85, -0.7),
            SHORT,
            None,
        ),
        // too long: the line through 2 at 10 and 1.5 at 9 vanishes at 6
        (
            "line",
            (0.0, 0.0, -1.0),
            (10.0, 3.5, 2.0),
            (9.0, 2.7, 1.5),
            LONG,
            Some(6.0),
        ),
        (
            "tangents",
            (0.0, 0.0, -1.0),
            (10.0, 3.5, 1.7),
            (9.0, 2.025, 1.5),
            LONG,
            None,
        ),
        // two slopes of opposite sign on one side: their line vanishes outside of the bracket
        (
            "tangents",
            (0.0, 0.0, -1.0),
            (10.0, 3.5, -2.0),
            (9.0, 2.7, 1.5),
            LONG,
            None,
        ),
    ];
    for (name, other, before, here, side, zero) in cases {
        let (low, high) = if side == SHORT {
            (here, other)
        } else {
            (other, here)
        };
        let width = high.0 - low.0;
        let (slope, rise, end) = (low.2 * width, high.1 - low.1, high.2 * width);
        assert!(slope < rise && rise < end, "convex");
        assert!((rise - slope) / (end - rise) >= 0.7, "the hyperbola's");
        let q = (rise * rise - slope * end).sqrt();
        let two = -slope * (end - rise) / (q * (q + rise - slope));
        let place = (before.0 - low.0) / width;
        let three = quintic_turn(slope, rise, end, place, before.1 - low.1, before.2 * width);
        let seen = if (three - two).abs() < 0.25 && three > 1e-6 && three < 1.0 - 1e-6 {
            three
        } else {
            two
        };
        let tangents = (rise - end) / (slope - end);
        let unseen = zero.map_or(tangents, |zero| (zero - low.0) / width);
        let nearer = if side == SHORT {
            unseen <= tangents
        } else {
            unseen >= tangents
        };
        assert!(nearer, "{name}");
        let share = (seen + 0.7 * (unseen - seen)).clamp(0.05, 0.95);
        let refusals = match side {
            SHORT => vec![(other, LONG), (here, SHORT)],
            LONG => vec![(before, LONG), (here, LONG)],
        };
        let found = three_point(&refusals);
        let expected = low.0 + width * share;
        assert!(
            (found - expected).abs() < 1e-9,
            "{name}, {side:?}: {found} for {expected}"
        );
    }
}

/// Values alone, on `(a - 3)^2 / 6`: the parabola through the low end and the value of the trial is the function itself.
#[test]
fn three_point_takes_the_slope_of_a_parabola_where_none_is_given() {
    let at = |step: f64, slope: bool| Trial {
        step,
        value: step * step / 6.0 - step,
        slope: slope.then_some(step / 3.0 - 1.0),
    };
    let ray = ray(0.0, 1e-4);
    for given in [true, false] {
        let mut finder = ThreePoint::new();
        finder.begin(&ray, 1.0);
        let Proposal::Try(next) = finder.next(&ray, &at(1.0, given), SHORT) else {
            panic!("it never gives up")
        };
        assert!((next - 3.0).abs() < 1e-12, "{next}");
        let Proposal::Try(next) = finder.next(&ray, &at(7.0, false), LONG) else {
            panic!("it never gives up")
        };
        assert!((next - 3.0).abs() < 1e-9, "{next}");
    }
}

/// Finders that live on slopes answer a missing one by half or twice the step.
#[test]
fn a_missing_slope_is_answered_by_half_or_twice_the_step() {
    let finders: [Box<dyn StepFinder<f64>>; 3] = [
        Box::new(MoreThuente::new()),
        Box::new(HagerZhang::new()),
        Box::new(BracketZoom::new()),
    ];
    for mut finder in finders {
        for (side, expected) in [(LONG, 1.5), (SHORT, 6.0)] {
            finder.begin(&ray(0.0, 1e-4), 3.0);
            let refused = Trial {
                step: 3.0,
                value: -1.0,
                slope: None,
            };
            let next = finder.next(&ray(0.0, 1e-4), &refused, side);
            assert_eq!(next, Proposal::Try(expected));
        }
    }
}

/// Convex data have `g0 < m < g1`, strictly; where two of the three are equal, or `m` is the least, the cubic is next.
#[test]
fn three_point_takes_the_cubic_for_all_that_is_not_strictly_convex() {
    for (mean, end) in [(-1.0, 1.5), (0.5, 0.5), (-1.1, 2.0), (0.75, 0.5)] {
        let found = three_point(&[((1.0, mean, end), LONG)]);
        let expected = cubic((0.0, 0.0, -1.0), (1.0, mean, end));
        assert!(0.1 < expected && expected < 0.9);
        assert!(
            (found - expected).abs() < 1e-12,
            "{mean}, {end}: {found} for {expected}"
        );
    }
}

/// Goldstein knows steps that are too short and do not descend: they are doubled, and from there the bracket is halved.
#[test]
fn three_point_doubles_and_halves_from_a_short_end_that_does_not_descend() {
    for slope in [0.0, 0.5] {
        let short = ((1.0, -0.9, slope), SHORT);
        assert_eq!(three_point(&[short]), 2.0);
        assert_eq!(three_point(&[short, ((2.0, 0.5, 3.0), LONG)]), 1.5);
    }
}

/// The ratio is taken of the bracket, counted from its short end; while nothing was too long the step is divided by it.
#[test]
fn backtracking_takes_its_ratio_of_the_bracket() {
    let refusals = [
        ((1.0, -0.5, -1.0), SHORT),
        ((4.0, -0.7, -1.0), SHORT),
        ((16.0, 9.0, 1.0), LONG),
        ((7.0, 8.0, 1.0), LONG),
        ((5.0, -0.9, -1.0), SHORT),
    ];
    let found = steps(Backtracking::new(0.25).unwrap(), ray(0.0, 0.1), &refusals);
    assert_eq!(found, [4.0, 16.0, 7.0, 4.75, 5.5]);
}

/// Lengthened by the factor while nothing was too long; then at the share `ratio` of the bracket from its short end.
#[test]
fn expansion_lengthens_by_its_factor_and_shortens_by_its_ratio() {
    let refusals = [
        ((1.0, -0.5, -1.0), SHORT),
        ((3.0, -0.7, -1.0), SHORT),
        ((9.0, 9.0, 1.0), LONG),
        ((4.5, 8.0, 1.0), LONG),
    ];
    let found = steps(Expansion::new(3.0, 0.25).unwrap(), ray(0.0, 0.1), &refusals);
    assert_eq!(found, [3.0, 9.0, 4.5, 3.375]);
}

#[test]
fn expansion_goes_on_only_while_the_value_falls() {
    let accepted = |step: f64, value: f64| Trial {
        step,
        value,
        slope: None,
    };
    let ray = ray(0.0, 0.1);
    let mut finder = Expansion::new(3.0, 0.25).unwrap();
    finder.begin(&ray, 1.0);
    assert_eq!(
        finder.polish(&ray, &accepted(1.0, -0.5)),
        Proposal::Try(3.0)
    );
    assert_eq!(
        finder.polish(&ray, &accepted(3.0, -0.75)),
        Proposal::Try(9.0)
    );
    assert_eq!(finder.polish(&ray, &accepted(9.0, -0.75)), Proposal::Spent);
}

/// Golden section by its definition: three steps with the lowest value in the middle, the next one in the larger part at
/// its smaller share; to the right by the golden ratio until something rises, to the left by its square until something
/// falls.
#[test]
fn golden_section_divides_the_larger_part() {
    let phi = 0.5 * (1.0 + 5.0_f64.sqrt());
    for minimizer in [0.01, 0.3, 0.99, 1.0, 1.7, 30.0] {
        let value = |a: f64| (a - minimizer).powi(2) * if a > minimizer { 2.0 } else { 1.0 };
        let start = Ray::without_slope(value(0.0));
        let mut finder = GoldenSection::new(1e-5).unwrap();
        let mut step = finder.begin(&start, 1.0);
        let mut tried = vec![(0.0, value(0.0))];
        loop {
            tried.push((step, value(step)));
            tried.sort_by(|a, b| a.0.total_cmp(&b.0));
            let least = (0..tried.len())
                .min_by(|a, b| tried[*a].1.total_cmp(&tried[*b].1))
                .unwrap();
            let at = |i: usize| tried[i].0;
            let trial = Trial {
                step,
                value: value(step),
                slope: None,
            };
            let proposal = finder.polish(&start, &trial);
            let expected = if least == 0 {
                at(1) / (phi * phi)
            } else if least + 1 == tried.len() {
                at(least) + phi * (at(least) - at(least - 1))
            } else {
                let (left, right) = (at(least) - at(least - 1), at(least + 1) - at(least));
                if left.max(right) <= 1e-5 * at(least) {
                    assert_eq!(proposal, Proposal::Spent, "{minimizer}");
                    break;
                }
                if right > left {
                    at(least) + right / (phi * phi)
                } else {
                    at(least) - left / (phi * phi)
                }
            };
            let Proposal::Try(next) = proposal else {
                panic!("{minimizer}: it ends at {step}")
            };
            assert!(
                (next - expected).abs() <= 1e-9 * expected,
                "{minimizer}: {next} for {expected}"
            );
            step = next;
        }
        assert!(
            (step - minimizer).abs() <= 2e-5 * minimizer,
            "{minimizer}: {step}"
        );
    }
}

/// With tolerances so wide that each search ends, too.
#[test]
fn brent_by_slopes_asks_for_the_steps_of_the_book() {
    let mut compared = 0;
    let mut ended = 0;
    for (name, first, phi) in functions() {
        for tolerance in [0.3, 0.03, 1e-8] {
            let start = phi(0.0);
            let ray = Ray::new(start.0, start.1);
            let mut finder = BrentSlopes::new(tolerance).unwrap();
            let mut naive = NaiveBrentSlopes {
                start: start.0,
                left: (0.0, start.0, start.1),
                hill: None,
                zero: None,
            };
            let mut step = finder.begin(&ray, first);
            for trial in 1..=12 {
                let (value, slope) = phi(step);
                let settled = slope.abs() < 1e-3 * start.1.abs();
                if settled || !value.is_finite() || !slope.is_finite() {
                    break;
                }
                let refused = Trial {
                    step,
                    value,
                    slope: Some(slope),
                };
                let proposal = finder.next(&ray, &refused, LONG);
                let name = format!(
                    "{name} from {first:e} to {tolerance}, after trial {trial} at {step:e}"
                );
                let Some(expected) = naive.next((step, value, slope), tolerance) else {
                    assert_eq!(proposal, Proposal::Spent, "{name}");
                    ended += 1;
                    break;
                };
                if expected < 1e-9 * step {
                    break;
                }
                let Proposal::Try(next) = proposal else {
                    panic!("{name}: it ends, and {expected:e} would be next")
                };
                let close = (next - expected).abs() <= 1e-6 * expected + 1e-12 * step;
                assert!(close, "{name}: {next:e} for {expected:e}");
                compared += 1;
                step = next;
            }
        }
    }
    assert!(compared > 5000 && ended > 300, "{compared} and {ended}");
}

#[test]
fn brent_by_values_asks_for_the_steps_of_the_book() {
    let mut compared = 0;
    let mut ended = 0;
    for (name, first, phi) in functions() {
        for tolerance in [0.3, 0.03, 1e-8] {
            let start = phi(0.0);
            let ray = Ray::without_slope(start.0);
            let mut finder = BrentValues::new(tolerance).unwrap();
            let mut naive = NaiveBrentValues {
                tried: vec![(0.0, start.0)],
                closing: None,
            };
            let mut step = finder.begin(&ray, first);
            for trial in 1..=20 {
                let value = phi(step).0;
                let narrow = |closing: &NaiveClosing| {
                    let (low, high) = closing.ends;
                    high - low < 1e-2 * high || (closing.x.0 - closing.w.0).abs() < 1e-3 * high
                };
                if !value.is_finite() || naive.closing.as_ref().is_some_and(narrow) {
                    break; // beyond that values say less than steps
                }
                let refused = Trial {
                    step,
                    value,
                    slope: None,
                };
                let proposal = finder.next(&ray, &refused, LONG);
                let name = format!(
                    "{name} from {first:e} to {tolerance}, after trial {trial} at {step:e}"
                );
                let Some(expected) = naive.next((step, value), tolerance) else {
                    assert_eq!(proposal, Proposal::Spent, "{name}");
                    ended += 1;
                    break;
                };
                let Proposal::Try(next) = proposal else {
                    panic!("{name}: it ends, and {expected:e} would be next")
                };
                let close = (next - expected).abs() <= 1e-6 * expected;
                assert!(close, "{name}: {next:e} for {expected:e}");
                compared += 1;
                step = next;
            }
        }
    }
    assert!(compared > 5000 && ended > 300, "{compared} and {ended}");
}

// ---- Exact minimisers where trials are not what was asked for ----

/// The last answer after trials at these steps, with these values and slopes of sign `value`.
fn last(mut finder: impl StepFinder<f64>, first: f64, trials: &[(f64, f64)]) -> Proposal<f64> {
    let ray = Ray::without_slope(0.0);
    finder.begin(&ray, first);
    let tell = |&(step, value): &(f64, f64)| {
        let trial = Trial {
            step,
            value,
            slope: Some(value.signum()),
        };
        finder.next(&ray, &trial, LONG)
    };
    trials.iter().map(tell).last().unwrap()
}

fn minimiser(name: &str) -> Box<dyn StepFinder<f64>> {
    match name {
        "golden" => Box::new(GoldenSection::default()),
        "values" => Box::new(BrentValues::default()),
        _ => Box::new(BrentSlopes::default()),
    }
}

#[test]
fn a_first_trial_before_the_step_asked_for_bounds_the_minimisers() {
    for name in ["golden", "values", "slopes"] {
        // It was moved there from 1, and the value falls up to it.
        for moved in [0.25, 0.75] {
            let Proposal::Try(next) = last(minimiser(name), 1.0, &[(moved, -1.0)]) else {
                panic!("{name} gives up")
            };
            assert!(0.0 < next && next < 1.0, "{name} from {moved}: {next}");
        }
    }
}

/// `s = (3 - sqrt 5) / 2`: what was known before ends the search.
#[test]
fn a_trial_that_teaches_nothing_ends_the_minimisers_by_values() {
    let s = 0.5 * (3.0 - 5.0_f64.sqrt());
    for name in ["golden", "values"] {
        // The right end again, while the middle is sought.
        let told = last(minimiser(name), 1.0, &[(1.0, 1.0), (1.0, 1.0)]);
        assert_eq!(told, Proposal::Spent, "{name}");
        // Beyond the right end.
        let told = last(minimiser(name), 1.0, &[(1.0, 1.0), (2.0, 1.0)]);
        assert_eq!(told, Proposal::Spent, "{name}");
        let told = last(minimiser(name), 1.0, &[(1.0, 1.0), (s, -1.0), (1.5, -2.0)]);
        assert_eq!(told, Proposal::Spent, "{name}");
        // The middle again, while a step to its left is asked for.
        let told = last(
            minimiser(name),
            1.0,
            &[(1.0, 1.0), (s, -1.0), (0.5, 0.0), (s, -1.0)],
        );
        assert_eq!(told, Proposal::Spent, "{name}");
    }
}

#[test]
fn a_value_that_does_not_fall_is_an_end_of_the_bracket() {
    for name in ["golden", "values"] {
        let Proposal::Try(next) = last(minimiser(name), 1.0, &[(1.0, 0.0)]) else {
            panic!("{name} gives up")
        };
        assert!(next < 1.0, "{name}: {next}");
    }
}

#[test]
fn the_minimisers_by_values_end_at_both_ends_of_the_numbers() {
    for name in ["golden", "values"] {
        let told = last(minimiser(name), 1e308, &[(1e308, -1.0)]);
        assert_eq!(
            told,
            Proposal::Spent,
            "{name} goes on beyond the largest number"
        );
        let least = f64::from_bits(1);
        let told = last(minimiser(name), least, &[(least, 1.0)]);
        assert_eq!(
            told,
            Proposal::Spent,
            "{name} goes on before the smallest number"
        );
    }
}

#[test]
fn brent_by_slopes_tells_a_hill_by_a_value_above_the_start() {
    let next = |value: f64| {
        steps(
            BrentSlopes::default(),
            ray(0.0, 0.1),
            &[((1.0, value, -0.5), LONG)],
        )[0]
    };
    assert!(next(0.0) > 1.0); // as high as the start, and falling
    assert_eq!(next(1e-300), 0.5);
}

#[test]
fn brent_by_slopes_halves_where_the_start_has_no_slope() {
    let told = last(BrentSlopes::default(), 1.0, &[(1.0, 1.0)]);
    assert_eq!(told, Proposal::Try(0.5));
}

#[test]
fn brent_by_slopes_takes_trials_from_elsewhere_for_what_they_are() {
    // Beyond the step asked for, and still falling: the search goes on from there.
    let Proposal::Try(next) = last(BrentSlopes::default(), 1.0, &[(2.0, -1.0)]) else {
        panic!("it gives up")
    };
    assert!(next > 2.0, "{next}");
    // Beyond the right end, or on it: nothing new.
    for beyond in [1.0, 1.5] {
        let told = last(BrentSlopes::default(), 1.0, &[(1.0, 1.0), (beyond, 2.0)]);
        assert_eq!(told, Proposal::Spent, "{beyond}");
        let told = last(BrentSlopes::default(), 1.0, &[(1.0, 1.0), (beyond, -2.0)]);
        assert_eq!(told, Proposal::Spent, "{beyond}");
    }
}

#[test]
fn brent_by_slopes_allows_for_slack_and_rounding_before_it_tells_a_hill() {
    let next = |ray: Ray<f64>, value: f64| {
        steps(BrentSlopes::default(), ray, &[((1.0, value, -0.5), LONG)])[0]
    };
    assert_eq!(next(ray(2.0, 0.1), 3.0), 0.5);
    assert!(next(ray(2.0, 0.1).with_slack(0.5), 2.25) > 1.0);
    assert_eq!(next(ray(2.0, 0.1).with_slack(0.5), 2.75), 0.5);
}

#[test]
fn brent_by_slopes_ends_at_an_accepted_trial_where_the_slope_has_vanished() {
    let polished = |slope: f64| {
        let mut finder = BrentSlopes::new(0.25).unwrap();
        finder.begin(&ray(0.0, 0.1), 1.0);
        let accepted = Trial {
            step: 1.0,
            value: -0.5,
            slope: Some(slope),
        };
        finder.polish(&ray(0.0, 0.1), &accepted)
    };
    for flat in [0.0, 0.25, -0.25] {
        assert_eq!(polished(flat), Proposal::Spent, "{flat}");
    }
    for steep in [0.5, -0.5] {
        assert!(matches!(polished(steep), Proposal::Try(_)), "{steep}");
    }
}
