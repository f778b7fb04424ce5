//! Why a search that found nothing lower failed: read from what its trials showed.

use super::Ending;
use crate::{Ray, Real, Side, Trial};

/// A value's rounding is taken as so many units in its last place.
const ROUNDING: f64 = 4.0;
/// A difference of values means something when the slope promised so many times its rounding.
const TELLING: f64 = 1000.0;
/// A step is short when it promises at most so many times that, or the square root of the rounding unit times the value.
/// At longer ones the differences of a smooth function may settle on anything: those of `|a - 1|` do, seen from far away.
const SHORT: f64 = 4.0;

/// What the trials of a search showed about the slope at its start; kept beside the log, which forgets.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Evidence<T> {
    /// The shortest and the longest step with a finite value, and the first; infinity and 0 before there is one.
    shortest: T,
    longest: T,
    first: T,
    /// The decrease that the slope must promise for a difference of values to mean something.
    telling: T,
    /// Whether all values equal the one at the start.
    flat: bool,
    /// The longest step that was too short.
    too_short: Option<T>,
    /// Whether a difference of values that means something was refused as too short: then the slope is not to blame.
    fell: bool,
    /// The shortest step at which a difference of values still means something, and the value there.
    near: Option<(T, T)>,
    /// The same for the shortest one that is at least twice as long.
    further: Option<(T, T)>,
}

impl<T: Real> Evidence<T> {
    pub(super) fn new(ray: &Ray<T>) -> Self {
        Evidence {
            shortest: T::infinity(),
            longest: T::zero(),
            first: T::zero(),
            telling: T::of(TELLING) * resolved(ray),
            flat: true,
            too_short: None,
            fell: false,
            near: None,
            further: None,
        }
    }

    /// Takes in a refused trial. It is on the way of every one: no divisions.
    #[inline]
    pub(super) fn note(&mut self, ray: &Ray<T>, trial: &Trial<T>, side: Side) {
        let step = trial.step;
        self.flat = self.flat && trial.value == ray.value;
        if self.longest == T::zero() {
            self.first = step;
        }
        if step < self.shortest {
            self.shortest = step;
        }
        if step > self.longest {
            self.longest = step;
        }
        if side == Side::TooShort {
            self.too_short = Some(self.too_short.map_or(step, |a| a.max(step)));
        }
        if -ray.slope * step < self.telling {
            return;
        }
        self.fell = self.fell || side == Side::TooShort;
        let here = (step, trial.value);
        match self.near {
            Some((near, _)) if step >= near => {
                let closer = self.further.is_none_or(|(further, _)| step < further);
                if closer && step >= near + near {
                    self.further = Some(here);
                }
            }
            near => {
                self.further = near
                    .filter(|(near, _)| *near >= step + step)
                    .or(self.further);
                self.near = Some(here);
            }
        }
    }

    /// The longest step that was too short.
    pub(super) fn too_short(&self) -> Option<T> {
        self.too_short
    }

    /// The diagnosis where all values equal the one at the start.
    pub(super) fn of_flatness(&self, ray: &Ray<T>) -> Option<Ending<T>> {
        (self.shortest < self.longest && self.flat).then_some(Ending::Flat {
            value: ray.value,
            slope: ray.slope,
            step: self.longest,
        })
    }

    /// The diagnosis where all trials at which a difference of values means something were too long, and those differences
    /// have settled, to a fifth of the slope, on something else than it.
    pub(super) fn of_the_slope(&self, ray: &Ray<T>) -> Option<Ending<T>> {
        if self.fell {
            return None;
        }
        let mean_slope = |(step, value): (T, T)| (value - ray.value) / step;
        let (near, further) = (self.near?, self.further?);
        let (step, measured, further) = (near.0, mean_slope(near), mean_slope(further));
        let slope = ray.slope.abs();
        let settled = (measured - further).abs() <= T::of(0.2) * measured.abs().max(slope);
        let wrong = settled && measured > T::of(0.5) * ray.slope && is_short(ray, step, self.first);
        wrong.then_some(Ending::WrongSlope {
            slope: ray.slope,
            measured,
            step,
        })
    }

    /// The diagnosis where the shortest step promised too little.
    pub(super) fn of_rounding(&self, ray: &Ray<T>) -> Option<Ending<T>> {
        let (promised, resolved) = (-ray.slope * self.shortest, resolved(ray));
        let drowned = promised <= self.telling; // not where nothing was finite: then it is infinite
        drowned.then_some(Ending::BelowRounding { promised, resolved })
    }
}

/// A value of 0 has no rounding: there a step is short next to the first one.
fn is_short<T: Real>(ray: &Ray<T>, step: T, first: T) -> bool {
    let promised = -ray.slope * step;
    let root = T::epsilon().sqrt();
    promised <= root.max(T::of(SHORT * TELLING) * rounding::<T>()) * ray.value.abs()
        || step <= root * root.sqrt() * first
}

fn rounding<T: Real>() -> T {
    T::of(ROUNDING) * T::epsilon()
}

/// What rounding of the value at the start, and its noise, hide.
fn resolved<T: Real>(ray: &Ray<T>) -> T {
    rounding::<T>() * ray.value.abs() + T::of(2.0) * ray.value_noise
}
