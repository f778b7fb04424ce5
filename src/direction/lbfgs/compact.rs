//! The small matrices of the compact form, and the coefficients of the direction that they give.

use crate::Real;
use alloc::vec::Vec;

/// The products of the pairs with each other and with the gradient at hand, in double precision, by pair number.
#[derive(Clone, Debug, Default)]
pub(super) struct Products {
    memory: usize,
    /// `s_i.y_j` where pair `i` is not newer than `j`; row by row.
    moves_changes: Vec<f64>,
    /// `y_i.y_j`.
    changes: Vec<f64>,
    /// `s_i.g` and `y_i.g` with the gradient `g` at the point of the run.
    pub(super) moves_gradient: Vec<f64>,
    pub(super) changes_gradient: Vec<f64>,
    /// The pairs from the oldest to the newest, as far as they are held.
    order: Vec<usize>,
    /// `R^-1 S'g`, and what becomes of it, in this order.
    u: Vec<f64>,
    w: Vec<f64>,
}

impl Products {
    pub(super) fn begin(&mut self, memory: usize) {
        *self = Products {
            memory,
            moves_changes: alloc::vec![0.0; memory * memory],
            changes: alloc::vec![0.0; memory * memory],
            moves_gradient: alloc::vec![0.0; memory],
            changes_gradient: alloc::vec![0.0; memory],
            order: Vec::with_capacity(memory),
            u: alloc::vec![0.0; memory],
            w: alloc::vec![0.0; memory],
        };
    }

    /// Takes in the products of pair `older` (or of the newest itself) with the change of the gradient of the newest pair.
    pub(super) fn set(&mut self, older: usize, newest: usize, s_y: f64, y_y: f64) {
        self.moves_changes[older * self.memory + newest] = s_y;
        self.changes[older * self.memory + newest] = y_y;
        self.changes[newest * self.memory + older] = y_y;
    }

    /// The pairs held are these, from the oldest to the newest.
    pub(super) fn order(&mut self, pairs: impl Iterator<Item = usize>) {
        self.order.clear();
        self.order.extend(pairs);
    }

    /// The coefficients of `s` and `y` of each pair in the direction
    /// `-H g`, by pair number, and the slope along it; `None` where the terms of the slope cancel so far that the matrices have
    /// lost their accuracy. `inverse_curvatures` are the `1 / s_i.y_i`.
    ///
    /// Byrd, Nocedal & Schnabel (1994), eq. 3.1:
    /// `H = gamma I + [S gamma Y] [[R^-T (D + gamma Y'Y) R^-1, -R^-T], [-R^-1, 0]] [S'; gamma Y']`.
    pub(super) fn direction<T: Real>(
        &mut self,
        gamma: f64,
        g_g: f64,
        inverse_curvatures: &[f64],
        mut coefficient: impl FnMut(usize, f64, f64),
    ) -> Option<f64> {
        let (m, order) = (self.memory, &self.order[..]);
        let k = order.len();
        let (u, w) = (&mut self.u[..k], &mut self.w[..k]);
        // u = R^-1 S'g, from the newest pair to the oldest.
        for a in (0..k).rev() {
            let row = &self.moves_changes[order[a] * m..][..m];
            let mut sum = self.moves_gradient[order[a]];
            for b in a + 1..k {
                sum -= row[order[b]] * u[b];
            }
            u[a] = sum * inverse_curvatures[order[a]];
        }
        // w = R^-T (D u + gamma (Y'Y u - Y'g)), from the oldest pair to the newest.
        for a in 0..k {
            let i = order[a];
            let row = &self.changes[i * m..][..m];
            let mut y_y_u = 0.0;
            for b in 0..k {
                y_y_u += row[order[b]] * u[b];
            }
            let curvature = self.moves_changes[i * m + i];
            let mut sum = curvature * u[a] + gamma * (y_y_u - self.changes_gradient[i]);
            for b in 0..a {
                sum -= self.moves_changes[order[b] * m + i] * w[b];
            }
            w[a] = sum * inverse_curvatures[i];
        }
        let (mut slope, mut size) = (-gamma * g_g, gamma * g_g);
        for a in 0..k {
            let i = order[a];
            let along_s = -w[a] * self.moves_gradient[i];
            let along_y = gamma * u[a] * self.changes_gradient[i];
            slope += along_s + along_y;
            size += along_s.abs() + along_y.abs();
            coefficient(i, -w[a], gamma * u[a]);
        }
        // Each term is right to a few units of rounding: the slope keeps half of its digits where they cancel no further.
        let kept = num_traits::Float::sqrt(T::epsilon().to_double());
        (slope < 0.0 && -slope >= kept * size && size.is_finite()).then_some(slope)
    }
}
