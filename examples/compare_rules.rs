//! Every acceptance rule x the main step finders, on every problem of the set: who spends least, and who fails where.
//!
//! ```sh
//! cargo run --release --features "experiment plot" --example compare_rules            # into a new folder, named at the end
//! cargo run --release --features "experiment plot" --example compare_rules -- FOLDER  # or goes on with the one in FOLDER
//! ```
//!
//! L-BFGS with 5 pairs throughout; the problems of Moré, Garbow and Hillstrom (1981), and the large ones with up to 100 variables.
//! `AnyFinite` is left out: it accepts every first trial, so that a finder would have nothing to do.

#[path = "shared/finders.rs"]
mod shared;

use std::collections::BTreeMap;
use std::error::Error;
use std::path::{Path, PathBuf};
use std::process::ExitCode;
use std::time::{Instant, SystemTime, UNIX_EPOCH};

use surefoot::acceptance::{
    AnyDecrease, ApproximateWolfe, ForcingDecrease, GeneralisedWolfe, Goldstein, StrongWolfe,
    SufficientDecrease, WeakWolfe,
};
use surefoot::direction::Lbfgs;
use surefoot::experiment::{Budget, Contender, Experiment, Record, Workers};
use surefoot::problems::{Problem, WrongSize, large_problems, more_garbow_hillstrom};
use surefoot::{BoxedFinder, BoxedRule, Descent, Stopping};

/// By the names of `examples/shared`. The others minimise along the ray, or look at values alone.
const MAIN_FINDERS: [&str; 7] = [
    "three_point",
    "more_thuente",
    "bracket_zoom",
    "hager_zhang",
    "bisection",
    "interpolating_backtracking",
    "expansion",
];

/// Of each run, in calls of the objective.
const EVALUATIONS: u64 = 10_000;
/// Kept of each run, for a look at them in the report.
const TRIALS: usize = 40;

fn main() -> ExitCode {
    match compare() {
        Ok(()) => ExitCode::SUCCESS,
        Err(error) => {
            eprintln!("{error}");
            ExitCode::FAILURE
        }
    }
}

fn compare() -> Result<(), Box<dyn Error>> {
    let folder = match std::env::args_os().nth(1) {
        Some(folder) => PathBuf::from(folder),
        None => new_folder()?,
    };
    let experiment = Experiment::new()
        .with_problems(problems()?)
        .with_contenders(contenders()?)
        .with_budget(Budget {
            evaluations: Some(EVALUATIONS),
            ..Budget::default()
        })
        .with_trial_log(TRIALS)
        .with_workers(Workers::AllCores);
    println!("{} runs", experiment.runs());
    let begin = Instant::now();
    let records = experiment.run_in(&folder)?;
    println!("done in {:.1} s\n", begin.elapsed().as_secs_f64());
    print_contenders(&records);
    print_failures(&records);
    println!("\nrecords: {}", folder.join("records.csv").display());
    write_report(&folder, &records)
}

#[cfg(feature = "plot")]
fn write_report(folder: &Path, records: &[Record]) -> Result<(), Box<dyn Error>> {
    use surefoot::experiment::{read_trials, report};
    let options = report::Options::new("Which rule, which finder?")
        .with_trials(read_trials(folder)?)
        .with_overwrite(true); // made anew from the records each time
    let path = folder.join("report.html");
    let written = report::write(&path, records, &options)?;
    println!(
        "report:  {} ({:.1} MB)",
        path.display(),
        written.bytes as f64 / 1e6
    );
    Ok(())
}

#[cfg(not(feature = "plot"))]
fn write_report(_: &Path, _: &[Record]) -> Result<(), Box<dyn Error>> {
    println!("report:  none without the feature \"plot\"");
    Ok(())
}

/// A name that no earlier run has.
fn new_folder() -> Result<PathBuf, Box<dyn Error>> {
    let seconds = SystemTime::now().duration_since(UNIX_EPOCH)?.as_secs();
    let name = format!("compare_rules_{seconds}");
    Ok(Path::new(&std::env::temp_dir()).join(name))
}

/// Some problems of variable size stand in both lists; a problem of one size runs once.
fn problems() -> Result<Vec<Problem>, WrongSize> {
    let mut problems = more_garbow_hillstrom();
    for large in large_problems(100)? {
        let same = |p: &Problem| p.name() == large.name() && p.dim() == large.dim();
        if !problems.iter().any(same) {
            problems.push(large);
        }
    }
    Ok(problems)
}

fn rule(name: &str) -> Result<BoxedRule<f64>, Box<dyn Error>> {
    Ok(match name {
        "sufficient decrease" => Box::new(SufficientDecrease::default()),
        "Goldstein" => Box::new(Goldstein::default()),
        "weak Wolfe" => Box::new(WeakWolfe::default()),
        "strong Wolfe" => Box::new(StrongWolfe::default()),
        "generalised Wolfe" => Box::new(GeneralisedWolfe::new(1e-4, 0.9, 0.1)?),
        "approximate Wolfe" => Box::new(ApproximateWolfe::default()),
        "forcing decrease" => Box::new(ForcingDecrease::new(1e-4)?),
        "any decrease" => Box::new(AnyDecrease),
        other => return Err(format!("no rule {other}").into()),
    })
}

const RULES: [&str; 8] = [
    "sufficient decrease",
    "Goldstein",
    "weak Wolfe",
    "strong Wolfe",
    "generalised Wolfe",
    "approximate Wolfe",
    "forcing decrease",
    "any decrease",
];

fn finder(name: &str) -> Option<BoxedFinder<f64>> {
    let all = shared::finders();
    all.into_iter()
        .find(|finder| finder.0 == name)
        .map(|finder| finder.1)
}

fn contenders() -> Result<Vec<Contender>, Box<dyn Error>> {
    let memory = Lbfgs::<Vec<f64>>::new(5)?;
    let stopping = Stopping {
        gradient: Some(1e-6),
        ..Stopping::default()
    };
    let mut contenders = Vec::new();
    for rule_name in RULES {
        rule(rule_name)?;
        for finder_name in MAIN_FINDERS {
            let memory = memory.clone();
            let name = format!("{rule_name}, {}", finder_name.replace('_', " "));
            contenders.push(Contender::new(name, move || {
                let finder = finder(finder_name).expect("a finder of the list");
                let rule = rule(rule_name).expect("tried above");
                Descent::new(memory.clone(), finder, rule)
                    .with_stopping(stopping)
                    .expect("the tolerance is positive")
            }));
        }
    }
    Ok(contenders)
}

/// Runs, failures and calls of each contender, the cheapest first.
fn print_contenders(records: &[Record]) {
    #[derive(Default)]
    struct Sum {
        failures: usize,
        evaluations: u64,
        seconds: f64,
    }
    let mut sums: BTreeMap<&str, Sum> = BTreeMap::new();
    for record in records {
        let sum = sums.entry(&record.contender).or_default();
        sum.failures += usize::from(!record.ending.is_success());
        sum.evaluations += record.evaluations();
        sum.seconds += record.seconds;
    }
    let mut sums: Vec<_> = sums.into_iter().collect();
    sums.sort_by_key(|(_, sum)| sum.evaluations);
    println!("{:46} failures  evaluations  seconds", "contender");
    for (name, sum) in sums {
        println!(
            "{name:46} {:8}  {:11}  {:7.2}",
            sum.failures, sum.evaluations, sum.seconds
        );
    }
}

/// How often runs on a problem failed, and how.
fn print_failures(records: &[Record]) {
    let mut failures: BTreeMap<(&str, usize), BTreeMap<String, usize>> = BTreeMap::new();
    for record in records.iter().filter(|r| !r.ending.is_success()) {
        let endings = failures.entry((&record.problem, record.n)).or_default();
        *endings.entry(record.ending.to_string()).or_default() += 1;
    }
    println!("\nproblems with failures");
    for ((problem, n), endings) in failures {
        let endings: Vec<String> = endings
            .iter()
            .map(|(ending, count)| format!("{count} {ending}"))
            .collect();
        println!("{problem:34} {n:4}  {}", endings.join(", "));
    }
}
