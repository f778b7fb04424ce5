//! The trial log agrees with the counts, and with the rule that judged.

use super::{fresh_folder, lbfgs, small};
use surefoot::experiment::{Ending, Experiment, TrialVerdict, read_trials};
use surefoot::problems::more_garbow_hillstrom;

#[test]
fn every_trial_is_logged_with_its_verdict() {
    let experiment = Experiment::new()
        .with_problems(more_garbow_hillstrom())
        .with_contender(lbfgs("weak Wolfe"))
        .with_trial_log(1_000_000)
        .quiet();
    let folder = fresh_folder("trials");
    let records = experiment.run_in(&folder).unwrap();
    let logs = read_trials(&folder).unwrap();
    assert_eq!(logs.len(), records.len());
    let mut accepted = 0;
    for (log, record) in logs.iter().zip(&records) {
        let what = format!("{} {}", record.problem, record.n);
        assert_eq!((&log.problem, log.n), (&record.problem, record.n));
        assert_eq!(log.left_out, 0);
        let trials = || log.searches.iter().flat_map(|search| &search.trials);
        let count = |verdict| trials().filter(|trial| trial.verdict == verdict).count() as u64;
        assert_eq!(count(TrialVerdict::TooLong), record.too_long, "{what}");
        assert_eq!(count(TrialVerdict::TooShort), record.too_short, "{what}");
        assert_eq!(count(TrialVerdict::Outside), record.outside, "{what}");
        // Remedies may move to a trial that was not accepted.
        assert!(count(TrialVerdict::Accepted) <= record.iterations, "{what}");
        if record.ending == Ending::Converged {
            assert!(
                count(TrialVerdict::Accepted) + 5 >= record.iterations,
                "{what}"
            );
        }
        assert_eq!(log.searches[0].value, record.start_value, "{what}");
        for search in &log.searches {
            assert!(search.slope < 0.0 && !search.trials.is_empty(), "{what}");
            for trial in &search.trials {
                // Weak Wolfe with decrease 1e-4 and curvature 0.9 (Nocedal & Wright 2006, equations 3.6), while no slack
                // is in force near rounding: there the value moves by less than 1e-9 of itself.
                let decreased = trial.value <= search.value + 1e-4 * trial.step * search.slope;
                let risen = trial.slope.is_some_and(|slope| slope >= 0.9 * search.slope);
                let drowned = (trial.value - search.value).abs() <= 1e-9 * search.value.abs();
                match trial.verdict {
                    _ if drowned => {}
                    TrialVerdict::Accepted => assert!(decreased && risen, "{what}: {trial:?}"),
                    TrialVerdict::TooLong => assert!(!decreased, "{what}: {trial:?}"),
                    TrialVerdict::TooShort => assert!(decreased && !risen, "{what}: {trial:?}"),
                    _ => assert!(
                        !trial.value.is_finite() || trial.slope.is_none_or(|s| !s.is_finite())
                    ),
                }
            }
            accepted += 1;
        }
    }
    assert!(accepted > 500);
}

#[test]
fn a_log_keeps_the_first_trials_and_counts_the_others() {
    let logs = |most: usize| {
        let folder = fresh_folder(&format!("first_{most}"));
        small().with_trial_log(most).run_in(&folder).unwrap();
        read_trials(&folder).unwrap()
    };
    let whole = logs(10_000);
    for most in [0, 1, 7] {
        for (some, all) in logs(most).iter().zip(&whole) {
            let flat = |searches: &[surefoot::experiment::SearchTrials]| -> Vec<_> {
                searches.iter().flat_map(|s| s.trials.clone()).collect()
            };
            let (some_trials, all_trials) = (flat(&some.searches), flat(&all.searches));
            let kept = most.min(all_trials.len());
            assert_eq!(some_trials, all_trials[..kept]);
            assert_eq!(some.left_out as usize, all_trials.len() - kept);
        }
    }
}
