//! A reference problem: a formula with its standard start and known minima.

use std::sync::Arc;
use std::vec::Vec;

use super::error::WrongLength;
use super::formula::{Evaluate, Formula};
use super::squares::Squares;
use crate::{Cost, Objective};

/// The residuals of a problem at `x`, handed one by one to the sum.
pub(super) type Residuals = fn(x: &[f64], sum: &mut Squares<'_>);

/// A minimization problem with a published start and known answers.
///
/// `f(x)`, often `sum_{i=1..m} r_i(x)^2`, for an `x` of `n` components, no units. Values and
/// gradients are analytic, in doubles, allocate nothing, and never panic: a slice of the wrong
/// length is a [`WrongLength`], and a point where the formulas overflow gives infinities or NaN, as
/// a step far too long should. A clone shares nothing that changes; its size is that of the start
/// and of the stored minimizers.
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
    number: Option<u32>,
    name: &'static str,
    source: &'static str,
    form: Form,
    start: Vec<f64>,
    minima: Vec<Minimum>,
}

/// How f is written down.
#[derive(Clone, Debug)]
enum Form {
    /// A sum of `count` squares.
    Residuals {
        count: usize,
        residuals: Residuals,
        cost: Cost,
    },
    /// Value and gradient in one pass.
    OnePass(Arc<dyn Evaluate>),
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
    /// A minimizer, local or global, whose point stands here in words only: its closed form, or what is known of it. It
    /// spares problems of many variables a second vector of their size.
    Described {
        /// f there.
        value: f64,
        /// The point in words.
        point: &'static str,
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
    /// A stationary point that is no minimizer, listed because it was published as one: f falls away
    /// from it in some direction, by negative curvature or in a higher order.
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
            | Minimum::Described { value, .. }
            | Minimum::Set { value, .. }
            | Minimum::AtInfinity { value, .. }
            | Minimum::Saddle { value, .. } => value,
        }
    }

    /// The point, or `None` where there is no single one or it stands in words only.
    pub fn point(&self) -> Option<&[f64]> {
        match self {
            Minimum::Strict { point, .. }
            | Minimum::Singular { point, .. }
            | Minimum::Saddle { point, .. } => Some(point),
            Minimum::Described { .. } | Minimum::Set { .. } | Minimum::AtInfinity { .. } => None,
        }
    }
}

impl Problem {
    /// The number in the source, where that numbers its problems.
    pub fn number(&self) -> Option<u32> {
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

    /// The number of squared residuals `m`, where f is kept as a sum of such.
    pub fn residual_count(&self) -> Option<usize> {
        match self.form {
            Form::Residuals { count, .. } => Some(count),
            Form::OnePass(_) => None,
        }
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
        match &self.form {
            Form::Residuals {
                count, residuals, ..
            } => {
                let mut sum = Squares::new(*count, None);
                residuals(x, &mut sum);
                Ok(sum.value())
            }
            Form::OnePass(formula) => Ok(formula.value(x)),
        }
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
        match &self.form {
            Form::Residuals {
                count, residuals, ..
            } => {
                let mut sum = Squares::new(*count, Some(g));
                residuals(x, &mut sum);
                Ok(sum.value())
            }
            Form::OnePass(formula) => Ok(formula.value_and_gradient(x, g)),
        }
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
            number: Some(number),
            name,
            source,
            form: Form::Residuals {
                count: residual_count,
                residuals,
                cost: Cost::Separate,
            },
            start: start.into_iter().collect(),
            minima: Vec::new(),
        }
    }

    pub(super) fn one_pass(
        name: &'static str,
        source: &'static str,
        formula: impl Formula,
        start: impl IntoIterator<Item = f64>,
    ) -> Self {
        Problem {
            number: None,
            name,
            source,
            form: Form::OnePass(Arc::new(formula)),
            start: start.into_iter().collect(),
            minima: Vec::new(),
        }
    }

    /// The same problem, whose value and gradient count as one evaluation.
    pub(super) fn joint(mut self) -> Self {
        if let Form::Residuals { cost, .. } = &mut self.form {
            *cost = Cost::Joint;
        }
        self
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

    pub(super) fn described(self, value: f64, point: &'static str) -> Self {
        self.with(Minimum::Described { value, point })
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

/// [`Cost::Separate`] for the problems of [`more_garbow_hillstrom`](fn@super::more_garbow_hillstrom), whose values cost less than
/// their gradients; [`Cost::Joint`] for those of [`large`](super::large), where both come out of one pass.
impl Objective<Vec<f64>> for Problem {
    type Error = WrongLength;

    fn cost(&self) -> Cost {
        match self.form {
            Form::Residuals { cost, .. } => cost,
            Form::OnePass(_) => Cost::Joint,
        }
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
            let Form::Residuals {
                count, residuals, ..
            } = problem.form
            else {
                panic!("{} is a sum of squares", problem.name);
            };
            let mut sum = Squares::new(count, Some(&mut g));
            residuals(&problem.start, &mut sum);
            assert_eq!(sum.received(), count, "{}", problem.name);
            assert!(g.iter().all(|g| g.is_finite()), "{}", problem.name);
        }
    }
}
