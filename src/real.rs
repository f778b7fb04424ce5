//! [`Real`]: the two floating-point types that a search can run in.

use core::fmt::{Debug, Display, LowerExp};
use num_traits::Float;

/// `f32` or `f64`.
///
/// Decisions use `+ - * /`, `sqrt` and comparisons only, so that a run is the same on every machine.
pub trait Real: Float + Debug + Display + LowerExp + Default + Send + Sync + 'static {
    /// The cube root of the rounding unit: 6.1e-6 in double and 4.9e-3 in single precision.
    const CUBE_ROOT_OF_EPSILON: Self;
    /// The number nearest to `x`; how a constant of a formula enters generic code.
    fn of(x: f64) -> Self;
    /// The same number in double precision, without loss.
    fn to_double(self) -> f64;
}

impl Real for f32 {
    const CUBE_ROOT_OF_EPSILON: f32 = 4.921_566_6e-3;
    fn of(x: f64) -> Self {
        x as f32
    }
    fn to_double(self) -> f64 {
        f64::from(self)
    }
}

impl Real for f64 {
    const CUBE_ROOT_OF_EPSILON: f64 = 6.055_454_452_393_343e-6;
    fn of(x: f64) -> Self {
        x
    }
    fn to_double(self) -> f64 {
        self
    }
}
