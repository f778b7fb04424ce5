//! Bad input is a typed error that says what to do, and nothing on disk is touched.

use std::fs::{self, File};
use std::path::Path;
use std::time::Duration;

use super::{fresh_folder, lbfgs, small};
use surefoot::experiment::{
    Budget, Experiment, ExperimentError, Format, Task, read_records, read_trials,
};
use surefoot::problems::more_garbow_hillstrom::{beale, rosenbrock, wood};

fn refused(experiment: &Experiment, folder: &Path) -> ExperimentError {
    experiment.run_in(folder).expect_err("a refusal")
}

#[test]
fn experiments_that_cannot_be_run_are_refused_before_anything_is_written() {
    let one = || Experiment::new().with_problem(rosenbrock()).quiet();
    let cases: [(Experiment, &str); 10] = [
        (
            Experiment::new().with_contender(lbfgs("a")),
            "the experiment has no problem: add one with with_problem",
        ),
        (
            one(),
            "the experiment has no contender: add one with with_contender",
        ),
        (
            one().with_contender(lbfgs("a")).with_repetitions(0),
            "the experiment has no repetition: ask for at least 1",
        ),
        (
            one().with_contender(lbfgs("a")).with_contender(lbfgs("a")),
            "two contenders are called \"a\": give one another name",
        ),
        (
            one().with_contender(lbfgs("a")).with_problem(rosenbrock()),
            "two problems are called \"Rosenbrock\" with 2 variables: give one another name, or give it both starts with \
             with_start",
        ),
        (
            one().with_contender(lbfgs("")),
            "\"\" will not do as a name: it must not be empty nor hold control characters",
        ),
        (
            one().with_contender(lbfgs("a\nb")),
            "\"a\\nb\" will not do as a name: it must not be empty nor hold control characters",
        ),
        (
            Experiment::new()
                .with_problem(Task::from(wood()).named("\t"))
                .with_contender(lbfgs("a")),
            "\"\\t\" will not do as a name: it must not be empty nor hold control characters",
        ),
        (
            Experiment::new()
                .with_problem(Task::from(wood()).with_start(vec![1.0; 5]))
                .with_contender(lbfgs("a")),
            "start 1 of the problem \"Wood (m = 6)\" has 5 components where start 0 has 4: the starts of a problem must have one \
             length; make a problem of its own for each size",
        ),
        (
            one().with_contender(lbfgs("a")).with_budget(Budget {
                time: Some(Duration::ZERO),
                ..Budget::default()
            }),
            "the limit of time must be positive: leave it out for none",
        ),
    ];
    let folder = fresh_folder("never_made");
    for (experiment, sentence) in cases {
        assert_eq!(refused(&experiment, &folder).to_string(), sentence);
        assert_eq!(experiment.run().unwrap_err().to_string(), sentence);
        assert!(!folder.exists());
    }
    let error = small().answer(12).unwrap_err();
    assert_eq!(
        error.to_string(),
        "the experiment has 12 runs, numbered from 0, and none of number 12"
    );
}

/// Same name, other size: two problems.
#[test]
fn a_name_with_another_size_is_another_problem() {
    let bowl = surefoot::joint(|x: &Vec<f64>, g: &mut Vec<f64>| {
        for (g, x) in g.iter_mut().zip(x) {
            *g = 2.0 * x;
        }
        x.iter().map(|x| x * x).sum::<f64>()
    });
    let experiment = Experiment::new()
        .with_problem(Task::new("bowl", vec![1.0; 2], bowl))
        .with_problem(Task::new("bowl", vec![1.0; 3], bowl))
        .with_contender(lbfgs("a"))
        .quiet();
    assert_eq!(experiment.run().unwrap().len(), 2);
}

#[test]
fn a_folder_that_cannot_be_written_is_an_error_with_its_path() {
    let parent = fresh_folder("not_a_folder");
    fs::create_dir_all(&parent).unwrap();
    let file = parent.join("file");
    fs::write(&file, "mine").unwrap();
    for folder in [file.clone(), file.join("below")] {
        let error = refused(&small(), &folder);
        assert!(matches!(error, ExperimentError::Io { .. }), "{error}");
        let text = error.to_string();
        assert!(
            text.contains("file") && text.contains("choose another"),
            "{text}"
        );
    }
    assert_eq!(fs::read_to_string(&file).unwrap(), "mine");
    // A records file that is a folder.
    let folder = parent.join("odd");
    small().run_in(&folder).unwrap();
    fs::remove_file(folder.join("records.csv")).unwrap();
    fs::create_dir(folder.join("records.csv")).unwrap();
    assert!(matches!(
        refused(&small(), &folder),
        ExperimentError::Io { .. }
    ));
}

#[test]
fn a_folder_in_use_is_left_alone() {
    let folder = fresh_folder("in_use");
    small().run_in(&folder).unwrap();
    let file = File::open(folder.join("in_use")).unwrap();
    file.lock().unwrap();
    assert!(matches!(
        refused(&small(), &folder),
        ExperimentError::InUse { .. }
    ));
    file.unlock().unwrap();
    small().run_in(&folder).unwrap();
}

#[test]
fn another_experiment_is_refused_and_says_what_differs() {
    let folder = fresh_folder("another");
    small().run_in(&folder).unwrap();
    let before = fs::read(folder.join("records.csv")).unwrap();
    let problems = "the problems, their starts or known minima";
    let cases = [
        (
            small().with_problem(surefoot::problems::large::tridia(3).unwrap()),
            problems,
        ),
        (
            Experiment::new()
                .with_problem(Task::from(rosenbrock()).with_minimum(1.0))
                .with_problem(Task::from(beale()).with_start(vec![0.5, -0.5]))
                .with_problem(wood()),
            problems,
        ),
        (
            Experiment::new()
                .with_problem(rosenbrock())
                .with_problem(Task::from(beale()).with_start(vec![0.5, -0.500_000_1]))
                .with_problem(wood()),
            problems,
        ),
        (
            small().with_contender(lbfgs("one more")),
            "the names of the contenders",
        ),
        (small().with_repetitions(2), "the numbers of repetitions"),
        (small().with_seed(7), "the seeds"),
        (small().with_budget(Budget::default()), "the budgets"),
        (
            small().with_format(Format::JsonLines),
            "the formats of the records",
        ),
        (small().with_trial_log(1), "the requests for trial logs"),
    ];
    for (experiment, differs) in cases {
        let experiment = experiment.quiet().with_contenders(None);
        // Those that were built anew have no contender yet; any will do, as problems are looked at first.
        let experiment = match experiment.run_in(folder.join("probe")) {
            Err(ExperimentError::NoContenders) => experiment.with_contender(lbfgs("a")),
            _ => experiment,
        };
        match refused(&experiment, &folder) {
            ExperimentError::OtherExperiment { what, .. } => assert_eq!(what, differs),
            other => panic!("{differs}: {other}"),
        }
        let _ = fs::remove_dir_all(folder.join("probe"));
    }
    assert_eq!(fs::read(folder.join("records.csv")).unwrap(), before);
}

/// What is done to the file, and which line is then damaged, if any is.
#[test]
fn foreign_and_damaged_files_are_refused_and_left_as_they_are() {
    type Damage = fn(&str) -> String;
    let cases: [(&str, Format, Damage, Option<u64>); 11] = [
        (
            "another head",
            Format::Csv,
            |t| t.replacen("problem", "name", 1),
            None,
        ),
        ("no text", Format::Csv, |_| "\u{0}\u{1}\n".into(), None),
        (
            "a letter in a count",
            Format::Csv,
            |t| line(t, 3, |l| l.replace(",2,", ",two,")),
            Some(3),
        ),
        (
            "an unknown ending",
            Format::Csv,
            |t| line(t, 2, |l| l.replacen("converged", "fine", 1)),
            Some(2),
        ),
        (
            "a missing field",
            Format::Csv,
            |t| line(t, 2, |l| l.replacen("Rosenbrock,", "", 1)),
            Some(2),
        ),
        (
            "another problem",
            Format::Csv,
            |t| line(t, 2, |l| l.replacen("Rosenbrock", "Bosenrock", 1)),
            Some(2),
        ),
        (
            "a line twice",
            Format::Csv,
            |t| line(t, 5, |l| format!("{l}{l}")),
            Some(6),
        ),
        (
            "an empty line",
            Format::Csv,
            |t| line(t, 5, |l| format!("\n{l}")),
            Some(2),
        ),
        (
            "a start too many",
            Format::JsonLines,
            |t| line(t, 1, |l| l.replace("\"start\":0", "\"start\":1")),
            Some(1),
        ),
        (
            "a brace gone",
            Format::JsonLines,
            |t| line(t, 7, |l| l.replace('}', "")),
            Some(7),
        ),
        (
            "the other format",
            Format::JsonLines,
            |_| "problem,n\n".into(),
            Some(1),
        ),
    ];
    for (i, (what, format, damage, at)) in cases.into_iter().enumerate() {
        let folder = fresh_folder(&format!("damaged_{i}"));
        let experiment = small().with_format(format);
        experiment.run_in(&folder).unwrap();
        let file = folder.join(format.file_name());
        let text = fs::read_to_string(&file).unwrap();
        let damaged = damage(&text);
        assert_ne!(damaged, text, "{what}");
        fs::write(&file, &damaged).unwrap();
        for error in [
            refused(&experiment, &folder),
            read_records(&folder).unwrap_err(),
        ] {
            match (&error, at) {
                (ExperimentError::Foreign { .. }, None) => {}
                (ExperimentError::Damaged { line, .. }, Some(at)) => {
                    assert_eq!(*line, at, "{what}: {error}");
                }
                _ => panic!("{what}: {error}"),
            }
            assert!(error.to_string().contains("left as it"), "{error}");
        }
        assert_eq!(fs::read_to_string(&file).unwrap(), damaged, "{what}");
    }
}

fn line(text: &str, number: usize, change: impl Fn(&str) -> String) -> String {
    let lines = text.split_inclusive('\n').enumerate();
    lines
        .map(|(i, line)| {
            if i + 1 == number {
                change(line)
            } else {
                line.into()
            }
        })
        .collect()
}

#[test]
fn records_without_their_experiment_are_foreign() {
    let folder = fresh_folder("orphans");
    small().with_trial_log(1).run_in(&folder).unwrap();
    fs::remove_file(folder.join("experiment.json")).unwrap();
    for name in ["records.csv", "trials.jsonl"] {
        let error = refused(&small(), &folder);
        let ExperimentError::Foreign { path, .. } = &error else {
            panic!("{error}")
        };
        assert!(path.ends_with(name), "{error}");
        fs::remove_file(folder.join(name)).unwrap();
    }
    small().run_in(&folder).unwrap();
    for text in ["", "{}", "[1, 2]", "{\"kind\": \"a diary\"}"] {
        fs::write(folder.join("experiment.json"), text).unwrap();
        assert!(matches!(
            refused(&small(), &folder),
            ExperimentError::Foreign { .. }
        ));
        assert!(matches!(
            read_trials(&folder),
            Err(ExperimentError::Foreign { .. })
        ));
        assert_eq!(
            fs::read_to_string(folder.join("experiment.json")).unwrap(),
            text
        );
    }
    let nowhere = read_records(folder.join("nowhere")).unwrap_err();
    assert!(matches!(nowhere, ExperimentError::Io { .. }));
}
