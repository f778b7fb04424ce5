//! Formulas that give value and gradient in one pass, for problems of many variables.

use core::fmt;
use core::panic::{RefUnwindSafe, UnwindSafe};

/// f and its gradient, from one text: they cannot drift apart.
pub(super) trait Formula:
    fmt::Debug + Send + Sync + UnwindSafe + RefUnwindSafe + 'static
{
    /// `f(x)`; every component of the gradient goes into `slopes`, which holds arbitrary numbers before. `Problem` has
    /// checked the lengths.
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64;
}

/// Where a gradient goes. Written over a type, so that a value alone is compiled without its derivatives.
pub(super) trait Slopes {
    /// All components become 0.
    fn clear(&mut self);
    /// Component `j`, counted from 0, becomes `slope`.
    fn set(&mut self, j: usize, slope: f64);
    /// Component `j`, counted from 0, grows by `slope`.
    fn add(&mut self, j: usize, slope: f64);
}

/// Only the value is wanted.
struct Unwanted;

impl Slopes for Unwanted {
    fn clear(&mut self) {}
    fn set(&mut self, _: usize, _: f64) {}
    fn add(&mut self, _: usize, _: f64) {}
}

impl Slopes for &mut [f64] {
    fn clear(&mut self) {
        self.fill(0.0);
    }
    fn set(&mut self, j: usize, slope: f64) {
        self[j] = slope;
    }
    fn add(&mut self, j: usize, slope: f64) {
        self[j] += slope;
    }
}

/// A [`Formula`] behind a pointer.
pub(super) trait Evaluate: fmt::Debug + Send + Sync + UnwindSafe + RefUnwindSafe {
    fn value(&self, x: &[f64]) -> f64;
    fn value_and_gradient(&self, x: &[f64], g: &mut [f64]) -> f64;
}

impl<F: Formula> Evaluate for F {
    fn value(&self, x: &[f64]) -> f64 {
        self.evaluate(x, &mut Unwanted)
    }

    fn value_and_gradient(&self, x: &[f64], mut g: &mut [f64]) -> f64 {
        self.evaluate(x, &mut g)
    }
}

/// A sum of many terms that loses little to rounding: blocks of 32 are summed plainly, the blocks with their rounding errors
/// (D. E. Knuth, The Art of Computer Programming 2, section 4.2.2, theorem B; from memory). At most 33 roundings fall on a
/// term, however many there are.
#[derive(Default)]
pub(super) struct Total {
    blocks: f64,
    lost: f64,
    block: f64,
    terms: u32,
}

const BLOCK: u32 = 32;

impl Total {
    #[inline]
    pub(super) fn add(&mut self, term: f64) {
        self.block += term;
        self.terms += 1;
        if self.terms == BLOCK {
            self.flush();
        }
    }

    fn flush(&mut self) {
        let sum = self.blocks + self.block;
        let of_block = sum - self.blocks;
        let of_blocks = sum - of_block;
        self.lost += (self.blocks - of_blocks) + (self.block - of_block);
        self.blocks = sum;
        self.block = 0.0;
        self.terms = 0;
    }

    pub(super) fn get(&self) -> f64 {
        // Beyond the largest number the errors are NaN, but the sum is an infinity.
        let lost = if self.blocks.is_finite() {
            self.lost
        } else {
            0.0
        };
        self.blocks + (self.block + lost)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_total_of_a_million_terms_keeps_its_digits() {
        // A plain sum is off by 1.3e-11.
        let mut total = Total::default();
        for _ in 0..1_000_000 {
            total.add(0.1);
        }
        let error = (total.get() - 1e5).abs() / 1e5;
        assert!(error <= 33.0 * f64::EPSILON, "{error:e}");
    }

    #[test]
    fn a_total_overflows_to_an_infinity() {
        let mut total = Total::default();
        for _ in 0..100 {
            total.add(1e307);
        }
        assert_eq!(total.get(), f64::INFINITY);
    }
}
