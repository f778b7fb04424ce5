//! The direction: damped Gauss–Newton in relative units.
//!
//! Near the parameters `b` the residuals are taken for linear, `r + J d`, and `d` makes their squares smallest. Two
//! things go wrong with that far from the solution: the columns of `J` differ by many orders of magnitude, and where
//! some parameters can hardly be told apart the step is far longer than the linear model is good for. So
//!
//! - the unknown is the *relative* change `s_j = d_j / u_j` with the unit `u_j = |b_j|`: the columns of the scaled
//!   Jacobian `A = J diag(u)` then all say what the fit gains from a change by a parameter's own size;
//! - Levenberg's damping `mu` is raised from 0 until the step is no longer than [`Restraint::reach`] and clearly
//!   descends: `s = -V diag(sigma / (sigma^2 + mu)) U'r` with the singular values `A = U diag(sigma) V'` (K.
//!   Levenberg, "A method for the solution of certain non-linear problems in least squares", Quarterly of Applied
//!   Mathematics 2 (1944) 164-168). One decomposition serves every `mu`. Where the Jacobian all but lacks rank, the
//!   undamped step is too long; what is nothing but rounding is left out altogether.

use nalgebra::{DMatrix, DVector, SVD};

/// What a direction has to keep to.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Restraint {
    /// Longest step, as the Euclidean norm of the relative changes. Above 0; below 1, no parameter changes its sign
    /// in a full step.
    pub(crate) reach: f64,
    /// Least cosine between the step and the steepest descent, in relative units. In (0, 1). A lower bound, whatever
    /// its size, is what Zoutendijk's theorem asks for.
    pub(crate) cosine: f64,
}

/// A direction and what the linear model knows about it.
#[derive(Debug, Clone)]
pub(crate) struct Direction {
    /// The step `d`, in the units of the parameters.
    pub(crate) step: DVector<f64>,
    /// Its length: the Euclidean norm of the relative changes.
    pub(crate) length: f64,
    /// Slope of half the sum of squares along it, `r'J d`.
    pub(crate) slope: f64,
    /// What the undamped linear model still hopes to gain, in units of half the sum of squares.
    pub(crate) in_sight: f64,
    /// Cosine of the angle between the residuals and the tangent plane of the model: 0 at a solution, where no change
    /// of the parameters brings the fit nearer. (D. M. Bates & D. G. Watts, "A relative offset orthogonality
    /// convergence criterion for nonlinear least squares", Technometrics 23 (1981) 179-183, without their degrees of
    /// freedom.)
    pub(crate) offset: f64,
}

/// Where the unit of a parameter that is (nearly) zero comes from: the change that moves the fit by this share of the
/// residuals.
const LEAST_SHARE: f64 = 1e-6;

/// The direction at `parameters`; `None` where the Jacobian is zero, or numbers overflow.
pub(crate) fn damped_gauss_newton(
    parameters: &DVector<f64>,
    residuals: &DVector<f64>,
    jacobian: &DMatrix<f64>,
    restraint: Restraint,
) -> Option<Direction> {
    let units = units(parameters, residuals, jacobian);
    let mut scaled = jacobian.clone();
    for (mut column, unit) in scaled.column_iter_mut().zip(&units) {
        column *= *unit;
    }
    let svd = SVD::try_new(scaled, true, true, f64::EPSILON, 0)?;
    let (u, v_t, sigma) = (svd.u?, svd.v_t?, svd.singular_values);
    let largest = sigma.max();
    if !(largest > 0.0 && largest.is_finite()) {
        return None;
    }
    let mut along = u.tr_mul(residuals);
    for (part, sigma) in along.iter_mut().zip(&sigma) {
        if *sigma <= f64::EPSILON * residuals.len() as f64 * largest {
            *part = 0.0; // rounding
        }
    }
    let steepest = along.component_mul(&sigma);
    let offset = if along.norm() > 0.0 {
        along.norm() / residuals.norm()
    } else {
        0.0
    };

    let mut damping = 0.0;
    let (step, length) = loop {
        let step = steepest.zip_map(&sigma, |g, sigma| -> f64 {
            if g == 0.0 {
                0.0
            } else {
                -g / (sigma * sigma + damping)
            }
        });
        let length = step.norm();
        let cosine = -step.dot(&steepest) / (length * steepest.norm());
        if offset == 0.0 || (length <= restraint.reach && cosine >= restraint.cosine) {
            break (step, length);
        }
        if !(length > 0.0) {
            return None; // not a number
        }
        damping = if damping == 0.0 {
            largest * largest * f64::EPSILON * f64::EPSILON
        } else {
            2.0 * damping
        };
    };
    Some(Direction {
        slope: step.dot(&steepest),
        step: v_t.tr_mul(&step).component_mul(&units),
        length,
        in_sight: 0.5 * along.norm_squared(),
        offset,
    })
}

fn units(
    parameters: &DVector<f64>,
    residuals: &DVector<f64>,
    jacobian: &DMatrix<f64>,
) -> DVector<f64> {
    let share = LEAST_SHARE * residuals.norm();
    DVector::from_iterator(
        parameters.len(),
        parameters
            .iter()
            .zip(jacobian.column_iter())
            .map(|(b, column)| {
                let norm = column.norm();
                let least = if norm > 0.0 { share / norm } else { 0.0 };
                b.abs().max(least)
            }),
    )
}
