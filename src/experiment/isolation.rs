use core::fmt;
use std::format;
use std::io::{BufRead, BufReader};
use std::process::{Child, Command, Stdio};
use std::string::String;
use std::sync::Arc;
use std::sync::mpsc::{Receiver, RecvTimeoutError, channel};
use std::time::{Duration, Instant};
use std::vec::Vec;

use super::one_run::on_one_line;
use super::record::{Ending, Record};
use super::trials::TrialLog;

/// Each run in a process of its own, with a hard limit of time: for objectives that may never return, or abort.
///
/// You say how to start a process that does run number so and so; it makes the same experiment and prints the one line that
/// [`Experiment::answer`](super::Experiment::answer) gives. Usually that is the program itself, with the number as an argument:
///
/// ```no_run
/// use std::process::Command;
/// use std::time::Duration;
/// use surefoot::experiment::{Experiment, Isolation};
/// # fn my_experiment() -> Experiment { Experiment::new() }
/// let program = std::env::current_exe()?;
/// let experiment = my_experiment();
/// if let Some(number) = std::env::args().nth(1) {
///     println!("{}", experiment.answer(number.parse()?)?);
///     return Ok(());
/// }
/// let isolation = Isolation::new(Duration::from_secs(60), move |number| {
///     let mut command = Command::new(&program);
///     command.arg(number.to_string());
///     command
/// });
/// experiment.with_isolation(isolation).run_in("records")?;
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
///
/// A process past the limit is killed, [`Ending::TimeSpent`]; one that ends without an answer is [`Ending::Panicked`]. Their
/// records know no counts and no values. A record's seconds are those of the run, without the start of the process.
#[derive(Clone)]
pub struct Isolation {
    limit: Duration,
    command: Arc<dyn Fn(usize) -> Command + Send + Sync>,
}

impl Isolation {
    /// With so much time for a process from its start to its end, and the command for the run of a number.
    pub fn new(
        limit: Duration,
        command: impl Fn(usize) -> Command + Send + Sync + 'static,
    ) -> Self {
        Isolation {
            limit,
            command: Arc::new(command),
        }
    }

    /// Runs it there. `blank` says which run it is.
    pub(super) fn run(&self, number: usize, blank: Record) -> (Record, Option<TrialLog>) {
        let begin = Instant::now();
        let failed = |ending: Ending, note: &str| {
            let record = Record {
                ending,
                note: on_one_line(note),
                seconds: begin.elapsed().as_secs_f64(),
                ..blank.clone()
            };
            (record, None)
        };
        let spawned = (self.command)(number)
            .stdin(Stdio::null())
            .stdout(Stdio::piped())
            .spawn();
        let mut child = match spawned {
            Ok(child) => child,
            Err(error) => {
                let note = format!(
                    "the process of the run did not start ({error}): check the command of the isolation"
                );
                return failed(Ending::Failed, &note);
            }
        };
        let answers = listen(&mut child);
        // An answer may be longer than a pipe holds: it is read while the process runs, which closes the pipe as it ends.
        let heard = answers.recv_timeout(self.limit);
        if let Err(RecvTimeoutError::Timeout) = heard {
            let _ = child.kill(); // it may have ended just now
            let _ = child.wait();
            let note = format!(
                "the process of the run was killed after {} s: allow more if this run matters",
                self.limit.as_secs_f64()
            );
            return failed(Ending::TimeSpent, &note);
        }
        let ended = wait_until(&mut child, begin + self.limit);
        let answer = heard.ok().flatten();
        match answer.and_then(|line| serde_json::from_str::<Answer>(&line).ok()) {
            Some(answer) if is_same_run(&answer.record, &blank) => (answer.record, answer.trials),
            Some(_) => failed(
                Ending::Failed,
                "the process answered for another run: check that it makes the same experiment",
            ),
            None => failed(
                Ending::Panicked,
                &format!("the process of the run ended without an answer ({ended})"),
            ),
        }
    }
}

/// What a process prints.
#[derive(serde::Serialize, serde::Deserialize)]
pub(super) struct Answer {
    pub(super) record: Record,
    pub(super) trials: Option<TrialLog>,
}

/// The last line that the process prints that is not empty, once it has closed its output.
fn listen(child: &mut Child) -> Receiver<Option<String>> {
    let (sender, receiver) = channel();
    if let Some(output) = child.stdout.take() {
        std::thread::spawn(move || {
            let lines: Vec<String> = BufReader::new(output)
                .lines()
                .map_while(Result::ok)
                .collect();
            let last = lines.into_iter().rfind(|line| !line.trim().is_empty());
            let _ = sender.send(last); // nobody waits any more where the limit has passed
        });
    }
    receiver
}

/// How the process ended, or was made to.
fn wait_until(child: &mut Child, limit: Instant) -> String {
    loop {
        match child.try_wait() {
            Ok(Some(status)) => return format!("{status}"),
            Ok(None) if Instant::now() < limit => std::thread::sleep(Duration::from_millis(1)),
            Ok(None) => {
                let _ = child.kill();
                let _ = child.wait();
                return String::from("killed at the limit of time");
            }
            Err(error) => return format!("{error}"),
        }
    }
}

fn is_same_run(a: &Record, b: &Record) -> bool {
    a.problem == b.problem
        && a.n == b.n
        && a.contender == b.contender
        && a.start == b.start
        && a.repetition == b.repetition
}

impl fmt::Debug for Isolation {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("Isolation")
            .field("limit", &self.limit)
            .finish_non_exhaustive()
    }
}
