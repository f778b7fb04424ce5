//! A reference problem: a sum of squared residuals with its standard start and known minima.

use std::vec::Vec;

use super::error::WrongLength;
use super::squares::Squares;
use crate::{Cost, Objective};

/// The residuals of a problem at `x`, handed one by one to the sum.
pub(super) type Residuals = fn(x: &[f64], sum: &mut Squares<'_>);

/// A minimization problem with a published start and known answers.
///
/// `f(x) = sum_{i=1..m} r_i(x)^2`, `x` of `n` components, no units. Values and gradients are
/// analytic, in doubles, allocate nothing, and never panic: a slice of the wrong length is a
/// [`WrongLength`], and a point where the formulas overflow gives infinities or NaN, as a step far
/// too long should.
///
/// ```
/// use surefoot::problems::more_garbow_hillstrom::rosenbrock;
///
/// let problem = rosenbrock();
/// let mut gradient = vec![0.0; problem.dim()];
/// problem.gradient(problem.start(), &mut gradient)?;
/// assert_eq!(problem.value(&[1.0, 1.0])?, 0.0);
/// assert!((gradient[0] + 215.6).abs() < 1e-12);
/// # Ok::<(), surefoot::problems::WrongLength>(())
/// ```
#[derive(Clone, Debug)]
pub struct Problem {
    number: u32,
    name: &'static str,
    source: &'static str,
    residual_count: usize,
    residuals: Residuals,
    start: Vec<f64>,
    minima: Vec<Minimum>,
}

/// A known answer of a [`Problem`].
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum Minimum {
    /// A minimizer with a positive definite Hessian, local or global.
    Strict {
        /// f there.
        value: f64,
        /// The minimizer, rounded to doubles.
        point: Vec<f64>,
    },
    /// A minimizer with a singular Hessian: gradient methods approach it slowly.
    Singular {
        /// f there.
        value: f64,
        /// The minimizer, rounded to doubles.
        point: Vec<f64>,
    },
    /// A whole set of minimizers, such as a valley.
    Set {
        /// f on the set.
        value: f64,
        /// The set in words.
        points: &'static str,
    },
    /// An infimum that no point attains: f falls towards it as components of x grow without bound.
    AtInfinity {
        /// The limit of f.
        value: f64,
        /// The limit in words.
        limit: &'static str,
    },
    /// A stationary point with a direction of negative curvature, listed because it was published
    /// as a minimum and runs from the standard start end there.
    Saddle {
        /// f there.
        value: f64,
        /// The stationary point, rounded to doubles.
        point: Vec<f64>,
    },
}

impl Minimum {
    /// f at the answer (its limit for [`Minimum::AtInfinity`]).
    pub fn value(&self) -> f64 {
        match *self {
            Minimum::Strict { value, .. }
            | Minimum::Singular { value, .. }
            | Minimum::Set { value, .. }
            | Minimum::AtInfinity { value, .. }
            | Minimum::Saddle { value, .. } => value,
        }
    }

    /// The point, or `None` for a set and for a minimum at infinity.
    pub fn point(&self) -> Option<&[f64]> {
        match self {
            Minimum::Strict { point, .. }
            | Minimum::Singular { point, .. }
            | Minimum::Saddle { point, .. } => Some(point),
            Minimum::Set { .. } | Minimum::AtInfinity { .. } => None,
        }
    }
}

impl Problem {
    /// The number in the source.
    pub fn number(&self) -> u32 {
        self.number
    }

    /// The usual name.
    pub fn name(&self) -> &'static str {
        self.name
    }

    /// Authors, title, journal and year of the source.
    pub fn source(&self) -> &'static str {
        self.source
    }

    /// The number of variables `n`.
    pub fn dim(&self) -> usize {
        self.start.len()
    }

    /// The number of squared residuals `m`.
    pub fn residual_count(&self) -> usize {
        self.residual_count
    }

    /// The standard start, `n` components.
    pub fn start(&self) -> &[f64] {
        &self.start
    }

    /// The known answers; empty for a size whose answers nobody has stored here.
    ///
    /// There is no claim that the list is complete: f may have other local minima.
    pub fn minima(&self) -> &[Minimum] {
        &self.minima
    }

    /// `f(x)`.
    ///
    /// # Errors
    /// [`WrongLength`] if `x` does not have `n` components.
    pub fn value(&self, x: &[f64]) -> Result<f64, WrongLength> {
        self.check("point", x)?;
        let mut sum = Squares::new(self.residual_count, None);
        (self.residuals)(x, &mut sum);
        Ok(sum.value())
    }

    /// Writes the gradient of f at `x` into `g`.
    ///
    /// # Errors
    /// [`WrongLength`] if `x` or `g` does not have `n` components; `g` is then left as it was.
    pub fn gradient(&self, x: &[f64], g: &mut [f64]) -> Result<(), WrongLength> {
        self.value_and_gradient(x, g).map(|_| ())
    }

    /// `f(x)`, and its gradient written into `g`, in one pass.
    ///
    /// # Errors
    /// [`WrongLength`] if `x` or `g` does not have `n` components; `g` is then left as it was.
    pub fn value_and_gradient(&self, x: &[f64], g: &mut [f64]) -> Result<f64, WrongLength> {
        self.check("point", x)?;
        self.check("gradient", g)?;
        let mut sum = Squares::new(self.residual_count, Some(g));
        (self.residuals)(x, &mut sum);
        Ok(sum.value())
    }

    fn check(&self, what: &'static str, slice: &[f64]) -> Result<(), WrongLength> {
        if slice.len() == self.dim() {
            return Ok(());
        }
        Err(WrongLength {
            what,
            expected: self.dim(),
            found: slice.len(),
        })
    }
}

/// What a problem's file says about it, in the order of its documentation.
impl Problem {
    pub(super) fn new(
        number: u32,
        name: &'static str,
        source: &'static str,
        residual_count: usize,
        residuals: Residuals,
        start: impl IntoIterator<Item = f64>,
    ) -> Self {
        Problem {
            number,
            name,
            source,
            residual_count,
            residuals,
            start: start.into_iter().collect(),
            minima: Vec::new(),
        }
    }

    pub(super) fn strict(self, value: f64, point: &[f64]) -> Self {
        let point = point.to_vec();
        self.with(Minimum::Strict { value, point })
    }

    pub(super) fn singular(self, value: f64, point: &[f64]) -> Self {
        let point = point.to_vec();
        self.with(Minimum::Singular { value, point })
    }

    pub(super) fn saddle(self, value: f64, point: &[f64]) -> Self {
        let point = point.to_vec();
        self.with(Minimum::Saddle { value, point })
    }

    pub(super) fn set(self, value: f64, points: &'static str) -> Self {
        self.with(Minimum::Set { value, points })
    }

    pub(super) fn at_infinity(self, value: f64, limit: &'static str) -> Self {
        self.with(Minimum::AtInfinity { value, limit })
    }

    fn with(mut self, minimum: Minimum) -> Self {
        self.minima.push(minimum);
        self
    }
}

/// A value costs less than a gradient here, hence [`Cost::Separate`].
impl Objective<Vec<f64>> for Problem {
    type Error = WrongLength;

    fn cost(&self) -> Cost {
        Cost::Separate
    }

    fn value(&mut self, x: &Vec<f64>) -> Result<f64, WrongLength> {
        Problem::value(self, x)
    }

    fn gradient(&mut self, x: &Vec<f64>, g: &mut Vec<f64>) -> Result<(), WrongLength> {
        Problem::gradient(self, x, g)
    }

    fn value_and_gradient(&mut self, x: &Vec<f64>, g: &mut Vec<f64>) -> Result<f64, WrongLength> {
        Problem::value_and_gradient(self, x, g)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::problems::more_garbow_hillstrom;

    #[test]
    fn every_problem_adds_as_many_residuals_as_it_says() {
        for problem in more_garbow_hillstrom() {
            let mut g = std::vec![f64::NAN; problem.dim()];
            let mut sum = Squares::new(problem.residual_count, Some(&mut g));
            (problem.residuals)(&problem.start, &mut sum);
            assert_eq!(sum.received(), problem.residual_count, "{}", problem.name);
            assert!(g.iter().all(|g| g.is_finite()), "{}", problem.name);
        }
    }
}
