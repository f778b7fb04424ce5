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
    /// The first, the shortest and the longest step with a finite value.
    steps: Option<[T; 3]>,
    /// Whether all values equal the one at the start.
    flat: bool,
    /// The longest step that was too short.
    too_short: Option<T>,
    /// Whether a difference of values that means something was refused as too short: then the slope is not to blame.
    fell: bool,
    /// The shortest step at which a difference of values still means something, and the mean slope up to there.
    near: Option<(T, T)>,
    /// The same for the shortest one that is at least twice as long.
    further: Option<(T, T)>,
}

impl<T: Real> Evidence<T> {
    pub(super) fn new() -> Self {
        Evidence {
            steps: None,
            flat: true,
            too_short: None,
            fell: false,
            near: None,
            further: None,
        }
    }

    /// Takes in a refused trial.
    pub(super) fn note(&mut self, ray: &Ray<T>, trial: &Trial<T>, side: Side) {
        let step = trial.step;
        self.flat = self.flat && trial.value == ray.value;
        self.steps = Some(match self.steps {
            None => [step; 3],
            Some([first, shortest, longest]) => [first, shortest.min(step), longest.max(step)],
        });
        if side == Side::TooShort {
            self.too_short = Some(self.too_short.map_or(step, |a| a.max(step)));
        }
        if -ray.slope * step < T::of(TELLING) * resolved(ray) {
            return;
        }
        self.fell = self.fell || side == Side::TooShort;
        let two = T::of(2.0);
        let measured = (step, (trial.value - ray.value) / step);
        match self.near {
            Some((near, _)) if step >= near => {
                let closer = self.further.is_none_or(|(further, _)| step < further);
                if closer && step >= two * near {
                    self.further = Some(measured);
                }
            }
            near => {
                self.further = near
                    .filter(|(near, _)| *near >= two * step)
                    .or(self.further);
                self.near = Some(measured);
            }
        }
    }

    /// The longest step that was too short.
    pub(super) fn too_short(&self) -> Option<T> {
        self.too_short
    }

    /// The diagnosis where all values equal the one at the start.
    pub(super) fn of_flatness(&self, ray: &Ray<T>) -> Option<Ending<T>> {
        let [_, shortest, longest] = self.steps?;
        (shortest < longest && self.flat).then_some(Ending::Flat {
            value: ray.value,
            slope: ray.slope,
            step: longest,
        })
    }

    /// The diagnosis where all trials at which a difference of values means something were too long, and those differences
    /// have settled, to a fifth of the slope, on something else than it.
    pub(super) fn of_the_slope(&self, ray: &Ray<T>) -> Option<Ending<T>> {
        let ([first, ..], false) = (self.steps?, self.fell) else {
            return None;
        };
        let ((step, measured), (_, further)) = (self.near?, self.further?);
        let slope = ray.slope.abs();
        let settled = (measured - further).abs() <= T::of(0.2) * measured.abs().max(slope);
        let wrong = settled && measured > T::of(0.5) * ray.slope && is_short(ray, step, first);
        wrong.then_some(Ending::WrongSlope {
            slope: ray.slope,
            measured,
            step,
        })
    }

    /// The diagnosis where the shortest step promised too little.
    pub(super) fn of_rounding(&self, ray: &Ray<T>) -> Option<Ending<T>> {
        let [_, shortest, _] = self.steps?;
        let (promised, resolved) = (-ray.slope * shortest, resolved(ray));
        let drowned = promised <= T::of(TELLING) * resolved;
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
