//! Does the gradient belong to the value? Extrapolated differences that know their own error.

use super::ladder::Ladder;
use crate::{Cost, Objective, Real, Vector};
use alloc::vec::Vec;
use core::fmt;
use num_traits::Float;

/// Checks every component of the gradient at `x`, with the default [`GradientCheck`].
///
/// For vectors that show their components as a slice: `Vec<T>`, `[T; N]`, types of your own with `AsMut<[T]>`. Others use
/// [`check_gradient_by`]. Costs 8 to 20 values per component as a rule, 122 at most.
///
/// ```
/// use surefoot::{audit::{Agreement, check_gradient}, joint};
/// // The derivative by the second component has the wrong sign.
/// let f = joint(|x: &Vec<f64>, g: &mut Vec<f64>| {
///     g[0] = 2.0 * x[0] * x[1];
///     g[1] = -x[0] * x[0];
///     x[0] * x[0] * x[1]
/// });
/// let report = check_gradient(f, &vec![3.0, 0.5])?;
/// let worst = report.worst().unwrap();
/// assert_eq!((worst.component, worst.agreement), (Some(1), Agreement::Disagrees));
/// println!("{report}"); // component 1 of the gradient disagrees: it is -9.000000e0 ...
/// # Ok::<(), surefoot::audit::CheckError<std::convert::Infallible>>(())
/// ```
///
/// # Errors
/// [`CheckError`] where there is nothing to compare, or with the objective's own error.
pub fn check_gradient<V, O>(
    objective: O,
    x: &V,
) -> Result<GradientReport<V::Scalar>, CheckError<O::Error>>
where
    V: Vector + AsMut<[V::Scalar]>,
    O: Objective<V>,
{
    check_gradient_by(objective, x, |v, component, by| {
        if let Some(entry) = v.as_mut().get_mut(component) {
            *entry = *entry + by;
        }
    })
}

/// As [`check_gradient`], for any [`Vector`]: `add` gets `(v, component, by)` and adds `by` to that component of `v`,
/// `0 <= component < x.dim()`.
///
/// # Errors
/// As [`check_gradient`].
pub fn check_gradient_by<V: Vector, O: Objective<V>>(
    objective: O,
    x: &V,
    add: impl FnMut(&mut V, usize, V::Scalar),
) -> Result<GradientReport<V::Scalar>, CheckError<O::Error>> {
    GradientCheck::default().components(objective, x, add)
}

/// Checks the slope `g . d` along one direction, with the default [`GradientCheck`]: a check for large problems, at the cost
/// of one component. A wrong component shows as far as `d` has a part in it.
///
/// ```
/// use surefoot::{audit::{Agreement, check_slope}, joint};
/// let f = joint(|x: &[f64; 2], g: &mut [f64; 2]| { *g = [x[1].exp(), x[0] * x[1].exp()]; x[0] * x[1].exp() });
/// let found = check_slope(f, &[2.0, -1.0], &[0.6, 0.8])?;
/// assert_eq!(found.agreement, Agreement::Agrees);
/// # Ok::<(), surefoot::audit::CheckError<std::convert::Infallible>>(())
/// ```
///
/// # Errors
/// As [`check_gradient`].
pub fn check_slope<V: Vector, O: Objective<V>>(
    objective: O,
    x: &V,
    d: &V,
) -> Result<Comparison<V::Scalar>, CheckError<O::Error>> {
    GradientCheck::default().slope(objective, x, d)
}

/// Settings of the check.
///
/// Each derivative is differenced on a ladder of steps, each a quarter of the one before, on both sides. Three tables are
/// extrapolated to step 0 (Richardson): central differences, whose error is a series in `h^2`, and the two one-sided ones,
/// with a series in `h`. The error of an entry is four times its distance from its two parents, or the bound that rounding
/// and the noise told of set, whichever is more.
///
/// An entry is trusted if its error is small beside the chords of its own row (a thousandth, or the tolerance if that is
/// more), and smaller steps must bear it out; where they contradict it, they win. So a function that winds faster than the
/// steps is not misread. Of the trusted entries the one of least error is taken, central ones first. Where the two sides
/// differ by more than their errors there is a kink. Where one side lies outside of the domain, the other one is taken.
///
/// The ladder begins at 0.11 of the component's magnitude, 100 times higher (and again) while the values do not change
/// enough to tell a derivative and grow with the step, and ends when the error is a quarter of what the tolerance needs, or
/// rounding has taken over. Let `t` be the tolerance, `e` the error of the difference, `s` the larger magnitude of gradient
/// and difference:
///
/// | verdict | when |
/// |---|---|
/// | agrees | <code>\|gradient - difference\| + e <= t s</code>; or both are 0 as far as can be seen: they differ by at most `e`, and `e` is at most `t` times the steepest chord |
/// | disagrees | <code>\|gradient - difference\| > t s + e</code>, on both sides together unless one lies outside of the domain, and no table has a better opinion of the gradient |
/// | cannot tell | otherwise, where nothing can be trusted, and at a kink |
///
/// Limits: an error below the tolerance agrees. Noise that is not told of ([`with_value_noise`](Self::with_value_noise)) can
/// pass for a disagreement: of 1,000 right slopes of a sine 5 did with untold noise of a millionth, none with noise told of (our
/// measurement, `tests/audit.rs`). In single precision a function that winds a hundred times within the component's own
/// magnitude is at the limit of what can be told.
///
/// Source: C. J. F. Ridders, "Accurate computation of F'(x) and F'(x) F''(x)", Adv. Eng. Software 4 (1982) 75-76,
/// doi:10.1016/S0141-1195(82)80057-0 (recalled from memory): the table with its choice of the entry of least error.
/// Deviations: the ratio of 4, the one-sided tables, the bound for rounding, the trust and the ending are ours.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct GradientCheck<T = f64> {
    pub(super) tolerance: T,
    typical: T,
    pub(super) value_noise: T,
}

/// Why a [`GradientCheck`] refuses a setting.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum CheckSettingError {
    /// `!(0 < tolerance < 1)`.
    #[error("the tolerance must lie strictly between 0 and 1: 1e-5 is usual in double precision")]
    Tolerance,
    /// `!(0 < typical < infinity)`.
    #[error("the typical magnitude must be positive and finite: 1 is usual")]
    Typical,
    /// `!(0 <= value_noise < infinity)`.
    #[error("the noise of a value must be finite and not negative: use 0 where none is known")]
    ValueNoise,
}

/// Why nothing can be compared.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub enum CheckError<E> {
    /// `x` has no components.
    #[error("the point has no components: there is nothing to check")]
    Empty,
    /// A component of `x` is NaN or infinite.
    #[error("the point is not finite: check at a point where the objective is defined")]
    PointNotFinite,
    /// The direction is 0, not finite, or so short that a step along it overflows.
    #[error(
        "the direction must be finite and long enough to move the point: scale it to a length of 1"
    )]
    Direction,
    /// `f(x)` is NaN or infinite.
    #[error("the value is not finite: check at a point where the objective is defined")]
    ValueNotFinite,
    /// A component of the gradient, or its product with the direction, is NaN or infinite.
    #[error(
        "the gradient is not finite where the value is: look for a division by 0 or a root of 0 in it"
    )]
    GradientNotFinite {
        /// Which component; `None` along a direction.
        component: Option<usize>,
    },
    /// The gradient was replaced by a vector of another length.
    #[error(
        "the gradient has {found} components, the point has {expected}: fill the vector that is given"
    )]
    GradientLength {
        /// Components of the point.
        expected: usize,
        /// Components of the gradient.
        found: usize,
    },
    /// The objective failed.
    #[error("the objective failed: {0}")]
    Caller(E),
}

/// Where a difference was taken.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Neighbours {
    /// On both sides.
    Both,
    /// To the right only: the left is outside of the domain, or told less.
    Right,
    /// To the left only: the right is outside of the domain, or told less.
    Left,
}

/// A derivative by differences of values.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Difference<T> {
    /// The derivative.
    pub slope: T,
    /// Estimate of its error, same units.
    pub error: T,
    /// Where it was taken.
    pub neighbours: Neighbours,
    /// The smallest step that went into it.
    pub step: T,
}

/// What came out of a comparison.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Agreement<T> {
    /// Gradient and difference are the same within the tolerance.
    Agrees,
    /// They are not, and it is not for the error of the difference.
    Disagrees,
    /// The difference cannot settle it.
    CannotTell(Doubt<T>),
}

/// Why a difference cannot settle it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Doubt<T> {
    /// Its error is larger than the tolerance allows: noise, a jump, an infinite slope, or values too large for their change.
    Inaccurate,
    /// The slopes from the left and from the right differ: no gradient exists.
    Kink {
        /// Slope to the left.
        left: T,
        /// Slope to the right.
        right: T,
    },
    /// No finite value was found on either side.
    NoNeighbour,
}

/// One derivative of the gradient beside its difference.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Comparison<T> {
    /// Which component, counted from 0; `None` along a direction.
    pub component: Option<usize>,
    /// What the gradient says.
    pub gradient: T,
    /// What the values say; `None` without finite neighbours.
    pub difference: Option<Difference<T>>,
    /// The verdict.
    pub agreement: Agreement<T>,
    /// Number of values it took.
    pub evaluations: usize,
}

/// What was found about a gradient. Its `Display` is a sentence about the worst component.
#[derive(Clone, Debug, PartialEq)]
pub struct GradientReport<T = f64> {
    /// One per component, in their order.
    pub comparisons: Vec<Comparison<T>>,
    /// The tolerance it was judged by.
    pub tolerance: T,
}

impl<T: Real> Default for GradientCheck<T> {
    /// A tolerance of 1e-5 in double and 2e-3 in single precision (our choice: ten thousand times what differences
    /// reach on a function of order 1, a hundred times in single precision), components of order 1, values exact to rounding.
    fn default() -> Self {
        let single = T::epsilon() > T::of(1e-10);
        GradientCheck {
            tolerance: T::of(if single { 2e-3 } else { 1e-5 }),
            typical: T::one(),
            value_noise: T::zero(),
        }
    }
}

impl<T: Real> GradientCheck<T> {
    /// The same check with another relative tolerance, `0 < tolerance < 1`. Default 1e-5, in single precision 2e-3.
    ///
    /// # Errors
    /// [`CheckSettingError::Tolerance`] otherwise, and for NaN.
    pub fn with_tolerance(self, tolerance: T) -> Result<Self, CheckSettingError> {
        if !(tolerance > T::zero() && tolerance < T::one()) {
            return Err(CheckSettingError::Tolerance);
        }
        Ok(GradientCheck { tolerance, ..self })
    }

    /// The same check where components that are 0 have this magnitude elsewhere: positive, finite. Default 1.
    ///
    /// # Errors
    /// [`CheckSettingError::Typical`] otherwise, and for NaN.
    pub fn with_typical(self, typical: T) -> Result<Self, CheckSettingError> {
        if !(typical > T::zero() && typical.is_finite()) {
            return Err(CheckSettingError::Typical);
        }
        Ok(GradientCheck { typical, ..self })
    }

    /// The same check for values with errors up to this (objective units, finite, at least 0), beside rounding; see
    /// [`estimate_noise`](super::estimate_noise). Default 0.
    ///
    /// # Errors
    /// [`CheckSettingError::ValueNoise`] otherwise, and for NaN.
    pub fn with_value_noise(self, value_noise: T) -> Result<Self, CheckSettingError> {
        if !(value_noise >= T::zero() && value_noise.is_finite()) {
            return Err(CheckSettingError::ValueNoise);
        }
        Ok(GradientCheck {
            value_noise,
            ..self
        })
    }

    /// As [`check_gradient_by`], with these settings.
    ///
    /// # Errors
    /// As [`check_gradient`].
    pub fn components<V, O>(
        &self,
        objective: O,
        x: &V,
        mut add: impl FnMut(&mut V, usize, T),
    ) -> Result<GradientReport<T>, CheckError<O::Error>>
    where
        V: Vector<Scalar = T>,
        O: Objective<V>,
    {
        let mut site = Site::new(objective, x)?;
        let largest = x.max_abs();
        let mut unit = x.clone();
        let mut comparisons = Vec::with_capacity(x.dim());
        for component in 0..x.dim() {
            unit.scale(T::zero());
            add(&mut unit, component, T::one());
            let (at, gradient) = (x.dot(&unit), site.gradient.dot(&unit));
            if !gradient.is_finite() {
                let component = Some(component);
                return Err(CheckError::GradientNotFinite { component });
            }
            let magnitude = match at.abs().max(T::epsilon() * largest) {
                m if m > T::zero() => m,
                _ => self.typical,
            };
            let ladder = Ladder::climb(self, site.value, gradient, magnitude, |by| {
                site.point.assign(x);
                add(&mut site.point, component, by);
                // The way the component really went, rounding included.
                Ok((at + by - at, site.value_there()?))
            })?;
            comparisons.push(ladder.compare(self.tolerance, Some(component), gradient));
        }
        Ok(GradientReport {
            comparisons,
            tolerance: self.tolerance,
        })
    }

    /// As [`check_slope`], with these settings.
    ///
    /// # Errors
    /// As [`check_gradient`].
    pub fn slope<V, O>(
        &self,
        objective: O,
        x: &V,
        d: &V,
    ) -> Result<Comparison<T>, CheckError<O::Error>>
    where
        V: Vector<Scalar = T>,
        O: Objective<V>,
    {
        let length = d.max_abs();
        let magnitude = match x.max_abs() {
            m if m > T::zero() => m / length,
            _ => self.typical / length,
        };
        if !(length > T::zero() && length.is_finite()) || magnitude.is_infinite() {
            return Err(CheckError::Direction);
        }
        let mut site = Site::new(objective, x)?;
        let slope = site.gradient.dot(d);
        if !slope.is_finite() {
            return Err(CheckError::GradientNotFinite { component: None });
        }
        let ladder = Ladder::climb(self, site.value, slope, magnitude, |by| {
            site.point.step_from(x, by, d);
            Ok((by, site.value_there()?))
        })?;
        Ok(ladder.compare(self.tolerance, None, slope))
    }
}

impl<T: Real> Comparison<T> {
    /// `|gradient - difference|` over the larger of the two magnitudes: 0 to 2; `None` without a difference.
    pub fn relative_error(&self) -> Option<T> {
        let slope = self.difference?.slope;
        let scale = self.gradient.abs().max(slope.abs());
        Some(if scale > T::zero() {
            (self.gradient / scale - slope / scale).abs()
        } else {
            T::zero()
        })
    }

    /// For ranking: disagreements first, then doubts; within each by the relative error beyond that of the difference.
    fn badness(&self) -> (u8, T) {
        let class = match self.agreement {
            Agreement::Agrees => 0,
            Agreement::CannotTell(_) => 1,
            Agreement::Disagrees => 2,
        };
        let beyond = match self.difference {
            Some(d) => {
                let scale = self
                    .gradient
                    .abs()
                    .max(d.slope.abs())
                    .max(T::min_positive_value());
                ((self.gradient / scale - d.slope / scale).abs() - d.error / scale).max(T::zero())
            }
            None => T::infinity(),
        };
        (class, beyond)
    }
}

impl<T: Real> GradientReport<T> {
    /// Whether every component agrees.
    pub fn agrees(&self) -> bool {
        self.comparisons
            .iter()
            .all(|c| c.agreement == Agreement::Agrees)
    }

    /// The worst component: of those that disagree, else of those that cannot be told, else of those that agree, the one
    /// with the largest relative error; the first of equals. `None` for a report without components, which no check makes.
    pub fn worst(&self) -> Option<&Comparison<T>> {
        self.comparisons.iter().reduce(|worst, c| {
            if c.badness() > worst.badness() {
                c
            } else {
                worst
            }
        })
    }

    /// The components that disagree.
    pub fn disagreeing(&self) -> impl Iterator<Item = &Comparison<T>> {
        self.comparisons
            .iter()
            .filter(|c| c.agreement == Agreement::Disagrees)
    }

    /// The components that cannot be told.
    pub fn untold(&self) -> impl Iterator<Item = &Comparison<T>> {
        self.comparisons
            .iter()
            .filter(|c| matches!(c.agreement, Agreement::CannotTell(_)))
    }
}

impl<T: Real + fmt::LowerExp> fmt::Display for Comparison<T> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.component {
            Some(component) => write!(f, "component {component} of the gradient ")?,
            None => write!(f, "the slope along the direction ")?,
        }
        f.write_str(match self.agreement {
            Agreement::Agrees => "agrees",
            Agreement::Disagrees => "disagrees",
            Agreement::CannotTell(Doubt::Inaccurate) => {
                "cannot be told, the difference is too inaccurate"
            }
            Agreement::CannotTell(Doubt::Kink { .. }) => {
                "cannot be told, the function has a kink here"
            }
            Agreement::CannotTell(Doubt::NoNeighbour) => {
                "cannot be told, the function is not defined on either side"
            }
        })?;
        write!(f, ": it is {:.6e}", self.gradient)?;
        if let Agreement::CannotTell(Doubt::Kink { left, right }) = self.agreement {
            write!(
                f,
                ", the values say {left:.6e} to the left and {right:.6e} to the right"
            )?;
        } else if let (Some(d), Some(relative)) = (self.difference, self.relative_error()) {
            let side = match d.neighbours {
                Neighbours::Both => "",
                Neighbours::Right => " to the right",
                Neighbours::Left => " to the left",
            };
            write!(
                f,
                ", the values say {:.6e} +- {:.1e}{side} (relative error {relative:.1e})",
                d.slope, d.error
            )?;
        }
        Ok(())
    }
}

impl<T: Real + fmt::LowerExp> fmt::Display for GradientReport<T> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Some(worst) = self.worst() else {
            return write!(f, "there is nothing to check");
        };
        let (all, bad, untold) = (
            self.comparisons.len(),
            self.disagreeing().count(),
            self.untold().count(),
        );
        write!(
            f,
            "of {all} components {} agree to {:.1e}, {bad} disagree, {untold} cannot be told; the worst: {worst}",
            all - bad - untold,
            self.tolerance
        )
    }
}

/// The objective at the point to check, and room for another point.
struct Site<V: Vector, O> {
    objective: O,
    value: V::Scalar,
    gradient: V,
    point: V,
    scratch: V,
}

impl<V: Vector, O: Objective<V>> Site<V, O> {
    fn new(mut objective: O, x: &V) -> Result<Self, CheckError<O::Error>> {
        if x.dim() == 0 {
            return Err(CheckError::Empty);
        }
        if !x.max_abs().is_finite() {
            return Err(CheckError::PointNotFinite);
        }
        let mut gradient = x.clone();
        let value = objective
            .value_and_gradient(x, &mut gradient)
            .map_err(CheckError::Caller)?;
        if !value.is_finite() {
            return Err(CheckError::ValueNotFinite);
        }
        if gradient.dim() != x.dim() {
            return Err(CheckError::GradientLength {
                expected: x.dim(),
                found: gradient.dim(),
            });
        }
        Ok(Site {
            objective,
            value,
            gradient,
            point: x.clone(),
            scratch: x.clone(),
        })
    }

    fn value_there(&mut self) -> Result<V::Scalar, CheckError<O::Error>> {
        match self.objective.cost() {
            Cost::Separate => self.objective.value(&self.point),
            Cost::Joint => self
                .objective
                .value_and_gradient(&self.point, &mut self.scratch),
        }
        .map_err(CheckError::Caller)
    }
}
