use std::path::PathBuf;
use std::string::String;

/// Why an experiment does not run, or its files cannot be read. Each sentence says what to do.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum ExperimentError {
    /// There is no problem.
    #[error("the experiment has no problem: add one with with_problem")]
    NoProblems,
    /// There is no contender.
    #[error("the experiment has no contender: add one with with_contender")]
    NoContenders,
    /// The number of repetitions is 0.
    #[error("the experiment has no repetition: ask for at least 1")]
    NoRepetitions,
    /// Two problems share name and size.
    #[error(
        "two problems are called {name:?} with {n} variables: give one another name, or give it both starts with with_start"
    )]
    DuplicateProblem {
        /// The name.
        name: String,
        /// Number of variables.
        n: usize,
    },
    /// Two contenders share a name.
    #[error("two contenders are called {name:?}: give one another name")]
    DuplicateContender {
        /// The name.
        name: String,
    },
    /// A name is empty, or holds a line break or another control character.
    #[error("{name:?} will not do as a name: it must not be empty nor hold control characters")]
    Name {
        /// The name.
        name: String,
    },
    /// The starts of a problem differ in length.
    #[error(
        "start {start} of the problem {problem:?} has {found} components where start 0 has {expected}: the starts of a problem \
         must have one length; make a problem of its own for each size"
    )]
    StartLength {
        /// The problem.
        problem: String,
        /// Which start, from 0.
        start: usize,
        /// The length of start 0.
        expected: usize,
        /// Its length.
        found: usize,
    },
    /// The limit of time is zero, or too long for a number of seconds.
    #[error("the limit of time must be positive: leave it out for none")]
    Budget,
    /// There is no run of this number.
    #[error("the experiment has {runs} runs, numbered from 0, and none of number {number}")]
    NoSuchRun {
        /// The number.
        number: usize,
        /// How many there are.
        runs: usize,
    },
    /// The system refused a file or folder.
    #[error(
        "{path}: {source}: check that the folder exists, may be written and has room, or choose another", path = path.display()
    )]
    Io {
        /// Which.
        path: PathBuf,
        /// What the system said.
        source: std::io::Error,
    },
    /// Another process writes to the folder.
    #[error(
        "another process writes to this folder ({path} is locked): wait until it ends, or choose another folder",
        path = path.display()
    )]
    InUse {
        /// Its lock.
        path: PathBuf,
    },
    /// A file is in the way that no experiment of this crate has written.
    #[error(
        "{path} is not a file of an experiment ({why}); it was left as it is: choose another folder, or move the file away",
        path = path.display()
    )]
    Foreign {
        /// Which.
        path: PathBuf,
        /// What is wrong with it.
        why: String,
    },
    /// The folder holds the records of another experiment.
    #[error(
        "{path} is of another experiment: {what} differ; its records were left as they are: choose another folder, or go on with \
         the experiment as it was",
        path = path.display()
    )]
    OtherExperiment {
        /// Its description.
        path: PathBuf,
        /// What differs.
        what: &'static str,
    },
    /// A file of this experiment is damaged before its last line.
    #[error(
        "line {line} of {path} is damaged ({why}); the file was left as it is: restore it from a copy, or move it away together \
         with its folder and run afresh",
        path = path.display()
    )]
    Damaged {
        /// Which.
        path: PathBuf,
        /// The line, from 1.
        line: u64,
        /// What is wrong with it.
        why: String,
    },
    /// A file to be written exists.
    #[error("{path} exists and is not overwritten: choose another name, or move it away", path = path.display())]
    Exists {
        /// Which.
        path: PathBuf,
    },
}

impl ExperimentError {
    pub(super) fn io(path: &std::path::Path) -> impl FnOnce(std::io::Error) -> Self {
        let path = path.to_path_buf();
        move |source| ExperimentError::Io { path, source }
    }
}
