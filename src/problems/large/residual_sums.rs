//! Problems of Moré, Garbow & Hillstrom 1981 that come in any size, taken as one evaluation of value and gradient.

use super::{Problem, WrongSize};
use crate::problems::more_garbow_hillstrom as published;

/// The first penalty function in `n` variables, at least 1:
/// [`more_garbow_hillstrom::penalty_1`](published::penalty_1) with [`Cost::Joint`](crate::Cost::Joint). Its minimum is known for
/// every `n`.
///
/// ```
/// let problem = surefoot::problems::large::penalty_1(1000)?;
/// assert_eq!(problem.dim(), 1000);
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn penalty_1(n: usize) -> Result<Problem, WrongSize> {
    let problem = published::penalty_1(n)?.joint();
    if !problem.minima().is_empty() {
        return Ok(problem);
    }
    // Newton's method for the root of 1e-5 (t - 1) + 2 t (n t^2 - 1/4); there is one positive root.
    let size = n as f64;
    let mut t = 0.5 / size.sqrt();
    for _ in 0..20 {
        let residual = 1e-5 * (t - 1.0) + 2.0 * t * (size * t * t - 0.25);
        t -= residual / (1e-5 + 6.0 * size * t * t - 0.5);
    }
    let minimum = size * 1e-5 * (t - 1.0).powi(2) + (size * t * t - 0.25).powi(2);
    Ok(problem.described(minimum, "all components the positive root of a cubic"))
}

/// The second penalty function in `n` variables, 2 to 100:
/// [`more_garbow_hillstrom::penalty_2`](published::penalty_2) with [`Cost::Joint`](crate::Cost::Joint). Minimum 97096.0... for
/// `n = 100`, where runs from the start end (recalled and reproduced).
///
/// ```
/// let problem = surefoot::problems::large::penalty_2(100)?;
/// assert_eq!(problem.dim(), 100);
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] unless `2 <= n <= 100`.
pub fn penalty_2(n: usize) -> Result<Problem, WrongSize> {
    let problem = published::penalty_2(n)?.joint();
    Ok(match n {
        100 => problem.described(97096.083954688, "where runs from the start end"),
        _ => problem,
    })
}

/// The variably dimensioned function in `n` variables, at least 1:
/// [`more_garbow_hillstrom::variably_dimensioned`](published::variably_dimensioned) with [`Cost::Joint`](crate::Cost::Joint).
///
/// ```
/// let problem = surefoot::problems::large::variably_dimensioned(1000)?;
/// assert_eq!(problem.value(&[1.0; 1000]), Ok(0.0));
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn variably_dimensioned(n: usize) -> Result<Problem, WrongSize> {
    Ok(published::variably_dimensioned(n)?.joint())
}

/// The discrete boundary value function in `n` variables, at least 1:
/// [`more_garbow_hillstrom::discrete_boundary_value`](published::discrete_boundary_value) with
/// [`Cost::Joint`](crate::Cost::Joint). Minimum 0.
///
/// ```
/// let problem = surefoot::problems::large::discrete_boundary_value(1000)?;
/// assert_eq!(problem.dim(), 1000);
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn discrete_boundary_value(n: usize) -> Result<Problem, WrongSize> {
    Ok(described(published::discrete_boundary_value(n)?))
}

/// Broyden's tridiagonal function in `n` variables, at least 1:
/// [`more_garbow_hillstrom::broyden_tridiagonal`](published::broyden_tridiagonal) with [`Cost::Joint`](crate::Cost::Joint).
/// Minimum 0.
///
/// ```
/// let problem = surefoot::problems::large::broyden_tridiagonal(1000)?;
/// assert_eq!(problem.value(problem.start()), Ok(1011.0)); // n - 2 of 1, 4 at the first, 9 at the last
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn broyden_tridiagonal(n: usize) -> Result<Problem, WrongSize> {
    Ok(described(published::broyden_tridiagonal(n)?))
}

/// Broyden's banded function in `n` variables, at least 1:
/// [`more_garbow_hillstrom::broyden_banded`](published::broyden_banded) with [`Cost::Joint`](crate::Cost::Joint). Minimum 0.
///
/// ```
/// let problem = surefoot::problems::large::broyden_banded(1000)?;
/// assert_eq!(problem.value(problem.start()), Ok(36_000.0)); // 6 squared, n times
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `n = 0`.
pub fn broyden_banded(n: usize) -> Result<Problem, WrongSize> {
    Ok(described(published::broyden_banded(n)?))
}

/// A system of equations with a solution, which is stored for 10 variables only.
fn described(problem: Problem) -> Problem {
    if problem.minima().is_empty() {
        problem
            .described(0.0, "the solution of the equations ri = 0")
            .joint()
    } else {
        problem.joint()
    }
}
