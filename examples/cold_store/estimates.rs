//! How well the data determine the parameters: standard errors of the robust estimate at the optimum.

use crate::fit::{AIR_TOLERANCE, Fit, PRODUCT_TOLERANCE, in_tolerances, weight};
use crate::model::{PARAMETERS, Parameters, simulate_with_sensitivities};

type Matrix = [[f64; PARAMETERS]; PARAMETERS];

/// The fitted parameters and what the data say about them.
#[derive(Clone, Debug)]
pub(crate) struct Estimates {
    pub(crate) start: Parameters,
    pub(crate) parameters: Parameters,
    /// Approximate standard errors in the parameters' units; `None` where the data do not determine the parameter.
    ///
    /// Roots of the diagonal of `H^-1 S H^-1 n / (n - p)` with `H = J'W^3 J`, the Gauss-Newton matrix of the loss (the
    /// curvature of the loss at a residual is the cube of its weight), and `S = J'W^2 Z^2 J`, what the residuals `Z` make of
    /// it (P. J. Huber, "The behavior of maximum likelihood estimates under nonstandard conditions", Proc. Fifth Berkeley
    /// Symp. 1 (1967) 221-233, recalled from memory; the factor with `n` readings and `p` parameters is common practice).
    /// Right for a model that is right and readings that err independently, too small otherwise.
    pub(crate) errors: [Option<f64>; PARAMETERS],
    /// The two parameters whose errors go together most, and their correlation.
    pub(crate) entangled: Option<(usize, usize, f64)>,
}

/// Estimates at the coordinates `x` of a fit.
pub(crate) fn estimates(fit: &Fit<'_>, x: &[f64]) -> Estimates {
    let parameters = fit.parameters(x);
    let units = fit.units(&parameters);
    let (curvature, spread) = matrices(fit, &parameters, &units);
    // A parameter that the data never touch (a defrost heater that is never on) has an empty row: leave it out.
    let touched: Vec<usize> = (0..PARAMETERS).filter(|&i| curvature[i][i] > 0.0).collect();
    let mut errors = [None; PARAMETERS];
    let mut entangled: Option<(usize, usize, f64)> = None;
    if let Some(inverse) = inverse(&curvature, &touched) {
        let covariance = sandwich(&inverse, &spread, &touched);
        for (a, &i) in touched.iter().enumerate() {
            errors[i] = Some(units[i] * covariance[a][a].sqrt());
            for (b, &j) in touched.iter().enumerate().take(a) {
                let r = covariance[a][b] / (covariance[a][a] * covariance[b][b]).sqrt();
                if entangled.is_none_or(|(_, _, most)| r.abs() > most.abs()) {
                    entangled = Some((j, i, r));
                }
            }
        }
    }
    Estimates {
        start: fit.parameters(&fit.origin()),
        parameters,
        errors,
        entangled,
    }
}

/// `H` and `S n / (n - p)` in the fit's coordinates.
fn matrices(fit: &Fit<'_>, p: &Parameters, units: &Parameters) -> (Matrix, Matrix) {
    let mut curvature = [[0.0; PARAMETERS]; PARAMETERS];
    let mut spread = curvature;
    let mut count = 0.0;
    simulate_with_sensitivities(fit.rows(), p, |row, model, air_by, product_by| {
        let [air, product] = in_tolerances(row, model);
        for (z, by, tolerance) in [
            (air, air_by, AIR_TOLERANCE),
            (product, product_by, PRODUCT_TOLERANCE),
        ] {
            let Some(z) = z else { continue };
            let w = weight(z);
            count += 1.0;
            let j: Parameters = std::array::from_fn(|i| by[i] * units[i] / tolerance);
            for a in 0..PARAMETERS {
                for b in 0..PARAMETERS {
                    curvature[a][b] += w.powi(3) * j[a] * j[b];
                    spread[a][b] += (w * z).powi(2) * j[a] * j[b];
                }
            }
        }
    });
    let factor = count / (count - PARAMETERS as f64);
    spread.iter_mut().flatten().for_each(|s| *s *= factor);
    (curvature, spread)
}

/// `inverse S inverse` over the rows and columns `of` the matrix `S`.
fn sandwich(inverse: &[Vec<f64>], s: &Matrix, of: &[usize]) -> Vec<Vec<f64>> {
    let n = of.len();
    let product = |left: &dyn Fn(usize, usize) -> f64, right: &dyn Fn(usize, usize) -> f64| {
        let entry = |i: usize, j: usize| (0..n).map(|k| left(i, k) * right(k, j)).sum();
        (0..n)
            .map(|i| (0..n).map(|j| entry(i, j)).collect())
            .collect::<Vec<Vec<f64>>>()
    };
    let half = product(&|i, k| inverse[i][k], &|k, j| s[of[k]][of[j]]);
    product(&|i, k| half[i][k], &|k, j| inverse[k][j])
}

/// The inverse of the rows and columns `of` a symmetric matrix by Cholesky's method; `None` if they are not clearly
/// positive definite.
fn inverse(matrix: &Matrix, of: &[usize]) -> Option<Vec<Vec<f64>>> {
    let n = of.len();
    let mut l = vec![vec![0.0; n]; n];
    for i in 0..n {
        for j in 0..=i {
            let known: f64 = (0..j).map(|k| l[i][k] * l[j][k]).sum();
            let left = matrix[of[i]][of[j]] - known;
            if i != j {
                l[i][j] = left / l[j][j];
            } else if left > 1e-12 * matrix[of[i]][of[i]] {
                l[i][i] = left.sqrt();
            } else {
                return None;
            }
        }
    }
    let columns = (0..n).map(|c| {
        let mut x = vec![0.0; n];
        for i in 0..n {
            let known: f64 = (0..i).map(|k| l[i][k] * x[k]).sum();
            x[i] = (f64::from(u8::from(i == c)) - known) / l[i][i];
        }
        for i in (0..n).rev() {
            let known: f64 = (i + 1..n).map(|k| l[k][i] * x[k]).sum();
            x[i] = (x[i] - known) / l[i][i];
        }
        x
    });
    Some(columns.collect())
}
