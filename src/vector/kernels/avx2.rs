//! Eight numbers at a time on x86-64 processors with AVX2, found at run time.

use super::lanes::{Eight, Kernel, LANES};
use pulp::x86::V3;
use pulp::{NullaryFnOnce, cast, f32x8, f64x4};

/// Runs the kernel with AVX2 if the processor has it; gives it back if not.
#[inline]
pub(crate) fn run<T, K: Kernel<T>>(kernel: K) -> Result<K::Output, K>
where
    V3: Eight<T>,
{
    struct Call<K, T>(K, V3, core::marker::PhantomData<T>);
    impl<T, K: Kernel<T>> NullaryFnOnce for Call<K, T>
    where
        V3: Eight<T>,
    {
        type Output = K::Output;
        #[inline(always)]
        fn call(self) -> K::Output {
            self.0.run(self.1)
        }
    }
    match V3::try_new() {
        Some(v3) => Ok(v3.vectorize(Call(kernel, v3, core::marker::PhantomData))),
        None => Err(kernel),
    }
}

impl Eight<f64> for V3 {
    type Octet = [f64x4; 2];

    #[inline(always)]
    fn load(self, x: &[f64; LANES]) -> Self::Octet {
        cast(*x)
    }
    #[inline(always)]
    fn load_single(self, x: &[f32; LANES]) -> Self::Octet {
        let halves: [core::arch::x86_64::__m128; 2] = cast(*x);
        halves.map(|half| cast(self.avx._mm256_cvtps_pd(half)))
    }
    #[inline(always)]
    fn numbers(self, x: Self::Octet) -> [f64; LANES] {
        cast(x)
    }
    #[inline(always)]
    fn add(self, x: Self::Octet, y: Self::Octet) -> Self::Octet {
        [self.add_f64x4(x[0], y[0]), self.add_f64x4(x[1], y[1])]
    }
    #[inline(always)]
    fn sub(self, x: Self::Octet, y: Self::Octet) -> Self::Octet {
        [self.sub_f64x4(x[0], y[0]), self.sub_f64x4(x[1], y[1])]
    }
    #[inline(always)]
    fn mul(self, x: Self::Octet, y: Self::Octet) -> Self::Octet {
        [self.mul_f64x4(x[0], y[0]), self.mul_f64x4(x[1], y[1])]
    }
}

impl Eight<f32> for V3 {
    type Octet = f32x8;

    #[inline(always)]
    fn load(self, x: &[f32; LANES]) -> Self::Octet {
        cast(*x)
    }
    #[inline(always)]
    fn load_single(self, x: &[f32; LANES]) -> Self::Octet {
        cast(*x)
    }
    #[inline(always)]
    fn numbers(self, x: Self::Octet) -> [f32; LANES] {
        cast(x)
    }
    #[inline(always)]
    fn add(self, x: Self::Octet, y: Self::Octet) -> Self::Octet {
        self.add_f32x8(x, y)
    }
    #[inline(always)]
    fn sub(self, x: Self::Octet, y: Self::Octet) -> Self::Octet {
        self.sub_f32x8(x, y)
    }
    #[inline(always)]
    fn mul(self, x: Self::Octet, y: Self::Octet) -> Self::Octet {
        self.mul_f32x8(x, y)
    }
}
