use super::grid::Grid;
use super::minimal_surface::AVERICK;
use super::{Formula, Problem, Slopes, Total, WrongSize};

/// Optimal design with composite materials, in `n = nx ny` variables: the stress potential at the inner nodes of a grid on the
/// unit square, where two materials share a bar of greatest stiffness.
///
/// `f(v) = integral of psi(|grad v|) + v` for a `v` that is piecewise linear on triangles and 0 on the boundary, where
///
/// ```text
/// psi(t) = t^2                             0 <= t <= t1
///          2 t1 (t - t1 / 2)               t1 <= t <= t2
///          (t^2 - t2^2) / 2 + 2 t1 (t2 - t1 / 2)   t2 <= t
/// ```
///
/// with `t1 = sqrt(0.008)`, `t2 = 2 t1` (the stiffnesses 1 and 2 and the multiplier 0.008 of the source). f is convex, and its
/// curvature jumps where `|grad v|` crosses `t1` and `t2`: it vanishes along the gradient between them. Start: the square of the
/// distance to the boundary, negative. No minimum is stored.
///
/// Source: J. Goodman, R. Kohn & L. Reyna, "Numerical study of a relaxed variational problem from optimal design", Comput. Methods
/// Appl. Mech. Engrg. 57, 1986, 107-127, in the form of B. M. Averick, R. G. Carter, J. J. Moré & G. Xue, "The MINPACK-2 test
/// problem collection", Argonne National Laboratory, Preprint MCS-P153-0692, 1992; from memory.
///
/// ```
/// let problem = surefoot::problems::large::optimal_design(20, 20)?;
/// assert_eq!(problem.value(&[0.0; 400]), Ok(0.0));
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `nx` or `ny` is 0.
pub fn optimal_design(nx: usize, ny: usize) -> Result<Problem, WrongSize> {
    let grid = Grid::new(NAME, [nx, ny], [1.0, 1.0])?;
    let start = grid.inner().map(|node| -grid.depth(node).powi(2));
    let formula = OptimalDesign { grid };
    Ok(Problem::one_pass(NAME, AVERICK, formula, start))
}

const NAME: &str = "Optimal design with composites";

/// `t1^2`; the strong material has stiffness 2, the weak one 1.
const T1_SQUARED: f64 = 0.008;

/// `psi(t)` and `psi'(t) / t` by `t^2`.
fn psi(squared: f64) -> (f64, f64) {
    if squared <= T1_SQUARED {
        (squared, 2.0)
    } else if squared <= 4.0 * T1_SQUARED {
        let (t1, t) = (T1_SQUARED.sqrt(), squared.sqrt());
        (2.0 * t1 * t - T1_SQUARED, 2.0 * t1 / t)
    } else {
        (0.5 * squared + T1_SQUARED, 1.0)
    }
}

#[derive(Debug)]
struct OptimalDesign {
    grid: Grid,
}

impl Formula for OptimalDesign {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let grid = &self.grid;
        slopes.clear();
        let energy = grid.integrate(
            x,
            slopes,
            |_, _| 0.0,
            |p, q| {
                let (value, per_length) = psi(p * p + q * q);
                (value, per_length * p, per_length * q)
            },
        );
        // Six triangles meet at a node, a third of each is its own.
        let share = 2.0 * grid.triangle();
        let mut total = Total::default();
        for (k, &v) in x.iter().enumerate() {
            total.add(v);
            slopes.add(k, share);
        }
        energy + share * total.get()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_pieces_of_psi_join_with_their_slopes() {
        for joint in [T1_SQUARED, 4.0 * T1_SQUARED] {
            let (before, after) = (psi(joint), psi(joint * (1.0 + f64::EPSILON)));
            assert!((before.0 - after.0).abs() <= 1e-15 * before.0);
            assert!((before.1 - after.1).abs() <= 1e-15 * before.1);
        }
        // psi(t2) = t2^2 / 2 + (2 t1 (t2 - t1 / 2) - t2^2 / 2) = 3 t1^2
        assert!((psi(4.0 * T1_SQUARED).0 - 3.0 * T1_SQUARED).abs() < 1e-16);
    }
}
