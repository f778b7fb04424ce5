//! Fields on a rectangle, piecewise linear on triangles: what the problems of this kind share.

use super::{Slopes, Total};
use crate::problems::error::{GREATEST, WrongSize};

/// `nx` by `ny` inner nodes, a frame of boundary nodes around them, and every cell cut into two right-angled triangles.
///
/// Node `(i, j)`, `0 <= i <= nx + 1`, `0 <= j <= ny + 1`, lies at `(i hx, j hy)` from the lower left corner. The inner ones
/// are the variables, row by row: `x[(j - 1) nx + i - 1]`.
#[derive(Clone, Copy, Debug)]
pub(super) struct Grid {
    pub(super) nx: usize,
    pub(super) ny: usize,
    pub(super) hx: f64,
    pub(super) hy: f64,
}

impl Grid {
    /// A grid on a rectangle of these sides.
    pub(super) fn new(
        problem: &'static str,
        [nx, ny]: [usize; 2],
        [width, height]: [f64; 2],
    ) -> Result<Self, WrongSize> {
        // Frames of this size still fit into memory if the field does.
        WrongSize::check(problem, nx, 1..=GREATEST / 4)?;
        WrongSize::check(problem, ny, 1..=GREATEST / 4 / nx)?;
        Ok(Grid {
            nx,
            ny,
            hx: width / (nx + 1) as f64,
            hy: height / (ny + 1) as f64,
        })
    }

    /// Inner nodes `(i, j)`, in the order of the variables.
    pub(super) fn inner(&self) -> impl Iterator<Item = (usize, usize)> + use<> {
        let nx = self.nx;
        (1..=self.ny).flat_map(move |j| (1..=nx).map(move |i| (i, j)))
    }

    /// The distance of an inner node to the boundary.
    pub(super) fn depth(&self, (i, j): (usize, usize)) -> f64 {
        let across = i.min(self.nx + 1 - i) as f64 * self.hx;
        let along = j.min(self.ny + 1 - j) as f64 * self.hy;
        across.min(along)
    }

    /// Half a cell.
    pub(super) fn triangle(&self) -> f64 {
        0.5 * self.hx * self.hy
    }

    /// The integral of `density(p, q)` over the rectangle, where `(p, q)` is the gradient of the field. `density` also gives its
    /// derivatives by `p` and by `q`; what follows from them is added to `slopes`. `boundary(i, j)` is the field on the frame.
    pub(super) fn integrate<S: Slopes>(
        &self,
        x: &[f64],
        slopes: &mut S,
        boundary: impl Fn(usize, usize) -> f64,
        density: impl Fn(f64, f64) -> (f64, f64, f64),
    ) -> f64 {
        let &Grid { nx, ny, hx, hy } = self;
        let variable = |i: usize, j: usize| {
            let inner = (1..=nx).contains(&i) && (1..=ny).contains(&j);
            inner.then(|| (j - 1) * nx + i - 1)
        };
        let field = |i, j| match variable(i, j) {
            Some(k) => x[k],
            None => boundary(i, j),
        };
        let area = self.triangle();
        let mut total = Total::default();
        for j in 0..=ny {
            let (mut lower, mut upper) = (field(0, j), field(0, j + 1));
            for i in 0..=nx {
                let (lower_right, upper_right) = (field(i + 1, j), field(i + 1, j + 1));
                // The triangles at the lower left and at the upper right corner.
                let (first, p, q) = density((lower_right - lower) / hx, (upper - lower) / hy);
                let (second, r, s) =
                    density((upper_right - upper) / hx, (upper_right - lower_right) / hy);
                total.add(first + second);
                for (i, j, slope) in [
                    (i, j, -p / hx - q / hy),
                    (i + 1, j, p / hx - s / hy),
                    (i, j + 1, q / hy - r / hx),
                    (i + 1, j + 1, r / hx + s / hy),
                ] {
                    if let Some(k) = variable(i, j) {
                        slopes.add(k, area * slope);
                    }
                }
                (lower, upper) = (lower_right, upper_right);
            }
        }
        area * total.get()
    }
}
