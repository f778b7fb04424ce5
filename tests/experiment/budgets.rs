//! Limits on evaluations and time are kept, to the call.

use std::time::Duration;

use super::{lbfgs, small};
use surefoot::Descent;
use surefoot::acceptance::SufficientDecrease;
use surefoot::direction::SteepestDescent;
use surefoot::experiment::{Budget, Contender, Ending, Experiment, Task};
use surefoot::finder::Backtracking;
use surefoot::problems::more_garbow_hillstrom::rosenbrock;
use surefoot::problems::wrapped::{Delay, Delayed};

fn budget(evaluations: u64) -> Budget {
    Budget {
        evaluations: Some(evaluations),
        ..Budget::default()
    }
}

/// Steepest descent needs thousands of steps in Rosenbrock's valley.
fn steepest() -> Contender {
    Contender::new("steepest descent", || {
        Descent::new(
            SteepestDescent,
            Backtracking::default(),
            SufficientDecrease::default(),
        )
    })
}

#[test]
fn a_run_stops_before_it_exceeds_its_evaluations() {
    for most in 0..60 {
        let experiment = Experiment::new()
            .with_problem(rosenbrock())
            .with_contender(steepest())
            .with_budget(budget(most))
            .quiet();
        let [record] = &experiment.run().unwrap()[..] else {
            panic!("one run")
        };
        assert_eq!(record.ending, Ending::EvaluationsSpent);
        assert_eq!(record.evaluations(), most);
        assert!(
            record
                .note
                .contains(&format!("limit of {most} evaluations"))
        );
        if most > 0 {
            // The published value at the start: Moré, Garbow & Hillstrom 1981, problem 1 (f = 100 (1 - 1.44)^2 + 2.2^2).
            assert!((record.start_value - 24.2).abs() < 1e-12);
            assert!(record.value <= record.start_value);
        } else {
            assert!(record.value.is_nan() && record.correct_digits.is_none());
        }
    }
}

#[test]
fn a_larger_budget_changes_nothing_in_a_run_that_ends_by_itself() {
    let runs = |most| small().with_budget(budget(most)).run().unwrap();
    let (few, many) = (runs(300), runs(100_000));
    let mut unchanged = 0;
    for (few, many) in few.iter().zip(&many) {
        if few.ending == Ending::EvaluationsSpent {
            assert_eq!(few.evaluations(), 300);
            assert!(many.evaluations() > 300);
        } else {
            assert!(few.agrees_with(many));
            unchanged += 1;
        }
    }
    assert!(unchanged >= 8);
}

#[test]
fn a_run_stops_at_the_first_evaluation_after_its_time() {
    let nap = Duration::from_millis(4);
    let slow = Delayed::new(rosenbrock(), Delay::Sleep(nap));
    let limit = Duration::from_millis(40);
    let records = Experiment::new()
        .with_problem(Task::new("slow", rosenbrock().start(), slow))
        .with_contender(steepest())
        .with_contender(lbfgs("L-BFGS"))
        .with_budget(Budget {
            time: Some(limit),
            ..Budget::default()
        })
        .quiet()
        .run()
        .unwrap();
    for record in records {
        assert_eq!(record.ending, Ending::TimeSpent, "{record:?}");
        assert!(record.note.contains("0.04 s"));
        assert!(record.seconds > 0.04);
        // A sleep takes no less than asked for, so no more than eleven can begin within the limit.
        assert!((1..=11).contains(&record.evaluations()), "{record:?}");
        assert!(record.value <= 24.2 + 1e-12);
    }
}
