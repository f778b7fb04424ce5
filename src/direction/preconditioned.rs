//! Steepest descent and conjugate gradients in the metric of a preconditioner.

use super::conjugate_gradient::{Update, formula};
use super::preconditioner::Preconditioner;
use super::{Direction, Moved};
use crate::vector::Survey;
use crate::{Real, Vector};

/// Steepest descent in the metric of a preconditioner: `d = -P g`. It owns no vectors.
///
/// ```
/// use surefoot::direction::{Diagonal, PreconditionedDescent};
/// let direction = PreconditionedDescent::new(Diagonal(vec![1.0, 0.01]));
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PreconditionedDescent<P> {
    preconditioner: P,
}

impl<P> PreconditionedDescent<P> {
    /// With this preconditioner.
    pub fn new(preconditioner: P) -> Self {
        PreconditionedDescent { preconditioner }
    }
}

impl<V: Vector, P: Preconditioner<V>> Direction<V> for PreconditionedDescent<P> {
    fn direction(&mut self, x: &V, g: &V, d: &mut V) -> Option<V::Scalar> {
        self.preconditioner.apply(x, g, d);
        d.scale(V::Scalar::of(-1.0));
        None
    }
    fn survey(&mut self, g: &V, _: &V, d: &V) -> Survey<V::Scalar> {
        Survey::slope_alone(g, d)
    }
    fn moved(&mut self, _: Moved<'_, V>) {}
    fn reset(&mut self) {}
}

/// Nonlinear conjugate gradients in the metric of a preconditioner: `d = -z + beta d` with `z = P g`, and the formulas of
/// [`Update`] with `z` in the place of one gradient of each product (Hager & Zhang, Pacific J. Optim. 2 (2006) 35-58, section 8;
/// recalled from memory). On `f` it makes the moves that the plain method makes on `f(C x)`, where `P = C C'`.
///
/// No restart but the drivers' own; the lower bound of the Hager–Zhang formula is left out, as it has no metric of its own.
///
/// It owns one vector, allocated when a run begins.
///
/// ```
/// use surefoot::direction::{Diagonal, PreconditionedGradient, Update};
/// let metric = Diagonal(vec![1.0, 0.01]);
/// let direction: PreconditionedGradient<Vec<f64>, _> = PreconditionedGradient::new(Update::HestenesStiefelPlus, metric);
/// ```
#[derive(Clone, Debug, PartialEq)]
pub struct PreconditionedGradient<V, P> {
    update: Update,
    preconditioner: P,
    /// `P g` at the point of the run.
    z: Option<V>,
    /// Whether `z` is there already.
    fresh: bool,
    beta: Option<f64>,
}

impl<V, P> PreconditionedGradient<V, P> {
    /// With one of the update formulas, and this preconditioner.
    pub fn new(update: Update, preconditioner: P) -> Self {
        PreconditionedGradient {
            update,
            preconditioner,
            z: None,
            fresh: false,
            beta: None,
        }
    }
}

impl<V: Vector, P: Preconditioner<V>> Direction<V> for PreconditionedGradient<V, P> {
    fn begin(&mut self, x: &V) {
        self.z = Some(x.clone());
        (self.fresh, self.beta) = (false, None);
    }

    fn direction(&mut self, x: &V, g: &V, d: &mut V) -> Option<V::Scalar> {
        let z = self.z.as_mut()?;
        if !self.fresh {
            self.preconditioner.apply(x, g, z);
            self.fresh = true;
        }
        let minus_one = V::Scalar::of(-1.0);
        match self.beta {
            None | Some(0.0) => d.combine(minus_one, z, &[], &[]),
            Some(beta) => d.scale_add(V::Scalar::of(beta), minus_one, z),
        }
        None
    }

    fn moved(&mut self, moved: Moved<'_, V>) {
        let Some(z) = &mut self.z else { return };
        let (g, d) = (moved.g_new, &*moved.direction);
        let square = moved.g_old.dot(z).to_double();
        let y = moved.g_old;
        y.subtract_from(g);
        let y_z_old = y.dot(z);
        self.preconditioner.apply(moved.x_new, g, z);
        self.fresh = true;
        let y_z = y.dot(z);
        // The products of the formulas, in the metric of `P`.
        let survey = Survey {
            square: g.dot(z),
            change_gradient: y_z,
            change_square: y_z - y_z_old,
            change_slope: d.dot(y),
            ..moved.survey
        };
        self.beta = Some(formula(self.update, &survey, square)).filter(|b| b.is_finite());
    }

    fn reset(&mut self) {
        self.beta = None;
    }
}
