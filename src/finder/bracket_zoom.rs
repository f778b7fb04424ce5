//! Bracketing, then zoom with cubic interpolation.

use super::interpolation::{Point, cubic, quadratic};
use super::{Proposal, StepFinder, without_slope};
use crate::{Ray, Real, Side, Trial};

/// Grows the step until a bracket is found, then zooms in by safeguarded cubic interpolation.
///
/// With a Wolfe rule: `low` is the step of least value among those with sufficient decrease, and `high` lies on the
/// side to which the function falls from there, possibly to the left.
///
/// Source: Nocedal & Wright, Numerical Optimization, 2nd ed. 2006, algorithms 3.5 and 3.6. The safeguards which they
/// leave to the reader:
/// 1. growth: the minimizer of the cubic through the last two trials, kept between 1.1 and 4 times the last advance
///    beyond it (the factors of Moré & Thuente 1994, section 4);
/// 2. interpolation keeps 0.1 of the bracket's width from its ends (the lower factor of Dennis & Schnabel 1983, A6.3.1);
/// 3. a bracket that keeps more than 0.66 of its width is halved next (the factor of Moré & Thuente);
/// 4. where `high` came without a slope, the parabola of eq. 3.58 stands in for the cubic.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BracketZoom<T = f64> {
    phase: Phase<T>,
}

#[derive(Clone, Copy, Debug, PartialEq)]
enum Phase<T> {
    /// Nothing brackets a step yet; `before` is the trial before the last one.
    Growing {
        before: Point<T>,
    },
    Zooming(Zoom<T>),
}

#[derive(Clone, Copy, Debug, PartialEq)]
struct Zoom<T> {
    low: Point<T>,
    high: Trial<T>,
    /// Width of the bracket at the last trial.
    width: T,
}

impl<T: Real> BracketZoom<T> {
    /// Without parameters.
    pub fn new() -> Self {
        let origin = Point {
            step: T::zero(),
            value: T::zero(),
            slope: T::zero(),
        };
        BracketZoom {
            phase: Phase::Growing { before: origin },
        }
    }
}

impl<T: Real> Default for BracketZoom<T> {
    fn default() -> Self {
        Self::new()
    }
}

impl<T: Real> StepFinder<T> for BracketZoom<T> {
    fn begin(&mut self, ray: &Ray<T>, first: T) -> T {
        self.phase = Phase::Growing {
            before: Point {
                step: T::zero(),
                value: ray.value,
                slope: ray.slope,
            },
        };
        first
    }

    fn next(&mut self, ray: &Ray<T>, refused: &Trial<T>, side: Side) -> Proposal<T> {
        let here = match refused.slope {
            Some(slope) => Some(Point {
                step: refused.step,
                value: refused.value,
                slope,
            }),
            None => None,
        };
        let enough = has_decreased(ray, refused);
        match &mut self.phase {
            Phase::Growing { before } => {
                let low = *before;
                let first = low.step == T::zero();
                let zoom = if !enough || (!first && refused.value >= low.value) {
                    // Algorithm 3.5, first test: zoom(a_{i-1}, a_i)
                    Zoom::new(low, *refused)
                } else {
                    let Some(here) = here else {
                        return without_slope(refused, side);
                    };
                    if here.slope < T::zero() && side == Side::TooShort {
                        *before = here;
                        return Proposal::Try(grown(&low, &here));
                    }
                    // Algorithm 3.5, third test: zoom(a_i, a_{i-1})
                    Zoom::new(here, trial(&low))
                };
                let step = zoom.interpolate();
                self.phase = Phase::Zooming(zoom);
                Proposal::Try(step)
            }
            Phase::Zooming(zoom) => {
                // Algorithm 3.6
                if !enough || refused.value >= zoom.low.value {
                    zoom.high = *refused;
                } else {
                    let Some(here) = here else {
                        return without_slope(refused, side);
                    };
                    if here.slope * (zoom.high.step - zoom.low.step) >= T::zero() {
                        zoom.high = trial(&zoom.low);
                    }
                    zoom.low = here;
                }
                Proposal::Try(zoom.next())
            }
        }
    }

    fn wants_slope(&self) -> bool {
        true
    }
}

impl<T: Real> Zoom<T> {
    fn new(low: Point<T>, high: Trial<T>) -> Self {
        let width = (high.step - low.step).abs();
        Zoom { low, high, width }
    }

    fn next(&mut self) -> T {
        let width = (self.high.step - self.low.step).abs();
        let slow = width > T::of(0.66) * self.width;
        self.width = width;
        if slow {
            self.low.step + T::of(0.5) * (self.high.step - self.low.step)
        } else {
            self.interpolate()
        }
    }

    fn interpolate(&self) -> T {
        let (low, high) = (&self.low, &self.high);
        let found = match high.slope {
            Some(slope) => cubic(
                low,
                &Point {
                    step: high.step,
                    value: high.value,
                    slope,
                },
            ),
            None => quadratic(low, high.step, high.value),
        };
        let across = high.step - low.step;
        let share = (found - low.step) / across;
        let margin = T::of(0.1);
        let share = if share < margin {
            margin
        } else if share <= T::one() - margin {
            share
        } else if share > T::one() {
            T::of(0.5) // no minimizer inside
        } else if share > T::one() - margin {
            T::one() - margin
        } else {
            T::of(0.5) // NaN: no minimizer at all
        };
        low.step + share * across
    }
}

/// Sufficient decrease, with the rule's parameter where it has one.
fn has_decreased<T: Real>(ray: &Ray<T>, trial: &Trial<T>) -> bool {
    let decrease = ray.decrease.unwrap_or_else(|| T::of(1e-4));
    trial.value <= ray.decrease_limit(decrease, trial.step)
}

fn grown<T: Real>(before: &Point<T>, here: &Point<T>) -> T {
    let advance = here.step - before.step;
    let (least, most) = (
        here.step + T::of(1.1) * advance,
        here.step + T::of(4.0) * advance,
    );
    let found = cubic(before, here);
    if found < least && found > here.step {
        least
    } else if found < most && found > here.step {
        found
    } else {
        most
    }
}

fn trial<T: Real>(point: &Point<T>) -> Trial<T> {
    Trial {
        step: point.step,
        value: point.value,
        slope: Some(point.slope),
    }
}
