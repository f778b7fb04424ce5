//! The six functions of Moré and Thuente: J. J. Moré & D. J. Thuente, "Line search algorithms with guaranteed
//! sufficient decrease", ACM Trans. Math. Software 20 (1994) 286-307, doi:10.1145/192115.192132, section 5.

use std::f64::consts::PI;

/// One of the six, with the parameters that its table is for.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Published {
    /// 1 to 6, as in the paper.
    pub(crate) number: usize,
    /// The paper's `mu`.
    pub(crate) decrease: f64,
    /// The paper's `eta`.
    pub(crate) curvature: f64,
    /// `phi` and `phi'` at a step.
    pub(crate) at: fn(f64) -> (f64, f64),
}

/// The four first steps of each table.
pub(crate) const FIRST_STEPS: [f64; 4] = [1e-3, 1e-1, 1e1, 1e3];

/// All six, in the paper's order.
pub(crate) const PUBLISHED: [Published; 6] = [
    Published {
        number: 1,
        decrease: 1e-3,
        curvature: 0.1,
        at: rational,
    },
    Published {
        number: 2,
        decrease: 0.1,
        curvature: 0.1,
        at: quintic,
    },
    Published {
        number: 3,
        decrease: 0.1,
        curvature: 0.1,
        at: wavy,
    },
    Published {
        number: 4,
        decrease: 1e-3,
        curvature: 1e-3,
        at: |a| two_roots(a, 1e-3, 1e-3),
    },
    Published {
        number: 5,
        decrease: 1e-3,
        curvature: 1e-3,
        at: |a| two_roots(a, 1e-2, 1e-3),
    },
    Published {
        number: 6,
        decrease: 1e-3,
        curvature: 1e-3,
        at: |a| two_roots(a, 1e-3, 1e-2),
    },
];

/// Eq. 5.1 with beta = 2.
fn rational(a: f64) -> (f64, f64) {
    let below = a * a + 2.0;
    (-a / below, (a * a - 2.0) / (below * below))
}

/// Eq. 5.2 with beta = 0.004.
fn quintic(a: f64) -> (f64, f64) {
    let t = a + 0.004;
    let cube = t * t * t;
    (cube * t * (t - 2.0), cube * (5.0 * t - 8.0))
}

/// Eq. 5.3 with beta = 0.01 and l = 39: |1 - a| rounded off near its kink, and a wave on top.
fn wavy(a: f64) -> (f64, f64) {
    let (beta, l) = (0.01, 39.0);
    let (value, slope) = if a <= 1.0 - beta {
        (1.0 - a, -1.0)
    } else if a >= 1.0 + beta {
        (a - 1.0, 1.0)
    } else {
        (
            (a - 1.0) * (a - 1.0) / (2.0 * beta) + beta / 2.0,
            (a - 1.0) / beta,
        )
    };
    let turns = l * PI / 2.0;
    let height = 2.0 * (1.0 - beta) / (l * PI);
    (
        value + height * (turns * a).sin(),
        slope + (1.0 - beta) * (turns * a).cos(),
    )
}

/// Eq. 5.4.
fn two_roots(a: f64, beta1: f64, beta2: f64) -> (f64, f64) {
    let gamma = |b: f64| (1.0 + b * b).sqrt() - b;
    let (g1, g2) = (gamma(beta1), gamma(beta2));
    let far = ((1.0 - a) * (1.0 - a) + beta2 * beta2).sqrt();
    let near = (a * a + beta1 * beta1).sqrt();
    (
        g1 * far + g2 * near,
        g2 * (a / near) - g1 * ((1.0 - a) / far),
    )
}
