//! What the program was asked to do.

use std::ffi::OsString;
use std::path::PathBuf;

pub(crate) const HELP: &str = "\
Fits two heat stores, air and product, to the temperatures of a cold store after a defrost, and shows what each
acceptance rule cost and why it refused trials.

usage:  cold_store [FILE] [--report HTML]

  FILE     a CSV file with the header
               minute,air_c,product_c,outside_c,cooling,defrost
           and rows in the order of time. Cells of air_c and product_c may be empty. cooling and defrost are shares,
           0 to 1, of the time since the row before. Lines that begin with # are passed over.
           Without FILE: the built-in readings, which are invented (examples/cold_store/recovery.csv).
  --report HTML
           also writes a report of the contest to a new file, for a browser
  --help   this text

ends with 0 after a fit, 1 if the best run did not converge, 2 if the command or the file is at fault
";

#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) enum Command {
    Help,
    /// Fits the readings of a file, or the built-in ones.
    Fit(Option<PathBuf>),
}

/// Takes `--report HTML` out of the arguments.
///
/// # Errors
/// A sentence where the file is missing, or the option stands twice.
pub(crate) fn take_report(
    mut arguments: impl Iterator<Item = OsString>,
) -> Result<(Option<PathBuf>, Vec<OsString>), String> {
    let (mut report, mut rest) = (None, Vec::new());
    while let Some(argument) = arguments.next() {
        if argument != "--report" {
            rest.push(argument);
            continue;
        }
        let path = arguments.next().map(PathBuf::from);
        let path = path.ok_or("`--report` needs the file to write after it")?;
        if report.replace(path).is_some() {
            return Err("`--report` stands twice: one file is enough".to_owned());
        }
    }
    Ok((report, rest))
}

/// Reads the arguments that follow the program's name.
///
/// # Errors
/// A sentence for an unknown option and for a second file.
pub(crate) fn parse(arguments: impl Iterator<Item = OsString>) -> Result<Command, String> {
    let mut file = None;
    for argument in arguments {
        let text = argument.to_string_lossy();
        if text == "--help" || text == "-h" {
            return Ok(Command::Help);
        }
        if text.starts_with('-') {
            return Err(format!(
                "unknown option `{text}`: --help says what there is"
            ));
        }
        if file.is_some() {
            return Err(format!("`{text}` is a second file: run once for each"));
        }
        file = Some(PathBuf::from(argument));
    }
    Ok(Command::Fit(file))
}
