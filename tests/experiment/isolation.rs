//! Runs in processes of their own: the same records, and an end for what would never end.

use std::process::Command;
use std::time::{Duration, Instant};

use super::{assert_same, fresh_folder, lbfgs, small};
use surefoot::experiment::{Ending, Experiment, Isolation, Task, Workers, read_trials};
use surefoot::joint;
use surefoot::problems::more_garbow_hillstrom::beale;

const NUMBER: &str = "SUREFOOT_TEST_ISOLATED_RUN";
const WHICH: &str = "SUREFOOT_TEST_ISOLATED_EXPERIMENT";

/// Objectives that no thread can be rescued from.
fn dreadful() -> Experiment {
    let hangs = joint(|_: &Vec<f64>, _: &mut Vec<f64>| -> f64 {
        loop {
            std::thread::sleep(Duration::from_secs(1));
        }
    });
    let aborts = joint(|_: &Vec<f64>, _: &mut Vec<f64>| -> f64 { std::process::abort() });
    Experiment::new()
        .with_problem(Task::new("hangs", vec![1.0], hangs))
        .with_problem(Task::new("aborts", vec![1.0], aborts))
        .with_problem(beale())
        .with_contender(lbfgs("L-BFGS"))
        .quiet()
}

fn of(name: &str) -> Experiment {
    match name {
        "dreadful" => dreadful(),
        _ => small().with_trial_log(5),
    }
}

/// Not a test of its own: the process of a run.
#[test]
fn process_of_a_run() {
    if let (Ok(number), Ok(which)) = (std::env::var(NUMBER), std::env::var(WHICH)) {
        let answer = of(&which).answer(number.parse().unwrap()).unwrap();
        println!("\n{answer}");
        std::process::exit(0); // the harness would go on to print
    }
}

fn isolation(which: &'static str, limit: Duration) -> Isolation {
    Isolation::new(limit, move |number| {
        let mut command = Command::new(std::env::current_exe().unwrap());
        command
            .args(["--exact", "isolation::process_of_a_run", "--nocapture"])
            .env(NUMBER, number.to_string())
            .env(WHICH, which)
            .stderr(std::process::Stdio::null());
        command
    })
}

#[test]
fn runs_in_processes_of_their_own_give_the_same_records() {
    let folder = fresh_folder("isolated");
    let alone = isolation("small", Duration::from_secs(60));
    let isolated = of("small")
        .with_isolation(alone)
        .with_workers(Workers::AllCores)
        .run_in(&folder)
        .unwrap();
    let reference = fresh_folder("not_isolated");
    assert_same(
        &isolated,
        &of("small").run_in(&reference).unwrap(),
        "isolated",
    );
    assert_eq!(
        read_trials(&folder).unwrap(),
        read_trials(&reference).unwrap()
    );
}

#[test]
fn a_run_that_hangs_is_killed_and_one_that_aborts_is_recorded() {
    let begin = Instant::now();
    let limit = Duration::from_secs(3);
    let records = dreadful()
        .with_isolation(isolation("dreadful", limit))
        .run()
        .unwrap();
    let endings: Vec<Ending> = records.iter().map(|record| record.ending).collect();
    assert_eq!(
        endings,
        [Ending::TimeSpent, Ending::Panicked, Ending::Converged]
    );
    assert!(records[0].note.contains("killed after 3 s"));
    assert!(records[0].seconds >= 3.0);
    assert!(records[1].note.contains("ended without an answer"));
    assert!(begin.elapsed() < Duration::from_secs(60));
}

#[test]
fn a_command_that_cannot_answer_is_recorded() {
    let no_program = Isolation::new(Duration::from_secs(5), |_| {
        Command::new("/no/such/program/anywhere")
    });
    for record in small().with_isolation(no_program).run().unwrap() {
        assert_eq!(record.ending, Ending::Failed);
        assert!(record.note.contains("check the command"));
    }
    // A process that answers for run 0 whatever it is asked.
    let always_the_first = Isolation::new(Duration::from_secs(60), |_| {
        let mut command = Command::new(std::env::current_exe().unwrap());
        command
            .args(["--exact", "isolation::process_of_a_run", "--nocapture"])
            .env(NUMBER, "0")
            .env(WHICH, "small");
        command
    });
    let records = small().with_isolation(always_the_first).run().unwrap();
    assert!(records[0].ending.is_success());
    for record in &records[1..] {
        assert!(
            record.note.contains("answered for another run"),
            "{record:?}"
        );
    }
}
