//! Fits a thermal model of a cold store to measured temperatures, and shows what each acceptance rule cost and why it
//! refused trials.
//!
//! ```text
//! cargo run --release --example cold_store                 the invented readings of recovery.csv
//! cargo run --release --example cold_store -- FILE.csv     readings of your own, of the same shape
//! cargo run --release --features "experiment plot" --example cold_store -- --report FILE.html
//!                                                          also a report of the contest, to open in a browser
//! ```
//!
//! | file | what it holds |
//! |---|---|
//! | `command.rs` | the arguments |
//! | `readings.rs` | the CSV file, and what is wrong with a bad one |
//! | `model.rs` | two heat stores and their sensitivities |
//! | `fit.rs` | the robust loss as a `surefoot::Objective` |
//! | `contest.rs` | runs under each rule and with each finder, and why trials were refused |
//! | `estimates.rs`, `residuals.rs` | standard errors; what is left over and what that says |
//! | `record.rs` | the contest as records of an experiment, and its report |
//! | `study.rs`, `page.rs` | all of it together; the page that a person reads |

mod command;
mod contest;
mod estimates;
mod fit;
mod model;
mod page;
mod readings;
#[cfg(all(feature = "experiment", feature = "plot"))]
mod record;
mod residuals;
mod study;

use command::Command;
use std::io::{ErrorKind, Write};
use std::path::{Path, PathBuf};
use std::process::ExitCode;
use study::Study;

const BUILT_IN: &[u8] = include_bytes!("recovery.csv");
const BUILT_IN_SOURCE: &str =
    "built in, and INVENTED: the head of examples/cold_store/recovery.csv says how";

/// The command or the file is at fault.
const AT_FAULT: u8 = 2;

fn main() -> ExitCode {
    let asked = command::take_report(std::env::args_os().skip(1));
    let answer = asked.and_then(|(report, rest)| match command::parse(rest.into_iter())? {
        Command::Help => Ok((command::HELP.to_owned(), ExitCode::SUCCESS)),
        Command::Fit(file) => study(file, report.as_deref()),
    });
    match answer {
        Ok((text, code)) => match show(&text) {
            Ok(()) => code,
            Err(error) => {
                tell(&format!("cannot write the page: {error}"));
                ExitCode::FAILURE
            }
        },
        Err(message) => {
            tell(&message);
            ExitCode::from(AT_FAULT)
        }
    }
}

/// The page, and how the program ends.
fn study(file: Option<PathBuf>, report: Option<&Path>) -> Result<(String, ExitCode), String> {
    let (source, bytes) = match file {
        None => (BUILT_IN_SOURCE.to_owned(), BUILT_IN.to_vec()),
        Some(path) => {
            let source = path.display().to_string();
            let bytes = std::fs::read(&path);
            let bytes = bytes.map_err(|error| {
                format!("cannot read {source}: {error}; give the path of a CSV file")
            })?;
            (source, bytes)
        }
    };
    let rows = readings::parse(&bytes).map_err(|bad| format!("{source}: {bad}"))?;
    let Some(study) = Study::new(source, rows) else {
        return Err(
            "the model has no finite loss to begin from: look for readings far from all others"
                .to_owned(),
        );
    };
    let code = if study.converged {
        ExitCode::SUCCESS
    } else {
        ExitCode::FAILURE
    };
    let mut text = study.to_string();
    match report.map(|path| write_report(path, &study)) {
        None => {}
        Some(Ok(sentence)) => text.push_str(&format!("\n{sentence}\n")),
        // The page is shown all the same.
        Some(Err(message)) => {
            tell(&message);
            return Ok((text, ExitCode::from(AT_FAULT)));
        }
    }
    Ok((text, code))
}

#[cfg(all(feature = "experiment", feature = "plot"))]
fn write_report(path: &Path, study: &Study) -> Result<String, String> {
    record::report(path, study)
}

#[cfg(not(all(feature = "experiment", feature = "plot")))]
fn write_report(_: &Path, _: &Study) -> Result<String, String> {
    Err(
        "this program was built without reports: build it with --features \"experiment plot\""
            .to_owned(),
    )
}

/// Writes to standard output. A reader that has seen enough and closes it is no failure.
fn show(text: &str) -> std::io::Result<()> {
    let mut out = std::io::stdout().lock();
    match out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
        Err(error) if error.kind() != ErrorKind::BrokenPipe => Err(error),
        _ => Ok(()),
    }
}

fn tell(message: &str) {
    // With standard error closed there is nobody left to tell.
    let _ = writeln!(std::io::stderr(), "cold_store: {message}");
}
