//! Costs over a grid of the two thresholds of a rule.

use super::{AnalysisError, CostTable, Measure, Solved, scores};
use crate::experiment::Record;
use std::collections::{HashMap, HashSet};
use std::string::String;
use std::vec::Vec;

/// A contender of a sweep: its name, and the thresholds that its rule was built with.
#[derive(Clone, Debug, PartialEq)]
pub struct Thresholds {
    /// The contender's name in the records.
    pub contender: String,
    /// The parameter of sufficient decrease.
    pub decrease: f64,
    /// The parameter of the curvature condition.
    pub curvature: f64,
}

/// What one pair of thresholds cost.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Cell {
    /// [`Score::ratio`](super::Score::ratio) among the contenders of the sweep: 1 is always the cheapest.
    pub ratio: f64,
    /// Share of instances solved, 0 to 1.
    pub solved: f64,
}

/// A grid of costs; missing pairs (such as a decrease above the curvature) are empty.
#[derive(Clone, Debug, PartialEq)]
pub struct Sweep {
    decreases: Vec<f64>,
    curvatures: Vec<f64>,
    /// Row by row, one row a decrease.
    cells: Vec<Option<Cell>>,
    instances: usize,
}

/// Why there is no grid.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum SweepError {
    /// The records cannot be analysed.
    #[error(transparent)]
    Analysis(#[from] AnalysisError),
    /// A threshold is NaN or infinite.
    #[error(
        "the thresholds of contender `{0}` are not finite: give the numbers its rule was built with"
    )]
    NotFinite(String),
    /// Two contenders have the same pair of thresholds, or one name stands twice.
    #[error(
        "contender `{0}` has a name or a pair of thresholds that another one has: a sweep needs one contender a pair"
    )]
    Twice(String),
    /// A contender has no records.
    #[error("contender `{0}` has no records: run it, or leave it out of the sweep")]
    Unknown(String),
}

/// The grid of a sweep: `contenders` says which contender stands for which pair of thresholds; records of others are passed over.
///
/// # Errors
/// [`SweepError`] if a pair or a name stands twice, a threshold is not finite, a contender has no records, or the records cannot
/// be analysed.
pub fn sweep(
    records: &[Record],
    contenders: &[Thresholds],
    measure: Measure,
    solved: Solved,
) -> Result<Sweep, SweepError> {
    let (mut names, mut pairs) = (HashSet::new(), HashSet::new());
    for one in contenders {
        if !(one.decrease.is_finite() && one.curvature.is_finite()) {
            return Err(SweepError::NotFinite(one.contender.clone()));
        }
        // 0 and -0 are one threshold: adding 0 makes them so.
        let pair = (
            (one.decrease + 0.0).to_bits(),
            (one.curvature + 0.0).to_bits(),
        );
        if !(names.insert(one.contender.as_str()) && pairs.insert(pair)) {
            return Err(SweepError::Twice(one.contender.clone()));
        }
    }
    let ours: Vec<&Record> = records
        .iter()
        .filter(|record| names.contains(record.contender.as_str()))
        .collect();
    let present: HashSet<&str> = ours
        .iter()
        .map(|record| record.contender.as_str())
        .collect();
    if let Some(absent) = contenders
        .iter()
        .find(|one| !present.contains(one.contender.as_str()))
    {
        return Err(SweepError::Unknown(absent.contender.clone()));
    }
    let table = CostTable::of(&ours, measure, solved)?;
    let instances = table.instances().len();
    let by_name: HashMap<&str, Cell> = table
        .contenders()
        .iter()
        .zip(scores(&table))
        .map(|(name, score)| {
            let solved = score.solved as f64 / instances as f64;
            (
                name.as_str(),
                Cell {
                    ratio: score.ratio,
                    solved,
                },
            )
        })
        .collect();
    let decreases = axis(contenders.iter().map(|one| one.decrease));
    let curvatures = axis(contenders.iter().map(|one| one.curvature));
    let mut cells = std::vec![None; decreases.len() * curvatures.len()];
    for one in contenders {
        let row = decreases.partition_point(|&d| d < one.decrease);
        let column = curvatures.partition_point(|&c| c < one.curvature);
        cells[row * curvatures.len() + column] = by_name.get(one.contender.as_str()).copied();
    }
    Ok(Sweep {
        decreases,
        curvatures,
        cells,
        instances,
    })
}

fn axis(values: impl Iterator<Item = f64>) -> Vec<f64> {
    let mut values: Vec<f64> = values.map(|v| v + 0.0).collect();
    values.sort_unstable_by(f64::total_cmp);
    values.dedup();
    values
}

impl Sweep {
    /// The parameters of sufficient decrease, ascending: one a row.
    pub fn decreases(&self) -> &[f64] {
        &self.decreases
    }

    /// The parameters of the curvature condition, ascending: one a column.
    pub fn curvatures(&self) -> &[f64] {
        &self.curvatures
    }

    /// The cell of a row and a column; `None` where no contender has this pair.
    pub fn cell(&self, row: usize, column: usize) -> Option<Cell> {
        let inside = row < self.decreases.len() && column < self.curvatures.len();
        inside.then(|| self.cells[row * self.curvatures.len() + column])?
    }

    /// Number of instances behind each cell.
    pub fn instances(&self) -> usize {
        self.instances
    }

    /// Row and column of the least ratio; the first of equals.
    pub fn cheapest(&self) -> Option<(usize, usize)> {
        let filled = self
            .cells
            .iter()
            .enumerate()
            .filter_map(|(at, cell)| Some((at, (*cell)?)));
        let (at, _) = filled.reduce(|a, b| if b.1.ratio < a.1.ratio { b } else { a })?;
        Some((at / self.curvatures.len(), at % self.curvatures.len()))
    }
}
