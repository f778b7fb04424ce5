//! The experiment bench: nothing is lost, nothing is overwritten, every failure is a record, and records are the same whatever
//! happened on the way.
#![allow(missing_docs)]

mod budgets;
mod failures;
mod interruption;
mod isolation;
mod minima;
mod refusals;
mod same_records;
mod trials;

use std::path::{Path, PathBuf};

use surefoot::Descent;
use surefoot::acceptance::{StrongWolfe, WeakWolfe};
use surefoot::direction::{Lbfgs, SteepestDescent};
use surefoot::experiment::{Budget, Contender, Experiment, Record, Task};
use surefoot::finder::{Backtracking, Bisection, ThreePoint};
use surefoot::problems::more_garbow_hillstrom::{beale, rosenbrock, wood};

/// A folder that no other test uses, empty.
fn fresh_folder(name: &str) -> PathBuf {
    let folder = Path::new(env!("CARGO_TARGET_TMPDIR"))
        .join("experiment")
        .join(name);
    let _ = std::fs::remove_dir_all(&folder);
    assert!(!folder.exists());
    folder
}

fn lbfgs(name: &str) -> Contender {
    let memory = Lbfgs::new(5).unwrap();
    Contender::new(name, move || {
        Descent::new(memory.clone(), ThreePoint::new(), WeakWolfe::default())
    })
}

/// Three drivers on three problems, one of them from two starts, the third one out of its budget.
fn small() -> Experiment {
    let memory = Lbfgs::new(5).unwrap();
    Experiment::new()
        .with_problem(rosenbrock())
        .with_problem(Task::from(beale()).with_start(vec![0.5, -0.5]))
        .with_problem(wood())
        .with_contender(lbfgs("weak, three-point"))
        .with_contender(Contender::new("strong, \"bisection\"", move || {
            Descent::new(memory.clone(), Bisection::new(), StrongWolfe::default())
        }))
        .with_contender(Contender::new("steepest descent", || {
            Descent::new(
                SteepestDescent,
                Backtracking::default(),
                surefoot::acceptance::SufficientDecrease::default(),
            )
        }))
        .with_budget(Budget {
            evaluations: Some(300),
            ..Budget::default()
        })
        .quiet()
}

/// The same runs in the same order with the same results; seconds are free.
fn assert_same(found: &[Record], wanted: &[Record], what: &str) {
    assert_eq!(found.len(), wanted.len(), "{what}");
    for (found, wanted) in found.iter().zip(wanted) {
        assert!(
            found.agrees_with(wanted),
            "{what}: {found:?} for {wanted:?}"
        );
    }
}

#[test]
fn experiments_can_be_sent_and_shared() {
    fn is_free<T: Send + Sync + Clone + std::fmt::Debug>() {}
    is_free::<Experiment>();
    is_free::<Contender>();
    is_free::<Task>();
    is_free::<surefoot::experiment::Isolation>();
    is_free::<Record>();
    fn is_error<T: std::error::Error + Send + Sync + 'static>() {}
    is_error::<surefoot::experiment::ExperimentError>();
}
