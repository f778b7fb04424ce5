//! The first step that each search of a run tries.

use crate::{Real, Vector};
use num_traits::Float;

/// How the first trial of each search is chosen.
///
/// The very first search of a run opens with the initial guess of
/// Hager & Zhang (ACM Trans. Math. Software 32 (2006) 113-137, doi:10.1145/1132973.1132979, section 3, step I0; recalled
/// from memory): `0.01 |x| / |g|` in max-norms, `0.01 |f| / g.g` where `x = 0`, and 1 where `f = 0` too. [`FirstTrial::Unit`],
/// [`FirstTrial::Fixed`] and [`FirstTrial::Diminishing`] open with their own step.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
#[non_exhaustive]
pub enum FirstTrial {
    /// About 1 where the direction says that it is natural ([`Direction::unit_step`](crate::Direction::unit_step)),
    /// [`LastDecrease`](FirstTrial::LastDecrease) otherwise. The default.
    ///
    /// Limited-memory directions tend to be too short, or too long, for a whole run. So 1 is corrected by the root of a running geometric
    /// mean of the steps at which the slope of the last searches would have vanished, had it been linear: `a slope_0 / (slope_0 -
    /// slope_a)` at the accepted step `a`, the newest with the weight 1/8, each kept within [1/16, 16] and the correction within [1/4, 4]. A
    /// reset of the direction forgets it. Weight and root are from a measurement (`examples/limited_memory_costs.rs`: 6 % fewer evaluations,
    /// together with the smoothed initial scale of L-BFGS).
    #[default]
    ByDirection,
    /// Always 1.
    Unit,
    /// Always this step, positive and finite.
    Fixed(f64),
    /// The step that promises the same first-order change as the last one did: `a = a_last slope_last / slope`
    /// (Nocedal & Wright 2006, section 3.5).
    SameChange,
    /// Barzilai and Borwein's long step `s.s / s.y` for steepest descent (J. Barzilai & J. M. Borwein, IMA J. Numer. Anal. 8
    /// (1988) 141-148, doi:10.1093/imanum/8.1.141, eq. 5). Where `s.y <= 0` the step of
    /// [`LastDecrease`](FirstTrial::LastDecrease) stands in. For steepest descent (along a quasi-Newton
    /// direction it has the wrong units), and meant for a nonmonotone [`Reference`](super::Reference).
    BarzilaiBorweinLong,
    /// Barzilai and Borwein's short step `s.y / y.y` (eq. 6 there), with the same safeguard.
    BarzilaiBorweinShort,
    /// Twice the last step: step I2 of Hager & Zhang (2006) with `psi_2 = 2`; the opening is theirs too (I0). With their
    /// quadratic step (I1), which costs an evaluation: [`HagerZhangQuadratic`](FirstTrial::HagerZhangQuadratic).
    HagerZhang,
    /// The initial guess of Hager & Zhang with its quadratic step (SIAM J. Optim. 16 (2005) 170-192,
    /// doi:10.1137/030601880, section 4, steps I0 to I2 with `psi_0 = 0.01`, `psi_1 = 0.1`, `psi_2 = 2`).
    ///
    /// Each search but the first is preceded by a probe: the value at a tenth of the last step. Where it is not above the value
    /// at the start, and the parabola through both with the slope at the start opens upward, the first trial is the
    /// minimizer of that parabola (I1). Otherwise, also where the probe lies outside of the domain, it is twice the last
    /// step (I2).
    ///
    /// The probe is counted as an evaluation. It is no trial: no rule judges it, and it stands in no log. It keeps to the
    /// bounds of the search, so that bounds may move it from a tenth of the last step.
    HagerZhangQuadratic,
    /// `first / (k + 1)` for the move number `k` from 0: steps that diminish but whose sum does not, as subgradient and
    /// stochastic methods want them. `first` is positive and finite.
    Diminishing {
        /// The first step.
        first: f64,
    },
    /// The minimizer of the parabola with the slope at hand and the last decrease: `a = 2 (f - f_last) / slope` (Nocedal &
    /// Wright 2006, eq. 3.60).
    LastDecrease,
}

/// What a run remembers of its last move.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct LastMove<T> {
    pub(super) step: T,
    pub(super) slope: T,
    /// `f_last - f`.
    pub(super) decrease: T,
    pub(super) products: Option<Products<T>>,
}

/// The running mean of the steps at which slopes would have vanished, where 1 is the natural step.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Stride<T>(T);

impl<T: Real> Stride<T> {
    pub(super) fn new() -> Self {
        Stride(T::of(1.0))
    }

    /// Learns from a search that accepted `step`, with these slopes at its start and there.
    pub(super) fn accepted(&mut self, step: T, (slope, there): (T, T)) {
        let vanishes = step * (slope / (slope - there));
        if there > slope && vanishes.is_finite() {
            let vanishes = vanishes.max(T::of(0.0625)).min(T::of(16.0));
            let ratio = vanishes / self.0;
            self.0 = self.0 * ratio.sqrt().sqrt().sqrt();
        }
    }

    /// The natural first trial.
    pub(super) fn first(&self) -> T {
        self.0.sqrt().max(T::of(0.25)).min(T::of(4.0))
    }
}

/// Ratios of inner products of the move `s = a d` and the change of the gradient `y`, where a first trial wants them.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Products<T> {
    /// `s.s / s.y` and `s.y / y.y`.
    long: T,
    short: T,
}

impl<T: Real> Products<T> {
    pub(super) fn of<V: Vector<Scalar = T>>(step: T, d: &V, g_old: &V, g_new: &V) -> Self {
        let (new_new, new_old) = (g_new.dot(g_new), g_new.dot(g_old));
        let d_y = d.dot(g_new) - d.dot(g_old);
        let y_y = (new_new - new_old) + (g_old.dot(g_old) - new_old);
        Products {
            long: step * (d.dot(d) / d_y),
            short: step * (d_y / y_y),
        }
    }
}

impl FirstTrial {
    pub(super) fn is_valid(&self) -> bool {
        match *self {
            FirstTrial::Fixed(step) | FirstTrial::Diminishing { first: step } => {
                step > 0.0 && step.is_finite()
            }
            _ => true,
        }
    }

    pub(super) fn wants_products(&self) -> bool {
        matches!(
            self,
            FirstTrial::BarzilaiBorweinLong | FirstTrial::BarzilaiBorweinShort
        )
    }

    /// The step to probe before a search, where a probe is wanted: `psi_1` times the last one.
    pub(super) fn probe<T: Real>(&self, last: Option<LastMove<T>>) -> Option<T> {
        match self {
            FirstTrial::HagerZhangQuadratic => last.map(|l| T::of(0.1) * l.step),
            _ => None,
        }
    }

    /// The first step along a ray with this `slope`; positive and finite.
    pub(super) fn step<V: Vector>(
        &self,
        natural: Option<V::Scalar>,
        slope: V::Scalar,
        move_number: u64,
        last: Option<LastMove<V::Scalar>>,
        opening: impl FnOnce() -> V::Scalar,
    ) -> V::Scalar {
        let one = V::Scalar::of(1.0);
        let usable = |a: V::Scalar| (a > V::Scalar::of(0.0) && a.is_finite()).then_some(a);
        let by_change = |l: LastMove<V::Scalar>| usable(l.step * (l.slope / slope));
        // A move near rounding may not have decreased the value: then its step is the better guide.
        let by_decrease = |l: LastMove<V::Scalar>| {
            usable(V::Scalar::of(2.0) * l.decrease / -slope).or_else(|| by_change(l))
        };
        let chosen = match *self {
            FirstTrial::Unit => Some(one),
            FirstTrial::Fixed(step) => usable(V::Scalar::of(step)),
            FirstTrial::ByDirection => natural.or_else(|| last.and_then(by_decrease)),
            FirstTrial::LastDecrease => last.and_then(by_decrease),
            FirstTrial::BarzilaiBorweinLong => last.and_then(|l| {
                let ratio = l.products.and_then(|p| usable(p.long));
                ratio.or_else(|| by_decrease(l))
            }),
            FirstTrial::BarzilaiBorweinShort => last.and_then(|l| {
                let ratio = l.products.and_then(|p| usable(p.short));
                ratio.or_else(|| by_decrease(l))
            }),
            FirstTrial::HagerZhang | FirstTrial::HagerZhangQuadratic => {
                last.and_then(|l| usable(V::Scalar::of(2.0) * l.step))
            }
            FirstTrial::Diminishing { first } => {
                usable(V::Scalar::of(first / (move_number as f64 + 1.0)))
            }
            FirstTrial::SameChange => last.and_then(by_change),
        };
        chosen.or_else(|| usable(opening())).unwrap_or(one)
    }
}

/// The minimizer of the parabola through the value and slope at 0 and the value at `probe`, which is not above the one at
/// 0; `None` where there is none.
pub(super) fn quadratic_step<T: Real>(value: T, slope: T, probe: T, probed: T) -> Option<T> {
    let rise = probed - value;
    // Half the second derivative, times the square of `probe`.
    let bend = rise - slope * probe;
    // Not above 0, or infinite, where the parabola does not open upward.
    let minimizer = probe * (-slope * probe / (bend + bend));
    (rise <= T::zero() && minimizer > T::zero() && minimizer.is_finite()).then_some(minimizer)
}

/// The opening step (see [`FirstTrial`]).
pub(super) fn opening<V: Vector>(x: &V, value: V::Scalar, g: &V, g_max: V::Scalar) -> V::Scalar {
    let share = V::Scalar::of(0.01);
    let x_max = x.max_abs();
    if x_max > V::Scalar::of(0.0) {
        share * (x_max / g_max)
    } else if value != V::Scalar::of(0.0) {
        share * value.abs() / g.dot(g)
    } else {
        V::Scalar::of(1.0)
    }
}
