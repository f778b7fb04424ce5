//! The command line of an example whose only option is `--csv`.

use std::error::Error;
use std::process::ExitCode;

/// Runs it, with whether `--csv` was given.
pub(crate) fn main(name: &str, run: impl FnOnce(bool) -> Result<(), Box<dyn Error>>) -> ExitCode {
    let arguments: Vec<_> = std::env::args().skip(1).collect();
    let csv = match arguments.iter().map(String::as_str).collect::<Vec<_>>()[..] {
        [] => false,
        ["--csv"] => true,
        _ => {
            eprintln!("usage: {name} [--csv]");
            return ExitCode::from(2);
        }
    };
    match run(csv) {
        Ok(()) => ExitCode::SUCCESS,
        Err(error) => {
            eprintln!("{name}: {error}");
            ExitCode::FAILURE
        }
    }
}
