//! Limited-memory BFGS.

mod compact;
mod history;

pub use history::{History, Pairs, SinglePairs};

use super::preconditioner::{Identity, Preconditioner};
use super::{Direction, Moved};
use crate::vector::Survey;
use crate::{Real, Vector};
use alloc::vec::Vec;
use compact::Products;
use num_traits::{Float, Zero};

/// How the direction is computed from the pairs. In exact arithmetic all forms give the same one.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
#[non_exhaustive]
pub enum Form {
    /// [`Compact`](Form::Compact) from 64 variables on, where reading the history is what takes the time
    /// (`examples/memory_speed.rs`), and [`TwoLoop`](Form::TwoLoop) below and with a preconditioner. The default.
    #[default]
    BySize,
    /// From the small matrices of the products of the pairs: one pass over the history to survey a new gradient, in which its
    /// slope and its largest component are found too, and one to combine the direction. With a preconditioner the recursion takes
    /// its place.
    ///
    /// R. H. Byrd, J. Nocedal & R. B. Schnabel, Math. Program. 63 (1994) 129-156, doi:10.1007/BF01582063, eq. 3.1; that
    /// products with a new gradient are all that is needed: W. Chen, Z. Wang & J. Zhou, "Large-scale L-BFGS using MapReduce", NIPS
    /// 27 (2014).
    Compact,
    /// The two-loop recursion: four passes over each pair, one after another. Nocedal & Wright 2006, algorithm 7.4.
    TwoLoop,
}

/// The scale of the initial matrix, a multiple of the identity or of a preconditioner.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
#[non_exhaustive]
pub enum InitialScale {
    /// The geometric mean of the scale before and that of the newest pair: one pair alone makes the scale jump where curvatures
    /// differ much (`examples/limited_memory_costs.rs`). The default.
    #[default]
    Smoothed,
    /// That of the newest pair, `s.y / y.y`: Nocedal & Wright 2006, eq. 7.20.
    Newest,
}

/// The compact form pays from so many variables on.
const COMPACT_FROM: usize = 64;

/// Limited-memory BFGS (L-BFGS): the inverse Hessian approximated from the last `m` moves.
///
/// With the weak Wolfe rule every pair has positive curvature; a pair whose curvature is not clearly positive,
/// `s.y <= eps |s| |y|` with the rounding unit `eps`, is skipped and the pairs before stay. The initial matrix is `s.y / y.y` times the
/// identity, or `s.y / y.P y` times a [`Preconditioner`] `P`, smoothed over the last pairs ([`InitialScale`]).
///
/// Source: J. Nocedal, "Updating quasi-Newton matrices with limited storage", Math. Comp. 35 (1980) 773-782,
/// doi:10.1090/S0025-5718-1980-0572855-7; Nocedal & Wright, Numerical Optimization, 2nd ed. 2006, section 7.2 and eq.
/// 7.20. On uniformly convex functions the iterates converge R-linearly (D. C. Liu & J. Nocedal, Math. Program. 45 (1989)
/// 503-528, doi:10.1007/BF01589116, theorem 6.1).
///
/// # Accuracy of the compact form
///
/// The products of the pairs with a change of the gradient are differences of their products with the two gradients. Where the
/// change is small beside the gradient, `y.y <= sqrt(eps) g.g`, they are taken from the change itself: one more pass
/// ([`Survey::change_is_sure`]). Where the terms of the slope `-g.H g` cancel to less than `sqrt(eps)` of their size, the
/// matrices have lost half of their digits, and that one direction comes from the recursion instead. [`refreshed`](Lbfgs::refreshed)
/// and [`recursions`](Lbfgs::recursions) tell how often that was.
///
/// It owns `2 m` vectors, allocated when a run begins, and one more with a preconditioner.
///
/// ```
/// use surefoot::direction::{Lbfgs, LbfgsError};
/// let direction: Lbfgs<Vec<f64>> = Lbfgs::new(8)?;
/// assert_eq!(Lbfgs::<Vec<f64>>::new(0).unwrap_err(), LbfgsError::Memory);
/// # Ok::<(), LbfgsError>(())
/// ```
#[derive(Clone, Debug)]
pub struct Lbfgs<V: Vector, H = Pairs<V>, P = Identity> {
    memory: usize,
    form: Form,
    initial_scale: InitialScale,
    /// Number of variables of the run.
    dim: usize,
    history: H,
    preconditioner: P,
    /// The preconditioned change of the gradient; held only with a preconditioner.
    scratch: Option<V>,
    products: Products,
    /// The step made along the direction of each pair, `1 / s.y`, and scratch of the recursion.
    steps: Vec<f64>,
    inverse_curvatures: Vec<f64>,
    alpha: Vec<f64>,
    /// Products of the places with the gradient surveyed last; coefficients of a combination.
    surveyed: Vec<V::Scalar>,
    coefficients: Vec<V::Scalar>,
    /// Where the next pair goes.
    next: usize,
    /// Number of pairs held, the newest just before `next`.
    held: usize,
    /// The scale of the initial matrix.
    gamma: f64,
    /// `g.g` at the point of the run, once a move was made.
    square: Option<f64>,
    skipped: u64,
    refreshed: u64,
    recursions: u64,
}

/// Why [`Lbfgs::new`] refuses its parameter.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum LbfgsError {
    /// `memory == 0`.
    #[error("the memory must hold at least one pair: 5 to 20 is usual")]
    Memory,
}

impl<V: Vector> Lbfgs<V> {
    /// With room for `memory` pairs, at least 1; 5 to 20 is usual.
    ///
    /// # Errors
    /// [`LbfgsError::Memory`] for 0.
    pub fn new(memory: usize) -> Result<Self, LbfgsError> {
        if memory == 0 {
            return Err(LbfgsError::Memory);
        }
        Ok(Self::with_parts(
            memory,
            Form::Compact,
            Pairs::default(),
            Identity,
        ))
    }
}

impl<V: Vector, H, P> Lbfgs<V, H, P> {
    fn with_parts(memory: usize, form: Form, history: H, preconditioner: P) -> Self {
        Lbfgs {
            memory,
            form,
            initial_scale: InitialScale::default(),
            dim: 0,
            history,
            preconditioner,
            scratch: None,
            products: Products::default(),
            steps: Vec::new(),
            inverse_curvatures: Vec::new(),
            alpha: Vec::new(),
            surveyed: Vec::new(),
            coefficients: Vec::new(),
            next: 0,
            held: 0,
            gamma: 1.0,
            square: None,
            skipped: 0,
            refreshed: 0,
            recursions: 0,
        }
    }

    /// In this form. Default: [`Form::BySize`].
    #[must_use]
    pub fn with_form(self, form: Form) -> Self {
        Lbfgs { form, ..self }
    }

    /// With this scale of the initial matrix. Default: [`InitialScale::Smoothed`].
    #[must_use]
    pub fn with_initial_scale(self, initial_scale: InitialScale) -> Self {
        Lbfgs {
            initial_scale,
            ..self
        }
    }

    /// With the pairs in another [`History`], such as [`SinglePairs`].
    ///
    /// ```
    /// use surefoot::direction::{Lbfgs, SinglePairs};
    /// let halved: Lbfgs<Vec<f64>, SinglePairs> = Lbfgs::new(8)?.with_history(SinglePairs::default());
    /// # Ok::<(), surefoot::direction::LbfgsError>(())
    /// ```
    #[must_use]
    pub fn with_history<K: History<V>>(self, history: K) -> Lbfgs<V, K, P> {
        Lbfgs::with_parts(self.memory, self.form, history, self.preconditioner)
            .with_initial_scale(self.initial_scale)
    }

    /// With a multiple of this preconditioner `P` for the initial matrix, and `P` itself before there is a pair.
    #[must_use]
    pub fn with_preconditioner<Q: Preconditioner<V>>(self, preconditioner: Q) -> Lbfgs<V, H, Q> {
        Lbfgs::with_parts(self.memory, self.form, self.history, preconditioner)
            .with_initial_scale(self.initial_scale)
    }

    /// Number of pairs it has room for.
    pub fn memory(&self) -> usize {
        self.memory
    }

    /// Number of pairs it holds now.
    pub fn pairs(&self) -> usize {
        self.held
    }

    /// How many pairs of this run were skipped because their curvature was not positive.
    pub fn skipped(&self) -> u64 {
        self.skipped
    }

    /// How many pairs of this run needed a second pass, because the gradient hardly changed.
    pub fn refreshed(&self) -> u64 {
        self.refreshed
    }

    /// How many directions of this run came from the recursion because the small matrices had lost their accuracy.
    pub fn recursions(&self) -> u64 {
        self.recursions
    }

    fn forget(&mut self) {
        self.gamma = 1.0;
        self.next = 0;
        self.held = 0;
        self.products.order(core::iter::empty());
    }
}

/// The pairs held, from the newest to the oldest.
fn newest_first(next: usize, held: usize, memory: usize) -> impl DoubleEndedIterator<Item = usize> {
    (0..held).map(move |age| match next.checked_sub(age + 1) {
        Some(pair) => pair,
        None => next + memory - age - 1,
    })
}

impl<V: Vector> Default for Lbfgs<V> {
    /// `memory = 10` (common practice: 3 to 20).
    fn default() -> Self {
        Self::with_parts(10, Form::BySize, Pairs::default(), Identity)
    }
}

impl<V: Vector, H: History<V>, P: Preconditioner<V>> Lbfgs<V, H, P> {
    fn is_compact(&self) -> bool {
        let wanted = match self.form {
            Form::BySize => self.dim >= COMPACT_FROM,
            Form::Compact => true,
            Form::TwoLoop => false,
        };
        wanted && self.preconditioner.is_identity()
    }

    /// Nocedal & Wright 2006, algorithm 7.4; the sign is turned where the initial matrix is applied.
    fn two_loops(&mut self, x: &V, g: &V, d: &mut V) {
        d.assign(g);
        for i in newest_first(self.next, self.held, self.memory) {
            let rate = self.inverse_curvatures[i] * self.steps[i];
            let alpha = rate * self.history.dot(2 * i, d).to_double();
            self.history.add_scaled(V::Scalar::of(-alpha), 2 * i + 1, d);
            self.alpha[i] = alpha;
        }
        if let Some(scratch) = &mut self.scratch {
            scratch.assign(d);
            self.preconditioner.apply(x, scratch, d);
        }
        d.scale(V::Scalar::of(-self.gamma)); // eq. 7.20
        for i in newest_first(self.next, self.held, self.memory).rev() {
            // -(alpha - beta) s, with s the step times the direction and the sign of beta turned by that of d.
            let rate = self.inverse_curvatures[i] * self.steps[i];
            let beta = rate * self.history.dot(2 * i + 1, d).to_double();
            let along = -(self.alpha[i] * self.steps[i]) - beta;
            self.history.add_scaled(V::Scalar::of(along), 2 * i, d);
        }
    }

    /// Byrd, Nocedal & Schnabel (1994); `None` where the matrices have lost their accuracy.
    fn combined(&mut self, g: &V, d: &mut V) -> Option<V::Scalar> {
        let square = self.square?;
        let (steps, coefficients) = (&self.steps, &mut self.coefficients);
        let each = |i: usize, s, y| {
            coefficients[2 * i] = V::Scalar::of(s * steps[i]);
            coefficients[2 * i + 1] = V::Scalar::of(y);
        };
        let (gamma, inverse) = (self.gamma, &self.inverse_curvatures);
        let slope = self
            .products
            .direction::<V::Scalar>(gamma, square, inverse, each)?;
        let all = &self.coefficients[..2 * self.held];
        if !all.iter().all(|c| c.is_finite()) {
            return None;
        }
        self.history.combine(V::Scalar::of(-self.gamma), g, all, d);
        Some(V::Scalar::of(slope))
    }

    /// The products of the pairs with the gradient surveyed last, as the products with the gradient at hand.
    fn arrive(&mut self) {
        for i in 0..self.held {
            self.products.moves_gradient[i] = self.steps[i] * self.surveyed[2 * i].to_double();
            self.products.changes_gradient[i] = self.surveyed[2 * i + 1].to_double();
        }
    }
}

impl<V: Vector, H: History<V>, P: Preconditioner<V>> Direction<V> for Lbfgs<V, H, P> {
    fn begin(&mut self, x: &V) {
        let m = self.memory;
        self.dim = x.dim();
        self.history.begin(m, x);
        if self.steps.len() != m {
            self.products.begin(m);
            self.steps = alloc::vec![0.0; m];
            self.inverse_curvatures = alloc::vec![0.0; m];
            self.alpha = alloc::vec![0.0; m];
            self.surveyed = alloc::vec![V::Scalar::zero(); 2 * m];
            self.coefficients = alloc::vec![V::Scalar::zero(); 2 * m];
        }
        self.scratch = (!self.preconditioner.is_identity()).then(|| x.clone());
        self.square = None;
        (self.skipped, self.refreshed, self.recursions) = (0, 0, 0);
        self.forget();
    }

    fn direction(&mut self, x: &V, g: &V, d: &mut V) -> Option<V::Scalar> {
        if self.is_compact() && self.held > 0 {
            if let Some(slope) = self.combined(g, d) {
                return Some(slope);
            }
            self.recursions += 1;
        }
        self.two_loops(x, g, d);
        None
    }

    fn survey(&mut self, g: &V, old: &V, d: &V) -> Survey<V::Scalar> {
        let places = if self.is_compact() { 2 * self.held } else { 0 };
        self.history.survey(g, old, d, &mut self.surveyed[..places])
    }

    fn moved(&mut self, mut moved: Moved<'_, V>) {
        if self.steps.is_empty() {
            return; // never begun: it has no room yet
        }
        let sure = moved.survey.change_is_sure();
        moved.g_old.subtract_from(moved.g_new);
        if !sure {
            let (g, y, d) = (moved.g_new, &*moved.g_old, &*moved.direction);
            moved.survey = moved.survey.with_change(g, y, d);
        }
        let (survey, step) = (moved.survey, moved.step.to_double());
        self.square = Some(survey.square.to_double());
        let s_y = step * survey.change_slope.to_double();
        let y_y = survey.change_square.to_double();
        let length = step * survey.direction_square.to_double().sqrt();
        let least = V::Scalar::epsilon().to_double() * length * y_y.sqrt();
        let usable = s_y > least && (1.0 / s_y).is_finite() && y_y.is_finite();
        let compact = self.is_compact();
        if !usable {
            self.skipped += 1;
            if compact {
                self.arrive();
            }
            return;
        }
        let mut gamma = s_y / y_y;
        if let Some(scratch) = &mut self.scratch {
            self.preconditioner.apply(moved.x_new, moved.g_old, scratch);
            gamma = s_y / moved.g_old.dot(scratch).to_double();
        }
        self.gamma = match self.initial_scale {
            InitialScale::Smoothed if self.held > 0 => self.gamma.sqrt() * gamma.sqrt(),
            _ => gamma,
        };
        let i = self.next;
        let pair = (survey.slope.to_double(), survey.change_gradient.to_double());
        if compact {
            if !sure {
                self.refreshed += 1;
                let out = &mut self.coefficients[..2 * self.held];
                self.history.dots(moved.g_old, out);
            }
            for j in (0..self.held).filter(|&j| j != i) {
                let (s_y, y_y) = if sure {
                    let s_g = self.steps[j] * self.surveyed[2 * j].to_double();
                    let y_g = self.surveyed[2 * j + 1].to_double();
                    let before = &self.products;
                    (
                        s_g - before.moves_gradient[j],
                        y_g - before.changes_gradient[j],
                    )
                } else {
                    let (s_y, y_y) = (self.coefficients[2 * j], self.coefficients[2 * j + 1]);
                    (self.steps[j] * s_y.to_double(), y_y.to_double())
                };
                self.products.set(j, i, s_y, y_y);
            }
            self.products.set(i, i, s_y, y_y);
            self.arrive();
            self.products.moves_gradient[i] = step * pair.0;
            self.products.changes_gradient[i] = pair.1;
        }
        self.history.record(i, &mut moved);
        self.steps[i] = step;
        self.inverse_curvatures[i] = 1.0 / s_y;
        self.next = (i + 1) % self.memory;
        self.held = (self.held + 1).min(self.memory);
        if compact {
            let order = newest_first(self.next, self.held, self.memory).rev();
            self.products.order(order);
        }
    }

    fn reset(&mut self) {
        self.forget();
    }

    fn unit_step(&self) -> bool {
        self.held > 0
    }
}
