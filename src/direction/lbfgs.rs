//! Limited-memory BFGS.

use super::{Direction, Moved, negative};
use crate::{Real, Vector};
use alloc::vec::Vec;
use num_traits::Float;

/// Limited-memory BFGS (L-BFGS): the inverse Hessian approximated from the last `m` moves, by the two-loop recursion.
///
/// With the weak Wolfe rule every pair has positive curvature; a pair whose curvature is not clearly positive,
/// `s.y <= eps |s| |y|` with the rounding unit `eps`, is refused (its place is left empty, so the memory is one pair
/// shorter until the next move). The initial matrix is `s.y / y.y` times the identity, from the newest pair.
///
/// Source: J. Nocedal, "Updating quasi-Newton matrices with limited storage", Math. Comp. 35 (1980) 773-782,
/// doi:10.1090/S0025-5718-1980-0572855-7; Nocedal & Wright, Numerical Optimization, 2nd ed. 2006, algorithm 7.4 and eq.
/// 7.20. On uniformly convex functions the iterates converge R-linearly (D. C. Liu & J. Nocedal, Math. Program. 45 (1989)
/// 503-528, doi:10.1007/BF01589116, theorem 6.1).
///
/// It owns `2 m` vectors, allocated when a run begins.
///
/// ```
/// use surefoot::direction::{Lbfgs, LbfgsError};
/// let direction: Lbfgs<Vec<f64>> = Lbfgs::new(8)?;
/// assert_eq!(Lbfgs::<Vec<f64>>::new(0).unwrap_err(), LbfgsError::Memory);
/// # Ok::<(), LbfgsError>(())
/// ```
#[derive(Clone, Debug)]
pub struct Lbfgs<V> {
    memory: usize,
    /// Allocated places, at most `memory`; `moves[i]` and `changes[i]` belong together.
    moves: Vec<V>,
    changes: Vec<V>,
    /// `1 / s.y` of each place.
    inverse_curvature: Vec<f64>,
    /// Scratch of the two-loop recursion, one number a place.
    alpha: Vec<f64>,
    /// Where the next pair goes.
    next: usize,
    /// Number of pairs held, the newest just before `next`.
    held: usize,
    /// `s.y / y.y` of the newest pair.
    gamma: f64,
    refused: u64,
}

/// Why [`Lbfgs::new`] refuses its parameter.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum LbfgsError {
    /// `memory == 0`.
    #[error("the memory must hold at least one pair: 5 to 20 is usual")]
    Memory,
}

impl<V> Lbfgs<V> {
    /// With room for `memory` pairs, at least 1; 5 to 20 is usual.
    ///
    /// # Errors
    /// [`LbfgsError::Memory`] for 0.
    pub fn new(memory: usize) -> Result<Self, LbfgsError> {
        if memory == 0 {
            return Err(LbfgsError::Memory);
        }
        Ok(Self::with_memory(memory))
    }

    fn with_memory(memory: usize) -> Self {
        Lbfgs {
            memory,
            moves: Vec::new(),
            changes: Vec::new(),
            inverse_curvature: Vec::new(),
            alpha: Vec::new(),
            next: 0,
            held: 0,
            gamma: 1.0,
            refused: 0,
        }
    }

    /// Number of pairs it has room for.
    pub fn memory(&self) -> usize {
        self.memory
    }

    /// Number of pairs it holds now.
    pub fn pairs(&self) -> usize {
        self.held
    }

    /// How many pairs of this run were refused because their curvature was not positive.
    pub fn refused(&self) -> u64 {
        self.refused
    }

    /// The place of the pair of this age, 0 for the newest.
    fn place(&self, age: usize) -> usize {
        (self.next + self.memory - 1 - age) % self.memory
    }
}

impl<V> Default for Lbfgs<V> {
    /// `memory = 10` (common practice: 3 to 20).
    fn default() -> Self {
        Self::with_memory(10)
    }
}

impl<V: Vector> Direction<V> for Lbfgs<V> {
    fn begin(&mut self, x: &V) {
        let fits = self.moves.first().is_some_and(|v| v.dim() == x.dim());
        if !fits {
            self.moves = (0..self.memory).map(|_| x.clone()).collect();
            self.changes = self.moves.clone();
            self.inverse_curvature = alloc::vec![0.0; self.memory];
            self.alpha = alloc::vec![0.0; self.memory];
        }
        self.refused = 0;
        self.forget();
    }

    fn direction(&mut self, _: &V, g: &V, d: &mut V) -> Option<V::Scalar> {
        negative(g, d);
        // Algorithm 7.4
        for age in 0..self.held {
            let i = self.place(age);
            let alpha = self.inverse_curvature[i] * self.moves[i].dot(d).to_double();
            d.add_scaled(V::Scalar::of(-alpha), &self.changes[i]);
            self.alpha[i] = alpha;
        }
        if self.held > 0 {
            d.scale(V::Scalar::of(self.gamma)); // eq. 7.20
        }
        for age in (0..self.held).rev() {
            let i = self.place(age);
            let beta = self.inverse_curvature[i] * self.changes[i].dot(d).to_double();
            d.add_scaled(V::Scalar::of(self.alpha[i] - beta), &self.moves[i]);
        }
        None
    }

    fn moved(&mut self, moved: Moved<'_, V>) {
        let minus_one = -num_traits::one::<V::Scalar>();
        let i = self.next;
        let (Some(s), Some(y)) = (self.moves.get_mut(i), self.changes.get_mut(i)) else {
            return; // never begun: it has no room yet
        };
        s.step_from(moved.x_new, minus_one, moved.x_old);
        y.step_from(moved.g_new, minus_one, moved.g_old);
        let s_y = s.dot(y).to_double();
        let y_y = y.dot(y).to_double();
        let s_s = s.dot(s).to_double();
        let rounding = V::Scalar::epsilon().to_double();
        let least = rounding * s_s.sqrt() * y_y.sqrt();
        let inverse = 1.0 / s_y;
        if s_y > least && inverse.is_finite() && y_y.is_finite() {
            self.inverse_curvature[i] = inverse;
            self.gamma = s_y / y_y;
            self.next = (i + 1) % self.memory;
            self.held = (self.held + 1).min(self.memory);
        } else {
            self.refused += 1;
            // The place was the oldest pair's, if all were taken.
            self.held = self.held.min(self.memory - 1);
        }
    }

    fn reset(&mut self) {
        self.forget();
    }

    fn unit_step(&self) -> bool {
        self.held > 0
    }
}

impl<V> Lbfgs<V> {
    fn forget(&mut self) {
        self.next = 0;
        self.held = 0;
    }
}
