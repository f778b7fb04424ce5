//! Every driver x finder x rule on every Moré–Garbow–Hillstrom problem: no run may end in a failed search unless the point is
//! as good as the arithmetic allows.
//!
//! A failure is excused where (a) `max|g| <= 1e-8 (1 + |f|)`, (b) the value is within 4 units in the last place of a known
//! minimum, or (c) the decrease that the first trial of the last search promised, `|slope x step|`, is below the noise of the
//! value measured at the point: the largest deviation of the value at 400 neighbours a few units in the last place away.
//! Runs that spend their budget are counted apart.
#![cfg(feature = "problems")]

use surefoot::acceptance::{ApproximateWolfe, StrongWolfe, WeakWolfe};
use surefoot::direction::{ConjugateGradient, Lbfgs, SteepestDescent, Update};
use surefoot::finder::{BracketZoom, HagerZhang, MoreThuente, ThreePoint};
use surefoot::problems::{Problem, more_garbow_hillstrom};
use surefoot::{
    BoxedDirection, BoxedFinder, BoxedRule, Descent, Objective, RunEnding, Stopping, Want,
};

type Named<T> = (&'static str, T);

fn directions() -> Vec<Named<BoxedDirection<Vec<f64>>>> {
    let cg = |update| Box::new(ConjugateGradient::new(update));
    vec![
        ("steepest descent", Box::new(SteepestDescent)),
        ("Fletcher-Reeves", cg(Update::FletcherReeves)),
        ("Polak-Ribiere+", cg(Update::PolakRibierePlus)),
        ("Hestenes-Stiefel+", cg(Update::HestenesStiefelPlus)),
        ("Dai-Yuan", cg(Update::DaiYuan)),
        ("Hager-Zhang", cg(Update::HagerZhang)),
        ("L-BFGS(10)", Box::new(Lbfgs::new(10).unwrap())),
    ]
}

fn finders() -> Vec<Named<BoxedFinder<f64>>> {
    vec![
        ("three_point", Box::new(ThreePoint::new())),
        ("more_thuente", Box::new(MoreThuente::new())),
        ("bracket_zoom", Box::new(BracketZoom::new())),
        ("hager_zhang", Box::new(HagerZhang::new())),
    ]
}

fn rules() -> Vec<Named<BoxedRule<f64>>> {
    vec![
        ("weak", Box::new(WeakWolfe::new(1e-4, 0.9).unwrap())),
        ("strong", Box::new(StrongWolfe::new(1e-4, 0.1).unwrap())),
        ("approximate", Box::new(ApproximateWolfe::default())),
    ]
}

/// The largest deviation of the value at neighbours of `x`.
fn noise(problem: &Problem, x: &[f64]) -> f64 {
    let value = problem.value(x).unwrap();
    let mut state = 0x5eed_u64;
    let mut draw = || {
        state ^= state << 13;
        state ^= state >> 7;
        state ^= state << 17;
        (state % 9) as f64 - 4.0
    };
    (0..400)
        .map(|_| {
            let near: Vec<f64> = x.iter().map(|x| x + x * draw() * f64::EPSILON).collect();
            (problem.value(&near).unwrap() - value).abs()
        })
        .fold(0.0, f64::max)
}

#[derive(Default)]
struct Tally {
    converged: u32,
    spent: u32,
    excused: u32,
    failures: Vec<String>,
}

fn run(
    problem: &Problem,
    names: [&str; 3],
    descent: Descent<BoxedDirection<Vec<f64>>, BoxedFinder<f64>, BoxedRule<f64>>,
    tally: &mut Tally,
) {
    let stopping = Stopping {
        gradient: Some(1e-9),
        iterations: 3000,
        evaluations: 20_000,
        ..Stopping::default()
    };
    let mut objective = problem.clone();
    let mut run = descent
        .with_stopping(stopping)
        .unwrap()
        .start(problem.start().to_vec());
    while let Some(request) = run.request() {
        let given = match request.want {
            Want::Value => {
                surefoot::Given::Value(objective.value(request.point).unwrap_or(f64::NAN))
            }
            Want::Gradient => {
                Objective::gradient(&mut objective, request.point, request.gradient).unwrap();
                surefoot::Given::Gradient
            }
            Want::Both => {
                let value =
                    Objective::value_and_gradient(&mut objective, request.point, request.gradient);
                surefoot::Given::Both(value.unwrap())
            }
        };
        run.supply(given).unwrap();
    }
    let promised = run
        .search()
        .log()
        .iter()
        .next()
        .map_or(f64::INFINITY, |first| {
            (first.trial.step * run.search().ray().slope).abs()
        });
    let (_, report) = run.finish();
    match report.ending {
        RunEnding::Converged(_) => tally.converged += 1,
        RunEnding::IterationsSpent | RunEnding::EvaluationsSpent => tally.spent += 1,
        ending => {
            let mut g = problem.start().to_vec();
            problem.gradient(&report.point, &mut g).unwrap();
            let gradient = g.iter().fold(0.0_f64, |m, g| m.max(g.abs()));
            let flat = gradient <= 1e-8 * (1.0 + report.value.abs());
            let at_minimum = problem
                .minima()
                .iter()
                .any(|m| (report.value - m.value()).abs() <= 4.0 * f64::EPSILON * m.value().abs());
            let noise = noise(problem, &report.point);
            if flat || at_minimum || promised <= noise {
                tally.excused += 1;
            } else {
                tally.failures.push(format!(
                    "{} n={} {}: f = {:.17e}, max|g| = {gradient:.3e}, promised {promised:.3e}, noise {noise:.3e}, after {} moves: {ending}",
                    problem.name(), problem.dim(), names.join(" / "), report.value, report.iterations,
                ));
            }
        }
    }
}

#[test]
fn no_search_fails_short_of_what_the_arithmetic_allows() {
    let mut tally = Tally::default();
    for problem in more_garbow_hillstrom() {
        for d in 0..directions().len() {
            for f in 0..finders().len() {
                for r in 0..rules().len() {
                    let (direction, finder, rule) = (
                        directions().swap_remove(d),
                        finders().swap_remove(f),
                        rules().swap_remove(r),
                    );
                    let names = [direction.0, finder.0, rule.0];
                    run(
                        &problem,
                        names,
                        Descent::new(direction.1, finder.1, rule.1),
                        &mut tally,
                    );
                }
            }
        }
    }
    println!(
        "converged {}, budget spent {}, excused {}, failures {}",
        tally.converged,
        tally.spent,
        tally.excused,
        tally.failures.len()
    );
    for failure in &tally.failures {
        println!("{failure}");
    }
    assert!(tally.failures.is_empty());
}
