//! The folder of an experiment: what it is, its records, its trials.

use std::collections::HashSet;
use std::format;
use std::fs::{File, OpenOptions, TryLockError};
use std::io::{Read, Seek, SeekFrom, Write};
use std::path::{Path, PathBuf};
use std::string::{String, ToString};
use std::vec::Vec;

use super::error::ExperimentError;
use super::lines::{self, complete};
use super::plan::{Index, Key, Plan};
use super::record::Record;
use super::trials::TrialLog;

const PLAN: &str = "experiment.json";
const TRIALS: &str = "trials.jsonl";
/// Locked while a process writes to the folder, and otherwise without meaning.
const LOCK: &str = "in_use";

/// How records are written.
#[derive(
    Clone, Copy, Debug, Default, PartialEq, Eq, Hash, serde::Serialize, serde::Deserialize,
)]
#[serde(rename_all = "snake_case")]
pub enum Format {
    /// A head line with the names of the fields of [`Record`], then a line a run: `records.csv`.
    #[default]
    Csv,
    /// An object a run, one a line: `records.jsonl`.
    JsonLines,
}

impl Format {
    /// The file that records of this format stand in.
    pub fn file_name(self) -> &'static str {
        match self {
            Format::Csv => "records.csv",
            Format::JsonLines => "records.jsonl",
        }
    }
}

/// An open folder, to which this process alone writes.
pub(super) struct Store {
    lock: File,
    format: Format,
    records: (PathBuf, File),
    trials: Option<(PathBuf, File)>,
    /// The records found there, each with the number of its run.
    pub(super) found: Vec<(usize, Record)>,
}

impl Store {
    /// Opens the folder, or makes it; reads what is there and drops a torn last line.
    pub(super) fn open(folder: &Path, plan: &Plan) -> Result<Self, ExperimentError> {
        std::fs::create_dir_all(folder).map_err(ExperimentError::io(folder))?;
        let file = |name: &str| folder.join(name);
        let lock = lock(file(LOCK))?;
        match read_plan(&file(PLAN))? {
            Some(other) => {
                if let Some(what) = other.difference(plan) {
                    let path = file(PLAN);
                    return Err(ExperimentError::OtherExperiment { path, what });
                }
            }
            None => {
                let names = [
                    Format::Csv.file_name(),
                    Format::JsonLines.file_name(),
                    TRIALS,
                ];
                if let Some(path) = names.map(file).into_iter().find(|path| path.exists()) {
                    let why = format!("there is no {PLAN} beside it");
                    return Err(ExperimentError::Foreign { path, why });
                }
                write_plan(&file(PLAN), plan)?;
            }
        }
        let records = open(file(plan.records.file_name()))?;
        let trials = match plan.trials {
            Some(_) => Some(open(file(TRIALS))?),
            None => None,
        };
        let mut store = Store {
            lock,
            format: plan.records,
            records,
            trials,
            found: Vec::new(),
        };
        store.take_in(&plan.index())?;
        Ok(store)
    }

    fn take_in(&mut self, index: &Index<'_>) -> Result<(), ExperimentError> {
        let (path, file) = &mut self.records;
        let bytes = read_whole(path, file)?;
        let (whole, records) = records_in(&bytes, self.format, path)?;
        self.found = numbered(records, index, self.format, path)?;
        cut(path, file, &bytes, whole)?;
        if whole == 0 {
            append(path, file, &lines::head(self.format))?;
        }
        let Some((path, file)) = &mut self.trials else {
            return Ok(());
        };
        let bytes = read_whole(path, file)?;
        let done: HashSet<usize> = self.found.iter().map(|found| found.0).collect();
        let keep = trials_kept(&bytes, index, &done, path)?;
        cut(path, file, &bytes, keep)
    }

    /// Writes a run: its trials first, so that no record stands without them.
    pub(super) fn write(
        &mut self,
        record: &Record,
        trials: Option<&TrialLog>,
    ) -> Result<(), ExperimentError> {
        if let (Some((path, file)), Some(trials)) = (&mut self.trials, trials) {
            append(path, file, &lines::json(trials))?;
        }
        let (path, file) = &mut self.records;
        append(path, file, &lines::of_record(record, self.format))
    }

    /// Hands everything to the disk.
    pub(super) fn sync(&self) -> Result<(), ExperimentError> {
        for (path, file) in core::iter::once(&self.records).chain(&self.trials) {
            file.sync_all().map_err(ExperimentError::io(path))?;
        }
        Ok(())
    }
}

impl Drop for Store {
    /// Unlocks by hand: a process that is being started at this moment holds a copy of the file for an instant, and with it the
    /// lock.
    fn drop(&mut self) {
        let _ = self.lock.unlock(); // where there are no locks there is nothing to unlock
    }
}

/// The records in the folder of an experiment, in the experiment's order whatever their order in the file: by problem,
/// contender, start and repetition. The file may be of a run still under way, or of one that was interrupted; a last line that is
/// not complete is passed over.
///
/// # Errors
/// [`ExperimentError::Foreign`] or [`Damaged`](ExperimentError::Damaged) for files that are not what an experiment wrote,
/// [`Io`](ExperimentError::Io) where they cannot be read.
pub fn read_records(folder: impl AsRef<Path>) -> Result<Vec<Record>, ExperimentError> {
    let folder = folder.as_ref();
    let plan = existing_plan(folder)?;
    let path = folder.join(plan.records.file_name());
    let bytes = std::fs::read(&path).map_err(ExperimentError::io(&path))?;
    let (_, records) = records_in(&bytes, plan.records, &path)?;
    let mut records = numbered(records, &plan.index(), plan.records, &path)?;
    records.sort_by_key(|numbered| numbered.0);
    Ok(records.into_iter().map(|numbered| numbered.1).collect())
}

/// The trial logs in the folder of an experiment that asked for them, in the experiment's order; empty for one that did not.
///
/// # Errors
/// As [`read_records`].
pub fn read_trials(folder: impl AsRef<Path>) -> Result<Vec<TrialLog>, ExperimentError> {
    let folder = folder.as_ref();
    let plan = existing_plan(folder)?;
    if plan.trials.is_none() {
        return Ok(Vec::new());
    }
    let path = folder.join(TRIALS);
    let bytes = std::fs::read(&path).map_err(ExperimentError::io(&path))?;
    let index = plan.index();
    let mut logs = Vec::new();
    for (line, log) in trials_in(complete(&bytes), &path) {
        let log = log?;
        let number = index.number(&key_of(&log)).map_err(damaged(&path, line))?;
        logs.push((number, log));
    }
    logs.sort_by_key(|numbered| numbered.0);
    Ok(logs.into_iter().map(|numbered| numbered.1).collect())
}

/// Writes records to a file that does not exist yet, in either format: the other one for an experiment that wrote its own in
/// one, say, or a selection.
///
/// # Errors
/// [`ExperimentError::Exists`], or [`Io`](ExperimentError::Io) where the file cannot be written.
pub fn write_records(
    records: &[Record],
    path: impl AsRef<Path>,
    format: Format,
) -> Result<(), ExperimentError> {
    let path = path.as_ref();
    let made = OpenOptions::new().write(true).create_new(true).open(path);
    let mut file = made.map_err(|source| match source.kind() {
        std::io::ErrorKind::AlreadyExists => ExperimentError::Exists {
            path: path.to_path_buf(),
        },
        _ => ExperimentError::io(path)(source),
    })?;
    let mut text = lines::head(format);
    for record in records {
        text.extend(lines::of_record(record, format));
    }
    append(path, &mut file, &text)
}

fn read_plan(path: &Path) -> Result<Option<Plan>, ExperimentError> {
    let foreign = |why: String| ExperimentError::Foreign {
        path: path.to_path_buf(),
        why,
    };
    let text = match std::fs::read(path) {
        Ok(text) => text,
        Err(error) if error.kind() == std::io::ErrorKind::NotFound => return Ok(None),
        Err(error) => return Err(ExperimentError::io(path)(error)),
    };
    let plan: Plan = serde_json::from_slice(&text).map_err(|error| foreign(error.to_string()))?;
    if plan.is_known() {
        Ok(Some(plan))
    } else {
        Err(foreign("it is of another kind or version".to_string()))
    }
}

fn existing_plan(folder: &Path) -> Result<Plan, ExperimentError> {
    let path = folder.join(PLAN);
    read_plan(&path)?.ok_or_else(|| ExperimentError::io(&path)(std::io::ErrorKind::NotFound.into()))
}

/// Whole or not at all: a description cut short would make the folder foreign.
fn write_plan(path: &Path, plan: &Plan) -> Result<(), ExperimentError> {
    let part = path.with_extension("json.part");
    let mut text = serde_json::to_vec_pretty(plan).map_err(|error| ExperimentError::Io {
        path: path.to_path_buf(),
        source: error.into(),
    })?;
    text.push(b'\n');
    let mut file = File::create(&part).map_err(ExperimentError::io(&part))?;
    append(&part, &mut file, &text)?;
    file.sync_all().map_err(ExperimentError::io(&part))?;
    std::fs::rename(&part, path).map_err(ExperimentError::io(path))
}

fn lock(path: PathBuf) -> Result<File, ExperimentError> {
    let (path, file) = open(path)?;
    match file.try_lock() {
        Ok(()) => Ok(file),
        Err(TryLockError::WouldBlock) => Err(ExperimentError::InUse { path }),
        // A file system without locks: two processes at once are then the caller's care.
        Err(TryLockError::Error(error)) if error.kind() == std::io::ErrorKind::Unsupported => {
            Ok(file)
        }
        Err(TryLockError::Error(source)) => Err(ExperimentError::Io { path, source }),
    }
}

fn open(path: PathBuf) -> Result<(PathBuf, File), ExperimentError> {
    let file = OpenOptions::new()
        .read(true)
        .write(true)
        .create(true)
        .truncate(false)
        .open(&path)
        .map_err(ExperimentError::io(&path))?;
    Ok((path, file))
}

fn read_whole(path: &Path, file: &mut File) -> Result<Vec<u8>, ExperimentError> {
    let mut bytes = Vec::new();
    file.read_to_end(&mut bytes)
        .map_err(ExperimentError::io(path))?;
    Ok(bytes)
}

/// Drops what stands after the first `keep` bytes, and goes there.
fn cut(path: &Path, file: &mut File, bytes: &[u8], keep: usize) -> Result<(), ExperimentError> {
    if keep < bytes.len() {
        file.set_len(keep as u64)
            .map_err(ExperimentError::io(path))?;
    }
    file.seek(SeekFrom::Start(keep as u64))
        .map_err(ExperimentError::io(path))?;
    Ok(())
}

/// In one call, so that a process that is killed leaves whole lines, or one torn line at the end.
fn append(path: &Path, file: &mut File, text: &[u8]) -> Result<(), ExperimentError> {
    file.write_all(text)
        .and_then(|()| file.flush())
        .map_err(ExperimentError::io(path))
}

/// The records in the complete lines, and how many bytes those are.
fn records_in(
    bytes: &[u8],
    format: Format,
    path: &Path,
) -> Result<(usize, Vec<Record>), ExperimentError> {
    let whole = complete(bytes);
    let head = lines::head(format);
    let Some(body) = whole.strip_prefix(&head[..]) else {
        if head.starts_with(bytes) {
            return Ok((0, Vec::new()));
        }
        return Err(ExperimentError::Foreign {
            path: path.to_path_buf(),
            why: "its head line is not that of records".to_string(),
        });
    };
    let records = lines::records(body, format)
        .map_err(|(line, why)| damaged(path, line + first_line(format))(why))?;
    Ok((whole.len(), records))
}

/// The records with the numbers of their runs; each run once.
fn numbered(
    records: Vec<Record>,
    index: &Index<'_>,
    format: Format,
    path: &Path,
) -> Result<Vec<(usize, Record)>, ExperimentError> {
    let mut seen = HashSet::new();
    let mut numbered = Vec::with_capacity(records.len());
    for (line, record) in (first_line(format)..).zip(records) {
        let number = index
            .number(&Key::from(&record))
            .map_err(damaged(path, line))?;
        if !seen.insert(number) {
            return Err(damaged(path, line)(
                "its run has a record above".to_string(),
            ));
        }
        numbered.push((number, record));
    }
    Ok(numbered)
}

/// The number of the line, from 1, that holds the first record.
fn first_line(format: Format) -> u64 {
    match format {
        Format::Csv => 2,
        Format::JsonLines => 1,
    }
}

fn trials_in<'a>(
    whole: &'a [u8],
    path: &'a Path,
) -> impl Iterator<Item = (u64, Result<TrialLog, ExperimentError>)> + 'a {
    (1..)
        .zip(whole.split_inclusive(|&b| b == b'\n'))
        .map(|(line, text)| {
            let log = serde_json::from_slice(text)
                .map_err(|error| damaged(path, line)(error.to_string()));
            (line, log)
        })
}

/// How many bytes of the trials belong to runs with a record. The others stand at the end, from an interruption between the two.
fn trials_kept(
    bytes: &[u8],
    index: &Index<'_>,
    done: &HashSet<usize>,
    path: &Path,
) -> Result<usize, ExperimentError> {
    let whole = complete(bytes);
    let mut keep = 0;
    for (text, (line, log)) in whole
        .split_inclusive(|&b| b == b'\n')
        .zip(trials_in(whole, path))
    {
        let log = log?;
        let number = index.number(&key_of(&log)).map_err(damaged(path, line))?;
        if !done.contains(&number) {
            let last = keep + text.len() == whole.len();
            if !last {
                let why = "its run has no record".to_string();
                return Err(damaged(path, line)(why));
            }
            break;
        }
        keep += text.len();
    }
    Ok(keep)
}

fn key_of(log: &TrialLog) -> Key<'_> {
    Key {
        problem: &log.problem,
        n: log.n,
        contender: &log.contender,
        start: log.start,
        repetition: log.repetition,
    }
}

fn damaged(path: &Path, line: u64) -> impl FnOnce(String) -> ExperimentError {
    let path = path.to_path_buf();
    move |why| ExperimentError::Damaged { path, line, why }
}
