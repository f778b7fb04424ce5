//! [`Real`]: the two floating-point types that a search can run in.

use crate::vector::kernels::lanes::{Kernel, Portable};
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

    /// Runs a slice kernel with the widest instructions that the processor has for this type; the bits are the same.
    #[doc(hidden)]
    #[inline]
    fn run<K: Kernel<Self>>(kernel: K) -> K::Output {
        kernel.run(Portable)
    }
}

/// Kernels of this type run with AVX2 where the processor has it.
#[cfg(all(feature = "simd", target_arch = "x86_64"))]
macro_rules! run_wide {
    () => {
        #[inline]
        fn run<K: Kernel<Self>>(kernel: K) -> K::Output {
            match crate::vector::kernels::avx2::run(kernel) {
                Ok(output) => output,
                Err(kernel) => kernel.run(Portable),
            }
        }
    };
}
#[cfg(not(all(feature = "simd", target_arch = "x86_64")))]
macro_rules! run_wide {
    () => {};
}

impl Real for f32 {
    const CUBE_ROOT_OF_EPSILON: f32 = 4.921_566_6e-3;
    fn of(x: f64) -> Self {
        x as f32
    }
    fn to_double(self) -> f64 {
        f64::from(self)
    }
    run_wide!();
}

impl Real for f64 {
    const CUBE_ROOT_OF_EPSILON: f64 = 6.055_454_452_393_343e-6;
    fn of(x: f64) -> Self {
        x
    }
    fn to_double(self) -> f64 {
        self
    }
    run_wide!();
}
