//! What is minimised: [`Objective`], closures that become one, and the counting of evaluations.

use crate::Vector;
use core::convert::Infallible;

/// Whether value and gradient come out of one piece of work.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum Cost {
    /// A gradient costs extra: it is asked for only where a verdict or a finder needs it.
    #[default]
    Separate,
    /// One call gives both for the price of one: both are asked for at once, once per point.
    Joint,
}

/// A function of a vector, its gradient, and what they cost.
///
/// Implement it for a type of your own, or turn closures into one with [`joint`] and [`separate`].
///
/// ```
/// use surefoot::{Objective, Cost};
/// struct Bowl { centre: f64 }
/// impl Objective<Vec<f64>> for Bowl {
///     type Error = String; // an error of your own comes back as itself
///     fn value(&mut self, x: &Vec<f64>) -> Result<f64, String> {
///         Ok(x.iter().map(|x| (x - self.centre).powi(2)).sum())
///     }
///     fn gradient(&mut self, x: &Vec<f64>, g: &mut Vec<f64>) -> Result<(), String> {
///         for (g, x) in g.iter_mut().zip(x) { *g = 2.0 * (x - self.centre); }
///         Ok(())
///     }
/// }
/// ```
pub trait Objective<V: Vector> {
    /// The caller's own error; it ends a run and comes back with the best point so far.
    type Error;

    /// Whether one call gives value and gradient for the price of one. Default: [`Cost::Separate`].
    fn cost(&self) -> Cost {
        Cost::Separate
    }

    /// The value at `x`. A NaN or an infinity says that `x` is outside of the domain.
    fn value(&mut self, x: &V) -> Result<V::Scalar, Self::Error>;

    /// The value at `x`, or any number above `ceiling` if the value is certain to lie above it: such a trial will be refused
    /// as too long. A sum of non-negative terms may stop adding as soon as it exceeds the ceiling. The number then stands in
    /// the log, and finders that interpolate refused values take it for the value: use this with finders that do not, such
    /// as backtracking. Default: [`value`](Objective::value).
    fn value_up_to(&mut self, x: &V, ceiling: Option<V::Scalar>) -> Result<V::Scalar, Self::Error> {
        let _ = ceiling;
        self.value(x)
    }

    /// Writes the gradient at `x` into `g`, which has the length of `x` and holds arbitrary numbers.
    fn gradient(&mut self, x: &V, g: &mut V) -> Result<(), Self::Error>;

    /// Both at once. Default: one after the other.
    fn value_and_gradient(&mut self, x: &V, g: &mut V) -> Result<V::Scalar, Self::Error> {
        let value = self.value(x)?;
        self.gradient(x, g)?;
        Ok(value)
    }

    /// Called once for each point that a run moves to, right after the evaluations there: the place to keep
    /// by-products (a simulated field, a factorisation) of the accepted trial. Default: nothing.
    fn accepted(&mut self, x: &V) -> Result<(), Self::Error> {
        let _ = x;
        Ok(())
    }
}

impl<V: Vector, O: Objective<V> + ?Sized> Objective<V> for &mut O {
    type Error = O::Error;
    fn cost(&self) -> Cost {
        (**self).cost()
    }
    fn value(&mut self, x: &V) -> Result<V::Scalar, O::Error> {
        (**self).value(x)
    }
    fn value_up_to(&mut self, x: &V, ceiling: Option<V::Scalar>) -> Result<V::Scalar, O::Error> {
        (**self).value_up_to(x, ceiling)
    }
    fn gradient(&mut self, x: &V, g: &mut V) -> Result<(), O::Error> {
        (**self).gradient(x, g)
    }
    fn value_and_gradient(&mut self, x: &V, g: &mut V) -> Result<V::Scalar, O::Error> {
        (**self).value_and_gradient(x, g)
    }
    fn accepted(&mut self, x: &V) -> Result<(), O::Error> {
        (**self).accepted(x)
    }
}

#[cfg(feature = "alloc")]
impl<V: Vector, O: Objective<V> + ?Sized> Objective<V> for alloc::boxed::Box<O> {
    type Error = O::Error;
    fn cost(&self) -> Cost {
        (**self).cost()
    }
    fn value(&mut self, x: &V) -> Result<V::Scalar, O::Error> {
        (**self).value(x)
    }
    fn value_up_to(&mut self, x: &V, ceiling: Option<V::Scalar>) -> Result<V::Scalar, O::Error> {
        (**self).value_up_to(x, ceiling)
    }
    fn gradient(&mut self, x: &V, g: &mut V) -> Result<(), O::Error> {
        (**self).gradient(x, g)
    }
    fn value_and_gradient(&mut self, x: &V, g: &mut V) -> Result<V::Scalar, O::Error> {
        (**self).value_and_gradient(x, g)
    }
    fn accepted(&mut self, x: &V) -> Result<(), O::Error> {
        (**self).accepted(x)
    }
}

/// What a closure may return: a plain value, or a `Result` with an error of the caller's own.
///
/// It lets plain and fallible closures share one entry, without annotations.
pub trait Reply<T> {
    /// [`Infallible`] for a plain value.
    type Error;
    /// The value, or the caller's error.
    fn reply(self) -> Result<T, Self::Error>;
}

impl Reply<f64> for f64 {
    type Error = Infallible;
    fn reply(self) -> Result<f64, Infallible> {
        Ok(self)
    }
}

impl Reply<f32> for f32 {
    type Error = Infallible;
    fn reply(self) -> Result<f32, Infallible> {
        Ok(self)
    }
}

impl Reply<()> for () {
    type Error = Infallible;
    fn reply(self) -> Result<(), Infallible> {
        Ok(self)
    }
}

impl<T, E> Reply<T> for Result<T, E> {
    type Error = E;
    fn reply(self) -> Result<T, E> {
        self
    }
}

/// An [`Objective`] out of one closure `|x, g| value` that writes the gradient into `g`; made by [`joint`].
#[derive(Clone, Copy, Debug)]
pub struct Joint<F>(F);

/// One closure that gives value and gradient at once: [`Cost::Joint`].
///
/// The closure gets `(&x, &mut g)`, writes the gradient and returns the value, plain or as a `Result`.
pub fn joint<V, F, R>(both: F) -> Joint<F>
where
    V: Vector,
    F: FnMut(&V, &mut V) -> R,
    R: Reply<V::Scalar>,
{
    Joint(both)
}

impl<V: Vector, F, R> Objective<V> for Joint<F>
where
    F: FnMut(&V, &mut V) -> R,
    R: Reply<V::Scalar>,
{
    type Error = R::Error;
    fn cost(&self) -> Cost {
        Cost::Joint
    }
    /// Costs a scratch vector; no driver of this crate calls it, since a joint objective is asked for both.
    fn value(&mut self, x: &V) -> Result<V::Scalar, R::Error> {
        (self.0)(x, &mut x.clone()).reply()
    }
    fn gradient(&mut self, x: &V, g: &mut V) -> Result<(), R::Error> {
        (self.0)(x, g).reply().map(|_| ())
    }
    fn value_and_gradient(&mut self, x: &V, g: &mut V) -> Result<V::Scalar, R::Error> {
        (self.0)(x, g).reply()
    }
}

/// An [`Objective`] out of two closures; made by [`separate`].
#[derive(Clone, Copy, Debug)]
pub struct Separate<F, G> {
    value: F,
    gradient: G,
}

/// Two closures, `|x| value` and `|x, g| { .. }`: [`Cost::Separate`]. Both plain, or both fallible with one error type.
pub fn separate<V, F, G, R, S>(value: F, gradient: G) -> Separate<F, G>
where
    V: Vector,
    F: FnMut(&V) -> R,
    G: FnMut(&V, &mut V) -> S,
    R: Reply<V::Scalar>,
    S: Reply<(), Error = R::Error>,
{
    Separate { value, gradient }
}

impl<V: Vector, F, G, R, S> Objective<V> for Separate<F, G>
where
    F: FnMut(&V) -> R,
    G: FnMut(&V, &mut V) -> S,
    R: Reply<V::Scalar>,
    S: Reply<(), Error = R::Error>,
{
    type Error = R::Error;
    fn value(&mut self, x: &V) -> Result<V::Scalar, R::Error> {
        (self.value)(x).reply()
    }
    fn gradient(&mut self, x: &V, g: &mut V) -> Result<(), R::Error> {
        (self.gradient)(x, g).reply()
    }
}

/// How often an objective was asked, by kind.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub struct Evaluations {
    /// Values on their own.
    pub values: u64,
    /// Gradients on their own.
    pub gradients: u64,
    /// Value and gradient at once.
    pub both: u64,
}

impl Evaluations {
    /// Number of values that were computed, alone or with a gradient.
    pub fn all_values(&self) -> u64 {
        self.values + self.both
    }

    /// Number of gradients that were computed, alone or with a value.
    pub fn all_gradients(&self) -> u64 {
        self.gradients + self.both
    }

    /// Number of calls of any kind.
    pub fn calls(&self) -> u64 {
        self.values + self.gradients + self.both
    }
}

/// An objective that counts how often it is asked, for solvers that drive it themselves.
///
/// ```
/// use surefoot::{Counted, Objective, joint};
/// let mut f = Counted::new(joint(|x: &[f64; 1], g: &mut [f64; 1]| { g[0] = 2.0 * x[0]; x[0] * x[0] }));
/// f.value_and_gradient(&[3.0], &mut [0.0]).unwrap();
/// assert_eq!(f.evaluations().both, 1);
/// ```
#[derive(Clone, Copy, Debug)]
pub struct Counted<O> {
    inner: O,
    evaluations: Evaluations,
}

impl<O> Counted<O> {
    /// Counts from zero.
    pub fn new(inner: O) -> Self {
        Counted {
            inner,
            evaluations: Evaluations::default(),
        }
    }

    /// What was counted so far.
    pub fn evaluations(&self) -> Evaluations {
        self.evaluations
    }

    /// The objective within.
    pub fn into_inner(self) -> O {
        self.inner
    }
}

impl<V: Vector, O: Objective<V>> Objective<V> for Counted<O> {
    type Error = O::Error;
    fn cost(&self) -> Cost {
        self.inner.cost()
    }
    fn value(&mut self, x: &V) -> Result<V::Scalar, O::Error> {
        self.evaluations.values += 1;
        self.inner.value(x)
    }
    fn value_up_to(&mut self, x: &V, ceiling: Option<V::Scalar>) -> Result<V::Scalar, O::Error> {
        self.evaluations.values += 1;
        self.inner.value_up_to(x, ceiling)
    }
    fn gradient(&mut self, x: &V, g: &mut V) -> Result<(), O::Error> {
        self.evaluations.gradients += 1;
        self.inner.gradient(x, g)
    }
    fn value_and_gradient(&mut self, x: &V, g: &mut V) -> Result<V::Scalar, O::Error> {
        self.evaluations.both += 1;
        self.inner.value_and_gradient(x, g)
    }
    fn accepted(&mut self, x: &V) -> Result<(), O::Error> {
        self.inner.accepted(x)
    }
}
