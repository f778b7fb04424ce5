//! A small experiment that is really run, and its report.

use std::collections::HashSet;
use surefoot::acceptance::{Goldstein, StrongWolfe, SufficientDecrease, WeakWolfe};
use surefoot::direction::{Lbfgs, SteepestDescent};
use surefoot::experiment::analysis::{Measure, Solved, Thresholds, sweep};
use surefoot::experiment::{Contender, Experiment, read_trials, report};
use surefoot::finder::{Bisection, InterpolatingBacktracking, MoreThuente, ThreePoint};
use surefoot::plot::convergence_chart;
use surefoot::problems::{Problem, more_garbow_hillstrom};
use surefoot::{Descent, Stopping};

fn stopping() -> Stopping {
    Stopping {
        gradient: Some(1e-6),
        iterations: 300,
        ..Stopping::default()
    }
}

/// The published problems of up to so many variables; of those with several tables of data, the first.
fn small(most: usize) -> Vec<Problem> {
    let mut seen = HashSet::new();
    let problems = more_garbow_hillstrom().into_iter();
    problems
        .filter(|p| p.dim() <= most && seen.insert((p.name().to_string(), p.dim())))
        .collect()
}

macro_rules! contender {
    ($name:expr, $finder:expr, $rule:expr) => {
        Contender::new($name, || {
            Descent::new(Lbfgs::default(), $finder, $rule)
                .with_stopping(stopping())
                .expect("sound")
        })
    };
}

pub(crate) fn report() -> String {
    let folder = std::env::temp_dir().join(format!(
        "surefoot-worked-{}-{:?}",
        std::process::id(),
        std::thread::current().id()
    ));
    let thresholds = [
        (1e-4, 0.1),
        (1e-4, 0.5),
        (1e-4, 0.9),
        (1e-2, 0.1),
        (1e-2, 0.5),
        (1e-2, 0.9),
        (0.3, 0.5),
        (0.3, 0.9),
    ];
    let mut experiment = Experiment::new()
        .with_problems(small(6))
        .with_contender(contender!(
            "strong Wolfe 0.9, Moré–Thuente",
            MoreThuente::new(),
            StrongWolfe::default()
        ))
        .with_contender(contender!(
            "weak Wolfe, three-point",
            ThreePoint::new(),
            WeakWolfe::default()
        ))
        .with_contender(contender!(
            "weak Wolfe, bisection",
            Bisection::new(),
            WeakWolfe::default()
        ))
        .with_contender(contender!(
            "Goldstein, three-point",
            ThreePoint::new(),
            Goldstein::default()
        ))
        .with_contender(contender!(
            "decrease, <backtracking> & \"co\"",
            InterpolatingBacktracking::new(),
            SufficientDecrease::default()
        ))
        .with_contender(Contender::new("steepest descent, strong Wolfe 0.1", || {
            Descent::new(
                SteepestDescent,
                ThreePoint::new(),
                StrongWolfe::new(1e-4, 0.1).expect("sound"),
            )
            .with_stopping(stopping())
            .expect("sound")
        }))
        .with_trial_log(400)
        .quiet();
    let compared = experiment.run_in(&folder).expect("the experiment runs");
    let mut trials = read_trials(&folder).expect("a trial log");
    trials.truncate(12);
    std::fs::remove_dir_all(&folder).expect("the folder is ours");

    experiment = Experiment::new().with_problems(small(4)).quiet();
    let mut pairs = Vec::new();
    for (decrease, curvature) in thresholds {
        let name = format!("{decrease:e} and {curvature}");
        pairs.push(Thresholds {
            contender: name.clone(),
            decrease,
            curvature,
        });
        experiment = experiment.with_contender(Contender::new(name, move || {
            let rule = StrongWolfe::new(decrease, curvature).expect("sound");
            Descent::new(Lbfgs::default(), ThreePoint::new(), rule)
                .with_stopping(stopping())
                .expect("sound")
        }));
    }
    let swept = experiment.run().expect("the sweep runs");
    let grid = sweep(&swept, &pairs, Measure::Calls, Solved::Converged).expect("a grid");
    let curve = |rate: f64| {
        (0..60)
            .map(|i| (f64::from(i), rate.powi(i) * 100.0))
            .collect::<Vec<_>>()
    };
    let (quick, slow) = (curve(0.6), curve(0.85));
    let options = report::Options::new("Which rule for small problems?")
        .with_trials(trials)
        .with_sweep(grid, Measure::Calls)
        .with_picture(
            "Two invented courses.",
            convergence_chart(
                "Loss of two fits",
                "calls",
                "loss above the least",
                &[("quick", &quick), ("slow", &slow)],
            )
            .picture(),
        );
    report::html(&compared, &options).expect("a report")
}
