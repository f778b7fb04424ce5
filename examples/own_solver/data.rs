//! The 27 data sets, compiled into the program and read from their text form (tests/data/nist_strd/README.md
//! describes it).

use std::error::Error;
use std::fmt;

/// One regression problem with its published answer.
#[derive(Debug, Clone)]
pub(crate) struct DataSet {
    pub(crate) name: String,
    /// NIST's own grade of difficulty: lower, average or higher.
    pub(crate) level: String,
    /// The model as NIST writes it.
    pub(crate) formula: String,
    /// The two published starts: far from the solution, and near it.
    pub(crate) starts: [Start; 2],
    /// Certified parameters, 11 digits.
    pub(crate) certified: Vec<f64>,
    /// Certified standard deviations of the parameters.
    pub(crate) deviations: Vec<f64>,
    /// Certified residual sum of squares, 11 digits.
    pub(crate) certified_rss: f64,
    /// What the model predicts; for Nelson the logarithm of the measured response.
    pub(crate) responses: Vec<f64>,
    /// One list of predictors for each observation.
    pub(crate) predictors: Vec<Vec<f64>>,
}

/// Where a run starts.
#[derive(Debug, Clone)]
pub(crate) struct Start {
    pub(crate) parameters: Vec<f64>,
    /// Residual sum of squares there, calculated with 60 digits.
    pub(crate) rss: f64,
}

/// A data file that does not hold what it should.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(crate) struct BadData {
    what: String,
}

impl fmt::Display for BadData {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "a data file cannot be read: {}; restore tests/data/nist_strd from the package",
            self.what
        )
    }
}

impl Error for BadData {}

macro_rules! texts {
    ($($file:literal)*) => { [$(include_str!(concat!("../../tests/data/nist_strd/", $file, ".txt"))),*] };
}

/// By level and name, as in NIST's list.
const TEXTS: [&str; 27] = texts!(
    "chwirut1" "chwirut2" "danwood" "gauss1" "gauss2" "lanczos3" "misra1a" "misra1b"
    "enso" "gauss3" "hahn1" "kirby2" "lanczos1" "lanczos2" "mgh17" "misra1c" "misra1d" "nelson" "roszman1"
    "bennett5" "boxbod" "eckerle4" "mgh09" "mgh10" "rat42" "rat43" "thurber"
);

/// All data sets, the easier levels first.
pub(crate) fn all() -> Result<Vec<DataSet>, BadData> {
    TEXTS.iter().map(|text| read(text)).collect()
}

fn read(text: &str) -> Result<DataSet, BadData> {
    let mut lines = text.lines().filter(|line| !line.starts_with('#'));
    let mut field = |word: &str| -> Result<String, BadData> {
        let line = lines.next().unwrap_or_default();
        match line.split_once(' ') {
            Some((first, rest)) if first == word => Ok(rest.to_owned()),
            _ => Err(BadData {
                what: format!("`{word}` is expected where `{line}` stands"),
            }),
        }
    };
    let name = field("name")?;
    let level = field("level")?;
    let formula = field("model")?;
    let first = numbers(&field("start1")?)?;
    let second = numbers(&field("start2")?)?;
    let certified = numbers(&field("certified")?)?;
    let deviations = numbers(&field("deviations")?)?;
    let certified_rss = number(&field("certified_rss")?)?;
    let rss_at_first = number(&field("rss_at_start1")?)?;
    let rss_at_second = number(&field("rss_at_start2")?)?;
    let columns = field("observations")?;

    let mut responses = Vec::new();
    let mut predictors = Vec::new();
    for line in lines {
        let row = numbers(line)?;
        if row.len() != columns.split(' ').count() {
            return Err(BadData {
                what: format!("{name}: `{line}` does not hold the columns `{columns}`"),
            });
        }
        responses.push(if formula.starts_with("log(y)") {
            row[0].ln()
        } else {
            row[0]
        });
        predictors.push(row[1..].to_vec());
    }
    let count = certified.len();
    if [first.len(), second.len(), deviations.len()] != [count; 3] || responses.len() <= count {
        return Err(BadData {
            what: format!("{name}: the numbers of parameters or observations do not agree"),
        });
    }
    Ok(DataSet {
        name,
        level,
        formula,
        starts: [
            Start {
                parameters: first,
                rss: rss_at_first,
            },
            Start {
                parameters: second,
                rss: rss_at_second,
            },
        ],
        certified,
        deviations,
        certified_rss,
        responses,
        predictors,
    })
}

fn numbers(text: &str) -> Result<Vec<f64>, BadData> {
    text.split_whitespace().map(number).collect()
}

fn number(text: &str) -> Result<f64, BadData> {
    text.parse().map_err(|_| BadData {
        what: format!("`{text}` is not a number"),
    })
}
