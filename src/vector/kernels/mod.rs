//! The slice kernels behind the vectors of this crate, open to implementors of [`Vector`](crate::Vector).
//!
//! Reductions have one fixed order: eight virtual lanes, folded pairwise, over blocks of 16,384 numbers that are merged from
//! the first to the last; no fused multiply-add. So a sum has the same bits on every processor and with any number of
//! threads, and several products at once ([`dots`], [`survey`]) have the bits of single ones ([`dot`]). With the feature
//! `simd` (on by default, it needs `std`) x86-64 processors that have AVX2 use it, found at run time; with the feature `rayon` slices
//! from 2^18 numbers on are shared among the threads of the pool that calls.
//!
//! Slices of unequal length are worked on up to the shortest one.

#[cfg(all(feature = "simd", target_arch = "x86_64"))]
pub(crate) mod avx2;
mod blocks;
pub(crate) mod lanes;
mod small;

pub use lanes::Stored;

use super::Survey;
use crate::Real;
use blocks::{each, merged};
use core::ops::Range;
use core::sync::atomic::{AtomicBool, Ordering};
use lanes::{Eight, Kernel, LANES, Portable, fold};

/// Below so many numbers the way into wider instructions costs more than they save.
const WIDE_FROM: usize = 64;
/// Products with one block that are taken while it is in the cache, and handed from thread to thread at once.
const GROUP: usize = 24;
/// Vectors that are read side by side: as many streams, and as many sums in registers.
const ABREAST: usize = 4;
/// Numbers looked at for their largest magnitude right after they were summed over, while they are in the first cache.
const NEAR: usize = 1024;

#[inline]
fn run<T: Real, K: Kernel<T>>(n: usize, kernel: K) -> K::Output {
    if n < WIDE_FROM {
        kernel.run(Portable)
    } else {
        T::run(kernel)
    }
}

/// Inner product.
///
/// ```
/// assert_eq!(surefoot::vector::kernels::dot(&[1.0, 2.0, 3.0], &[4.0, 5.0, 6.0]), 32.0);
/// ```
#[inline]
pub fn dot<T: Real>(x: &[T], y: &[T]) -> T {
    let n = x.len().min(y.len());
    if n < WIDE_FROM {
        return small::dot(&x[..n], &y[..n]);
    }
    long_dot(&x[..n], &y[..n])
}

/// Out of the way of [`dot`], so that short ones are worth inlining.
#[inline(never)]
fn long_dot<T: Real>(x: &[T], y: &[T]) -> T {
    let one = |r: Range<usize>| {
        let (vectors, with) = ([&x[r.clone()]], &y[r]);
        let [sum] = run(with.len(), Products { vectors, with });
        sum
    };
    merged(x.len(), one, |a, b| a + b)
}

/// Inner products of `y` with `vectors(0)`, `vectors(1)`, ... as many as `out` has room for: each has the bits of its own
/// [`dot`]. `y` is read from memory once for every 24 of them.
///
/// ```
/// let vectors = [[1.0, 0.0, 2.0], [0.0, 5.0, 0.0]];
/// let mut out = [0.0; 2];
/// surefoot::vector::kernels::dots(|i| &vectors[i], &[1.0, 10.0, 100.0], &mut out);
/// assert_eq!(out, [201.0, 50.0]);
/// ```
pub fn dots<'a, S: Stored<T> + 'a, T: Real>(
    vectors: impl Fn(usize) -> &'a [S],
    y: &[T],
    out: &mut [T],
) {
    for (k, out) in out.chunks_mut(GROUP).enumerate() {
        let (n, group) = gather(y.len(), out.len(), |i| vectors(k * GROUP + i));
        let sums = merged(
            n,
            |r| block_of_products(&group[..out.len()], &y[r.clone()], r),
            add_each,
        );
        out.copy_from_slice(&sums[..out.len()]);
    }
}

/// The first `count` vectors, and the least length among them and `n`.
fn gather<'a, S>(
    n: usize,
    count: usize,
    vectors: impl Fn(usize) -> &'a [S],
) -> (usize, [&'a [S]; GROUP]) {
    let mut group: [&[S]; GROUP] = [&[]; GROUP];
    let mut least = n;
    for (i, place) in group.iter_mut().take(count).enumerate() {
        *place = vectors(i);
        least = least.min(place.len());
    }
    (least, group)
}

fn add_each<T: Real, const K: usize>(mut a: [T; K], b: [T; K]) -> [T; K] {
    for (a, b) in a.iter_mut().zip(b) {
        *a = *a + b;
    }
    a
}

/// The products of one block, four vectors abreast; `with` is the block of the vector that all are multiplied with.
#[inline]
fn block_of_products<S: Stored<T>, T: Real>(
    vectors: &[&[S]],
    with: &[T],
    r: Range<usize>,
) -> [T; GROUP] {
    let mut sums = [T::zero(); GROUP];
    let (fours, rest) = vectors.as_chunks::<ABREAST>();
    for (k, &vectors) in fours.iter().enumerate() {
        let vectors = vectors.map(|v| &v[r.clone()]);
        let four = run(with.len(), Products { vectors, with });
        sums[k * ABREAST..][..ABREAST].copy_from_slice(&four);
    }
    for (i, v) in rest.iter().enumerate() {
        let vectors = [&v[r.clone()]];
        [sums[fours.len() * ABREAST + i]] = run(with.len(), Products { vectors, with });
    }
    sums
}

/// Products of `K` vectors with one, all of one length.
struct Products<'a, S, T, const K: usize> {
    vectors: [&'a [S]; K],
    with: &'a [T],
}

impl<S: Stored<T>, T: Real, const K: usize> Kernel<T> for Products<'_, S, T, K> {
    type Output = [T; K];

    #[inline(always)]
    fn run<E: Eight<T>>(self, e: E) -> [T; K] {
        let n = self.with.len();
        let (with, with_rest) = self.with.as_chunks::<LANES>();
        let vectors = self.vectors.map(|v| &v[..n]);
        let chunks = vectors.map(|v| &v.as_chunks::<LANES>().0[..with.len()]);
        let mut sums = [e.load(&[T::zero(); LANES]); K];
        for i in 0..with.len() {
            let y = e.load(&with[i]);
            for j in 0..K {
                sums[j] = e.add(sums[j], e.mul(S::load(e, &chunks[j][i]), y));
            }
        }
        let done = n - with_rest.len();
        core::array::from_fn(|j| {
            let mut lanes = e.numbers(sums[j]);
            for ((lane, &x), &y) in lanes.iter_mut().zip(&vectors[j][done..]).zip(with_rest) {
                *lane = *lane + x.widen() * y;
            }
            fold(lanes)
        })
    }
}

/// What a new gradient `g` tells beside the one before and the direction `d` of the move, and its products with `vectors(0)`,
/// `vectors(1)`, ... as many as `out` has room for. One pass over everything.
///
/// The change `g - old` is formed number by number, so that nothing cancels where it is small beside `g`.
///
/// ```
/// let survey = surefoot::vector::kernels::survey(&[1.0, -3.0], &[2.0, -3.0], &[2.0, 2.0], |_| &[0.0; 0], &mut []);
/// assert_eq!((survey.slope, survey.max_abs, survey.change_slope), (-4.0, 3.0, -2.0));
/// ```
pub fn survey<'a, S: Stored<T> + 'a, T: Real>(
    g: &[T],
    old: &[T],
    d: &[T],
    vectors: impl Fn(usize) -> &'a [S],
    out: &mut [T],
) -> Survey<T> {
    let n = g.len().min(old.len()).min(d.len());
    let (now, later) = out.split_at_mut(out.len().min(GROUP));
    let (n, group) = gather(n, now.len(), &vectors);
    let (sums, largest, products) = merged(
        n,
        |r| {
            let (g, old, d) = (&g[r.clone()], &old[r.clone()], &d[r.clone()]);
            let mut sums = [T::zero(); 6];
            let mut largest = T::zero();
            let mut lanes = [[T::zero(); LANES]; 6];
            for at in (0..g.len()).step_by(NEAR) {
                let near = at..(at + NEAR).min(g.len());
                let (g, old, d) = (&g[near.clone()], &old[near.clone()], &d[near]);
                lanes = run(g.len(), Glance { g, old, d, lanes });
                largest = larger(largest, run(g.len(), Largest(g)));
            }
            for (sum, lanes) in sums.iter_mut().zip(lanes) {
                *sum = fold(lanes);
            }
            let products = block_of_products(&group[..now.len()], g, r);
            (sums, largest, products)
        },
        |a, b| (add_each(a.0, b.0), larger(a.1, b.1), add_each(a.2, b.2)),
    );
    now.copy_from_slice(&products[..now.len()]);
    if !later.is_empty() {
        dots(|i| vectors(GROUP + i), g, later);
    }
    let [
        slope,
        square,
        change_gradient,
        change_square,
        change_slope,
        direction_square,
    ] = sums;
    // A NaN loses every comparison, but not its way into the square.
    let lost = square.is_nan() && g.iter().any(|x| x.is_nan());
    Survey {
        slope,
        max_abs: if lost { T::nan() } else { largest },
        square,
        change_gradient,
        change_square,
        change_slope,
        direction_square,
    }
}

/// Adds `g.d`, `g.g`, `y.g`, `y.y`, `y.d` and `d.d` to the lanes, with `y = g - old`. Lengths are equal, and multiples of
/// eight but for the last piece of a vector.
struct Glance<'a, T> {
    g: &'a [T],
    old: &'a [T],
    d: &'a [T],
    lanes: [[T; LANES]; 6],
}

impl<T: Real> Kernel<T> for Glance<'_, T> {
    type Output = [[T; LANES]; 6];

    #[inline(always)]
    fn run<E: Eight<T>>(self, e: E) -> Self::Output {
        let n = self.g.len();
        let (g, g_rest) = self.g.as_chunks::<LANES>();
        let (old, old_rest) = self.old[..n].as_chunks::<LANES>();
        let (d, d_rest) = self.d[..n].as_chunks::<LANES>();
        let [mut gd, mut gg, mut yg, mut yy, mut yd, mut dd] = self.lanes.map(|l| e.load(&l));
        for ((g, old), d) in g.iter().zip(old).zip(d) {
            let (g, old, d) = (e.load(g), e.load(old), e.load(d));
            let y = e.sub(g, old);
            gd = e.add(gd, e.mul(g, d));
            gg = e.add(gg, e.mul(g, g));
            yg = e.add(yg, e.mul(y, g));
            yy = e.add(yy, e.mul(y, y));
            yd = e.add(yd, e.mul(y, d));
            dd = e.add(dd, e.mul(d, d));
        }
        let mut lanes = [gd, gg, yg, yy, yd, dd].map(|l| e.numbers(l));
        for (k, ((&g, &old), &d)) in g_rest.iter().zip(old_rest).zip(d_rest).enumerate() {
            let y = g - old;
            for (lanes, term) in lanes
                .iter_mut()
                .zip([g * d, g * g, y * g, y * y, y * d, d * d])
            {
                lanes[k] = lanes[k] + term;
            }
        }
        lanes
    }
}

/// `y += a x`.
#[inline]
pub fn add_scaled<S: Stored<T>, T: Real>(y: &mut [T], a: T, x: &[S]) {
    let y = common(y, x);
    if y.len() < WIDE_FROM {
        return small::add_scaled(y, a, x);
    }
    long_add_scaled(y, a, x);
}

#[inline(always)]
fn add_near<S: Stored<T>, T: Real>(y: &mut [T], a: T, x: &[S]) {
    for (y, &x) in y.iter_mut().zip(x) {
        *y = *y + a * x.widen();
    }
}

#[inline(never)]
fn long_add_scaled<S: Stored<T>, T: Real>(y: &mut [T], a: T, x: &[S]) {
    each(y, |at, y| add_near(y, a, &x[at..]));
}

/// The part of `y` that `x` reaches.
#[inline(always)]
fn common<'a, T, S>(y: &'a mut [T], x: &[S]) -> &'a mut [T] {
    let n = y.len().min(x.len());
    &mut y[..n]
}

/// `y *= a`.
pub fn scale<T: Real>(y: &mut [T], a: T) {
    each(y, |_, y| {
        for y in y {
            *y = *y * a;
        }
    });
}

/// `y = a y + b x`, in one pass.
pub fn scale_add<T: Real>(y: &mut [T], a: T, b: T, x: &[T]) {
    each(common(y, x), |at, y| {
        let x = &x[at..at + y.len()];
        for (y, &x) in y.iter_mut().zip(x) {
            *y = *y * a + b * x;
        }
    });
}

/// `y = x - y`, in one pass.
pub fn subtract_from<T: Real>(y: &mut [T], x: &[T]) {
    each(common(y, x), |at, y| {
        let x = &x[at..at + y.len()];
        for (y, &x) in y.iter_mut().zip(x) {
            *y = x - *y;
        }
    });
}

/// `to = x + a d`, in one pass.
pub fn step_from<T: Real>(to: &mut [T], x: &[T], a: T, d: &[T]) {
    each(common(common(to, x), d), |at, to| {
        let end = at + to.len();
        for ((to, &x), &d) in to.iter_mut().zip(&x[at..end]).zip(&d[at..end]) {
            *to = x + a * d;
        }
    });
}

/// `to = x + a d`, and whether every number of it is finite, in one pass.
pub fn finite_step_from<T: Real>(to: &mut [T], x: &[T], a: T, d: &[T]) -> bool {
    let lost = AtomicBool::new(false);
    each(common(common(to, x), d), |at, to| {
        for (k, to) in to.chunks_mut(NEAR).enumerate() {
            let at = at + k * NEAR;
            let (x, d) = (&x[at..at + to.len()], &d[at..at + to.len()]);
            for ((to, &x), &d) in to.iter_mut().zip(x).zip(d) {
                *to = x + a * d;
            }
            if !run(to.len(), AllFinite(to)) {
                lost.store(true, Ordering::Relaxed);
            }
        }
    });
    !lost.into_inner()
}

/// Whether all numbers are finite.
struct AllFinite<'a, T>(&'a [T]);

impl<T: Real> Kernel<T> for AllFinite<'_, T> {
    type Output = bool;

    #[inline(always)]
    fn run<E: Eight<T>>(self, _: E) -> bool {
        let zero = T::zero();
        let (chunks, rest) = self.0.as_chunks::<LANES>();
        // A sum of `0 x` is 0 for finite numbers and NaN otherwise.
        let mut taint = [zero; LANES];
        for x in chunks {
            for (taint, &x) in taint.iter_mut().zip(x) {
                *taint = *taint + x * zero;
            }
        }
        rest.iter().fold(fold(taint), |sum, &x| sum + x * zero) == zero
    }
}

/// `to = a x + c_0 v_0 + c_1 v_1 + ...` with `v_i = vectors(i)`, for as many as there are coefficients `c`. Each number has the
/// bits of the sum taken from left to right; `to` stays in the cache while the vectors stream by.
///
/// ```
/// let vectors = [[1.0, 2.0], [10.0, 20.0]];
/// let mut to = [0.0; 2];
/// surefoot::vector::kernels::combine(&mut to, -1.0, &[5.0, 5.0], &[2.0, 1.0], |i| &vectors[i]);
/// assert_eq!(to, [7.0, 19.0]);
/// ```
pub fn combine<'a, S: Stored<T> + 'a, T: Real>(
    to: &mut [T],
    a: T,
    x: &[T],
    coefficients: &[T],
    vectors: impl Fn(usize) -> &'a [S],
) {
    let to = common(to, x);
    if coefficients.is_empty() {
        return each(to, |at, to| scale_into(to, a, &x[at..]));
    }
    for (k, coefficients) in coefficients.chunks(GROUP).enumerate() {
        let (n, group) = gather(to.len(), coefficients.len(), |i| vectors(k * GROUP + i));
        let (fours, rest) = coefficients.as_chunks::<ABREAST>();
        let (vectors, last) = group[..coefficients.len()].as_chunks::<ABREAST>();
        each(&mut to[..n], |at, to| {
            if k == 0 {
                scale_into(to, a, &x[at..]);
            }
            let r = at..at + to.len();
            for (&coefficients, vectors) in fours.iter().zip(vectors) {
                let vectors = vectors.map(|v| &v[r.clone()]);
                run(
                    to.len(),
                    Combination {
                        coefficients,
                        vectors,
                        to,
                    },
                );
            }
            for (&c, v) in rest.iter().zip(last) {
                let (coefficients, vectors) = ([c], [&v[r.clone()]]);
                run(
                    to.len(),
                    Combination {
                        coefficients,
                        vectors,
                        to,
                    },
                );
            }
        });
    }
}

fn scale_into<T: Real>(to: &mut [T], a: T, x: &[T]) {
    for (to, &x) in to.iter_mut().zip(x) {
        *to = a * x;
    }
}

/// Adds `K` scaled vectors to one, all of one length.
struct Combination<'a, S, T, const K: usize> {
    coefficients: [T; K],
    vectors: [&'a [S]; K],
    to: &'a mut [T],
}

impl<S: Stored<T>, T: Real, const K: usize> Kernel<T> for Combination<'_, S, T, K> {
    type Output = ();

    #[inline(always)]
    fn run<E: Eight<T>>(self, _: E) {
        let n = self.to.len();
        let vectors = self.vectors.map(|v| &v[..n]);
        for (i, to) in self.to.iter_mut().enumerate() {
            let mut sum = *to;
            for (&c, v) in self.coefficients.iter().zip(&vectors) {
                sum = sum + c * v[i].widen();
            }
            *to = sum;
        }
    }
}

/// Copies `x` into `to`.
pub fn assign<T: Real>(to: &mut [T], x: &[T]) {
    each(common(to, x), |at, to| {
        to.copy_from_slice(&x[at..at + to.len()]);
    });
}

/// The largest magnitude; 0 for an empty slice; NaN if any component is NaN, wherever it stands.
///
/// ```
/// use surefoot::vector::kernels::max_abs;
/// assert_eq!(max_abs(&[1.0, -7.0, 2.0]), 7.0);
/// assert!(max_abs(&[1.0, f64::NAN, 2.0]).is_nan());
/// ```
pub fn max_abs<T: Real>(x: &[T]) -> T {
    merged(
        x.len(),
        |r| run(r.len(), LargestOrNan(&x[r])),
        |a, b| if a.is_nan() || a > b { a } else { b },
    )
}

/// The largest magnitude; a NaN is passed over.
struct Largest<'a, T>(&'a [T]);

impl<T: Real> Kernel<T> for Largest<'_, T> {
    type Output = T;

    #[inline(always)]
    fn run<E: Eight<T>>(self, _: E) -> T {
        let (chunks, rest) = self.0.as_chunks::<LANES>();
        let mut most = [T::zero(); LANES];
        for x in chunks {
            for (most, x) in most.iter_mut().zip(x) {
                *most = larger(*most, x.abs());
            }
        }
        rest.iter()
            .map(|x| x.abs())
            .chain(most)
            .fold(T::zero(), larger)
    }
}

/// The larger one; `so_far` where `x` is NaN.
#[inline(always)]
fn larger<T: Real>(so_far: T, x: T) -> T {
    if x > so_far { x } else { so_far }
}

struct LargestOrNan<'a, T>(&'a [T]);

impl<T: Real> Kernel<T> for LargestOrNan<'_, T> {
    type Output = T;

    #[inline(always)]
    fn run<E: Eight<T>>(self, e: E) -> T {
        let (chunks, rest) = self.0.as_chunks::<LANES>();
        let zero = T::zero();
        // A sum of `0 x` is 0 for finite components and NaN otherwise: it carries a NaN past the comparisons.
        let mut taint = [zero; LANES];
        let mut most = [zero; LANES];
        for x in chunks {
            for k in 0..LANES {
                most[k] = larger(most[k], x[k].abs());
                taint[k] = taint[k] + x[k] * zero;
            }
        }
        for (taint, &x) in taint.iter_mut().zip(rest) {
            *taint = *taint + x * zero;
        }
        let largest = Largest(rest).run(e);
        if fold(taint).is_nan() && self.0.iter().any(|x| x.is_nan()) {
            T::nan()
        } else {
            most.iter().fold(largest, |m, &x| larger(m, x))
        }
    }
}

/// The Euclidean norm, safe from overflow and underflow on the way: right wherever the norm itself can be represented. NaN if
/// any component is NaN.
///
/// ```
/// use surefoot::vector::kernels::norm;
/// assert_eq!(norm(&[3.0, 4.0]), 5.0);
/// let (large, small) = (2f64.powi(700), 2f64.powi(-700));
/// assert_eq!(norm(&[3.0 * large, -4.0 * large]), 5.0 * large);
/// assert_eq!(norm(&[3.0 * small, 4.0 * small]), 5.0 * small);
/// ```
pub fn norm<T: Real>(x: &[T]) -> T {
    let square = dot(x, x);
    let (least, most) = (T::min_positive_value() / T::epsilon(), T::max_value());
    // Squares that fell below the smallest normal number are lost in the rounding of such a sum.
    if square >= least && square <= most {
        return square.sqrt();
    }
    let largest = max_abs(x);
    if !(largest > T::zero() && largest < T::infinity()) {
        return largest;
    }
    // Powers of two scale without rounding; two of them, because one alone may not be a number of the type.
    let (mantissa, exponent, _) = largest.integer_decode();
    let exponent = i32::from(exponent) + mantissa.ilog2() as i32;
    let first = T::of(2.0).powi(-exponent / 2);
    let second = T::of(2.0).powi(-exponent - -exponent / 2);
    let sum = merged(
        x.len(),
        |r| {
            let mut lanes = [T::zero(); LANES];
            for x in x[r].chunks(LANES) {
                for (lane, &x) in lanes.iter_mut().zip(x) {
                    let x = x * first * second;
                    *lane = *lane + x * x;
                }
            }
            fold(lanes)
        },
        |a, b| a + b,
    );
    sum.sqrt() / first / second
}

#[cfg(test)]
mod tests;
