//! [`History`]: the pairs of moves and gradient changes, wherever and however they are stored.

use crate::Vector;
use crate::direction::Moved;
use crate::vector::{Contiguous, Survey, kernels};
use alloc::vec::Vec;

/// The last pairs of an [`Lbfgs`](super::Lbfgs) direction: it owns layout, precision and, on many machines, the reduction.
///
/// Pair number `i` is a direction `d_i`, at place `2 i`, and the change of the gradient `y_i` along it, at place `2 i + 1`; the step
/// made along `d_i` is kept by the caller, as a number. Pairs are overwritten in turn. Only `begin`, `record`, `dot` and
/// `add_scaled` must be written; a history on many machines writes `survey` too, so that one reduction serves each gradient.
pub trait History<V: Vector> {
    /// Makes room for so many pairs of vectors like `x`; called when a run begins.
    fn begin(&mut self, pairs: usize, x: &V);

    /// Takes in pair number `pair`: `moved.direction`, and `moved.g_old`, which holds `y` already. It may keep these buffers and
    /// leave others of the same length in their place.
    fn record(&mut self, pair: usize, moved: &mut Moved<'_, V>);

    /// Inner product of `v` with the vector at `place`.
    fn dot(&self, place: usize, v: &V) -> V::Scalar;

    /// Adds `a` times the vector at `place` to `to`.
    fn add_scaled(&self, a: V::Scalar, place: usize, to: &mut V);

    /// The products of a new gradient `g` with the first `out.len()` places, and what it tells beside the gradient before
    /// and the direction of the move: one reduction. Default: a pass for each.
    fn survey(&self, g: &V, old: &V, d: &V, out: &mut [V::Scalar]) -> Survey<V::Scalar> {
        self.dots(g, out);
        Survey::of(g, old, d)
    }

    /// The products of `v` with the first `out.len()` places. Default: one by one.
    fn dots(&self, v: &V, out: &mut [V::Scalar]) {
        for (place, out) in out.iter_mut().enumerate() {
            *out = self.dot(place, v);
        }
    }

    /// Writes `a g` and the combination of the first places with these coefficients into `to`. Default: a pass for each.
    fn combine(&self, a: V::Scalar, g: &V, coefficients: &[V::Scalar], to: &mut V) {
        to.assign(g);
        to.scale(a);
        for (place, &c) in coefficients.iter().enumerate() {
            self.add_scaled(c, place, to);
        }
    }
}

/// The pairs as they are, in vectors of the run's own kind; nothing is copied to record them.
#[derive(Clone, Debug)]
pub struct Pairs<V> {
    vectors: Vec<V>,
}

impl<V> Default for Pairs<V> {
    fn default() -> Self {
        Pairs {
            vectors: Vec::new(),
        }
    }
}

impl<V: Vector> History<V> for Pairs<V> {
    fn begin(&mut self, pairs: usize, x: &V) {
        let fits = self.vectors.first().is_some_and(|v| v.dim() == x.dim());
        if !fits || self.vectors.len() != 2 * pairs {
            self.vectors = (0..2 * pairs).map(|_| x.clone()).collect();
        }
    }

    fn record(&mut self, pair: usize, moved: &mut Moved<'_, V>) {
        core::mem::swap(&mut self.vectors[2 * pair], moved.direction);
        core::mem::swap(&mut self.vectors[2 * pair + 1], moved.g_old);
    }

    #[inline]
    fn dot(&self, place: usize, v: &V) -> V::Scalar {
        self.vectors[place].dot(v)
    }

    fn add_scaled(&self, a: V::Scalar, place: usize, to: &mut V) {
        to.add_scaled(a, &self.vectors[place]);
    }

    fn survey(&self, g: &V, old: &V, d: &V, out: &mut [V::Scalar]) -> Survey<V::Scalar> {
        g.survey(old, d, &self.vectors[..out.len()], out)
    }

    fn dots(&self, v: &V, out: &mut [V::Scalar]) {
        v.dots(&self.vectors[..out.len()], out);
    }

    fn combine(&self, a: V::Scalar, g: &V, coefficients: &[V::Scalar], to: &mut V) {
        to.combine(a, g, coefficients, &self.vectors[..coefficients.len()]);
    }
}

/// The pairs rounded to single precision, for a run in double precision: half the memory and half the traffic.
///
/// Rounding a pair changes it by at most 6e-8 of its largest numbers; numbers beyond 1e38 become infinite, and
/// the driver starts the direction over; those below 1e-38 lose digits or vanish. What it saves: `examples/memory_speed.rs`.
#[derive(Clone, Debug, Default)]
pub struct SinglePairs {
    vectors: Vec<Vec<f32>>,
}

impl<V: Contiguous<Scalar = f64>> History<V> for SinglePairs {
    fn begin(&mut self, pairs: usize, x: &V) {
        let fits = self.vectors.first().is_some_and(|v| v.len() == x.dim());
        if !fits || self.vectors.len() != 2 * pairs {
            self.vectors = (0..2 * pairs).map(|_| alloc::vec![0.0; x.dim()]).collect();
        }
    }

    fn record(&mut self, pair: usize, moved: &mut Moved<'_, V>) {
        let both = [moved.direction.numbers(), moved.g_old.numbers()];
        for (to, from) in self.vectors[2 * pair..].iter_mut().zip(both) {
            for (to, &from) in to.iter_mut().zip(from) {
                *to = from as f32;
            }
        }
    }

    fn dot(&self, place: usize, v: &V) -> f64 {
        let mut product = [0.0];
        kernels::dots(|_| &self.vectors[place], v.numbers(), &mut product);
        product[0]
    }

    fn add_scaled(&self, a: f64, place: usize, to: &mut V) {
        kernels::add_scaled(to.numbers_mut(), a, &self.vectors[place]);
    }

    fn survey(&self, g: &V, old: &V, d: &V, out: &mut [f64]) -> Survey<f64> {
        let (g, old, d) = (g.numbers(), old.numbers(), d.numbers());
        kernels::survey(g, old, d, |i| &self.vectors[i], out)
    }

    fn dots(&self, v: &V, out: &mut [f64]) {
        kernels::dots(|i| &self.vectors[i], v.numbers(), out);
    }

    fn combine(&self, a: f64, g: &V, coefficients: &[f64], to: &mut V) {
        let (to, g) = (to.numbers_mut(), g.numbers());
        kernels::combine(to, a, g, coefficients, |i| &self.vectors[i]);
    }
}
