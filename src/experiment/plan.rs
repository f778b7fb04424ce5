//! What an experiment consists of, as it is written beside its records and compared when they are gone on with.

use std::borrow::ToOwned;
use std::collections::HashMap;
use std::format;
use std::string::String;
use std::vec::Vec;

use super::budget::Budget;
use super::contender::Contender;
use super::record::{Number, Record};
use super::store::Format;
use super::task::Task;

const KIND: &str = "surefoot experiment, version 1";

/// The description of an experiment: `experiment.json`.
#[derive(Clone, Debug, serde::Serialize, serde::Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct Plan {
    kind: String,
    pub(super) records: Format,
    /// Trials kept of each run, if any.
    pub(super) trials: Option<usize>,
    seed: u64,
    repetitions: u32,
    evaluations: Option<u64>,
    seconds: Option<f64>,
    contenders: Vec<String>,
    problems: Vec<PlannedTask>,
}

#[derive(Clone, Debug, serde::Serialize, serde::Deserialize)]
#[serde(deny_unknown_fields)]
struct PlannedTask {
    name: String,
    n: usize,
    /// A digest of the numbers in each start.
    starts: Vec<String>,
    minima: Vec<Number>,
}

/// Which run, by the places of its parts in the experiment.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Place {
    pub(super) task: usize,
    pub(super) contender: usize,
    pub(super) start: u32,
    pub(super) repetition: u32,
}

impl Plan {
    pub(super) fn new(
        tasks: &[Task],
        contenders: &[Contender],
        (seed, repetitions): (u64, u32),
        budget: Budget,
        (records, trials): (Format, Option<usize>),
    ) -> Self {
        Plan {
            kind: KIND.to_owned(),
            records,
            trials,
            seed,
            repetitions,
            evaluations: budget.evaluations,
            seconds: budget.time.map(|time| time.as_secs_f64()),
            contenders: contenders.iter().map(|c| c.name().to_owned()).collect(),
            problems: tasks.iter().map(PlannedTask::new).collect(),
        }
    }

    /// Whether it is a description that this version understands.
    pub(super) fn is_known(&self) -> bool {
        self.kind == KIND
    }

    /// The first thing in which two differ.
    pub(super) fn difference(&self, other: &Plan) -> Option<&'static str> {
        let same_problems = self.problems.len() == other.problems.len()
            && self
                .problems
                .iter()
                .zip(&other.problems)
                .all(|(a, b)| a.is(b));
        let parts = [
            (same_problems, "the problems, their starts or known minima"),
            (
                self.contenders == other.contenders,
                "the names of the contenders",
            ),
            (
                self.repetitions == other.repetitions,
                "the numbers of repetitions",
            ),
            (self.seed == other.seed, "the seeds"),
            (
                self.evaluations == other.evaluations && self.seconds == other.seconds,
                "the budgets",
            ),
            (self.records == other.records, "the formats of the records"),
            (self.trials == other.trials, "the requests for trial logs"),
        ];
        parts.into_iter().find(|part| !part.0).map(|part| part.1)
    }

    /// The runs of each problem.
    fn runs_of(&self, task: &PlannedTask) -> usize {
        self.contenders.len() * task.starts.len() * self.repetitions as usize
    }

    /// The number of runs.
    pub(super) fn runs(&self) -> usize {
        self.problems.iter().map(|task| self.runs_of(task)).sum()
    }

    /// Every run, in the order of their numbers: by problem, contender, start, repetition.
    pub(super) fn places(&self) -> impl Iterator<Item = Place> + '_ {
        self.problems
            .iter()
            .enumerate()
            .flat_map(move |(task, planned)| {
                (0..self.contenders.len()).flat_map(move |contender| {
                    (0..planned.starts.len() as u32).flat_map(move |start| {
                        (0..self.repetitions).map(move |repetition| Place {
                            task,
                            contender,
                            start,
                            repetition,
                        })
                    })
                })
            })
    }

    pub(super) fn index(&self) -> Index<'_> {
        let mut begin = 0;
        let mut tasks = HashMap::new();
        for task in &self.problems {
            tasks.insert((task.name.as_str(), task.n), (begin, task.starts.len()));
            begin += self.runs_of(task);
        }
        let contenders = self
            .contenders
            .iter()
            .map(String::as_str)
            .zip(0..)
            .collect();
        Index {
            tasks,
            contenders,
            repetitions: self.repetitions as usize,
        }
    }
}

/// Finds the number of a run by its key.
pub(super) struct Index<'a> {
    /// The number of the first run of a problem, and how many starts it has.
    tasks: HashMap<(&'a str, usize), (usize, usize)>,
    contenders: HashMap<&'a str, usize>,
    repetitions: usize,
}

/// What tells runs apart.
pub(super) struct Key<'a> {
    pub(super) problem: &'a str,
    pub(super) n: usize,
    pub(super) contender: &'a str,
    pub(super) start: u32,
    pub(super) repetition: u32,
}

impl<'a> From<&'a Record> for Key<'a> {
    fn from(record: &'a Record) -> Self {
        Key {
            problem: &record.problem,
            n: record.n,
            contender: &record.contender,
            start: record.start,
            repetition: record.repetition,
        }
    }
}

impl Index<'_> {
    /// The number of the run, or what the experiment does not have.
    pub(super) fn number(&self, key: &Key<'_>) -> Result<usize, String> {
        let Some(&(begin, starts)) = self.tasks.get(&(key.problem, key.n)) else {
            let Key { problem, n, .. } = key;
            return Err(format!(
                "the experiment has no problem {problem:?} with {n} variables"
            ));
        };
        let Some(&contender) = self.contenders.get(key.contender) else {
            let name = key.contender;
            return Err(format!("the experiment has no contender {name:?}"));
        };
        let (start, repetition) = (key.start as usize, key.repetition as usize);
        if start >= starts || repetition >= self.repetitions {
            return Err(format!(
                "the experiment has no start {start} with repetition {repetition} here"
            ));
        }
        Ok(begin + (contender * starts + start) * self.repetitions + repetition)
    }
}

impl PlannedTask {
    fn new(task: &Task) -> Self {
        let digest = |start: &Vec<f64>| {
            let bytes = start.iter().flat_map(|x| x.to_bits().to_le_bytes());
            format!("{:016x}", fnv(bytes))
        };
        PlannedTask {
            name: task.name().to_owned(),
            n: task.dim(),
            starts: task.starts().iter().map(digest).collect(),
            minima: task.minima().iter().map(|&value| Number(value)).collect(),
        }
    }

    fn is(&self, other: &PlannedTask) -> bool {
        let bits = |minima: &[Number]| -> Vec<u64> {
            let canonical = |x: f64| if x.is_nan() { f64::NAN } else { x };
            minima.iter().map(|x| canonical(x.0).to_bits()).collect()
        };
        self.name == other.name
            && self.n == other.n
            && self.starts == other.starts
            && bits(&self.minima) == bits(&other.minima)
    }
}

/// The seed of an objective. Every contender meets the same.
pub(super) fn seed_of(seed: u64, task: &Task, start: u32, repetition: u32) -> u64 {
    let numbers = [
        seed,
        task.dim() as u64,
        u64::from(start),
        u64::from(repetition),
    ];
    let bytes = numbers.into_iter().flat_map(u64::to_le_bytes);
    fnv(bytes.chain(task.name().bytes()))
}

/// The 64-bit hash of G. Fowler, L. C. Noll & K.-P. Vo, variant 1a (IETF draft "The FNV Non-Cryptographic Hash Algorithm"; constants
/// recalled from memory): good enough to tell starts and seeds apart, and the same on every machine.
fn fnv(bytes: impl Iterator<Item = u8>) -> u64 {
    bytes.fold(0xcbf2_9ce4_8422_2325, |hash, byte| {
        (hash ^ u64::from(byte)).wrapping_mul(0x0000_0100_0000_01b3)
    })
}
