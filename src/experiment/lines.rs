//! Records as lines of text.

use std::format;
use std::string::{String, ToString};
use std::vec::Vec;

use super::record::Record;
use super::store::Format;

/// The bytes up to and with the last line break.
pub(super) fn complete(bytes: &[u8]) -> &[u8] {
    let end = bytes.iter().rposition(|&b| b == b'\n').map_or(0, |i| i + 1);
    &bytes[..end]
}

/// What stands before the first record.
pub(super) fn head(format: Format) -> Vec<u8> {
    match format {
        Format::JsonLines => Vec::new(),
        Format::Csv => {
            let text = csv_text(&Record::new("", 0, ""), true);
            let end = text.iter().position(|&b| b == b'\n').map_or(0, |i| i + 1);
            text[..end].to_vec()
        }
    }
}

/// A record as one line, with its line break.
pub(super) fn of_record(record: &Record, format: Format) -> Vec<u8> {
    match format {
        Format::Csv => csv_text(record, false),
        Format::JsonLines => json(record),
    }
}

/// Anything as one line of JSON, with its line break.
pub(super) fn json(what: &impl serde::Serialize) -> Vec<u8> {
    let mut line = serde_json::to_vec(what).expect("plain fields and string keys go into JSON");
    line.push(b'\n');
    line
}

fn csv_text(record: &Record, head: bool) -> Vec<u8> {
    let mut writer = csv::WriterBuilder::new()
        .has_headers(head)
        .from_writer(Vec::new());
    writer
        .serialize(record)
        .expect("a flat struct goes into a row of memory");
    writer.into_inner().expect("memory does not refuse a flush")
}

/// The records of complete lines, or the first line that is none, counted from 0, with what is wrong with it.
pub(super) fn records(body: &[u8], format: Format) -> Result<Vec<Record>, (u64, String)> {
    let mut records = Vec::new();
    match format {
        Format::JsonLines => {
            for (line, text) in (0..).zip(body.split_inclusive(|&b| b == b'\n')) {
                let record =
                    serde_json::from_slice(text).map_err(|error| (line, error.to_string()))?;
                records.push(record);
            }
        }
        Format::Csv => {
            let mut reader = csv::ReaderBuilder::new()
                .has_headers(false)
                .from_reader(body);
            for (line, record) in (0..).zip(reader.deserialize()) {
                let record: Record = record.map_err(|error| (line, error.to_string()))?;
                records.push(record);
            }
            // A quotation mark gone astray joins lines, and empty lines are passed over.
            let written = body.iter().filter(|&&b| b == b'\n').count();
            if written != records.len() {
                let why = format!("{written} lines hold {} records", records.len());
                return Err((0, why));
            }
        }
    }
    Ok(records)
}
