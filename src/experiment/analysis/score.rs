//! One number for each contender.

use super::CostTable;
use std::vec::Vec;

/// A ratio above this counts as this, and so does an instance that was not solved: so that one hopeless instance weighs no
/// more than a few dear ones. Our own convention.
pub const CAP: f64 = 10.0;

/// How a contender did over all instances.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Score {
    /// Geometric mean of `min(cost / cheapest contender's cost, CAP)` over the instances that somebody solved: from 1,
    /// always the cheapest, to [`CAP`]. 1 where nobody solved anything.
    pub ratio: f64,
    /// Number of instances that it solved.
    pub solved: usize,
    /// Number of instances on which nobody was cheaper.
    pub cheapest: usize,
}

/// The score of each contender, in the order of the table.
pub fn scores(table: &CostTable) -> Vec<Score> {
    let mut scores =
        std::vec![Score { ratio: 0.0, solved: 0, cheapest: 0 }; table.contenders().len()];
    let mut counted = 0_usize;
    for row in table.rows() {
        let least = row.iter().copied().fold(f64::INFINITY, f64::min);
        if !least.is_finite() {
            continue;
        }
        counted += 1;
        for (score, &cost) in scores.iter_mut().zip(row) {
            score.ratio += (cost / least).min(CAP).ln();
            score.solved += usize::from(cost.is_finite());
            score.cheapest += usize::from(cost <= least);
        }
    }
    for score in &mut scores {
        score.ratio = (score.ratio / counted.max(1) as f64).exp();
    }
    scores
}
