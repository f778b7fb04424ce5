//! The machine around finder and rule: its protocol, the edge of the domain, bounds and budget, the log, the loop that
//! calls closures, and that no scale is special.
#![cfg(feature = "alloc")]

mod bounds;
mod edge;
mod log;
mod looped;
mod protocol;
mod scales;
#[path = "../support/mod.rs"]
mod support;

use support::cast::Rule;

/// A parabola with minimizer 1, for tests whose subject is not the function.
fn valley(a: f64) -> (f64, f64) {
    (0.5 * a * a - a, a - 1.0)
}

/// One of each kind.
const RULES: [Rule; 4] = [
    Rule::SufficientDecrease { decrease: 1e-4 },
    Rule::WeakWolfe {
        decrease: 1e-4,
        curvature: 0.9,
    },
    Rule::StrongWolfe {
        decrease: 1e-4,
        curvature: 0.1,
    },
    Rule::Goldstein { share: 0.25 },
];
