//! Eight numbers at a time: what a reduction is written in, once, whatever the processor does them with.

use crate::Real;

/// Number of virtual lanes of a reduction; fixed, because it decides the order of additions.
pub(crate) const LANES: usize = 8;

/// A way to work on eight numbers at a time. Every way gives the same bits: each operation rounds by itself.
pub trait Eight<T>: Copy {
    /// The eight numbers, as the processor holds them.
    type Octet: Copy;

    fn load(self, x: &[T; LANES]) -> Self::Octet;
    fn load_single(self, x: &[f32; LANES]) -> Self::Octet;
    fn numbers(self, x: Self::Octet) -> [T; LANES];
    fn add(self, x: Self::Octet, y: Self::Octet) -> Self::Octet;
    fn sub(self, x: Self::Octet, y: Self::Octet) -> Self::Octet;
    fn mul(self, x: Self::Octet, y: Self::Octet) -> Self::Octet;
}

/// A computation that is written for any [`Eight`].
pub trait Kernel<T> {
    type Output;

    /// To be inlined, always: the instructions are chosen by the function around it.
    fn run<E: Eight<T>>(self, eight: E) -> Self::Output;
}

/// Plain arrays, on every processor.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Portable;

impl<T: Real> Eight<T> for Portable {
    type Octet = [T; LANES];

    #[inline(always)]
    fn load(self, x: &[T; LANES]) -> Self::Octet {
        *x
    }
    #[inline(always)]
    fn load_single(self, x: &[f32; LANES]) -> Self::Octet {
        x.map(|x| T::of(f64::from(x)))
    }
    #[inline(always)]
    fn numbers(self, x: Self::Octet) -> [T; LANES] {
        x
    }
    #[inline(always)]
    fn add(self, x: Self::Octet, y: Self::Octet) -> Self::Octet {
        core::array::from_fn(|k| x[k] + y[k])
    }
    #[inline(always)]
    fn sub(self, x: Self::Octet, y: Self::Octet) -> Self::Octet {
        core::array::from_fn(|k| x[k] - y[k])
    }
    #[inline(always)]
    fn mul(self, x: Self::Octet, y: Self::Octet) -> Self::Octet {
        core::array::from_fn(|k| x[k] * y[k])
    }
}

/// Folds the lanes pairwise: the upper half onto the lower, three times.
#[inline(always)]
pub(crate) fn fold<T: Real>(l: [T; LANES]) -> T {
    let l = [l[0] + l[4], l[1] + l[5], l[2] + l[6], l[3] + l[7]];
    (l[0] + l[2]) + (l[1] + l[3])
}

/// Numbers in memory that take part in sums of `T`: `T` itself, and `f32` in sums of `f64`.
pub trait Stored<T>: Copy + Send + Sync {
    /// The same number.
    #[doc(hidden)]
    fn widen(self) -> T;
    #[doc(hidden)]
    fn load<E: Eight<T>>(eight: E, x: &[Self; LANES]) -> E::Octet;
}

impl<T: Real> Stored<T> for T {
    #[inline(always)]
    fn widen(self) -> T {
        self
    }
    #[inline(always)]
    fn load<E: Eight<T>>(eight: E, x: &[T; LANES]) -> E::Octet {
        eight.load(x)
    }
}

impl Stored<f64> for f32 {
    #[inline(always)]
    fn widen(self) -> f64 {
        f64::from(self)
    }
    #[inline(always)]
    fn load<E: Eight<f64>>(eight: E, x: &[f32; LANES]) -> E::Octet {
        eight.load_single(x)
    }
}
