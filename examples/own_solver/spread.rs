//! What a fit says about its parameters: their standard deviations.

use nalgebra::{DMatrix, DVector};

/// `s sqrt(diag (J'J)^-1)` with the residual variance `s^2 = rss / (observations - parameters)`, for the Jacobian at
/// the solution.
///
/// With `J = Q R` the matrix is `R^-1 R^-T`, and its diagonal the squared row norms of `R^-1`: nothing is squared
/// before it has to be. `None` where the Jacobian lacks rank or no degree of freedom is left: then some parameter is
/// not determined.
pub(crate) fn standard_deviations(jacobian: &DMatrix<f64>, rss: f64) -> Option<DVector<f64>> {
    let (observations, parameters) = jacobian.shape();
    let freedom = observations
        .checked_sub(parameters)
        .filter(|left| *left > 0)?;
    let s = (rss / freedom as f64).sqrt();
    let r = jacobian.clone().qr().r();
    let inverse = r.solve_upper_triangular(&DMatrix::identity(parameters, parameters))?;
    let deviations =
        DVector::from_iterator(parameters, inverse.row_iter().map(|row| s * row.norm()));
    deviations
        .iter()
        .all(|d| d.is_finite())
        .then_some(deviations)
}
