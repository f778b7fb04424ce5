//! The sum of squares that a problem's residuals are poured into, one by one.

/// Sums `w r^2` over the residuals and, when a gradient is wanted, adds up `2 w r dr/dx`.
///
/// A problem hands over each residual with a closure for its row of derivatives. The closure runs
/// only when the gradient is wanted, so the value alone never pays for derivatives; nothing is
/// stored, so nothing is allocated. Value and gradient come from the same lines of a problem and
/// cannot drift apart.
pub(super) struct Squares<'g> {
    residuals: usize,
    value: f64,
    gradient: Option<&'g mut [f64]>,
    /// Residuals received so far; the tests compare it with the published `m`.
    received: usize,
}

impl<'g> Squares<'g> {
    /// An empty sum for a problem of `residuals` terms. The gradient, if any, is set to zero.
    pub(super) fn new(residuals: usize, mut gradient: Option<&'g mut [f64]>) -> Self {
        if let Some(gradient) = gradient.as_deref_mut() {
            gradient.fill(0.0);
        }
        Squares {
            residuals,
            value: 0.0,
            gradient,
            received: 0,
        }
    }

    /// The number of residuals `m` of the instance.
    pub(super) fn residuals(&self) -> usize {
        self.residuals
    }

    /// The sum of what was added.
    pub(super) fn value(&self) -> f64 {
        self.value
    }

    /// The number of residuals added.
    #[cfg(test)]
    pub(super) fn received(&self) -> usize {
        self.received
    }

    /// Adds `r^2`; `row` yields `dr/dx_1, dr/dx_2, ...`, and components it leaves out are zero.
    pub(super) fn add<R>(&mut self, r: f64, row: impl FnOnce() -> R)
    where
        R: IntoIterator<Item = f64>,
    {
        self.add_at(0, 1.0, r, row);
    }

    /// Adds `w r^2` for a weight `w` that is exact where its root is not.
    pub(super) fn add_weighted<R>(&mut self, w: f64, r: f64, row: impl FnOnce() -> R)
    where
        R: IntoIterator<Item = f64>,
    {
        self.add_at(0, w, r, row);
    }

    /// Adds `w r^2`; `row` yields the derivatives from component `first` (counted from 0) on.
    pub(super) fn add_at<R>(&mut self, first: usize, w: f64, r: f64, row: impl FnOnce() -> R)
    where
        R: IntoIterator<Item = f64>,
    {
        self.add_value(w * r * r);
        self.add_gradient(first, 2.0 * w * r, row);
    }

    /// Adds one term to the value; its share of the gradient comes by [`Squares::add_gradient`].
    pub(super) fn add_value(&mut self, term: f64) {
        self.value += term;
        self.received += 1;
    }

    /// Adds `factor` times the row to the gradient, from component `first` (counted from 0) on.
    pub(super) fn add_gradient<R>(&mut self, first: usize, factor: f64, row: impl FnOnce() -> R)
    where
        R: IntoIterator<Item = f64>,
    {
        if let Some(gradient) = self.gradient.as_deref_mut() {
            for (g, derivative) in gradient.iter_mut().skip(first).zip(row()) {
                *g += factor * derivative;
            }
        }
    }
}
