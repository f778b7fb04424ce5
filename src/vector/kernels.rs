//! The slice kernels behind the vectors of this crate, open to implementors of [`Vector`](crate::Vector).
//!
//! Reductions have one fixed order: eight virtual lanes, folded pairwise, no fused multiply-add. So a sum has the same
//! bits on every processor. Slices of unequal length are worked on up to the shorter one.

use crate::Real;

/// Number of virtual lanes of a reduction; fixed, because it decides the order of additions.
const LANES: usize = 8;

/// Inner product.
///
/// ```
/// assert_eq!(surefoot::vector::kernels::dot(&[1.0, 2.0, 3.0], &[4.0, 5.0, 6.0]), 32.0);
/// ```
pub fn dot<T: Real>(x: &[T], y: &[T]) -> T {
    let n = x.len().min(y.len());
    let (x, x_rest) = x[..n].as_chunks::<LANES>();
    let (y, y_rest) = y[..n].as_chunks::<LANES>();
    let mut lanes = [T::zero(); LANES];
    for (x, y) in x.iter().zip(y) {
        for ((lane, &x), &y) in lanes.iter_mut().zip(x).zip(y) {
            *lane = *lane + x * y;
        }
    }
    for ((lane, &x), &y) in lanes.iter_mut().zip(x_rest).zip(y_rest) {
        *lane = *lane + x * y;
    }
    fold(lanes)
}

/// Folds the lanes pairwise: the upper half onto the lower, three times.
fn fold<T: Real>(l: [T; LANES]) -> T {
    let l = [l[0] + l[4], l[1] + l[5], l[2] + l[6], l[3] + l[7]];
    (l[0] + l[2]) + (l[1] + l[3])
}

/// `y += a x`.
pub fn add_scaled<T: Real>(y: &mut [T], a: T, x: &[T]) {
    for (y, &x) in y.iter_mut().zip(x) {
        *y = *y + a * x;
    }
}

/// `y *= a`.
pub fn scale<T: Real>(y: &mut [T], a: T) {
    for y in y {
        *y = *y * a;
    }
}

/// `to = x + a d`, in one pass.
pub fn step_from<T: Real>(to: &mut [T], x: &[T], a: T, d: &[T]) {
    for ((to, &x), &d) in to.iter_mut().zip(x).zip(d) {
        *to = x + a * d;
    }
}

/// Copies `x` into `to`.
pub fn assign<T: Real>(to: &mut [T], x: &[T]) {
    let n = to.len().min(x.len());
    to[..n].copy_from_slice(&x[..n]);
}

/// The largest magnitude; 0 for an empty slice; NaN if any component is NaN, wherever it stands.
///
/// ```
/// use surefoot::vector::kernels::max_abs;
/// assert_eq!(max_abs(&[1.0, -7.0, 2.0]), 7.0);
/// assert!(max_abs(&[1.0, f64::NAN, 2.0]).is_nan());
/// ```
pub fn max_abs<T: Real>(x: &[T]) -> T {
    let (chunks, rest) = x.as_chunks::<LANES>();
    let mut most = [T::zero(); LANES];
    // A sum of `0 x` is 0 for finite components and NaN otherwise: it carries a NaN past the comparisons.
    let mut taint = [T::zero(); LANES];
    let mut look = |x: &[T]| {
        for ((most, taint), &x) in most.iter_mut().zip(&mut taint).zip(x) {
            let size = x.abs();
            *most = if size > *most { size } else { *most };
            *taint = *taint + x * T::zero();
        }
    };
    chunks.iter().for_each(|c| look(c));
    look(rest);
    let largest = most
        .iter()
        .fold(T::zero(), |m, &v| if v > m { v } else { m });
    if fold(taint).is_nan() && x.iter().any(|v| v.is_nan()) {
        T::nan()
    } else {
        largest
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::vec::Vec;

    #[test]
    fn a_nan_survives_wherever_it_stands() {
        for n in 1..40 {
            for at in 0..n {
                let mut x: Vec<f64> = (0..n).map(f64::from).collect();
                x[at as usize] = f64::NAN;
                assert!(max_abs(&x).is_nan(), "n = {n}, at {at}");
                assert!(dot(&x, &x).is_nan());
            }
        }
    }

    #[test]
    fn infinities_are_not_taken_for_nan() {
        let mut x = std::vec![1.0; 21];
        x[3] = f64::INFINITY;
        x[15] = f64::NEG_INFINITY;
        assert_eq!(max_abs(&x), f64::INFINITY);
        assert_eq!(max_abs::<f64>(&[]), 0.0);
    }

    #[test]
    fn integers_add_up_exactly() {
        for n in 0..100_u32 {
            let x: Vec<f64> = (1..=n).map(f64::from).collect();
            let squares = f64::from(n) * f64::from(n + 1) * f64::from(2 * n + 1) / 6.0;
            assert_eq!(dot(&x, &x), squares);
        }
    }
}
