//! The table of runs: data for the script, within a budget.

use super::page::{counted, grouped};
use crate::experiment::Record;
use serde_json::{Value, json};
use std::collections::{HashMap, HashSet};
use std::fmt::Write;
use std::string::String;
use std::vec::Vec;

/// The runs that are shown, and the section around them.
pub(super) struct Listed {
    /// For the script; safe between script tags.
    pub(super) json: String,
    pub(super) shown: usize,
    all: usize,
}

/// The text of the rows, with the names, does not pass this by more than a row.
const MOST_BYTES: usize = 8_000_000;

/// The runs with trials (`drawn`, by number of the record) first, then those that did not succeed, then the others.
pub(super) fn listed(records: &[Record], drawn: &[usize], most: usize) -> Listed {
    let with_trials: HashSet<usize> = drawn.iter().copied().collect();
    let rest = |success: bool| {
        let with_trials = &with_trials;
        records
            .iter()
            .enumerate()
            .filter(move |(number, record)| {
                record.ending.is_success() == success && !with_trials.contains(number)
            })
            .map(|(number, _)| number)
    };
    let order = drawn.iter().copied().chain(rest(false)).chain(rest(true));
    let (mut problems, mut contenders, mut notes) =
        (Words::default(), Words::default(), Words::default());
    let mut rows = String::from("[");
    let mut shown = 0;
    for number in order.take(most) {
        let r = &records[number];
        let trials = if with_trials.contains(&number) {
            json!(number)
        } else {
            Value::Null
        };
        let row = json!([
            problems.number(&r.problem),
            r.n,
            contenders.number(&r.contender),
            r.start,
            r.repetition,
            notes.number(r.ending.word()),
            notes.number(&r.note),
            r.iterations,
            r.values,
            r.gradients,
            r.both,
            r.too_long,
            r.too_short,
            r.outside,
            rounded(r.start_value),
            rounded(r.value),
            rounded(r.gradient_max),
            r.correct_digits.map_or(Value::Null, rounded),
            rounded(r.seconds),
            trials,
        ]);
        if rows.len() + problems.bytes + contenders.bytes + notes.bytes > MOST_BYTES {
            break;
        }
        if shown > 0 {
            rows.push_str(",\n");
        }
        let _ = write!(rows, "{row}");
        shown += 1;
    }
    rows.push(']');
    let json = std::format!(
        "{{\"problems\":{},\n\"contenders\":{},\n\"notes\":{},\n\"runs\":{rows}}}",
        json!(problems.words),
        json!(contenders.words),
        json!(notes.words)
    );
    Listed {
        // In JSON a `<` stands in strings only, where it may be written as an escape.
        json: json.replace('<', "\\u003c"),
        shown,
        all: records.len(),
    }
}

impl Listed {
    pub(super) fn section(&self, out: &mut String) {
        let left = match self.all - self.shown {
            0 => String::new(),
            more => std::format!(
                " {} left out to keep the file small; they are in every figure above.",
                counted(more, "run")
            ),
        };
        let _ = write!(
            out,
            "<section id=\"runs\" aria-labelledby=\"h-runs\">\n<h2 id=\"h-runs\">Runs</h2>\n\
             <p>{} of {}: those with a trial log first, then those that did not succeed.{left}</p>\n\
             <noscript><p>The table of runs needs scripts; everything above does without.</p></noscript>\n\
             <div id=\"tools\" hidden><label>Show only runs with <input id=\"filter\" type=\"search\" autocomplete=\"off\"></label> \
             <span id=\"count\" class=\"muted\"></span></div>\n\
             <div class=\"wide\" role=\"group\" tabindex=\"0\" aria-label=\"Runs\"><table id=\"run-table\"><caption>Runs</caption>\
             <thead></thead><tbody></tbody></table></div>\n\
             <div id=\"pages\" hidden><button type=\"button\" id=\"before\">Previous runs</button> <button type=\"button\" id=\"after\">Next runs</button></div>\n\
             <div id=\"one\" hidden></div>\n</section>\n",
            grouped(self.shown),
            counted(self.all, "run")
        );
    }
}

/// Words that stand once, and their numbers.
#[derive(Default)]
struct Words<'a> {
    numbers: HashMap<&'a str, usize>,
    words: Vec<&'a str>,
    bytes: usize,
}

impl<'a> Words<'a> {
    fn number(&mut self, word: &'a str) -> usize {
        *self.numbers.entry(word).or_insert_with(|| {
            self.words.push(word);
            self.bytes += word.len() + 8;
            self.words.len() - 1
        })
    }
}

/// Six digits, which is what the page shows; what JSON cannot say, as a word.
fn rounded(x: f64) -> Value {
    if x.is_finite() {
        json!(std::format!("{x:.5e}").parse().unwrap_or(x))
    } else if x.is_nan() {
        Value::Null
    } else {
        json!(if x > 0.0 { "inf" } else { "-inf" })
    }
}
