use super::grid::Grid;
use super::{Formula, Problem, Slopes, Vec, WrongSize};

/// A minimal surface in closed form, whose boundary a [`minimal_surface`] is spanned in.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
#[non_exhaustive]
pub enum SurfaceBoundary {
    /// H. F. Scherk's surface `z = ln(cos x / cos y)` over `-1 <= x, y <= 1`.
    Scherk,
    /// The catenoid `z = sqrt(cosh(y)^2 - x^2)` over `-1/2 <= x, y <= 1/2`: the upper part of what a catenary makes when it
    /// turns about the y axis.
    Catenoid,
}

impl SurfaceBoundary {
    /// The height of the closed form at `(x, y)`.
    pub fn height(self, x: f64, y: f64) -> f64 {
        match self {
            SurfaceBoundary::Scherk => (x.cos() / y.cos()).ln(),
            SurfaceBoundary::Catenoid => (y.cosh() * y.cosh() - x * x).sqrt(),
        }
    }

    /// Half the side of the square.
    pub fn half_side(self) -> f64 {
        match self {
            SurfaceBoundary::Scherk => 1.0,
            SurfaceBoundary::Catenoid => 0.5,
        }
    }

    /// The heights of the closed form at the inner nodes of a grid, in the order of the variables of [`minimal_surface`].
    ///
    /// # Errors
    /// [`WrongSize`] if `nx` or `ny` is 0.
    pub fn heights(self, nx: usize, ny: usize) -> Result<Vec<f64>, WrongSize> {
        let grid = self.grid(nx, ny)?;
        Ok(grid.inner().map(|node| self.at(&grid, node)).collect())
    }

    fn name(self) -> &'static str {
        match self {
            SurfaceBoundary::Scherk => "Minimal surface (Scherk)",
            SurfaceBoundary::Catenoid => "Minimal surface (catenoid)",
        }
    }

    fn grid(self, nx: usize, ny: usize) -> Result<Grid, WrongSize> {
        Grid::new(self.name(), [nx, ny], [2.0 * self.half_side(); 2])
    }

    fn at(self, grid: &Grid, (i, j): (usize, usize)) -> f64 {
        let x = i as f64 * grid.hx - self.half_side();
        let y = j as f64 * grid.hy - self.half_side();
        self.height(x, y)
    }
}

/// The surface of least area in a frame, in `n = nx ny` variables: the heights at the inner nodes of a grid.
///
/// `f` is the sum of the areas of the triangles, `hx hy / 2 sqrt(1 + p^2 + q^2)` each, `(p, q)` the gradient of the piecewise linear
/// surface; every cell is cut into one at its lower left and one at its upper right corner. On the frame the heights are those
/// of the closed form. Start: the mean height of the frame everywhere (our choice). f is strictly convex; no minimum is stored,
/// but its point differs from the [heights of the closed form](SurfaceBoundary::heights) by a multiple of `h^2`.
///
/// Source: the discretisation is that of B. M. Averick, R. G. Carter, J. J. Moré & G. Xue, "The MINPACK-2 test problem
/// collection", Argonne National Laboratory, Preprint MCS-P153-0692, 1992, there with another frame; from memory. The surfaces
/// are classical.
///
/// ```
/// use surefoot::problems::large::{SurfaceBoundary, minimal_surface};
///
/// let problem = minimal_surface(SurfaceBoundary::Scherk, 20, 30)?;
/// assert_eq!(problem.dim(), 600);
/// // No surface over the square is less than the square.
/// assert!(problem.value(problem.start()).unwrap() > 4.0);
/// # Ok::<(), surefoot::problems::WrongSize>(())
/// ```
///
/// # Errors
/// [`WrongSize`] if `nx` or `ny` is 0.
pub fn minimal_surface(
    boundary: SurfaceBoundary,
    nx: usize,
    ny: usize,
) -> Result<Problem, WrongSize> {
    let grid = boundary.grid(nx, ny)?;
    let at = |i, j| boundary.at(&grid, (i, j));
    let frame = Frame {
        bottom: (0..=nx + 1).map(|i| at(i, 0)).collect(),
        top: (0..=nx + 1).map(|i| at(i, ny + 1)).collect(),
        left: (0..=ny + 1).map(|j| at(0, j)).collect(),
        right: (0..=ny + 1).map(|j| at(nx + 1, j)).collect(),
    };
    let start = core::iter::repeat_n(frame.mean(), nx * ny);
    let formula = MinimalSurface { grid, frame };
    Ok(Problem::one_pass(boundary.name(), AVERICK, formula, start))
}

pub(super) const AVERICK: &str = "B. M. Averick, R. G. Carter, J. J. Moré, G. Xue, The MINPACK-2 test problem collection, \
     Argonne National Laboratory, Preprint MCS-P153-0692, 1992";

/// The heights on the four edges, corners in two of them.
#[derive(Debug)]
struct Frame {
    bottom: Vec<f64>,
    top: Vec<f64>,
    left: Vec<f64>,
    right: Vec<f64>,
}

impl Frame {
    fn mean(&self) -> f64 {
        let edges = [&self.bottom, &self.top, &self.left, &self.right];
        let (sum, count) = edges
            .iter()
            .flat_map(|edge| edge.iter())
            .fold((0.0, 0.0), |(sum, count), height| {
                (sum + height, count + 1.0)
            });
        sum / count
    }
}

#[derive(Debug)]
struct MinimalSurface {
    grid: Grid,
    frame: Frame,
}

impl Formula for MinimalSurface {
    fn evaluate<S: Slopes>(&self, x: &[f64], slopes: &mut S) -> f64 {
        let MinimalSurface { grid, frame } = self;
        let boundary = |i, j| {
            if j == 0 {
                frame.bottom[i]
            } else if j == grid.ny + 1 {
                frame.top[i]
            } else if i == 0 {
                frame.left[j]
            } else {
                frame.right[j]
            }
        };
        slopes.clear();
        grid.integrate(x, slopes, boundary, |p, q| {
            let stretch = (1.0 + p * p + q * q).sqrt();
            (stretch, p / stretch, q / stretch)
        })
    }
}
