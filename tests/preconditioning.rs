//! A preconditioner is a change of variables: on `f` with `P = C C` every method makes the moves that its plain form makes on `f(C x)`.
#![cfg(feature = "alloc")]

use std::ops::ControlFlow;
use surefoot::acceptance::StrongWolfe;
use surefoot::direction::{
    ConjugateGradient, Diagonal, Form, InitialScale, Lbfgs, PreconditionedDescent,
    PreconditionedGradient, SteepestDescent, Update, preconditioner,
};
use surefoot::finder::MoreThuente;
use surefoot::{Descent, Direction, FirstTrial, Stopping, joint};

/// Powers of two, so that the change of variables rounds nothing.
const SIZES: [f64; 4] = [1.0, 0.25, 8.0, 64.0];

/// A quartic with a coupling.
fn f(x: &[f64], g: &mut [f64]) -> f64 {
    let mut value = 0.0;
    for i in 0..4 {
        let next = (i + 1) % 4;
        let (a, b) = (x[i] - 1.0, x[next] * x[i]);
        value += 0.5 * a * a + 0.25 * b * b;
        g[i] += a + 0.5 * b * x[next];
        g[next] += 0.5 * b * x[i];
    }
    value
}

/// The points that a run visits.
fn visits(direction: impl Direction<Vec<f64>>, start: [f64; 4], scaled: bool) -> Vec<Vec<f64>> {
    let stopping = Stopping {
        gradient: Some(1e-9),
        iterations: 12,
        ..Stopping::default()
    };
    let rule = StrongWolfe::new(1e-4, 0.1).unwrap();
    // A first trial that has no unit of the variables.
    let descent = Descent::new(direction, MoreThuente::new(), rule)
        .with_stopping(stopping)
        .unwrap()
        .with_first_trial(FirstTrial::Unit)
        .unwrap();
    let mut points = Vec::new();
    let objective = joint(|x: &Vec<f64>, g: &mut Vec<f64>| {
        g.fill(0.0);
        if scaled {
            // f(C x) of the x at hand
            let real: Vec<f64> = x.iter().zip(SIZES).map(|(x, c)| c * x).collect();
            let value = f(&real, g);
            g.iter_mut().zip(SIZES).for_each(|(g, c)| *g *= c);
            value
        } else {
            f(x, g)
        }
    });
    descent
        .minimize_watched(start.to_vec(), objective, |run| {
            points.push(run.point().clone());
            ControlFlow::Continue(())
        })
        .unwrap();
    points
}

fn same_moves(plain: impl Direction<Vec<f64>>, with: impl Direction<Vec<f64>>, tolerance: f64) {
    let start = [3.0, -2.0, 1.5, 0.5];
    let scaled_start = [0, 1, 2, 3].map(|i| start[i] / SIZES[i]);
    let want = visits(plain, scaled_start, true);
    let found = visits(with, start, false);
    assert!(want.len() > 3);
    assert_eq!(want.len(), found.len());
    for (k, (want, found)) in want.iter().zip(&found).take(6).enumerate() {
        for ((want, found), c) in want.iter().zip(found).zip(SIZES) {
            assert!(
                (c * want - found).abs() <= tolerance,
                "move {k}: {} for {found}",
                c * want
            );
        }
    }
}

fn squares() -> Diagonal<Vec<f64>> {
    Diagonal(SIZES.map(|c| c * c).to_vec())
}

#[test]
fn steepest_descent_in_a_metric_is_that_of_other_variables() {
    same_moves(
        SteepestDescent,
        PreconditionedDescent::new(squares()),
        1e-12,
    );
}

#[test]
fn conjugate_gradients_in_a_metric_are_those_of_other_variables() {
    for update in [
        Update::FletcherReeves,
        Update::PolakRibierePlus,
        Update::HestenesStiefelPlus,
        Update::DaiYuan,
        Update::HagerZhang,
    ] {
        let plain = ConjugateGradient::new(update).with_restart(None);
        same_moves(plain, PreconditionedGradient::new(update, squares()), 1e-9);
    }
}

#[test]
fn limited_memory_directions_in_a_metric_are_those_of_other_variables() {
    for scale in [InitialScale::Newest, InitialScale::Smoothed] {
        let lbfgs = || Lbfgs::new(5).unwrap().with_initial_scale(scale);
        let plain = lbfgs().with_form(Form::TwoLoop);
        same_moves(plain, lbfgs().with_preconditioner(squares()), 1e-9);
    }
}

#[test]
fn a_closure_may_be_a_preconditioner() {
    let own = preconditioner(|_: &Vec<f64>, v: &Vec<f64>, to: &mut Vec<f64>| {
        for ((to, v), c) in to.iter_mut().zip(v).zip(SIZES) {
            *to = c * c * v;
        }
    });
    same_moves(SteepestDescent, PreconditionedDescent::new(own), 1e-12);
}
