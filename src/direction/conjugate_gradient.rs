//! Nonlinear conjugate gradients.

use super::{Direction, Moved, negative};
use crate::vector::Survey;
use crate::{Real, Vector};

/// The formula for `beta` in `d = -g + beta d`.
///
/// With `g+` the new gradient, `y = g+ - g` and `d` the direction of the move.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
#[non_exhaustive]
pub enum Update {
    /// `g+.g+ / g.g`. R. Fletcher & C. M. Reeves, Computer J. 7 (1964) 149-154, doi:10.1093/comjnl/7.2.149.
    FletcherReeves,
    /// `max(0, g+.y / g.g)`. E. Polak & G. Ribière (1969), with the restriction of M. J. D. Powell (1984); Nocedal &
    /// Wright 2006, eq. 5.44 and 5.45.
    PolakRibierePlus,
    /// `max(0, g+.y / d.y)`. M. R. Hestenes & E. Stiefel (1952); Nocedal & Wright 2006, eq. 5.46, restricted likewise.
    HestenesStiefelPlus,
    /// `g+.g+ / d.y`. Y. H. Dai & Y. Yuan, SIAM J. Optim. 10 (1999) 177-182, doi:10.1137/S1052623497318992. Under the
    /// weak Wolfe rule every direction descends.
    DaiYuan,
    /// `max((y - 2 d y.y / d.y).g+ / d.y, eta)` with `eta = -1 / (|d| min(0.01, |g|))`. W. W. Hager & H. Zhang, SIAM J.
    /// Optim. 16 (2005) 170-192, doi:10.1137/030601880, eq. 1.3, 1.5 and 1.6. Every direction descends, whatever the step:
    /// `g+.d <= -7/8 g+.g+`.
    HagerZhang,
}

/// Nonlinear conjugate gradients: `d = -g + beta d`.
///
/// Begins with steepest descent and restarts with it where successive gradients are far from orthogonal,
/// `|g+.g| >= 0.2 g+.g+` (M. J. D. Powell, Math. Program. 12 (1977) 241-254, doi:10.1007/BF01593790), by default for the
/// first three updates; the papers of the last two have no such restart. The drivers also restart where a direction does
/// not descend.
///
/// Use it with the strong Wolfe rule and a small curvature parameter such as 0.1. With Fletcher–Reeves and `curvature <
/// 1/2`, without restarts, gradients come arbitrarily close to zero (M. Al-Baali 1985; Nocedal & Wright 2006, theorem
/// 5.7); for Polak–Ribière+ and Hestenes–Stiefel+ that needs the sufficient descent condition in addition (theorem by
/// J. C. Gilbert & J. Nocedal, SIAM J. Optim. 2 (1992) 21-42, doi:10.1137/0802003).
///
/// It owns no vectors; where the gradient changed little, its change is formed in the place of the old one.
///
/// ```
/// use surefoot::{Descent, acceptance::StrongWolfe, finder::MoreThuente};
/// use surefoot::direction::{ConjugateGradient, Update};
/// let descent = Descent::new(ConjugateGradient::new(Update::HagerZhang), MoreThuente::new(), StrongWolfe::new(1e-4, 0.1)?);
/// let report = descent.minimize_fn(vec![3.0, -4.0], |x, g| {
///     g[0] = x[0];
///     g[1] = 25.0 * x[1];
///     0.5 * (x[0] * x[0] + 25.0 * x[1] * x[1])
/// })?;
/// assert!(report.value < 1e-10);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ConjugateGradient {
    update: Update,
    restart: Option<f64>,
    /// The factor of the last direction in the next one; `None` where there is no last direction.
    beta: Option<f64>,
    /// `g.g` at the point of the run, once a move was made.
    square: Option<f64>,
    /// `g.d` there along the direction of that move.
    slope: f64,
    restarts: u64,
}

impl ConjugateGradient {
    /// With one of the update formulas and its usual restart.
    pub fn new(update: Update) -> Self {
        let restart = match update {
            Update::FletcherReeves | Update::PolakRibierePlus | Update::HestenesStiefelPlus => {
                Some(0.2)
            }
            Update::DaiYuan | Update::HagerZhang => None,
        };
        ConjugateGradient {
            update,
            restart,
            beta: None,
            square: None,
            slope: 0.0,
            restarts: 0,
        }
    }

    /// With Powell's restart where `|g+.g| >= share g+.g+`, or with none. A `share` that is not positive restarts always.
    #[must_use]
    pub fn with_restart(self, share: Option<f64>) -> Self {
        ConjugateGradient {
            restart: share,
            ..self
        }
    }

    /// How often Powell's test restarted it in this run.
    pub fn restarts(&self) -> u64 {
        self.restarts
    }
}

/// `beta` after a move from a gradient with this square; that of Hager and Zhang without its lower bound.
pub(super) fn formula<T: Real>(update: Update, survey: &Survey<T>, square: f64) -> f64 {
    let (g_g, g_y) = (
        survey.square.to_double(),
        survey.change_gradient.to_double(),
    );
    let d_y = survey.change_slope.to_double();
    match update {
        Update::FletcherReeves => g_g / square,
        Update::PolakRibierePlus => (g_y / square).max(0.0),
        Update::HestenesStiefelPlus => (g_y / d_y).max(0.0),
        Update::DaiYuan => g_g / d_y,
        Update::HagerZhang => {
            let y_y = survey.change_square.to_double();
            (g_y - 2.0 * survey.slope.to_double() * (y_y / d_y)) / d_y // eq. 1.3
        }
    }
}

/// `beta` after a move.
fn beta<T: Real>(update: Update, survey: &Survey<T>, square: f64) -> f64 {
    let beta = formula(update, survey, square);
    if update != Update::HagerZhang {
        return beta;
    }
    let eta = -1.0 / (root(survey.direction_square.to_double()) * root(square).min(0.01)); // eq. 1.6
    // eq. 1.5; where the gradient did not change, beta is not a number and must not become eta.
    if beta < eta { eta } else { beta }
}

fn root(x: f64) -> f64 {
    num_traits::Float::sqrt(x)
}

impl<V: Vector> Direction<V> for ConjugateGradient {
    fn begin(&mut self, _: &V) {
        self.beta = None;
        self.square = None;
        self.restarts = 0;
    }

    fn direction(&mut self, _: &V, g: &V, d: &mut V) -> Option<V::Scalar> {
        match self.beta {
            // Also where beta is 0: what `d` holds may not be finite.
            None | Some(0.0) => {
                negative(g, d);
                Some(V::Scalar::of(-self.square?))
            }
            Some(beta) => {
                d.scale_add(V::Scalar::of(beta), -num_traits::one::<V::Scalar>(), g);
                Some(V::Scalar::of(beta * self.slope - self.square?))
            }
        }
    }

    fn moved(&mut self, moved: Moved<'_, V>) {
        let (g, d) = (moved.g_new, &*moved.direction);
        let mut survey = moved.survey;
        let square = self
            .square
            .unwrap_or_else(|| moved.g_old.dot(moved.g_old).to_double());
        if !survey.change_is_sure() {
            moved.g_old.subtract_from(g);
            survey = survey.with_change(g, moved.g_old, d);
        }
        let g_g = survey.square.to_double();
        self.square = Some(g_g);
        self.slope = survey.slope.to_double();
        let far_from_orthogonal = self.restart.is_some_and(|share| {
            let both = g_g - survey.change_gradient.to_double();
            both.abs() >= share * g_g
        });
        if far_from_orthogonal {
            self.beta = None;
            self.restarts += 1;
        } else {
            self.beta = Some(beta(self.update, &survey, square)).filter(|b| b.is_finite());
        }
    }

    fn reset(&mut self) {
        self.beta = None;
    }
}
