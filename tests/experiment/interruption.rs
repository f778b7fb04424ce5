//! A process killed at any moment, a file cut at any byte: the rest runs, and the records are those of a run in one piece.

use std::fs;
use std::path::Path;
use std::process::{Command, Stdio};
use std::time::{Duration, SystemTime, UNIX_EPOCH};

use super::{assert_same, fresh_folder};
use surefoot::experiment::{
    Contender, Experiment, Format, Task, Workers, read_records, read_trials,
};
use surefoot::problems::more_garbow_hillstrom;
use surefoot::problems::more_garbow_hillstrom::rosenbrock;
use surefoot::problems::wrapped::{Delay, Delayed};

const FOLDER: &str = "SUREFOOT_TEST_KILLED_FOLDER";
const FORMAT: &str = "SUREFOOT_TEST_KILLED_FORMAT";

/// Some 200 runs that take a second or two, as every evaluation sleeps.
fn slow(format: Format) -> Experiment {
    let delay = Delay::Sleep(Duration::from_micros(20));
    let problems = more_garbow_hillstrom().into_iter().take(14).map(|problem| {
        let name = Task::from(problem.clone()).name().to_string();
        let start = problem.start().to_vec();
        Task::new(name, start, Delayed::new(problem, delay))
    });
    Experiment::new()
        .with_problems(problems)
        .with_contenders((0..5).map(|i| super::lbfgs(&format!("contender {i}"))))
        .with_repetitions(3)
        .with_trial_log(30)
        .with_format(format)
        .with_workers(Workers::Exactly(2.try_into().unwrap()))
        .quiet()
}

fn format_of(name: &str) -> Format {
    match name {
        "csv" => Format::Csv,
        _ => Format::JsonLines,
    }
}

/// Not a test of its own: the process that the next one kills.
#[test]
fn killed_process() {
    if let (Some(folder), Ok(format)) = (std::env::var_os(FOLDER), std::env::var(FORMAT)) {
        slow(format_of(&format)).run_in(folder).unwrap();
    }
}

fn complete_lines(path: &Path) -> usize {
    let bytes = fs::read(path).unwrap_or_default();
    bytes.iter().filter(|&&b| b == b'\n').count()
}

#[test]
fn a_killed_experiment_goes_on_where_it_stopped() {
    let mut state = SystemTime::now()
        .duration_since(UNIX_EPOCH)
        .unwrap()
        .subsec_nanos();
    for (round, format) in ["csv", "jsonl", "csv", "jsonl"].into_iter().enumerate() {
        let experiment = slow(format_of(format));
        let whole = experiment.run().unwrap();
        let folder = fresh_folder(&format!("killed_{round}"));
        let file = folder.join(format_of(format).file_name());
        // Killed three times running, each time after a moment that no two rounds share.
        let mut before = 0;
        let mut kills = 0;
        for _ in 0..3 {
            state = state.wrapping_mul(1_664_525).wrapping_add(1_013_904_223);
            let moment = Duration::from_micros(u64::from(state % 500_000));
            let mut child = Command::new(std::env::current_exe().unwrap())
                .args(["--exact", "interruption::killed_process"])
                .env(FOLDER, &folder)
                .env(FORMAT, format)
                .stdout(Stdio::null())
                .stderr(Stdio::null())
                .spawn()
                .unwrap();
            std::thread::sleep(moment);
            child.kill().unwrap();
            kills += usize::from(!child.wait().unwrap().success());
            let lines = complete_lines(&file);
            assert!(lines >= before, "round {round}: records were lost");
            before = lines;
        }
        assert!(kills > 0, "round {round}: the process was never killed");
        let kept = fs::read(&file).unwrap_or_default();
        let found = experiment.run_in(&folder).unwrap();
        assert_same(&found, &whole, &format!("round {round}"));
        assert_same(&read_records(&folder).unwrap(), &whole, "read again");
        // What stood in complete lines stands there still.
        let now = fs::read(&file).unwrap();
        let end = kept.iter().rposition(|&b| b == b'\n').map_or(0, |i| i + 1);
        assert_eq!(now[..end], kept[..end], "round {round}");
        assert_eq!(read_trials(&folder).unwrap().len(), whole.len());
    }
}

/// Few runs, so that every byte can be tried.
fn few() -> Experiment {
    Experiment::new()
        .with_problem(rosenbrock())
        .with_problem(Task::new(
            "nowhere, \"defined\"",
            vec![f64::NAN],
            rosenbrock(),
        ))
        .with_contender(super::lbfgs("first"))
        .with_contender(super::lbfgs("second"))
        .quiet()
}

#[test]
fn a_file_of_records_cut_at_any_byte_is_mended() {
    for format in [Format::Csv, Format::JsonLines] {
        let experiment = few().with_format(format);
        let folder = fresh_folder(&format!("cut_{format:?}"));
        let whole = experiment.run_in(&folder).unwrap();
        assert_eq!(whole.len(), 4);
        let file = folder.join(format.file_name());
        let bytes = fs::read(&file).unwrap();
        for cut in 0..bytes.len() {
            fs::write(&file, &bytes[..cut]).unwrap();
            let what = format!("{format:?} cut at byte {cut}");
            let found = experiment
                .run_in(&folder)
                .unwrap_or_else(|error| panic!("{what}: {error}"));
            assert_same(&found, &whole, &what);
            assert_same(&read_records(&folder).unwrap(), &whole, &what);
        }
    }
}

#[test]
fn a_file_of_trials_cut_at_any_byte_costs_no_more_than_what_was_cut() {
    let experiment = few().with_trial_log(2);
    let folder = fresh_folder("cut_trials");
    let whole = experiment.run_in(&folder).unwrap();
    let (records, trials) = (folder.join("records.csv"), folder.join("trials.jsonl"));
    let bytes = fs::read(&trials).unwrap();
    let lines = fs::read(&records).unwrap();
    let last = lines[..lines.len() - 1]
        .iter()
        .rposition(|&b| b == b'\n')
        .unwrap();
    for cut in 0..=bytes.len() {
        // As an interruption leaves it: the last trials are there, whole or in part, and their record is not.
        let before_last = bytes[..bytes.len() - 1]
            .iter()
            .rposition(|&b| b == b'\n')
            .unwrap();
        fs::write(&trials, &bytes[..cut]).unwrap();
        if cut > before_last {
            fs::write(&records, &lines[..=last]).unwrap();
        } else {
            fs::write(&records, &lines).unwrap();
        }
        let found = experiment.run_in(&folder).unwrap();
        assert_same(&found, &whole, &format!("cut at byte {cut}"));
        let logs = read_trials(&folder).unwrap();
        if cut > before_last {
            assert_eq!(logs.len(), whole.len(), "cut at byte {cut}");
            assert_eq!(fs::read(&trials).unwrap(), bytes, "cut at byte {cut}");
        } else {
            let kept = bytes[..cut].iter().filter(|&&b| b == b'\n').count();
            assert_eq!(logs.len(), kept, "cut at byte {cut}");
        }
    }
}

#[test]
fn what_is_on_disk_does_not_run_again() {
    use std::sync::Arc;
    use std::sync::atomic::{AtomicUsize, Ordering};
    let built = Arc::new(AtomicUsize::new(0));
    let count = built.clone();
    let memory = surefoot::direction::Lbfgs::new(5).unwrap();
    let counted = Contender::new("counted", move || {
        count.fetch_add(1, Ordering::Relaxed);
        surefoot::Descent::new(
            memory.clone(),
            surefoot::finder::ThreePoint::new(),
            surefoot::acceptance::WeakWolfe::default(),
        )
    });
    let experiment = Experiment::new()
        .with_problems(more_garbow_hillstrom().into_iter().take(5))
        .with_contender(counted)
        .quiet();
    let folder = fresh_folder("not_again");
    let first = experiment.run_in(&folder).unwrap();
    assert_eq!(built.load(Ordering::Relaxed), 5);
    let file = folder.join("records.csv");
    let bytes = fs::read(&file).unwrap();
    // These are the very same, seconds and all.
    assert_eq!(experiment.run_in(&folder).unwrap(), first);
    assert_eq!(built.load(Ordering::Relaxed), 5);
    assert_eq!(fs::read(&file).unwrap(), bytes);
    // One record less, one run more.
    let end = bytes[..bytes.len() - 1]
        .iter()
        .rposition(|&b| b == b'\n')
        .unwrap();
    fs::write(&file, &bytes[..=end]).unwrap();
    experiment.run_in(&folder).unwrap();
    assert_eq!(built.load(Ordering::Relaxed), 6);
}
