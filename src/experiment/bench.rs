use std::collections::HashSet;
use std::path::Path;
use std::string::String;
use std::time::Duration;
use std::vec::Vec;

use super::budget::Budget;
use super::contender::Contender;
use super::error::ExperimentError;
use super::isolation::{Answer, Isolation};
use super::one_run::{self, Assignment};
use super::plan::{Place, Plan, seed_of};
use super::progress::Progress;
use super::record::Record;
use super::store::{Format, Store};
use super::task::Task;
use super::trials::TrialLog;
use super::workers::Workers;

/// Every contender on every problem from every start, so often repeated: run, counted and recorded.
///
/// ```
/// use surefoot::Descent;
/// use surefoot::acceptance::{StrongWolfe, WeakWolfe};
/// use surefoot::direction::Lbfgs;
/// use surefoot::experiment::{Budget, Contender, Experiment};
/// use surefoot::finder::ThreePoint;
/// use surefoot::problems::more_garbow_hillstrom::{rosenbrock, wood};
///
/// let memory = Lbfgs::new(5)?;
/// let other = memory.clone();
/// let records = Experiment::new()
///     .with_problem(rosenbrock())
///     .with_problem(wood())
///     .with_contender(Contender::new("weak", move || {
///         Descent::new(memory.clone(), ThreePoint::new(), WeakWolfe::default())
///     }))
///     .with_contender(Contender::new("strong", move || {
///         Descent::new(other.clone(), ThreePoint::new(), StrongWolfe::default())
///     }))
///     .with_budget(Budget { evaluations: Some(1_000), ..Budget::default() })
///     .run()?;
/// assert_eq!(records.len(), 4);
/// assert!(records.iter().all(|record| record.ending.is_success()));
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
///
/// [`run`](Experiment::run) keeps records in memory; [`run_in`](Experiment::run_in) writes each to disk as it comes, and goes on
/// where an interrupted run stopped. Records are the same, but for their seconds, whatever the number of threads, unless a
/// limit of time cuts runs short.
///
/// A contender or an objective that panics is a recorded failure ([`Ending::Panicked`](super::Ending::Panicked)), and the others
/// run on; the message of the panic appears on the standard error as usual. A program built with `panic = "abort"` needs
/// [`Isolation`] for that.
#[derive(Clone, Debug)]
pub struct Experiment {
    tasks: Vec<Task>,
    contenders: Vec<Contender>,
    repetitions: u32,
    seed: u64,
    budget: Budget,
    workers: Workers,
    format: Format,
    trials: Option<usize>,
    isolation: Option<Isolation>,
    progress: bool,
}

impl Default for Experiment {
    fn default() -> Self {
        Self::new()
    }
}

impl Experiment {
    /// Without problems or contenders yet; one repetition, seed 0, no budget, one worker, records as CSV, no trial logs, a
    /// progress bar where the standard error is a terminal.
    pub fn new() -> Self {
        Experiment {
            tasks: Vec::new(),
            contenders: Vec::new(),
            repetitions: 1,
            seed: 0,
            budget: Budget::default(),
            workers: Workers::One,
            format: Format::Csv,
            trials: None,
            isolation: None,
            progress: true,
        }
    }

    /// With one problem more. Name and size together must be its own.
    #[must_use]
    pub fn with_problem(mut self, problem: impl Into<Task>) -> Self {
        self.tasks.push(problem.into());
        self
    }

    /// With more problems.
    #[must_use]
    pub fn with_problems<P: Into<Task>>(mut self, problems: impl IntoIterator<Item = P>) -> Self {
        self.tasks.extend(problems.into_iter().map(Into::into));
        self
    }

    /// With one contender more. Its name must be its own.
    #[must_use]
    pub fn with_contender(mut self, contender: Contender) -> Self {
        self.contenders.push(contender);
        self
    }

    /// With more contenders.
    #[must_use]
    pub fn with_contenders(mut self, contenders: impl IntoIterator<Item = Contender>) -> Self {
        self.contenders.extend(contenders);
        self
    }

    /// So many runs of each contender from each start; at least 1. Default 1. More are worth it for objectives from a seed
    /// ([`Task::seeded`]) and for seconds.
    #[must_use]
    pub fn with_repetitions(self, repetitions: u32) -> Self {
        Experiment {
            repetitions,
            ..self
        }
    }

    /// With another seed for objectives that take one. Default 0.
    #[must_use]
    pub fn with_seed(self, seed: u64) -> Self {
        Experiment { seed, ..self }
    }

    /// With a limit on the cost of each run. Default: none.
    #[must_use]
    pub fn with_budget(self, budget: Budget) -> Self {
        Experiment { budget, ..self }
    }

    /// With so many runs at once. Default [`Workers::One`].
    #[must_use]
    pub fn with_workers(self, workers: Workers) -> Self {
        Experiment { workers, ..self }
    }

    /// With records written in this format. Default [`Format::Csv`].
    #[must_use]
    pub fn with_format(self, format: Format) -> Self {
        Experiment { format, ..self }
    }

    /// With the first `most` trials of each run written to `trials.jsonl` beside the records. Default: none are.
    #[must_use]
    pub fn with_trial_log(self, most: usize) -> Self {
        Experiment {
            trials: Some(most),
            ..self
        }
    }

    /// With each run in a process of its own. Default: none.
    #[must_use]
    pub fn with_isolation(self, isolation: Isolation) -> Self {
        Experiment {
            isolation: Some(isolation),
            ..self
        }
    }

    /// Without the progress bar.
    #[must_use]
    pub fn quiet(self) -> Self {
        Experiment {
            progress: false,
            ..self
        }
    }

    /// The number of runs.
    pub fn runs(&self) -> usize {
        self.plan().runs()
    }

    /// Runs it in memory: nothing is written, and no trial logs are kept. The records come by problem, contender, start and
    /// repetition.
    ///
    /// # Errors
    /// [`ExperimentError`] for an experiment that cannot be run: without problems, contenders or repetitions, or with names used
    /// twice. What becomes of a run is no error, but stands in its record.
    pub fn run(&self) -> Result<Vec<Record>, ExperimentError> {
        self.run_with(None)
    }

    /// Runs it and writes each record to `folder` as it comes: a process that is killed loses the runs under way and no
    /// other. If the folder holds records of this experiment already, those runs are not run again, and the experiment goes on
    /// where it stopped. Gives all records, by problem, contender, start and repetition; in the file they stand in the order in
    /// which they came, and [`read_records`](super::read_records) puts them in this one.
    ///
    /// The folder is made if it does not exist. It holds `experiment.json`, which says what the experiment consists of, the
    /// records ([`Format::file_name`]), `trials.jsonl` if trials are asked for, and the empty `in_use`, which is locked meanwhile. What stands in these files is never
    /// overwritten, except that a last line cut short by an interruption is dropped and its run done again.
    ///
    /// The description knows problems by name, size, starts and known minima, contenders by name, and the seed, repetitions and
    /// budget. It cannot see into an objective or a driver: give another name, or another folder, when you change one.
    ///
    /// # Errors
    /// As [`run`](Experiment::run), and for a folder or file that cannot be written, is in use, holds another experiment, or is
    /// damaged.
    pub fn run_in(&self, folder: impl AsRef<Path>) -> Result<Vec<Record>, ExperimentError> {
        self.check()?;
        let store = Store::open(folder.as_ref(), &self.plan())?;
        self.run_with(Some(store))
    }

    /// For the process of an [`Isolation`]: does the run of this number and gives the line to print.
    ///
    /// # Errors
    /// As [`run`](Experiment::run), and [`ExperimentError::NoSuchRun`].
    pub fn answer(&self, number: usize) -> Result<String, ExperimentError> {
        self.check()?;
        let runs = self.runs();
        let place = self.plan().places().nth(number);
        let place = place.ok_or(ExperimentError::NoSuchRun { number, runs })?;
        let (record, trials) = self.run_at(place);
        let line = super::lines::json(&Answer { record, trials });
        Ok(String::from_utf8_lossy(&line).trim_end().into())
    }

    fn plan(&self) -> Plan {
        Plan::new(
            &self.tasks,
            &self.contenders,
            (self.seed, self.repetitions),
            self.budget,
            (self.format, self.trials),
        )
    }

    fn check(&self) -> Result<(), ExperimentError> {
        if self.tasks.is_empty() {
            return Err(ExperimentError::NoProblems);
        }
        if self.contenders.is_empty() {
            return Err(ExperimentError::NoContenders);
        }
        if self.repetitions == 0 {
            return Err(ExperimentError::NoRepetitions);
        }
        if self.budget.time == Some(Duration::ZERO) {
            return Err(ExperimentError::Budget);
        }
        let mut names = HashSet::new();
        for task in &self.tasks {
            check_name(task.name())?;
            let (name, n) = (task.name(), task.dim());
            if !names.insert((name, n)) {
                let name = name.into();
                return Err(ExperimentError::DuplicateProblem { name, n });
            }
            if let Some(start) = task.starts().iter().position(|start| start.len() != n) {
                return Err(ExperimentError::StartLength {
                    problem: name.into(),
                    start,
                    expected: n,
                    found: task.starts()[start].len(),
                });
            }
        }
        let mut names = HashSet::new();
        for contender in &self.contenders {
            check_name(contender.name())?;
            if !names.insert(contender.name()) {
                let name = contender.name().into();
                return Err(ExperimentError::DuplicateContender { name });
            }
        }
        Ok(())
    }

    fn run_with(&self, mut store: Option<Store>) -> Result<Vec<Record>, ExperimentError> {
        self.check()?;
        let places: Vec<Place> = self.plan().places().collect();
        let mut records: Vec<Option<Record>> = std::vec![None; places.len()];
        for (number, record) in store.iter_mut().flat_map(|store| store.found.drain(..)) {
            records[number] = Some(record);
        }
        let open: Vec<usize> = (0..places.len())
            .filter(|&i| records[i].is_none())
            .collect();
        let failed = |record: &Record| !record.ending.is_success();
        let failures = records.iter().flatten().filter(|r| failed(r)).count() as u64;
        let done = places.len() - open.len();
        let mut progress = Progress::new(places.len(), done, failures, self.progress);
        let run = |number: usize| match &self.isolation {
            None => self.run_at(places[number]),
            Some(isolation) => isolation.run(number, self.blank(places[number])),
        };
        let kept = self.workers.each(&open, run, |number, (record, trials)| {
            if let Some(store) = &mut store {
                store.write(&record, trials.as_ref())?;
            }
            progress.one_more(failed(&record));
            records[number] = Some(record);
            Ok(())
        });
        progress.finish();
        kept?;
        if let Some(store) = store {
            store.sync()?;
        }
        Ok(records.into_iter().flatten().collect())
    }

    fn run_at(&self, place: Place) -> (Record, Option<TrialLog>) {
        let task = &self.tasks[place.task];
        one_run::run(&Assignment {
            task,
            contender: &self.contenders[place.contender],
            start: place.start,
            repetition: place.repetition,
            seed: seed_of(self.seed, task, place.start, place.repetition),
            budget: self.budget,
            trials: self.trials,
        })
    }

    fn blank(&self, place: Place) -> Record {
        let task = &self.tasks[place.task];
        Record {
            start: place.start,
            repetition: place.repetition,
            ..Record::new(
                task.name(),
                task.dim(),
                self.contenders[place.contender].name(),
            )
        }
    }
}

fn check_name(name: &str) -> Result<(), ExperimentError> {
    if name.trim().is_empty() || name.chars().any(char::is_control) {
        let name = name.into();
        return Err(ExperimentError::Name { name });
    }
    Ok(())
}
