use core::f64::consts::PI;

use super::grid::Grid;
use super::minimal_surface::AVERICK;
use super::{Formula, Problem, Slopes, Total, WrongSize};

/// The torsion of an elastic bar, in `n = nx ny` variables: the stress potential at the inner nodes of a grid on the unit square.
///
/// `f(v) = integral of |grad v|^2 / 2 - 5 v` for a `v` that is piecewise linear on triangles and 0 on the boundary: a quadratic
/// whose condition number grows as `1 / h^2`. This is the elastic-plastic torsion problem of the source *without* its bounds
/// `|v| <= distance to the boundary`: the methods here know no bounds. Start: the distance to the boundary. The minimum is known
/// for every grid from the eigenvectors of the five-point difference operator; it tends to -0.43930... as the grid is refined.
///
/// Source: B. M. Averick, R. G. Carter, J. J. Moré & G. Xue, "The MINPACK-2 test problem collection", Argonne National
/// Laboratory, Preprint MCS-P153-0692, 1992, elastic-plastic torsion with c = 5; from memory.
///
/// ```
/// let problem = surefoot::problems::large::elastic_torsion(50, 50)?;
/// assert!((problem.minima()[0].value() + 0.4393).abs() < 1e-3);
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `nx` or `ny` is 0.
pub fn elastic_torsion(nx: usize, ny: usize) -> Result<Problem, WrongSize> {
    let grid = Grid::new(NAME, [nx, ny], [1.0, 1.0])?;
    let start = grid.inner().map(|node| grid.depth(node));
    Ok(
        Problem::one_pass(NAME, AVERICK, ElasticTorsion { grid }, start)
            .described(minimum(&grid), "the solution of a linear system"),
    )
}

const NAME: &str = "Elastic torsion";

/// The twist `c`.
const LOAD: f64 = 5.0;

/// `-b' A^-1 b / 2`: the eigenvectors are products of sines `sin(k pi i / (nx + 1))`, whose sum over `i` is
/// `cot(k pi / (2 (nx + 1)))` for odd `k` and 0 for even ones.
fn minimum(grid: &Grid) -> f64 {
    // The square of the load on a sine of norm 1, and its eigenvalue.
    let modes = |count: usize, h: f64| {
        (1..=count).step_by(2).map(move |k| {
            let half = 0.5 * PI * k as f64 / (count + 1) as f64;
            let share = half.tan().powi(-2) * 2.0 / (count + 1) as f64;
            (share, (2.0 * half.sin() / h).powi(2))
        })
    };
    let mut total = Total::default();
    for (along, stiff) in modes(grid.ny, grid.hy) {
        for (across, other) in modes(grid.nx, grid.hx) {
            total.add(along * across / (stiff + other));
        }
    }
    -0.5 * LOAD * LOAD * grid.hx * grid.hy * total.get()
}

#[derive(Debug)]
struct ElasticTorsion {
    grid: Grid,
}

impl Formula for ElasticTorsion {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let grid = &self.grid;
        slopes.clear();
        let energy = grid.integrate(x, slopes, |_, _| 0.0, |p, q| (0.5 * (p * p + q * q), p, q));
        // Six triangles meet at a node, a third of each is its own.
        let load = 2.0 * grid.triangle() * LOAD;
        let mut total = Total::default();
        for (k, &v) in x.iter().enumerate() {
            total.add(v);
            slopes.add(k, -load);
        }
        energy - load * total.get()
    }
}
