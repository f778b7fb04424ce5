use core::fmt;
use std::vec::Vec;

use crate::{Cost, Objective, Real, Vector};

/// An objective on a part of space: outside, where a predicate holds, the value and every component of the gradient are NaN.
///
/// NaN is how an [`Objective`] says that a point lies outside of its domain. The objective within is not asked there.
///
/// ```
/// use surefoot::{Objective, joint};
/// use surefoot::problems::wrapped::Edged;
///
/// let bowl = joint(|x: &[f64; 1], g: &mut [f64; 1]| { g[0] = 2.0 * x[0]; x[0] * x[0] });
/// let mut edged = Edged::new(bowl, |x: &[f64; 1]| x[0] > 1.0);
/// assert_eq!(edged.value(&[1.0]), Ok(1.0));
/// assert!(edged.value(&[1.1]).unwrap().is_nan());
/// assert_eq!(edged.refused(), 1);
/// ```
#[derive(Clone)]
pub struct Edged<O, P> {
    inner: O,
    outside: P,
    refused: u64,
}

/// A predicate for [`Edged`]: some component is farther from the centre's than `radius`, or NaN. The domain is a box with its
/// faces.
///
/// A point with more or with fewer components than the centre is judged by the common part.
pub fn farther_than(centre: Vec<f64>, radius: f64) -> impl Fn(&Vec<f64>) -> bool + Clone {
    move |x| {
        x.iter()
            .zip(&centre)
            .any(|(x, centre)| !((x - centre).abs() <= radius))
    }
}

impl<O, P> Edged<O, P> {
    /// Ends the domain where `outside(x)` holds.
    pub fn new(inner: O, outside: P) -> Self {
        Edged {
            inner,
            outside,
            refused: 0,
        }
    }

    /// Number of evaluations outside of the domain so far.
    pub fn refused(&self) -> u64 {
        self.refused
    }

    /// The objective within.
    pub fn into_inner(self) -> O {
        self.inner
    }

    fn refuses<V>(&mut self, x: &V) -> bool
    where
        P: FnMut(&V) -> bool,
    {
        let outside = (self.outside)(x);
        self.refused += u64::from(outside);
        outside
    }
}

impl<V, O, P> Objective<V> for Edged<O, P>
where
    V: Vector,
    O: Objective<V>,
    P: FnMut(&V) -> bool,
{
    type Error = O::Error;

    fn cost(&self) -> Cost {
        self.inner.cost()
    }

    fn value(&mut self, x: &V) -> Result<V::Scalar, O::Error> {
        if self.refuses(x) {
            return Ok(nan());
        }
        self.inner.value(x)
    }

    fn value_up_to(&mut self, x: &V, ceiling: Option<V::Scalar>) -> Result<V::Scalar, O::Error> {
        if self.refuses(x) {
            return Ok(nan());
        }
        self.inner.value_up_to(x, ceiling)
    }

    fn gradient(&mut self, x: &V, g: &mut V) -> Result<(), O::Error> {
        if self.refuses(x) {
            g.scale(nan());
            return Ok(());
        }
        self.inner.gradient(x, g)
    }

    fn value_and_gradient(&mut self, x: &V, g: &mut V) -> Result<V::Scalar, O::Error> {
        if self.refuses(x) {
            g.scale(nan());
            return Ok(nan());
        }
        self.inner.value_and_gradient(x, g)
    }

    fn accepted(&mut self, x: &V) -> Result<(), O::Error> {
        self.inner.accepted(x)
    }
}

impl<O: fmt::Debug, P> fmt::Debug for Edged<O, P> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("Edged")
            .field("inner", &self.inner)
            .field("refused", &self.refused)
            .finish_non_exhaustive()
    }
}

fn nan<T: Real>() -> T {
    T::of(f64::NAN)
}
